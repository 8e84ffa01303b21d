package thermal

import (
	"errors"
	"math"
	"testing"
)

// unitTol is some ulps: a value is one product and at most one sum away from what was typed.
const unitTol = 4e-16

// quantityTests are read by TestParseQuantity and seed FuzzParseQuantity. Values follow from the definitions of the units
// (SI Brochure, 9th edition, 2019; NIST Special Publication 811, 2008).
var quantityTests = []struct {
	text string
	dim  Dimension
	want float64
}{
	{"690 C", Temperature, 963.15}, {"690C", Temperature, 963.15}, {"690 °C", Temperature, 963.15},
	{"690 deg C", Temperature, 963.15}, {"-20 C", Temperature, 253.15}, {"−20 °C", Temperature, 253.15},
	{"963.15 K", Temperature, 963.15}, {"32 F", Temperature, 273.15}, {"212 °F", Temperature, 373.15},
	{"-273.14 C", Temperature, 0.01},
	{"3 s", Duration, 3}, {"3 min", Duration, 180}, {"3 h", Duration, 10800}, {"10 day", Duration, 864000},
	{"10 days", Duration, 864000}, {"10 d", Duration, 864000}, {"1 yr", Duration, 31557600}, {"2 years", Duration, 63115200},
	{"12 kyr", Duration, 12 * 31557600e3}, {"1.5 Myr", Duration, 1.5 * 31557600e6}, {"1e3 yrs", Duration, 31557600e3},
	{"-3 yr", Duration, -3 * 31557600}, {"+3 yr", Duration, 3 * 31557600}, {"0 yr", Duration, 0},
	{"5 nm", Length, 5e-9}, {"3 um", Length, 3e-6}, {"3 µm", Length, 3e-6}, {"3 μm", Length, 3e-6}, {"3um", Length, 3e-6},
	{"3 microns", Length, 3e-6}, {"2 mm", Length, 2e-3}, {"2 cm", Length, 2e-2}, {".5 m", Length, 0.5}, {"5. km", Length, 5000},
	{"180 deg", Angle, math.Pi}, {"90°", Angle, math.Pi / 2}, {"1 rad", Angle, 1},
	{"273 kJ/mol", MolarEnergy, 273e3}, {"273 kJ mol-1", MolarEnergy, 273e3}, {"273 kJ·mol⁻¹", MolarEnergy, 273e3},
	{"273 kJ mol^-1", MolarEnergy, 273e3}, {"273 kJ / mol", MolarEnergy, 273e3}, {"5 J/mol", MolarEnergy, 5},
	{"2 kcal/mol", MolarEnergy, 8368}, {"2 cal/mol", MolarEnergy, 8.368}, {"1 eV", MolarEnergy, 96485.33212331},
	{"1eV", MolarEnergy, 96485.33212331}, {"1e1eV", MolarEnergy, 964853.3212331},
	{"7.01e-8 m2/s", Diffusivity, 7.01e-8}, {"7.01E-8 m²/s", Diffusivity, 7.01e-8}, {"7.01e−8 m^2 s^-1", Diffusivity, 7.01e-8},
	{"7.01e-8 m²·s⁻¹", Diffusivity, 7.01e-8}, {"2 cm2/s", Diffusivity, 2e-4}, {"1 mm2/s", Diffusivity, 1e-6},
	{"2 µm²/s", Diffusivity, 2e-12},
	{"1e-3 m/s", Velocity, 1e-3}, {"31.5576 um/yr", Velocity, 1e-12}, {"31.5576 µm yr-1", Velocity, 1e-12},
	{"8 cm3/mol", MolarVolume, 8e-6}, {"8 cm³ mol⁻¹", MolarVolume, 8e-6}, {"8e-6 m3/mol", MolarVolume, 8e-6},
	{"2 kbar", Pressure, 2e8}, {"2 bar", Pressure, 2e5}, {"200 MPa", Pressure, 2e8}, {"0.2 GPa", Pressure, 2e8}, {"7 Pa", Pressure, 7},
	{"92 ppm", Concentration, 92}, {"92 µg/g", Concentration, 92}, {"0.3 wt%", Concentration, 3000}, {"0.3 wt. %", Concentration, 3000},
	{"0.3 mole fraction", Concentration, 0.3}, {"0.3 mol fraction", Concentration, 0.3}, {"30 %", Concentration, 30},
	{"45 mol%", Concentration, 0.45}, {"88.5 Fo", Concentration, 88.5}, {"45 mol% An", Concentration, 45}, {"120 gray", Concentration, 120},
	{"30%", Concentration, 30}, {"30 per cent", Concentration, 30}, {"30 percent", Concentration, 30},
}

