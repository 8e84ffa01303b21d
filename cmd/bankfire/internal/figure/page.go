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
	rowLow     = 25.0 // when there are more than six paths
	tickLength = 3.0
	overhang   = 6.0 // of the last label of an axis
)

// page is the figure being laid out.
type page struct {
	f     *Weighing
	d     *drawing
	looks []pen
	title []string
	left  box   // the profile panel
	right box   // the duration panel
	strip []box // one a path, for its residuals
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
	y := p.left.y1 + underPanel + headRoom + 4
	high := rowHigh
	if len(f.Paths) > 6 {
		high = rowLow
	}
	for range max(1, len(f.Paths)) {
		p.strip = append(p.strip, box{p.left.x0, y, p.left.x1, y + high - 3})
		y += high
	}
	d.h = y + underPanel + 2*smallSize + margin
	return p
}

// heads writes the title and the heading of each panel.
func (p *page) heads() {
	p.d.paragraph(point{margin, margin + capHeight*titleSize}, p.title, hand{size: titleSize, bold: true, ink: ink})
	subject := p.f.Subject
	if subject == "" {
		subject = p.f.Quantity
	}
	p.head(p.left.x0-axisRoom, p.left.y0, p.left.x1, "a", subject+": measured"+p.bars()+" and modelled")
	p.head(p.right.x0-axisRoom, p.right.y0, p.right.x1, "b", "Time above each temperature")
	y := p.strip[0].y0 - 3
	p.head(p.left.x0-axisRoom, y, p.left.x1, "c", "Residuals in σ, band ±2σ")
	p.head(p.right.x0-axisRoom, y, p.right.x1, "d", "Verdicts")
}

// bars says what the error bars are.
func (p *page) bars() string {
	for _, q := range p.f.Points {
		if q.usable() && q.hasError() {
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
