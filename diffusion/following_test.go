package diffusion

import (
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"gonum.org/v1/gonum/integrate/quad"

	"bankfire/thermal"
)

// rimValue is a random value exp(a - b/T) of about 1 that rises or falls with
// temperature, or does neither.
func rimValue(r *rand.Rand) Arrhenius {
	e := [...]float64{0, -1, 1}[r.IntN(3)] * logUniform(r, 10, 1e4)
	return Arrhenius{LnA: e/1050 + r.NormFloat64(), E: e}
}

// following is a rim whose value goes with temperature.
func following(value Arrhenius) []Rim { return []Rim{{Kind: Following, Equilibrium: &value}} }

// asFunction is the same value as a function of time, with its breaks and jumps.
func asFunction(value Arrhenius, h *thermal.History) *Given {
	g := &Given{At: func(t float64) float64 {
		_, after := h.At(t)
		return math.Exp(value.LnA - value.E/after)
	}}
	for _, t := range h.Breaks(nil) {
		if before, after := h.At(t); before == after {
			g.Breaks = append(g.Breaks, t)
		} else {
			g.Jumps = append(g.Jumps, t)
		}
	}
	return g
}

// byQuadrature is the integral of f(T) dt along the history from t0 to t1, f smooth,
// leg by leg by Gauss-Legendre panels.
func byQuadrature(h *thermal.History, t0, t1 float64, f func(temp float64) float64) float64 {
	const panels, points = 40, 12
	sum := 0.0
	for i := range h.Legs() {
		leg, start := &h.Legs()[i], h.Start(i)
		a, b := math.Max(t0-start, 0), math.Min(t1-start, leg.For)
		for p := 0; p < panels && a < b; p++ {
			width := (b - a) / panels
			from := a + float64(p)*width
			sum += quad.Fixed(func(t float64) float64 { return f(leg.At(t)) }, from, from+width, points, quad.Legendre{}, 0)
		}
	}
	return sum
}

// randomSum is a law of one to three terms of like size at 1050 K.
func randomSum(r *rand.Rand) Law {
	var law Law
	for range 1 + r.IntN(3) {
		e := logUniform(r, 5e3, 6e4)
		law.Terms = append(law.Terms, Arrhenius{LnA: -48 + e/1050 + r.NormFloat64(), E: e})
	}
	return law
}

// TestMeansOfPieces compares the means of 1/T and of a rim value along a part of a
// leg, be it as short as a billionth of it, with quadrature.
func TestMeansOfPieces(t *testing.T) {
	// Both integrals are right to 2e-14; quadrature on a short part knows the temperature to an ulp only, of which an
	// activation temperature of 6e4 K makes 60, in each integral.
	const tol = 1e-12
	for i := range 600 {
		r := source(71, i)
		h := randomHistory(t, r)
		leg := &h.Legs()[r.IntN(len(h.Legs()))]
		law, value := randomSum(r), rimValue(r)
		p := piece{leg: leg, law: &law, from: leg.For * r.Float64()}
		p.to = p.from + (leg.For-p.from)*logUniform(r, 1e-9, 1)
		p.measure()
		only := newHistory(t, *leg)
		d := func(temp float64) float64 { return math.Exp(law.LnD(temp)) }
		g := byQuadrature(only, p.from, p.to, d)
		for name, test := range map[string]struct {
			got float64
			of  func(temp float64) float64
		}{
			"1/T": {p.meanColdness(), func(temp float64) float64 { return 1 / temp }},
			"rim": {p.mean(value), value.at},
		} {
			want := byQuadrature(only, p.from, p.to, func(temp float64) float64 { return d(temp) * test.of(temp) }) / g
			if diff := math.Abs(test.got/want - 1); !(diff <= tol) {
				t.Errorf("leg %d, %v, %g of it: mean of %s %.17g, want %.17g, relative difference %.2g, allowed %g",
					i, leg.Kind, (p.to-p.from)/leg.For, name, test.got, want, diff, tol)
			}
		}
	}
}

// TestMeansOfSteps does so for steps across legs, long and short.
func TestMeansOfSteps(t *testing.T) {
	// between the times found; a step of 1e-7 of G knows its shares on both sides of a leg's end to 1e-16 of G
	const tol = 1e-8
	for i := range 60 {
		r := source(72, i)
		h := randomHistory(t, r)
		law, value := randomSum(r), rimValue(r)
		p := &Problem{Zones: []Zone{{Outer: testSize}}, Law: law, Outer: following(value), LnK: drift(-2e4)}
		plan := newPlan(t, p, Options{})
		c := newCourse(t, plan, h)
		if len(c.spans) != 1 {
			t.Fatalf("%d spans along a path without jumps", len(c.spans))
		}
		d := func(temp float64) float64 { return math.Exp(law.LnD(temp)) }
		for k, times := 0, c.route.times; k < len(plan.steps) && !(plan.steps[k].euler && k > defaultDamped*2); k++ {
			g := byQuadrature(h, times[k], times[k+1], d)
			for name, test := range map[string]struct {
				got float64
				of  func(temp float64) float64
			}{
				"1/T": {c.spans[0].coldness.fine[k], func(temp float64) float64 { return 1 / temp }},
				"rim": {c.spans[0].outer.value.fine[k], value.at},
			} {
				want := byQuadrature(h, times[k], times[k+1], func(temp float64) float64 { return d(temp) * test.of(temp) }) / g
				if diff := math.Abs(test.got/want - 1); !(diff <= tol) {
					t.Fatalf("path %d, step %d: mean of %s %.17g, want %.17g, relative difference %.2g, allowed %g",
						i, k, name, test.got, want, diff, tol)
				}
			}
		}
	}
}