func TestParseQuantity(t *testing.T) {
	for _, test := range quantityTests {
		t.Run(test.text, func(t *testing.T) {
			got, err := ParseQuantity(test.text, test.dim)
			if err != nil {
				t.Fatal(err)
			}
			allowed := unitTol * math.Abs(test.want)
			if test.dim == Temperature {
				allowed = unitTol * ZeroCelsius // the offset's rounding stays where the sum is small
			}
			if diff := math.Abs(got - test.want); !(diff <= allowed) {
				t.Errorf("got %.17g, want %.17g, difference %.2g, allowed %.2g", got, test.want, diff, allowed)
			}
		})
	}
}

// refusedQuantities are read by TestParseQuantityRefuses and seed FuzzParseQuantity.
var refusedQuantities = []struct {
	text string
	dim  Dimension
	want string // the error
}{
	{"", Temperature, `is empty; want a temperature such as "750 C"`},
	{" ", Length, `" ": is empty; want a length such as "3 um"`},
	{"750", Temperature, `"750": has no unit; want C, F or K, such as "750 C"`},
	{"-300 C", Temperature, `"-300 C": not above absolute zero; want more than -273.15 C`},
	{"-273.15 C", Temperature, `"-273.15 C": not above absolute zero; want more than -273.15 C`},
	{"-459.67 F", Temperature, `"-459.67 F": not above absolute zero; want more than -459.67 F`},
	{"0 K", Temperature, `"0 K": not above absolute zero; want more than 0 K`},
	{"NaN C", Temperature, `"NaN C": is not a finite number; want a temperature such as "750 C"`},
	{"nan", Duration, `"nan": is not a finite number; want a duration such as "12 yr"`},
	{"-Inf K", Temperature, `"-Inf K": is not a finite number; want a temperature such as "750 C"`},
	{"∞ yr", Duration, `"∞ yr": is not a finite number; want a duration such as "12 yr"`},
	{"infinite", Duration, `"infinite": does not begin with a number; want a duration such as "12 yr"`},
	{"C 750", Temperature, `"C 750": does not begin with a number; want a temperature such as "750 C"`},
	{"12 kyr", Temperature, `"12 kyr": is a duration; want a temperature in C, F or K`},
	{"12 C", Duration, `"12 C": is a temperature; want a duration in s, min, h, day, yr, kyr or Myr`},
	{"750 deg", Temperature, `"750 deg": unit "deg" does not say of which scale; write C, F or K`},
	{"750 c", Temperature, `"750 c": unknown unit "c"; did you mean C? want C, F or K`},
	{"12 ka", Duration, `"12 ka": unit "ka" stands for an age before present as well as for a duration; write kyr for a duration`},
	{"2 Ma", Duration, `"2 Ma": unit "Ma" stands for an age before present as well as for a duration; write Myr for a duration`},
	{"3 m", Duration, `"3 m": unit "m" may be minutes, months or metres; write min for minutes`},
	{"3 months", Duration, `"3 months": unit "months" has no fixed length; write day, or yr (365.25 days)`},
	{"3 yars", Duration, `"3 yars": unknown unit "yars"; did you mean yr? want s, min, h, day, yr, kyr or Myr`},
	{"3 fortnights", Duration, `"3 fortnights": unknown unit "fortnights"; want s, min, h, day, yr, kyr or Myr`},
	{"273 kJ", MolarEnergy, `"273 kJ": unit "kJ" is not per mole; write kJ/mol`},
	{"273 KJ/mol", MolarEnergy, `"273 KJ/mol": unknown unit "KJ/mol"; did you mean kJ/mol? want kJ/mol, J/mol, kcal/mol, cal/mol or eV`},
	{"92 ppmm", Concentration, `"92 ppmm": unknown unit "ppmm"; did you mean ppm? want ppm, wt%, mole fraction, mol%, %, Fo, An or grey`},
	{"45 at%", Concentration, `"45 at%": unit "at%" counts the atoms of all elements; write mol%, wt% or ppm`},
	{"7,5 um", Length, `"7,5 um": has a decimal comma; write 7.5, not 7,5`},
	{"-0,25", Length, `"-0,25": has a decimal comma; write -0.25, not -0,25`},
	{"1,000 yr", Duration, `"1,000 yr": has a comma in its number; write 1000 for a thousand and 1.0 for one, without commas`},
	{"1,000,000 yr", Duration, `"1,000,000 yr": has a comma in its number; write 1000 for a thousand and 1.0 for one, without commas`},
	{"1 000 yr", Duration, `"1 000 yr": has separators in its number; write 1000, not 1 000`},
	{"12 500.5 yr", Duration, `"12 500.5 yr": has separators in its number; write 12500.5, not 12 500.5`},
	{"1'000'000 yr", Duration, `"1'000'000 yr": has separators in its number; write 1000000, not 1'000'000`},
	{"1_000 yr", Duration, `"1_000 yr": has separators in its number; write 1000, not 1_000`},
	{"1.000.000 yr", Duration, `"1.000.000 yr": has two decimal points; want one number and a unit`},
	{"7.01x10-8 m2/s", Diffusivity, `"7.01x10-8 m2/s": has a written-out power of ten; write 7.01e-8`},
	{"7 × 10⁻⁸ m2/s", Diffusivity, `"7 × 10⁻⁸ m2/s": has a written-out power of ten; write 7e-8`},
	{"7*10^3 m", Length, `"7*10^3 m": has a written-out power of ten; write 7e3`},
	{"92 +- 2 ppm", Concentration, `"92 +- 2 ppm": has an error; want a single value such as "92 ppm"`},
	{"0..2 um", Length, `"0..2 um": is a range; want a single value such as "3 um"`},
	{"1e999 um", Length, `"1e999 um": is beyond the range of numbers; want a size between 1e-300 and 1e300 in SI units`},
	{"1e-999 um", Length, `"1e-999 um": is beyond the range of numbers; want a size between 1e-300 and 1e300 in SI units`},
	{"1e-323 um", Length, `"1e-323 um": is beyond the range of numbers; want a size between 1e-300 and 1e300 in SI units`},
	{"1e306 Myr", Duration, `"1e306 Myr": is beyond the range of numbers; want a size between 1e-300 and 1e300 in SI units`},
}

