package paths

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"bankfire/paths/study"
	"bankfire/thermal"
	"gonum.org/v1/gonum/mat"
)

// openValue is a value that only the data decide, knownValue one with a prior.
func openValue(name string) study.FreeValue { return study.FreeValue{Name: name} }

func knownValue(name string, sigma float64) study.FreeValue {
	return study.FreeValue{Name: name, HasPrior: true, Prior: thermal.Uncertain{Sigma: sigma}}
}

// The prior that a value without one is given moves the value by the square of
// its error over the prior's, 1e-6 and less here, of its distance from the mean of
// the data, and adds the square of this distance over the prior's error, 1e-4
// at most, to chi-square.
const (
	fitTol = 2e-5
	chiTol = 1e-4
)

// The weighted mean and its error, as every textbook has it.
func TestFitOfOneValueIsTheWeightedMean(t *testing.T) {
	f := newFit([]float64{10, 12, 9}, []float64{1, 2, 0.5}, []study.FreeValue{openValue("a")})
	got := f.solve([][]float64{{0, 0, 0}, {1, 1, 1}})
	// weights 1, 1/4, 4: mean (10 + 3 + 36)/5.25, error 1/sqrt(5.25)
	mean := 49 / 5.25
	near(t, "mean", got.values[0], mean, fitTol)
	near(t, "its error", got.sigmas[0], 1/math.Sqrt(5.25), fitTol)
	near(t, "chi-square", got.chiSq, square(10-mean)+square(12-mean)/4+square(9-mean)*4, chiTol)
}

func square(x float64) float64 { return x * x }

// The straight line through points with errors in closed form: Press et al.
// (1992), Numerical Recipes, eqs 15.2.4 to 15.2.9.
func TestFitOfALine(t *testing.T) {
	rng := rand.New(rand.NewPCG(5, 1))
	var x, one, zero, obs, sigma []float64
	var s, sx, sy, sxx, sxy float64
	for i := range 25 {
		x, one, zero = append(x, float64(i)/3), append(one, 1), append(zero, 0)
		sigma = append(sigma, 0.5+rng.Float64())
		obs = append(obs, 3+0.7*x[i]+sigma[i]*rng.NormFloat64())
		w := 1 / square(sigma[i])
		s, sx, sy = s+w, sx+w*x[i], sy+w*obs[i]
		sxx, sxy = sxx+w*x[i]*x[i], sxy+w*x[i]*obs[i]
	}
	delta := s*sxx - sx*sx
	a, b := (sxx*sy-sx*sxy)/delta, (s*sxy-sx*sy)/delta
	chi := 0.0
	for i := range x {
		chi += square((obs[i] - a - b*x[i]) / sigma[i])
	}
	f := newFit(obs, sigma, []study.FreeValue{openValue("a"), openValue("b")})
	got := f.solve([][]float64{zero, one, x})
	near(t, "a", got.values[0], a, fitTol)
	near(t, "b", got.values[1], b, fitTol)
	near(t, "error of a", got.sigmas[0], math.Sqrt(sxx/delta), fitTol)
	near(t, "error of b", got.sigmas[1], math.Sqrt(s/delta), fitTol)
	near(t, "chi-square", got.chiSq, chi, chiTol)
}

// randomFit returns a fit of k values to n points, every second value with a
// prior, and its columns.
func randomFit(rng *rand.Rand, n, k int) (fit, [][]float64) {
	var obs, sigma []float64
	var free []study.FreeValue
	for j := range k {
		if j%2 == 1 {
			free = append(free, knownValue("", 0.1+rng.Float64()))
		} else {
			free = append(free, openValue(""))
		}
	}
	seen := make([][]float64, 1+k)
	for j := range seen {
		for range n {
			seen[j] = append(seen[j], rng.NormFloat64())
		}
	}
	for range n {
		obs, sigma = append(obs, 3*rng.NormFloat64()), append(sigma, 0.2+rng.Float64())
	}
	return newFit(obs, sigma, free), seen
}

// The normal equations by Cholesky, another way to the same numbers.
func TestFitAgreesWithNormalEquations(t *testing.T) {
	rng := rand.New(rand.NewPCG(5, 2))
	for k := 1; k <= 5; k++ {
		t.Run(fmt.Sprintf("%d values", k), func(t *testing.T) {
			f, seen := randomFit(rng, 30, k)
			values, sigmas, chi := normalEquations(t, &f, seen)
			got := f.solve(seen)
			for j := range values {
				near(t, "value", got.values[j], values[j], fitTol)
				near(t, "its error", got.sigmas[j], sigmas[j], fitTol)
			}
			near(t, "chi-square", got.chiSq, chi, chiTol)
		})
	}
}

