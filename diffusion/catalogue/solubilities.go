package catalogue

import (
	"math"
	"slices"
	"strings"

	"bankfire/diffusion"
	"bankfire/thermal"
)

// Solubility is one published relation for what a mineral takes up of an element
// at a temperature T, K, and pressure P,
//
//	ln q = A + (B + C P[kbar]^N)/T + ln aTiO2 + SiO2 ln aSiO2.
//
// q is the content in ppm by mass, or the mole fraction of TiO2 in a mineral that
// is SiO2 else if Moles is set. A Solubility is plain data.
type Solubility struct {
	Key        string // unique name, element-mineral-author-year
	Mineral    string
	Element    string
	A          float64
	B          float64 // K
	C, N       float64 // K/kbar^N and 1; both 0 if it does not depend on pressure
	SiO2       float64 // exponent of aSiO2
	Moles      bool
	TMin, TMax float64 // calibrated range, K; both 0 if not known
	PMin, PMax float64 // the same in Pa; equal if there was one pressure
	Citation   string
	Confidence string // how the constants are known; the first word is confirmed, derived or memory
	checked    bool
}

const kilobar = 1e3 * thermal.Bar

// Solubilities returns every solubility relation, sorted by key.
func Solubilities() []Solubility {
	const ln10 = math.Ln10
	return []Solubility{
		{Key: "ti-quartz-huang2012", Mineral: "quartz", Element: "Ti",
			A: ln10 * 5.6459, B: ln10 * -0.27943e4, C: ln10 * -660.53, N: 0.35,
			PMin: 1 * kilobar, PMax: 10 * kilobar,
			Citation:   "Huang & Audetat 2012, Geochim. Cosmochim. Acta 84, 75-89",
			Confidence: "memory: strong"},
		{Key: "ti-quartz-thomas2010", Mineral: "quartz", Element: "Ti", Moles: true,
			A: 1.520 / thermal.GasConstant, B: -60952 / thermal.GasConstant, C: -1741 / thermal.GasConstant, N: 1,
			TMin: celsius(700), TMax: celsius(940), PMin: 5 * kilobar, PMax: 20 * kilobar,
			Citation:   "Thomas, Watson, Spear, Shemella, Nayak & Lanzirotti 2010, Contrib. Mineral. Petrol. 160, 743-759",
			Confidence: "confirmed: abstract on the publisher page", checked: true},
		{Key: "ti-quartz-wark2006", Mineral: "quartz", Element: "Ti",
			A: ln10 * 5.69, B: ln10 * -3765,
			TMin: celsius(600), TMax: celsius(1000), PMin: 10 * kilobar, PMax: 10 * kilobar,
			Citation:   "Wark & Watson 2006, Contrib. Mineral. Petrol. 152, 743-754",
			Confidence: "confirmed: abstract (5.69 +- 0.02, 3765 +- 24 K)", checked: true},
		{Key: "ti-quartz-zhang2020", Mineral: "quartz", Element: "Ti",
			A: ln10 * 5.3226, B: ln10 * -1948.4, C: ln10 * -981.4, N: 0.2,
			TMin: celsius(700), TMax: celsius(900), PMin: 0.5 * kilobar, PMax: 4 * kilobar,
			Citation:   "Zhang, Li, Almeev, Horn, Behrens & Holtz 2020, Earth Planet. Sci. Lett. 538, 116213",
			Confidence: "memory: strong; 5.32 and the calibrated ranges confirmed in the abstract; that P is in kbar is inferred"},
		{Key: "ti-zircon-ferry2007", Mineral: "zircon", Element: "Ti",
			A: ln10 * 5.711, B: ln10 * -4800, SiO2: -1,
			Citation:   "Ferry & Watson 2007, Contrib. Mineral. Petrol. 154, 429-437",
			Confidence: "confirmed: as quoted in an open paper (5.711 +- 0.072, 4800 +- 86 K)", checked: true},
	}
}

// FindSolubility returns the solubility relation with the key. If there is none
// the error is a *thermal.InputError that suggests the nearest key.
func FindSolubility(key string) (*Solubility, error) {
	all := Solubilities()
	if i := slices.IndexFunc(all, func(s Solubility) bool { return s.Key == key }); i >= 0 {
		return &all[i], nil
	}
	var keys []string
	for _, s := range all {
		keys = append(keys, s.Key)
	}
	return nil, &thermal.InputError{
		Field:   "solubility",
		Value:   key,
		Problem: "no solubility relation of the catalogue",
		Remedy:  suggestion(key, keys, "known are "+strings.Join(keys, ", ")),
	}
}

// Cautions returns the sentences that belong beside any result that rests on
// the relation.
func (s *Solubility) Cautions() []string { return unlessChecked(s.checked) }

// Needs returns the names of the conditions that the relation depends on.
func (s *Solubility) Needs() []string {
	names := []string{ATiO2}
	if s.SiO2 != 0 {
		names = append(names, ASiO2)
	}
	if s.C != 0 {
		names = append(names, Pressure)
	}
	return names
}

// RangeKnown reports whether the calibrated temperatures are known.
func (s *Solubility) RangeKnown() bool { return s.TMax > 0 }

// At returns the content under the conditions, which may hold more than the
// relation needs. The error is a *thermal.InputError whose Field is the name of
// the condition that is missing or impossible.
func (s *Solubility) At(c Conditions) (Content, error) {
	if err := c.Check(); err != nil {
		return Content{}, err
	}
	if err := c.lacks(s.Key, s.Needs()); err != nil {
		return Content{}, err
	}
	at := Content{LnA: s.A + math.Log(c[ATiO2]), E: -s.B, moles: s.Moles}
	if s.SiO2 != 0 {
		at.LnA += s.SiO2 * math.Log(c[ASiO2])
	}
	if s.C != 0 {
		at.E -= s.C * math.Pow(c[Pressure]/kilobar, s.N)
	}
	return at, nil
}

// Content is what a mineral has of an element at saturation, as a function of the
// temperature T, K, alone:
//
//	ln q = LnA - E/T,
//
// q as in Solubility.
type Content struct {
	LnA, E float64
	moles  bool
}

// PPM returns the content at temp, K, in ppm by mass. No more than all there is of
// the oxide is taken up.
func (c Content) PPM(temp float64) float64 {
	q := math.Exp(c.LnA - c.E/temp)
	if !c.moles {
		return q
	}
	x := min(q, 1)
	return 1e6 * x * thermal.TitaniumMass / (x*titania + (1-x)*silica)
}

// Slope returns d(ln PPM)/dT at temp, 1/K.
func (c Content) Slope(temp float64) float64 {
	slope := c.E / (temp * temp)
	if !c.moles {
		return slope
	}
	x := min(math.Exp(c.LnA-c.E/temp), 1)
	return slope * silica / (x*titania + (1-x)*silica)
}

// Exponential returns the content in ppm as exp(LnA - E/T); ok is false if it is
// not exactly of that form.
func (c Content) Exponential() (a diffusion.Arrhenius, ok bool) {
	return diffusion.Arrhenius{LnA: c.LnA, E: c.E}, !c.moles
}

// Molar masses of the oxides, g/mol.
const (
	titania = thermal.TitaniumMass + 2*thermal.OxygenMass
	silica  = thermal.SiliconMass + 2*thermal.OxygenMass
)
