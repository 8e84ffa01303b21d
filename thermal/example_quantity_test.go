package thermal_test

import (
	"fmt"

	"bankfire/thermal"
)

func ExampleParseQuantity() {
	storage, err := thermal.ParseQuantity("690 C", thermal.Temperature)
	fmt.Printf("%.2f K, %v\n", storage, err)
	_, err = thermal.ParseQuantity("7,5 um", thermal.Length)
	fmt.Println(err)
	// Output:
	// 963.15 K, <nil>
	// "7,5 um": has a decimal comma; write 7.5, not 7,5
}

func ExampleParseUncertain() {
	rim, err := thermal.ParseUncertain("92 +- 2 ppm", thermal.Concentration)
	fmt.Println(rim.Value, rim.Sigma, err)
	// Output: 92 2 <nil>
}

func ExampleParseMoment() {
	m, err := thermal.ParseMoment("3 yr before eruption")
	fmt.Println(m.Offset/thermal.Year, err)
	_, err = thermal.ParseMoment("3 yr")
	fmt.Println(err)
	// Output:
	// -3 <nil>
	// "3 yr": is a duration, not a moment; write "3 yr after start" or "3 yr before eruption"
}
