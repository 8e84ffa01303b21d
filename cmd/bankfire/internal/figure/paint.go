package figure

import (
	"bytes"
	"encoding/binary"
	"fmt"
	"hash/crc32"
	"image"
	"image/color"
	"image/png"
	"io"
	"math"

	"github.com/fogleman/gg"
	"golang.org/x/image/font/sfnt"
)

// dotsPerInch is what journals ask of figures with lines and text.
const dotsPerInch = 300

// dots is the number of pixels in a printer's point.
const dots = dotsPerInch / 72.0

// brush paints marks on pixels.
type brush struct {
	dc    *gg.Context
	fonts *fonts
}

// paint turns a drawing into pixels.
func paint(d *drawing) image.Image {
	b := brush{gg.NewContext(pixels(d.w), pixels(d.h)), d.fonts}
	b.dc.SetColor(color.White)
	b.dc.Clear()
	b.dc.SetLineJoin(gg.LineJoinRound)
	for i := range d.marks {
		b.mark(&d.marks[i])
	}
	return b.dc.Image()
}

func pixels(pt float64) int { return int(math.Ceil(pt * dots)) }

func (b *brush) mark(m *mark) {
	switch m.kind {
	case stroke:
		b.trace(m.at)
		b.stroke(m.pen)
	case area:
		b.trace(m.at)
		b.fill(m.fill)
	case ring:
		c := onGrid(m.at[0])
		b.dc.DrawCircle(c.x, c.y, m.radius*dots)
		b.dc.SetColor(m.fill)
		b.dc.FillPreserve()
		b.stroke(m.pen)
	case words:
		b.write(m)
	}
}

func (b *brush) trace(at []point) {
	for i, p := range at {
		q := onGrid(p)
		if i == 0 {
			b.dc.MoveTo(q.x, q.y)
		} else {
			b.dc.LineTo(q.x, q.y)
		}
	}
}

func (b *brush) stroke(p pen) {
	dash := make([]float64, len(p.dash))
	for i, x := range p.dash {
		dash[i] = x * dots
	}
	b.dc.SetDash(dash...)
	b.dc.SetLineCap(gg.LineCapButt)
	b.dc.SetLineWidth(p.width * dots)
	b.dc.SetColor(p.ink)
	b.dc.Stroke()
}

func (b *brush) fill(c color.RGBA) {
	b.dc.SetColor(c)
	b.dc.Fill()
}

// write fills the outlines of the letters, so that turned text is as crisp as level text.
func (b *brush) write(m *mark) {
	o := m.at[0]
	back := m.hand.anchor * b.fonts.width(m.text, m.hand)
	place := func(p point) point {
		if m.hand.turned {
			return onGrid(point{o.x + p.y, o.y - (p.x - back)})
		}
		return onGrid(point{o.x + p.x - back, o.y + p.y})
	}
	for _, c := range b.fonts.outline(m.text, m.hand) {
		p, q := place(c.at[0]), place(c.at[1])
		switch c.op {
		case sfnt.SegmentOpMoveTo:
			b.dc.NewSubPath()
			b.dc.MoveTo(p.x, p.y)
		case sfnt.SegmentOpLineTo:
			b.dc.LineTo(p.x, p.y)
		case sfnt.SegmentOpQuadTo: // the fonts are TrueType: there are no cubic curves
			b.dc.QuadraticTo(p.x, p.y, q.x, q.y)
		}
	}
	b.fill(m.hand.ink)
}

// onGrid turns printer's points into pixels, rounded to the rasterizer's 64ths: the last
// bits of a coordinate, which differ between processors, then cannot reach the picture.
func onGrid(p point) point {
	return point{math.Round(p.x*dots*64) / 64, math.Round(p.y*dots*64) / 64}
}

// encode gives the bytes of a PNG that says how large it is on paper.
func encode(im image.Image) ([]byte, error) {
	var b bytes.Buffer
	if err := png.Encode(&b, im); err != nil {
		return nil, err
	}
	const header = 8 + 25 // signature and first chunk, which the size on paper has to follow
	plain := b.Bytes()
	out := append([]byte(nil), plain[:header]...)
	out = append(out, paperSize()...)
	return append(out, plain[header:]...), nil
}

// paperSize is the PNG chunk pHYs: pixels a metre, across and down.
func paperSize() []byte {
	perMetre := uint32(math.Round(dotsPerInch / 0.0254))
	body := append([]byte("pHYs"), 0, 0, 0, 0, 0, 0, 0, 0, 1)
	binary.BigEndian.PutUint32(body[4:], perMetre)
	binary.BigEndian.PutUint32(body[8:], perMetre)
	chunk := binary.BigEndian.AppendUint32(nil, 9)
	chunk = append(chunk, body...)
	return binary.BigEndian.AppendUint32(chunk, crc32.ChecksumIEEE(body))
}

// writePNG paints the drawing and writes it to w.
func (d *drawing) writePNG(w io.Writer) error {
	page, err := encode(paint(d))
	if err != nil {
		return fmt.Errorf("figure: %w", err)
	}
	_, err = w.Write(page)
	return err
}
