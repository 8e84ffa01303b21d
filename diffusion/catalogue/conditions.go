package catalogue

import (
	"fmt"
	"math"
	"slices"
	"strconv"

	"bankfire/diffusion"
	"bankfire/thermal"
)

// The names of the conditions a law can depend on.
const (
	Pressure = "pressure" // Pa
	FO2      = "fO2"      // oxygen fugacity, Pa
	XAn      = "XAn"      // mole fraction of anorthite in plagioclase
	XFe      = "XFe"      // Fe/(Fe+Mg), mole fraction
	ASiO2    = "aSiO2"    // activity of SiO2
	ATiO2    = "aTiO2"    // activity of TiO2; of no law, see Solubility
)

// Conditions are the values of conditions by name. One that is not in the map
// is not given; nil is none given.
type Conditions map[string]float64

// bounds are the lowest and highest possible value of a condition in unit; open
// leaves out the lowest itself.
type bounds struct {
	name    string
	lo, hi  float64
	open    bool
	unit    string
	example string
}

// limits returns the bounds of all conditions, in the order of Needs. The upper
// ones are far above anything in a magma or a mantle; they keep slips of the unit
// out, and every D finite.
func limits() []bounds {
	return []bounds{
		{Pressure, 0, 1e12, false, " Pa", "2 kbar"},
		{FO2, 0, 1e12, true, " Pa", "1e-7 Pa"},
		{XAn, 0, 1, false, "", "0.5"},
		{XFe, 0, 1, false, "", "0.1"},
		{ASiO2, 0, 10, true, "", "0.6"},
		{ATiO2, 0, 10, true, "", "0.6"},
	}
}

// Check returns an error for the first condition whose value is impossible: a
// pressure below zero, an fO2 or activity that is not above zero, a mole
// fraction outside 0 to 1, anything not finite or absurdly large. It panics for
// a name that is not a condition.
func (c Conditions) Check() error {
	known := limits()
	for name := range c {
		if !slices.ContainsFunc(known, func(b bounds) bool { return b.name == name }) {
			panic("catalogue: unknown condition " + name)
		}
	}
	for _, b := range known {
		if x, given := c[b.name]; given && !b.hold(x) {
			return &thermal.InputError{
				Field:   b.name,
				Value:   strconv.FormatFloat(x, 'g', -1, 64),
				Problem: "not a possible value",
				Remedy:  b.want(),
			}
		}
	}
	return nil
}

func (b bounds) hold(x float64) bool {
	return x >= b.lo && x <= b.hi && !(b.open && x == b.lo)
}

func (b bounds) want() string {
	from := "from"
	if b.open {
		from = "above"
	}
	return fmt.Sprintf("want %s %g to %g%s", from, b.lo, b.hi, b.unit)
}

// Form is the way a Term depends on its variable, "" if it does not.
type Form string

// The forms of a Term.
const (
	Linear Form = "linear" // Slope (x - Reference)
	Power  Form = "power"  // Slope log10(x / Reference)
)

// Term is what a condition adds to log10 D. The zero value adds nothing.
type Term struct {
	Variable         string // name of a condition
	Form             Form
	Slope, Reference float64
	Sigma            float64 // standard deviation of Slope, at Reference held; 0 if not known
	SlopeOf          string  // key of the law of another element from which Slope was taken; "" is none
}

// log10 returns the summand of log10 D at x.
func (t Term) log10(x float64) float64 {
	switch t.Form {
	case Linear:
		return t.Slope * (x - t.Reference)
	case Power:
		return t.Slope * math.Log10(x/t.Reference)
	}
	return 0
}

// terms returns the terms of the row that depend on something.
func (r *Row) terms() []Term {
	return slices.DeleteFunc([]Term{r.Composition, r.FO2}, func(t Term) bool { return t.Form == "" })
}

// Needs returns the names of the conditions the law depends on, empty for a
// law of temperature alone.
func (r *Row) Needs() []string {
	used := map[string]bool{Pressure: r.DV != 0}
	for _, t := range r.terms() {
		used[t.Variable] = true
	}
	var names []string
	for _, b := range limits() {
		if used[b.name] {
			names = append(names, b.name)
		}
	}
	return names
}

// OwnComposition reports whether the law depends on the very composition that
// diffuses, by a linear term.
func (r *Row) OwnComposition() bool { return r.Composition.Variable == XFe }

// OnHost returns what the composition of the host, which stays as it is, adds to
// log10 D; ok is false if the law does not depend on it.
func (r *Row) OnHost() (t Term, ok bool) {
	return r.Composition, r.Composition.Variable == XAn
}

// Command returns the command line that shows the law under conditions, with an
// example of each that it needs:
//
//	bankfire laws olivine-ca-coogan2005-a --fO2 "1e-7 Pa"
func (r *Row) Command() string {
	line := "bankfire laws " + r.Key
	needs := r.Needs()
	for _, b := range limits() {
		if !slices.Contains(needs, b.name) {
			continue
		}
		line += " --" + b.name + " "
		if b.unit == "" {
			line += b.example
		} else {
			line += strconv.Quote(b.example)
		}
	}
	return line
}

// Law returns the law under the conditions, which may hold more than the row
// needs:
//
//	ln D = ln(10) (Log10D0 + Composition + FO2) - (E + (P - PRef) DV) / (R T).
//
// The error is a *thermal.InputError whose Field is the name of the condition
// that is missing or impossible.
func (r *Row) Law(c Conditions) (diffusion.Law, error) {
	if err := c.Check(); err != nil {
		return diffusion.Law{}, err
	}
	if err := c.lacks(r.Key, r.Needs()); err != nil {
		return diffusion.Law{}, err
	}
	log10D0, energy := r.Log10D0, r.E
	for _, t := range r.terms() {
		log10D0 += t.log10(c[t.Variable])
	}
	if r.DV != 0 {
		energy += (c[Pressure] - r.PRef) * r.DV
	}
	return diffusion.Law{Terms: []diffusion.Arrhenius{{
		LnA: math.Ln10 * log10D0,
		E:   energy / thermal.GasConstant,
	}}}, nil
}

// lacks returns an error for the first condition that the relation with the key
// needs and c does not give.
func (c Conditions) lacks(key string, needs []string) error {
	for _, b := range limits() {
		if _, given := c[b.name]; slices.Contains(needs, b.name) && !given {
			return &thermal.InputError{
				Field:   b.name,
				Problem: "not given, but " + key + " depends on it",
				Remedy:  "give a value such as " + strconv.Quote(b.example),
			}
		}
	}
	return nil
}
