package figure

import (
	"fmt"
	"image/color"
	"io"
	"math"
)

// Family is the members of a family of paths with what became of them: all that its
// figure shows. Numbers that are not finite are left out, never drawn.
type Family struct {
	Title      string    // of the study
	Subject    string    // the family, and how many of its members reproduce the data
	Temps      []float64 // K, ascending, of both bands
	Kept, All  Band      // time above each of Temps: of members that reproduce, of all that are no barred ones
	Thresholds []Threshold
	Traces     []Trace // some members that reproduce
	Best       Trace
	Stores     []Store
	Equal      []Equal
	Said       string // what the data cannot tell; may be empty
	Values     []Value
}

// Band is the time, s, below which 5, 50 and 95 % of some members lie, at each of the
// temperatures.
type Band [3][]float64

// Trace is a path: temperatures, K, at times before its eruption, s, the earliest first.
type Trace struct{ Before, Temp []float64 }

// Store is a member by how long it lasts, s, and the temperature, K, that it exceeds
// for half of that.
type Store struct {
	Life, Temp float64
	Reproduces bool
}

// Equal is a line of equal diffusion: how long, s, a hold at each temperature, K, takes for
// it.
type Equal struct {
	Name       string
	Temp, Time []float64
	Light      bool // draws it in dots
}

// Value is an open value against what became of members.
type Value struct {
	Name, Unit string
	Lo, Hi     float64 // what was drawn, in the unit
	Log, Years bool    // a logarithmic axis, one of years
	Dots       []Dot
}

// Dot is a member by its value and its chi-square.
type Dot struct {
	At, Misfit float64
	Reproduces bool
}

// DrawFamily writes the figure to w as Draw does. It panics when slices that belong
// together differ in length.
func DrawFamily(w io.Writer, f *Family) error {
	d, err := composeFamily(f)
	if err != nil {
		return err
	}
	return d.writePNG(w)
}

// Measures of the page of a family in printer's points.
const (
	leadHeight  = 178.0 // of the panel of duration curves
	pairHeight  = 150.0 // of the two panels below it
	valueHeight = 88.0  // of the panel of a value
	valueGap    = 24.0  // between panels of values
	mostValues  = 8     // that the page has room for
)

// Tones of the members that reproduce and of all that were drawn. In grey they differ as
// much as in colour.
var (
	glow   = rgb(0xe0a06a) // the band of those that reproduce
	thread = rgb(0xe3b48f) // their paths
	haze   = rgb(0xdde3e8) // the band of all
)

// familyPage is the figure of a family being laid out.
type familyPage struct {
	*page  // right is the panel of duration curves
	f      *Family
	traces box
	stores box
	values []box
	said   []string
}

// newFamilyPage measures everything out.
func newFamilyPage(f *Family) *familyPage {
	d := &drawing{w: pageWidth, fonts: newFonts()}
	p := &familyPage{page: &page{f: &Weighing{Thresholds: f.Thresholds}, d: d}, f: f}
	p.title = d.fonts.wrap(f.Title, hand{size: titleSize, bold: true}, pageWidth-2*margin, 2)
	y := margin + leading*titleSize*float64(len(p.title)) + leading*textSize + headRoom
	p.right = box{margin + axisRoom, y, pageWidth - margin - overhang, y + leadHeight}
	p.nameThresholds()
	y = p.right.y1 + underPanel + headRoom + 4
	middle := pageWidth * 0.5
	p.traces = box{margin + axisRoom, y, middle - 6, y + pairHeight}
	p.stores = box{middle - 6 + gutter, y, pageWidth - margin - overhang, y + pairHeight}
	y = p.traces.y1 + underPanel
	p.said = d.fonts.wrap(f.Said, hand{size: textSize}, pageWidth-2*margin-axisRoom, 3)
	y += leading * textSize * float64(len(p.said))
	p.layValues(y + headRoom + 4)
	if n := len(p.values); n > 0 {
		y = p.values[n-1].y1 + underPanel
	}
	d.h = y + 2*smallSize + margin
	return p
}

