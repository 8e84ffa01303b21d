package diffusion

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"bankfire/thermal"
)

// transferRim returns a rim whose k has an activation energy of its own, and an
// integral over the history of 0.1 to 100 times that of D over the crystal's size.
func transferRim(r *rand.Rand, p *Problem, h *thermal.History) Rim {
	return Rim{Kind: Transfer, Value: r.Float64(), Rate: rateOf(p, h, logUniform(r, 0.1, 100), logUniform(r, 5e3, 6e4))}
}

// rateOf returns the coefficient of activation temperature e whose integral over
// the history is biot times that of D over the crystal's size.
func rateOf(p *Problem, h *thermal.History, biot, e float64) Arrhenius {
	lnD := p.Law.LnIntegral(h, 0, h.Life())
	return Arrhenius{LnA: math.Log(biot) + lnD - math.Log(p.size()-p.R0) - h.LnArrhenius(e, 0, 0, h.Life()), E: e}
}

// TestTransferLimits: a very large k is a held rim, a very small one a sealed one.
// The same steps, so to rounding and what 1e-9 or 1e9 leaves.
func TestTransferLimits(t *testing.T) {
	const far, close = 1e12, 1e-9
	fractions := defaultFractions(defaultDamped, defaultGrowth, true)
	for i := range 30 {
		r := source(61, i)
		h := randomHistory(t, r)
		p := randomProblem(r, h, logUniform(r, 1e-6, 1e2))
		if i%3 == 0 {
			p.Own = ownOf(r)
		}
		for _, test := range []struct {
			name string
			biot float64
			rim  Rim
		}{
			{"held", far, Rim{Kind: Held, Value: 0.4}},
			{"sealed", 1 / far, Rim{}},
		} {
			q := *p
			q.Outer = []Rim{{Kind: Transfer, Value: 0.4, Rate: rateOf(p, h, test.biot, p.Law.Terms[0].E)}}
			plan := newPlan(t, &q, Options{Fractions: fractions})
			got := run(t, plan, h).Cols[0]
			limit := q
			limit.Outer = []Rim{test.rim}
			want := run(t, newPlan(t, &limit, Options{Faces: plan.Faces(), Fractions: fractions}), h).Cols[0]
			wantClose(t, fmt.Sprintf("problem %d, %s", i, test.name), got, want, close)
		}
	}
}

// TestTransferKeepsMass: what is missing or new came through the rims; what came is
// what Stats count.
func TestTransferKeepsMass(t *testing.T) {
	for i := range 40 {
		r := source(62, i)
		h := randomHistory(t, r)
		p := randomProblem(r, h, logUniform(r, 1e-8, 1e4))
		p.Outer = []Rim{transferRim(r, p, h)}
		f := run(t, newPlan(t, p, Options{Cells: 60}), h)
		if !(f.Stats.MassDrift <= rounding) || !(f.Stats.Overshoot <= rounding) {
			t.Errorf("problem %d: drift %.2g, overshoot %.2g", i, f.Stats.MassDrift, f.Stats.Overshoot)
		}
	}
}

// TestExchangeIsLinear: the derivative by what is outside a rim that exchanges is the
// difference of two runs, with and without a host that the element follows. The
// rim begins within the path, after a held one.
func TestExchangeIsLinear(t *testing.T) {
	for i := range 30 {
		r := source(65, i)
		h := randomHistory(t, r)
		p := randomProblem(r, h, logUniform(r, 1e-6, 10))
		if i%2 == 0 {
			p = randomCoupled(r, h, logUniform(r, 1e-6, 10), 2)
		}
		late := transferRim(r, p, h)
		late.From = h.Life() * r.Float64()
		p.Outer = []Rim{{Kind: Held, Value: r.Float64()}, late}
		p.Free = []Basis{{Start: make([]float64, len(p.Zones)), Outer: []float64{0, 1}}}
		f := run(t, newPlan(t, p, Options{}), h)
		more := *p
		more.Outer = []Rim{p.Outer[0], late}
		more.Outer[1].Value += 1
		difference := run(t, newPlan(t, &more, Options{}), h).Cols[0]
		for k := range difference {
			difference[k] -= f.Cols[0][k]
		}
		wantClose(t, fmt.Sprintf("problem %d", i), f.Cols[1], difference, rounding)
		if i := len(difference) - 1; !(f.Cols[1][i] > 0) {
			t.Errorf("problem %d: nothing came through the rim", i)
		}
	}
}

// TestExchangeAtRest: a crystal in equilibrium with what is outside stays so to the
// bit.
func TestExchangeAtRest(t *testing.T) {
	for i := range 20 {
		r := source(63, i)
		h := randomHistory(t, r)
		p := randomProblem(r, h, 1)
		p.Inner = nil
		value := r.Float64()
		for z := range p.Zones {
			p.Zones[z].Start = value
		}
		p.Outer = []Rim{transferRim(r, p, h)}
		p.Outer[0].Value = value
		plan := newPlan(t, p, Options{})
		wantBits(t, fmt.Sprintf("problem %d", i), run(t, plan, h).Cols[0], plan.Start(0))
	}
}

// TestSteadyExchange: between an end held at 0 and one that exchanges with 1 the
// flux of a slab is k (1 - S) = (H(S) - H(0))/a, H the integral of D. With 1 + 3 C
// and k a = 2 D0 the surface holds S = 2/3, and S + 1.5 S^2 is linear in x. Second
// order in cells.
func TestSteadyExchange(t *testing.T) {
	p := slabOf(testSize, 0, nothing, 0.5)
	p.Outer = exchanging(2/testSize, 1)
	p.Own = func(c float64) float64 { return 1 + 3*c }
	s := rootOf(t, func(s float64) float64 { return 2*(1-s) - s - 1.5*s*s }, 0, 1)
	wantOrder(t, 2, 0.15, []int{40, 80, 160, 320}, func(n int) float64 {
		plan := newPlan(t, p, Options{Faces: uniform(0, testSize, n)})
		want := make([]float64, n)
		addProfile(want, Slab, plan.grid, func(x float64) float64 {
			h := (s + 1.5*s*s) * x / testSize
			return (math.Sqrt(1+6*h) - 1) / 3
		})
		_, err := farthest(run(t, plan, holdOf(t, 30*testSize*testSize)).Cols[0], want)
		return err
	})
}

