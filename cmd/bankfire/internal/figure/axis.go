package figure

import (
	"math"
	"strconv"
	"strings"
)

// span is a range of numbers; the zero value is no span, use newSpan.
type span struct{ lo, hi float64 }

// newSpan is the empty span.
func newSpan() span { return span{math.Inf(1), math.Inf(-1)} }

func (s span) empty() bool { return !(s.lo <= s.hi) }

// take widens the span to hold x; what cannot be drawn is left out.
func (s *span) take(xs ...float64) {
	for _, x := range xs {
		if usable(x) {
			s.lo, s.hi = min(s.lo, x), max(s.hi, x)
		}
	}
}

// narrowest is the least width of an axis relative to its values: below it tick labels
// would need more digits than a reader can compare.
const narrowest = 1e-4

// padded is the span with a share of its width added at both ends. An empty span
// becomes 0..1, one without width gets some.
func (s span) padded(share float64) span {
	if s.empty() {
		return span{0, 1}
	}
	size := max(math.Abs(s.lo), math.Abs(s.hi))
	half := share * (s.hi - s.lo)
	switch {
	case size < 1/largest:
		half = 1 // all zero, or so small that ticks could not be told from zero
	case s.hi-s.lo <= narrowest*size:
		half = 0.1 * size
	}
	return span{s.lo - half, s.hi + half}
}

// axis maps values to the page: lo to from, hi to to, linearly. A logarithmic axis is
// one of the logarithms.
type axis struct {
	span
	from, to float64
}

func (a axis) at(v float64) float64 {
	return a.from + (a.to-a.from)*((v-a.lo)/(a.hi-a.lo))
}

// tick is a mark on an axis; a minor one has no label.
type tick struct {
	at    float64
	label string
}

// roundTicks chooses at most a number of ticks at multiples of 1, 2 or 5 times a power
// of ten. Very large and very small numbers are divided by 10^power, which belongs in the
// title of the axis; power is 0 otherwise.
func roundTicks(s span, most int) (ticks []tick, power int) {
	step, exponent := roundStep((s.hi - s.lo) / float64(most))
	first, last := math.Ceil(s.lo/step-1e-9), math.Floor(s.hi/step+1e-9)
	top := int(math.Floor(math.Log10(max(math.Abs(s.lo), math.Abs(s.hi)))))
	if top >= 5 || top <= -4 {
		power = top
	}
	decimals := max(0, power-exponent)
	for k := first; k <= last && len(ticks) < most+2; k++ {
		v := k * step
		ticks = append(ticks, tick{v, number(v/math.Pow10(power), decimals)})
	}
	return ticks, power
}

// roundStep is the least of 1, 2 and 5 times a power of ten that is not below the least
// step wanted, with that power.
func roundStep(least float64) (step float64, exponent int) {
	exponent = int(math.Floor(math.Log10(least)))
	unit := math.Pow10(exponent)
	for _, m := range []float64{1, 2, 5} {
		if m*unit >= least*(1-1e-9) {
			return m * unit, exponent
		}
	}
	return 10 * unit, exponent + 1
}

// number prints v with a true minus sign.
func number(v float64, decimals int) string {
	s := strconv.FormatFloat(v, 'f', decimals, 64)
	if strings.Trim(s, "-0.") == "" {
		s = strings.TrimPrefix(s, "-") // a zero has no sign
	}
	return strings.Replace(s, "-", "−", 1)
}

// powerOfTen prints 10 to a power with raised digits.
func powerOfTen(power int) string {
	raised := []rune("⁰¹²³⁴⁵⁶⁷⁸⁹")
	var b strings.Builder
	b.WriteString("10")
	for _, r := range strconv.Itoa(power) {
		if r == '-' {
			b.WriteRune('⁻')
		} else {
			b.WriteRune(raised[r-'0'])
		}
	}
	return b.String()
}

// decadeTicks chooses ticks for a span of log10 of years: labelled ones at powers of ten,
// every one or every few so that at most a number of labels stand, and minor ones between
// labelled neighbours (at 2 to 9 times when every power is labelled).
func decadeTicks(s span, most int) []tick {
	first, last := int(math.Ceil(s.lo-1e-9)), int(math.Floor(s.hi+1e-9))
	every := 1
	for (last-first)/every+1 > most {
		every++
	}
	var ticks []tick
	for k := first - 1; k <= last; k++ {
		if k >= first {
			label := ""
			if (k-first)%every == 0 {
				label = years(k)
			}
			ticks = append(ticks, tick{float64(k), label})
		}
		if every > 1 {
			continue
		}
		for m := 2; m <= 9; m++ {
			if v := float64(k) + math.Log10(float64(m)); v >= s.lo && v <= s.hi {
				ticks = append(ticks, tick{v, ""})
			}
		}
	}
	return ticks
}

// years prints 10^k years in the words of the trade.
func years(k int) string {
	switch {
	case k < -3 || k > 11:
		return powerOfTen(k) + " yr"
	case k < 0:
		return number(math.Pow10(k), -k) + " yr"
	}
	unit := []string{"yr", "kyr", "Myr", "Gyr"}[k/3]
	return number(math.Pow10(k%3), 0) + " " + unit
}
