package diffusion

import (
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"bankfire/diffusion/yardstick"
	"bankfire/thermal"
)

// randomCoupled couples a random problem to a host with zones, half of the time
// smooth within them too, and an ln K that is linear in X/T, or curved in both. Its
// greatest jump or change along r, at 1000 K, is reach.
func randomCoupled(r *rand.Rand, h *thermal.History, g, reach float64) *Problem {
	p := randomProblem(r, h, g)
	couplings := []func(x, temp float64) float64{
		func(x, temp float64) float64 { return reach*x*1000/temp - 2000/temp },
		func(x, temp float64) float64 { return -reach * x * 1000 / temp },
		func(x, temp float64) float64 { return reach * (0.3 + 0.5*x + 0.2*x*x) * (0.5 + 500/temp) },
		func(x, temp float64) float64 { return reach * x * (2 - math.Pow(temp/1000, 2)) },
	}
	p.LnK = couplings[r.IntN(len(couplings))]
	part := 1.0
	if r.IntN(2) == 0 {
		part = 0.5
		middle, width := p.R0+r.Float64()*(p.size()-p.R0), (0.05+0.3*r.Float64())*(p.size()-p.R0)
		p.Host = func(at float64) float64 {
			if p.R0 == 0 { // level at the centre
				at *= at / (middle + at)
			}
			return part / 2 * (1 + math.Tanh((at-middle)/width))
		}
	}
	for i := range p.Zones {
		p.Zones[i].Host = part * r.Float64()
	}
	return p
}

// TestCoupledErrorCoversTrueOne is TestStatedErrorCoversTrueOne in zoned hosts,
// against a quarter of its cells and steps.
func TestCoupledErrorCoversTrueOne(t *testing.T) {
	const (
		cases    = 150
		covered  = 0.99
		tooLarge = 10
		floor    = 1e-10 // of the largest value: no measurement has as many digits
	)
	ratios := make([]float64, cases)
	t.Run("problems", func(t *testing.T) {
		for i := range ratios {
			t.Run(fmt.Sprintf("problem=%d", i), func(t *testing.T) {
				t.Parallel()
				r := source(22, i)
				h := randomHistory(t, r)
				g := logUniform(r, 1e-10, 1e4)
				p := randomCoupled(r, h, g, logUniform(r, 0.1, 12))
				o := Options{Growth: defaultGrowth}
				if r.IntN(2) == 0 {
					o = Options{Cells: 40 + r.IntN(80), Growth: 0.1 + 0.3*r.Float64()}
				}
				stated, err, largest := statedAndTrue(t, p, o, h, g)
				ratios[i] = (stated + floor*largest) / err
				if !(ratios[i] >= 1) {
					t.Logf("%v, %d zones, G/a^2 %.2g, options %+v: stated %.3g, true %.3g", p.Shape, len(p.Zones), g, o, stated, err)
				}
			})
		}
	})
	slices.Sort(ratios)
	missed, _ := slices.BinarySearch(ratios, 1)
	t.Logf("stated/true: covered %d of %d, least %.3g, one in ten below %.3g, median %.3g, nine in ten below %.3g",
		cases-missed, cases, ratios[0], ratios[cases/10], ratios[cases/2], ratios[cases*9/10])
	if !(float64(cases-missed) >= covered*cases) || math.IsNaN(ratios[0]) {
		t.Errorf("the stated error covers the true one in %d of %d problems, want %g of them", cases-missed, cases, covered)
	}
	if !(ratios[cases/2] <= tooLarge) {
		t.Errorf("the median of stated/true is %.3g, want at most %d", ratios[cases/2], tooLarge)
	}
}

// statedAndTrue returns the largest error over the cells that Audit states, the
// largest difference from a finer solution, and the largest value in that.
func statedAndTrue(t *testing.T, p *Problem, o Options, h *thermal.History, g float64) (stated, err, largest float64) {
	t.Helper()
	plan := newPlan(t, p, o)
	got := audit(t, plan, h)
	size := p.size() - p.R0
	finer := cutFiner(t, plan, o, 4, g*size*size)
	truth := onto(plan, finer, run(t, finer, h).Cols[0])
	for j := range truth {
		stated = math.Max(stated, math.Abs(got.StepErr[0][j])+math.Abs(got.CellErr[0][j]))
		largest = math.Max(largest, math.Abs(truth[j]))
	}
	_, err = farthest(got.Cols[0], truth)
	return stated, err, largest
}

