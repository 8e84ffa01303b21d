package main

import (
	"encoding/json"
	"errors"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"bankfire/diffusion/catalogue"
	"bankfire/paths/study"
	"bankfire/thermal"
)

// oneElement is a study in which only the law is missing.
const oneElement = `title = "t"

[[path]]
name = "p"
legs = [{ hold = "750 C", for = "800 yr" }]

[[crystal]]
name = "c"
mineral = "m"
shape = "slab"
zones = [{ name = "core", width = "140 um" }, { name = "mantle", width = "60 um" }]

[[crystal.element]]
name = "e"
start = { zones = ["92 ppm", "58 ppm"], edge = "0 um" }
rim = { held = "mantle" }
`

// lawOfStudy is the law of a study with the line in it.
func lawOfStudy(t *testing.T, line string) study.Law {
	t.Helper()
	file := filepath.Join(t.TempDir(), "study.toml")
	if err := os.WriteFile(file, []byte(oneElement+line+"\n"), 0o644); err != nil {
		t.Fatal(err)
	}
	s, err := study.Read(file)
	if err != nil {
		t.Fatalf("%s\n%v", line, err)
	}
	return s.Crystals[0].Elements[0].Law
}

// lawLine is the line for a study in what the command printed.
func lawLine(t *testing.T, out string) string {
	t.Helper()
	for line := range strings.Lines(out) {
		if strings.HasPrefix(line, "law = ") {
			return strings.TrimSuffix(line, "\n")
		}
	}
	t.Fatalf("no line for a study in\n%s", out)
	return ""
}

// TestLawsStudyLine pastes the line of every law of the catalogue into a study,
// which then has the law of the catalogue under the conditions, and what is
// known of it.
func TestLawsStudyLine(t *testing.T) {
	const sixDigits = 1e-6
	flags := lawsFlags{pressure: "5.3 kbar", fO2: "3e-9 Pa", xAn: "0.37", xFe: "0.13", aSiO2: "0.61"}
	conditions := catalogue.Conditions{
		catalogue.Pressure: 5.3e8, catalogue.FO2: 3e-9, catalogue.XAn: 0.37, catalogue.XFe: 0.13, catalogue.ASiO2: 0.61,
	}
	for _, r := range catalogue.All() {
		t.Run(r.Key, func(t *testing.T) {
			out, _, err := laws(flags, r.Key)
			if err != nil {
				t.Fatal(err)
			}
			got := lawOfStudy(t, lawLine(t, out))
			want, err := r.Law(conditions)
			if err != nil {
				t.Fatal(err)
			}
			for _, temp := range []float64{800, 1000, 1700} {
				if diff := got.Law.LnD(temp) - want.LnD(temp); !(math.Abs(diff) <= sixDigits) {
					t.Errorf("ln D at %g K is off by %g", temp, diff)
				}
			}
			// The range is written to a thousandth of a degree.
			if !(math.Abs(got.TMin-r.TMin) <= 1e-3) || !(math.Abs(got.TMax-r.TMax) <= 1e-3) || !(math.Abs(got.Sigma-r.SigmaMid.Value) <= sixDigits) {
				t.Errorf("sigma %g, range %g to %g K, want %g, %g to %g", got.Sigma, got.TMin, got.TMax, r.SigmaMid.Value, r.TMin, r.TMax)
			}
			if !strings.HasPrefix(got.Citation, r.Citation) {
				t.Errorf("citation %q, want %q", got.Citation, r.Citation)
			}
			cautions := strings.Join(got.Cautions(), "; ")
			for _, want := range r.Cautions() {
				if !strings.Contains(cautions, want) {
					t.Errorf("cautions %q lack %q", cautions, want)
				}
			}
		})
	}
}

// TestLawsStudyLineText holds what a line looks like. By hand: log10 D0 is
// -4.08 - 4.1 x 0.6 = -6.54, and 10^-6.54 is 2.884032e-7.
func TestLawsStudyLineText(t *testing.T) {
	out, _, err := laws(lawsFlags{xAn: "0.6"}, "plagioclase-sr-giletti1994")
	if err != nil {
		t.Fatal(err)
	}
	const want = `law = { D0 = "2.884032e-7 m2/s", E = "276 kJ/mol", sigma = 0.25, ` +
		`citation = "Giletti & Casserly 1994, Geochim. Cosmochim. Acta 58, 3785-3793 (plagioclase-sr-giletti1994 at XAn 0.6)", ` +
		`caution = "constants not checked against the paper" }`
	if got := lawLine(t, out); got != want {
		t.Errorf("got\n%s\nwant\n%s", got, want)
	}
}

