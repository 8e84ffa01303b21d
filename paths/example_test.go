package paths_test

import (
	"context"
	"fmt"

	"bankfire/diffusion"
	"bankfire/paths"
	"bankfire/paths/study"
	"bankfire/paths/traverse"
	"bankfire/thermal"
)

// A study is usually read from a file by study.Read; here it is written out.
// An invented element has blurred a boundary, and two stories are told of it.
func ExampleWeigh() {
	line := &traverse.Traverse{
		Name: "invented.csv", Unit: "ppm", Line: []int{2, 3, 4, 5, 6, 7, 8, 9},
		Position: []float64{35e-6, 39e-6, 43e-6, 47e-6, 53e-6, 57e-6, 61e-6, 65e-6},
		Value:    []float64{40.1, 43.0, 46.2, 56.9, 73.1, 83.5, 88.6, 88.9},
		Sigma:    []float64{1, 1, 1, 1, 1, 1, 1, 1},
	}
	s := &study.Study{
		Title: "two stories", Confidence: 0.95,
		Paths: []study.Path{held("750 C for 800 yr", 1023.15, 800), held("690 C for 800 yr", 963.15, 800)},
		Crystals: []study.Crystal{{
			Name: "HF-12", Mineral: "quartz",
			Zones: []study.Zone{{Name: "core", Width: 50e-6, Times: 1}, {Name: "mantle", Width: 50e-6, Times: 1}},
			Elements: []study.Element{{
				Name: "Ti", Unit: "ppm",
				Law:      study.Law{Law: diffusion.NewLaw(7e-8, 273e3)},
				Start:    study.Start{Zones: []study.Plateau{{Free: true}, {Free: true}}},
				Rims:     []study.Rim{{Kind: diffusion.Held, Zone: 1}}, // at the mantle's value
				Traverse: line,
			}},
		}},
	}
	r, err := paths.Weigh(context.Background(), s, 2)
	if err != nil {
		fmt.Println(err)
		return
	}
	for _, p := range r.Paths {
		fmt.Printf("%s: %s, shift factor %.1f\n", p.Path.Name, p.Outcome.Verdict, p.Outcome.Shift)
	}
	// Output:
	// 750 C for 800 yr: reproduces, shift factor 1.0
	// 690 C for 800 yr: too sharp, shift factor 7.6
}

// held is a path at one temperature, K, for so many years.
func held(name string, temp, years float64) study.Path {
	h := new(thermal.History)
	if err := h.Set([]thermal.Leg{{Kind: thermal.Hold, For: years * thermal.Year, T0: temp}}); err != nil {
		panic(err)
	}
	return study.Path{Name: name, History: h, Eruption: h.Life()}
}

// Judge needs no solver: here chi-square rises as the square of ln m around
// a multiplier of 10, which the path would need.
func ExampleJudge() {
	c := paths.Curve{Points: 22, Free: 2}
	for x := -14.0; x <= 14; x++ {
		miss := (x - 2.302585) / 0.1
		c.LnM = append(c.LnM, x)
		c.ChiSq = append(c.ChiSq, 18+miss*miss)
		c.Slope = append(c.Slope, 2*miss/0.1)
	}
	var o paths.Outcome
	paths.Judge(&o, []paths.Curve{c}, nil, 0.95)
	fmt.Printf("%s, shift factor %.1f (%.1f to %.1f)\n", o.Verdict, o.Shift, o.Shift95[0], o.Shift95[1])
	// Output: too sharp, shift factor 10.0 (8.2 to 12.2)
}
