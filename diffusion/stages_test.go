package diffusion

import (
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"strings"
	"testing"

	"bankfire/thermal"
	"bankfire/thermal/published"
)

// staged gives the zones of a problem random times at which they are added, some at
// once and some never.
func staged(r *rand.Rand, p *Problem, h *thermal.History) *Problem {
	at := 0.0
	for i := range p.Zones[1:] {
		switch r.IntN(15) {
		case 0:
			at = 2 * h.Life()
		case 1, 2, 3: // with the one inside
		default:
			at += math.Max(h.Life()-at, 0) * math.Pow(r.Float64(), 2)
		}
		p.Zones[1+i].Added = at
	}
	return p
}

// early is a hold before the path of a case, in which its outer zone is not there.
var early = thermal.Leg{Kind: thermal.Hold, For: 40 * thermal.Year, T0: 1030}

// stagedPair is a case whose outer zone is added after the hold, with the same law,
// and rims that do during the case what they do there.
func stagedPair(t *testing.T, c pairCase) (pairProblem, *thermal.History) {
	q := c.problem(t)
	path := q.h
	q.h = newHistory(t, slices.Concat([]thermal.Leg{early}, path.Legs())...)
	q.Zones[1].Added = early.For
	beyond := q.beyond
	q.beyond = func(t, temp float64) float64 { return beyond(math.Max(t-early.For, 0), temp) }
	if len(q.Outer) > 0 && q.Outer[0].Given != nil {
		jump := q.Outer[0].Given.Jumps[0] + early.For
		q.Outer[0].Given = &Given{At: func(t float64) float64 { return q.beyond(t, 0) }, Jumps: []float64{jump}}
	}
	q.damped = true
	return q, path
}

// inStages is the reference for such a case: the inner zone alone through the hold,
// and then with the outer one, of which the inner gets its part of the edge.
func (q pairProblem) inStages(t *testing.T, path *thermal.History, cells int) []float64 {
	faces := pairFaces(q.Problem, cells)
	inner := *q.Problem
	inner.Zones = []Zone{q.Zones[0]}
	inner.Zones[0].Edge = 0
	first := newFew(&inner, q.beyond, faces[:cells/2+1])
	alone := first.start()
	for i, c := range first.byExtrapolation(newHistory(t, early), nil) {
		alone[i] = c - alone[i]
	}
	second := newFew(q.Problem, func(t, temp float64) float64 { return q.beyond(t+early.For, temp) }, faces)
	for i, moved := range alone {
		second.cells[i].start += moved
	}
	var jumps []float64
	if len(q.Outer) > 0 && q.Outer[0].Given != nil {
		jumps = []float64{q.Outer[0].Given.Jumps[0] - early.For}
	}
	return second.byExtrapolation(path, jumps)
}

// TestStagesAgainstReference: every pair of shape, rim, law, start and path with the
// outer zone added on the way, against a reference that knows of one zone and then of
// two, in the same cells and in steps too fine to matter.
func TestStagesAgainstReference(t *testing.T) {
	const cells, steps, allowed = 12, 1280, 1e-6 // of the range
	worst := 0.0
	for _, c := range pairCases() {
		t.Run(c.String(), func(t *testing.T) {
			q, path := stagedPair(t, c)
			want := q.inStages(t, path, cells)
			_, miss := farthest(q.solve(t, cells, steps).c, want)
			miss /= rangeOf(want)
			if !(miss <= allowed) {
				t.Errorf("differs by %.3g of the range, allowed %g", miss, allowed)
			}
			worst = math.Max(worst, miss)
		})
	}
	t.Logf("at most %.2g of the range", worst)
}

// TestOrdersAcrossStages: second order in time where a zone is added on the way.
func TestOrdersAcrossStages(t *testing.T) {
	const order, within = 2, 0.15
	for i, c := range pairCases() {
		if i%4 != 0 {
			continue
		}
		t.Run(c.String(), func(t *testing.T) {
			q, _ := stagedPair(t, c)
			text, last, _ := ordersOf(stepErrors(t, q))
			if t.Log(text); !(math.Abs(last-order) <= within) {
				t.Errorf("order %.2f, want %d within %g", last, order, within)
			}
		})
	}
}