// cutFiner is newFiner with cells and steps cut in parts.
func cutFiner(tb testing.TB, p *Plan, o Options, parts int, g float64) *Plan {
	tb.Helper()
	var faces, fractions []float64
	coarse := p.Faces()
	for i := 1; i < len(coarse); i++ {
		n := parts
		for near(p.problem, coarse, i) && n < 512 && (coarse[i]-coarse[i-1])/float64(n) > math.Sqrt(g)/4 {
			n *= 2
		}
		faces = append(faces, uniform(coarse[i-1], coarse[i], n)[:n]...)
	}
	faces = append(faces, coarse[len(coarse)-1])
	from := 0.0
	for _, f := range defaultFractions(defaultDamped, o.Growth, true) {
		fractions = append(fractions, uniform(from, f, parts)[1:]...)
		from = f
	}
	finer, err := compile(p.problem, faces, newSchedule(fractions, parts*defaultDamped, parts*lastDamped))
	if err != nil {
		tb.Fatal(err)
	}
	return finer
}

// coupledHold is the temperature, K, of the holds, along which K does not move.
const coupledHold = 1073.15

// atHold makes p's law one of an integral of g squares of its size along a hold,
// which it returns.
func atHold(tb testing.TB, p *Problem, g float64) *thermal.History {
	tb.Helper()
	h := newHistory(tb, thermal.Leg{Kind: thermal.Hold, For: 1e10, T0: coupledHold})
	size := p.size() - p.R0
	p.Law = NewLaw(1, 250e3)
	p.Law.Terms[0].LnA = math.Log(g*size*size) - p.Law.LnIntegral(h, 0, h.Life())
	return h
}

// partitions returns K, in the plan's unit, of each cell and of both ends.
func partitions(p *Plan, temp float64) (k []float64, kIn, kOut float64) {
	op := new(Field).couple(p, 0, temp)
	return op.k, op.kIn, op.kOut
}

// TestCoupledRestStays: what is in equilibrium at a fixed temperature stays so to
// round-off, for jumps of ln K up to 12 and integrals over twelve decades, with
// ends sealed, held at their own equilibrium, exchanging with it or following it.
func TestCoupledRestStays(t *testing.T) {
	const allowed = 1e-13 // of each value: some hundred roundings of 1e-16, most of which cancel
	worst := 0.0
	for i := range 100 {
		r := source(23, i)
		p := randomCoupled(r, steadyHistory(t), 1, 12*r.Float64())
		h := atHold(t, p, logUniform(r, 1e-8, 1e4))
		p.Inner, p.Outer = nil, nil
		plan := newPlan(t, p, Options{Cells: 40 + r.IntN(100)})
		k, kIn, kOut := partitions(plan, coupledHold)
		u := logUniform(r, 1e-3, 1e3)
		switch r.IntN(4) {
		case 1:
			p.Outer = []Rim{{Kind: Held, Value: u * kOut}}
		case 2:
			p.Outer = []Rim{{Kind: Transfer, Value: u * kOut, Rate: rateOf(p, h, logUniform(r, 0.1, 100), 2e4)}}
		case 3:
			p.Outer = following(Arrhenius{LnA: math.Log(u*kOut) + 5e3/coupledHold, E: 5e3})
		}
		if (p.Shape == Slab || p.R0 > 0) && r.IntN(2) == 0 {
			p.Inner = []Rim{{Kind: Held, Value: u * kIn}}
		}
		plan = newPlan(t, p, Options{Faces: plan.Faces()})
		for c := range k {
			plan.fresh[0][c] = u * k[c]
		}
		for c, v := range run(t, plan, h).Cols[0] {
			off := math.Abs(v/(u*k[c]) - 1)
			if !(off <= allowed) {
				t.Fatalf("problem %d, %v: cell %d is off equilibrium by %.2g of itself, allowed %g", i, p.Shape, c, off, allowed)
			}
			worst = math.Max(worst, off)
		}
	}
	t.Logf("at most %.2g off", worst)
}

