package numeric

import (
	"math"
	"strings"
	"testing"
)

func TestRoot(t *testing.T) {
	tests := []struct {
		name   string
		f      func(float64) float64
		lo, hi float64
		tol    float64
		want   float64
		most   int // evaluations
	}{
		{"line", func(x float64) float64 { return 2*x - 1 }, 0, 3, 0, 0.5, 12},
		{"cubic of Wallis", func(x float64) float64 { return x*x*x - 2*x - 5 }, 2, 3, 0, 2.0945514815423265915, 12},
		{"cosine, turned round", func(x float64) float64 { return math.Cos(x) - x }, 1, 0, 0, 0.7390851332151606417, 12},
		{"steep exponential", func(x float64) float64 { return math.Exp(x) - 1e100 }, 0, 600, 0, 100 * math.Ln10, 40},
		{"flat ninth power", func(x float64) float64 { return math.Pow(x-0.3, 9) }, 0, 1, 1e-6, 0.3, 60},
		{"root at the left end", func(x float64) float64 { return x }, 0, 1, 0, 0, 2},
		{"root at the right end", func(x float64) float64 { return x - 1 }, 0, 1, 0, 1, 2},
		{"jump at 0", func(x float64) float64 { return math.Copysign(1, x) }, -1, 2, 0, 0, 2200},
		{"jump at 1/3", func(x float64) float64 { return math.Copysign(1, x-1.0/3) }, -1, 2, 0, 1.0 / 3, 120},
		{"infinite values", func(x float64) float64 { return math.Log(x) / (1 - x/5) }, 0, 4, 0, 1, 60},
		{"infinite both ends", func(x float64) float64 { return math.Tan(x * math.Pi / 2) }, -1, 1, 0, 0, 60},
		{"coarse", func(x float64) float64 { return x - math.Pi }, 0, 10, 0.1, math.Pi, 12},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			calls := 0
			got, err := Root(func(x float64) float64 { calls++; return test.f(x) }, test.lo, test.hi, test.tol)
			if err != nil {
				t.Fatal(err)
			}
			allowed := test.tol + 8*ulp*math.Abs(test.want) + math.SmallestNonzeroFloat64
			if diff := math.Abs(got - test.want); !(diff <= allowed) {
				t.Errorf("got %.17g, want %.17g, difference %g, allowed %g", got, test.want, diff, allowed)
			}
			if calls > test.most {
				t.Errorf("%d evaluations, want at most %d", calls, test.most)
			}
		})
	}
}

func TestRootRefuses(t *testing.T) {
	nan, inf := math.NaN(), math.Inf(1)
	line := func(x float64) float64 { return x }
	tests := []struct {
		name        string
		f           func(float64) float64
		lo, hi, tol float64
		want        string
	}{
		{"same sign", line, 1, 2, 0, "not bracketed: f(1) = 1, f(2) = 2"},
		{"NaN end", line, nan, 2, 0, "ends must be finite"},
		{"infinite end", line, -1, inf, 0, "ends must be finite"},
		{"infinite width", line, -math.MaxFloat64, math.MaxFloat64, 0, "ends must be finite"},
		{"negative tolerance", line, -1, 2, -1, "tol at least 0"},
		{"NaN tolerance", line, -1, 2, nan, "tol at least 0"},
		{"NaN value at an end", math.Sqrt, -1, 2, 0, "not bracketed: f(-1) = NaN"},
		{"NaN value inside", func(x float64) float64 {
			if x > -1 && x < 2 {
				return nan
			}
			return x
		}, -1, 2, 0, "is NaN"},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			got, err := Root(test.f, test.lo, test.hi, test.tol)
			if err == nil || !strings.Contains(err.Error(), test.want) {
				t.Errorf("got %g and error %v, want an error with %q", got, err, test.want)
			}
		})
	}
}
