package thermal_test

import (
	"fmt"
	"math"

	"bankfire/thermal"
)

// A cold store, woken twice: how long above 750 C, and what share of the diffusion is done while it is awake.
func ExampleBuild() {
	const celsius, kyr = thermal.ZeroCelsius, 1000 * thermal.Year
	var h thermal.History
	err := thermal.Build(&h, []thermal.Spec{
		{Kind: thermal.SpecHold, Name: "store", Temp: 690 + celsius, For: 6 * kyr},
		{Kind: thermal.SpecRepeat, Times: 2, Legs: []thermal.Spec{
			{Kind: thermal.SpecReheat, Name: "wake", Temp: 770 + celsius, Rise: 2 * thermal.Year, Dwell: 15 * thermal.Year,
				Efold: 10 * thermal.Year, For: 80 * thermal.Year},
		}},
	})
	if err != nil {
		fmt.Println(err)
		return
	}
	const e = 273e3 / thermal.GasConstant
	asleep := h.LnArrhenius(e, 0, 0, 6*kyr)
	all := h.LnArrhenius(e, 0, 0, h.Life())
	fmt.Printf("%.1f yr above 750 C\n", h.TimeAbove(750+celsius)/thermal.Year)
	fmt.Printf("%.0f %% of the diffusion while awake\n", -100*math.Expm1(asleep-all))
	for _, n := range h.Names() {
		fmt.Printf("%s: %.0f to %.0f yr\n", n.Name, n.Start/thermal.Year, n.End/thermal.Year)
	}
	// Output:
	// 36.8 yr above 750 C
	// 10 % of the diffusion while awake
	// store: 0 to 6000 yr
	// wake 1: 6000 to 6080 yr
	// wake 2: 6080 to 6160 yr
}