// TestCoupledKeepsMass: sealed, while T and so K move.
func TestCoupledKeepsMass(t *testing.T) {
	const steps, allowed = 10_000, 1e-12 // of the total
	worst := 0.0
	for i := range 12 {
		r := source(24, i)
		h := randomHistory(t, r)
		p := randomCoupled(r, h, logUniform(r, 1e-4, 1e4), 12*r.Float64())
		p.Inner, p.Outer = nil, nil
		plan := newPlan(t, p, Options{Cells: 30, Fractions: equalSteps(steps)})
		f := run(t, plan, h)
		drift := math.Abs(content(plan, f.Cols[0])/content(plan, plan.Start(0)) - 1)
		if !(drift <= allowed) || !(f.Stats.MassDrift <= allowed) {
			t.Errorf("problem %d: %d solves lose %.2g of the total and state %.2g, allowed %g", i, f.Stats.Steps, drift, f.Stats.MassDrift, allowed)
		}
		worst = math.Max(worst, drift)
	}
	t.Logf("at most %.2g lost", worst)
}

// TestCoupledMassBalances: with any rims, all that is missing or new came through them.
func TestCoupledMassBalances(t *testing.T) {
	for i := range 60 {
		r := source(25, i)
		h := randomHistory(t, r)
		p := randomCoupled(r, h, logUniform(r, 1e-8, 1e4), 12*r.Float64())
		if f := run(t, newPlan(t, p, Options{Cells: 60}), h); !(f.Stats.MassDrift <= 1e-12) {
			t.Errorf("problem %d: %d solves, drift %.2g of all that was there or came", i, f.Stats.Steps, f.Stats.MassDrift)
		}
	}
}

// TestCoupledStaysPositive: no value falls below zero by more than its stated
// error, with zones and rims that hold nothing, along any path.
func TestCoupledStaysPositive(t *testing.T) {
	lowest := 0.0
	for i := range 150 {
		r := source(26, i)
		h := randomHistory(t, r)
		p := randomCoupled(r, h, logUniform(r, 1e-10, 1e3), 12*r.Float64())
		for k := range p.Zones {
			if p.Zones[k].Edge = 0; r.IntN(2) == 0 {
				p.Zones[k].Start = 0
			}
		}
		for _, rims := range [][]Rim{p.Inner, p.Outer} {
			for k := range rims {
				if given := rims[k].Given; given != nil {
					rims[k].Given = &Given{At: func(t float64) float64 { v := given.At(t); return v * v }}
				} else if r.IntN(2) == 0 {
					rims[k].Value = 0
				}
			}
		}
		f := audit(t, newPlan(t, p, Options{Cells: 40 + r.IntN(40)}), h)
		for c, v := range f.Cols[0] {
			if stated := math.Abs(f.StepErr[0][c]) + math.Abs(f.CellErr[0][c]); !(v >= -stated-1e-15) {
				t.Errorf("problem %d, %v: cell %d is %.3g with a stated error of %.3g", i, p.Shape, c, v, stated)
				break
			}
			lowest = math.Min(lowest, v)
		}
	}
	t.Logf("lowest value %.3g", lowest)
}

// TestCoupledRange: at a fixed temperature C/K stays within the range of its
// start and its rims.
func TestCoupledRange(t *testing.T) {
	const allowed = 1e-12 // of the largest
	worst := 0.0
	for i := range 200 {
		r := source(27, i)
		p := randomCoupled(r, steadyHistory(t), 1, 12*r.Float64())
		h := atHold(t, p, logUniform(r, 1e-12, 1e4))
		held := func() []Rim {
			if r.IntN(2) == 0 {
				return nil
			}
			return []Rim{{Kind: Held, Value: r.Float64()}}
		}
		p.Inner, p.Outer = nil, held()
		if p.Shape == Slab || p.R0 > 0 {
			p.Inner = held()
		}
		plan := newPlan(t, p, Options{Cells: 40 + r.IntN(100)})
		k, kIn, kOut := partitions(plan, coupledHold)
		lo, hi := math.Inf(1), math.Inf(-1)
		see := func(u float64) { lo, hi = math.Min(lo, u), math.Max(hi, u) }
		for c, v := range plan.Start(0) {
			see(v / k[c])
		}
		for _, rim := range p.Inner {
			see(rim.Value / kIn)
		}
		for _, rim := range p.Outer {
			see(rim.Value / kOut)
		}
		for c, v := range run(t, plan, h).Cols[0] {
			u := v / k[c]
			over := math.Max(u-hi, lo-u) / hi
			if !(over <= allowed) {
				t.Fatalf("problem %d, %v: C/K of cell %d is %.6g, outside [%.6g, %.6g]", i, p.Shape, c, u, lo, hi)
			}
			worst = math.Max(worst, over)
		}
	}
	t.Logf("at most %.2g outside", worst)
}

