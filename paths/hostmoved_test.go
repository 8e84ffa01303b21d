package paths

import (
	"fmt"
	"math"
	"strings"
	"testing"

	"bankfire/thermal"
)

// A host that would have moved more than a fifth of its finest feature is said to,
// by sqrt(2 D t) of Grove and others (1984), typed here once more, and how much of
// that is beyond where the law is known. Verdicts and misfits stay the same.
func TestHostMoved(t *testing.T) {
	const hotter = 1050 + thermal.ZeroCelsius
	d := 0.0011 * math.Exp(-516e3/(thermal.GasConstant*hotter))
	years := func(far float64) float64 { return far * far / (2 * d) / thermal.Year }
	read := func(years, spot, law string) *Result {
		text := strings.NewReplacer("750 C", "1050 C", `"point"`, `"`+spot+`"`, `mineral = "plagioclase"`, "mineral = \"plagioclase\"\n"+law).
			Replace(fmt.Sprintf(plagioclase, years, "6 yr", `{ held = "skin" }`))
		return weighed(t, readStudy(t, text, "sr.csv", "distance [um],Sr [ppm]\n80,520\n95,540\n105,650\n120,690\n140,700\n"))
	}
	for _, test := range []struct {
		name, spot string
		far        float64
		what       string // "" is nothing
	}{
		{"far", "point", 25 * um, "would have moved 25 um by its own law plagioclase-caalnasi-grove1984: more than a fifth of 100 um, the width of zone core"},
		{"not far", "point", 15 * um, ""},
		{"far for the spot", "20 um top-hat", 5 * um, "would have moved 5.0 um by its own law plagioclase-caalnasi-grove1984: more than a fifth of 20 um, the spot of Sr"},
		{"not far for the spot", "20 um top-hat", 3 * um, ""},
	} {
		t.Run(test.name, func(t *testing.T) {
			life := fmt.Sprintf("%.6g yr", years(test.far))
			r := read(life, test.spot, "")
			notes := strings.Join(r.Paths[0].Notes, "\n")
			if (test.what != "") != strings.Contains(notes, "the host of P1") || !strings.Contains(notes, test.what) {
				t.Errorf("notes %q, want %q", notes, test.what)
			}
			if beyond := "plagioclase-caalnasi-grove1984: 100 % of the diffusion is done below its calibrated range of 1100 to 1400 C"; (test.what != "") != strings.Contains(notes, beyond) {
				t.Errorf("notes %q, want %q", notes, beyond)
			}
			if other := strings.Join(r.Paths[1].Notes, "\n"); strings.Contains(other, "the host of P1") {
				t.Errorf("six years move no host: %q", other)
			}
			silent := read(life, test.spot, `host_law = "none"`)
			if got := strings.Join(silent.Paths[0].Notes, "\n"); strings.Contains(got, "the host of P1") {
				t.Errorf("notes %q without a law", got)
			}
			if a, b := r.Paths[0].Outcome, silent.Paths[0].Outcome; a.Verdict != b.Verdict || a.Misfit != b.Misfit {
				t.Errorf("%s with chi-square %g, without the law %s with %g", a.Verdict, a.Misfit, b.Verdict, b.Misfit)
			}
		})
	}
}

// Follow says it too, of an element that depends on the host.
func TestFollowHostMoved(t *testing.T) {
	text := strings.ReplaceAll(fmt.Sprintf(plagioclase, "1 Myr", "6 yr", `{ held = "skin" }`), "750 C", "1150 C")
	s := readStudy(t, text, "sr.csv", "distance [um],Sr [ppm]\n80,520\n95,540\n105,650\n120,690\n140,700\n")
	course, err := Follow(t.Context(), s, &s.Paths[0], nil)
	if err != nil {
		t.Fatal(err)
	}
	if got := strings.Join(course.Elements[0].Notes, "\n"); !strings.Contains(got, "the host of P1, taken to stay as it is, would have moved") {
		t.Errorf("notes %q", got)
	}
}