func normalEquations(t *testing.T, f *fit, seen [][]float64) (values, sigmas []float64, chi float64) {
	t.Helper()
	k := len(f.free)
	n, rhs := mat.NewSymDense(k, nil), mat.NewVecDense(k, nil)
	for i, s := range f.sigma {
		for a := range k {
			rhs.SetVec(a, rhs.AtVec(a)+seen[1+a][i]*(f.obs[i]-seen[0][i])/s/s)
			for b := a; b < k; b++ {
				n.SetSym(a, b, n.At(a, b)+seen[1+a][i]*seen[1+b][i]/s/s)
			}
		}
	}
	for j, v := range f.free {
		if v.HasPrior {
			n.SetSym(j, j, n.At(j, j)+1/square(v.Prior.Sigma))
		}
	}
	var chol mat.Cholesky
	if !chol.Factorize(n) {
		t.Fatal("the normal equations are singular")
	}
	x, inverse := mat.NewVecDense(k, nil), mat.NewSymDense(k, nil)
	if err := chol.SolveVecTo(x, rhs); err != nil {
		t.Fatal(err)
	}
	if err := chol.InverseTo(inverse); err != nil {
		t.Fatal(err)
	}
	for i, s := range f.sigma {
		miss := f.obs[i] - seen[0][i]
		for j := range k {
			miss -= x.AtVec(j) * seen[1+j][i]
		}
		chi += square(miss / s)
	}
	for j, v := range f.free {
		values, sigmas = append(values, x.AtVec(j)), append(sigmas, math.Sqrt(inverse.At(j, j)))
		if v.HasPrior {
			chi += square(x.AtVec(j) / v.Prior.Sigma)
		}
	}
	return values, sigmas, chi
}

// A Gaussian prior is one more measurement, of the value itself.
func TestPriorIsAMeasurement(t *testing.T) {
	rng := rand.New(rand.NewPCG(5, 3))
	with, seen := randomFit(rng, 12, 3)
	without := newFit(append([]float64{0}, with.obs...), append([]float64{with.free[1].Prior.Sigma}, with.sigma...),
		[]study.FreeValue{openValue(""), openValue(""), openValue("")})
	longer := make([][]float64, len(seen))
	for j := range seen {
		first := 0.0
		if j == 2 {
			first = 1
		}
		longer[j] = append([]float64{first}, seen[j]...)
	}
	a, b := with.solve(seen), without.solve(longer)
	for j := range a.values {
		near(t, "value", a.values[j], b.values[j], fitTol)
		near(t, "its error", a.sigmas[j], b.sigmas[j], fitTol)
	}
	near(t, "chi-square", a.chiSq, b.chiSq, chiTol)
	if n := with.unconstrained(); n != 2 {
		t.Errorf("%d values without a prior, want 2", n)
	}
}

// Priors of no width and of no weight are the limits they should be.
func TestPriorsOfAnyWidth(t *testing.T) {
	obs, sigma := []float64{10, 11, 12, 15}, []float64{1, 1, 1, 1}
	seen := [][]float64{{0, 0, 0, 0}, {1, 1, 1, 1}, {0, 1, 2, 3}}
	flat := newFit(obs, sigma, []study.FreeValue{openValue("")})
	line := newFit(obs, sigma, []study.FreeValue{openValue(""), openValue("")})
	for _, test := range []struct {
		name  string
		sigma float64
		want  fitted
	}{
		{"as good as fixed", 1e-9, flat.solve(seen[:2])},
		{"as good as fixed, and more", 1e-15, flat.solve(seen[:2])},
		{"as good as free", 1e6, line.solve(seen)},
		{"as good as free, and more", 1e15, line.solve(seen)},
	} {
		t.Run(test.name, func(t *testing.T) {
			f := newFit(obs, sigma, []study.FreeValue{openValue("mean"), knownValue("slope", test.sigma)})
			got := f.solve(seen)
			near(t, "chi-square", got.chiSq, test.want.chiSq, chiTol)
			near(t, "mean", got.values[0], test.want.values[0], fitTol)
			near(t, "its error", got.sigmas[0], test.want.sigmas[0], fitTol)
		})
	}
}