// across is how many panels of values stand beside one another.
func (f *Family) across() int {
	if n := len(f.Values); n == 4 || n > 6 {
		return 4
	}
	return 3
}

// layValues puts the panels of the values below y.
func (p *familyPage) layValues(y float64) {
	n := p.f.across()
	wide := (pageWidth - 2*margin - axisRoom - overhang - float64(n-1)*valueGap) / float64(n)
	for i := range min(len(p.f.Values), mostValues) {
		x := margin + axisRoom + float64(i%n)*(wide+valueGap)
		top := y + float64(i/n)*(valueHeight+underPanel+8)
		p.values = append(p.values, box{x, top, x + wide, top + valueHeight})
	}
}

// composeFamily checks the data and lays the whole figure out.
func composeFamily(f *Family) (*drawing, error) {
	f.mustFit()
	if f.Kept.span().empty() && f.All.span().empty() {
		return nil, errNothing
	}
	p := newFamilyPage(f)
	p.heads()
	p.bands()
	p.drawTraces()
	p.drawStores()
	p.drawValues()
	p.footer(0)
	return p.d, nil
}

// mustFit panics where slices that belong together differ in length.
func (f *Family) mustFit() {
	fit := func(what string, n, want int) {
		if n != want {
			panic(fmt.Sprintf("figure: %s: %d numbers, not %d", what, n, want))
		}
	}
	for k := range f.Kept {
		fit("band of those that reproduce", len(f.Kept[k]), len(f.Temps))
		fit("band of all", len(f.All[k]), len(f.Temps))
	}
	for _, t := range append([]Trace{f.Best}, f.Traces...) {
		fit("path", len(t.Before), len(t.Temp))
	}
	for _, e := range f.Equal {
		fit("line of equal diffusion", len(e.Time), len(e.Temp))
	}
}

// heads writes the title, the subject and the heading of each panel.
func (p *familyPage) heads() {
	y := p.d.paragraph(point{margin, margin + capHeight*titleSize}, p.title, hand{size: titleSize, bold: true, ink: ink})
	p.d.write(point{margin, y}, p.d.fonts.cut(p.f.Subject, hand{size: textSize}, pageWidth-2*margin), hand{size: textSize, ink: ink})
	p.head(p.right.x0-axisRoom, p.right.y0, p.bandKey(), "a", "Time above each temperature")
	p.head(p.traces.x0-axisRoom, p.traces.y0, p.traces.x1, "b", fmt.Sprintf("%d paths that reproduce, the best one bold", len(p.f.Traces)))
	p.head(p.stores.x0-axisRoom, p.stores.y0, p.stores.x1, "c", p.storesHead())
	p.d.paragraph(point{margin + axisRoom, p.traces.y1 + underPanel + capHeight*textSize}, p.said, hand{size: textSize, ink: ink})
	if len(p.values) > 0 {
		b := p.values[0]
		p.head(b.x0-axisRoom, b.y0, pageWidth-margin, "d", p.valuesHead())
	}
}

func (p *familyPage) storesHead() string {
	if len(p.f.Equal) > 0 {
		return "How cold and how long, lines of equal diffusion"
	}
	return "How cold and how long"
}

func (p *familyPage) valuesHead() string {
	text := "Chi-square against what was drawn: embers reproduce, slates do not"
	if more := len(p.f.Values) - len(p.values); more > 0 {
		text += fmt.Sprintf(" (%d more values are not drawn)", more)
	}
	return text
}

