package diffusion

import (
	"fmt"
	"math"
	"testing"

	"bankfire/thermal"
)

// rounding is what some hundred solves leave of rounding in values of about 1.
const rounding = 1e-12

// steadyProblem returns a random problem whose rims are sealed or held for good, with an integral of g squares of its
// size along steadyHistory.
func steadyProblem(tb testing.TB, seed, i int, g float64) *Problem {
	r := source(seed, i)
	p := randomProblem(r, steadyHistory(tb), 1)
	p.Law = testLaw
	p.Law.Terms = []Arrhenius{testLaw.Terms[0]}
	size := p.size() - p.R0
	p.Law.Terms[0].LnA += math.Log(g * size * size / 1e-10) // along the hold of 1e-10
	steady := func() []Rim {
		if r.IntN(2) == 0 {
			return nil
		}
		return []Rim{{Kind: Held, Value: r.Float64()}}
	}
	p.Outer, p.Inner = steady(), nil
	if p.Shape == Slab || p.R0 > 0 {
		p.Inner = steady()
	}
	return p
}

// steadyHistory is a hold.
func steadyHistory(tb testing.TB) *thermal.History { return holdOf(tb, 1e-10) }

func TestSealedKeepsMass(t *testing.T) {
	const steps, allowed = 10_000, 1e-12 // of the total
	for i := range 12 {
		t.Run(fmt.Sprintf("problem=%d", i), func(t *testing.T) {
			r := source(3, i)
			p := steadyProblem(t, 3, i, logUniform(r, 1e-4, 1e4))
			p.Inner, p.Outer = nil, nil
			plan := newPlan(t, p, Options{Cells: 50 + r.IntN(150), Fractions: equalSteps(steps)})
			f := run(t, plan, steadyHistory(t))
			before, after := content(plan, plan.Start(0)), content(plan, f.Cols[0])
			if drift := math.Abs(after/before - 1); !(drift <= allowed) || !(f.Stats.MassDrift <= allowed) {
				t.Errorf("%d solves lose %.2g of the total and state %.2g, allowed %g", f.Stats.Steps, drift, f.Stats.MassDrift, allowed)
			}
		})
	}
}

// TestMassBalances: with any rims, all that is missing or new came through them.
func TestMassBalances(t *testing.T) {
	for i := range 100 {
		r := source(4, i)
		h := randomHistory(t, r)
		p := randomProblem(r, h, logUniform(r, 1e-8, 1e4))
		if f := run(t, newPlan(t, p, Options{}), h); !(f.Stats.MassDrift <= 1e-12) {
			t.Errorf("problem %d: %d solves, drift %.2g of all that was there or came", i, f.Stats.Steps, f.Stats.MassDrift)
		}
	}
}

func TestFlatStaysFlat(t *testing.T) {
	for i := range 50 {
		r := source(5, i)
		h := randomHistory(t, r)
		p := randomProblem(r, h, logUniform(r, 1e-10, 1e6))
		value := 100 * r.Float64()
		flat := Rim{Kind: Held, Value: value}
		given := Rim{Kind: Prescribed, Given: &Given{At: func(float64) float64 { return value }}}
		for k := range p.Zones {
			p.Zones[k].Start = value
		}
		p.Outer = [][]Rim{nil, {flat}, {given}}[r.IntN(3)]
		p.Inner = nil
		if p.R0 > 0 {
			p.Inner = []Rim{flat}
		}
		plan := newPlan(t, p, Options{})
		wantBits(t, fmt.Sprintf("problem %d", i), run(t, plan, h).Cols[0], plan.Start(0))
		if c := plan.Start(0); c[0] != value || rangeOf(c) != 0 {
			t.Errorf("problem %d: the start is not flat", i)
		}
	}
}

// TestEqualIntegralsAgree: a hold, and a wake of pulses of the same integral.
func TestEqualIntegralsAgree(t *testing.T) {
	for i := range 20 {
		p := steadyProblem(t, 6, i, 1)
		plan := newPlan(t, p, Options{})
		hold := steadyHistory(t)
		pulses := []thermal.Leg{{Kind: thermal.Hold, For: 1e10, T0: 850}}
		for range 10 {
			pulses = append(pulses, thermal.Leg{Kind: thermal.Ramp, For: 1e8, T0: 850, T1: 1000},
				thermal.Leg{Kind: thermal.Relax, For: 3e9, T0: 1000, T1: 850, Tau: 3e8})
		}
		h := newHistory(t, pulses...)
		a, b := newCourse(t, plan, hold), newCourse(t, plan, h)
		got := runJob(t, plan, Job{Course: b, LnM: a.LnG() - b.LnG()})
		// the two logarithms are equal to 1e-14, and so are the integrals
		wantClose(t, fmt.Sprintf("problem %d", i), got.Cols[0], runJob(t, plan, Job{Course: a}).Cols[0], rounding)
	}
}

