package least_test

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"bankfire/paths/least"
	"gonum.org/v1/gonum/mat"
)

// roundOff is what arithmetic leaves of well-posed fits of a few values.
const roundOff = 1e-11

// within says whether got is within tol of want, as a part of 1 + |want|.
func within(got, want, tol float64) bool {
	if math.IsInf(want, 0) {
		return got == want
	}
	return math.Abs(got-want) <= tol*(1+math.Abs(want))
}

func TestWithin(t *testing.T) {
	nan, inf := math.NaN(), math.Inf(1)
	for _, pair := range [][2]float64{{nan, 1}, {1, nan}, {nan, nan}, {inf, 1}, {1, inf}, {-inf, inf}, {1.3, 1}} {
		if within(pair[0], pair[1], 0.1) {
			t.Errorf("%g passes for %g", pair[0], pair[1])
		}
	}
	if !within(1.1, 1, 0.1) || !within(inf, inf, 0.1) {
		t.Error("what is near fails")
	}
}

// near fails the test unless got is within tol of want.
func near(t *testing.T, what string, got, want, tol float64) {
	t.Helper()
	if !within(got, want, tol) {
		t.Errorf("%s: got %.15g, want %.15g, difference %.3g, allowed %.3g", what, got, want, got-want, tol*(1+math.Abs(want)))
	}
}

// nearAll compares slices.
func nearAll(t *testing.T, what string, got, want []float64, tol float64) {
	t.Helper()
	if len(got) != len(want) {
		t.Fatalf("%s: got %g, want %g", what, got, want)
	}
	for i := range want {
		near(t, fmt.Sprintf("%s %d", what, i), got[i], want[i], tol)
	}
}

// none returns k values of which nothing is known.
func none(k int) []least.Prior {
	p := make([]least.Prior, k)
	for j := range p {
		p[j] = least.None
	}
	return p
}

// linear is a model that the columns make: nothing of it is fixed or bent.
func linear(columns ...[]float64) least.Model {
	return func(dst [][]float64, _ []float64) {
		clear(dst[0])
		for j, c := range columns {
			copy(dst[1+j], c)
		}
	}
}

// fill returns n numbers f(i).
func fill(n int, f func(i int) float64) []float64 {
	v := make([]float64, n)
	for i := range v {
		v[i] = f(i)
	}
	return v
}

func ones(n int) []float64 { return fill(n, func(int) float64 { return 1 }) }

func sum(v []float64, f func(i int, x float64) float64) float64 {
	s := 0.0
	for i, x := range v {
		s += f(i, x)
	}
	return s
}

func square(x float64) float64 { return x * x }

// A weighted straight line, worked by hand with Press et al. (1992), Numerical
// Recipes, eqs 15.2.4 to 15.2.9: x = 1, 2, 3 with weights 1, 4, 1 gives S = 6,
// Sx = 12, Sxx = 26, Sy = 21, Sxy = 47 and Delta = 12.
func TestLineByHand(t *testing.T) {
	p := least.Problem{Obs: []float64{2, 3, 7}, Sigma: []float64{1, 0.5, 1}, Linear: none(2)}
	got := p.Solve(linear(ones(3), []float64{1, 2, 3}))
	nearAll(t, "value", got.Linear, []float64{-1.5, 2.5}, roundOff)
	nearAll(t, "sigma", got.Sigma, []float64{math.Sqrt(26. / 12), math.Sqrt(6. / 12)}, roundOff)
	nearAll(t, "model", got.Model, []float64{1, 3.5, 6}, roundOff)
	nearAll(t, "residual", got.Residuals, []float64{1, -1, 1}, roundOff)
	near(t, "chi-square", got.ChiSq, 3, roundOff)
	if got.Rank != 2 || !got.Settled {
		t.Errorf("rank %d, settled %v", got.Rank, got.Settled)
	}
}

// What is fixed only moves the data, and without values chi-square is its
// definition.
func TestNothingToFit(t *testing.T) {
	p := least.Problem{Obs: []float64{1, 2}, Sigma: []float64{0.5, 2}}
	got := p.Solve(func(dst [][]float64, _ []float64) { dst[0][0], dst[0][1] = 0, 8 })
	near(t, "chi-square", got.ChiSq, 4+9, 0)
	if len(got.Linear)+len(got.Sigma)+len(got.Bent)+got.Rank != 0 || !got.Settled {
		t.Errorf("got %+v", got)
	}
}

// A prior is one more datum: its mean, measured with its sigma.
func TestPriorsAreData(t *testing.T) {
	rng := rand.New(rand.NewPCG(2, 3))
	x := fill(9, func(i int) float64 { return float64(i) })
	obs := fill(9, func(i int) float64 { return 4 - x[i] + rng.NormFloat64() })
	with := least.Problem{Obs: obs, Sigma: ones(9), Linear: []least.Prior{{Mean: 7, Sigma: 0.5}, least.None}}
	got := with.Solve(linear(ones(9), x))

	without := least.Problem{Obs: append(obs, 7), Sigma: append(ones(9), 0.5), Linear: none(2)}
	want := without.Solve(linear(ones(10), append(x, 0)))
	nearAll(t, "value", got.Linear, want.Linear, roundOff)
	nearAll(t, "sigma", got.Sigma, want.Sigma, roundOff)
	near(t, "chi-square", got.ChiSq, want.ChiSq, roundOff)
}

