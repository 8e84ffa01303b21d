package least

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"gonum.org/v1/gonum/mat"
)

// Singular values against gonum's, and what makes them a decomposition: columns
// of U S at right angles, V as good as orthogonal, a = U S V^T.
func TestRotations(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 1))
	random := func(i, j int) float64 { return rng.NormFloat64() }
	tests := []struct {
		name    string
		rows, k int
		f       func(i, j int) float64
	}{
		{"one column", 5, 1, random},
		{"random", 60, 5, random},
		{"many rows", 20000, 4, random},
		{"square", 4, 4, random},
		{"wide", 3, 5, random},
		{"Hilbert", 8, 6, func(i, j int) float64 { return 1 / float64(i+j+1) }},
		{"nearly the same", 50, 4, func(i, j int) float64 { return math.Cos(float64(i)) + 1e-7*rng.NormFloat64() }},
		{"the same", 50, 3, func(i, j int) float64 { return math.Cos(float64(i)) }},
		{"a column of zeros", 9, 3, func(i, j int) float64 { return float64(j%2) * rng.NormFloat64() }},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			const roundOff = 1e-12
			a, m := columns(test.k, test.rows), mat.NewDense(test.rows, test.k, nil)
			for j := range a {
				size := 0.0
				for i := range a[j] {
					a[j][i] = test.f(i, j)
					size = math.Max(size, math.Abs(a[j][i]))
				}
				for i := range a[j] { // so that gonum has the same sizes
					a[j][i] /= math.Max(size, 1e-300)
				}
				m.SetCol(j, a[j])
			}
			r := newRotations(test.k, test.rows)
			r.decompose(a)
			if r.sweep(test.k) {
				t.Errorf("not done after %d sweeps", mostSweeps)
			}
			for _, problem := range faults(&r, m, roundOff) {
				t.Error(problem)
			}
		})
	}
}

// faults lists what is wrong with a decomposition of m.
func faults(r *rotations, m *mat.Dense, tol float64) (list []string) {
	rows, k := m.Dims()
	us, v := mat.NewDense(rows, k, nil), mat.NewDense(k, k, nil)
	sum := 0.0
	for c := range k {
		us.SetCol(c, r.us[c])
		v.SetCol(c, r.v[c])
		sum += r.squares[c]
	}
	var back, unit mat.Dense
	back.Mul(us, v.T())
	back.Sub(&back, m)
	unit.Mul(v.T(), v)
	for c := range k {
		unit.Set(c, c, unit.At(c, c)-1)
	}
	size := math.Sqrt(sum)
	if worst := mat.Norm(&back, 2); !(worst <= tol*size) {
		list = append(list, fmt.Sprintf("U S V^T is off by %g", worst))
	}
	if worst := mat.Norm(&unit, 2); !(worst <= tol) {
		list = append(list, fmt.Sprintf("V is off by %g", worst))
	}
	var svd mat.SVD
	svd.Factorize(m, mat.SVDNone)
	for _, s := range svd.Values(nil) {
		nearest := math.Inf(1)
		for _, square := range r.squares {
			nearest = math.Min(nearest, math.Abs(math.Sqrt(square)-s))
		}
		if !(nearest <= tol*size) {
			list = append(list, fmt.Sprintf("singular value %g is off by %g", s, nearest))
		}
	}
	return list
}