// TestExchangeAlongPulses: k and D of different activation energies, and an outside
// that is constant or follows temperature, along paths that jump, rise and fall,
// against the reference in the same cells of a slab. Steps run across all of it, so the bound is that of a default
// plan; ten times the steps come thirty times closer.
func TestExchangeAlongPulses(t *testing.T) {
	const plain, fine = 1e-4, 3e-6
	faces := uniform(0, testSize, 8)
	for name, legs := range map[string][]thermal.Leg{
		"box":   {{Kind: thermal.Hold, For: 1e9, T0: 1000}, {Kind: thermal.Hold, For: 2e7, T0: 1150}, {Kind: thermal.Hold, For: 1e9, T0: 1000}},
		"pulse": {{Kind: thermal.Hold, For: 1e9, T0: 1000}, {Kind: thermal.Ramp, For: 1e7, T0: 1000, T1: 1150}, {Kind: thermal.Relax, For: 1e9, T0: 1150, T1: 1000, Tau: 1e8}},
		"cool":  {{Kind: thermal.Ramp, For: 1e9, T0: 1150, T1: 900}},
	} {
		h := newHistory(t, legs...)
		for i := range 8 {
			e, given, own := []float64{5e3, 6e4}[i&1], i&2 != 0, i&4 != 0
			p := &Problem{Zones: []Zone{{Outer: testSize, Start: 0.3}}, Law: NewLaw(1, 250e3)}
			p.Law.Terms[0].LnA = math.Log(0.1*testSize*testSize) - p.Law.LnIntegral(h, 0, h.Life())
			p.Outer = []Rim{{Kind: Transfer, Value: 1, Rate: rateOf(p, h, 2, e)}}
			beyond := func(t, temp float64) float64 { return 1 }
			if given {
				beyond = func(t, temp float64) float64 { return 1 + 5*(1000/temp-1) }
				p.Outer[0].Given = &Given{At: func(t float64) float64 { temp, _ := h.At(t); return beyond(t, temp) }}
			}
			if own {
				p.Own = growing(2)
			}
			t.Run(fmt.Sprintf("path=%s/E=%g/given=%v/own=%v", name, e, given, own), func(t *testing.T) {
				truth := newFew(p, beyond, faces).byExtrapolation(h, nil)
				wantClose(t, "default", run(t, newPlan(t, p, Options{Faces: faces}), h).Cols[0], truth, plain)
				wantClose(t, "fine", run(t, newPlan(t, p, Options{Faces: faces, Growth: 0.01}), h).Cols[0], truth, fine)
			})
		}
	}
}

// TestTransferOrder: second order in steps where an exchange begins gently.
func TestTransferOrder(t *testing.T) {
	const g = testSize * testSize / 20
	h := newHistory(t, thermal.Leg{Kind: thermal.Ramp, For: 0.6 * g / math.Exp(testLaw.LnD(1040)), T0: 1040, T1: 1070})
	for shape := Slab; shape <= Ball; shape++ {
		t.Run(fmt.Sprint(shape), func(t *testing.T) {
			p := &Problem{
				Shape: shape, Zones: []Zone{{Outer: testSize}}, Law: testLaw,
				Profile: func(r float64) float64 { return 0.5 - 0.5*math.Cos(math.Pi*r/testSize) },
			}
			// begins at C_eq = 1, what the surface holds, and moves on with time
			outside := &Given{At: func(at float64) float64 { return 1 + at/h.Life() }}
			p.Outer = []Rim{{Kind: Transfer, Given: outside, Rate: rateOf(p, h, 3, 2e4)}}
			wantOrder(t, 2, 0.15, []int{40, 80, 160}, againstItself(t, p, h, 10, func(int) int { return 40 }))
		})
	}
}

// TestStatedErrorOfTransfer: rims that exchange for good, after another kind, or
// until then.
func TestStatedErrorOfTransfer(t *testing.T) {
	honest(t, 100, 41, func(r *rand.Rand, h *thermal.History, g float64) *Problem {
		p := randomProblem(r, h, g)
		at := h.Life() * r.Float64()
		p.Outer = []Rim{transferRim(r, p, h)}
		switch r.IntN(4) {
		case 0:
			p.Outer = append([]Rim{{Kind: Held, Value: r.Float64()}}, p.Outer...)
			p.Outer[1].From = at
		case 1:
			p.Outer = append(p.Outer, Rim{Kind: Held, Value: r.Float64(), From: at})
		}
		return p
	})
}

// TestTransferSideBySide: side by side as alone, to the bit.
func TestTransferSideBySide(t *testing.T) {
	r := source(64, 0)
	h := randomHistory(t, r)
	p := laneProblem(r, h)
	p.Outer = []Rim{transferRim(r, p, h)}
	p.Free[1].Outer = []float64{1}
	plan := newPlan(t, p, Options{Cells: 40})
	jobs := randomJobs(t, r, plan, h, 7)
	dst := make([]Field, len(jobs))
	if err := plan.Run(dst, jobs); err != nil {
		t.Fatal(err)
	}
	for k := range jobs {
		wantSame(t, fmt.Sprintf("job %d", k), &dst[k], runJob(t, plan, jobs[k]))
	}
}
