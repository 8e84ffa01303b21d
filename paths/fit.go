package paths

import (
	"math"

	"bankfire/paths/study"
	"bankfire/thermal"
)

// A value without a prior is given one that is too wide to matter where the
// data see the value: about the mean of the data, wide times their largest.
// Without it a plateau that has all but diffused away would be fitted at 1e10
// times anything measured, and the round-off of the solver be taken for its
// profile. A value whose error comes out above unseen times the largest is one
// that the data do not see.
const (
	wide   = 100
	unseen = 10
)

// fit is a weighted linear least-squares problem: data, and free values,
//
//	chi-square = sum ((obs - y0 - sum x_j y_j)/sigma)^2 + sum ((x_j - mean_j)/prior_j)^2.
//
// A free value x_j is counted from its base.
type fit struct {
	obs, sigma []float64
	free       []study.FreeValue
	prior      []thermal.Uncertain // of every free value
	largest    float64             // of the data, errors and all
}

// fitted is the solution of a fit.
type fitted struct {
	chiSq  float64
	values []float64 // x_j
	sigmas []float64 // standard deviations of x_j; +Inf where the data do not see it
	spent  int       // combinations of values without a prior that the data decided
}

func newFit(obs, sigma []float64, free []study.FreeValue) fit {
	f := fit{obs: obs, sigma: sigma, free: free}
	mean := 0.0
	for i, v := range obs {
		mean += v / float64(len(obs))
		f.largest = math.Max(f.largest, math.Abs(v)+sigma[i])
	}
	for _, v := range free {
		prior := thermal.Uncertain{Value: mean, Sigma: wide * f.largest}
		if v.HasPrior { // its base is the middle of its prior
			prior = thermal.Uncertain{Sigma: v.Prior.Sigma}
		}
		f.prior = append(f.prior, prior)
	}
	return f
}

// unconstrained counts the free values without a prior.
func (f *fit) unconstrained() int {
	n := 0
	for _, v := range f.free {
		if !v.HasPrior {
			n++
		}
	}
	return n
}

// solve fits the columns seen: seen[0] is y0, seen[1+j] is y_j. With z_j =
// (x_j - mean_j)/prior_j it is the least-squares problem A z = b of
//
//	A = (y_j prior_j/sigma; 1),  b = ((obs - y0 - sum mean_j y_j)/sigma; 0),
//
// whose columns are independent whatever the data see. It is solved by the
// modified process of Gram and Schmidt applied to A and b together, which is as
// stable as Householder's (Bjorck 1967, BIT 7, 1-21).
func (f *fit) solve(seen [][]float64) fitted {
	a, b := f.system(seen)
	k := len(a)
	r, z := make([][]float64, k), make([]float64, k)
	for j, q := range a {
		r[j] = make([]float64, k)
		r[j][j] = math.Sqrt(dot(q, q))
		for i := range q {
			q[i] /= r[j][j]
		}
		for l := j + 1; l < k; l++ {
			r[j][l] = takeOut(a[l], q)
		}
		z[j] = takeOut(b, q)
	}
	return f.read(inverse(r), z, dot(b, b))
}

// system returns the columns of A and b.
func (f *fit) system(seen [][]float64) (a [][]float64, b []float64) {
	n, k := len(f.obs), len(f.free)
	b = make([]float64, n+k)
	for i := range n {
		b[i] = (f.obs[i] - seen[0][i]) / f.sigma[i]
	}
	a = make([][]float64, k)
	for j, p := range f.prior {
		a[j] = make([]float64, n+k)
		a[j][n+j] = 1
		for i := range n {
			y := seen[1+j][i] / f.sigma[i]
			a[j][i] = y * p.Sigma
			b[i] -= y * p.Value
		}
	}
	return a, b
}

// takeOut removes from v its part along the unit vector q and returns how much
// it was.
func takeOut(v, q []float64) float64 {
	part := dot(v, q)
	for i := range v {
		v[i] -= part * q[i]
	}
	return part
}

// inverse returns that of an upper triangular matrix.
func inverse(r [][]float64) [][]float64 {
	inv := make([][]float64, len(r))
	for i := range inv {
		inv[i] = make([]float64, len(r))
	}
	for j := range r {
		inv[j][j] = 1 / r[j][j]
		for i := j - 1; i >= 0; i-- {
			for l := i + 1; l <= j; l++ {
				inv[i][j] -= r[i][l] * inv[l][j] / r[i][i]
			}
		}
	}
	return inv
}

// read turns the solution, in units of the priors, into values and their
// errors; inverse is that of R.
func (f *fit) read(inverse [][]float64, z []float64, chiSq float64) fitted {
	k := len(z)
	out := fitted{chiSq: chiSq, values: make([]float64, k), sigmas: make([]float64, k)}
	spent := 0.0
	for j, p := range f.prior {
		left := dot(inverse[j], inverse[j]) // variance, as a part of the prior's
		out.values[j] = p.Value + p.Sigma*dot(inverse[j], z)
		out.sigmas[j] = p.Sigma * math.Sqrt(left)
		if f.free[j].HasPrior {
			continue
		}
		spent += 1 - left
		if out.sigmas[j] > unseen*f.largest {
			out.sigmas[j] = math.Inf(1)
		}
	}
	out.spent = int(math.Round(spent))
	return out
}

func dot(a, b []float64) float64 {
	sum := 0.0
	for i := range a {
		sum += a[i] * b[i]
	}
	return sum
}