// TestCoupledMirror: a slab turned round, host and all, gives the profile turned round.
func TestCoupledMirror(t *testing.T) {
	for i := range 30 {
		r := source(28, i)
		h := randomHistory(t, r)
		p := randomCoupled(r, h, logUniform(r, 1e-6, 10), 12*r.Float64())
		p.Shape, p.R0 = Slab, 0
		p.Inner, p.Outer = randomRims(r, h), randomRims(r, h)
		plan := newPlan(t, p, Options{Cells: 100 + r.IntN(50)})
		size, n := p.size(), len(p.Zones)
		turned := *p
		turned.Inner, turned.Outer, turned.Zones = p.Outer, p.Inner, make([]Zone, n)
		if p.Host != nil {
			turned.Host = func(x float64) float64 { return p.Host(size - x) }
		}
		for j, z := range p.Zones {
			inside := 0.0
			if j > 0 {
				inside, z.Edge = p.Zones[j-1].Outer, p.Zones[j-1].Edge
			}
			z.Outer = size - inside
			turned.Zones[n-1-j] = z
		}
		faces := make([]float64, len(plan.Faces()))
		for j, f := range plan.Faces() {
			faces[len(faces)-1-j] = size - f
		}
		got := run(t, newPlan(t, &turned, Options{Faces: faces}), h).Cols[0]
		slices.Reverse(got)
		want := run(t, plan, h).Cols[0]
		// size - f rounds the smallest cells, 1e-3 of the crystal, by 1e-13
		wantClose(t, fmt.Sprintf("problem %d", i), got, want, 1e-10*(1+slices.Max(want)))
	}
}

// TestEvenHost: an ln K that is the same everywhere, whatever it is and however it
// moves with temperature, does nothing.
func TestEvenHost(t *testing.T) {
	for i := range 60 {
		r := source(29, i)
		h := randomHistory(t, r)
		p := randomProblem(r, h, logUniform(r, 1e-8, 1e3))
		even := *p
		height, slope := 10*r.NormFloat64(), 5000*r.NormFloat64()*float64(i%2)
		even.LnK = func(x, temp float64) float64 { return height + slope/temp }
		o := Options{Cells: 80, Fractions: defaultFractions(defaultDamped, defaultGrowth, true)} // the same steps for both
		got, want := run(t, newPlan(t, &even, o), h), run(t, newPlan(t, p, o), h)
		wantClose(t, fmt.Sprintf("problem %d", i), got.Cols[0], want.Cols[0], rounding)
	}
}

// TestCoupledOrders: second order in steps and cells together, on ramps along
// which K moves: the exponential of check F08 in a slab with rims that move, and
// the Gaussian of F07 in all shapes. Five grids each, every ratio.
func TestCoupledOrders(t *testing.T) {
	const order, within = 2, 0.15
	undamped := func(n int) Options {
		return Options{Faces: uniform(0, testSize, n), Fractions: equalSteps(n / 2), Damp: -1}
	}
	planned := func(n int) Options { return Options{Cells: n, Growth: defaultGrowth * 160 / float64(n)} }
	tests := []struct {
		name string
		err  func(n int) float64
	}{
		{"exponential, even", func(n int) float64 { return exponentialError(t, undamped(n)) }},
		{"exponential, default plan", func(n int) float64 { return exponentialError(t, planned(n)) }},
	}
	for shape := Slab; shape <= Ball; shape++ {
		tests = append(tests, struct {
			name string
			err  func(n int) float64
		}{"Gaussian, " + shape.String(), func(n int) float64 { return gaussianError(t, shape, undamped(n)) }})
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			before := 0.0
			for _, n := range []int{80, 160, 320, 640, 1280} {
				err := test.err(n)
				if before == 0 {
					t.Logf("n %4d: error %.3e", n, err)
				} else {
					p := math.Log2(before / err)
					t.Logf("n %4d: error %.3e, order %.3f", n, err, p)
					if !(math.Abs(p-order) <= within) {
						t.Errorf("n %d: order %.3f, want %d within %g", n, p, order, within)
					}
				}
				before = err
			}
		})
	}
}

