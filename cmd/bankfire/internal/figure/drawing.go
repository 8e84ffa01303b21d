package figure

import "image/color"

// point is a place on the page in printer's points (1/72 inch) from the upper left,
// y downwards.
type point struct{ x, y float64 }

// box is a rectangle on the page.
type box struct{ x0, y0, x1, y1 float64 }

func (b box) w() float64       { return b.x1 - b.x0 }
func (b box) h() float64       { return b.y1 - b.y0 }
func (b box) middle() point    { return point{(b.x0 + b.x1) / 2, (b.y0 + b.y1) / 2} }
func (b box) holds(c box) bool { return c.x0 >= b.x0 && c.x1 <= b.x1 && c.y0 >= b.y0 && c.y1 <= b.y1 }
func (b box) meets(c box) bool { return b.x0 < c.x1 && c.x0 < b.x1 && b.y0 < c.y1 && c.y0 < b.y1 }

func (b box) inset(by float64) box { return box{b.x0 + by, b.y0 + by, b.x1 - by, b.y1 - by} }

// kind is what a mark is.
type kind int

const (
	stroke kind = iota // an open polyline
	area               // a filled polygon
	ring               // a filled circle with an outline
	words              // text
)

// mark is one thing on the page: plain data, in the order of painting.
type mark struct {
	kind   kind
	at     []point // vertices; ring: the centre; words: where the anchor of the base line goes
	pen    pen     // stroke and ring
	fill   color.RGBA
	radius float64 // ring
	text   string
	hand   hand
}

// pen draws a line.
type pen struct {
	width float64
	ink   color.RGBA
	dash  []float64 // on, off, on, off ...; nil is an unbroken line
}

// hand writes text.
type hand struct {
	size   float64
	bold   bool
	ink    color.RGBA
	anchor float64 // 0: the text begins at its place, 0.5: is centred there, 1: ends there
	turned bool    // reads upwards
}

// drawing is a page as a list of marks.
type drawing struct {
	w, h  float64
	marks []mark
	fonts *fonts
}

func (d *drawing) line(a, b point, p pen) {
	d.marks = append(d.marks, mark{kind: stroke, at: []point{a, b}, pen: p})
}

// polyline draws the part of a line that lies in a box; it breaks at places that are not finite.
func (d *drawing) polyline(at []point, in box, p pen) {
	for _, piece := range clip(at, in) {
		d.marks = append(d.marks, mark{kind: stroke, at: piece, pen: p})
	}
}

func (d *drawing) polygon(fill color.RGBA, at ...point) {
	d.marks = append(d.marks, mark{kind: area, at: at, fill: fill})
}

func (d *drawing) slab(b box, fill color.RGBA) {
	d.polygon(fill, point{b.x0, b.y0}, point{b.x1, b.y0}, point{b.x1, b.y1}, point{b.x0, b.y1})
}

func (d *drawing) ring(at point, radius float64, fill color.RGBA, p pen) {
	d.marks = append(d.marks, mark{kind: ring, at: []point{at}, radius: radius, fill: fill, pen: p})
}

// hang draws an open triangle, half as wide as told, that points down from a level, and
// returns how far down its middle is.
func (d *drawing) hang(at point, half float64, p pen) float64 {
	a, b, tip := point{at.x - half, at.y}, point{at.x + half, at.y}, point{at.x, at.y + 1.7*half}
	d.polygon(paper, a, b, tip)
	d.marks = append(d.marks, mark{kind: stroke, at: []point{a, b, tip, a, b}, pen: p}) // once more along the top for round corners
	return 0.85 * half
}

func (d *drawing) write(at point, text string, h hand) {
	if text != "" {
		d.marks = append(d.marks, mark{kind: words, at: []point{at}, text: text, hand: h})
	}
}

// paragraph writes lines below one another and returns the base line after the last.
func (d *drawing) paragraph(at point, lines []string, h hand) float64 {
	for _, l := range lines {
		d.write(at, l, h)
		at.y += leading * h.size
	}
	return at.y
}

// leading is the distance of base lines in units of the type size.
const leading = 1.22
