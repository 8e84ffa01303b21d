package figure

import (
	"fmt"
	"strings"
)

// Measures of the page in printer's points.
const (
	pageWidth  = 180 / 25.4 * 72 // two columns of most journals
	margin     = 8.0
	axisRoom   = 36.0 // labels and title left of a panel
	gutter     = 60.0 // between the left and the right panel, labels of the right one included
	titleSize  = 10.0
	headSize   = 7.5
	textSize   = 7.0
	smallSize  = 6.2
	topHeight  = 196.0 // of the profile and duration panels
	underPanel = 26.0  // labels and title below a panel
	headRoom   = 16.0  // heading above a panel
	rowHigh    = 31.0
	rowLow     = 25.0  // when there are more than six paths
	rowGap     = 3.0   // between rows
	mostRows   = 480.0 // for all rows, so that the figure fits a printed page
	tickLength = 3.0
	overhang   = 6.0 // of the last label of an axis
)

// page is the figure being laid out.
type page struct {
	f     *Weighing
	d     *drawing
	looks []pen
	title []string
	left  box       // the profile panel
	right box       // the duration panel
	names []label   // of the thresholds, right of the duration panel
	said  []verdict // one a path
	strip []box     // one a path, for its residuals
}

// newPage measures everything out for the paths of f.
func newPage(f *Weighing) *page {
	d := &drawing{w: pageWidth, fonts: newFonts()}
	p := &page{f: f, d: d, looks: looksOf(f.Paths)}
	p.title = d.fonts.wrap(f.Title, hand{size: titleSize, bold: true}, pageWidth-2*margin, 2)
	top := margin + leading*titleSize*float64(len(p.title)) + headRoom
	middle := pageWidth * 0.515
	p.left = box{margin + axisRoom, top, middle, top + topHeight}
	p.right = box{middle + gutter, top, pageWidth - margin - overhang, top + topHeight}
	p.nameThresholds()
	y := p.stack(p.left.y1 + underPanel + headRoom + 4)
	d.h = y + underPanel + 2*smallSize + margin
	return p
}

// stack puts the rows of the paths below y and returns where they end. Every strip of
// residuals is as high as the others, in the middle of a row that holds the verdict.
func (p *page) stack(y float64) float64 {
	low := rowHigh
	if len(p.f.Paths) > 6 {
		low = rowLow
	}
	if len(p.f.Paths) == 0 {
		p.strip = []box{{p.left.x0, y, p.left.x1, y + low - rowGap}}
		return y + low
	}
	p.said = p.verdicts(low)
	for _, v := range p.said {
		high := v.row(low)
		top := y + (high-low)/2
		p.strip = append(p.strip, box{p.left.x0, top, p.left.x1, top + low - rowGap})
		y += high
	}
	return y
}

// heads writes the title and the heading of each panel.
func (p *page) heads() {
	p.d.paragraph(point{margin, margin + capHeight*titleSize}, p.title, hand{size: titleSize, bold: true, ink: ink})
	subject := p.f.Subject
	if subject == "" {
		subject = p.f.Quantity
	}
	end, residuals := p.left.x1, "Residuals in σ, band ±2σ"
	if p.f.limited() {
		end = p.limitKey() - 6
		residuals += "; of limits −√(−2 ln likelihood)"
	}
	p.head(p.left.x0-axisRoom, p.left.y0, end, "a", subject+": measured"+p.bars()+" and modelled")
	p.head(p.right.x0-axisRoom, p.right.y0, p.right.x1, "b", "Time above each temperature")
	y := p.left.y1 + underPanel + headRoom + 1
	p.head(p.left.x0-axisRoom, y, p.left.x1, "c", residuals)
	p.head(p.right.x0-axisRoom, y, p.right.x1, "d", "Verdicts")
}

