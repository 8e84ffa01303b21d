package diffusion

import (
	"math"
	"testing"
)

// TestForms: a form is a factor on the plateau of its zone, on what a free value
// adds to it, and on its share of an edge.
func TestForms(t *testing.T) {
	const points = 1e-9 // what eight points a cell leave of an error function in cells of a tenth of its width
	half := func(float64) float64 { return 0.5 }
	for shape := Slab; shape <= Ball; shape++ {
		for _, edge := range []float64{0, 0.1 * testSize} {
			p := &Problem{Shape: shape, Law: testLaw, Zones: []Zone{
				{Outer: 0.4 * testSize, Start: 3, Edge: edge, Form: half}, {Outer: testSize, Start: 7}},
				Free: []Basis{{Start: []float64{1, 0}}, {Start: []float64{0, 1}}}}
			plain := *p
			plain.Zones = []Zone{{Outer: 0.4 * testSize, Start: 1.5, Edge: edge}, p.Zones[1]}
			plain.Free = []Basis{{Start: []float64{0.5, 0}}, p.Free[1]}
			faces := Options{Faces: uniform(0, testSize, 400)}
			got, want := newPlan(t, p, faces), newPlan(t, &plain, faces)
			for j := range 3 {
				wantClose(t, shape.String(), got.Start(j), want.Start(j), points)
			}
		}
	}
}

// TestFormByHand: in one flat zone the cell means of exp(x) are those of the closed
// form.
func TestFormByHand(t *testing.T) {
	p := &Problem{Law: testLaw, Zones: []Zone{{Outer: 1, Start: 2, Form: math.Exp}}}
	faces := uniform(0, 1, 20)
	want := make([]float64, 20)
	for i := range want {
		want[i] = 2 * (math.Exp(faces[i+1]) - math.Exp(faces[i])) / (faces[i+1] - faces[i])
	}
	wantClose(t, "exp", newPlan(t, p, Options{Faces: faces}).Start(0), want, rounding)
}