// exponentialError is the largest error in the cells, as a part of the range, of
// an exponential along a ramp from 950 to 1200 K.
func exponentialError(t *testing.T, o Options) float64 {
	t.Helper()
	const a, slope = -2, 3 // slope of ln K at couplingTemp
	h := rampOf(t, 0.1*testSize*testSize)
	grownBoth := func(at float64) (g, gp float64) {
		term := testLaw.Terms[0]
		perT := math.Exp(term.LnA+h.LnArrhenius(term.E, 1, 0, at)) / (testSize * testSize) // integral of D/T
		return grown(h)(at) / (testSize * testSize), slope * couplingTemp * perT
	}
	p := exponentialSlab(a, func(x float64) float64 { return x }, grownBoth)
	p.LnK = func(x, temp float64) float64 { return slope * couplingTemp / temp * x }
	s := solve(t, p, o, h)
	g, gp := grownBoth(h.Life())
	want := make([]float64, len(s.c))
	for i := range want {
		x0, x1 := s.plan.Faces()[i]/testSize, s.plan.Faces()[i+1]/testSize
		want[i] = (exponential(a, x1, g, gp) - exponential(a, x0, g, gp)) / (a * (x1 - x0))
	}
	_, err := farthest(s.c, want)
	return err / rangeOf(want)
}

// gaussianError is the same of a Gaussian about the centre, in a host that draws
// it there.
func gaussianError(t *testing.T, shape Shape, o Options) float64 {
	t.Helper()
	const s0, q = 0.01, -25 // at couplingTemp; the rim never sees the Gaussian
	h := rampOf(t, 0.02*testSize*testSize)
	p := &Problem{Shape: shape, Zones: []Zone{{Outer: testSize}}, Law: testLaw}
	p.Host = func(r float64) float64 { return r / testSize * r / testSize }
	p.LnK = func(x, temp float64) float64 { return q * couplingTemp / temp * x }
	gaussian := func(s float64) func(r float64) float64 {
		height := math.Pow(s0/s, float64(shape+1)/2)
		return func(r float64) float64 { return height * math.Exp(-r*r/(testSize*testSize)/(2*s)) }
	}
	p.Profile = gaussian(s0)
	s := solve(t, p, o, h)
	want := make([]float64, len(s.c))
	addProfile(want, shape, s.plan.grid, gaussian(variance(h, s0, q)))
	_, err := farthest(s.c, want)
	return err / rangeOf(want)
}

// variance integrates ds/dt = D (2 + 4 q s), q being inversely proportional to
// temperature, by the classic Runge-Kutta rule.
func variance(h *thermal.History, s0, q float64) float64 {
	const steps = 20_000
	dt := h.Life() / steps
	rate := func(t, s float64) float64 {
		temp, _ := h.At(t)
		return math.Exp(testLaw.LnD(temp)) / (testSize * testSize) * (2 + 4*q*couplingTemp/temp*s)
	}
	s := s0
	for i := range steps {
		t := float64(i) * dt
		a := rate(t, s)
		b := rate(t+dt/2, s+dt/2*a)
		c := rate(t+dt/2, s+dt/2*b)
		d := rate(t+dt, s+dt*c)
		s += dt / 6 * (a + 2*b + 2*c + d)
	}
	return s
}

// TestCoupledSideBySide: jobs run together give each the bits that it gets alone,
// be their courses one, some or each its own, and so does a field that has been used
// for another plan.
func TestCoupledSideBySide(t *testing.T) {
	used := make([]Field, 7)
	for i := range 10 {
		r := source(30, i)
		h := randomHistory(t, r)
		p := randomCoupled(r, h, 1, 12*r.Float64())
		p.Free = []Basis{{Start: make([]float64, len(p.Zones))}}
		p.Free[0].Start[0] = 1
		plan := newPlan(t, p, Options{Cells: 30 + r.IntN(60)})
		jobs := randomJobs(t, r, plan, h, 7)
		for k := range jobs {
			switch {
			case i%3 == 1:
				jobs[k].Course = jobs[0].Course
			case i%3 == 2:
				jobs[k].Course = jobs[k%2].Course
			}
		}
		if err := plan.Run(used, jobs); err != nil {
			t.Fatal(err)
		}
		alone := newPlan(t, p, Options{Faces: plan.Faces()})
		for k := range jobs {
			course := *jobs[k].Course
			course.plan = alone
			wantSame(t, fmt.Sprintf("problem %d, job %d", i, k), &used[k], runJob(t, alone, Job{Course: &course, LnM: jobs[k].LnM}))
		}
	}
}

