package catalogue

import (
	"encoding/csv"
	"math"
	"os"
	"strconv"
	"testing"

	"bankfire/diffusion"
	"bankfire/thermal"
)

// rows reads a CSV file with a header into maps by column name.
func rows(t *testing.T, file string) []map[string]string {
	t.Helper()
	f, err := os.Open(file)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	in := csv.NewReader(f)
	in.Comment = '#'
	lines, err := in.ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	var out []map[string]string
	for _, line := range lines[1:] {
		row := map[string]string{}
		for i, name := range lines[0] {
			row[name] = line[i]
		}
		out = append(out, row)
	}
	return out
}

func number(t *testing.T, text string) float64 {
	t.Helper()
	x, err := strconv.ParseFloat(text, 64)
	if err != nil {
		t.Fatal(err)
	}
	return x
}

// metals returns the laws of metals, which are test material, by key. The one
// that depends on carbon is put in at 0.4 wt%.
func metals(t *testing.T) map[string]diffusion.Law {
	laws := map[string]diffusion.Law{}
	for _, m := range rows(t, "../../testdata/metals.csv") {
		d0, e := number(t, m["D0_m2_per_s"]), 1e3*number(t, m["E_kJ_per_mol"])
		if m["key"] == "iron_gamma-c-tibbetts1980" {
			// D(cm2/s) = 0.47 exp(-1.6 C) exp(-(37000 - 6600 C)/(1.987 T))
			const carbon = 0.4
			d0 *= math.Exp(-1.6 * carbon)
			e -= 6600 * thermal.Calorie * carbon
		}
		laws[m["key"]] = diffusion.NewLaw(d0, e)
	}
	return laws
}

// TestIndependentTable compares every law with a table that was computed from
// the published constants by another program; its file says how. Composition,
// fO2 and pressure are mostly at their references there: TestFormulas leaves them.
func TestIndependentTable(t *testing.T) {
	const (
		printed = 0.0005  // the table is printed to three decimals
		source  = 0.00005 // and was computed from log10 D0 rounded to four
	)
	iron := metals(t)
	seen := map[string]bool{}
	for _, row := range rows(t, "testdata/laws-log10D.csv") {
		key, temp := row["key"], celsius(number(t, row["temperature_C"]))
		seen[key] = true
		law, metal := iron[key]
		if !metal {
			r := find(t, key)
			law = lawAt(t, r, Conditions{XAn: 0.5, XFe: 0.1, ASiO2: 1, FO2: 1e-7, Pressure: r.PRef})
			below, above := r.Extrapolation(temp, temp)
			outside := below > 0 || above > 0 || !r.RangeKnown()
			if outside != (row["outside"] == "yes") {
				t.Errorf("%s at %s C: outside the calibrated range is %v", key, row["temperature_C"], outside)
			}
		}
		got, want := law.LnD(temp)/math.Ln10, number(t, row["log10_D"])
		if !(math.Abs(got-want) <= printed+source) {
			t.Errorf("%s at %s C: log10 D %.6f, want %s", key, row["temperature_C"], got, row["log10_D"])
		}
	}
	for _, r := range All() {
		if !seen[r.Key] {
			t.Errorf("%s is not in the table", r.Key)
		}
	}
	if len(seen) != laws+len(iron) {
		t.Errorf("%d laws compared, want %d", len(seen), laws+len(iron))
	}
}

func lawAt(t *testing.T, r *Row, c Conditions) diffusion.Law {
	t.Helper()
	law, err := r.Law(c)
	if err != nil {
		t.Fatal(err)
	}
	return law
}

// diffusivity is D, m2/s, of the law with the key at temp in K.
func diffusivity(t *testing.T, key string, c Conditions, temp float64) float64 {
	t.Helper()
	return math.Exp(lawAt(t, find(t, key), c).LnD(temp))
}

