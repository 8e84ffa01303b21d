package catalogue

import (
	"math"
	"slices"
	"strconv"
	"strings"

	"bankfire/diffusion"
	"bankfire/thermal"
)

// Buffer is an assemblage that fixes the oxygen fugacity at a temperature T, K,
// and pressure P,
//
//	log10 fO2[bar] = A/T + B + C (P[bar] - 1)/T.
type Buffer struct {
	Names      []string // the usual one first
	A, B, C    float64  // K, 1, K/bar
	Citation   string
	Confidence string // how the constants are known; the first word is confirmed, derived or memory
	checked    bool
}

// Buffers returns every buffer.
func Buffers() []Buffer {
	return []Buffer{
		{Names: []string{"NNO"}, A: -24930, B: 9.36, C: 0.046,
			Citation:   "Huebner & Sato 1970, Am. Mineral. 55, 934-952, as listed by Frost 1991, Rev. Mineral. 25, 1-9",
			Confidence: "memory: strong"},
		{Names: []string{"QFM", "FMQ"}, A: -25096.3, B: 8.735, C: 0.110, // above the quartz transition
			Citation:   "Frost 1991, Rev. Mineral. 25, 1-9",
			Confidence: "memory: strong"},
	}
}

// FindBuffer returns the buffer of the name; ok is false if there is none.
func FindBuffer(name string) (b *Buffer, ok bool) {
	all := Buffers()
	i := slices.IndexFunc(all, func(b Buffer) bool { return slices.Contains(b.Names, name) })
	if i < 0 {
		return nil, false
	}
	return &all[i], true
}

// MaxOffset is how many log10 units off a buffer no magma is.
const MaxOffset = 10

// CutOffset takes "NNO + 0.3" apart into the name of a buffer and an offset in log10
// units. ok is false if what follows the name is no number.
func CutOffset(text string) (name string, offset float64, ok bool) {
	text = strings.NewReplacer(" ", "", "\u2212", "-").Replace(text)
	i := strings.IndexAny(text, "+-")
	if i < 0 {
		return text, 0, true
	}
	offset, err := strconv.ParseFloat(text[i:], 64)
	return text[:i], offset, err == nil
}

// Cautions returns the sentences that belong beside any result that rests on
// the buffer.
func (b *Buffer) Cautions() []string {
	var out []string
	for _, caution := range unlessChecked(b.checked) {
		out = append(out, "the "+b.Names[0]+" buffer: "+caution)
	}
	return out
}

// Fugacity is an oxygen fugacity, Pa, that follows the temperature T, K,
//
//	log10 fO2 = Const + PerT/T.
type Fugacity struct{ Const, PerT float64 }

// Log10 returns log10 of the fugacity in Pa at temp, K.
func (f Fugacity) Log10(temp float64) float64 { return f.Const + f.PerT/temp }

// Fugacity returns the fugacity offset log10 units above the buffer at a
// pressure, Pa.
func (b *Buffer) Fugacity(offset, pressure float64) Fugacity {
	const bar = 1e5 // Pa
	return Fugacity{
		Const: b.B + offset + math.Log10(bar),
		PerT:  b.A + b.C*(pressure/bar-1),
	}
}

// LawAlong returns, as Law does, the law where fO2 follows the temperature. It is
// Arrhenius still, with an apparent activation energy:
//
//	ln D = ... + ln(10) n (Const - log10 reference) + ln(10) n PerT/T,
//
// n being the exponent of fO2. An fO2 in c is passed over.
func (r *Row) LawAlong(c Conditions, f Fugacity) (diffusion.Law, error) {
	at := Conditions{}
	for name, x := range c {
		at[name] = x
	}
	delete(at, FO2)
	if r.FO2.Form == "" {
		return r.Law(at)
	}
	at[FO2] = r.FO2.Reference
	law, err := r.Law(at)
	if err != nil {
		return law, err
	}
	if !(math.Abs(f.Const)+math.Abs(f.PerT) < math.Inf(1)) {
		return diffusion.Law{}, &thermal.InputError{Field: FO2, Problem: "not a possible value", Remedy: "want a finite one"}
	}
	for i := range law.Terms {
		a := &law.Terms[i]
		a.LnA += math.Ln10 * r.FO2.Slope * (f.Const - math.Log10(r.FO2.Reference))
		a.E -= math.Ln10 * r.FO2.Slope * f.PerT
	}
	return law, nil
}
