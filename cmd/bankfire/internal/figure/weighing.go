package figure

import (
	"errors"
	"fmt"
	"io"
	"math"

	"bankfire/thermal"
)

// Weighing is one measured profile and the paths weighed against it: all that the
// figure shows. Numbers that are not finite are left out, never drawn.
type Weighing struct {
	Title      string  // of the study
	Subject    string  // what was measured and where: "Ti in quartz HF-12"
	Quantity   string  // name of the measured value: "Ti"
	Unit       string  // of every value: "ppm"; may be empty
	Points     []Point // the traverse, in any order
	Start      Line    // the profile before diffusion; may be empty
	StartOf    int     // number, from 1, of the path with which Start was fitted; 0 = all paths have this one
	Cut        bool    // the inner end is not the crystal's centre
	Inner      float64 // position of such an inner end, m; 0 = positions count from it
	Paths      []Path  // in the order of the report; those beyond the first 16 are only counted
	Thresholds []Threshold
}

// Point is one analysis: position as measured, in metres from the crystal's centre
// or from the inner end of a piece, value and its error (one sigma) in the unit of
// the figure. A Sigma that is not above zero means that no error was given: the
// point gets no bar and no residual. A Limit is a value below detection, known
// only to be less than Value: it gets no bar either.
type Point struct {
	At, Value, Sigma float64
	Limit            bool
}

// Line is a profile: values at positions like those of the points, m, in ascending
// order. Equal positions make a step. At and Value have one length.
type Line struct{ At, Value []float64 }

// Path is one path with what became of it.
type Path struct {
	Name       string
	Verdict    string                  // in words: "too sharp: needs 3.2 x more diffusion"
	Reproduces bool                    // draws the path as an ember, else as slate
	Barred     bool                    // ruled out before it was run: draws it thin and light, in dots
	Profile    Line                    // modelled, after the spot
	Residuals  []float64               // (measured - modelled)/sigma of each of the Points, of a limit as it was judged; empty if there are none
	Duration   []thermal.DurationPoint // time spent above each temperature, temperatures ascending; equal ones make a jump
}

// Threshold is a temperature, K, that the user named.
type Threshold struct {
	Name string
	Temp float64
}

// mostPaths is the number of paths that one printed page has room for.
const mostPaths = 16

// largest is the greatest magnitude that is drawn: ranges and squares of such
// numbers still fit a float64.
const largest = 1e150

// errNothing is returned when no panel would have any content.
var errNothing = errors.New("figure: nothing to draw: no finite point, profile, duration curve or threshold")

// Draw writes the figure to w as a PNG, 180 mm wide at 300 dots an inch; its height
// grows with the number of paths. Equal data give equal bytes. Draw returns an error
// when the data hold nothing that can be drawn or when w fails. It panics when the
// two slices of a Line differ in length, or Residuals and the Points.
func Draw(w io.Writer, f *Weighing) error {
	d, err := compose(f)
	if err != nil {
		return err
	}
	return d.writePNG(w)
}

// compose checks the data and lays the whole figure out.
func compose(f *Weighing) (*drawing, error) {
	f.mustFit()
	if !f.drawable() {
		return nil, errNothing
	}
	g := *f
	g.Paths = f.Paths[:min(len(f.Paths), mostPaths)]
	p := newPage(&g)
	p.heads()
	p.profile()
	p.durations()
	p.rows()
	p.footer(len(f.Paths) - len(g.Paths))
	return p.d, nil
}

// mustFit panics where slices that belong together differ in length.
func (f *Weighing) mustFit() {
	f.Start.mustFit("start")
	for i := range f.Paths {
		p := &f.Paths[i]
		p.Profile.mustFit(p.Name)
		if n := len(p.Residuals); n != 0 && n != len(f.Points) {
			panic(fmt.Sprintf("figure: path %q: len(Residuals) %d != len(Points) %d", p.Name, n, len(f.Points)))
		}
	}
}

func (l *Line) mustFit(name string) {
	if len(l.At) != len(l.Value) {
		panic(fmt.Sprintf("figure: profile %q: len(At) %d != len(Value) %d", name, len(l.At), len(l.Value)))
	}
}

// drawable reports whether anything at all can be shown.
func (f *Weighing) drawable() bool {
	ok := f.Start.drawable()
	for _, p := range f.Points {
		ok = ok || p.usable()
	}
	for i := range f.Paths {
		ok = ok || f.Paths[i].Profile.drawable() || f.Paths[i].lasting()
	}
	for _, t := range f.Thresholds {
		ok = ok || usable(t.Temp)
	}
	return ok
}

// usable reports whether x is a number that can be drawn.
func usable(x float64) bool { return math.Abs(x) <= largest }

func (p Point) usable() bool { return usable(p.At/micrometre) && usable(p.Value) }

func (p Point) hasError() bool { return p.Sigma > 0 && usable(p.Sigma) }

func (p Point) hasBar() bool { return p.hasError() && !p.Limit }

// drawable reports whether at least two neighbours can be joined.
func (l *Line) drawable() bool {
	for i := 1; i < len(l.At); i++ {
		if usable(l.At[i-1]) && usable(l.Value[i-1]) && usable(l.At[i]) && usable(l.Value[i]) {
			return true
		}
	}
	return false
}

// lasting reports whether the path spends time above any of its temperatures.
func (p *Path) lasting() bool {
	for _, q := range p.Duration {
		if lasting(q) {
			return true
		}
	}
	return false
}

func lasting(q thermal.DurationPoint) bool {
	return usable(q.Temp) && usable(q.Time) && q.Time > 0
}

// limited reports whether a value below detection is drawn.
func (f *Weighing) limited() bool {
	for _, p := range f.Points {
		if p.Limit && p.usable() {
			return true
		}
	}
	return false
}

// residual is that of point i; ok is false where the point, its error or the
// residual is wanting.
func (f *Weighing) residual(p *Path, i int) (r float64, ok bool) {
	if q := f.Points[i]; len(p.Residuals) == 0 || !q.usable() || !q.hasError() {
		return 0, false
	}
	return p.Residuals[i], usable(p.Residuals[i])
}
