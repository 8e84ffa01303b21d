package traverse_test

import (
	"fmt"
	"strings"

	"bankfire/paths/traverse"
)

// A step from 90 to 60 ppm, as a spot of 4 um shows it.
func Example() {
	file := strings.NewReader("distance [um],Ti [ppm],2se [ppm]\n4,87,3\n6,63,3\n")
	t, err := traverse.Read("ti.csv", file, traverse.Options{
		Position: "distance [um]",
		Value:    "Ti [ppm]",
		Errors:   traverse.Errors{Column: "2se [ppm]", Sigmas: 2},
		Spot:     traverse.Spot{Kind: traverse.TopHat, Width: 4e-6},
	})
	if err != nil {
		fmt.Println(err)
		return
	}
	faces := []float64{0, 1e-6, 2e-6, 3e-6, 4e-6, 5e-6, 6e-6, 7e-6, 8e-6, 9e-6, 10e-6}
	cells := []float64{90, 90, 90, 90, 90, 60, 60, 60, 60, 60}
	w := t.WeightsAt(faces, true, 0, 0, 0)
	seen := make([]float64, len(t.Position))
	w.Apply(seen, cells)
	for i, v := range t.Value {
		fmt.Printf("line %d: measured %g +- %g %s, model %.1f\n", t.Line[i], v, t.Sigma[i], t.Unit, seen[i])
	}
	// Output:
	// line 2: measured 87 +- 1.5 ppm, model 82.5
	// line 3: measured 63 +- 1.5 ppm, model 67.5
}
