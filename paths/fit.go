package paths

import (
	"math"

	"bankfire/paths/study"
	"gonum.org/v1/gonum/mat"
)

// rankCut is the part of the largest below which a column, or a singular value
// of columns brought to equal length, is one of round-off: a free value or a
// combination of free values that the data do not see. It is left at its base.
const rankCut = 1e-10

// fit is a weighted linear least-squares problem: data, and free values with
// or without a prior,
//
//	chi-square = sum ((obs - y0 - sum x_j y_j)/sigma)^2 + sum (x_j/prior_j)^2.
//
// A free value x_j is counted from its base.
type fit struct {
	obs, sigma []float64
	free       []study.FreeValue
}

// fitted is the solution of a fit.
type fitted struct {
	chiSq  float64
	values []float64 // x_j
	sigmas []float64 // standard deviations of x_j; +Inf where the data do not see it
}

// solve fits the columns seen: seen[0] is y0, seen[1+j] is y_j.
func (f *fit) solve(seen [][]float64) fitted {
	n, k := len(f.obs), len(f.free)
	b := make([]float64, n)
	for i := range b {
		b[i] = (f.obs[i] - seen[0][i]) / f.sigma[i]
	}
	if k == 0 {
		return fitted{chiSq: dot(b, b)}
	}
	a, rhs := f.system(seen, b)
	lengths := f.level(a)
	out := fitted{values: make([]float64, k), sigmas: make([]float64, k)}
	var svd mat.SVD
	if !svd.Factorize(a, mat.SVDThin) {
		out.chiSq = math.NaN()
		return out
	}
	f.invert(&svd, rhs, &out)
	x := mat.NewVecDense(k, out.values)
	var residual mat.VecDense
	residual.MulVec(a, x)
	residual.SubVec(rhs, &residual)
	out.chiSq = mat.Dot(&residual, &residual)
	for j, l := range lengths {
		out.values[j] /= l
		out.sigmas[j] /= l
	}
	return out
}

// level brings the columns to length 1, so that a narrow prior on one value
// does not hide the others, and returns what they were divided by. Columns that
// are nothing but round-off become zero.
func (f *fit) level(a *mat.Dense) []float64 {
	n, k := len(f.obs), len(f.free)
	longest := 0.0
	for j := range k {
		longest = math.Max(longest, mat.Norm(a.Slice(0, n, j, j+1), 2))
	}
	lengths := make([]float64, k)
	for j := range k {
		column := a.ColView(j).(*mat.VecDense)
		lengths[j] = mat.Norm(column, 2)
		if !f.free[j].HasPrior && lengths[j] <= rankCut*longest {
			lengths[j] = 1
			column.Zero()
		}
		column.ScaleVec(1/lengths[j], column)
	}
	return lengths
}

// system stacks the data over the priors, each row divided by its sigma.
func (f *fit) system(seen [][]float64, b []float64) (*mat.Dense, *mat.VecDense) {
	n, k := len(f.obs), len(f.free)
	a, rhs := mat.NewDense(n+k, k, nil), mat.NewVecDense(n+k, nil)
	for i, v := range b {
		rhs.SetVec(i, v)
		for j := range k {
			a.Set(i, j, seen[1+j][i]/f.sigma[i])
		}
	}
	for j, v := range f.free {
		if v.HasPrior {
			a.Set(n+j, j, 1/v.Prior.Sigma)
		}
	}
	return a, rhs
}

// invert fills the values of least norm and their standard deviations from the
// decomposition A = U S V^T.
func (f *fit) invert(svd *mat.SVD, rhs *mat.VecDense, out *fitted) {
	var u, v mat.Dense
	svd.UTo(&u)
	svd.VTo(&v)
	s := svd.Values(nil)
	k := len(s)
	for c := range k {
		if s[c] <= rankCut*s[0] {
			for j := range k {
				if math.Abs(v.At(j, c)) > unseen {
					out.sigmas[j] = math.Inf(1)
				}
			}
			continue
		}
		w := mat.Dot(u.ColView(c), rhs) / s[c]
		for j := range k {
			out.values[j] += w * v.At(j, c)
			out.sigmas[j] += (v.At(j, c) / s[c]) * (v.At(j, c) / s[c])
		}
	}
	for j := range out.sigmas {
		out.sigmas[j] = math.Sqrt(out.sigmas[j])
	}
}

// unseen is the part of a free value in an unseen combination that makes the
// value itself unseen.
const unseen = 1e-6

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

func dot(a, b []float64) float64 {
	sum := 0.0
	for i := range a {
		sum += a[i] * b[i]
	}
	return sum
}
