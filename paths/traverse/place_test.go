package traverse

import (
	"math"
	"testing"

	"github.com/google/go-cmp/cmp"
)

// TestPlace: positions as typed, moved and slanted by hand; cos 60 deg is 1/2.
func TestPlace(t *testing.T) {
	const slant = math.Pi / 3
	for _, test := range []struct {
		name         string
		t            Traverse
		origin, tilt float64
		want         []float64
	}{
		{"as typed", Traverse{Position: []float64{-1e-6, 3e-6}}, 0, 0, []float64{-1e-6, 3e-6}},
		{"from the centre", Traverse{Position: []float64{-1e-6, 3e-6}}, 1e-6, slant, []float64{0, 2e-6}},
		{"from the rim, as typed", Traverse{Position: []float64{9e-6, 4e-6}, Zero: Rim, Size: 10e-6}, 0, 0, []float64{9e-6, 4e-6}},
		{"from the rim", Traverse{Position: []float64{9e-6, 4e-6}, Zero: Rim, Size: 10e-6}, 2e-6, slant, []float64{8.5e-6, 6e-6}},
	} {
		t.Run(test.name, func(t *testing.T) {
			got := make([]float64, len(test.want))
			test.t.Place(got, test.origin, test.tilt)
			if diff := cmp.Diff(test.want, got, cmp.Comparer(within(1e-20))); diff != "" { // m: round-off
				t.Errorf("wanted -, got +:\n%s", diff)
			}
		})
	}
}

// TestWeightsAt: moved points see what points typed there see, and those moved
// out of the crystal see its end.
func TestWeightsAt(t *testing.T) {
	faces := []float64{0, 1e-6, 2e-6, 3e-6, 4e-6, 5e-6}
	for _, spot := range []Spot{{}, {TopHat, 0.7e-6}, {Gaussian, 0.4e-6}} {
		moved := Traverse{Position: []float64{4.5e-6, 1e-6}, Spot: spot, Zero: Rim, Size: 5e-6}
		want, err := NewWeights(faces, true, 0, spot, []float64{5e-6, 2e-6})
		if err != nil {
			t.Fatal(err)
		}
		got := moved.WeightsAt(faces, true, 0, -1e-6, 0) // the first to 5.5 um, half a micrometre beyond the rim
		if diff := cmp.Diff(want, got, cmp.Comparer(within(1e-9))); diff != "" {
			t.Errorf("%v: wanted -, got +:\n%s", spot, diff)
		}
	}
}

// TestWeightsAtSlant: a slanted line through a crystal sees what a straight line
// through one shrunk along it does: at 60 deg, by half.
func TestWeightsAtSlant(t *testing.T) {
	faces, wide := []float64{0, 1e-6, 2e-6, 3e-6, 4e-6, 5e-6}, []float64{0, 2e-6, 4e-6, 6e-6, 8e-6, 10e-6}
	slanted := Traverse{Position: []float64{2.5e-6, 9e-6}, Spot: Spot{Gaussian, 1e-6}}
	want, err := NewWeights(wide, true, 0, slanted.Spot, slanted.Position)
	if err != nil {
		t.Fatal(err)
	}
	got := slanted.WeightsAt(faces, true, 0, 0, math.Pi/3)
	if diff := cmp.Diff(want, got, cmp.Comparer(within(1e-9))); diff != "" {
		t.Errorf("wanted -, got +:\n%s", diff)
	}
}

func TestPlacePanics(t *testing.T) {
	for name, f := range map[string]func(){
		"length":      func() { (&Traverse{Position: []float64{1}}).Place(nil, 0, 0) },
		"unknown rim": func() { (&Traverse{Position: []float64{1}, Zero: Rim}).Place([]float64{0}, 0, 0) },
	} {
		t.Run(name, func(t *testing.T) {
			defer func() {
				if recover() == nil {
					t.Error("no panic")
				}
			}()
			f()
		})
	}
}

func within(tol float64) func(a, b float64) bool {
	return func(a, b float64) bool { return math.Abs(a-b) <= tol }
}