// Values that data and priors do not see stay at their means and have no
// standard deviation; the others are as if these were not there.
func TestUnseenValues(t *testing.T) {
	x := []float64{0, 1, 2, 3}
	zero := make([]float64, 4)
	inf := math.Inf(1)
	tests := []struct {
		name         string
		priors       []least.Prior
		columns      [][]float64
		value, sigma []float64
		rank         int
	}{
		{"no column", []least.Prior{least.None, {Mean: 5, Sigma: inf}}, [][]float64{ones(4), zero},
			[]float64{3, 5}, []float64{0.5, inf}, 1},
		{"only the prior", []least.Prior{least.None, {Mean: 5, Sigma: 2}}, [][]float64{ones(4), zero},
			[]float64{3, 5}, []float64{0.5, 2}, 2},
		{"round-off", []least.Prior{least.None, {Mean: 5, Sigma: inf}}, [][]float64{ones(4), {0, 1e-13, -1e-14, 0}},
			[]float64{3, 5}, []float64{0.5, inf}, 1},
		{"twice the same", none(3), [][]float64{ones(4), ones(4), x},
			[]float64{0.75, 0.75, 1}, []float64{inf, inf, 1 / math.Sqrt(5)}, 2},
		{"the same in another unit", none(3), [][]float64{ones(4), {3, 3, 3, 3}, {0.1, 0.8, 1.5, 2.2}},
			[]float64{(1.5 - 1./7) / 2, (1.5 - 1./7) / 6, 1 / 0.7}, []float64{inf, inf, 1 / (0.7 * math.Sqrt(5))}, 2},
		{"nothing at all", []least.Prior{{Mean: 1, Sigma: inf}}, [][]float64{zero},
			[]float64{1}, []float64{inf}, 0},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			p := least.Problem{Obs: []float64{1.5, 2.5, 3.5, 4.5}, Sigma: ones(4), Linear: test.priors}
			got := p.Solve(linear(test.columns...))
			nearAll(t, "value", got.Linear, test.value, roundOff)
			nearAll(t, "sigma", got.Sigma, test.sigma, roundOff)
			if got.Rank != test.rank {
				t.Errorf("rank %d, want %d", got.Rank, test.rank)
			}
		})
	}
}

// Of three columns, one of which is the sum of the others, none is seen, and the
// fourth is as if one of them were not there.
func TestSumOfOthers(t *testing.T) {
	const n = 9
	rng := rand.New(rand.NewPCG(7, 7))
	random := func() []float64 { return fill(n, func(int) float64 { return rng.NormFloat64() }) }
	a, b, d := random(), random(), random()
	both := fill(n, func(i int) float64 { return a[i] + b[i] })
	p := least.Problem{Obs: random(), Sigma: ones(n), Linear: none(3)}
	want := p.Solve(linear(a, b, d))
	p.Linear = none(4)
	got := p.Solve(linear(a, b, both, d))
	inf := math.Inf(1)
	nearAll(t, "sigma", got.Sigma, []float64{inf, inf, inf, want.Sigma[2]}, roundOff)
	near(t, "value of the fourth", got.Linear[3], want.Linear[2], roundOff)
	near(t, "chi-square", got.ChiSq, want.ChiSq, roundOff)
	if got.Rank != 3 {
		t.Errorf("rank %d, want 3", got.Rank)
	}
}

// Narrow priors and units that make a column small hide nothing: of the two
// values, 3 is known to 1e-12, and the data give the other, which is in a unit
// 1e5 times too small, its weighted mean.
func TestNarrowPriorBesideWideScale(t *testing.T) {
	for _, small := range []float64{1, 1e-5, 1e-9} {
		t.Run(fmt.Sprint(small), func(t *testing.T) {
			p := least.Problem{
				Obs: []float64{13, 15}, Sigma: ones(2),
				Linear: []least.Prior{{Mean: 3, Sigma: 1e-12}, least.None},
			}
			got := p.Solve(linear(ones(2), []float64{small, small}))
			nearAll(t, "value", got.Linear, []float64{3, 11 / small}, roundOff)
			nearAll(t, "sigma", got.Sigma, []float64{1e-12, math.Sqrt(0.5) / small}, roundOff)
			near(t, "chi-square", got.ChiSq, 2, roundOff)
		})
	}
}

