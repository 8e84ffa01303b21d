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

// TestFreeProfile: a free value that adds a profile solves what the profile alone
// does, also where zones are added and the face moves, and leaves G enough where it was.
func TestFreeProfile(t *testing.T) {
	h := holdOf(t, 0.09*testSize*testSize)
	life := h.Life()
	profile := func(r float64) float64 { return 1 + math.Cos(3*r/testSize) }
	for name, change := range map[string]func(p *Problem){
		"plain":  func(*Problem) {},
		"staged": func(p *Problem) { p.Zones[1].Added = 0.4 * life },
		"grows": func(p *Problem) {
			p.Moves = []Move{{From: 0.2 * life, Until: 0.6 * life, Rate: 0.25 * testSize / life}}
		},
	} {
		t.Run(name, func(t *testing.T) {
			p := &Problem{Law: testLaw, Zones: []Zone{{Outer: 0.4 * testSize}, {Outer: testSize}}, Outer: []Rim{{Kind: Held}}}
			change(p)
			alone := *p
			alone.Profile = profile
			alone.Outer = []Rim{{Kind: Held, Value: 1.5}}
			p.Free = []Basis{{Start: []float64{0, 0}, Outer: []float64{1.5}, Profile: profile}}
			got, want := run(t, newPlan(t, p, Options{}), h), run(t, newPlan(t, &alone, Options{}), h)
			wantClose(t, "the profile", got.Cols[1], want.Cols[0], rounding)
			_, enough := newPlan(t, p, Options{}).GEnough()
			if enough != (name == "plain") {
				t.Errorf("G is enough: %t", enough)
			}
		})
	}
}
