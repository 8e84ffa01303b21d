package diffusion

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"bankfire/thermal"
)

// laneProblem returns a random crystal with a free value for each zone and rim,
// under rims that are held, given and changed.
func laneProblem(r *rand.Rand, h *thermal.History) *Problem {
	p := randomProblem(r, h, 1)
	start := make([]float64, len(p.Zones))
	for k := range start {
		start[k] = r.NormFloat64()
	}
	outer := make([]float64, len(p.Outer))
	for k := range outer {
		outer[k] = r.NormFloat64()
	}
	p.Free = []Basis{{Start: start}, {Start: make([]float64, len(start)), Outer: outer}}
	return p
}

// TestSideBySide: 1, 2, 4 and 8 jobs side by side, and any other number, give
// each job the bits that it gets alone: with different histories, ends and
// multipliers over twelve decades, and with jobs that rest.
func TestSideBySide(t *testing.T) {
	for i := range 20 {
		t.Run(fmt.Sprintf("problem=%d", i), func(t *testing.T) {
			r := source(17, i)
			h := randomHistory(t, r)
			plan := newPlan(t, laneProblem(r, h), Options{Cells: 30 + r.IntN(60)})
			jobs := randomJobs(t, r, plan, h, 11)
			alone := make([]*Field, len(jobs))
			for k := range jobs {
				alone[k] = runJob(t, plan, jobs[k])
			}
			dst := make([]Field, len(jobs)) // used again, as a caller would
			for _, n := range []int{1, 2, 3, 4, 5, 8, 11} {
				for from := 0; from+n <= len(jobs); from += n {
					if err := plan.Run(dst[:n], jobs[from:from+n]); err != nil {
						t.Fatal(err)
					}
					for k := range n {
						wantSame(t, fmt.Sprintf("job %d, %d at a time", from+k, n), &dst[k], alone[from+k])
					}
				}
			}
		})
	}
}

// randomJobs returns n jobs of plan: some of h, some of other histories, one that
// ends early, one that does not diffuse and one whose integral underflows.
func randomJobs(t *testing.T, r *rand.Rand, plan *Plan, h *thermal.History, n int) []Job {
	t.Helper()
	jobs := make([]Job, n)
	for k := range jobs {
		path := h
		if r.IntN(2) == 0 {
			path = randomHistory(t, r)
		}
		until := path.Life()
		if r.IntN(3) == 0 {
			until *= r.Float64()
		}
		c := new(Course)
		switch k {
		case 1:
			until = 0
		case 2:
			until /= 1e3
		}
		if err := plan.Course(c, path, until); err != nil {
			t.Fatal(err)
		}
		jobs[k] = Job{Course: c, LnM: math.Log(logUniform(r, 1e-6, 1e6))}
	}
	jobs[4].LnM = -1e5
	r.Shuffle(n, func(i, j int) { jobs[i], jobs[j] = jobs[j], jobs[i] })
	return jobs
}

// wantSame fails the test where two outcomes differ in a bit.
func wantSame(t *testing.T, what string, got, want *Field) {
	t.Helper()
	if len(got.Cols) != len(want.Cols) {
		t.Fatalf("%s: %d columns, want %d", what, len(got.Cols), len(want.Cols))
	}
	for j := range got.Cols {
		wantBits(t, fmt.Sprintf("%s: column %d", what, j), got.Cols[j], want.Cols[j])
	}
	if got.Stats != want.Stats {
		t.Errorf("%s: %+v, want %+v", what, got.Stats, want.Stats)
	}
}

// TestAuditRuns: what is audited is what Run gives, to the bit.
func TestAuditRuns(t *testing.T) {
	r := source(18, 0)
	h := randomHistory(t, r)
	plan := newPlan(t, laneProblem(r, h), Options{})
	wantSame(t, "audited", audit(t, plan, h), run(t, plan, h))
}

// TestRunDoesNotAllocate: once its fields have been used, Run takes no memory,
// for any number of jobs, with free values.
func TestRunDoesNotAllocate(t *testing.T) {
	r := source(19, 0)
	h := randomHistory(t, r)
	plan := newPlan(t, laneProblem(r, h), Options{Cells: 40})
	for _, n := range []int{1, 2, 4, 5, 8} {
		c := newCourse(t, plan, h)
		jobs, dst := make([]Job, n), make([]Field, n)
		for k := range jobs {
			jobs[k] = Job{Course: c, LnM: float64(k)}
		}
		allocated := testing.AllocsPerRun(3, func() { // runs once before it counts
			if err := plan.Run(dst, jobs); err != nil {
				t.Fatal(err)
			}
		})
		if allocated != 0 {
			t.Errorf("%d jobs: %g allocations a run, want none", n, allocated)
		}
	}
}

// TestCourseDoesNotAllocate: under rims that are held, neither does Course.
func TestCourseDoesNotAllocate(t *testing.T) {
	p, o := benchProblem()
	plan, h := newPlan(t, p, o), benchWake(t)
	var c Course
	allocated := testing.AllocsPerRun(3, func() {
		if err := plan.Course(&c, h, h.Life()); err != nil {
			t.Fatal(err)
		}
	})
	if allocated != 0 {
		t.Errorf("%g allocations a course, want none", allocated)
	}
}
