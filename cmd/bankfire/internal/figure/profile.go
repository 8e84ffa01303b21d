package figure

import (
	"fmt"
	"math"
	"strconv"
)

const micrometre = 1e-6 // m

// profile draws the traverse with the start and the modelled profiles.
func (p *page) profile() {
	across := p.window()
	if across.empty() {
		p.vacant(p.left, "no measured points and no profiles")
		return
	}
	x := axis{across.padded(0.03), p.left.x0, p.left.x1}
	y := axis{p.heights(x.span).padded(0.08), p.left.y1, p.left.y0}
	xt, xp := roundTicks(x.span, 7)
	p.bottom(p.left, x, xt, p.distanceTitle(xp))
	yt, yp := roundTicks(y.span, 6)
	p.side(p.left, y, yt, inUnit(p.f.Quantity, p.f.Unit, yp))
	c := &crowd{bounds: p.left.inset(1)}
	p.points(c, x, y)
	start := p.curve(&p.f.Start, x, y)
	startPen := pen{width: 0.6, ink: ink, dash: []float64{3, 2}}
	p.d.polyline(start, p.left, startPen)
	var curves [][]point
	for i := range p.f.Paths {
		curves = append(curves, p.curve(&p.f.Paths[i].Profile, x, y))
	}
	p.curves(p.left, curves)
	c.add(p.left, append(curves, start)...)
	p.tags(c)
	p.tag(c, len(curves), p.f.startName(), hand{size: smallSize, ink: ink, anchor: 0.5})
}

// startName says which start is drawn: one of many that were fitted, or the only one.
func (f *Weighing) startName() string {
	if f.StartOf == 0 {
		return "start"
	}
	return fmt.Sprintf("start of path %d", f.StartOf)
}

// curves draws a curve a path. The light barred ones lie lowest, then the thick embers: what
// lies on them stays visible.
func (p *page) curves(in box, curves [][]point) {
	for _, kind := range []fate{barred, reproduces, fails} {
		for i, at := range curves {
			if p.f.Paths[i].fate() == kind {
				p.d.polyline(at, in, p.looks[i])
			}
		}
	}
}

// distanceTitle is that of the axis of positions, um times 10^power.
func (p *page) distanceTitle(power int) string {
	name := "distance from the centre"
	switch inner := p.f.Inner / micrometre; {
	case p.f.Cut && inner == 0:
		name = "distance from the inner end"
	case p.f.Cut && usable(inner):
		name += ", inner end at " + strconv.FormatFloat(inner/math.Pow10(power), 'g', 5, 64)
	}
	return inUnit(name, "µm", power)
}

// window is the range of positions, um: that of the points or, without points, of the lines.
func (p *page) window() span {
	s := newSpan()
	for _, q := range p.f.Points {
		if q.usable() {
			s.take(q.At / micrometre)
		}
	}
	if s.empty() {
		for _, l := range p.lines() {
			for i := range l.At {
				if usable(l.Value[i]) {
					s.take(l.At[i] / micrometre)
				}
			}
		}
	}
	return s
}

// lines lists the start and the modelled profiles.
func (p *page) lines() []*Line {
	all := []*Line{&p.f.Start}
	for i := range p.f.Paths {
		all = append(all, &p.f.Paths[i].Profile)
	}
	return all
}

// heights is the range of values: that of the points with their bars, widened for lines, but
// by no more than its own size either way, lest a wild line flatten the data.
func (p *page) heights(across span) span {
	s := newSpan()
	for _, q := range p.f.Points {
		if q.usable() {
			s.take(q.Value)
			if q.hasBar() {
				s.take(q.Value-q.Sigma, q.Value+q.Sigma)
			}
		}
	}
	room := span{-largest, largest}
	if s.lo < s.hi {
		room = span{s.lo - (s.hi - s.lo), s.hi + (s.hi - s.lo)}
	}
	for _, l := range p.lines() {
		for i, at := range l.At {
			if um := at / micrometre; um >= across.lo && um <= across.hi && usable(l.Value[i]) {
				s.take(min(max(l.Value[i], room.lo), room.hi))
			}
		}
	}
	return s
}

// points draws the traverse and tells the crowd where it is: rings with bars, and a
// triangle that hangs from the limit for a value below detection.
func (p *page) points(c *crowd, x, y axis) {
	radius, pn := min(1.5, max(0.6, 70/float64(len(p.f.Points)))), pen{width: 0.5, ink: ink}
	for _, q := range p.f.Points {
		if !q.usable() {
			continue
		}
		m := point{x.at(q.At / micrometre), y.at(q.Value)}
		if q.hasBar() {
			p.bar(c, []point{{m.x, y.at(q.Value - q.Sigma)}, {m.x, y.at(q.Value + q.Sigma)}})
		}
		if q.Limit {
			m.y += p.d.hang(m, 1.2*radius, pn)
		} else {
			p.d.ring(m, radius, paper, pn)
		}
		c.things = append(c.things, m)
	}
	c.things = thin(c.things, mostThings)
}

// bar draws the error of a point as far as it lies in the panel.
func (p *page) bar(c *crowd, ends []point) {
	for _, piece := range clip(ends, p.left) {
		p.d.line(piece[0], piece[1], pen{width: 0.5, ink: mist})
		c.things = append(c.things, sample(piece, 2)...)
	}
}

// curve puts a line on the page.
func (p *page) curve(l *Line, x, y axis) []point {
	at := make([]point, len(l.At))
	for i := range l.At {
		at[i] = point{x.at(l.At[i] / micrometre), y.at(l.Value[i])}
	}
	return at
}

// tags writes the number of every path beside its curve.
func (p *page) tags(c *crowd) {
	for i := range p.f.Paths {
		text := pathNumber(i)
		h := hand{size: smallSize, bold: true, ink: deep(p.looks[i].ink), anchor: 0.5}
		p.tag(c, i, text, h)
	}
}

// tag writes a text beside curve own of the crowd, with a leader to it.
func (p *page) tag(c *crowd, own int, text string, h hand) {
	w, high := p.d.fonts.width(text, h), capHeight*h.size
	t := tag{curve: thin(c.curves[own], 60), w: w, h: high, offsets: around(w, high)}
	pl, ok := c.put(t, own)
	if !ok {
		return
	}
	p.d.line(pl.anchor, nearest(pl.at.inset(-0.6), pl.anchor), pen{width: 0.4, ink: h.ink})
	p.d.write(point{pl.at.middle().x, pl.at.y1}, text, h)
}
