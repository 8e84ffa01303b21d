package catalogue

import (
	"math"

	"bankfire/thermal"
)

// Tag says which kind of diffusion a law describes.
type Tag string

// The tags. A row is Unstated unless its species or remark names the kind.
const (
	Tracer         Tag = "tracer"
	Self           Tag = "self"
	Inter          Tag = "inter"
	Multicomponent Tag = "multicomponent" // one ingredient of a multicomponent flux
	Unstated       Tag = "unstated"
)

// Tags returns all tags.
func Tags() []Tag { return []Tag{Tracer, Self, Inter, Multicomponent, Unstated} }

// The origins of an uncertainty.
const (
	FromSource     = "source"
	FromCovariance = "derived from covariance"
	DefaultMid     = "default 0.25"
	DefaultE       = "default 5 %"
)

// Sigma is a standard deviation and where it comes from: FromSource,
// FromCovariance, DefaultMid or DefaultE.
type Sigma struct {
	Value  float64
	Origin string
}

// Row is one published law,
//
//	log10 D = Log10D0 + Composition + FO2 - (E + (P - PRef) DV) / (ln(10) R T),
//
// D in m2/s. A Row is plain data; copies are independent of each other.
type Row struct {
	Key     string // unique name, mineral-element-author-year
	Mineral string
	Species string // what moves, with the paper's word for the experiment
	Tag     Tag

	Log10D0      float64 // log10 of D0 in m2/s
	SigmaLog10D0 float64 // as printed, 0 if not; strongly correlated with SigmaE, never to be combined with it
	E            float64 // activation energy, J/mol
	SigmaE       Sigma   // J/mol
	SigmaMid     Sigma   // of log10 D in the middle of the calibrated 1/T range, see Middle
	DV           float64 // activation volume, m3/mol, 0 if none was published
	PRef         float64 // pressure to which D0 and E belong where DV is not 0, Pa

	Composition Term // of XAn, XFe or aSiO2
	FO2         Term

	Direction  string  // crystallographic direction, "" if not stated
	TMin, TMax float64 // calibrated range, K; both 0 if not known
	PRange     string  // pressure and atmosphere of the experiments
	Citation   string  // authors, year, journal, pages
	Confidence string  // how the constants are known; the first word is confirmed, derived or memory
	Remark     string
	checked    bool
}

// NotChecked is the sentence that stands beside every result that rests on a
// row which is not Checked.
const NotChecked = "constants not checked against the paper"

// Checked reports whether every constant that enters D was seen in its source.
// If not, NotChecked is to be printed.
func (r *Row) Checked() bool { return r.checked }

// Cautions returns the sentences that belong beside any result that rests on
// the row, none for most rows.
func (r *Row) Cautions() []string {
	var out []string
	if !r.checked {
		out = append(out, NotChecked)
	}
	if r.Tag == Multicomponent {
		out = append(out, "one ingredient of a multicomponent flux, used alone")
	}
	return out
}

// RangeKnown reports whether the calibrated temperatures are known.
func (r *Row) RangeKnown() bool { return r.TMax > 0 }

// Middle returns the temperature, K, in the middle of the calibrated 1/T range,
//
//	1/T = (1/TMin + 1/TMax) / 2,
//
// the one at which SigmaMid holds. ok is false if the range is not known.
func (r *Row) Middle() (temp float64, ok bool) {
	if !r.RangeKnown() {
		return 0, false
	}
	return 2 / (1/r.TMin + 1/r.TMax), true
}

// Extrapolation returns by how many kelvin the temperatures lo to hi, K, reach
// below and above the calibrated range: 0, 0 inside it, and 0, 0 also where no
// range is known, which RangeKnown tells apart.
func (r *Row) Extrapolation(lo, hi float64) (below, above float64) {
	if !(lo <= hi) {
		panic("catalogue: lo above hi")
	}
	if !r.RangeKnown() {
		return 0, 0
	}
	return math.Max(0, r.TMin-lo), math.Max(0, hi-r.TMax)
}

// celsius converts to K.
func celsius(t float64) float64 { return t + thermal.ZeroCelsius }