// What the data do not see is put where the data are and said to be unseen; the
// rest is fitted as if it were not there, and no degree of freedom is spent.
func TestUnseenValues(t *testing.T) {
	obs, sigma := []float64{10, 12, 11}, []float64{1, 1, 1}
	zero, one, half := []float64{0, 0, 0}, []float64{1, 1, 1}, []float64{0.5, 0.5, 0.5}
	last := []float64{0, 0, 1}
	trace := []float64{1e-12, -2e-12, 1e-12} // the round-off of what has diffused away
	inf := math.Inf(1)
	for _, test := range []struct {
		name           string
		free           []study.FreeValue
		cols           [][]float64
		values, sigmas []float64
		spent          int
		chiSq          float64
	}{
		{"in sight", []study.FreeValue{openValue("a"), openValue("b")}, [][]float64{one, last},
			[]float64{11, 0}, []float64{math.Sqrt(0.5), math.Sqrt(1.5)}, 2, 2},
		{"out of sight", []study.FreeValue{openValue("a"), openValue("b")}, [][]float64{one, zero},
			[]float64{11, 11}, []float64{1 / math.Sqrt(3), inf}, 1, 2},
		{"all but out of sight", []study.FreeValue{openValue("a"), openValue("b")}, [][]float64{one, trace},
			[]float64{11, 11}, []float64{1 / math.Sqrt(3), inf}, 1, 2},
		{"out of sight but known", []study.FreeValue{openValue("a"), knownValue("b", 2)}, [][]float64{one, zero},
			[]float64{11, 0}, []float64{1 / math.Sqrt(3), 2}, 1, 2},
		// only a + b/2 = 11 is seen; nearest to 11 each are 6.6 and 8.8
		{"not apart", []study.FreeValue{openValue("a"), openValue("b")}, [][]float64{one, half},
			[]float64{6.6, 8.8}, []float64{inf, inf}, 1, 2},
		// a = 11 - b/2, b = 0 +- 2
		{"not apart but known", []study.FreeValue{openValue("a"), knownValue("b", 2)}, [][]float64{one, half},
			[]float64{11, 0}, []float64{math.Sqrt(1./3 + 1), 2}, 1, 2},
		{"nothing seen at all", []study.FreeValue{openValue("a")}, [][]float64{zero}, []float64{11}, []float64{inf}, 0, 100 + 144 + 121},
	} {
		t.Run(test.name, func(t *testing.T) {
			f := newFit(obs, sigma, test.free)
			got := f.solve(append([][]float64{zero}, test.cols...))
			for j := range test.values {
				near(t, "value of "+test.free[j].Name, got.values[j], test.values[j], fitTol)
				near(t, "error of "+test.free[j].Name, got.sigmas[j], test.sigmas[j], fitTol)
			}
			near(t, "chi-square", got.chiSq, test.chiSq, chiTol)
			if got.spent != test.spent {
				t.Errorf("%d degrees of freedom spent, want %d", got.spent, test.spent)
			}
		})
	}
}

// The errors of the values are those found by repeating the measurement.
func TestErrorsOfValuesBySimulation(t *testing.T) {
	const repeats = 4000
	rng := rand.New(rand.NewPCG(5, 4))
	f, seen := randomFit(rng, 10, 3) // what obs are to begin with only sets the width of no prior
	truth := []float64{2, 0.1, -1}
	var sum, sumSq [3]float64
	var sigmas []float64
	for range repeats {
		known := truth[1] + f.free[1].Prior.Sigma*rng.NormFloat64() // what other analyses found
		for i := range f.obs {
			f.obs[i] = seen[0][i] - known*seen[2][i] // values count from the prior's middle
			for j, x := range truth {
				f.obs[i] += x * seen[1+j][i]
			}
			f.obs[i] += f.sigma[i] * rng.NormFloat64()
		}
		got := f.solve(seen)
		sigmas = got.sigmas
		got.values[1] += known
		for j, x := range got.values {
			sum[j], sumSq[j] = sum[j]+x, sumSq[j]+x*x
		}
	}
	for j, x := range truth {
		mean := sum[j] / repeats
		scatter := math.Sqrt(sumSq[j]/repeats - mean*mean)
		near(t, "mean value", mean, x, 4*sigmas[j]/math.Sqrt(repeats))
		near(t, "scatter", scatter, sigmas[j], 4*sigmas[j]/math.Sqrt(2*repeats))
	}
}