// limitKey says at the end of the first heading what the triangles are, and returns where
// it begins.
func (p *page) limitKey() float64 {
	const text, half = "below detection", 1.8
	h := hand{size: smallSize, ink: iron, anchor: 1}
	at := point{p.left.x1, p.left.y0 - 6}
	p.d.write(at, text, h)
	x := at.x - p.d.fonts.width(text, h) - half - 3
	p.d.hang(point{x, at.y - capHeight*smallSize/2 - 0.85*half}, half, pen{width: 0.5, ink: ink})
	return x - half
}

// bars says what the error bars are.
func (p *page) bars() string {
	for _, q := range p.f.Points {
		if q.usable() && q.hasBar() {
			return " ±1σ"
		}
	}
	return ""
}

// head writes a letter and a heading above a panel.
func (p *page) head(x, y, end float64, letter, text string) {
	h := hand{size: headSize, bold: true, ink: ink}
	p.d.write(point{x, y - 6}, letter, h)
	h.bold = false
	x += 10
	p.d.write(point{x, y - 6}, p.d.fonts.cut(strings.Join(printable(text), " "), h, end-x), h)
}

// footer writes the caution and what a year is.
func (p *page) footer(hidden int) {
	h := hand{size: smallSize, ink: iron}
	y := p.d.h - margin
	p.d.write(point{margin, y}, "Not a forecast; decisions about safety belong to the responsible authorities.", h)
	h.anchor = 1
	note := "Years of 365.25 days."
	if hidden > 0 {
		note = fmt.Sprintf("%d more paths are not drawn. ", hidden) + note
	}
	p.d.write(point{p.d.w - margin, y}, note, h)
}

// bottom draws a horizontal axis below a box, ticks outwards.
func (p *page) bottom(b box, a axis, ticks []tick, title string) {
	pn := pen{width: 0.5, ink: iron}
	p.d.line(point{b.x0, b.y1}, point{b.x1, b.y1}, pn)
	for _, t := range ticks {
		x, long := a.at(t.at), tickLength
		if t.label == "" {
			long /= 2
		}
		p.d.line(point{x, b.y1}, point{x, b.y1 + long}, pn)
		p.d.write(point{x, b.y1 + 10}, t.label, hand{size: smallSize, ink: iron, anchor: 0.5})
	}
	p.d.write(point{b.middle().x, b.y1 + 20}, title, hand{size: textSize, ink: ink, anchor: 0.5})
}

// side draws a vertical axis left of a box, ticks outwards.
func (p *page) side(b box, a axis, ticks []tick, title string) {
	pn := pen{width: 0.5, ink: iron}
	p.d.line(point{b.x0, b.y0}, point{b.x0, b.y1}, pn)
	widest := 0.0
	h := hand{size: smallSize, ink: iron, anchor: 1}
	for _, t := range ticks {
		y := a.at(t.at)
		p.d.line(point{b.x0 - tickLength, y}, point{b.x0, y}, pn)
		p.d.write(point{b.x0 - 5, y + capHeight*smallSize/2}, t.label, h)
		widest = max(widest, p.d.fonts.width(t.label, h))
	}
	x := max(b.x0-5-widest-5, b.x0-axisRoom+capHeight*textSize)
	h = hand{size: textSize, ink: ink, anchor: 0.5, turned: true}
	p.d.write(point{x, b.middle().y}, p.d.fonts.cut(title, h, b.h()), h)
}

// vacant writes words where a panel has nothing to show.
func (p *page) vacant(b box, text string) {
	m := b.middle()
	p.d.write(point{m.x, m.y + capHeight*smallSize/2}, text, hand{size: smallSize, ink: iron, anchor: 0.5})
}

// inUnit names a quantity with its unit, the unit multiplied by a power of ten.
func inUnit(quantity, unit string, power int) string {
	quantity, unit = strings.Join(printable(quantity), " "), strings.Join(printable(unit), " ")
	if power != 0 {
		unit = powerOfTen(power) + " " + unit
	}
	switch {
	case unit == "":
		return quantity
	case quantity == "":
		return unit
	}
	return quantity + " (" + unit + ")"
}