// TestThereFromTheStart: zones added before the path, or at its start, are there.
func TestThereFromTheStart(t *testing.T) {
	for i := range 20 {
		r := source(201, i)
		h := randomHistory(t, r)
		p := laneProblem(r, h)
		want := audit(t, newPlan(t, p, Options{}), h)
		for z := range p.Zones {
			p.Zones[z].Added = float64(z-len(p.Zones)+1) * thermal.Year
		}
		got := audit(t, newPlan(t, p, Options{}), h)
		wantSame(t, fmt.Sprint("problem ", i), got, want)
		for j := range got.CellErr {
			wantBits(t, "error of the cells", got.CellErr[j], want.CellErr[j])
		}
	}
}

// TestStagesBalance: what is added, what comes through rims and what is there in the
// end agree.
func TestStagesBalance(t *testing.T) {
	for i := range 200 {
		r := source(202, i)
		h := randomHistory(t, r)
		p := staged(r, randomProblem(r, h, logUniform(r, 1e-8, 1e4)), h)
		switch i % 3 {
		case 1:
			p.Own = ownOf(r)
		case 2:
			p = staged(r, randomCoupled(r, h, logUniform(r, 1e-8, 1e4), 2), h)
		}
		if i%5 == 0 {
			p.Outer = []Rim{{Kind: Transfer, Value: r.Float64(), Rate: rateOf(p, h, logUniform(r, 0.1, 10), 2e4)}}
		}
		plan := newPlan(t, p, Options{Cells: 60})
		f := run(t, plan, h)
		if !(f.Stats.MassDrift <= 1e-12) {
			t.Errorf("problem %d: %d solves, drift %.2g of all that was there or came", i, f.Stats.Steps, f.Stats.MassDrift)
		}
		if p.Outer == nil && p.Inner == nil && p.LnK == nil { // all that is there was added
			want := content(plan, plan.Start(0))
			if last := p.Zones[len(p.Zones)-1].Added; last > h.Life() {
				continue
			}
			wantNear(t, fmt.Sprint("content of problem ", i), content(plan, f.Cols[0]), want, 1e-12*want)
		}
	}
}

// TestStagesSideBySide: as TestSideBySide, where zones are added.
func TestStagesSideBySide(t *testing.T) {
	for i := range 12 {
		r := source(203, i)
		h := randomHistory(t, r)
		p := staged(r, laneProblem(r, h), h)
		switch i % 3 {
		case 1:
			p = staged(r, randomCoupled(r, h, 1, 2), h)
		case 2:
			p.Free, p.Own = nil, ownOf(r)
		}
		plan := newPlan(t, p, Options{Cells: 40})
		jobs := randomJobs(t, r, plan, h, 6)
		whole := newCourse(t, plan, h)
		for k := range 5 {
			jobs = append(jobs, Job{Course: whole, LnM: float64(k - 2)})
		}
		dst := make([]Field, len(jobs))
		if err := plan.Run(dst, jobs); err != nil {
			t.Fatal(err)
		}
		for k := range jobs {
			wantSame(t, fmt.Sprintf("problem %d, job %d", i, k), &dst[k], runJob(t, plan, jobs[k]))
		}
	}
}

// TestStatedErrorOfStages: the stated error covers the true one where zones are added,
// jumps that the cells do not resolve among them.
func TestStatedErrorOfStages(t *testing.T) {
	t.Run("plain", func(t *testing.T) {
		honest(t, 100, 204, func(r *rand.Rand, h *thermal.History, g float64) *Problem {
			return staged(r, randomProblem(r, h, g), h)
		})
	})
	t.Run("own", func(t *testing.T) {
		honest(t, 25, 205, func(r *rand.Rand, h *thermal.History, g float64) *Problem {
			return staged(r, randomOwn(r, h, g), h)
		})
	})
	t.Run("host", func(t *testing.T) {
		honest(t, 50, 206, func(r *rand.Rand, h *thermal.History, g float64) *Problem {
			return staged(r, randomCoupled(r, h, g, 2), h)
		})
	})
}

