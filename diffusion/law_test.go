package diffusion

import (
	"math"
	"math/rand/v2"
	"testing"

	"bankfire/thermal"
	"bankfire/thermal/numeric"
)

// TestLnIntegralAbove: along holds the parts of G are D x t, by hand, for the sum of both terms of a law.
func TestLnIntegralAbove(t *testing.T) {
	law := Law{Terms: []Arrhenius{
		NewLaw(1e-9, 250e3).Terms[0],
		NewLaw(1e-16, 100e3).Terms[0], // the larger one below 834 C
		NewLaw(0, 300e3).Terms[0],     // nothing
	}}
	d := func(temp float64) float64 {
		rt := thermal.GasConstant * temp
		return 1e-9*math.Exp(-250e3/rt) + 1e-16*math.Exp(-100e3/rt)
	}
	h := newHistory(t, thermal.Leg{Kind: thermal.Hold, For: 1e9, T0: 900}, thermal.Leg{Kind: thermal.Hold, For: 1e7, T0: 1200})
	for _, test := range []struct {
		name       string
		temp, want float64
	}{
		{"all", 800, 1e9*d(900) + 1e7*d(1200)},
		{"the hot leg", 900, 1e7 * d(1200)},
		{"none", 1200, 0},
	} {
		t.Run(test.name, func(t *testing.T) {
			const tol = 1e-12 // rounding of e/T of 33
			got, want := law.LnIntegralAbove(h, test.temp), math.Log(test.want)
			if !(math.Abs(got-want) <= tol) && got != want {
				t.Errorf("ln G above %g K: %.15g, want %.15g", test.temp, got, want)
			}
		})
	}
	if got := NewLaw(0, 300e3).LnIntegralAbove(h, 800); !math.IsInf(got, -1) {
		t.Errorf("where nothing diffuses: ln G %g", got)
	}
}

// switching is a law of two settings and of two regimes in the second: with one bound for all of them.
func switching(bound float64) Law {
	low, high, other := NewLaw(1e-9, 250e3).Terms[0], NewLaw(1e-14, 130e3).Terms[0], NewLaw(4e-9, 262e3).Terms[0]
	return Law{Terms: []Arrhenius{low, high, other, NewLaw(1e-18, 80e3).Terms[0]}, Where: []thermal.Window{
		{Setting: 2, Below: bound}, {Setting: 2, Above: bound}, {Setting: 1}, {},
	}}
}

// randomSettings is a random path of 2 to 12 holds, ramps and relaxations in two settings.
func randomSettings(t *testing.T, r *rand.Rand) *thermal.History {
	legs := make([]thermal.Leg, 2+r.IntN(11))
	for i := range legs {
		legs[i] = thermal.Leg{
			Kind: thermal.Kind(r.IntN(3)), For: math.Exp(math.Log(1e5) + 14*r.Float64()),
			T0: 900 + 400*r.Float64(), T1: 900 + 400*r.Float64(), Setting: 1 + r.IntN(2),
		}
		legs[i].Tau = legs[i].For * (0.1 + r.Float64())
	}
	return newHistory(t, legs...)
}

// TestSwitchedIntegral: along random paths the integral of a law that depends on the setting and switches at a temperature
// is the sum of D over many short times, the regime of each chosen by hand.
func TestSwitchedIntegral(t *testing.T) {
	const (
		n   = 20000 // times a leg
		tol = 4e-4  // one time on the wrong side of a switch, where D jumps by up to a factor of 2.5; measured 1e-4
	)
	bound := 1100.0
	law := switching(bound)
	d := func(d0, e, temp float64) float64 { return d0 * math.Exp(-e/(thermal.GasConstant*temp)) }
	r := rand.New(rand.NewPCG(5, 21))
	for range 40 {
		h := randomSettings(t, r)
		t0 := h.Life() * r.Float64() / 2
		t1 := t0 + (h.Life()-t0)*r.Float64()
		sum := 0.0
		for i, leg := range h.Legs() {
			from, to := math.Max(t0, h.Start(i)), math.Min(t1, h.Start(i+1))
			for j := 0; j < n && from < to; j++ {
				temp := leg.At(from + (to-from)*(float64(j)+0.5)/n - h.Start(i))
				here := d(1e-18, 80e3, temp)
				switch {
				case leg.Setting == 1:
					here += d(4e-9, 262e3, temp)
				case temp > bound:
					here += d(1e-14, 130e3, temp)
				default:
					here += d(1e-9, 250e3, temp)
				}
				sum += here * (to - from) / n
			}
		}
		if got := math.Exp(law.LnIntegral(h, t0, t1)); !(math.Abs(got/sum-1) <= tol) {
			t.Errorf("G %.12g, by hand %.12g, relative difference %.2g", got, sum, got/sum-1)
		}
	}
}