// TestTenDaysInAMillionYears: a pulse of a 3e-8th of the path does most of the
// work, and the profile is that of the integral of both, by hand.
func TestTenDaysInAMillionYears(t *testing.T) {
	const (
		store, wake    = 500 + thermal.ZeroCelsius, 1150 + thermal.ZeroCelsius
		life, tenDays  = 1e6 * thermal.Year, 10 * thermal.Day
		d0, activation = 7.01e-8, 273e3
	)
	d := func(temp float64) float64 { return d0 * math.Exp(-activation/(thermal.GasConstant*temp)) }
	quiet := newHistory(t, thermal.Leg{Kind: thermal.Hold, For: life, T0: store})
	woken := newHistory(t, thermal.Leg{Kind: thermal.Hold, For: 0.6 * life, T0: store},
		thermal.Leg{Kind: thermal.Hold, For: tenDays, T0: wake},
		thermal.Leg{Kind: thermal.Hold, For: 0.4*life - tenDays, T0: store})
	p := &Problem{Zones: []Zone{{Outer: testSize / 2, Start: 1}, {Outer: testSize}}, Law: testLaw}
	plan := newPlan(t, p, Options{})
	for _, test := range []struct {
		name string
		h    *thermal.History
		g    float64
	}{
		{"quiet", quiet, life * d(store)},
		{"woken", woken, (life-tenDays)*d(store) + tenDays*d(wake)},
	} {
		want := make([]float64, len(plan.Centres()))
		for i := range want { // Crank 1975, equation 2.14
			want[i] = 1 - edgeMean(Slab, plan.Faces()[i], plan.Faces()[i+1], testSize/2, math.Sqrt(2*test.g))
		}
		wantClose(t, test.name, run(t, plan, test.h).Cols[0], want, 2e-4) // what 200 cells leave of a jump that spread by a hundredth of the crystal
	}
	if ratio := tenDays * d(wake) / (life * d(store)); !(ratio > 1.5) {
		t.Errorf("the ten days do only %g of the work", ratio)
	}
}

// TestCoolerNeedsLonger: by exactly the ratio of the Arrhenius law.
func TestCoolerNeedsLonger(t *testing.T) {
	const warm, cool, time = 1023.15, 948.15, 1e10
	longer := time * math.Exp(273e3/thermal.GasConstant*(1/cool-1/warm))
	a := newHistory(t, thermal.Leg{Kind: thermal.Hold, For: time, T0: warm})
	b := newHistory(t, thermal.Leg{Kind: thermal.Hold, For: longer, T0: cool})
	for i := range 10 {
		p := steadyProblem(t, 7, i, 1)
		plan := newPlan(t, p, Options{})
		wantClose(t, fmt.Sprintf("problem %d", i), run(t, plan, b).Cols[0], run(t, plan, a).Cols[0], rounding)
	}
}

// TestNoOvershoot: damped, with rims sealed or held, no value leaves the range of
// start and rims, whatever the shape, the edges and the integral.
func TestNoOvershoot(t *testing.T) {
	const allowed = 1e-12
	worst := 0.0
	for i := range 400 {
		r := source(8, i)
		p := steadyProblem(t, 8, i, logUniform(r, 1e-14, 1e6))
		plan := newPlan(t, p, Options{})
		f := run(t, plan, steadyHistory(t))
		lo, hi := math.Inf(1), math.Inf(-1)
		see := func(v float64) { lo, hi = math.Min(lo, v), math.Max(hi, v) }
		for _, v := range plan.Start(0) {
			see(v)
		}
		for _, rim := range append(p.Inner, p.Outer...) {
			see(rim.Value)
		}
		over := 0.0
		for _, v := range f.Cols[0] {
			over = max(over, (v-hi)/(hi-lo), (lo-v)/(hi-lo)) // NaN stays
		}
		if hi == lo {
			continue // flat
		}
		if !(over <= allowed) || !(f.Stats.Overshoot <= allowed) {
			t.Errorf("problem %d, %v: overshoots by %.2g of the range and states %.2g, allowed %g", i, p.Shape, over, f.Stats.Overshoot, allowed)
		}
		worst = math.Max(worst, over)
	}
	t.Logf("largest overshoot %.2g of the range", worst)
}

