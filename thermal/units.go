package thermal

import (
	"math"
	"regexp"
	"slices"
	"strings"
)

// Dimension is a kind of quantity that a user writes with a unit.
type Dimension int

// The dimensions, with the unit in which the packages compute.
const (
	Temperature   Dimension = iota // K
	Duration                       // s
	Length                         // m
	Angle                          // rad
	MolarEnergy                    // J/mol
	Diffusivity                    // m2/s
	Velocity                       // m/s
	MolarVolume                    // m3/mol
	Pressure                       // Pa
	Concentration                  // ppm where it was ppm or wt%, mole fraction where it was that or mol%, else as it was written
)

// String is the dimension as a noun with its article, "a temperature".
func (d Dimension) String() string { return dimensions[d].noun }

// Unit is the conversion of a unit of dim, by any accepted spelling, to the unit in which the packages compute:
//
//	SI = scale x + offset
//
// with an offset only for temperatures (K). ok is false if dim has no such unit.
func Unit(name string, dim Dimension) (scale, offset float64, ok bool) {
	u, ok := findUnit(name, dim)
	return u.scale, u.offset, ok
}

// UnitNames are the units of dim in their usual spelling.
func UnitNames(dim Dimension) []string {
	names := make([]string, len(dimensions[dim].units))
	for i, u := range dimensions[dim].units {
		names[i] = u.name
	}
	return names
}

// UsualUnit is the unit of dim that a petrologist is likeliest to write: "C", "yr", "um", "ppm".
func UsualUnit(dim Dimension) string { return dimensions[dim].usual() }

// UnitName is the usual spelling of a unit of dim, "wt%" for "wt. %". ok is false if dim has no such unit.
func UnitName(name string, dim Dimension) (usual string, ok bool) {
	u, ok := findUnit(name, dim)
	return u.name, ok
}

// ConcentrationFactor is the factor by which a value in the unit from becomes one in the unit to. ppm and wt% are both by
// mass, 1 wt% = 1e4 ppm, mole fraction and mol% both by moles; the others convert only to themselves. What Fo and An, 100
// times the mole fraction of forsterite and of anorthite, are of an element depends on the element; grey levels are of
// unknown scale. ok is false if there is no factor.
func ConcentrationFactor(from, to string) (factor float64, ok bool) {
	a, okA := findUnit(from, Concentration)
	b, okB := findUnit(to, Concentration)
	if !okA || !okB || a.family != b.family {
		return 0, false
	}
	return a.scale / b.scale, true
}

// unit is one unit of a dimension: SI = scale x + offset.
type unit struct {
	name          string // usual spelling
	scale, offset float64
	also          string // other spellings, separated by commas
	family        string // units convert only within a family
}

// trap is a unit that is refused with advice of its own, since users may mean different things by it.
type trap struct{ spellings, problem, remedy string }

// dimension is what the parser knows of a Dimension.
type dimension struct {
	noun  string // with its article
	like  string // an example
	ends  string // an example of a range, without the unit; "" is "1..2"
	units []unit
	traps []trap
}

// usual is the unit of the example.
func (d *dimension) usual() string {
	_, unit, _ := strings.Cut(d.like, " ")
	return unit
}

// span is an example of a range.
func (d *dimension) span() string {
	if d.ends == "" {
		return "1..2 " + d.usual()
	}
	return d.ends + " " + d.usual()
}

// age is why a, ka and Ma are refused: a path counts time forwards.
const age = "stands for an age before present as well as for a duration"