// TestCoupledDoesNotAllocate: once its fields have been used, and the operators of
// its temperatures are known, neither does a run of a coupled problem.
func TestCoupledDoesNotAllocate(t *testing.T) {
	r := source(37, 0)
	h := randomHistory(t, r)
	plan := newPlan(t, randomCoupled(r, h, 1, 2), Options{Cells: 40})
	for _, n := range []int{1, 4, 7} {
		jobs, dst := randomJobs(t, r, plan, h, 7)[:n], make([]Field, n)
		allocated := testing.AllocsPerRun(3, func() {
			if err := plan.Run(dst, jobs); err != nil {
				t.Fatal(err)
			}
		})
		if allocated != 0 {
			t.Errorf("%d jobs: %g allocations a run, want none", n, allocated)
		}
	}
}

// TestCoupledFieldsAreReused: nothing of one host is left in a field that is used
// for another at the same temperature, or without one.
func TestCoupledFieldsAreReused(t *testing.T) {
	var plans []*Plan
	var courses []*Course
	for i := range 4 {
		p := slabOf(testSize, nothing, 1, 1, 2)
		if p.Zones[0].Host, p.LnK = float64(i), fixedLnK(1); i == 3 {
			p.LnK, p.Own = nil, func(c float64) float64 { return 1 + c }
		}
		plans = append(plans, newPlan(t, p, Options{Faces: uniform(0, testSize, 20+20*(i%2))}))
		courses = append(courses, newCourse(t, plans[i], holdOf(t, 0.1*testSize*testSize)))
	}
	used := make([]Field, 1)
	for i, plan := range append(plans, plans...) {
		job := Job{Course: courses[i%4]}
		if err := plan.Run(used, []Job{job}); err != nil {
			t.Fatal(err)
		}
		wantSame(t, fmt.Sprintf("run %d", i), &used[0], runJob(t, plan, job))
	}
}

// TestStrontiumTurns: common practice, no source. In the core of a plagioclase
// whose Sr rises with An at the start, at 750 C the slope of Sr on An is still
// positive after tens of years, near zero after some hundreds, clearly negative
// after one to two thousand, and at equilibrium after about ten thousand, for
// features of some tens of micrometres. At 800 C the same comes three to eight
// times sooner. The law is that of Giletti and Casserly 1994, Geochim. Cosmochim.
// Acta 58, 3785-3793; RT ln K = -26.7 kJ/mol An.
func TestStrontiumTurns(t *testing.T) {
	const a, wide, zones = -26.7e3, 50e-6, 8
	p := &Problem{Law: NewLaw(2.92*math.Pow(10, -4.08), 276e3), LnK: drift(a)}
	for i := range zones {
		an := 0.45 + 0.1*float64(i%2)
		p.Zones = append(p.Zones, Zone{
			Outer: wide * float64(i+1), Host: an, Start: 700 + 2000*(an-0.5), // ppm, rising by 20 for each mol% of An
			Times: math.Pow(10, -4.1*an),
		})
	}
	plan := newPlan(t, p, Options{})
	slope := func(c []float64) float64 { return slopeOnHost(p, plan, c) }
	after := func(celsius, years float64) float64 {
		h := newHistory(t, thermal.Leg{Kind: thermal.Hold, For: years * thermal.Year, T0: celsius + thermal.ZeroCelsius})
		return slope(run(t, plan, h).Cols[0])
	}
	start := slope(plan.Start(0))
	k, _, _ := partitions(plan, 750+thermal.ZeroCelsius)
	rest := slices.Clone(k)
	for i := range rest {
		rest[i] *= content(plan, plan.Start(0)) / content(plan, k)
	}
	equilibrium := slope(rest)
	for _, test := range []struct{ years, least, most float64 }{
		{30, start / 2, start},                   // still positive
		{1000, equilibrium, equilibrium / 2},     // clearly negative
		{2000, equilibrium, equilibrium / 2},     //
		{10_000, equilibrium, 0.9 * equilibrium}, // at equilibrium
	} {
		got := after(750, test.years)
		t.Logf("after %5g years at 750 C: %.0f ppm per An; start %.0f, equilibrium %.0f", test.years, got, start, equilibrium)
		if !(got >= test.least && got <= test.most) {
			t.Errorf("after %g years the slope is %.0f ppm per An, want %.0f to %.0f", test.years, got, test.least, test.most)
		}
	}
	turns := func(celsius float64) float64 {
		return rootOf(t, func(lnYears float64) float64 { return after(celsius, math.Exp(lnYears)) }, math.Log(1), math.Log(10_000))
	}
	cold, hot := math.Exp(turns(750)), math.Exp(turns(800))
	t.Logf("the slope is zero after %.0f years at 750 C and %.0f at 800 C, %.2f times sooner", cold, hot, cold/hot)
	if !(cold >= 100 && cold <= 900) || !(cold/hot >= 3 && cold/hot <= 8) {
		t.Errorf("zero after %.0f years, and %.2f times sooner at 800 C; want some hundreds, and 3 to 8", cold, cold/hot)
	}
}