// bandKey says at the end of the first heading what the bands are, and returns where it
// begins.
func (p *familyPage) bandKey() float64 {
	x, y := p.right.x1, p.right.y0-6
	const wide, high, gap = 12.0, 5.0, 3.0
	for _, k := range []struct {
		text string
		fill color.RGBA
		line pen
	}{
		{"all drawn", haze, bandPens[1]},
		{"those that reproduce: median, and 5 to 95 % of them", glow, bandPens[0]},
	} {
		h := hand{size: smallSize, ink: iron, anchor: 1}
		p.d.write(point{x, y}, k.text, h)
		x -= p.d.fonts.width(k.text, h) + gap
		m := y - capHeight*smallSize/2
		p.d.slab(box{x - wide, m - high/2, x, m + high/2}, k.fill)
		p.d.line(point{x - wide, m}, point{x, m}, k.line)
		x -= wide + 3*gap
	}
	return x
}

// bandPens draw the medians: of those that reproduce, of all.
var bandPens = []pen{{width: 1.4, ink: rgb(0x9c1c12)}, {width: 0.8, ink: rgb(0x33475a), dash: []float64{4, 1.6}}}

// span is that of the times of a band, log10 of years.
func (b *Band) span() span {
	s := newSpan()
	for _, times := range b {
		for _, t := range times {
			if usable(t) && t > 0 {
				s.take(logYears(t))
			}
		}
	}
	return s
}

// mostBandDecades is how far the time axis reaches below the longest time, in powers of ten.
const mostBandDecades = 5.0

// bands draws the duration curves: the bands, the medians and the thresholds.
func (p *familyPage) bands() {
	times := p.f.Kept.span()
	all := p.f.All.span()
	times.take(all.lo, all.hi)
	x := axis{span{max(times.lo, times.hi-mostBandDecades) - 0.1, times.hi + 0.1}, p.right.x0, p.right.x1}
	x.lo = min(x.lo, x.hi-leastDecades)
	temps := newSpan()
	for _, t := range p.f.Temps {
		temps.take(celsius(t))
	}
	for _, t := range p.f.Thresholds {
		temps.take(celsius(t.Temp))
	}
	y := axis{temps.padded(0.03), p.right.y1, p.right.y0}
	p.bottom(p.right, x, decadeTicks(x.span, int(p.right.w()/labelWidth)), "time spent above the temperature")
	yt, yp := roundTicks(y.span, 7)
	p.side(p.right, y, yt, inUnit("temperature", "°C", yp))
	p.fillBand(&p.f.All, x, y, haze)
	p.fillBand(&p.f.Kept, x, y, glow)
	for _, k := range []int{0, 2} {
		p.d.polyline(p.bandLine(p.f.All[k], x, y), p.right, pen{width: 0.35, ink: mist})
	}
	p.thresholds(&crowd{bounds: p.right}, y)
	p.d.polyline(p.bandLine(p.f.All[1], x, y), p.right, bandPens[1])
	p.d.polyline(p.bandLine(p.f.Kept[1], x, y), p.right, bandPens[0])
}

// bandLine is a quantile against temperature.
func (p *familyPage) bandLine(times []float64, x, y axis) []point {
	var at []point
	for i, t := range times {
		at = append(at, point{p.bandAt(t, x), y.at(celsius(p.f.Temps[i]))})
	}
	return at
}

// bandAt is where a time lies: what is too short, just beyond the edge.
func (p *familyPage) bandAt(t float64, x axis) float64 {
	if !usable(t) {
		return math.NaN()
	}
	return max(x.from-1, x.at(logYears(t)))
}

// fillBand fills the area between the outer quantiles.
func (p *familyPage) fillBand(b *Band, x, y axis, fill color.RGBA) {
	var up, down []point
	for i, temp := range p.f.Temps {
		lo, hi := p.bandAt(b[0][i], x), p.bandAt(b[2][i], x)
		if v := y.at(celsius(temp)); hi > x.from && !math.IsNaN(lo) && usable(temp) {
			up = append(up, point{min(hi, x.to), v})
			down = append(down, point{max(lo, x.from), v})
		}
	}
	for i := range down {
		up = append(up, down[len(down)-1-i])
	}
	if len(up) > 2 {
		p.d.polygon(fill, up...)
	}
}
