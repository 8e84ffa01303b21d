package study_test

import (
	"fmt"

	"bankfire/paths/study"
	"bankfire/thermal"
)

func Example() {
	s, err := study.Read("testdata/harrow/study.toml")
	if err != nil {
		fmt.Println(err)
		return
	}
	c := &s.Crystals[0]
	for _, p := range s.Paths {
		problem, free, err := c.Problem(&c.Elements[0], p.History)
		if err != nil {
			fmt.Println(err)
			return
		}
		fmt.Printf("%s: %.0f yr, %d zones, to be fitted:", p.Name, p.Eruption/thermal.Year, len(problem.Zones))
		for _, f := range free {
			fmt.Printf(" %s", f.Name)
		}
		fmt.Println()
	}
	// Output:
	// kept warm: 800 yr, 3 zones, to be fitted: core mantle skin
	// cold, woken twice: 9085 yr, 3 zones, to be fitted: core mantle skin
}
