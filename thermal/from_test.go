package thermal

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"
)

// TestFromIntegral: the integral of what comes after a moment is that of the whole path from the moment on, for every kind of
// leg, to round-off.
func TestFromIntegral(t *testing.T) {
	// The exponent e/T up to 100 turns a rounding of T into 1e-14; times that are sums of legs of an hour and of a million
	// years are rounded to 1e-16 of the path, and a leg may be 1e-6 of it at the temperature that counts.
	const tol = 1e-10
	const sheetsTol = 1e-9 // quadrature that starts elsewhere, see LnArrhenius
	r := rand.New(rand.NewPCG(5, 1))
	cut := map[Kind]int{}
	for n := range 400 {
		h := randomHistory(t, r)
		at := between(r, 0, h.Life())
		i := h.leg(at)
		at = between(r, h.starts[i], h.starts[i+1]) // legs of all lengths alike
		sub, err := h.From(at)
		if err != nil {
			t.Fatal(err)
		}
		cut[h.legs[i].Kind]++
		e, k := between(r, -5000, 60000), r.IntN(2)
		whole := h.LnArrhenius(e, k, at, h.Life())
		allowed := tol
		if h.legs[i].Kind == SheetCooling {
			allowed = sheetsTol
		}
		closeTo(t, fmt.Sprintf("%d: ln of the integral after %g of %g s, in a %s", n, at, h.Life(), h.legs[i].Kind),
			sub.LnArrhenius(e, k, 0, sub.Life()), whole, allowed)
		closeTo(t, fmt.Sprintf("%d: life", n), sub.Life(), h.Life()-at, 1e-12*h.Life())
	}
	for kind := Hold; kind <= Table; kind++ {
		if cut[kind] < 10 {
			t.Errorf("only %d legs of kind %s were cut", cut[kind], kind)
		}
	}
}

// TestFromTemperature: at every time it is as hot as the whole path.
func TestFromTemperature(t *testing.T) {
	r := rand.New(rand.NewPCG(5, 2))
	for n := range 100 {
		h := set(t, []Leg{randomLeg(r)})
		at := between(r, 0, h.Life())
		sub, err := h.From(at)
		if err != nil {
			t.Fatal(err)
		}
		for range 10 {
			x := between(r, 0, sub.Life())
			want, _ := h.At(at + x)
			got, _ := sub.At(x)
			closeTo(t, fmt.Sprintf("%d: %s, %g s after %g", n, h.legs[0].Kind, x, at), got, want, 1e-8*want)
		}
		temp := between(r, 600, 1600)
		closeTo(t, fmt.Sprintf("%d: %s, time above %g K", n, h.legs[0].Kind, temp),
			sub.TimeAbove(temp), h.TimeAbove(temp)-h.timeAboveUntil(temp, at), 1e-6*h.Life())
	}
}

// timeAboveUntil is the time above temp before t, by the eruption being there.
func (h *History) timeAboveUntil(temp, t float64) float64 {
	early := *h
	early.eruption = t
	return early.TimeAbove(temp)
}

// TestFromMoments: names, the eruption and legs that begin at the moment.
func TestFromMoments(t *testing.T) {
	h := new(History)
	err := Build(h, []Spec{
		{Kind: SpecHold, Name: "store", Temp: 900, For: 100},
		{Kind: SpecRamp, Name: "wake", Temp: 1000, For: 10},
		{Kind: SpecHold, Name: "rest", Temp: 950, For: 40},
	})
	if err != nil {
		t.Fatal(err)
	}
	if err := h.SetEruption(105); err != nil {
		t.Fatal(err)
	}
	for _, test := range []struct {
		name         string
		at           float64
		life, erupts float64
		first        Leg
		names        []Named
	}{
		{"from a leg on", 100, 50, 5, Leg{Kind: Ramp, For: 10, T0: 900, T1: 1000}, []Named{{"wake", 0, 10}, {"rest", 10, 50}}},
		{"but for rounding", 100 * (1 - 1e-15), 50, 5, Leg{Kind: Ramp, For: 10, T0: 900, T1: 1000}, []Named{{"wake", 0, 10}, {"rest", 10, 50}}},
		{"within a leg", 60, 90, 45, Leg{Kind: Hold, For: 40, T0: 900}, []Named{{"store", 0, 40}, {"wake", 40, 50}, {"rest", 50, 90}}},
		{"after the eruption", 120, 30, 0, Leg{Kind: Hold, For: 30, T0: 950}, []Named{{"rest", 0, 30}}},
	} {
		t.Run(test.name, func(t *testing.T) {
			sub, err := h.From(test.at)
			if err != nil {
				t.Fatal(err)
			}
			closeTo(t, "life", sub.Life(), test.life, 0)
			closeTo(t, "eruption", sub.Eruption(), test.erupts, 0)
			if sub.Legs()[0] != test.first || fmt.Sprint(sub.Names()) != fmt.Sprint(test.names) {
				t.Errorf("begins with %+v, names %v", sub.Legs()[0], sub.Names())
			}
		})
	}
	if sub, err := h.From(0); err != nil || sub != h {
		t.Errorf("from the start it is not itself: %v", err)
	}
	for _, at := range []float64{-1, 150, 151, math.NaN()} {
		if sub, err := h.From(at); err == nil {
			t.Errorf("from %g s on: %v", at, sub.Legs())
		}
	}
}