// Data on the very values that are expected beforehand leave nothing to fit,
// and standard deviations all the same.
func TestPerfectData(t *testing.T) {
	const n = 7
	rng := rand.New(rand.NewPCG(1, 2))
	x := fill(n, func(i int) float64 { return 0.1 * float64(i) })
	for range 50 {
		a, b := 100*rng.Float64(), rng.NormFloat64()
		p := least.Problem{
			Obs: fill(n, func(i int) float64 { return a + b*x[i] }), Sigma: fill(n, func(int) float64 { return 1e-3 }),
			Linear: []least.Prior{{Mean: a, Sigma: math.Inf(1)}, {Mean: b, Sigma: math.Inf(1)}},
		}
		got := p.Solve(linear(ones(n), x))
		// S = 7, Sx = 2.1, Sxx = 0.91, Delta = 1.96, all over sigma^2
		nearAll(t, "sigma", got.Sigma, []float64{1e-3 * math.Sqrt(0.91/1.96), 1e-3 * math.Sqrt(7/1.96)}, roundOff)
		near(t, "chi-square", got.ChiSq, 0, roundOff)
		if got.Rank != 2 {
			t.Errorf("rank %d, want 2", got.Rank)
		}
	}
}

// Standard deviations are those of the values over many sets of data, and
// chi-square has as many degrees of freedom as data and priors less values.
func TestSigmaBySimulation(t *testing.T) {
	const draws, n = 4000, 8
	const allowed = 4.5 // standard deviations of a mean over the draws; 1 in 1e5 exceeds it
	rng := rand.New(rand.NewPCG(11, 12))
	x := fill(n, func(i int) float64 { return float64(i) / 2 })
	sigma := fill(n, func(i int) float64 { return 0.5 + x[i] })
	truth := []float64{3, -1}
	chi, variance := 0.0, make([]float64, 2)
	for range draws {
		p := least.Problem{
			Obs: fill(n, func(i int) float64 { return truth[0] + truth[1]*x[i] + sigma[i]*rng.NormFloat64() }), Sigma: sigma,
			Linear: []least.Prior{{Mean: truth[0] + 0.4*rng.NormFloat64(), Sigma: 0.4}, least.None},
		}
		got := p.Solve(linear(ones(n), x))
		chi += got.ChiSq / draws
		for j := range variance {
			variance[j] += square((got.Linear[j]-truth[j])/got.Sigma[j]) / draws
		}
	}
	near(t, "chi-square", chi, n+1-2, allowed*math.Sqrt(2*(n-1)/float64(draws))/n)
	for j, v := range variance {
		near(t, fmt.Sprintf("variance of value %d over sigma^2", j), v, 1, allowed*math.Sqrt(2./draws)/2)
	}
}

// correlated returns the correlation matrix of data whose correlation falls
// with their distance, and what whitens them.
func correlated(n int) (*mat.SymDense, *mat.TriDense) {
	c := mat.NewSymDense(n, nil)
	for i := range n {
		for j := i; j < n; j++ {
			c.SetSym(i, j, math.Exp(-float64(j-i)/3))
		}
	}
	return c, whiteOf(c)
}

func whiteOf(c *mat.SymDense) *mat.TriDense {
	var chol mat.Cholesky
	if !chol.Factorize(c) {
		panic("not positive definite")
	}
	var l, white mat.TriDense
	chol.LTo(&l)
	if err := white.InverseTri(&l); err != nil {
		panic(err)
	}
	return &white
}

// Correlated data against the normal equations of generalised least squares
// (Aitken 1935, Proc. R. Soc. Edinb. 55, 42-48), solved by gonum.
func TestCorrelatedData(t *testing.T) {
	const n = 20
	rng := rand.New(rand.NewPCG(5, 5))
	x := fill(n, func(i int) float64 { return math.Sin(float64(i)) })
	sigma := fill(n, func(i int) float64 { return 0.5 + rng.Float64() })
	obs := fill(n, func(i int) float64 { return 2 + 3*x[i] + rng.NormFloat64() })
	c, white := correlated(n)
	p := least.Problem{Obs: obs, Sigma: sigma, White: white, Linear: none(2)}
	got := p.Solve(linear(ones(n), x))

	v := mat.NewSymDense(n, nil)
	for i := range n {
		for j := i; j < n; j++ {
			v.SetSym(i, j, c.At(i, j)*sigma[i]*sigma[j])
		}
	}
	var weight, normal, covariance mat.Dense
	must(t, weight.Inverse(v))
	a := mat.NewDense(n, 2, nil)
	a.SetCol(0, ones(n))
	a.SetCol(1, x)
	normal.Product(a.T(), &weight, a)
	must(t, covariance.Inverse(&normal))
	var best, residual, chi mat.Dense
	y := mat.NewDense(n, 1, obs)
	best.Product(&covariance, a.T(), &weight, y)
	residual.Mul(a, &best)
	residual.Sub(y, &residual)
	chi.Product(residual.T(), &weight, &residual)
	for j := range 2 {
		near(t, "value", got.Linear[j], best.At(j, 0), roundOff)
		near(t, "sigma", got.Sigma[j], math.Sqrt(covariance.At(j, j)), roundOff)
	}
	near(t, "chi-square", got.ChiSq, chi.At(0, 0), roundOff)
	near(t, "residual 3", got.Residuals[3], residual.At(3, 0)/sigma[3], roundOff)
}

func must(t *testing.T, err error) {
	t.Helper()
	if err != nil {
		t.Fatal(err)
	}
}
