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

// ownOf returns a factor on D that grows or falls exponentially, by 1 to 30
// between 0 and 1.
func ownOf(r *rand.Rand) func(c float64) float64 {
	return growing(math.Log(30) * (2*r.Float64() - 1))
}

func growing(slope float64) func(c float64) float64 {
	return func(c float64) float64 { return math.Exp(slope * c) }
}

// power is D = D0 C^n.
func power(n float64) func(c float64) float64 {
	return func(c float64) float64 { return math.Pow(c, n) }
}

// randomOwn is a random problem, with sealed, held, given or exchanging rims, in
// which D follows the element itself.
func randomOwn(r *rand.Rand, h *thermal.History, g float64) *Problem {
	p := randomProblem(r, h, g)
	p.Own = ownOf(r)
	if r.IntN(4) == 0 {
		p.Outer = []Rim{transferRim(r, p, h)}
	}
	return p
}

// TestOwnOfOne: a factor of 1 is no factor.
func TestOwnOfOne(t *testing.T) {
	fractions := defaultFractions(defaultDamped, defaultGrowth, true)
	for i := range 30 {
		r := source(51, i)
		h := randomHistory(t, r)
		p := randomProblem(r, h, logUniform(r, 1e-8, 1e4))
		if i%2 == 0 {
			p.Outer = []Rim{transferRim(r, p, h)}
		}
		plain := run(t, newPlan(t, p, Options{Fractions: fractions}), h)
		p.Own = func(float64) float64 { return 1 }
		got := run(t, newPlan(t, p, Options{Fractions: fractions}), h)
		// iterations work on fluxes, of which those of the longest steps are known to as much
		wantClose(t, fmt.Sprintf("problem %d", i), got.Cols[0], plain.Cols[0], 1e-10)
	}
}

// TestOwnScales: a constant factor is one in the law.
func TestOwnScales(t *testing.T) {
	r := source(52, 0)
	h := randomHistory(t, r)
	p := randomProblem(r, h, 0.01)
	p.Own = func(float64) float64 { return 7 }
	got := run(t, newPlan(t, p, Options{}), h)
	p.Own = func(float64) float64 { return 1 }
	plan := newPlan(t, p, Options{})
	wantClose(t, "profile", got.Cols[0], runJob(t, plan, Job{Course: newCourse(t, plan, h), LnM: math.Log(7)}).Cols[0], rounding)
}

func TestOwnKeepsMass(t *testing.T) {
	const allowed = 1e-12
	for i := range 40 {
		r := source(53, i)
		h := randomHistory(t, r)
		p := randomOwn(r, h, logUniform(r, 1e-8, 1e4))
		if i%4 == 0 {
			p.Own = power(0.5 + 2*r.Float64())
		}
		if f := run(t, newPlan(t, p, Options{Cells: 60}), h); !(f.Stats.MassDrift <= allowed) {
			t.Errorf("problem %d: %d solves, drift %.2g of all that was there or came", i, f.Stats.Steps, f.Stats.MassDrift)
		}
		p.Inner, p.Outer = nil, nil
		plan := newPlan(t, p, Options{Cells: 60})
		f := run(t, plan, h)
		if drift := math.Abs(content(plan, f.Cols[0])/content(plan, plan.Start(0)) - 1); !(drift <= allowed) {
			t.Errorf("problem %d, sealed: drift %.2g", i, drift)
		}
	}
}

// TestOwnKeepsEquilibrium: at one temperature, what is proportional to K in a host
// of zones stays so, whatever D.
func TestOwnKeepsEquilibrium(t *testing.T) {
	for i := range 20 {
		r := source(54, i)
		h := holdOf(t, testSize*testSize)
		p := &Problem{Shape: Shape(r.IntN(3)), Law: testLaw, LnK: func(x, temp float64) float64 { return x * testTemp / temp }}
		p.Own = ownOf(r)
		for z := range 3 {
			host := 12 * r.Float64()
			p.Zones = append(p.Zones, Zone{Outer: testSize * float64(z+1) / 3, Host: host, Start: math.Exp(host - 12)})
		}
		switch i % 3 {
		case 1:
			p.Outer = []Rim{{Kind: Held, Value: p.Zones[2].Start}}
		case 2:
			p.Outer = exchanging(1/testSize, p.Zones[2].Start)
		}
		plan := newPlan(t, p, Options{Cells: 60})
		wantClose(t, fmt.Sprintf("problem %d", i), run(t, plan, h).Cols[0], plan.Start(0), rounding)
	}
}

