package paths

import (
	"fmt"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"bankfire/paths/study"
	"bankfire/thermal"
	"bankfire/thermal/numeric"
)

// exchanging is a study of a crystal that exchanges with its melt at a finite
// rate.
const exchanging = `title = "Ti in a quartz that exchanges with its melt (invented)"

[[partition]]
name = "kx"
A = "-100 kJ/mol"
B = "10 kJ/mol"

[[path]]
name = "as made"
legs = [ { hold = "750 C", for = "1 kyr" } ]

[[path]]
name = "tenfold"
legs = [ { hold = "750 C", for = "10 kyr" } ]

[[crystal]]
name = "Q1"
mineral = "quartz"
shape = "slab"
zones = [ { name = "core", width = "100 um", host = 0.4 } ]

[[crystal.element]]
name = "Ti"
law = { D0 = "7e-8 m2/s", E = "273 kJ/mol" }
start = { zones = [%s] }
rim = { %s, k = { k0 = "2.6e-6 m/s", E = "200 kJ/mol" } }
traverse = { file = "ti.csv", position = "distance [um]", zero = "rim", value = "Ti [ppm]", error = "1 ppm", spot = "point" }
`

// readWith writes a study with what was measured at micrometres from the rim, and
// more files, and reads it.
func readWith(t *testing.T, text string, measured func(x float64) float64, more ...string) *study.Study {
	t.Helper()
	var data strings.Builder
	data.WriteString("distance [um],Ti [ppm]\n")
	for x := 0.5; x < 30; x++ {
		fmt.Fprintf(&data, "%g,%.9g\n", x, measured(x*um))
	}
	return readStudy(t, text, "ti.csv", data.String(), more...)
}

// readStudy writes a study and its one file of data, and more files with the text
// of each after its name, and reads it.
func readStudy(t *testing.T, text, name, data string, more ...string) *study.Study {
	t.Helper()
	folder := t.TempDir()
	files := map[string]string{name: data, "study.toml": text}
	for i := 0; i < len(more); i += 2 {
		files[more[i]] = more[i+1]
	}
	for name, text := range files {
		if err := os.WriteFile(filepath.Join(folder, name), []byte(text), 0o666); err != nil {
			t.Fatal(err)
		}
	}
	s, err := study.Read(filepath.Join(folder, "study.toml"))
	if err != nil {
		t.Fatal(err)
	}
	return s
}

// Near its rim the crystal is a half space with surface exchange (Crank 1975, The
// mathematics of diffusion, equation 3.35), with h = k/D and z = x/(2 sqrt(D t)):
//
//	(C - C0)/(Ceq - C0) = erfc(z) - exp(h x + h2 D t) erfc(z + h sqrt(D t)).
func TestExchange(t *testing.T) {
	const (
		start, outside = 90.0, 60.0
		grid           = 0.02 // ppm of 30, what 200 cells leave
		promised       = 0.01 // of shift factors and free values
	)
	rt := thermal.GasConstant * (750 + thermal.ZeroCelsius)
	d, k := 7e-8*math.Exp(-273e3/rt), 2.6e-6*math.Exp(-200e3/rt)
	root := math.Sqrt(d * 1000 * thermal.Year)
	exact := func(x float64) float64 {
		z, h := x/(2*root), k/d*root
		return start + (outside-start)*(math.Erfc(z)-math.Exp(-z*z)*numeric.ErfcScaled(z+h))
	}
	followed := fmt.Sprintf(`following = "kx", melt = "%.12g ppm"`, outside/math.Exp((-100e3*0.4+10e3)/rt))
	for _, values := range [][2]string{
		{`"90 ppm"`, `transfer = "60 ppm"`}, {`"free"`, `transfer = "60 ppm"`},
		{`"90 ppm"`, `transfer = "free"`}, {`"free"`, `transfer = "60 +- 5 ppm"`},
		{`"90 ppm"`, followed}, {`"free"`, `given = "t.csv", temperature = "T [C]", value = "Ti [ppm]"`},
		{`"free"`, `given = "t.csv", time = "t [yr]", value = "Ti [ppm]"`},
	} {
		t.Run(values[0]+" outside "+values[1], func(t *testing.T) {
			const table = "T [C],t [yr],Ti [ppm]\n700,-1,60\n800,20000,60\n"
			s := readWith(t, fmt.Sprintf(exchanging, values[0], values[1]), exact, "t.csv", table)
			course, err := Follow(t.Context(), s, &s.Paths[0], nil)
			if err != nil {
				t.Fatal(err)
			}
			e := course.Elements[0]
			for i, r := range e.Centres {
				near(t, fmt.Sprintf("Ti at %.3g um", r/um), e.Final[i], exact(100*um-r), grid)
			}
			r := weighed(t, s)
			known := map[string]float64{"core": start, "rim": outside}
			if first, second := r.Paths[0].Outcome, r.Paths[1].Outcome; first.Verdict != Reproduces || second.Verdict == Reproduces {
				t.Errorf("verdicts %s and %s", first.Verdict, second.Verdict)
			} else {
				near(t, "shift factor", first.Shift, 1, promised)
			}
			for _, f := range r.Paths[0].Profiles[0].Free {
				near(t, f.Name, f.Value, known[f.Name], promised*start)
			}
		})
	}
}
