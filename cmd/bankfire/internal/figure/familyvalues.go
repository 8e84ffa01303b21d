package figure

import "math"

// drawValues draws a panel for each open value.
func (p *familyPage) drawValues() {
	y := p.misfits()
	for i, b := range p.values {
		p.value(b, &p.f.Values[i], axis{y, b.y1, b.y0}, i%p.f.across() == 0)
	}
}

// mostMisfitDecades is how far the axis of chi-square reaches above the lowest, in powers of
// ten; members above lie at its upper edge.
const mostMisfitDecades = 3.0

// misfits is the span of log10 of chi-square in all panels.
func (p *familyPage) misfits() span {
	s := newSpan()
	for i := range p.values {
		for _, d := range p.f.Values[i].Dots {
			if d.Misfit > 0 {
				s.take(math.Log10(d.Misfit))
			}
		}
	}
	if s.empty() {
		return span{0, 1}
	}
	s.hi = min(s.hi, s.lo+mostMisfitDecades)
	pad := max(0.05*(s.hi-s.lo), 0.05)
	return span{s.lo - pad, s.hi + pad}
}

// value draws the panel of one value.
func (p *familyPage) value(b box, v *Value, y axis, first bool) {
	at := func(x float64) float64 {
		if v.Log {
			return math.Log10(x)
		}
		return x
	}
	s := newSpan()
	s.take(at(v.Lo), at(v.Hi))
	for _, d := range v.Dots {
		s.take(at(d.At))
	}
	x := axis{s.padded(0.03), b.x0, b.x1}
	ticks, power := p.valueTicks(v, x.span)
	p.bottom(b, x, ticks, p.d.fonts.cut(inUnit(v.Name, v.unit(), power), hand{size: textSize}, b.w()+valueGap/2))
	title := ""
	if first {
		title = "chi-square"
	}
	p.side(b, y, powers(y.span), title)
	for _, kept := range []bool{false, true} {
		for _, d := range v.Dots {
			if d.Reproduces == kept && d.Misfit > 0 && usable(d.Misfit) && usable(at(d.At)) {
				p.dot(point{x.at(at(d.At)), y.at(min(math.Log10(d.Misfit), y.hi))}, kept)
			}
		}
	}
}

// unit is that of the axis: labels in years name theirs themselves.
func (v *Value) unit() string {
	if v.Log && v.Years {
		return ""
	}
	return v.Unit
}

// valueTicks are those of the axis of a value.
func (p *familyPage) valueTicks(v *Value, s span) ([]tick, int) {
	switch {
	case v.Log && v.Years:
		return decadeTicks(s, 4), 0
	case v.Log:
		return powers(s), 0
	}
	return roundTicks(s, 4)
}

// powers chooses ticks for a span of logarithms: powers of ten, and twos and fives
// between them where there are few.
func powers(s span) []tick {
	parts := []float64{1}
	if s.hi-s.lo < 2 {
		parts = []float64{1, 2, 5}
	}
	var ticks []tick
	for k := int(math.Floor(s.lo)); k <= int(math.Ceil(s.hi)); k++ {
		for _, m := range parts {
			if v := float64(k) + math.Log10(m); v >= s.lo && v <= s.hi {
				ticks = append(ticks, tick{v, powerLabel(m, k)})
			}
		}
	}
	return ticks
}

// powerLabel prints m times 10^k.
func powerLabel(m float64, k int) string {
	switch {
	case k >= 0 && k <= 4:
		return number(m*math.Pow10(k), 0)
	case k < 0 && k >= -3:
		return number(m*math.Pow10(k), -k)
	case m == 1:
		return powerOfTen(k)
	}
	return number(m, 0) + " " + powerOfTen(k)
}
