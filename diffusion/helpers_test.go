package diffusion

import (
	"math"
	"math/rand/v2"
	"testing"

	"bankfire/thermal"
)

// testLaw is of the size of titanium in quartz: 1e-21 m2/s at 750 C.
var testLaw = NewLaw(7.01e-8, 273e3)

const (
	testSize = 1e-4    // m, a crystal of a tenth of a millimetre
	testTemp = 1023.15 // K
)

func newHistory(tb testing.TB, legs ...thermal.Leg) *thermal.History {
	tb.Helper()
	h := new(thermal.History)
	if err := h.Set(legs); err != nil {
		tb.Fatal(err)
	}
	return h
}

// holdOf returns a hold along which the integral of testLaw is g, m2.
func holdOf(tb testing.TB, g float64) *thermal.History {
	tb.Helper()
	return newHistory(tb, thermal.Leg{Kind: thermal.Hold, For: g / math.Exp(testLaw.LnD(testTemp)), T0: testTemp})
}

// rampOf returns a ramp along which the integral of testLaw is g, m2: D grows a thousandfold along it.
func rampOf(tb testing.TB, g float64) *thermal.History {
	tb.Helper()
	leg := thermal.Leg{Kind: thermal.Ramp, For: 1, T0: 950, T1: 1200}
	leg.For = g / math.Exp(testLaw.LnIntegral(newHistory(tb, leg), 0, 1))
	return newHistory(tb, leg)
}

func newPlan(tb testing.TB, p *Problem, o Options) *Plan {
	tb.Helper()
	plan, err := Compile(p, o)
	if err != nil {
		tb.Fatal(err)
	}
	return plan
}

func newCourse(tb testing.TB, p *Plan, h *thermal.History) *Course {
	tb.Helper()
	c := new(Course)
	if err := p.Course(c, h, h.Life()); err != nil {
		tb.Fatal(err)
	}
	return c
}

// run returns the outcome of one run along the whole history.
func run(tb testing.TB, p *Plan, h *thermal.History) *Field {
	tb.Helper()
	return runJob(tb, p, Job{Course: newCourse(tb, p, h)})
}

func runJob(tb testing.TB, p *Plan, job Job) *Field {
	tb.Helper()
	dst := make([]Field, 1)
	if err := p.Run(dst, []Job{job}); err != nil {
		tb.Fatal(err)
	}
	return &dst[0]
}

func audit(tb testing.TB, p *Plan, h *thermal.History) *Field {
	tb.Helper()
	f := new(Field)
	if err := p.Audit(f, Job{Course: newCourse(tb, p, h)}); err != nil {
		tb.Fatal(err)
	}
	return f
}

// uniform returns the n+1 faces of n equal cells.
func uniform(from, to float64, n int) []float64 {
	faces := make([]float64, n+1)
	for i := range faces {
		faces[i] = from + (to-from)*float64(i)/float64(n)
	}
	faces[n] = to
	return faces
}

// equalSteps returns the cumulative fractions of n equal steps.
func equalSteps(n int) []float64 { return uniform(0, 1, n)[1:] }

// content returns the integral of r^n C dr.
func content(p *Plan, c []float64) float64 {
	sum := 0.0
	for i, v := range p.Volumes() {
		sum += v * c[i]
	}
	return sum
}

// farthest returns where a and b differ most, and by how much: NaN counts most.
func farthest(a, b []float64) (at int, diff float64) {
	for i := range a {
		d := math.Abs(a[i] - b[i])
		if math.IsNaN(d) {
			return i, d
		}
		if d > diff {
			at, diff = i, d
		}
	}
	return at, diff
}

// wantNear fails the test where got is not within tol of want.
func wantNear(tb testing.TB, what string, got, want, tol float64) {
	tb.Helper()
	wantClose(tb, what, []float64{got}, []float64{want}, tol)
}