// dimensions is never changed. Besides the units that studies need, each dimension has the one in which we compute.
var dimensions = [...]dimension{
	Temperature: {noun: "a temperature", like: "750 C", ends: "700..1000", units: []unit{
		{name: "C", scale: 1, offset: ZeroCelsius, also: "degC,deg C,celsius,Celsius"},
		{name: "F", scale: FahrenheitDegree, offset: ZeroFahrenheit, also: "degF,deg F,fahrenheit,Fahrenheit"},
		{name: "K", scale: 1, also: "kelvin,Kelvin"},
	}, traps: []trap{
		{"deg", "does not say of which scale", "write C, F or K"},
	}},
	Duration: {noun: "a duration", like: "12 yr", units: []unit{
		{name: "s", scale: 1, also: "sec,secs,second,seconds"},
		{name: "min", scale: 60, also: "mins,minute,minutes"},
		{name: "h", scale: 3600, also: "hr,hrs,hour,hours"},
		{name: "day", scale: Day, also: "d,days"},
		{name: "yr", scale: Year, also: "yrs,year,years,y"},
		{name: "kyr", scale: 1e3 * Year, also: "kyrs,ky"},
		{name: "Myr", scale: 1e6 * Year, also: "Myrs,My"},
	}, traps: []trap{
		{"a", age, "write yr for a duration"},
		{"ka", age, "write kyr for a duration"},
		{"Ma", age, "write Myr for a duration"},
		{"m", "may be minutes, months or metres", "write min for minutes"},
		{"month,months,mo", "has no fixed length", "write day, or yr (365.25 days)"},
	}},
	Length: {noun: "a length", like: "3 um", units: []unit{
		{name: "nm", scale: 1e-9, also: "nanometre,nanometres,nanometer,nanometers"},
		{name: "um", scale: 1e-6, also: "micron,microns,micrometre,micrometres,micrometer,micrometers"},
		{name: "mm", scale: 1e-3, also: "millimetre,millimetres,millimeter,millimeters"},
		{name: "cm", scale: 1e-2, also: "centimetre,centimetres,centimeter,centimeters"},
		{name: "m", scale: 1, also: "metre,metres,meter,meters"},
		{name: "km", scale: 1e3, also: "kilometre,kilometres,kilometer,kilometers"},
	}},
	Angle: {noun: "an angle", like: "30 deg", units: []unit{
		{name: "deg", scale: math.Pi / 180, also: "degree,degrees"},
		{name: "rad", scale: 1, also: "radian,radians"},
	}},
	MolarEnergy: {noun: "a molar energy", like: "273 kJ/mol", units: []unit{
		{name: "kJ/mol", scale: 1e3, also: "kJ/mole"},
		{name: "J/mol", scale: 1, also: "J/mole"},
		{name: "kcal/mol", scale: 1e3 * Calorie, also: "kcal/mole"},
		{name: "cal/mol", scale: Calorie, also: "cal/mole"},
		{name: "eV", scale: Electronvolt},
	}, traps: []trap{
		{"kJ", "is not per mole", "write kJ/mol"},
		{"J", "is not per mole", "write J/mol"},
		{"kcal", "is not per mole", "write kcal/mol"},
		{"cal", "is not per mole", "write cal/mol"},
	}},
	Diffusivity: {noun: "a diffusivity", like: "1e-9 m2/s", units: []unit{
		{name: "m2/s", scale: 1, also: "m2/sec"},
		{name: "cm2/s", scale: 1e-4, also: "cm2/sec"},
		{name: "mm2/s", scale: 1e-6, also: "mm2/sec"},
		{name: "um2/s", scale: 1e-12, also: "um2/sec"},
	}},
	Velocity: {noun: "a velocity", like: "5 um/yr", units: []unit{
		{name: "m/s", scale: 1, also: "m/sec"},
		{name: "um/yr", scale: 1e-6 / Year, also: "um/year,um/y,um/a"},
	}},
	MolarVolume: {noun: "a molar volume", like: "8 cm3/mol", units: []unit{
		{name: "cm3/mol", scale: 1e-6, also: "cm3/mole"},
		{name: "m3/mol", scale: 1, also: "m3/mole"},
	}},
	Pressure: {noun: "a pressure", like: "2 kbar", units: []unit{
		{name: "bar", scale: Bar, also: "bars"},
		{name: "kbar", scale: 1e3 * Bar, also: "kbars,kb"},
		{name: "MPa", scale: 1e6},
		{name: "GPa", scale: 1e9},
		{name: "Pa", scale: 1},
	}},
	Concentration: {noun: "a concentration", like: "92 ppm", units: []unit{
		{name: "ppm", scale: 1, family: "mass", also: "ppmw,wt ppm,ug/g,mg/kg"},
		{name: "wt%", scale: 1e4, family: "mass", also: "wt %,wt.%,wt. %,wt.-%,wt-%,mass%,mass %,weight %"},
		{name: "mole fraction", scale: 1, family: "mole", also: "mol fraction,molar fraction"},
		{name: "mol%", scale: 1e-2, family: "mole", also: "mol %,mol.%,mol. %,mole%,mole %"},
		{name: "%", scale: 1, family: "cent", also: "per cent,percent"},
		{name: "Fo", scale: 1, family: "Fo", also: "mol% Fo"},
		{name: "An", scale: 1, family: "An", also: "mol% An"},
		{name: "grey", scale: 1, family: "grey", also: "gray,grey level,grey levels,gray level,gray levels,counts,cps"},
	}, traps: []trap{
		{"at%,at %,at. %,at.%", "counts the atoms of all elements", "write mol%, wt% or ppm"},
		{"ppma,at ppm,at. ppm", "counts atoms; ppm here is by mass", "write mole fraction, or ppm by mass"},
	}},
}

