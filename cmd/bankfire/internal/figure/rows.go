package figure

import (
	"image/color"
	"math"
	"strconv"
)

// Limits of the residual axis, sigma: the narrow one when every residual fits it.
const (
	narrowLimit = 4.0
	wideLimit   = 8.0
	bandLimit   = 2.0
)

// rows draws a row a path: residuals on the left; on the right its line, number, name
// and verdict.
func (p *page) rows() {
	across := p.window()
	x := axis{across.padded(0.03), p.left.x0, p.left.x1}
	limit, shown := p.limit(), false
	for i := range p.f.Paths {
		shown = p.residuals(i, x, limit) || shown
		p.verdict(i)
	}
	if len(p.f.Paths) == 0 {
		p.vacant(p.strip[0], "no paths")
	}
	if !shown {
		return
	}
	xt, xp := roundTicks(x.span, 7)
	last := p.strip[len(p.strip)-1]
	p.bottom(box{last.x0, last.y0, last.x1, last.y1 + 2}, x, xt, p.distanceTitle(xp))
}

// limit is the half-width of the residual axes, one for all paths.
func (p *page) limit() float64 {
	for i := range p.f.Paths {
		if worst, _ := p.worst(i); math.Abs(worst) > narrowLimit {
			return wideLimit
		}
	}
	return narrowLimit
}

// worst is the residual of path i that is farthest from zero; n counts the residuals.
func (p *page) worst(i int) (worst float64, n int) {
	for k := range p.f.Points {
		if r, ok := p.f.residual(&p.f.Paths[i], k); ok {
			n++
			if math.Abs(r) > math.Abs(worst) {
				worst = r
			}
		}
	}
	return worst, n
}

// residuals draws the strip of path i, or says why it has none.
func (p *page) residuals(i int, x axis, limit float64) bool {
	b := p.strip[i]
	worst, n := p.worst(i)
	if n == 0 {
		p.vacant(b, p.whyNoResiduals(i))
		return false
	}
	y := axis{span{-limit, limit}, b.y1, b.y0}
	p.d.slab(box{b.x0, y.at(bandLimit), b.x1, y.at(-bandLimit)}, ash)
	p.d.line(point{b.x0, y.at(0)}, point{b.x1, y.at(0)}, pen{width: 0.4, ink: mist})
	half := limit / 2
	p.side(b, y, []tick{{-half, number(-half, 0)}, {0, ""}, {half, number(half, 0)}}, "")
	dot := min(1.1, max(0.5, 60/float64(n)))
	for k, q := range p.f.Points {
		if r, ok := p.f.residual(&p.f.Paths[i], k); ok {
			p.residual(point{x.at(q.At / micrometre), y.at(r)}, b, dot, p.looks[i].ink, q.Limit)
		}
	}
	if math.Abs(worst) > limit {
		h := hand{size: smallSize, ink: iron}
		p.d.write(point{b.x1 + 3, b.middle().y + capHeight*smallSize/2}, "to "+sigmas(worst), h)
	}
	return true
}

// residual draws a dot, an open triangle for a limit or, at the edge of the strip, an
// arrowhead that points to where it would be.
func (p *page) residual(at point, b box, r float64, c color.RGBA, limit bool) {
	switch {
	case at.y < b.y0:
		p.d.polygon(c, point{at.x - 1.4, b.y0 + 2.8}, point{at.x + 1.4, b.y0 + 2.8}, point{at.x, b.y0})
	case at.y > b.y1:
		p.d.polygon(c, point{at.x - 1.4, b.y1 - 2.8}, point{at.x + 1.4, b.y1 - 2.8}, point{at.x, b.y1})
	case limit:
		half := 1.2 * r
		p.d.hang(point{at.x, at.y - 0.85*half}, half, pen{width: 0.5, ink: c})
	default:
		p.d.ring(at, r, c, pen{width: 0.2, ink: c})
	}
}

// sigmas prints a large residual.
func sigmas(r float64) string {
	if size := math.Abs(r); size >= 1e4 {
		power := powerOfTen(int(math.Floor(math.Log10(size)))) + "σ"
		if r < 0 {
			return "−" + power
		}
		return power
	}
	return number(r, 0) + "σ"
}

// whyNoResiduals says what is wanting.
func (p *page) whyNoResiduals(i int) string {
	switch {
	case p.f.Paths[i].Barred:
		return "barred: not run"
	case len(p.f.Paths[i].Residuals) == 0:
		return "no residuals"
	case p.bars() == "":
		return "no errors given, so no residuals in σ"
	}
	return "no finite residuals"
}

// verdict is what is written beside the strip of a path.
type verdict struct{ names, words []string }

// Lines of text in a row: what every row has room for, and what it may grow to.
const (
	leastLines = 3
	mostLines  = 7
)

// verdicts wraps the names and verdicts of all paths into as many lines a row as the page
// has room for; low is the height of a row of three lines.
func (p *page) verdicts(low float64) []verdict {
	for most := mostLines; ; most-- {
		all, high := make([]verdict, len(p.f.Paths)), 0.0
		for i := range p.f.Paths {
			all[i] = p.wrapped(&p.f.Paths[i], most)
			high += all[i].row(low)
		}
		if high <= mostRows || most == leastLines {
			return all
		}
	}
}

// wrapped breaks the verdict of a path and its name into so many lines.
func (p *page) wrapped(path *Path, most int) verdict {
	width := pageWidth - margin - p.verdictAt()
	words := p.d.fonts.wrap(path.Verdict, hand{size: textSize}, width, most-1)
	names := p.d.fonts.wrap(path.Name, hand{size: textSize, bold: true}, width, min(2, most-max(1, len(words))))
	return verdict{names, words}
}

// verdictAt is where the names and verdicts begin.
func (p *page) verdictAt() float64 { return p.right.x0 + 16 }

// high is the height of the text from the first cap height to the last base line.
func (v *verdict) high() float64 {
	return leading*textSize*float64(len(v.names)+len(v.words)-1) + capHeight*textSize
}

// row is the height of a row for the text, at least low.
func (v *verdict) row(low float64) float64 { return max(low, v.high()+2.5*rowGap) }

// verdict writes what became of path i beside its strip.
func (p *page) verdict(i int) {
	v, mid := &p.said[i], p.strip[i].middle().y
	digits := hand{size: textSize, bold: true, ink: deep(p.looks[i].ink), anchor: 0.5}
	p.d.line(point{p.right.x0 - 24, mid}, point{p.right.x0, mid}, p.looks[i])
	p.d.write(point{p.right.x0 + 8, mid + capHeight*textSize/2}, pathNumber(i), digits)

	name, say := hand{size: textSize, bold: true, ink: ink}, hand{size: textSize, ink: ink}
	switch p.f.Paths[i].fate() {
	case reproduces:
		say.ink = embers[0]
	case barred:
		name.ink, say.ink = iron, iron
	}
	y := p.d.paragraph(point{p.verdictAt(), mid - v.high()/2 + capHeight*textSize}, v.names, name)
	p.d.paragraph(point{p.verdictAt(), y}, v.words, say)
}

// pathNumber is the number of a path on the page.
func pathNumber(i int) string { return strconv.Itoa(i + 1) }

// deep is a colour dark enough for small text.
func deep(c color.RGBA) color.RGBA {
	for int(c.R)*30+int(c.G)*59+int(c.B)*11 > 125*100 {
		c.R, c.G, c.B = c.R/8*7, c.G/8*7, c.B/8*7
	}
	return c
}
