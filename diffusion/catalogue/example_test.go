package catalogue_test

import (
	"fmt"
	"math"

	"bankfire/diffusion/catalogue"
)

func Example() {
	row, err := catalogue.Find("quartz-ti-jollands2020")
	if err != nil {
		fmt.Println(err)
		return
	}
	law, err := row.Law(nil) // Needs() is empty, so no conditions are asked for
	if err != nil {
		fmt.Println(err)
		return
	}
	const temp = 1023.15 // K
	below, _ := row.Extrapolation(temp, temp)
	fmt.Println(row.Citation)
	fmt.Printf("log10 D %.2f, %.0f K below the calibrated range\n", law.LnD(temp)/math.Ln10, below)
	// Output:
	// Jollands, Bloch & Muntener 2020, Geology 48, 654-657
	// log10 D -24.18, 150 K below the calibrated range
}
