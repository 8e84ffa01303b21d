package figure

import "math"

// mostTraceDecades is how far the axis of times before eruption goes down from the
// longest, in powers of ten.
const mostTraceDecades = 5.0

// drawTraces draws temperature against time before eruption.
func (p *familyPage) drawTraces() {
	times, temps, shortest := newSpan(), newSpan(), math.Inf(1)
	for _, t := range append([]Trace{p.f.Best}, p.f.Traces...) {
		for i, b := range t.Before {
			temps.take(celsius(t.Temp[i]))
			if b > 0 {
				times.take(logYears(b))
			}
		}
		if len(t.Before) > 0 && t.Before[0] > 0 {
			shortest = min(shortest, logYears(t.Before[0]))
		}
	}
	if times.empty() {
		p.vacant(p.traces, "no member reproduces the data")
		return
	}
	from := min(times.hi-leastDecades, max(times.lo, min(times.hi-mostTraceDecades, shortest-1)))
	x := axis{span{from, times.hi + 0.05}, p.traces.x1, p.traces.x0}
	y := axis{temps.padded(0.05), p.traces.y1, p.traces.y0}
	p.bottom(p.traces, x, decadeTicks(x.span, int(p.traces.w()/labelWidth)), "time before eruption")
	yt, yp := roundTicks(y.span, 6)
	p.side(p.traces, y, yt, inUnit("temperature", "°C", yp))
	p.levels(p.traces, y)
	for i := range p.f.Traces {
		p.d.polyline(traceLine(&p.f.Traces[i], x, y), p.traces, pen{width: 0.3, ink: thread})
	}
	p.d.polyline(traceLine(&p.f.Best, x, y), p.traces, pen{width: 1.1, ink: embers[0]})
}

// levels draws the thresholds, which the first panel names.
func (p *familyPage) levels(b box, y axis) {
	for _, t := range p.f.Thresholds {
		if usable(t.Temp) {
			v := y.at(celsius(t.Temp))
			p.d.polyline([]point{{b.x0, v}, {b.x1, v}}, b, pen{width: 0.4, ink: mist})
		}
	}
}

// traceLine puts a path on the page. Its last moments run to the edge.
func traceLine(t *Trace, x, y axis) []point {
	var at []point
	for i, b := range t.Before {
		v := point{min(x.from+1, x.at(logYears(b))), y.at(celsius(t.Temp[i]))}
		if !usable(b) || !usable(t.Temp[i]) {
			v = point{math.NaN(), math.NaN()}
		}
		at = append(at, v)
	}
	return at
}

// drawStores draws members by how long they last and how cold they are, with lines of
// equal diffusion.
func (p *familyPage) drawStores() {
	times, temps := newSpan(), newSpan()
	for _, s := range p.f.Stores {
		if s.Life > 0 {
			times.take(logYears(s.Life))
			temps.take(celsius(s.Temp))
		}
	}
	if times.empty() || temps.empty() {
		p.vacant(p.stores, "no members")
		return
	}
	times = span{times.lo - 0.1, times.hi + 0.1}
	if times.hi-times.lo < leastDecades {
		middle := (times.lo + times.hi) / 2
		times = span{middle - leastDecades/2, middle + leastDecades/2}
	}
	x := axis{times, p.stores.x0, p.stores.x1}
	y := axis{temps.padded(0.06), p.stores.y1, p.stores.y0}
	p.bottom(p.stores, x, decadeTicks(x.span, int(p.stores.w()/labelWidth)), "life of the path, or time of a hold")
	yt, yp := roundTicks(y.span, 6)
	p.side(p.stores, y, yt, p.storeTitle(yp))
	c := &crowd{bounds: p.stores.inset(1)}
	p.levels(p.stores, y)
	for _, kept := range []bool{false, true} {
		for _, s := range p.f.Stores {
			if s.Reproduces == kept && s.Life > 0 && usable(s.Temp) && usable(s.Life) {
				m := point{x.at(logYears(s.Life)), y.at(celsius(s.Temp))}
				p.dot(m, kept)
				c.things = append(c.things, m)
			}
		}
	}
	c.things = thin(c.things, mostThings)
	p.equals(c, x, y)
}

func (p *familyPage) storeTitle(power int) string {
	return inUnit("temperature exceeded half of the life", "°C", power)
}

// dot draws a member: a dark ember if it reproduces, else a smaller light slate.
func (p *familyPage) dot(at point, reproduces bool) {
	r, c := 0.75, slates[3]
	if reproduces {
		r, c = 0.9, embers[0]
	}
	p.d.ring(at, r, c, pen{width: 0.15, ink: c})
}

// equals draws and names the lines of equal diffusion.
func (p *familyPage) equals(c *crowd, x, y axis) {
	var curves [][]point
	for _, e := range p.f.Equal {
		var at []point
		for i, t := range e.Time {
			v := point{math.NaN(), math.NaN()}
			if t > 0 && usable(t) && usable(e.Temp[i]) {
				v = point{x.at(logYears(t)), y.at(celsius(e.Temp[i]))}
			}
			at = append(at, v)
		}
		curves = append(curves, at)
	}
	c.add(p.stores, curves...)
	for i, e := range p.f.Equal {
		pn, name := pen{width: 0.7, ink: ink}, ink
		if e.Light {
			pn, name = pen{width: 0.5, ink: iron, dash: []float64{2, 1.6}}, iron
		}
		p.d.polyline(curves[i], p.stores, pn)
		p.tag(c, i, e.Name, hand{size: smallSize, ink: name, anchor: 0.5})
	}
}