// TestOwnFlatStaysFlat, to the bit.
func TestOwnFlatStaysFlat(t *testing.T) {
	for i, own := range []func(float64) float64{growing(3), power(1), func(float64) float64 { return 0 }} {
		for _, value := range []float64{0, 0.7} {
			p := slabOf(testSize, value, value, value)
			p.Own = own
			plan := newPlan(t, p, Options{})
			f := run(t, plan, rampOf(t, testSize*testSize))
			wantBits(t, fmt.Sprintf("law %d at %g", i, value), f.Cols[0], plan.Start(0))
		}
	}
}

// TestNothingAhead: where D vanishes with C a rim fills an empty crystal from
// outside, with no value that is not a number, negative or above the rim's, in
// large steps too; and an empty crystal without a source stays empty.
func TestNothingAhead(t *testing.T) {
	const allowed = 1e-12
	plans := map[string]Options{"default": {}, "large steps": {Growth: 0.5}, "small steps": {Fractions: equalSteps(400)}}
	for _, n := range []float64{0.5, 1, 2, 3} {
		for name, o := range plans {
			for _, rim := range [][]Rim{{{Kind: Held, Value: 1}}, exchanging(10/testSize, 1)} {
				p := &Problem{Zones: []Zone{{Outer: testSize}}, Law: testLaw, Own: power(n), Outer: rim}
				c := run(t, newPlan(t, p, o), rampOf(t, testSize*testSize/10)).Cols[0]
				for i, v := range c {
					if !(v >= -allowed && v <= 1+stepsMiss(name)) {
						t.Fatalf("C^%g, %s, rim %d: cell %d of %d holds %g", n, name, rim[0].Kind, i, len(c), v)
					}
				}
				if last := c[len(c)-1]; !(last > 0.5) {
					t.Errorf("C^%g, %s, rim %d: the front has not moved, the last cell holds %g", n, name, rim[0].Kind, last)
				}
			}
		}
	}
}

// stepsMiss is by how much waves behind a front may overshoot in a plan, before
// the steps at the end have damped them.
func stepsMiss(plan string) float64 {
	if plan == "default" {
		return 1e-12
	}
	return 0.05
}

// TestOwnStaysInside: no value leaves the range of start and rims by more than the
// stated error.
func TestOwnStaysInside(t *testing.T) {
	for i := range 60 {
		r := source(55, i)
		h := randomHistory(t, r)
		p := randomOwn(r, h, logUniform(r, 1e-8, 1e2))
		plan := newPlan(t, p, Options{Cells: 60})
		f := audit(t, plan, h)
		stated := 0.0
		for j := range f.Cols[0] {
			stated = math.Max(stated, math.Abs(f.StepErr[0][j])+math.Abs(f.CellErr[0][j]))
		}
		if !(f.Stats.Overshoot*rangeOf(plan.Start(0)) <= stated+rounding) {
			t.Errorf("problem %d: overshoots by %.2g of the range, the stated error is %.2g", i, f.Stats.Overshoot, stated)
		}
	}
}

// TestOwnSideBySide: any number of jobs gives each the bits that it gets alone.
func TestOwnSideBySide(t *testing.T) {
	for i := range 6 {
		r := source(56, i)
		h := randomHistory(t, r)
		plan := newPlan(t, randomOwn(r, h, 1), Options{Cells: 40})
		jobs := randomJobs(t, r, plan, h, 7)
		dst := make([]Field, len(jobs))
		for range 2 { // the second time in used memory
			if err := plan.Run(dst, jobs); err != nil {
				t.Fatal(err)
			}
		}
		for k := range jobs {
			wantSame(t, fmt.Sprintf("problem %d, job %d", i, k), &dst[k], runJob(t, plan, jobs[k]))
		}
	}
}

