package figure

import (
	"cmp"
	"slices"
)

// label is the name of a threshold, in lines of text, beside the end of its line.
type label struct {
	temp  float64 // K
	lines []string
}

// Measures of the labels in printer's points.
const (
	leader   = 9.0  // from the end of a threshold's line to its name
	widest   = 56.0 // of a name; what is longer is wrapped and then cut
	labelGap = 2.5  // between names
)

func (l *label) high() float64 {
	return leading*smallSize*float64(len(l.lines)-1) + capHeight*smallSize + labelGap
}

// nameThresholds wraps the names of the thresholds, coldest last, and takes the room for
// them from the right of the duration panel. A name is left out where those before it in the
// list fill the height of the panel.
func (p *page) nameThresholds() {
	h := hand{size: smallSize}
	high, wide := 0.0, 0.0
	for _, t := range p.f.Thresholds {
		l := label{t.Temp, p.d.fonts.wrap(t.Name, h, widest, 2)}
		if !usable(t.Temp) || len(l.lines) == 0 || high+l.high() > topHeight {
			continue
		}
		high += l.high()
		p.names = append(p.names, l)
		for _, line := range l.lines {
			wide = max(wide, p.d.fonts.width(line, h))
		}
	}
	slices.SortStableFunc(p.names, func(a, b label) int { return cmp.Compare(b.temp, a.temp) })
	if len(p.names) > 0 {
		p.right.x1 = pageWidth - margin - max(overhang, leader+1+wide)
	}
}

// thresholds draws the named temperatures as level lines. Their names stand to the right of
// the panel, where no line passes, each joined to the end of its own line.
func (p *page) thresholds(c *crowd, y axis) {
	pn := pen{width: 0.4, ink: mist}
	for _, t := range p.f.Thresholds {
		if usable(t.Temp) {
			line := p.level(y, t)
			p.d.polyline(line, p.right, pn)
			c.things = append(c.things, sample(line, 4)...)
		}
	}
	var want, high []float64
	for i := range p.names {
		want = append(want, y.at(celsius(p.names[i].temp)))
		high = append(high, p.names[i].high())
	}
	for i, mid := range spread(want, high, p.right.y0, p.right.y1) {
		l := &p.names[i]
		text := point{p.right.x1 + leader + 1, mid - (l.high()-labelGap)/2 + capHeight*smallSize}
		p.d.line(point{p.right.x1, want[i]}, point{p.right.x1 + leader, mid}, pn)
		p.d.paragraph(text, l.lines, hand{size: smallSize, ink: iron})
	}
}

// level is the line of a threshold across the panel.
func (p *page) level(y axis, t Threshold) []point {
	v := y.at(celsius(t.Temp))
	return []point{{p.right.x0, v}, {p.right.x1, v}}
}

// spread returns the middles of labels that want to be somewhere, in ascending order, moved
// so that they do not meet and lie between lo and hi: the sum of squares of their moves is
// the least. Labels that must lie closer than their heights are pooled to blocks, and each
// block lies where its labels want to be on the average (pool adjacent violators: Barlow et
// al. 1972, Statistical inference under order restrictions, Wiley, 13-15).
func spread(want, high []float64, lo, hi float64) []float64 {
	type block struct{ sum, n float64 }
	var blocks []block
	stacked := make([]float64, len(want)) // middles in a stack without gaps that begins at zero
	total := 0.0
	for i, h := range high {
		stacked[i] = total + h/2
		total += h
	}
	for i, w := range want {
		b := block{w - stacked[i], 1}
		for k := len(blocks) - 1; k >= 0 && blocks[k].sum*b.n >= b.sum*blocks[k].n; k-- {
			b = block{b.sum + blocks[k].sum, b.n + blocks[k].n}
			blocks = blocks[:k]
		}
		blocks = append(blocks, b)
	}
	middles := stacked[:0]
	for _, b := range blocks {
		start := max(lo, min(hi-total, b.sum/b.n))
		for range int(b.n) {
			middles = append(middles, start+stacked[len(middles)])
		}
	}
	return middles
}