// slopeOnHost is the slope of the least-squares line of cell means on the host of
// their zones, each cell counting by its volume.
func slopeOnHost(p *Problem, plan *Plan, c []float64) float64 {
	var n, x, y, xx, xy float64
	for i, v := range plan.Volumes() {
		host := p.Zones[p.zone(plan.Centres()[i])].Host
		n, x, y = n+v, x+v*host, y+v*c[i]
		xx, xy = xx+v*host*host, xy+v*host*c[i]
	}
	return (xy - x*y/n) / (xx - x*x/n)
}

// TestPanels compares the polynomials with what they stand for, at temperatures
// from 700 to 1700 K, and wants nearly all of them in use.
func TestPanels(t *testing.T) {
	const cases, tries = 40, 50
	kept := 0
	for i := range cases {
		r := source(31, i)
		p := randomCoupled(r, steadyHistory(t), 1, 12*r.Float64())
		plan := newPlan(t, p, Options{Cells: 30})
		direct := make([]float64, 2*len(plan.Centres())+3)
		for range tries {
			temp := logUniform(r, 700, 1700)
			got := new(Field).couple(plan, 0, temp)
			plan.host.evaluate(direct, p.LnK, temp)
			for j, v := range got.all[:len(direct)] {
				if !(math.Abs(v-direct[j]) <= 2*panelError*direct[j]) { // between the places that were tried
					t.Fatalf("problem %d at %g K: entry %d is %.17g, want %.17g", i, temp, j, v, direct[j])
				}
			}
			if plan.host.panelAt(p.LnK, 1/temp) != nil {
				kept++
			}
		}
	}
	if kept < cases*tries*9/10 {
		t.Errorf("panels were good at only %d of %d temperatures", kept, cases*tries)
	}
	t.Logf("panels were good at %d of %d temperatures", kept, cases*tries)
}

// TestNoPanels: an ln K with a jump or a kink in T, and one that is steeper than
// any, are evaluated as they are.
func TestNoPanels(t *testing.T) {
	for name, lnK := range map[string]func(x, temp float64) float64{
		"jump":  func(x, temp float64) float64 { return x * math.Floor(temp/100) },
		"kink":  func(x, temp float64) float64 { return x * math.Abs(temp-1001.3) / 100 },
		"steep": func(x, temp float64) float64 { return 1e7 * x * (1/temp - 1e-3) },
	} {
		p := slabOf(testSize, nothing, nothing, 1, 2)
		p.Zones[1].Host, p.LnK = 1, lnK
		plan := newPlan(t, p, Options{Cells: 20})
		for _, temp := range []float64{999.99, 1000.01, 1001.2, 1001.3, 1001.4} {
			k, kIn, kOut := partitions(plan, temp)
			want := math.Exp(lnK(1, temp) - lnK(0, temp))
			wantNear(t, fmt.Sprintf("%s at %g K: ratio of the cells", name, temp), k[len(k)-1]/k[0]/want, 1, panelError)
			wantNear(t, fmt.Sprintf("%s at %g K: ratio of the ends", name, temp), kOut/kIn/want, 1, panelError)
		}
	}
}

// zonedTrace is a slab of 200 cells and a rim that follows temperature, of the
// kind that a screening solves most where the host is zoned.
func zonedTrace(h *thermal.History) *Problem {
	host := func(r float64) float64 {
		x := r * 1e6
		return 0.25 + 0.10*(1+math.Tanh((x-80)/3)) - 0.075*(1+math.Tanh((x-160)/3))
	}
	p, _ := benchProblem()
	p.Law = NewLaw(2.92*math.Pow(10, -4.08), 276e3)
	p.Host, p.LnK = host, drift(-26700)
	p.Spread = func(r float64) float64 { return math.Pow(10, -4.1*host(r)) }
	const b = 26700 / thermal.GasConstant * 0.30
	p.Outer = []Rim{{Kind: Following, Equilibrium: &Arrhenius{LnA: math.Log(100) + b/1023.15, E: b}}}
	return p
}

