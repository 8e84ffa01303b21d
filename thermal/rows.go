package thermal

import (
	"fmt"
	"math"
	"slices"
	"sort"
)

// Rows is a table of temperature against time, linear between its rows. Two rows of equal time are a jump. Time ascends
// from 0 at the start of the leg.
type Rows struct {
	Time []float64 // s from the start of the leg
	Temp []float64 // K, as many
}

// TableFrom is the table through the given times (s) and temperatures (K), which it copies. With beforeEruption false
// times run forwards and the first row is the start of the leg, whatever its time. With beforeEruption true they count
// down to the eruption and may be written from the oldest row to the youngest or the other way round.
//
// The error is an *InputError whose Line is the row, from 1, and whose Value is the time or temperature at fault.
// TableFrom panics if the slices differ in length.
func TableFrom(times, temps []float64, beforeEruption bool) (*Rows, error) {
	if len(times) != len(temps) {
		panic(fmt.Sprintf("thermal: %d times, %d temperatures", len(times), len(temps)))
	}
	if len(times) < 2 {
		return nil, &InputError{Problem: fmt.Sprintf("%d rows in a table of temperature against time", len(times)), Remedy: "want at least 2"}
	}
	if p := checkOrder(times, beforeEruption); p != nil {
		return nil, p
	}
	r := &Rows{Time: slices.Clone(times), Temp: slices.Clone(temps)}
	if beforeEruption && times[0] < times[len(times)-1] {
		slices.Reverse(r.Time)
		slices.Reverse(r.Temp)
	}
	first := r.Time[0]
	for i, t := range r.Time {
		r.Time[i] = math.Abs(t - first)
	}
	if p := r.check(0); p != nil {
		return nil, p
	}
	return r, nil
}

// checkOrder is nil, or the first row whose time does not follow the one above it.
func checkOrder(times []float64, beforeEruption bool) *InputError {
	falls := beforeEruption && times[0] > times[len(times)-1]
	for i, t := range times {
		if p := checkDuration(math.Abs(t)); p != nil {
			return &InputError{Line: i + 1, Value: timeText(t), Problem: p.Problem, Remedy: p.Remedy}
		}
		if beforeEruption && t < 0 {
			return &InputError{Line: i + 1, Value: timeText(t), Problem: "negative time before eruption",
				Remedy: "want times that count down to 0 at the eruption"}
		}
		if i == 0 || t == times[i-1] || falls == (t < times[i-1]) {
			continue
		}
		e := &InputError{Line: i + 1, Value: timeText(t), Problem: "earlier than " + timeText(times[i-1]) + " in the row above",
			Remedy: `want times that ascend, or counts = "before eruption"`}
		if beforeEruption {
			e.Problem = "turns back after " + timeText(times[i-1]) + " in the row above"
			e.Remedy = "want times that only fall or only rise from row to row"
		}
		return e
	}
	return nil
}

// check is nil, or what is wrong with the table or with a leg of the given duration (0 = all of it) along it.
func (r *Rows) check(until float64) *InputError {
	switch {
	case r == nil || len(r.Time) < 2 || len(r.Time) != len(r.Temp):
		return &InputError{Problem: "table without two rows of time and temperature", Remedy: "want at least 2 rows"}
	case r.Time[0] != 0:
		return &InputError{Value: timeText(r.Time[0]), Problem: "first time of a table that is not 0",
			Remedy: "want times from the start of the leg"}
	case until > r.end():
		return &InputError{Value: timeText(until), Problem: "longer than the table, which ends at " + timeText(r.end()),
			Remedy: "leave the duration out or shorten it"}
	case r.end() == 0:
		return &InputError{Problem: "all rows of the table have one time", Remedy: "want times that ascend"}
	}
	for i, t := range r.Time {
		if p := firstProblem(checkTemperature(r.Temp[i]), checkDuration(t)); p != nil {
			p.Line = i + 1
			return p
		}
		if i > 0 && t < r.Time[i-1] {
			return &InputError{Line: i + 1, Value: timeText(t), Problem: "earlier than the row above", Remedy: "want times that ascend"}
		}
	}
	return nil
}

// end is the time of the last row, s.
func (r *Rows) end() float64 { return r.Time[len(r.Time)-1] }

// after is the temperature at t, K, after a jump there.
func (r *Rows) after(t float64) float64 {
	return r.within(r.interval(t), t)
}

// before is the temperature as t is approached from earlier times, K; at the start that of the first row.
func (r *Rows) before(t float64) float64 {
	i := sort.SearchFloat64s(r.Time, t) // first row at t or later
	if i == 0 {
		return r.Temp[0]
	}
	return r.within(i-1, t)
}

// interval is the last row with Time <= t that is not the last of the table.
func (r *Rows) interval(t float64) int {
	lo, hi := 0, len(r.Time)-1
	for hi-lo > 1 {
		if mid := (lo + hi) / 2; r.Time[mid] <= t {
			lo = mid
		} else {
			hi = mid
		}
	}
	return lo
}

// within is the temperature at t between rows i and i+1, K; theirs at and beyond them.
func (r *Rows) within(i int, t float64) float64 {
	t0, t1 := r.Time[i], r.Time[i+1]
	switch {
	case t >= t1:
		return r.Temp[i+1]
	case t <= t0:
		return r.Temp[i]
	}
	return r.Temp[i] + (r.Temp[i+1]-r.Temp[i])*((t-t0)/(t1-t0))
}

