package thermal

import (
	"math"
	"slices"
	"strings"
	"testing"
)

// TestUnitTable walks the table: every spelling finds its own unit and no other, and no trap hides a unit.
func TestUnitTable(t *testing.T) {
	for d := range dimensions {
		dim := Dimension(d)
		t.Run(dim.String(), func(t *testing.T) {
			seen := map[string]bool{}
			for _, u := range dimensions[dim].units {
				for _, spelling := range spellings(u) {
					if seen[spelling] || plainUnit(spelling) != spelling {
						t.Errorf("spelling %q occurs twice or is not plain", spelling)
					}
					seen[spelling] = true
				}
				if !(u.scale > 0) || math.IsInf(u.scale, 0) {
					t.Errorf("%s has scale %g", u.name, u.scale)
				}
			}
			for _, trap := range dimensions[dim].traps {
				for _, spelling := range strings.Split(trap.spellings, ",") {
					if seen[spelling] || plainUnit(spelling) != spelling {
						t.Errorf("trap %q is a unit or not plain", spelling)
					}
				}
			}
			if _, err := ParseQuantity(dimensions[dim].like, dim); err != nil {
				t.Errorf("own example: %v", err)
			}
		})
	}
}

func spellings(u unit) []string {
	if u.also == "" {
		return []string{u.name}
	}
	return append(strings.Split(u.also, ","), u.name)
}

// TestUnit: column headers use units without a number.
func TestUnit(t *testing.T) {
	tests := []struct {
		name          string
		dim           Dimension
		scale, offset float64
		ok            bool
	}{
		{"um", Length, 1e-6, 0, true},
		{" µm ", Length, 1e-6, 0, true},
		{"C", Temperature, 1, 273.15, true},
		{"wt %", Concentration, 1e4, 0, true},
		{"ppm", Length, 0, 0, false},
		{"", Length, 0, 0, false},
		{"um,mm", Length, 0, 0, false},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			scale, offset, ok := Unit(test.name, test.dim)
			if scale != test.scale || offset != test.offset || ok != test.ok {
				t.Errorf("got %g, %g, %v, want %g, %g, %v", scale, offset, ok, test.scale, test.offset, test.ok)
			}
		})
	}
}

// TestUsualUnit: a hint names the unit of a petrologist, not the smallest there is.
func TestUsualUnit(t *testing.T) {
	for dim, want := range map[Dimension]string{Temperature: "C", Duration: "yr", Length: "um", Angle: "deg", Concentration: "ppm"} {
		if got := UsualUnit(dim); got != want {
			t.Errorf("%v: got %q, want %q", dim, got, want)
		}
	}
}

func TestUnitNames(t *testing.T) {
	if got, want := UnitNames(Duration), []string{"s", "min", "h", "day", "yr", "kyr", "Myr"}; !slices.Equal(got, want) {
		t.Errorf("got %q, want %q", got, want)
	}
	if got, ok := UnitName("wt. %", Concentration); got != "wt%" || !ok {
		t.Errorf("got %q, %v, want wt%%", got, ok)
	}
}

func TestConcentrationFactor(t *testing.T) {
	tests := []struct {
		from, to string
		want     float64
		ok       bool
	}{
		{"ppm", "ppm", 1, true},
		{"wt%", "ppm", 1e4, true},
		{"ppm", "wt. %", 1e-4, true},
		{"%", "%", 1, true},
		{"mole fraction", "%", 0, false},
		{"wt%", "%", 0, false},
		{"mol%", "mole fraction", 0.01, true},
		{"Fo", "mole fraction", 0, false},
		{"grey", "%", 0, false},
		{"um", "um", 0, false},
	}
	for _, test := range tests {
		t.Run(test.from+" to "+test.to, func(t *testing.T) {
			if got, ok := ConcentrationFactor(test.from, test.to); got != test.want || ok != test.ok {
				t.Errorf("got %g, %v, want %g, %v", got, ok, test.want, test.ok)
			}
		})
	}
}
