package catalogue

import (
	"slices"
	"strings"

	"bankfire/thermal"
)

// Partition is one published crystal/melt partition relation of a trace element
// in a host of composition x,
//
//	R T ln K = A x + B,
//
// K by weight, x a mole fraction. A Partition is plain data.
type Partition struct {
	Key            string // unique name, element-author-year
	Mineral        string
	Element        string
	Host           string  // the name of x
	A, B           float64 // J/mol
	SigmaA, SigmaB float64 // as printed, J/mol; 0 if not known
	XMin, XMax     float64 // hosts for which it was calibrated; both 0 if not known
	Citation       string
	Confidence     string // how the constants are known; the first word is confirmed, derived or memory
	checked        bool
}

// LnK returns the logarithm of the partition coefficient in a host of
// composition x at temp, K.
func (p *Partition) LnK(x, temp float64) float64 {
	return (float64(p.A*x) + p.B) / (thermal.GasConstant * temp)
}

// Cautions returns the sentences that belong beside any result that rests on
// the relation.
func (p *Partition) Cautions() []string { return unlessChecked(p.checked) }

// RangeKnown reports whether the calibrated hosts are known.
func (p *Partition) RangeKnown() bool { return p.XMax > p.XMin }

func unlessChecked(checked bool) []string {
	if checked {
		return nil
	}
	return []string{NotChecked}
}

// Partitions returns every partition relation, sorted by key.
func Partitions() []Partition {
	blundy := func(element, key string, a, b float64) Partition {
		return Partition{Key: key, Mineral: "plagioclase", Element: element, Host: XAn, A: 1e3 * a, B: 1e3 * b,
			Citation:   "Blundy & Wood 1991, Geochim. Cosmochim. Acta 55, 193-209",
			Confidence: "memory: strong"}
	}
	bindeman := func(element, key string, a, sigmaA, b, sigmaB float64) Partition {
		return Partition{Key: key, Mineral: "plagioclase", Element: element, Host: XAn,
			A: 1e3 * a, SigmaA: 1e3 * sigmaA, B: 1e3 * b, SigmaB: 1e3 * sigmaB, XMin: 0.4, XMax: 0.8,
			Citation:   "Bindeman, Davis & Drake 1998, Geochim. Cosmochim. Acta 62, 1175-1193",
			Confidence: "memory: moderate; form and calibrated hosts confirmed in the abstract"}
	}
	return []Partition{
		bindeman("Ba", "ba-bindeman1998", -55.0, 2.4, 19.1, 1.3),
		blundy("Ba", "ba-blundy1991", -38.2, 10.2),
		bindeman("K", "k-bindeman1998", -25.5, 1.2, -10.2, 0.7),
		bindeman("Mg", "mg-bindeman1998", -26.1, 1.1, -25.7, 0.7),
		bindeman("Sr", "sr-bindeman1998", -30.4, 1.1, 28.5, 0.7),
		blundy("Sr", "sr-blundy1991", -26.8, 26.7),
	}
}

// FindPartition returns the partition relation with the key. If there is none
// the error is a *thermal.InputError that suggests the nearest key.
func FindPartition(key string) (*Partition, error) {
	all := Partitions()
	if i := slices.IndexFunc(all, func(p Partition) bool { return p.Key == key }); i >= 0 {
		return &all[i], nil
	}
	var keys []string
	for _, p := range all {
		keys = append(keys, p.Key)
	}
	return nil, &thermal.InputError{
		Field:   "partition",
		Value:   key,
		Problem: "no partition relation of the catalogue",
		Remedy:  suggestion(key, keys, "known are "+strings.Join(keys, ", ")),
	}
}
