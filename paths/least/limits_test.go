package least_test

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"bankfire/paths/least"
	"gonum.org/v1/gonum/diff/fd"
	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/optimize"
)

// likelihood is -2 ln of the probability of data, up to a constant: densities
// of the measured ones, Phi of the limits.
func likelihood(p *least.Problem, model []float64) float64 {
	return sum(model, func(i int, y float64) float64 {
		z := (p.Obs[i] - y) / p.Sigma[i]
		if p.Limit[i] {
			return -2 * math.Log(math.Erfc(-z/math.Sqrt2)/2)
		}
		return z * z
	})
}

// One value, measured and limited: against the least of the likelihood on a
// grid, refined ten times, and its curvature there.
func TestOneValueWithLimits(t *testing.T) {
	const valueTol, curvatureTol = 1e-6, 1e-5 // the minimum is flat: sqrt(1e-16) of its width; differences
	tests := []struct {
		name       string
		obs, sigma []float64
		limit      []bool
		prior      least.Prior
	}{
		{"limit far above", []float64{10, 100}, []float64{1, 1}, []bool{false, true}, least.None},
		{"limit at the datum", []float64{10, 10}, []float64{1, 1}, []bool{false, true}, least.None},
		{"limit a little below", []float64{10, 8}, []float64{1, 1}, []bool{false, true}, least.None},
		{"limit far below", []float64{10, -20}, []float64{1, 1}, []bool{false, true}, least.None},
		{"many limits", []float64{10, 9, 8, 7, 6, 5}, []float64{3, 1, 1, 1, 1, 1}, []bool{false, true, true, true, true, true}, least.None},
		{"only limits and a prior", []float64{1, 1, 1}, []float64{0.5, 0.5, 0.1}, []bool{true, true, true}, least.Prior{Mean: 3, Sigma: 2}},
		{"limits from far away", []float64{1, 1, 1}, []float64{0.5, 0.5, 0.1}, []bool{true, true, true}, least.Prior{Mean: 300, Sigma: 200}},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			n := len(test.obs)
			p := least.Problem{Obs: test.obs, Sigma: test.sigma, Limit: test.limit, Linear: []least.Prior{test.prior}}
			got := p.Solve(linear(ones(n)))
			direct := func(v float64) float64 {
				return likelihood(&p, fill(n, func(int) float64 { return v })) + square((v-test.prior.Mean)/test.prior.Sigma)
			}
			value := leastOnGrid(direct, -20, 20)
			curvature := fd.Derivative(direct, value, &fd.Settings{Formula: fd.Central2nd, Step: 1e-4})
			near(t, "value", got.Linear[0], value, valueTol)
			near(t, "chi-square", got.ChiSq, direct(value), roundOff)
			near(t, "sigma", got.Sigma[0], math.Sqrt(2/curvature), curvatureTol)
		})
	}
}

func leastOnGrid(f func(float64) float64, lo, hi float64) float64 {
	const n = 1000
	at := lo
	for range 10 {
		step := (hi - lo) / n
		for i := range n + 1 {
			if x := lo + step*float64(i); f(x) < f(at) {
				at = x
			}
		}
		lo, hi = at-2*step, at+2*step
	}
	return at
}

// brute is the least of f by the simplex of Nelder and Mead, begun again from
// where it stopped.
func brute(t *testing.T, f func(x []float64) float64, start []float64) []float64 {
	t.Helper()
	for range 6 {
		r, err := optimize.Minimize(optimize.Problem{Func: f}, start,
			&optimize.Settings{Converger: &optimize.FunctionConverge{Absolute: 1e-15, Iterations: 300}}, &optimize.NelderMead{})
		must(t, err)
		start = r.X
	}
	return start
}

// A line through values and limits, with a bent value too: against gonum's
// minimum of the likelihood.
func TestValuesWithLimits(t *testing.T) {
	const n = 14
	const simplex = 1e-5 // where f is flat to its last bits
	rng := rand.New(rand.NewPCG(4, 9))
	x := fill(n, func(i int) float64 { return float64(i) })
	decay := func(x, rate float64) float64 { return math.Exp(-rate * x) }
	p := least.Problem{
		Obs:   fill(n, func(i int) float64 { return 2 + 20*decay(x[i], 0.3) + rng.NormFloat64() }),
		Sigma: ones(n), Limit: make([]bool, n), Linear: none(2),
		Bent: []least.Bent{{Prior: least.Prior{Mean: 0.4, Sigma: 0.2}, Lo: 0.01, Hi: 3, Starts: []float64{1}}},
	}
	for i := 8; i < n; i++ {
		p.Obs[i], p.Limit[i] = 2.5, true
	}
	model := func(dst [][]float64, bent []float64) {
		for i := range n {
			dst[0][i], dst[1][i], dst[2][i] = 0, 1, decay(x[i], bent[0])
		}
	}
	direct := func(v []float64) float64 {
		return likelihood(&p, fill(n, func(i int) float64 { return v[0] + v[1]*decay(x[i], v[2]) })) + square((v[2]-0.4)/0.2)
	}
	got := p.Solve(model)
	want := brute(t, direct, []float64{2, 20, 0.3})
	nearAll(t, "value", append(got.Linear, got.Bent...), want, simplex)
	near(t, "chi-square", got.ChiSq, direct(want), roundOff)
	if !got.Settled {
		t.Error("not settled")
	}

	p.Bent[0].Lo, p.Bent[0].Hi, p.Bent[0].Starts = got.Bent[0], got.Bent[0], got.Bent // as if it were known
	held := p.Solve(model)
	nearAll(t, "sigma", held.Sigma, got.Sigma, simplex)
	nearAll(t, "sigma", held.Sigma, sigmas(func(v []float64) float64 {
		return direct([]float64{v[0], v[1], got.Bent[0]})
	}, held.Linear), simplex)
}