// TestSolutionsAdd: twice one problem less three times another is the solution of
// that start and those rims.
func TestSolutionsAdd(t *testing.T) {
	for i := range 30 {
		r := source(9, i)
		h := randomHistory(t, r)
		a := randomProblem(r, h, logUniform(r, 1e-6, 10))
		for len(a.Outer) == 2 { // one event at most, shared
			a.Outer = randomRims(r, h)
		}
		a.Inner = nil
		b, sum := *a, *a
		b.Zones, sum.Zones = append([]Zone(nil), a.Zones...), append([]Zone(nil), a.Zones...)
		for k := range b.Zones {
			b.Zones[k].Start = r.Float64()
			sum.Zones[k].Start = 2*a.Zones[k].Start - 3*b.Zones[k].Start
		}
		if len(a.Outer) == 1 {
			b.Outer, sum.Outer = []Rim{a.Outer[0]}, []Rim{a.Outer[0]}
			b.Outer[0].Value = r.Float64()
			sum.Outer[0].Value = 2*a.Outer[0].Value - 3*b.Outer[0].Value
			if given := a.Outer[0].Given; given != nil {
				other := func(t float64) float64 { return math.Sin(10 * t / h.Life()) }
				b.Outer[0].Given = &Given{At: other}
				sum.Outer[0].Given = &Given{At: func(t float64) float64 { return 2*given.At(t) - 3*other(t) }}
			}
		}
		ca, cb, cs := run(t, newPlan(t, a, Options{}), h), run(t, newPlan(t, &b, Options{}), h), run(t, newPlan(t, &sum, Options{}), h)
		want := make([]float64, len(cs.Cols[0]))
		for k := range want {
			want[k] = 2*ca.Cols[0][k] - 3*cb.Cols[0][k]
		}
		wantClose(t, fmt.Sprintf("problem %d", i), cs.Cols[0], want, 5*rounding)
	}
}

// TestFreeValues: the derivatives by plateaux and rim, times their values, make
// the direct run.
func TestFreeValues(t *testing.T) {
	for i := range 30 {
		r := source(10, i)
		h := randomHistory(t, r)
		p := randomProblem(r, h, logUniform(r, 1e-6, 10))
		p.Inner = nil
		p.Outer = []Rim{{Kind: Held, Value: 0.3}, {Kind: Held, Value: 0.9, From: 0.4 * h.Life()}}
		direct := run(t, newPlan(t, p, Options{}), h)

		open, values := *p, []float64{0.3, 0.9}
		open.Zones = append([]Zone(nil), p.Zones...)
		open.Outer = []Rim{{Kind: Held}, {Kind: Held, From: 0.4 * h.Life()}}
		none := make([]float64, len(p.Zones))
		open.Free = []Basis{{Start: none, Outer: []float64{1, 0}}, {Start: none, Outer: []float64{0, 1}}}
		for k := range open.Zones {
			unit := make([]float64, len(p.Zones))
			unit[k] = 1
			open.Free = append(open.Free, Basis{Start: unit})
			values = append(values, p.Zones[k].Start)
			open.Zones[k].Start = 0
		}
		f := run(t, newPlan(t, &open, Options{}), h)
		sum := append([]float64(nil), f.Cols[0]...)
		for j, v := range values {
			for k := range sum {
				sum[k] += v * f.Cols[j+1][k]
			}
		}
		wantClose(t, fmt.Sprintf("problem %d", i), sum, direct.Cols[0], rounding)
	}
}

// TestScaling: lengths times k and the integral times k^2 change nothing.
func TestScaling(t *testing.T) {
	for i := range 30 {
		r := source(11, i)
		h := randomHistory(t, r)
		p := randomProblem(r, h, logUniform(r, 1e-6, 10))
		k := logUniform(r, 1e-3, 1e3)
		big := *p
		big.Zones = append([]Zone(nil), p.Zones...)
		big.R0 *= k
		for j := range big.Zones {
			big.Zones[j].Outer *= k
			big.Zones[j].Edge *= k
		}
		big.Law = Law{Terms: []Arrhenius{p.Law.Terms[0]}}
		big.Law.Terms[0].LnA += 2 * math.Log(k)
		// faces are placed to 1e-14 of the crystal, the smallest cells are 1e-3 of it
		wantClose(t, fmt.Sprintf("problem %d, k = %.3g", i, k),
			run(t, newPlan(t, &big, Options{}), h).Cols[0], run(t, newPlan(t, p, Options{}), h).Cols[0], 1e-10)
	}
}

