package figure

import (
	"math"

	"bankfire/thermal"
)

// Reach of the time axis in powers of ten below the longest time: down to a billionth at
// most (ten days in a million years is 2.7e-8) unless a whole path is shorter, and never less
// than one and a half.
const (
	mostDecades  = 9.0
	leastDecades = 1.5
)

// labelWidth is what a label of the time axis needs, with a gap, in printer's points.
const labelWidth = 25.0

// durations draws the duration curves: temperature upwards, years to the right on a
// logarithmic axis, thresholds as thin level lines.
func (p *page) durations() {
	temps := p.tempSpan()
	x := axis{p.timeSpan(), p.right.x0, p.right.x1}
	y := axis{temps.padded(0.06), p.right.y1, p.right.y0}
	if !p.anyDuration() {
		p.vacant(p.right, "no duration curves")
	} else {
		p.bottom(p.right, x, decadeTicks(x.span, int(p.right.w()/labelWidth)), "time spent above the temperature")
	}
	if temps.empty() {
		return
	}
	yt, yp := roundTicks(y.span, 7)
	p.side(p.right, y, yt, inUnit("temperature", "°C", yp))
	c := &crowd{bounds: p.right.inset(1)}
	var curves [][]point
	for i := range p.f.Paths {
		curves = append(curves, durationCurve(&p.f.Paths[i], x, y))
	}
	c.add(p.right, curves...)
	p.thresholds(c, y)
	p.curves(p.right, curves)
	p.tags(c)
}

func (p *page) anyDuration() bool {
	for i := range p.f.Paths {
		if p.f.Paths[i].lasting() {
			return true
		}
	}
	return false
}

// celsius turns kelvin into what the page shows.
func celsius(kelvin float64) float64 { return kelvin - thermal.ZeroCelsius }

// logYears is log10 of a time in years, minus infinity for none.
func logYears(seconds float64) float64 { return math.Log10(max(0, seconds) / thermal.Year) }

// timeSpan is the span of the time axis, log10 of years.
func (p *page) timeSpan() span {
	all := newSpan()
	shortest := math.Inf(1) // longest time of the shortest path
	for i := range p.f.Paths {
		one := newSpan()
		for _, q := range p.f.Paths[i].Duration {
			if lasting(q) {
				one.take(logYears(q.Time))
			}
		}
		if !one.empty() {
			all.take(one.lo, one.hi)
			shortest = min(shortest, one.hi)
		}
	}
	if all.empty() {
		return span{-1, 3}
	}
	all.lo = max(all.lo, min(all.hi-mostDecades, shortest-1))
	all.lo = min(all.lo, all.hi-leastDecades)
	return span{all.lo - 0.1, all.hi + 0.2}
}

// tempSpan is the span of the temperatures where curves bend and of the thresholds, C.
func (p *page) tempSpan() span {
	s := newSpan()
	for i := range p.f.Paths {
		for _, q := range bend(p.f.Paths[i].Duration) {
			if usable(q.Temp) {
				s.take(celsius(q.Temp))
			}
		}
	}
	for _, t := range p.f.Thresholds {
		if usable(t.Temp) {
			s.take(celsius(t.Temp))
		}
	}
	return s
}

// bend is the part of a duration curve between the last temperature that the path always
// exceeds and the first that it never exceeds.
func bend(curve []thermal.DurationPoint) []thermal.DurationPoint {
	from, to := 0, len(curve)
	for from+1 < to && curve[from+1].Time == curve[0].Time {
		from++
	}
	for to-2 > from && curve[to-2].Time == 0 {
		to--
	}
	return curve[from:to]
}

// durationCurve puts a curve on the page: it rises from the axis at the longest time, and
// where no time is left it runs level to the left edge.
func durationCurve(path *Path, x, y axis) []point {
	edge := x.from - 1
	var at []point
	for _, q := range path.Duration {
		if !usable(q.Temp) || !usable(q.Time) {
			at = append(at, point{math.NaN(), math.NaN()})
			continue
		}
		v := point{max(edge, x.at(logYears(q.Time))), y.at(celsius(q.Temp))}
		if len(at) == 0 && lasting(q) {
			at = append(at, point{v.x, y.from})
		}
		at = append(at, v)
		if q.Time <= 0 {
			break
		}
	}
	return at
}