// findUnit is the unit of dim with the name, in any accepted spelling.
func findUnit(name string, dim Dimension) (unit, bool) {
	name = plainUnit(name)
	for _, u := range dimensions[dim].units {
		if u.name == name || spells(u.also, name) {
			return u, true
		}
	}
	return unit{}, false
}

// spells says whether name is in a list of spellings separated by commas.
func spells(list, name string) bool {
	return name != "" && slices.Contains(strings.Split(list, ","), name)
}

// plainLetters writes a unit's typographic characters as the tables do.
var plainLetters = strings.NewReplacer("µ", "u", "μ", "u", "°", "deg", "º", "deg", "²", "2", "³", "3",
	"⁻", "-", "¹", "1", "−", "-", "^", "", "·", " ", "⋅", " ", "*", " ")

// perUnit is a last factor written as a negative power, "mol-1" in "kJ mol-1".
var perUnit = regexp.MustCompile(`[ .]([A-Za-z]+)-1$`)

// plainUnit is a unit without typography: "m2/s" for "m² s⁻¹", "kJ/mol" for "kJ·mol^-1", "degC" for "°C".
func plainUnit(name string) string {
	name = strings.Join(strings.Fields(plainLetters.Replace(name)), " ")
	name = perUnit.ReplaceAllString(name, "/$1")
	return strings.ReplaceAll(strings.ReplaceAll(name, " /", "/"), "/ ", "/")
}

// UnitError says why name is no unit of dim, and what to write instead; the caller sets value and place. It is for names
// that Unit does not know.
func UnitError(name string, dim Dimension) *InputError {
	plain := plainUnit(name)
	for _, t := range dimensions[dim].traps {
		if spells(t.spellings, plain) {
			return &InputError{Problem: `unit "` + name + `" ` + t.problem, Remedy: t.remedy}
		}
	}
	for d := range dimensions {
		if _, ok := findUnit(plain, Dimension(d)); ok {
			return &InputError{Problem: "is " + Dimension(d).String(), Remedy: "want " + dim.String() + " in " + unitList(dim)}
		}
	}
	refused := &InputError{Problem: `unknown unit "` + name + `"`, Remedy: "want " + unitList(dim)}
	if near := nearestUnit(plain, dim); near != "" {
		refused.Remedy = "did you mean " + near + "? " + refused.Remedy
	}
	return refused
}

// unitList is "C, F or K".
func unitList(dim Dimension) string {
	names := UnitNames(dim)
	last := len(names) - 1
	return strings.Join(names[:last], ", ") + " or " + names[last]
}

// nearestUnit is the usual spelling of the unit of dim that is written most like name, "" if none is near: at most one
// slip in two letters, and capitals do not count.
func nearestUnit(name string, dim Dimension) string {
	nearest, least := "", len(name)/2+1
	for _, u := range dimensions[dim].units {
		for _, spelling := range append(strings.Split(u.also, ","), u.name) {
			if spelling == "" {
				continue
			}
			if n := Slips(strings.ToLower(name), strings.ToLower(spelling)); n < least {
				nearest, least = u.name, n
			}
		}
	}
	return nearest
}