func TestParseQuantityRefuses(t *testing.T) {
	for _, test := range refusedQuantities {
		t.Run(test.text, func(t *testing.T) {
			got, err := ParseQuantity(test.text, test.dim)
			checkRefused(t, err, test.text, test.want)
			if got != 0 {
				t.Errorf("a refused quantity is %g", got)
			}
		})
	}
}

// checkRefused wants an *InputError about the value, without a place, that reads as wanted.
func checkRefused(t *testing.T, err error, value, want string) {
	t.Helper()
	var input *InputError
	if !errors.As(err, &input) {
		t.Fatalf("got error %v, want an *InputError", err)
	}
	if got := err.Error(); got != want {
		t.Errorf("got  %s\nwant %s", got, want)
	}
	if input.Value != value || input.File != "" || input.Field != "" || input.Line != 0 {
		t.Errorf("error about %q at %q, %q, line %d; want it about %q without a place", input.Value, input.File, input.Field, input.Line, value)
	}
}

func TestReadQuantity(t *testing.T) {
	got, err := ReadQuantity("0.3 wt. %", Concentration)
	if want := (Quantity{Value: 3000, Dim: Concentration, Unit: "wt%"}); got != want || err != nil {
		t.Errorf("got %v and error %v, want %v", got, err, want)
	}
}

