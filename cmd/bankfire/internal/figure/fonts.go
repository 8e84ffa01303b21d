package figure

import (
	"strings"
	"unicode"

	"golang.org/x/image/font"
	"golang.org/x/image/font/gofont/gobold"
	"golang.org/x/image/font/gofont/goregular"
	"golang.org/x/image/font/sfnt"
	"golang.org/x/image/math/fixed"
)

// capHeight is the height of a capital of the Go fonts in units of the type size.
const capHeight = 0.72

// fonts measures text and gives its outlines. It is not safe for several goroutines.
type fonts struct {
	regular, bold *sfnt.Font
	buf           sfnt.Buffer
}

func newFonts() *fonts {
	return &fonts{regular: mustParse(goregular.TTF), bold: mustParse(gobold.TTF)}
}

func mustParse(ttf []byte) *sfnt.Font {
	f, err := sfnt.Parse(ttf)
	if err != nil {
		panic("figure: built-in font: " + err.Error())
	}
	return f
}

func (f *fonts) face(h hand) *sfnt.Font {
	if h.bold {
		return f.bold
	}
	return f.regular
}

// glyph is the index of a letter; letters that the font lacks become question marks.
func (f *fonts) glyph(face *sfnt.Font, r rune) sfnt.GlyphIndex {
	i, err := face.GlyphIndex(&f.buf, r)
	if err != nil || i == 0 {
		i, _ = face.GlyphIndex(&f.buf, '?')
	}
	return i
}

// em asks for measures in whole font units.
func em(face *sfnt.Font) fixed.Int26_6 { return fixed.I(int(face.UnitsPerEm())) }

// width is the length of one line of text, pt.
func (f *fonts) width(text string, h hand) float64 {
	face := f.face(h)
	var sum fixed.Int26_6
	for _, r := range text {
		a, err := face.GlyphAdvance(&f.buf, f.glyph(face, r), em(face), font.HintingNone)
		if err == nil {
			sum += a
		}
	}
	return h.size * float64(sum) / float64(em(face))
}

// contour is one command of an outline: a move, a line or a quadratic curve to the
// last of its points, pt from the start of the base line, y downwards.
type contour struct {
	op sfnt.SegmentOp
	at [2]point
}

// outline is the shape of one line of text.
func (f *fonts) outline(text string, h hand) []contour {
	face := f.face(h)
	unit := h.size / float64(em(face))
	var out []contour
	var x fixed.Int26_6
	for _, r := range text {
		g := f.glyph(face, r)
		segments, err := face.LoadGlyph(&f.buf, g, em(face), nil)
		if err != nil {
			continue
		}
		for _, s := range segments {
			c := contour{op: s.Op}
			for k, a := range s.Args[:2] {
				c.at[k] = point{unit * float64(x+a.X), unit * float64(a.Y)}
			}
			out = append(out, c)
		}
		if a, err := face.GlyphAdvance(&f.buf, g, em(face), font.HintingNone); err == nil {
			x += a
		}
	}
	return out
}

// wrap breaks text at spaces into at most a number of lines that fit a width; what
// does not fit is cut and ends in an ellipsis.
func (f *fonts) wrap(text string, h hand, width float64, most int) []string {
	var lines []string
	rest := printable(text)
	for len(rest) > 0 && len(lines) < most-1 {
		n := 1
		for n < len(rest) && f.width(strings.Join(rest[:n+1], " "), h) <= width {
			n++
		}
		line := strings.Join(rest[:n], " ")
		if f.width(line, h) > width { // one long word: let the cut below show it
			break
		}
		lines = append(lines, line)
		rest = rest[n:]
	}
	if len(rest) > 0 {
		lines = append(lines, f.cut(strings.Join(rest, " "), h, width))
	}
	return lines
}

// printable splits text at white space and drops letters that cannot be printed.
func printable(text string) []string {
	return strings.Fields(strings.Map(func(r rune) rune {
		switch {
		case unicode.IsSpace(r):
			return ' '
		case !unicode.IsPrint(r):
			return -1
		}
		return r
	}, text))
}

// cut shortens one line to a width: behind a word unless that leaves less than half of what
// there is room for.
func (f *fonts) cut(text string, h hand, width float64) string {
	if f.width(text, h) <= width {
		return text
	}
	letters := []rune(text)
	n := len(letters)
	for n > 0 && f.width(string(letters[:n])+"…", h) > width {
		n--
	}
	word := n
	for word > 0 && letters[word] != ' ' {
		word--
	}
	if 2*word >= n {
		n = word
	}
	return strings.TrimRight(string(letters[:n]), " ,;:") + "…"
}