// TestSwitchedPieces: between two breaks the law is plain, and its parts over them add up to the whole.
func TestSwitchedPieces(t *testing.T) {
	const tol = 1e-11 // of ln G: rounding of some fifty parts and of the times of the switch
	law := switching(1100)
	r := rand.New(rand.NewPCG(5, 22))
	for range 40 {
		h := randomSettings(t, r)
		breaks := law.breaks(h)
		sum := math.Inf(-1)
		for i := 1; i < len(breaks); i++ {
			a, b := breaks[i-1], breaks[i]
			piece := law.over(h, a, b)
			if piece.Where != nil || len(piece.Terms) != 2 {
				t.Fatalf("from %g to %g s the law has %d terms and windows %v", a, b, len(piece.Terms), piece.Where)
			}
			sum = numeric.LnAdd(sum, piece.LnIntegral(h, a, b))
		}
		if whole := law.LnIntegral(h, 0, h.Life()); !(math.Abs(sum-whole) <= tol) {
			t.Errorf("ln G %.15g, sum of its pieces %.15g", whole, sum)
		}
	}
}

// TestIn: in a setting the law is what holds there, by temperature.
func TestIn(t *testing.T) {
	const tol = 1e-13
	law := switching(1100)
	for _, test := range []struct {
		setting  int
		temp     float64
		d0, e    float64
		isolated bool
	}{{1, 1000, 4e-9, 262e3, false}, {2, 1100, 1e-9, 250e3, false}, {2, 1101, 1e-14, 130e3, false}, {3, 1000, 0, 0, true}} {
		want := 1e-18 * math.Exp(-80e3/(thermal.GasConstant*test.temp))
		if !test.isolated {
			want += test.d0 * math.Exp(-test.e/(thermal.GasConstant*test.temp))
		}
		if got := math.Exp(law.In(test.setting).LnD(test.temp)); !(math.Abs(got/want-1) <= tol) {
			t.Errorf("setting %d, %g K: D %g, want %g", test.setting, test.temp, got, want)
		}
	}
	defer func() {
		if recover() == nil {
			t.Error("D of no setting in particular")
		}
	}()
	law.LnD(1000)
}

// TestSwitchedRim: the means of a rim value along a law that switches are those of closed forms.
func TestSwitchedRim(t *testing.T) {
	const bound = 1000.0
	plain := testLaw.Terms[0]
	law := Law{Terms: []Arrhenius{plain, {LnA: plain.LnA + 1, E: plain.E}}, Where: []thermal.Window{{Below: bound}, {Above: bound}}}
	for name, h := range longHistories(t) {
		t.Run(name, func(t *testing.T) { wantRimMeans(t, law, h) })
	}
}

// TestCutLaw: a law cut in two at a temperature, with the same constants on both sides, is the law itself, also under rims
// that ask for it at moments: the profiles are the same but for where the steps are cut.
func TestCutLaw(t *testing.T) {
	const tol = 1e-5 // of a rim value of 1: parts of steps are right to 1e-4 of a conductance (evenRatio)
	term := testLaw.Terms[0]
	cut := Law{Terms: []Arrhenius{term, term}, Where: []thermal.Window{{Below: 1000}, {Above: 1000}}}
	rims := map[string]func(h *thermal.History) Rim{
		"given": func(h *thermal.History) Rim {
			return Rim{Kind: Prescribed, Given: &Given{At: func(at float64) float64 { temp, _ := h.At(at); return temp / 1000 }}}
		},
		"transfer": func(h *thermal.History) Rim {
			return Rim{Kind: Transfer, Value: 1, Rate: Arrhenius{LnA: -20, E: 8000}}
		},
	}
	for name, h := range longHistories(t) {
		scale := 2*math.Log(testSize) - testLaw.LnIntegral(h, 0, h.Life()) - math.Log(3)
		for rim, of := range rims {
			t.Run(name+"/"+rim, func(t *testing.T) {
				var profiles [2][]float64
				for i, law := range []Law{testLaw, cut} {
					law.Terms = append([]Arrhenius(nil), law.Terms...)
					for j := range law.Terms {
						law.Terms[j].LnA += scale
					}
					p := &Problem{Zones: []Zone{{Outer: testSize}}, Law: law, Outer: []Rim{of(h)}}
					profiles[i] = run(t, newPlan(t, p, Options{}), h).Cols[0]
				}
				wantClose(t, "profile", profiles[1], profiles[0], tol)
			})
		}
	}
}