func TestParseUncertain(t *testing.T) {
	tests := []struct {
		text string
		dim  Dimension
		want Uncertain
	}{
		{"92 +- 2 ppm", Concentration, Uncertain{92, 2}},
		{"92+-2ppm", Concentration, Uncertain{92, 2}},
		{"92 ± 2 ppm", Concentration, Uncertain{92, 2}},
		{"92 +/- 2 ppm", Concentration, Uncertain{92, 2}},
		{"92 ppm +- 2 ppm", Concentration, Uncertain{92, 2}},
		{"1 wt% +- 500 ppm", Concentration, Uncertain{10000, 500}},
		{"92 ppm", Concentration, Uncertain{92, 0}},
		{"92 +- 0 ppm", Concentration, Uncertain{92, 0}},
		{"1 kyr +- 50 yr", Duration, Uncertain{1000 * Year, 50 * Year}},
		{"750 +- 10 C", Temperature, Uncertain{1023.15, 10}},
		{"750 +- 10 K", Temperature, Uncertain{750, 10}},
		{"750 C +- 18 F", Temperature, Uncertain{1023.15, 10}},
		{"1382 +- 18 F", Temperature, Uncertain{1023.15, 10}},
	}
	for _, test := range tests {
		t.Run(test.text, func(t *testing.T) {
			got, err := ParseUncertain(test.text, test.dim)
			if err != nil {
				t.Fatal(err)
			}
			if !(math.Abs(got.Value-test.want.Value) <= unitTol*test.want.Value) || !(math.Abs(got.Sigma-test.want.Sigma) <= unitTol*test.want.Sigma) {
				t.Errorf("got %v, want %v", got, test.want)
			}
		})
	}
}

func TestParseUncertainRefuses(t *testing.T) {
	tests := []struct {
		text string
		dim  Dimension
		want string
	}{
		{"92 +- 2", Concentration, `"92 +- 2": has no unit; want ppm, wt%, mole fraction, mol%, %, Fo, An or grey, such as "92 +- 2 ppm"`},
		{"92", Concentration, `"92": has no unit; want ppm, wt%, mole fraction, mol%, %, Fo, An or grey, such as "92 ppm"`},
		{"92 ppm +- 2", Concentration, `"92 ppm +- 2": has no unit; want ppm, wt%, mole fraction, mol%, %, Fo, An or grey, such as "92 ppm +- 2 ppm"`},
		{"92 ppm +- 2 %", Concentration, `"92 ppm +- 2 %": has units that do not convert; want both in ppm`},
		{"92 +- -2 ppm", Concentration, `"92 +- -2 ppm": has a negative error; want an error of at least 0`},
		{"92 +- NaN ppm", Concentration, `"92 +- NaN ppm": is not a finite number; want a concentration such as "92 ppm"`},
		{"92 +- 2,5 ppm", Concentration, `"92 +- 2,5 ppm": has a decimal comma; write 2.5, not 2,5`},
		{"92 +- ppm", Concentration, `"92 +- ppm": lacks a number; want one on both sides`},
		{"+- 2 ppm", Concentration, `"+- 2 ppm": lacks a number; want one on both sides`},
		{"-300 +- 10 C", Temperature, `"-300 +- 10 C": not above absolute zero; want more than -273.15 C`},
		{"3 +- 1 um", Temperature, `"3 +- 1 um": is a length; want a temperature in C, F or K`},
	}
	for _, test := range tests {
		t.Run(test.text, func(t *testing.T) {
			_, err := ParseUncertain(test.text, test.dim)
			checkRefused(t, err, test.text, test.want)
		})
	}
}

func TestParseFactor(t *testing.T) {
	for text, want := range map[string]Uncertain{
		"10": {10, 0}, "10 +- 3": {10, 3}, " 1e-2±2e-3 ": {0.01, 0.002}, "0": {0, 0}, "-4 +/- 1": {-4, 1},
	} {
		if got, err := ParseFactor(text); got != want || err != nil {
			t.Errorf("%q is read as %v, error %v", text, got, err)
		}
	}
	for text, want := range map[string]string{
		"10 m":      `"10 m": has a unit or more, "m"; want plain numbers such as "10" or "10 +- 3"`,
		"10 +- 3 %": `"10 +- 3 %": has a unit or more, "%"; want plain numbers such as "10" or "10 +- 3"`,
		"10 +-":     `"10 +-": is not a plain number; want plain numbers such as "10" or "10 +- 3"`,
		"":          `is not a plain number; want plain numbers such as "10" or "10 +- 3"`,
		"ten":       `"ten": is not a plain number; want plain numbers such as "10" or "10 +- 3"`,
		"10 +- -3":  `"10 +- -3": has a negative error; want an error of at least 0`,
		"1,5":       `"1,5": has a decimal comma; write 1.5, not 1,5`,
		"1e999":     `"1e999": is beyond the range of numbers; want a size between 1e-300 and 1e300 in SI units`,
	} {
		_, err := ParseFactor(text)
		checkRefused(t, err, text, want)
	}
}