// sigmas are standard deviations from the curvature of -2 ln likelihood.
func sigmas(f func(x []float64) float64, at []float64) []float64 {
	h := mat.NewSymDense(len(at), nil)
	fd.Hessian(h, f, at, &fd.Settings{Formula: fd.Central, Step: 1e-3})
	var inverse mat.Dense
	if err := inverse.Inverse(h); err != nil {
		panic(err)
	}
	return fill(len(at), func(i int) float64 { return math.Sqrt(2 * inverse.At(i, i)) })
}

// A limit that is not near is no datum at all, one that is far exceeded a datum.
func TestLimitsAtTheirEnds(t *testing.T) {
	x := []float64{0, 1, 2, 3}
	fit := func(limit []bool, sigma ...float64) least.Solution {
		p := least.Problem{Obs: []float64{0, 1.5, 2, 3}, Sigma: append([]float64{1, 1, 1}, sigma...), Limit: limit, Linear: none(2)}
		return p.Solve(linear(ones(4), x))
	}
	t.Run("all measured", func(t *testing.T) {
		nearAll(t, "value", fit(make([]bool, 4), 1).Linear, fit(nil, 1).Linear, roundOff)
	})
	t.Run("nothing but a limit", func(t *testing.T) {
		p := least.Problem{Obs: []float64{5}, Sigma: []float64{0.1}, Limit: []bool{true}, Linear: none(1)}
		got := p.Solve(linear(ones(1)))
		nearAll(t, "value", got.Linear, []float64{0}, 0)
		nearAll(t, "sigma", got.Sigma, []float64{math.Inf(1)}, 0)
		near(t, "chi-square", got.ChiSq, 0, 0)
	})
}

// What is correlated with a limit that is far exceeded is correlated with a
// datum: the two give the same fit, to the logarithm that tells them apart.
func TestCorrelatedLimit(t *testing.T) {
	const far = 2e-3 // ln(z^2 2 pi)/z^2 at z = 100 is 1.1e-3
	_, white := correlated(4)
	tests := []struct {
		name  string
		limit []bool
	}{{"measured", nil}, {"limit", []bool{false, true, false, false}}}
	var chi, value []float64
	for _, test := range tests {
		p := least.Problem{
			Obs: []float64{101, -1, 100, 98}, Sigma: ones(4), Limit: test.limit, White: white,
			Linear: []least.Prior{{Mean: 100, Sigma: 0.1}},
		}
		got := p.Solve(linear(ones(4)))
		chi, value = append(chi, got.ChiSq), append(value, got.Linear[0])
	}
	near(t, "chi-square", chi[1], chi[0], far)
	near(t, "value", value[1], value[0], far)
}

// Near a limit that is correlated with data, the fit is the least of the sum
// that stands for it.
func TestCorrelatedLimitNearby(t *testing.T) {
	const n, grid = 4, 1e-6
	_, white := correlated(n)
	p := least.Problem{
		Obs: []float64{9, 8, 10.5, 8.5}, Sigma: ones(n), Limit: []bool{false, true, false, true}, White: white, Linear: none(1),
	}
	got := p.Solve(linear(ones(n)))
	direct := func(v float64) float64 {
		r := mat.NewVecDense(n, fill(n, func(i int) float64 {
			if z := p.Obs[i] - v; !p.Limit[i] {
				return z
			}
			return -math.Sqrt(-2 * math.Log(math.Erfc((v-p.Obs[i])/math.Sqrt2)/2))
		}))
		var w mat.VecDense
		w.MulVec(white, r)
		return mat.Dot(&w, &w)
	}
	want := leastOnGrid(direct, 0, 20)
	near(t, "value", got.Linear[0], want, grid)
	near(t, "chi-square", got.ChiSq, direct(want), roundOff)
}

// A limit that is correlated with nothing is no approximation, though other
// data are correlated.
func TestLimitBesideCorrelatedData(t *testing.T) {
	const n, simplex = 6, 1e-6
	c := mat.NewSymDense(n, nil)
	for i := range n {
		c.SetSym(i, i, 1)
	}
	c.SetSym(0, 1, 0.8)
	c.SetSym(2, 3, -0.5)
	p := least.Problem{
		Obs: []float64{3, 4, 5, 7, 1, 2}, Sigma: ones(n), Limit: []bool{4: true, 5: true}, White: whiteOf(c), Linear: none(1),
	}
	got := p.Solve(linear(ones(n)))
	var inverse mat.Dense
	must(t, inverse.Inverse(c))
	direct := func(v float64) float64 {
		model := fill(n, func(int) float64 { return v })
		chi := 0.0
		for i := range 4 {
			for j := range 4 {
				chi += (p.Obs[i] - v) * inverse.At(i, j) * (p.Obs[j] - v)
			}
		}
		limits := least.Problem{Obs: p.Obs[4:], Sigma: p.Sigma[4:], Limit: p.Limit[4:]}
		return chi + likelihood(&limits, model[4:])
	}
	want := leastOnGrid(direct, -10, 10)
	near(t, "value", got.Linear[0], want, simplex)
	near(t, "chi-square", got.ChiSq, direct(want), roundOff)
}

func ExampleProblem_limit() {
	// 4 +- 1, and once below 3, where 3 is as well known.
	p := least.Problem{
		Obs: []float64{4, 3}, Sigma: []float64{1, 1}, Limit: []bool{false, true}, Linear: []least.Prior{least.None},
	}
	best := p.Solve(func(dst [][]float64, _ []float64) { dst[1][0], dst[1][1] = 1, 1 })
	fmt.Printf("%.2f +- %.2f\n", best.Linear[0], best.Sigma[0])
	// Output: 3.12 +- 0.78
}
