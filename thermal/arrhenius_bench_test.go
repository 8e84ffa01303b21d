package thermal

import (
	"testing"
)

// activationBench is E/R of Ti in quartz (Cherniak et al. 2007, 273 kJ/mol), K.
const activationBench = 273e3 / GasConstant

// pulseTrain is the path P1: 100 yr at 690 C, then ten times in 200 yr each a ramp of 5 yr to 780 C, 20 yr there, and
// relaxation back with an e-fold time of 15 yr; 2000 yr in all.
func pulseTrain() []Leg {
	const cold, hot = 690 + ZeroCelsius, 780 + ZeroCelsius
	legs := []Leg{{Kind: Hold, For: 100 * Year, T0: cold}}
	for i := range 10 {
		back := 175 * Year
		if i == 9 {
			back = 75 * Year
		}
		legs = append(legs, Leg{Kind: Ramp, For: 5 * Year, T0: cold, T1: hot}, Leg{Kind: Hold, For: 20 * Year, T0: hot},
			Leg{Kind: Relax, For: back, T0: hot, T1: cold, Tau: 15 * Year})
	}
	return legs
}

// BenchmarkLnArrhenius is the time of one integral along a leg of each kind, and along the whole path P1.
func BenchmarkLnArrhenius(b *testing.B) {
	rows := &Rows{}
	for i := range 100 {
		rows.Time, rows.Temp = append(rows.Time, float64(i)*Year), append(rows.Temp, 960+float64(i%10)*9)
	}
	for _, bench := range []struct {
		name string
		leg  Leg
	}{
		{"leg=hold", Leg{Kind: Hold, For: 1e9, T0: 1000}},
		{"leg=ramp", Leg{Kind: Ramp, For: 1e8, T0: 963.15, T1: 1053.15}},
		{"leg=ramp/rise=narrow", Leg{Kind: Ramp, For: 1e8, T0: 963.15, T1: 964.15}},
		{"leg=ramp/activation=low", Leg{Kind: Ramp, For: 1e8, T0: 1963.15, T1: 2153.15}},
		{"leg=relax", Leg{Kind: Relax, For: 1e9, T0: 1053.15, T1: 963.15, Tau: 1e8}},
		{"leg=relax/rise=wide", Leg{Kind: Relax, For: 1e9, T0: 1473.15, T1: 293.15, Tau: 1e8}},
		{"leg=sheet/side=inside", Leg{Kind: SheetCooling, For: 1e9, Sheet: &Sheet{1273, 573, 20, 3, 1e-6}}},
		{"leg=sheet/side=outside", Leg{Kind: SheetCooling, For: 1e9, Sheet: &Sheet{1273, 573, 20, 13, 1e-6}}},
		{"leg=table/rows=100", Leg{Kind: Table, Rows: rows}},
	} {
		b.Run(bench.name, func(b *testing.B) {
			b.ReportAllocs()
			for b.Loop() {
				bench.leg.LnArrhenius(activationBench, 0, 0, longest)
			}
		})
	}
	h := set(b, pulseTrain())
	b.Run("path=P1/legs=31", func(b *testing.B) {
		b.ReportAllocs()
		for b.Loop() {
			h.LnArrhenius(activationBench, 0, 0, h.Life())
		}
		b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N)/31, "ns/leg")
	})
}

// BenchmarkSet is the time to set the path P1 again.
func BenchmarkSet(b *testing.B) {
	legs := pulseTrain()
	h := set(b, legs)
	b.Run("legs=31", func(b *testing.B) {
		b.ReportAllocs()
		for b.Loop() {
			if err := h.Set(legs); err != nil {
				b.Fatal(err)
			}
		}
	})
}

// BenchmarkTimeAbove is the time of one point of the duration curve of the path P1, and of one along a sheet.
func BenchmarkTimeAbove(b *testing.B) {
	h := set(b, pulseTrain())
	sheet := Leg{Kind: SheetCooling, For: 1e9, Sheet: &Sheet{1273, 573, 20, 13, 1e-6}}
	b.Run("path=P1/legs=31", func(b *testing.B) {
		b.ReportAllocs()
		for b.Loop() {
			h.TimeAbove(1000)
		}
	})
	b.Run("leg=sheet", func(b *testing.B) {
		b.ReportAllocs()
		for b.Loop() {
			sheet.TimeAbove(700)
		}
	})
}