func TestParseConcentration(t *testing.T) {
	tests := []struct {
		text string
		want Uncertain
		unit string
	}{
		{"92 +- 2 ppm", Uncertain{92, 2}, "ppm"},
		{"0.3 wt. %", Uncertain{0.3, 0}, "wt%"},
		{"1 wt% +- 500 ppm", Uncertain{1, 0.05}, "wt%"},
		{"0.1 mol fraction", Uncertain{0.1, 0}, "mole fraction"},
		{"30 +- 1 per cent", Uncertain{30, 1}, "%"},
	}
	for _, test := range tests {
		t.Run(test.text, func(t *testing.T) {
			got, unit, err := ParseConcentration(test.text)
			if got != test.want || unit != test.unit || err != nil {
				t.Errorf("got %v %s and error %v, want %v %s", got, unit, err, test.want, test.unit)
			}
		})
	}
	t.Run("refuses", func(t *testing.T) {
		_, _, err := ParseConcentration("3 um")
		checkRefused(t, err, "3 um", `"3 um": is a length; want a concentration in ppm, wt%, mole fraction, mol%, %, Fo, An or grey`)
		_, _, err = ParseConcentration("1 ppm +- 1e306 wt%")
		checkRefused(t, err, "1 ppm +- 1e306 wt%",
			`"1 ppm +- 1e306 wt%": is beyond the range of numbers; want a size between 1e-300 and 1e300 in SI units`)
	})
}

func TestParseRange(t *testing.T) {
	tests := []struct {
		text   string
		dim    Dimension
		lo, hi float64
	}{
		{"0..2 um", Length, 0, 2e-6},
		{"0 um .. 2 um", Length, 0, 2e-6},
		{"10 day..3 yr", Duration, 864000, 3 * Year},
		{"600..700 C", Temperature, 873.15, 973.15},
		{"0..180 deg", Angle, 0, math.Pi},
		{"-3..3 m", Length, -3, 3},
	}
	for _, test := range tests {
		t.Run(test.text, func(t *testing.T) {
			lo, hi, err := ParseRange(test.text, test.dim)
			if lo != test.lo || hi != test.hi || err != nil {
				t.Errorf("got %g to %g and error %v, want %g to %g", lo, hi, err, test.lo, test.hi)
			}
		})
	}
}

func TestParseRangeRefuses(t *testing.T) {
	tests := []struct {
		text string
		dim  Dimension
		want string
	}{
		{"", Length, `is no range; want both ends, such as "1..2 um"`},
		{"3 um", Length, `"3 um": is no range; want both ends, such as "1..2 um"`},
		{"900 C", Temperature, `"900 C": is no range; want both ends, such as "700..1000 C"`},
		{"0-2 um", Length, `"0-2 um": is no range; want both ends, such as "1..2 um"`},
		{"0...2 um", Length, `"0...2 um": is no range; want both ends, such as "1..2 um"`},
		{"2..0 um", Length, `"2..0 um": does not run upwards; want the smaller end first`},
		{"2..2 um", Length, `"2..2 um": does not run upwards; want the smaller end first`},
		{"..2 um", Length, `"..2 um": lacks a number; want one on both sides`},
		{"0..um", Length, `"0..um": lacks a number; want one on both sides`},
		{"0..2", Length, `"0..2": has no unit; want nm, um, mm, cm, m or km, such as "0..2 um"`},
		{"-300..700 C", Temperature, `"-300..700 C": not above absolute zero; want more than -273.15 C`},
		{"1 ppm..2 %", Concentration, `"1 ppm..2 %": has units that do not convert; want both in ppm`},
	}
	for _, test := range tests {
		t.Run(test.text, func(t *testing.T) {
			_, _, err := ParseRange(test.text, test.dim)
			checkRefused(t, err, test.text, test.want)
		})
	}
}