// TestMeansAtConstantTemperature: along holds the means are the value itself, to
// the bit; along a ramp that does not rise, to rounding.
func TestMeansAtConstantTemperature(t *testing.T) {
	const (
		temp    = 1043.2
		roundTo = 1e-13 // of the logarithms of integrals of some exp(-50)
	)
	value := Arrhenius{LnA: 12, E: 9000}
	for name, test := range map[string]struct {
		leg thermal.Leg
		tol float64
	}{
		"holds": {thermal.Leg{Kind: thermal.Hold, For: 1e9 / 7, T0: temp}, 0},
		"ramps": {thermal.Leg{Kind: thermal.Ramp, For: 1e9 / 7, T0: temp, T1: temp}, roundTo},
	} {
		p := &Problem{Zones: []Zone{{Outer: testSize}}, Law: testLaw, Outer: following(value), LnK: drift(-2e4)}
		s := newCourse(t, newPlan(t, p, Options{}), newHistory(t, test.leg, test.leg, test.leg)).spans[0]
		for k := range s.coldness.fine {
			if diff := math.Abs(s.coldness.fine[k]*temp - 1); !(diff <= test.tol+0x1p-52) {
				t.Errorf("%s, step %d: mean of 1/T %.17g, want 1/%g", name, k, s.coldness.fine[k], temp)
			}
			if want := math.Exp(value.LnA - value.E/temp); !(math.Abs(s.outer.value.fine[k]/want-1) <= test.tol) {
				t.Errorf("%s, step %d: rim %.17g, want %.17g", name, k, s.outer.value.fine[k], want)
			}
		}
	}
}

// TestFollowingIsGiven: a rim that follows temperature, or exchanges with what does,
// is the one that is given as the same function of time, jumps included.
func TestFollowingIsGiven(t *testing.T) {
	const tol = 1e-7 // of the range, see TestRimMeans
	for i := range 40 {
		r := source(73, i)
		legs := randomHistory(t, r).Legs()
		if r.IntN(2) == 0 {
			legs = append(legs[:len(legs):len(legs)], randomHistory(t, r).Legs()...) // mostly with a jump between
		}
		h := newHistory(t, legs...)
		p := randomProblem(r, h, logUniform(r, 1e-3, 1))
		value := rimValue(r)
		given := *p
		p.Inner, p.Outer, p.Free, given.Inner, given.Free = nil, following(value), nil, nil, nil
		given.Outer = []Rim{{Kind: Prescribed, Given: asFunction(value, h)}}
		if r.IntN(2) == 0 {
			rate := rateOf(p, h, logUniform(r, 0.1, 100), logUniform(r, 5e3, 6e4))
			p.Outer[0].Kind, p.Outer[0].Rate = Transfer, rate
			given.Outer[0].Kind, given.Outer[0].Rate = Transfer, rate
		}
		plan := newPlan(t, p, Options{Cells: 60})
		got, want := run(t, plan, h), run(t, newPlan(t, &given, Options{Faces: plan.Faces()}), h)
		scale := math.Max(rangeOf(append(plan.Start(0), want.Cols[0]...)), want.Cols[0][len(want.Cols[0])-1])
		if got.Stats.Steps != want.Stats.Steps {
			t.Errorf("problem %d: %d solves, %d where the value is given", i, got.Stats.Steps, want.Stats.Steps)
		}
		if at, diff := farthest(got.Cols[0], want.Cols[0]); !(diff <= tol*scale) {
			t.Errorf("problem %d, %d legs: cell %d is off by %.2g of %g", i, len(legs), at, diff, scale)
		}
	}
}

