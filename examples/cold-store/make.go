// Command cold-store makes the invented traverse of this example: the profile
// that the path named below leaves in the crystal of study.toml, seen through
// the instrument's spot, with random errors from a fixed seed.
//
//	go run ./examples/cold-store > examples/cold-store/hf12-ti.csv
package main

import (
	"bufio"
	"fmt"
	"io"
	"log"
	"math/rand/v2"
	"os"

	"bankfire/diffusion"
	"bankfire/paths/traverse"
	"bankfire/thermal"
)

// The invented truth. The crystal and its law are those of study.toml; the
// true path is "cold, woken ten times".
const (
	coreTi, mantleTi = 92.0, 58.0 // ppm
	sigma            = 1.6        // ppm, one standard deviation of an analysis
	seed             = 20260
	um               = 1e-6
	boundary, size   = 140 * um, 200 * um
	firstUm, lastUm  = 40, 80 // distances from the rim, a point every micrometre
	spotUm           = 0.8    // full width at half maximum
)

func main() {
	out := bufio.NewWriter(os.Stdout)
	if err := write(out); err != nil {
		log.Fatal(err)
	}
	if err := out.Flush(); err != nil {
		log.Fatal(err)
	}
}

// write writes the traverse as CSV.
func write(w io.Writer) error {
	seen, err := trueTraverse()
	if err != nil {
		return err
	}
	random := rand.New(rand.NewPCG(seed, 0))
	fmt.Fprintln(w, "distance [um],Ti [ppm],1s [ppm]")
	for i, v := range seen {
		fmt.Fprintf(w, "%d,%.1f,%.1f\n", firstUm+i, v+sigma*random.NormFloat64(), sigma)
	}
	return nil
}

// trueTraverse returns what the instrument would show without errors.
func trueTraverse() ([]float64, error) {
	problem := &diffusion.Problem{
		Zones: []diffusion.Zone{{Outer: boundary, Start: coreTi}, {Outer: size, Start: mantleTi}},
		Law:   diffusion.NewLaw(7e-8, 273e3), // Cherniak, Watson and Wark 2007
		Outer: []diffusion.Rim{{Kind: diffusion.Held, Value: mantleTi}},
	}
	plan, err := diffusion.Compile(problem, diffusion.Options{Cells: 800, Finest: 0.1 * um})
	if err != nil {
		return nil, err
	}
	history, err := truePath()
	if err != nil {
		return nil, err
	}
	var course diffusion.Course
	if err := plan.Course(&course, history, history.Life()); err != nil {
		return nil, err
	}
	fields := make([]diffusion.Field, 1)
	if err := plan.Run(fields, []diffusion.Job{{Course: &course}}); err != nil {
		return nil, err
	}
	spot := traverse.Spot{Kind: traverse.Gaussian, Width: spotUm * um / traverse.WidthPerSigma}
	var at []float64
	for x := firstUm; x <= lastUm; x++ {
		at = append(at, size-float64(x)*um)
	}
	weights, err := traverse.NewWeights(plan.Faces(), true, 0, spot, at)
	if err != nil {
		return nil, err
	}
	seen := make([]float64, len(at))
	weights.Apply(seen, fields[0].Cols[0])
	return seen, nil
}

// truePath stores the crystal at 642 C and wakes it ten times.
func truePath() (*thermal.History, error) {
	const cold, hot = thermal.ZeroCelsius + 642, thermal.ZeroCelsius + 780
	store := thermal.Spec{Kind: thermal.SpecHold, Temp: cold, For: 240 * thermal.Year}
	wake := thermal.Spec{
		Kind: thermal.SpecReheat, Temp: hot,
		Rise: 2 * thermal.Year, Dwell: 20 * thermal.Year, Efold: 10 * thermal.Year, For: 60 * thermal.Year,
	}
	h := new(thermal.History)
	return h, thermal.Build(h, []thermal.Spec{{Kind: thermal.SpecRepeat, Times: 10, Legs: []thermal.Spec{store, wake}}})
}