// TestLawsStudyCommand: the command that the catalogue gives for a law that
// needs conditions is one that prints its line, and the error of a study that
// names the law says it.
func TestLawsStudyCommand(t *testing.T) {
	for _, r := range catalogue.All() {
		if len(r.Needs()) == 0 {
			continue
		}
		t.Run(r.Key, func(t *testing.T) {
			arguments := words(t, strings.TrimPrefix(r.Command(), "bankfire "))
			var out, errs strings.Builder
			if status := run(arguments, strings.NewReader(""), &out, &errs); status != done {
				t.Fatalf("status %d: %s", status, errs.String())
			}
			lawLine(t, out.String())
			shown, _, err := laws(lawsFlags{}, r.Key)
			if err != nil || !strings.Contains(shown, "\n  "+r.Command()+"\n") {
				t.Errorf("%v, no %q in\n%s", err, r.Command(), shown)
			}
			file := filepath.Join(t.TempDir(), "study.toml")
			if err := os.WriteFile(file, fmt.Appendf(nil, "%slaw = %q\n", oneElement, r.Key), 0o644); err != nil {
				t.Fatal(err)
			}
			if _, err := study.Read(file); err == nil || !strings.Contains(err.Error(), r.Command()) {
				t.Errorf("a study that names it: %v", err)
			}
		})
	}
}

// TestLawsPartOfTheConditions: with some of the flags, the others are asked for.
func TestLawsPartOfTheConditions(t *testing.T) {
	_, _, err := laws(lawsFlags{xFe: "0.1"}, "olivine-femg-dohmen2007-ped")
	var in *thermal.InputError
	if !errors.As(err, &in) || in.Field != "--pressure" {
		t.Errorf("got %v", err)
	}
}

func TestLawsFugacity(t *testing.T) {
	for _, test := range []struct{ text, problem string }{
		{"1e-7", "has no unit"},
		{"1e-7 C", "is a temperature"},
	} {
		t.Run(test.text, func(t *testing.T) {
			_, err := parseFugacity(test.text)
			var in *thermal.InputError
			if !errors.As(err, &in) || !strings.Contains(in.Problem, test.problem) || in.Remedy != `want a buffer such as "NNO+0.3", or a pressure such as "1e-7 Pa"` {
				t.Errorf("got %v, want %q", err, test.problem)
			}
		})
	}
	if x, err := parseFugacity("1e-7 Pa"); x != 1e-7 || err != nil {
		t.Errorf("1e-7 Pa: %g, %v", x, err)
	}
}

// TestLawsAlongABuffer compares D with the paper's formula, the fO2 of each
// temperature from that of the buffer, at a pressure and at 1 bar where none is given.
func TestLawsAlongABuffer(t *testing.T) {
	const key = "olivine-ca-coogan2005-a"
	for _, test := range []struct {
		fO2, pressure string
		offset, bar   float64
	}{{"NNO", "", 0, 1}, {"NNO + 0.3", "2 kbar", 0.3, 2000}} {
		out, _, err := laws(lawsFlags{fO2: test.fO2, pressure: test.pressure, at: []string{"1300 K", "1500 K"}, json: true}, key)
		if err != nil {
			t.Fatal(err)
		}
		var got lawValues
		if err := json.Unmarshal([]byte(out), &got); err != nil || len(got.Values) != 2 {
			t.Fatalf("%v: %s", err, out)
		}
		for _, v := range got.Values {
			log10FO2 := -24930/v.Temperature + 9.36 + 0.046*(test.bar-1)/v.Temperature + test.offset + 5
			want := 1.65e-11 * math.Pow(10, 0.31*(log10FO2+7)) * math.Exp(-193e3/(thermal.GasConstant*v.Temperature))
			if !(math.Abs(v.D/want-1) <= 1e-12) { // rounding of logarithms of size 50
				t.Errorf("fO2 %s, %g K: D %g, want %g", test.fO2, v.Temperature, v.D, want)
			}
		}
	}
}