func TestOwnDoesNotAllocate(t *testing.T) {
	r := source(57, 0)
	h := randomHistory(t, r)
	p := randomOwn(r, h, 1)
	p.Outer = []Rim{transferRim(r, p, h)}
	plan := newPlan(t, p, Options{Cells: 40})
	c := newCourse(t, plan, h)
	for _, n := range []int{1, 2, 5} {
		jobs, dst := make([]Job, n), make([]Field, n)
		for k := range jobs {
			jobs[k] = Job{Course: c, LnM: float64(k)}
		}
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

// TestOwnExtremes: multipliers beyond the range of float64 give the start or the
// end of all diffusion, never NaN.
func TestOwnExtremes(t *testing.T) {
	for i := range 10 {
		r := source(58, i)
		h := randomHistory(t, r)
		plan := newPlan(t, randomOwn(r, h, 1), Options{Cells: 40})
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
		}
	}
}

// TestOwnSolves: what is not harder than it looks takes few solves a step.
func TestOwnSolves(t *testing.T) {
	smooth := slabOf(testSize, nothing, nothing, 0, 1)
	smooth.Zones[0].Edge = 0.2 * testSize
	for _, test := range []struct {
		name string
		own  func(float64) float64
		most float64 // solves a step
	}{
		{"1", func(float64) float64 { return 1 }, 1.5}, // in the early steps nothing tells a good guess from luck
		{"exp(3.4 C)", growing(3.4), 2}, {"exp(-3.4 C)", growing(-3.4), 2},
	} {
		p := *smooth
		p.Own = test.own
		plan := newPlan(t, &p, Options{})
		solves := run(t, plan, holdOf(t, testSize*testSize/100)).Stats.Steps
		if each := float64(solves) / float64(len(plan.steps)); !(each <= test.most) {
			t.Errorf("D = D0 %s: %.2f solves a step, want at most %g", test.name, each, test.most)
		}
	}
}

// TestOwnOrder: second order in steps, and in steps and cells together, where D
// follows a smooth profile, also under exchange.
func TestOwnOrder(t *testing.T) {
	h := rampOf(t, testSize*testSize/20)
	for shape := Slab; shape <= Ball; shape++ {
		for name, rim := range map[string][]Rim{"sealed": nil, "held": {{Kind: Held, Value: 1}}, "exchanging": exchanging(3/testSize, 1.5)} {
			p := &Problem{
				Shape: shape, Zones: []Zone{{Outer: testSize}}, Law: testLaw, Own: growing(2), Outer: rim,
				Profile: func(r float64) float64 { return 0.5 - 0.5*math.Cos(math.Pi*r/testSize) },
			}
			t.Run(fmt.Sprintf("shape=%v/rim=%s/steps", shape, name), func(t *testing.T) {
				wantOrder(t, 2, 0.15, []int{40, 80, 160}, againstItself(t, p, h, 10, func(n int) int { return 40 }))
			})
			if name == "exchanging" {
				continue // the flux through the rim jumps at the start; see TestSteadyExchange
			}
			t.Run(fmt.Sprintf("shape=%v/rim=%s/both", shape, name), func(t *testing.T) {
				wantOrder(t, 2, 0.15, []int{40, 80, 160}, againstItself(t, p, h, 8, func(n int) int { return n }))
			})
		}
	}
}

// TestOwnAcrossHosts: second order in cells where the host jumps and D with C, for D
// that grows and falls with it.
func TestOwnAcrossHosts(t *testing.T) {
	h := holdOf(t, testSize*testSize/5)
	for _, slope := range []float64{3, 1, -0.5} {
		t.Run(fmt.Sprint(slope), func(t *testing.T) {
			p := &Problem{
				Zones: []Zone{{Outer: testSize / 2, Start: 1}, {Outer: testSize, Start: 0.5, Host: -1}}, Law: testLaw,
				LnK: func(x, temp float64) float64 { return 2 * x * testTemp / temp }, Own: growing(slope), Outer: heldAt(1),
			}
			fine := newPlan(t, p, Options{Faces: uniform(0, testSize, 1280)})
			truth := run(t, fine, h).Cols[0]
			wantOrder(t, 2, 0.2, []int{20, 40, 80}, func(n int) float64 { // 20 cells are few for a threefold D from cell to cell
				plan := newPlan(t, p, Options{Faces: uniform(0, testSize, n)})
				_, err := farthest(run(t, plan, h).Cols[0], onto(plan, fine, truth))
				return err
			})
		})
	}
}

// againstItself returns the largest error in n even steps, undamped, against finer
// steps and, if their number depends on n, cells.
func againstItself(t *testing.T, p *Problem, h *thermal.History, finer int, cells func(n int) int) func(n int) float64 {
	t.Helper()
	solution := func(n, cells int) (*Plan, []float64) {
		plan := newPlan(t, p, Options{Faces: uniform(0, testSize, cells), Fractions: equalSteps(n), Damp: -1})
		return plan, run(t, plan, h).Cols[0]
	}
	const last = 160
	most := cells(last)
	if cells(1) != most {
		most *= finer
	}
	fine, truth := solution(last*finer, most)
	return func(n int) float64 {
		plan, c := solution(n, cells(n))
		_, err := farthest(c, onto(plan, fine, truth))
		return err
	}
}

// TestFrontOrder prints the order of the mean error of fronts into what is empty
// (Pattle 1959), which is at least one.
func TestFrontOrder(t *testing.T) {
	const unit = testSize
	for i := range 6 {
		heap := spreading{d: float64(1 + i/2), n: float64(1 + i%2)}
		t.Run(fmt.Sprintf("d=%g/n=%g", heap.d, heap.n), func(t *testing.T) {
			before := 0.0
			for _, n := range []int{50, 100, 200} {
				p := heap.problem(unit)
				s := solve(t, p, Options{Faces: uniform(0, p.size(), n), Growth: 0.1 * 50 / float64(n)}, holdOf(t, unit*unit))
				want := make([]float64, n)
				addProfile(want, p.Shape, s.plan.grid, func(r float64) float64 { return heap.at(r/unit, 1) })
				err := 0.0
				for j := range want {
					err += s.plan.Volumes()[j] * math.Abs(s.c[j]-want[j])
				}
				err /= content(s.plan, want)
				order := math.Log2(before / err)
				t.Logf("n %3d: error %.3e of the content, order %.2f", n, err, order)
				if before > 0 && !(order >= 1) {
					t.Errorf("n %d: order %.2f, want at least 1", n, order)
				}
				before = err
			}
		})
	}
}

// honest runs problems and judges that the stated error covers the true one in all
// but one of a hundred, and is not over ten times too large at the median.
func honest(t *testing.T, cases, seed int, problem func(r *rand.Rand, h *thermal.History, g float64) *Problem) {
	t.Helper()
	honestAlong(t, randomHistory, cases, seed, problem)
}

// honestAlong does so along histories of another kind.
func honestAlong(t *testing.T, history func(tb testing.TB, r *rand.Rand) *thermal.History, cases, seed int,
	problem func(r *rand.Rand, h *thermal.History, g float64) *Problem) {
	t.Helper()
	const (
		covered, tooLarge = 0.99, 10
		roundOff          = 1e-13 // what a few thousand solves of iterations leave
	)
	ratios := make([]float64, cases)
	t.Run("problems", func(t *testing.T) {
		for i := range ratios {
			t.Run(fmt.Sprintf("problem=%d", i), func(t *testing.T) {
				t.Parallel()
				r := source(seed, i)
				h := history(t, r)
				g := logUniform(r, 1e-6, 10)
				p := problem(r, h, g)
				o := Options{Cells: 40 + r.IntN(40), Growth: 0.15 + 0.25*r.Float64()}
				plan := newPlan(t, p, o)
				got := audit(t, plan, h)
				size := p.size() - p.R0
				finer := newFiner(t, plan, o, g*size*size)
				truth := onto(plan, finer, run(t, finer, h).Cols[0])
				stated := 0.0
				for j := range truth {
					stated = math.Max(stated, math.Abs(got.StepErr[0][j])+math.Abs(got.CellErr[0][j]))
				}
				_, err := farthest(got.Cols[0], truth)
				if ratios[i] = (stated + roundOff) / err; !(ratios[i] >= 1) {
					t.Logf("%v, %d zones, G/a^2 %.2g, options %+v: stated %.3g, true %.3g", p.Shape, len(p.Zones), g, o, stated, err)
				}
			})
		}
	})
	slices.Sort(ratios) // NaN first
	missed := slices.IndexFunc(ratios, func(ratio float64) bool { return ratio >= 1 })
	t.Logf("stated/true: covered %d of %d, least %.3g, one in ten below %.3g, median %.3g, nine in ten below %.3g",
		cases-missed, cases, ratios[0], ratios[cases/10], ratios[cases/2], ratios[cases*9/10])
	if missed < 0 || !(float64(cases-missed) >= covered*float64(cases)) {
		t.Errorf("the stated error covers the true one in %d of %d problems, want %g of them", cases-missed, cases, covered)
	}
	if !(ratios[cases/2] <= tooLarge) {
		t.Errorf("the median of stated/true is %.3g, want at most %d", ratios[cases/2], tooLarge)
	}
}

// TestStatedErrorOfOwn: steps and edges, all shapes and rims, D with a change of up
// to 30-fold.
func TestStatedErrorOfOwn(t *testing.T) {
	honest(t, 100, 31, func(r *rand.Rand, h *thermal.History, g float64) *Problem {
		p := randomProblem(r, h, g)
		p.Own = ownOf(r)
		return p
	})
}

// TestStatedErrorOfOwnInHosts: the same in a host of zones.
func TestStatedErrorOfOwnInHosts(t *testing.T) {
	honest(t, 25, 32, func(r *rand.Rand, h *thermal.History, g float64) *Problem {
		p := randomProblem(r, h, g)
		p.Inner = nil
		a := 4 * (2*r.Float64() - 1)
		p.LnK = func(x, temp float64) float64 { return a * x * 1000 / temp }
		for z := range p.Zones {
			p.Zones[z].Host = r.Float64()
		}
		slope := math.Log(30) * (2*r.Float64() - 1) / math.Exp(math.Abs(a)) // C may reach exp(|a|)
		p.Own = growing(slope)
		return p
	})
}

// ownBench is a ball of 300 um in cells of 1.5 um, two plateaux and a held rim, D
// proportional to 10^(3 C), and a cooling of one year with seven days at 1200 C; and
// steps each 1.1 times the one before, the first two damped.
func ownBench(tb testing.TB) (p *Problem, o Options, h *thermal.History) {
	tb.Helper()
	const year, week, zero = thermal.Year, 7 * thermal.Day, thermal.ZeroCelsius
	p = &Problem{
		Shape: Ball, Zones: []Zone{{Outer: 150e-6, Start: 0.1}, {Outer: 300e-6, Start: 0.2}},
		Law: NewLaw(math.Pow(10, -9.21), 201e3), Outer: []Rim{{Kind: Held, Value: 0.25}},
		Own: func(c float64) float64 { return math.Exp(3 * math.Ln10 * (c - 0.1)) },
	}
	o = Options{Faces: uniform(0, 300e-6, benchCells), Damp: 2}
	const steps, growth = 6, 1.1
	for i := 1; i <= steps; i++ {
		o.Fractions = append(o.Fractions, (math.Pow(growth, float64(i))-1)/(math.Pow(growth, steps)-1))
	}
	linear := func(at float64) float64 { return 1150 + zero - 100*at/year }
	h = newHistory(tb, thermal.Leg{Kind: thermal.Ramp, For: year / 2, T0: linear(0), T1: linear(year / 2)},
		thermal.Leg{Kind: thermal.Hold, For: week, T0: 1200 + zero},
		thermal.Leg{Kind: thermal.Ramp, For: year/2 - week, T0: linear(year/2 + week), T1: linear(year)})
	return p, o, h
}

// TestOwnBench holds what is measured to its error, a thousandth of the range of the
// start, and to two solves a step.
func TestOwnBench(t *testing.T) {
	p, o, h := ownBench(t)
	plan := newPlan(t, p, o)
	got := run(t, plan, h)
	truth := run(t, newPlan(t, p, Options{Faces: o.Faces, Growth: 0.01}), h).Cols[0]
	_, err := farthest(got.Cols[0], truth)
	each := float64(got.Stats.Steps) / float64(len(plan.steps))
	t.Logf("%d steps, %d solves, error %.3g of the range", len(plan.steps), got.Stats.Steps, err/0.1)
	if !(err <= 1e-3*0.1) || !(each <= 2) {
		t.Errorf("error %.3g of the range, want 1e-3; %.2f solves a step, want 2", err/0.1, each)
	}
}

// BenchmarkOwn also holds the time of one path, its course included, to 26 steps of
// the reference kernel: 42 us where such a step takes 1.6 us; and that of a path
// beside others, of one course with many multipliers on D, to 22.
func BenchmarkOwn(b *testing.B) {
	p, o, h := ownBench(b)
	plan := newPlan(b, p, o)
	for _, test := range []struct {
		jobs  int
		limit float64
	}{{1, 26}, {8, 22}} {
		b.Run(fmt.Sprintf("jobs=%d", test.jobs), func(b *testing.B) {
			var c Course
			dst, jobs := make([]Field, test.jobs), make([]Job, test.jobs)
			for k := range jobs {
				jobs[k] = Job{Course: &c, LnM: float64(k) / 10}
			}
			paths := func() {
				if err := plan.Course(&c, h, h.Life()); err != nil {
					b.Fatal(err)
				}
				if err := plan.Run(dst, jobs); err != nil {
					b.Fatal(err)
				}
			}
			b.ReportAllocs()
			for b.Loop() {
				paths()
			}
			k := yardstick.NewKernel()
			best := math.Inf(1)
			for try := 0; try < 5 && !(best <= test.limit); try++ { // as in BenchmarkRun
				const steps = 100
				rounds := 24 / test.jobs // short enough to be left alone
				ours := yardstick.Timed(func() {
					for range rounds {
						paths()
					}
				})
				best = math.Min(best, ours/float64(rounds*test.jobs)/(yardstick.Timed(func() { k.Run(steps) })/steps))
			}
			b.ReportMetric(best, "reference-steps")
			b.ReportMetric(float64(dst[0].Stats.Steps), "solves")
			if !(best <= test.limit) {
				b.Errorf("a path takes %.1f steps of the reference kernel, limit %g", best, test.limit)
			}
		})
	}
}