// fewSteps is a plan of 25 solves for zonedTrace: steps of a seventh of G, each of
// the first ones five times the one before, the very first damped, and the last
// ones each a third of what is left, since the rim follows the last cooling.
func fewSteps() Options {
	const first, longest, growth, last, end = 0.003, 0.15, 5, 1e-4, 0.35
	o := Options{Faces: uniform(0, 200e-6, benchCells), Damp: 1}
	at, df := 0.0, first
	for {
		take := min(df, longest, last+end*(1-at))
		if take >= 1-at {
			break
		}
		at += take
		df *= growth
		o.Fractions = append(o.Fractions, at)
	}
	o.Fractions = append(o.Fractions, 1)
	return o
}

// stepsError is what the steps of a plan do to a problem of zonedTrace, as a part
// of the range of its start.
func stepsError(tb testing.TB, p *Problem, o Options, h *thermal.History) float64 {
	tb.Helper()
	fine := newPlan(tb, p, Options{Faces: o.Faces, Growth: 0.02})
	_, diff := farthest(run(tb, newPlan(tb, p, o), h).Cols[0], run(tb, fine, h).Cols[0])
	return diff / rangeOf(fine.Start(0))
}

// TestFewSteps: 25 solves have an error of less than a thousandth.
func TestFewSteps(t *testing.T) {
	h := benchWake(t)
	p := zonedTrace(h)
	plan := newPlan(t, p, fewSteps())
	err := stepsError(t, p, fewSteps(), h)
	t.Logf("%d solves: error %.2g of the range", len(plan.steps), err)
	if !(err <= 1e-3) || len(plan.steps) > 25 {
		t.Errorf("%d solves have an error of %.2g of the range, want at most 25 and 1e-3", len(plan.steps), err)
	}
}

// BenchmarkCoupled is one path of a trace in a zoned host at an error of a
// thousandth, in its parts and as a whole. It also holds the whole, its course
// included, to 30 steps of the reference kernel on as many cells, measured in
// turns in this process.
func BenchmarkCoupled(b *testing.B) {
	const limit, tries = 30.0, 5
	h := benchWake(b)
	plan := newPlan(b, zonedTrace(h), fewSteps())
	var c Course
	dst, jobs := make([]Field, 1), []Job{{Course: &c}}
	course := func() { _ = plan.Course(&c, h, h.Life()) }
	solve := func() { _ = plan.Run(dst, jobs) }
	course()
	if err := plan.Run(dst, jobs); err != nil {
		b.Fatal(err)
	}
	for _, part := range []struct {
		name string
		do   func()
	}{{"course", course}, {"run", solve}, {"path", func() { course(); solve() }}} {
		b.Run(part.name, func(b *testing.B) {
			b.ReportAllocs()
			for b.Loop() {
				part.do()
			}
			k := yardstick.NewKernel()
			best := math.Inf(1)
			for try := 0; try < tries && !(best <= limit); try++ { // a busy machine can spoil a measurement, not improve it
				const paths, steps = 30, 100
				ours := yardstick.Timed(func() {
					for range paths {
						part.do()
					}
				})
				best = math.Min(best, ours/paths/(yardstick.Timed(func() { k.Run(steps) })/steps))
			}
			b.ReportMetric(float64(dst[0].Stats.Steps), "solves")
			b.ReportMetric(best, "reference-steps")
			if !(best <= limit) {
				b.Errorf("the %s takes %.1f steps of the reference kernel, limit %g", part.name, best, limit)
			}
		})
	}
}

// TestSeriesOfK: the mean of 1/K over a stretch and K near another are those of Expm1 on both sides of where their series begin.
func TestSeriesOfK(t *testing.T) {
	const roundOff = 1e-15 // a few units in the last place
	const a = 0.7
	for _, h := range []float64{1e-9, evenK / 3, evenK * 0.999, evenK * 1.001, 0.05, 2} {
		for _, h := range []float64{h, -h} {
			want := -math.Expm1(-2*h) / (2 * h) * math.Exp(-a)
			if got := meanInverse(math.Exp(-a), a, a+2*h); !(math.Abs(got/want-1) <= roundOff) {
				t.Errorf("half a change of %g: the mean of 1/K is off by %.2g of itself", h, got/want-1)
			}
			if want := 1 + math.Expm1(h); !(math.Abs(expNear(h)/want-1) <= roundOff) {
				t.Errorf("change of %g: K is off by %.2g of itself", h, expNear(h)/want-1)
			}
		}
	}
}
