package paths

import (
	"fmt"
	"math"
	"strings"
	"testing"

	"bankfire/thermal"
)

// ironStudy is a study of Fe-Mg in an olivine by a law that depends on its XFe,
// with the column that was measured and its error.
const ironStudy = `title = "Fe-Mg in an olivine (invented)"

[conditions]
pressure = "1 bar"
fO2 = "1e-7 Pa"

[[path]]
name = "as made"
legs = [ { hold = "1100 C", for = "30 day" } ]

[[path]]
name = "too short"
legs = [ { hold = "1100 C", for = "3 day" } ]

[[path]]
name = "too long"
legs = [ { hold = "1100 C", for = "300 day" } ]

[[crystal]]
name = "OL-1"
mineral = "olivine"
shape = "slab"
zones = [ { name = "core", width = "160 um" }, { name = "skin", width = "40 um" } ]

[[crystal.element]]
name = "%s"
law = "olivine-femg-dohmen2007-tamed"
start = { zones = ["90 Fo", "70 Fo"], edge = "0 um" }
rim = { held = "skin" }
traverse = { file = "ol.csv", position = "distance [um]", zero = "rim", value = "%s", error = "%s", spot = "point" }
`

// tamedD is the law as Dohmen and Chakraborty (2007) print it, at 1100 C, 1 bar
// and fO2 of 1e-7 Pa.
func tamedD(xFe float64) float64 {
	return math.Pow(10, -9.21+3*(xFe-0.1)) * math.Exp(-201000/(thermal.GasConstant*(1100+thermal.ZeroCelsius)))
}

// explicitIron solves dX/dt = d/dx (D(X) dX/dx) by the simplest scheme, D the mean
// of two cells, inwards from a rim held at XFe 0.3, for a jump to 0.1 at a depth of
// 40 um: a reference that shares nothing with the program. It returns XFe by depth.
func explicitIron(time float64) func(x float64) float64 {
	const dx, cells, jump = 0.5 * um, 360, 80
	steps := math.Ceil(time * tamedD(0.3) / (0.4 * dx * dx))
	x, d, flux := make([]float64, cells), make([]float64, cells), make([]float64, cells+1)
	for i := range x {
		x[i] = 0.1
		if i < jump {
			x[i] = 0.3
		}
	}
	for range int(steps) {
		for i := range x {
			d[i] = tamedD(x[i])
		}
		flux[0] = tamedD(0.3) * 2 * (0.3 - x[0]) / dx
		for i := 1; i < cells; i++ {
			flux[i] = (d[i-1] + d[i]) / 2 * (x[i-1] - x[i]) / dx
		}
		for i := range x {
			x[i] += (flux[i] - flux[i+1]) / dx * time / steps
		}
	}
	return func(at float64) float64 {
		at = math.Min(math.Max(at/dx-0.5, 0), cells-1.001)
		i := int(at)
		return x[i] + (at-float64(i))*(x[i+1]-x[i])
	}
}

// TestOwnXFe plants a profile along which D changes fourfold with the composition
// itself, and finds it again in each way in which such a profile may be measured.
func TestOwnXFe(t *testing.T) {
	const (
		grid     = 3e-4 // of XFe, 0.2 across the boundary: what both grids leave
		promised = 0.02 // of shift factors, half of it for the grid of the reference
	)
	exact := explicitIron(30 * thermal.Day)
	for _, test := range []struct {
		name, element, column, err string
		measured                   func(xFe float64) float64
		kept                       func(xFe float64) float64 // in the unit of the element
	}{
		{"Fo of Mg", "Mg", "Fo [mol%]", "0.2 mol%", func(x float64) float64 { return 100 * (1 - x) }, func(x float64) float64 { return 1 - x }},
		{"mole fraction of Fe", "Fe", "XFe [mole fraction]", "0.002 mole fraction", func(x float64) float64 { return x }, func(x float64) float64 { return x }},
		{"grey levels", "Fe-Mg", "BSE [grey]", "0.4 grey", func(x float64) float64 { return 30 + 200*x }, func(x float64) float64 { return x }},
	} {
		t.Run(test.name, func(t *testing.T) {
			var data strings.Builder
			fmt.Fprintf(&data, "distance [um],%s\n", test.column)
			for x := 1.0; x < 120; x += 2 {
				fmt.Fprintf(&data, "%g,%.9g\n", x, test.measured(exact(x*um)))
			}
			s := readStudy(t, fmt.Sprintf(ironStudy, test.element, test.column, test.err), "ol.csv", data.String())
			course, err := Follow(t.Context(), s, &s.Paths[0], nil)
			if err != nil {
				t.Fatal(err)
			}
			e := course.Elements[0]
			for i, r := range e.Centres {
				if x := 200*um - r; x < 150*um {
					near(t, fmt.Sprintf("value at %.3g um", x/um), e.Final[i], test.kept(exact(x)), grid)
				}
			}
			r := weighed(t, s)
			for i, want := range []struct {
				verdict Verdict
				shift   float64
			}{{Reproduces, 1}, {TooSharp, 10}, {TooSmooth, 0.1}} {
				o := r.Paths[i].Outcome
				if o.Verdict != want.verdict {
					t.Errorf("%s: verdict %s, want %s", s.Paths[i].Name, o.Verdict, want.verdict)
				}
				near(t, s.Paths[i].Name+": shift factor", o.Shift/want.shift, 1, promised)
			}
		})
	}
}
