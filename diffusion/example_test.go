package diffusion_test

import (
	"fmt"
	"math"

	"bankfire/diffusion"
	"bankfire/thermal"
)

// A zone boundary in the middle of a slab of 100 um, once sharp, after 2000 years
// at 750 C.
func Example() {
	problem := diffusion.Problem{
		Zones: []diffusion.Zone{{Outer: 50e-6, Start: 100}, {Outer: 100e-6, Start: 40}}, // ppm
		Law:   diffusion.NewLaw(7.01e-8, 273e3),
	}
	var history thermal.History
	hold := thermal.Leg{Kind: thermal.Hold, For: 2000 * thermal.Year, T0: 750 + thermal.ZeroCelsius}
	if err := history.Set([]thermal.Leg{hold}); err != nil {
		fmt.Println(err)
		return
	}
	plan, err := diffusion.Compile(&problem, diffusion.Options{})
	if err != nil {
		fmt.Println(err)
		return
	}
	var course diffusion.Course
	if err := plan.Course(&course, &history, history.Life()); err != nil {
		fmt.Println(err)
		return
	}
	var field diffusion.Field
	if err := plan.Audit(&field, diffusion.Job{Course: &course}); err != nil {
		fmt.Println(err)
		return
	}
	i := 0
	for plan.Centres()[i] < 40e-6 {
		i++
	}
	fmt.Printf("blurred over %.1f um\n", math.Sqrt(2*math.Exp(course.LnG()))*1e6)
	fmt.Printf("%.0f ppm at %.0f um, right to %.0g ppm\n", field.Cols[0][i], plan.Centres()[i]*1e6, math.Abs(field.StepErr[0][i])+math.Abs(field.CellErr[0][i]))
	// Output:
	// blurred over 10.1 um
	// 90 ppm at 40 um, right to 0.004 ppm
}