// span is the lowest and the highest temperature until t, K.
func (r *Rows) span(until float64) (lo, hi float64) {
	lo, hi = math.Inf(1), math.Inf(-1)
	for i, t := range r.Time {
		temp := r.Temp[i]
		if t > until {
			temp = r.before(until)
		}
		lo, hi = min(lo, temp), max(hi, temp)
		if t > until {
			break
		}
	}
	return lo, hi
}

// coarseBy is how far the integral along the straight lines between rows may be from that along a smooth curve through
// them. The shift factors that a judgement rests on are stated to 1 %.
const coarseBy = 0.01

// Coarse tells whether the rows are too far apart for the integral of exp(-e/T), e = E/R in K. A table is read as straight
// lines between its rows; where it samples a curve, these cut the corners. The criterion: the same rows are joined by the
// monotone cubic of Fritsch and Butland (1984, SIAM J. Sci. Stat. Comput. 5, 300-304), which overshoots nowhere and keeps
// jumps, and the integral along it is compared with that along the lines, interval by interval. ratio is
//
//	1 + sum |line - curve| / sum curve,  or 1 - the same where the lines give less on the whole:
//
// 1.26 says that the lines may give 26 % too much. The table is coarse if ratio is more than 1 % from 1, and step is then
// the interval, from row step to row step+1 (from 0), in which the two differ most. Both are estimates from the rows
// alone: what happened between them and left no trace is not seen, and corners that are meant are counted as if they were
// not.
func (r *Rows) Coarse(e float64) (step int, ratio float64, coarse bool) {
	var over, under, curves scaled // over: where lines give more than curves
	most := math.Inf(-1)
	for i := range len(r.Time) - 1 {
		if r.Time[i] == r.Time[i+1] {
			continue
		}
		line, curve := rampIntegral(e, 0, r.Temp[i], r.Temp[i+1], r.Time[i+1]-r.Time[i]), r.curveIntegral(e, i)
		curves.add(curve)
		off := scaled{line.m*math.Exp(line.ln-curve.ln) - curve.m, curve.ln}
		if size := math.Log(math.Abs(off.m)) + off.ln; size > most {
			step, most = i, size
		}
		if off.m > 0 {
			over.add(off)
		} else {
			under.add(off.times(-1))
		}
	}
	sign := 1.0
	if over.log() < under.log() {
		sign = -1
	}
	over.add(under)
	ratio = 1 + sign*math.Exp(over.log()-curves.log())
	return step, ratio, !(math.Abs(ratio-1) <= coarseBy)
}

// curveIntegral is the integral of exp(-e/T) along the monotone cubic between rows i and i+1.
func (r *Rows) curveIntegral(e float64, i int) scaled {
	dt, rise := r.Time[i+1]-r.Time[i], r.Temp[i+1]-r.Temp[i]
	s0, s1 := r.slope(i, i)*dt, r.slope(i+1, i)*dt
	ln := max(-e/r.Temp[i], -e/r.Temp[i+1])
	factor := func(x float64) float64 { // x from 0 to 1 between the rows
		temp := r.Temp[i] + x*x*(3-2*x)*rise + x*(1-x)*((1-x)*s0-x*s1)
		return math.Exp(-e/temp - ln)
	}
	panels := math.Ceil(min(100, 1+math.Abs(e/r.Temp[i]-e/r.Temp[i+1])/2))
	sum := 0.0
	for p := 0.5; p < panels; p++ {
		for _, n := range gauss8 {
			sum += n.w * (factor((p-n.x)/panels) + factor((p+n.x)/panels))
		}
	}
	return scaled{sum / panels * dt, ln}
}

// secant is the slope between rows i and i+1, K/s, and their distance, s; ok is false outside the table and at jumps.
func (r *Rows) secant(i int) (slope, width float64, ok bool) {
	if i < 0 || i+1 >= len(r.Time) || r.Time[i] == r.Time[i+1] {
		return 0, 0, false
	}
	width = r.Time[i+1] - r.Time[i]
	return (r.Temp[i+1] - r.Temp[i]) / width, width, true
}

// slope is that of the monotone cubic at row j, an end of the interval i, K/s: inside, the weighted harmonic mean of the
// secants on both sides, 0 at an extreme; at the ends of the table and at jumps the three-point formula, limited so that
// the cubic stays monotone.
func (r *Rows) slope(j, i int) float64 {
	here, width, _ := r.secant(i)
	other, otherWidth, inner := r.secant(2*j - 1 - i) // the interval on the other side of row j
	if inner {
		if here*other <= 0 {
			return 0
		}
		a, b := 2*width+otherWidth, width+2*otherWidth
		return (a + b) / (a/other + b/here)
	}
	next, nextWidth, ok := r.secant(3*i + 1 - 2*j) // the interval beyond the one of i, seen from j
	if !ok {
		return here
	}
	end := ((2*width+nextWidth)*here - width*next) / (width + nextWidth)
	switch {
	case end*here <= 0:
		return 0
	case here*next <= 0 && math.Abs(end) > 3*math.Abs(here):
		return 3 * here
	}
	return end
}