// wantClose fails the test where a and b differ by more than tol.
func wantClose(tb testing.TB, what string, got, want []float64, tol float64) {
	tb.Helper()
	if len(got) != len(want) || len(got) == 0 {
		tb.Errorf("%s: %d values, want %d", what, len(got), len(want))
		return
	}
	if i, diff := farthest(got, want); !(diff <= tol) {
		tb.Errorf("%s: cell %d: got %.17g, want %.17g, difference %.3g, allowed %.3g", what, i, got[i], want[i], diff, tol)
	}
}

// wantBits fails the test where a and b are not the same numbers to the bit.
func wantBits(tb testing.TB, what string, got, want []float64) {
	tb.Helper()
	if len(got) != len(want) || len(got) == 0 {
		tb.Errorf("%s: %d values, want %d", what, len(got), len(want))
		return
	}
	for i := range got {
		if math.Float64bits(got[i]) != math.Float64bits(want[i]) || math.IsNaN(got[i]) {
			tb.Errorf("%s: cell %d: got %.17g, want %.17g to the bit", what, i, got[i], want[i])
			return
		}
	}
}

// rangeOf returns the difference of the largest and the least value.
func rangeOf(values []float64) float64 {
	lo, hi := math.Inf(1), math.Inf(-1)
	for _, v := range values {
		lo, hi = math.Min(lo, v), math.Max(hi, v)
	}
	return hi - lo
}

// source returns the random numbers of case i of a test.
func source(seed, i int) *rand.Rand { return rand.New(rand.NewPCG(uint64(seed), uint64(i))) }

// logUniform returns a number between lo and hi whose logarithm is uniform.
func logUniform(r *rand.Rand, lo, hi float64) float64 {
	return lo * math.Pow(hi/lo, r.Float64())
}

// failures counts what a judge says; it stands in for a test.
type failures struct {
	testing.TB
	n int
}

func (f *failures) Helper()               {}
func (f *failures) Errorf(string, ...any) { f.n++ }

// TestJudges feeds the comparisons with NaN and with wrong values, and wants to see them fail.
func TestJudges(t *testing.T) {
	nan := math.NaN()
	tests := []struct {
		name  string
		judge func(tb testing.TB)
		fails bool
	}{
		{"close passes", func(tb testing.TB) { wantClose(tb, "", []float64{1, 2}, []float64{1, 2.1}, 0.2) }, false},
		{"far", func(tb testing.TB) { wantClose(tb, "", []float64{1, 2}, []float64{1, 2.3}, 0.2) }, true},
		{"NaN first", func(tb testing.TB) { wantClose(tb, "", []float64{nan, 2}, []float64{1, 2}, 0.2) }, true},
		{"NaN last", func(tb testing.TB) { wantClose(tb, "", []float64{1, 2}, []float64{1, nan}, 0.2) }, true},
		{"NaN both", func(tb testing.TB) { wantClose(tb, "", []float64{nan}, []float64{nan}, 0.2) }, true},
		{"NaN tolerance", func(tb testing.TB) { wantClose(tb, "", []float64{1}, []float64{1}, nan) }, true},
		{"nothing", func(tb testing.TB) { wantClose(tb, "", nil, nil, 0.2) }, true},
		{"lengths", func(tb testing.TB) { wantClose(tb, "", []float64{1}, []float64{1, 2}, 0.2) }, true},
		{"bits pass", func(tb testing.TB) { wantBits(tb, "", []float64{1}, []float64{1}) }, false},
		{"one bit", func(tb testing.TB) { wantBits(tb, "", []float64{1}, []float64{math.Nextafter(1, 2)}) }, true},
		{"sign of 0", func(tb testing.TB) { wantBits(tb, "", []float64{0}, []float64{math.Copysign(0, -1)}) }, true},
		{"NaN bits", func(tb testing.TB) { wantBits(tb, "", []float64{nan}, []float64{nan}) }, true},
		{"no bits", func(tb testing.TB) { wantBits(tb, "", nil, nil) }, true},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			f := &failures{TB: t}
			test.judge(f)
			if (f.n > 0) != test.fails {
				t.Errorf("%d failures, want some: %v", f.n, test.fails)
			}
		})
	}
}