// TestNothingMoves: without diffusion the start comes back, to the bit.
func TestNothingMoves(t *testing.T) {
	for i := range 30 {
		r := source(12, i)
		h := randomHistory(t, r)
		p := randomProblem(r, h, 1)
		p.Law = NewLaw(0, 273e3)
		if i%3 == 0 {
			p.Law = Law{}
		}
		plan := newPlan(t, p, Options{})
		f := run(t, plan, h)
		wantBits(t, fmt.Sprintf("problem %d", i), f.Cols[0], plan.Start(0))
		if f.Stats != (Stats{}) {
			t.Errorf("problem %d: %+v, want no steps and no errors", i, f.Stats)
		}
	}
}

// TestMirror: a slab turned round gives the profile turned round.
func TestMirror(t *testing.T) {
	for i := range 30 {
		r := source(13, i)
		h := randomHistory(t, r)
		p := randomProblem(r, h, logUniform(r, 1e-6, 10))
		p.Shape, p.R0 = Slab, 0
		p.Inner, p.Outer = randomRims(r, h), randomRims(r, h)
		plan := newPlan(t, p, Options{Cells: 100 + r.IntN(50)})
		size, n := p.size(), len(p.Zones)
		turned := *p
		turned.Inner, turned.Outer, turned.Zones = p.Outer, p.Inner, make([]Zone, n)
		for j, z := range p.Zones {
			inside := 0.0
			if j > 0 {
				inside = p.Zones[j-1].Outer
				z.Edge = p.Zones[j-1].Edge
			}
			z.Outer = size - inside
			turned.Zones[n-1-j] = z
		}
		faces := make([]float64, len(plan.Faces()))
		for j, f := range plan.Faces() {
			faces[len(faces)-1-j] = size - f
		}
		got := run(t, newPlan(t, &turned, Options{Faces: faces}), h).Cols[0]
		want := run(t, plan, h).Cols[0]
		for j := range got[:len(got)/2] {
			got[j], got[len(got)-1-j] = got[len(got)-1-j], got[j]
		}
		// size - f rounds the smallest cells, 1e-3 of the crystal, by 1e-13
		wantClose(t, fmt.Sprintf("problem %d", i), got, want, 1e-10)
	}
}

// TestMultiplier: a job's multiplier does what the same factor in the law does.
func TestMultiplier(t *testing.T) {
	for i := range 20 {
		r := source(14, i)
		h := randomHistory(t, r)
		p := randomProblem(r, h, 1)
		lnM := math.Log(logUniform(r, 1e-6, 1e6))
		faster := *p
		faster.Law = Law{Terms: []Arrhenius{p.Law.Terms[0]}}
		faster.Law.Terms[0].LnA += lnM
		plan := newPlan(t, p, Options{})
		got := runJob(t, plan, Job{Course: newCourse(t, plan, h), LnM: lnM})
		wantClose(t, fmt.Sprintf("problem %d", i), got.Cols[0], run(t, newPlan(t, &faster, Options{}), h).Cols[0], rounding)
	}
}

// TestUntil: a course that ends early is that of the shorter history.
func TestUntil(t *testing.T) {
	leg := thermal.Leg{Kind: thermal.Hold, For: 1e10, T0: 1000}
	long, short := newHistory(t, leg, leg), newHistory(t, leg)
	r := source(15, 0)
	p := randomProblem(r, long, 0.1)
	p.Outer = []Rim{{Kind: Held, Value: 1}, {Kind: Prescribed, From: 7e9, Given: &Given{At: func(at float64) float64 { return at / 1e10 }}}}
	plan := newPlan(t, p, Options{})
	c := new(Course)
	if err := plan.Course(c, long, 1e10); err != nil {
		t.Fatal(err)
	}
	wantClose(t, "profile", runJob(t, plan, Job{Course: c}).Cols[0], run(t, plan, short).Cols[0], rounding)
}

// TestExtremes: multipliers beyond the range of float64 give the start or the
// end of all diffusion, never NaN.
func TestExtremes(t *testing.T) {
	for i := range 20 {
		r := source(16, i)
		h := randomHistory(t, r)
		p := randomProblem(r, h, 1)
		plan := newPlan(t, p, Options{})
		c := newCourse(t, plan, h)
		for _, lnM := range []float64{-1e6, -700, 700, 1e6} {
			f := new(Field)
			if err := plan.Audit(f, Job{Course: c, LnM: lnM}); err != nil {
				t.Fatal(err)
			}
			for j, v := range f.Cols[0] {
				if !(v >= -10 && v <= 10) || !finite(f.StepErr[0][j]) || !finite(f.CellErr[0][j]) {
					t.Fatalf("problem %d, ln m %g: cell %d is %g with errors %g and %g", i, lnM, j, v, f.StepErr[0][j], f.CellErr[0][j])
				}
			}
			if lnM == -1e6 {
				wantBits(t, "nothing moves", f.Cols[0], plan.Start(0))
			}
		}
	}
}