// TestFromATable: rows that jump at the moment.
func TestFromATable(t *testing.T) {
	rows := &Rows{Time: []float64{0, 3, 3, 8, 8, 15}, Temp: []float64{900, 900, 1000, 1000, 950, 950}}
	h := set(t, []Leg{{Kind: Table, Rows: rows, For: 9}})
	for _, test := range []struct{ at, temp, life float64 }{{3, 1000, 6}, {2, 900, 7}, {8, 950, 1}} {
		sub, err := h.From(test.at)
		if err != nil {
			t.Fatal(err)
		}
		_, temp := sub.At(0)
		closeTo(t, fmt.Sprintf("temperature after %g s", test.at), temp, test.temp, 0)
		closeTo(t, "life", sub.Life(), test.life, 0)
	}
}

// TestSameFrom: paths of other beginnings are alike from the moment on from which they are the same, wherever that cuts a leg,
// and not before.
func TestSameFrom(t *testing.T) {
	r := rand.New(rand.NewPCG(5, 3))
	for n := range 200 {
		last := []Leg{randomLeg(r), randomLeg(r)}
		one := set(t, append([]Leg{{Kind: Hold, For: decades(r, 3600, 1e6*Year), T0: 900}}, last...))
		two := set(t, append([]Leg{{Kind: Hold, For: decades(r, 3600, 1e6*Year), T0: 800}, {Kind: Hold, T0: 700}}, last...))
		common := one.Life() - one.Start(1)
		same := func(last float64) bool { return one.SameFrom(one.Life()-last, two, two.Life()-last) }
		if !same(common * between(r, 0.01, 1)) {
			t.Errorf("%d: the same ends of %v are not", n, last)
		}
		if same(common + 0.9*min(one.Start(1), two.Start(2))) {
			t.Errorf("%d: the same before they are", n)
		}
	}
}

// TestSameFromTells what differs.
func TestSameFromTells(t *testing.T) {
	sheet := Sheet{Magma: 1300, Host: 500, Thickness: 20, Position: 3, Kappa: 1e-6}
	thicker := sheet
	thicker.Thickness = 21
	rows := func(temp float64) *Rows { return &Rows{Time: []float64{0, 5, 9}, Temp: []float64{900, temp, 900}} }
	base := []Leg{
		{Kind: Hold, For: 10, T0: 900}, {Kind: Ramp, For: 5, T0: 900, T1: 1000}, {Kind: Relax, For: 9, T0: 1000, T1: 900, Tau: 3},
		{Kind: SheetCooling, For: 7, Sheet: &sheet, Since: 2}, {Kind: Table, Rows: rows(950), For: 9},
	}
	for _, test := range []struct {
		name   string
		change func(legs []Leg)
	}{
		{"kind", func(l []Leg) { l[0] = Leg{Kind: Ramp, For: 10, T0: 900, T1: 900} }},
		{"duration", func(l []Leg) { l[0].For = 11 }},
		{"setting", func(l []Leg) { l[0].Setting = 1 }},
		{"temperature", func(l []Leg) { l[0].T0 = 901 }},
		{"end", func(l []Leg) { l[1].T1 = 1001 }},
		{"e-fold time", func(l []Leg) { l[2].Tau = 4 }},
		{"sheet", func(l []Leg) { l[3].Sheet = &thicker }},
		{"age of a sheet", func(l []Leg) { l[3].Since = 3 }},
		{"rows", func(l []Leg) { l[4].Rows = rows(951) }},
	} {
		t.Run(test.name, func(t *testing.T) {
			legs := append([]Leg(nil), base...)
			test.change(legs)
			if set(t, base).SameFrom(0, set(t, legs), 0) || set(t, legs).SameFrom(0, set(t, base), 0) {
				t.Error("the same")
			}
		})
	}
	if !set(t, base).SameFrom(0, set(t, base), 0) || set(t, base).SameFrom(0, set(t, base[:4]), 0) {
		t.Error("not the same as itself, or the same as less than itself")
	}
	if end := set(t, base).Life(); set(t, base).SameFrom(end, set(t, base), end) {
		t.Error("the same after the end")
	}
	early := set(t, base)
	if err := early.SetEruption(5); err != nil {
		t.Fatal(err)
	}
	if early.SameFrom(0, set(t, base), 0) {
		t.Error("the same though one erupts earlier")
	}
}