// TestSmallJumps: a relaxation that has not quite arrived leaves no event, one that
// is cut short does, and only where a rim follows temperature or exchanges, and in a host.
func TestSmallJumps(t *testing.T) {
	leg := func(kind thermal.Kind, t0, t1, life float64) thermal.Leg {
		return thermal.Leg{Kind: kind, For: life, T0: t0, T1: t1, Tau: 1e8}
	}
	h := newHistory(t, leg(thermal.Relax, 1050, 960, 1.2e9), leg(thermal.Ramp, 960, 1050, 1e8), // short of 960 K by 6e-4 K
		leg(thermal.Relax, 1050, 960, 2e8), leg(thermal.Hold, 960, 0, 1e9)) // by 12 K
	value := Arrhenius{LnA: 9, E: 9000}
	for name, test := range map[string]struct {
		rims []Rim
		want []float64
	}{
		"follows":  {following(value), []float64{1.5e9}},
		"held":     {[]Rim{{Kind: Held, Value: 1}}, nil},
		"later":    {append([]Rim{{Kind: Held}}, Rim{Kind: Following, From: 2e9, Equilibrium: &value}), []float64{2e9}},
		"sooner":   {append(following(value), Rim{Kind: Sealed, From: 1.4e9}), []float64{1.4e9}},
		"host":     {nil, []float64{1.5e9}},
		"constant": {[]Rim{{Kind: Transfer, Value: 1, Rate: Arrhenius{LnA: -20, E: 100}}}, []float64{1.5e9}},
		"exchange": {[]Rim{{Kind: Transfer, Equilibrium: &value, Rate: Arrhenius{LnA: -20, E: 100}}}, []float64{1.5e9}},
	} {
		p := &Problem{Zones: []Zone{{Outer: testSize}}, Law: testLaw, Outer: test.rims}
		if name == "host" {
			p.LnK = drift(-2e4)
		}
		c := newCourse(t, newPlan(t, p, Options{}), h)
		if len(c.spans) != len(test.want)+1 || len(c.events) != len(test.want) || len(test.want) > 0 && c.events[0] != test.want[0] {
			t.Errorf("%s: %d spans, events %v, want %v", name, len(c.spans), c.events, test.want)
		}
	}
}

// TestCourseMemory: a course used again, also for another plan and path, is the one
// made anew, and needs no memory.
func TestCourseMemory(t *testing.T) {
	used := new(Course)
	for i := range 30 {
		r := source(74, i)
		h := randomHistory(t, r)
		p := randomProblem(r, h, 0.1)
		p.Inner, p.Free = nil, nil
		if p.Outer = following(rimValue(r)); i%3 == 0 {
			p.Outer = append(p.Outer, Rim{Kind: Held, Value: 0.3, From: h.Life() * r.Float64()})
		}
		if p.LnK = nil; i%2 == 0 {
			p.LnK = drift(-2e4)
		}
		plan := newPlan(t, p, Options{Cells: 20})
		if err := plan.Course(used, h, h.Life()); err != nil {
			t.Fatal(err)
		}
		got, want := runJob(t, plan, Job{Course: used}).Cols[0], run(t, plan, h).Cols[0]
		if at, diff := farthest(got, want); diff != 0 {
			t.Errorf("problem %d: cell %d is off by %g", i, at, diff)
		}
		if n := testing.AllocsPerRun(3, func() { _ = plan.Course(used, h, h.Life()) }); n != 0 {
			t.Errorf("problem %d: a course used again allocates %g times", i, n)
		}
	}
}

// TestCoarseMeans: where steps are long their ends are found roughly, and what each ends too early or too late is settled:
// the means are those of a cut that is exact, but for the square of what was missed.
func TestCoarseMeans(t *testing.T) {
	const typical = coarsePace * coarsePace // of the range of the value, the largest of a path in most
	fractions := []float64{0.003, 0.02, 0.1, 0.25, 0.4, 0.55, 0.7, 0.85, 0.93, 0.97, 0.99, 0.999, 1}
	var off []float64
	for i := range 200 {
		r := source(73, i)
		h := randomHistory(t, r)
		if i%2 == 0 { // legs that come again
			legs := h.Legs()
			h = newHistory(t, append(append(legs[:len(legs):len(legs)], legs...), legs...)...)
		}
		law, value := randomSum(r), rimValue(r)
		steps := newSchedule(fractions, 1, 0)
		var exact, coarse route
		exact.lay(&law, h, 0, h.Life())
		exact.cut(steps, 1e-12, false)
		coarse.lay(&law, h, 0, h.Life())
		coarse.cut(steps, coarsePace, true)
		for name, over := range map[string]func(*piece) float64{
			"1/T": (*piece).meanColdness, "rim": func(p *piece) float64 { return p.mean(value) },
		} {
			want, got := make([]float64, len(steps)), make([]float64, len(steps))
			exact.means(want, over)
			coarse.means(got, over)
			lo, hi := h.Range()
			span := 1/lo - 1/hi
			if name == "rim" {
				span = math.Abs(value.at(lo) - value.at(hi))
			}
			k, diff := farthest(got, want)
			if !(diff <= coarsePace*span+1e-9*math.Abs(want[k])) { // a step that holds a quench may miss it all
				t.Errorf("path %d: mean of %s in step %d is %.9g, exactly %.9g; %g of its range", i, name, k, got[k], want[k], diff/span)
			}
			if span > 1e-6*math.Abs(want[k]) {
				off = append(off, diff/span)
			}
		}
	}
	slices.Sort(off)
	t.Logf("of the range: median %.2g, nine in ten below %.2g, worst %.2g", off[len(off)/2], off[len(off)*9/10], off[len(off)-1])
	if !(off[len(off)*3/4] <= typical) {
		t.Errorf("three in four means are off by less than %.2g of their range, want %.2g", off[len(off)*3/4], typical)
	}
}
