package figure

import "image/color"

// Colours from ember to slate. Paths that reproduce the traverse are embers, drawn
// thicker and unbroken first; the others are slates. Within each the lightness changes from
// one to the next and so does the dash, so that lines can be told apart in grey and by any eye.
// Barred paths, which nothing was asked of, are all thin, light and dotted.
var (
	ink   = rgb(0x24282c) // text, points
	iron  = rgb(0x5f666c) // axes, small text
	mist  = rgb(0x9aa1a7) // thresholds, leaders
	ash   = rgb(0xf1e9e0) // the band of two sigma
	paper = rgb(0xffffff)
	ghost = rgb(0xb4babf) // barred paths
)

// Palette and dashes are fixed tables.
var (
	embers = []color.RGBA{rgb(0x9c1c12), rgb(0xdb6a1c), rgb(0x5a140e), rgb(0xcf9a2e)}
	slates = []color.RGBA{rgb(0x33475a), rgb(0x7f97aa), rgb(0x4f7391), rgb(0xa3b4c1)}
	dashes = [][]float64{nil, {5, 2}, {8, 1.8, 1.6, 1.8}, {1.8, 1.4}, {10, 3}}
)

func rgb(hex uint32) color.RGBA {
	return color.RGBA{uint8(hex >> 16), uint8(hex >> 8), uint8(hex), 0xff}
}

// fate is what the looks of a path tell at once.
type fate int

const (
	fails fate = iota
	reproduces
	barred
)

func (p *Path) fate() fate {
	switch {
	case p.Barred:
		return barred
	case p.Reproduces:
		return reproduces
	}
	return fails
}

// looksOf gives every path its pen. Four colours and five dashes repeat after twenty paths.
func looksOf(paths []Path) []pen {
	out := make([]pen, len(paths))
	var ember, slate int
	for i := range paths {
		switch paths[i].fate() {
		case barred:
			out[i] = pen{0.6, ghost, []float64{1, 1.3}}
		case reproduces:
			out[i] = pen{1.4, embers[ember%len(embers)], dashes[ember%len(dashes)]}
			ember++
		default:
			out[i] = pen{0.9, slates[slate%len(slates)], dashes[(slate+1)%len(dashes)]}
			slate++
		}
	}
	return out
}