// TestZonesThatFall: a zone on one that is not there yet is refused.
func TestZonesThatFall(t *testing.T) {
	for _, added := range [][]float64{{1, 1}, {0, -1}, {0, 2, 1}, {0, math.NaN()}, {0, math.Inf(1)}} {
		p := &Problem{Law: testLaw}
		for i, at := range added {
			p.Zones = append(p.Zones, Zone{Outer: float64(1+i) * testSize, Added: at})
		}
		if _, err := Compile(p, Options{}); err == nil || !strings.Contains(err.Error(), "is added at") {
			t.Errorf("%v: got %v", added, err)
		}
	}
}

// farBoundaries is a slab of zones far apart that are added on the way, at parts of a
// hold with an integral of 5e-12 m2, and what becomes of it.
func farBoundaries(t *testing.T, added ...float64) (*Plan, []float64) {
	const width = 3e-5 // m, over 8 roots of the integral
	h := holdOf(t, 5e-12)
	p := &Problem{Law: testLaw, Zones: []Zone{{Outer: width, Start: 1}}, Outer: heldAt(1)}
	for i, part := range added {
		z := Zone{Outer: float64(2+i) * width, Start: float64(i % 2), Added: part * h.Life()}
		p.Zones = append(p.Zones, z)
		r := Rim{Kind: Held, Value: z.Start, From: z.Added}
		if p.Outer = append(p.Outer, r); z.Added == 0 {
			p.Outer = []Rim{r}
		}
	}
	plan := newPlan(t, p, Options{Cells: 200 * len(p.Zones), Finest: math.Sqrt(2 * 1e-12)})
	return plan, run(t, plan, h).Cols[0]
}

// crossed returns the width sqrt(2 G) of the boundary of zone i to the next from what
// has crossed it, sqrt(G/pi) times its jump (Crank 1975, equation 2.14, integrated).
func crossed(p *Plan, c []float64, i int) float64 {
	zones := p.problem.Zones
	a, b := zones[i].Outer, zones[i+1].Outer
	sum := 0.0
	for k, r := range p.Centres() {
		if r > a && r < (a+b)/2 {
			sum += p.Volumes()[k] * (c[k] - zones[i+1].Start)
		}
	}
	return sum / (zones[i].Start - zones[i+1].Start) * math.Sqrt(2*math.Pi)
}

// N03: a boundary sees the heat since it formed, superposition.
func olderBoundaries(t *testing.T, c *published.Check) {
	plan, values := farBoundaries(t, 0, 0.2)
	older, younger := crossed(plan, values, 0), crossed(plan, values, 1)
	c.Program(t, "N03.01", younger, c.Solver("N03.01"))
	c.Program(t, "N03.02", older, c.Solver("N03.02"))
	c.Program(t, "N03.03", older/younger, c.Solver("N03.03"))
}

// TestFarBoundaries: of boundaries far apart each has the width of the heat since it
// was added, by the exact formula. It is a fact of common practice that those nearer to
// the core show more diffusion.
func TestFarBoundaries(t *testing.T) {
	const allowed = 1e-3 // of the width, in 200 cells a zone
	plan, values := farBoundaries(t, 0.1, 0.5, 0.9)
	before := math.Inf(1)
	for i, part := range []float64{0.1, 0.5, 0.9} {
		width, want := crossed(plan, values, i), math.Sqrt(2*5e-12*(1-part))
		if t.Logf("boundary %d: %.5g um, want %.5g", i, width*1e6, want*1e6); !(math.Abs(width/want-1) <= allowed) || !(width < before) {
			t.Errorf("boundary %d is %g m wide, want %g, less than the one inside, %g", i, width, want, before)
		}
		before = width
	}
}

// TestLeastIntegral: of two zones added along a hold the last has seen what was left.
func TestLeastIntegral(t *testing.T) {
	h := holdOf(t, 1e-12)
	p := &Problem{Law: testLaw, Zones: []Zone{{Outer: testSize}, {Outer: 2 * testSize, Added: 0.3 * h.Life()}, {Outer: 3 * testSize, Added: 0.75 * h.Life()}}}
	c := newCourse(t, newPlan(t, p, Options{}), h)
	wantNear(t, "part since the last", math.Exp(c.LnGLast()), 0.25e-12, 1e-24)
	wantNear(t, "all", math.Exp(c.LnG()), 1e-12, 1e-24)
}