func TestLawsFormula(t *testing.T) {
	for _, test := range []struct{ key, want string }{
		{"plagioclase-sr-giletti1994", "- 4.1 XAn, D"},
		{"olivine-femg-dohmen2007-tamed", "(201 kJ/mol + (pressure - 1 bar) 7 cm3/mol) / (ln(10) R T) + 3 (XFe - 0.1) + 0.1667 log10(fO2 / 1e-7 Pa), D"},
		{"spinel-fe-liermann2002", "(pressure - 20 kbar)"},
		{"garnet-ca-korolyuk2008", "kJ/mol + pressure "},
		{"plagioclase-mg-faak2013", "log10(aSiO2)"},
		{"orthopyroxene-femg-dohmen2016", "log10(fO2 / 1 Pa)"},
	} {
		t.Run(test.key, func(t *testing.T) {
			row, err := catalogue.Find(test.key)
			if err != nil {
				t.Fatal(err)
			}
			if got := formulaText(row); !strings.Contains(got, test.want) {
				t.Errorf("got %q, want %q in it", got, test.want)
			}
		})
	}
}

func TestPressureText(t *testing.T) {
	for _, test := range []struct {
		p    float64
		want string
	}{{5e8, "5 kbar"}, {1e8, "1 kbar"}, {2.5e7, "250 bar"}, {1e5, "1 bar"}, {101325, "1.01325 bar"}, {2e9, "20 kbar"}, {1e-7, "1e-7 Pa"}, {0, "0 Pa"}} {
		if got := pressureText(test.p); got != test.want {
			t.Errorf("%g Pa: %q, want %q", test.p, got, test.want)
		}
	}
}

func TestLawsKnownFrom(t *testing.T) {
	for _, test := range []struct{ key, want string }{
		{"zircon-pb-cherniak2001", catalogue.NotChecked},
		{"olivine-ni-petry2004", catalogue.NotChecked},
		{"plagioclase-mg-latourrette1998-b", catalogue.NotChecked + "; consistent with plagioclase-mg-costa2003"},
		{"apatite-sr-cherniak1993", catalogue.NotChecked + " (recalled as 2.7e-3 cm2/s and 65+-2 kcal/mol)"},
		{"olivine-femg-dohmen2007-ped", catalogue.NotChecked + "; confirmed: same digest for the regime boundary"},
		{"quartz-ar-thomas2008", "confirmed: abstract digest (scientific.net AbstractId 50550)"},
	} {
		t.Run(test.key, func(t *testing.T) {
			row, err := catalogue.Find(test.key)
			if err != nil {
				t.Fatal(err)
			}
			if got := knownText(row); got != test.want {
				t.Errorf("got %q, want %q", got, test.want)
			}
		})
	}
	for _, r := range catalogue.All() {
		if text := knownText(&r); strings.Contains(text, "memory") {
			t.Errorf("%s: %q is a note of ours", r.Key, text)
		}
	}
}

// TestLawsCaution: what is to be said of a law is also said of its line in a
// study, in the results and by check.
func TestLawsCaution(t *testing.T) {
	out, _, err := laws(lawsFlags{fO2: "1e-7 Pa"}, "olivine-ca-coogan2005-a")
	if err != nil {
		t.Fatal(err)
	}
	pasted := lawOfStudy(t, lawLine(t, out))
	const want = catalogue.NotChecked + "; fO2 held at 1e-7 Pa at every temperature"
	for _, test := range []struct{ where, got string }{
		{"confidence", confidence(&pasted)},
		{"check", lawText(&pasted)},
		{"notes", strings.Join(pasted.Cautions(), "; ")},
	} {
		if !strings.HasSuffix(test.got, want) {
			t.Errorf("%s: got %q, want %q at its end", test.where, test.got, want)
		}
	}
	own := lawOfStudy(t, `law = { D0 = "1e-9 m2/s", E = "250 kJ/mol" }`)
	if got := confidence(&own) + ", " + lawText(&own); got != "as given in the study, a law of this study" {
		t.Errorf("got %q", got)
	}
	for _, key := range []string{"quartz-ti-cherniak2007", "rutile-zr-cherniak2007"} {
		named := lawOfStudy(t, fmt.Sprintf("law = %q", key))
		got := lawText(&named)
		if named.Row.Checked() != strings.HasSuffix(got, "; constants known: confirmed") || strings.Contains(got, "memory") {
			t.Errorf("%s: got %q", key, got)
		}
	}
}