// TestFormulas evaluates the laws that depend on more than temperature away
// from their reference conditions, against the formulas as the papers print
// them (the remark column), in the papers' own units.
func TestFormulas(t *testing.T) {
	const (
		temp  = 1234.5
		p     = 7e8
		fO2   = 3e-9
		xAn   = 0.37
		xFe   = 0.23
		aSiO2 = 0.55
		rt    = 8.314462618 * temp
		// Constants of the table are rounded to five digits of E: 5 J/mol at this temperature are 5e-4 of D.
		rounding = 6e-4
	)
	given := Conditions{Pressure: p, FO2: fO2, XAn: xAn, XFe: xFe, ASiO2: aSiO2}
	exp, pow := math.Exp, math.Pow
	calories := 1.987204 * temp
	formulas := map[string]float64{
		"plagioclase-sr-giletti1994":    pow(10, -4.08-4.1*xAn) * exp(-276000/rt),
		"plagioclase-mg-costa2003":      2.92 * pow(10, -4.1*xAn-3.1) * exp(-266000/rt),
		"plagioclase-mg-vanorman2014":   exp(-6.06 - 7.96*xAn - 287000/rt),
		"plagioclase-mg-faak2013":       1.25e-4 * exp(-320924/rt) * pow(aSiO2, 2.6),
		"olivine-femg-dohmen2007-tamed": pow(10, -9.21+math.Log10(fO2/1e-7)/6+3*(xFe-0.1)) * exp(-(201000+(p-1e5)*7e-6)/rt),
		"olivine-femg-dohmen2007-ped":   pow(10, -8.91+3*(xFe-0.1)) * exp(-(220000+(p-1e5)*7e-6)/rt),
		"olivine-ni-petry2004":          3.84e-9 * pow(fO2/1e-6, 1/4.25) * exp(-(220000+(p-1e5)*7e-6)/rt),
		"olivine-ca-coogan2005-a":       1.65e-11 * pow(fO2/1e-7, 0.31) * exp(-193000/rt),
		"olivine-ca-coogan2005-b":       3.47e-11 * pow(fO2/1e-7, 0.31) * exp(-201000/rt),
		"olivine-ca-coogan2005-c":       9.55e-11 * pow(fO2/1e-7, 0.31) * exp(-207000/rt),
		"orthopyroxene-femg-dohmen2016": 1.12e-6 * pow(fO2, 0.053) * exp(-308000/rt),
		// log10 of cm2/s
		"orthopyroxene-femg-ganguly1994": 1e-4 * pow(10, -5.54+2.6*xFe-12530/temp),
		"spinel-fe-liermann2002":         1.8e-9 * exp(-(198000+(p-2e9)*5e-6)/rt),
		"spinel-mg-liermann2002":         1.9e-9 * exp(-(202000+(p-2e9)*5e-6)/rt),
		// cm2/s, cal/mol, cm3/mol; 4.184 J/cal
		"garnet-fe-chakraborty1992": 1e-4 * 0.00064 * exp(-(65824+(p-1e5)*5.6e-6/4.184)/calories),
		"garnet-mg-chakraborty1992": 1e-4 * 0.00111 * exp(-(67997+(p-1e5)*5.3e-6/4.184)/calories),
		"garnet-mn-chakraborty1992": 1e-4 * 0.000515 * exp(-(60569+(p-1e5)*6.0e-6/4.184)/calories),
		"garnet-fe-ganguly1998":     1e-4 * 3.5e-5 * exp(-(65532+(p-1e5)*5.6e-6/4.184)/calories),
		"garnet-mg-ganguly1998":     1e-4 * 4.66e-5 * exp(-(60760+(p-1e5)*5.3e-6/4.184)/calories),
		"garnet-fe-korolyuk2008":    1e-7 * exp(-(257110+p*8e-6)/rt),
		"garnet-mn-korolyuk2008":    2.3e-10 * exp(-(186610+p*6e-6)/rt),
		"garnet-mg-korolyuk2008":    4.9e-7 * exp(-(275730+p*9.2e-6)/rt),
		"garnet-ca-korolyuk2008":    4.1e-9 * exp(-(261290+p*11.2e-6)/rt),
	}
	for key, want := range formulas {
		t.Run(key, func(t *testing.T) {
			got := diffusivity(t, key, given, temp)
			if !(math.Abs(got/want-1) <= rounding) {
				t.Errorf("D is %g, want %g, ratio %g", got, want, got/want)
			}
		})
	}
	for _, r := range All() {
		if _, ok := formulas[r.Key]; !ok && len(r.Needs()) > 0 {
			t.Errorf("%s depends on %q and is not among the formulas", r.Key, r.Needs())
		}
	}
}
