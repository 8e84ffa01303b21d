package figure_test

import (
	"bytes"
	"fmt"
	"image/png"

	"bankfire/cmd/bankfire/internal/figure"
	"bankfire/thermal"
)

func ExampleDraw() {
	f := figure.Weighing{
		Title: "Harrow Fell rhyolite", Subject: "Ti in quartz HF-12", Quantity: "Ti", Unit: "ppm",
		Points: []figure.Point{{At: 140e-6, Value: 92, Sigma: 2}, {At: 150e-6, Value: 75, Sigma: 2}, {At: 160e-6, Value: 59, Sigma: 2}},
		Start:  figure.Line{At: []float64{130e-6, 150e-6, 150e-6, 170e-6}, Value: []float64{94, 94, 58, 58}},
		Paths: []figure.Path{{
			Name: "kept warm", Verdict: "reproduces", Reproduces: true,
			Profile:   figure.Line{At: []float64{130e-6, 150e-6, 170e-6}, Value: []float64{93, 76, 58}},
			Residuals: []float64{0.5, -0.5, -0.5},
			Duration: []thermal.DurationPoint{
				{Temp: 900, Time: 800 * thermal.Year}, {Temp: 1023.15, Time: 800 * thermal.Year}, {Temp: 1023.15, Time: 0},
			},
		}},
		Thresholds: []figure.Threshold{{Name: "lock-up", Temp: 1010}},
	}
	var file bytes.Buffer
	if err := figure.Draw(&file, &f); err != nil {
		fmt.Println(err)
		return
	}
	size, err := png.DecodeConfig(&file)
	fmt.Println(size.Width, size.Height, err)
	// Output: 2126 1482 <nil>
}
