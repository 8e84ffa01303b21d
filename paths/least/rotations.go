package least

import (
	"math"
	"slices"
)

// unseen is the part of a value in a combination that the data do not see that
// makes the value itself unseen.
const unseen = 1e-6

// Where rotating stops: columns are orthogonal to round-off, or one is so short
// that it counts as nothing.
const (
	mostSweeps = 30
	orthogonal = 1e-13
)

// rotations is the scratch of a singular value decomposition a = U S V^T by
// rotations of pairs of columns (Hestenes 1958, J. SIAM 6, 51-90; Golub and Van
// Loan 1996, Matrix Computations, 8.6.3), which leaves small singular values of
// few columns their digits (Demmel and Veselic 1992, SIAM J. Matrix Anal. Appl.
// 13, 1204-1245).
type rotations struct {
	us, v   [][]float64 // columns of U S and of V
	squares []float64   // of the lengths of us
	sizes   []float64   // of the columns of a
}

func newRotations(cols, rows int) rotations {
	return rotations{
		us: columns(cols, rows), v: columns(cols, cols), squares: make([]float64, cols), sizes: make([]float64, cols),
	}
}

// solve fills x of least norm that minimises |a x - b|, and the standard
// deviation of each x if those of b are 1, +Inf where a does not see it. It
// returns the rank of a. Columns are first brought to equal size: the norm is
// that of the x times their sizes.
func (r *rotations) solve(x, sigma []float64, a [][]float64, b []float64) (rank int) {
	k := len(a)
	r.decompose(a)
	largest := slices.Max(r.squares[:k])
	clear(x)
	clear(sigma)
	for c, us := range r.us[:k] {
		ss := r.squares[c]
		seen := !(ss <= rankCut*rankCut*largest)
		if seen {
			rank++
		}
		w := dot(us, b) / ss
		for j := range k {
			switch part := r.v[c][j]; {
			case seen:
				x[j] += float64(w * part)
				sigma[j] += part * part / ss
			case math.Abs(part) > unseen:
				sigma[j] = math.Inf(1)
			}
		}
	}
	for j, l := range r.sizes[:k] {
		x[j] /= l
		sigma[j] = math.Sqrt(sigma[j]) / l
	}
	return rank
}

// decompose fills us and v for the columns of a divided by the largest number in
// each.
func (r *rotations) decompose(a [][]float64) {
	for j, column := range a {
		size := 0.0
		for _, v := range column {
			size = math.Max(size, math.Abs(v))
		}
		if size == 0 {
			size = 1
		}
		for i, v := range column {
			r.us[j][i] = v / size
		}
		r.sizes[j] = size
		clear(r.v[j])
		r.v[j][j] = 1
	}
	for range mostSweeps {
		if !r.sweep(len(a)) {
			return
		}
	}
}

// sweep makes each pair of columns orthogonal, and reports whether there was
// anything to do.
func (r *rotations) sweep(k int) (rotated bool) {
	for j, us := range r.us[:k] {
		r.squares[j] = dot(us, us)
	}
	for q := 1; q < k; q++ {
		for p := range q {
			pp, qq, pq := r.squares[p], r.squares[q], dot(r.us[p], r.us[q])
			if math.Abs(pq) <= orthogonal*math.Sqrt(pp*qq) || math.Min(pp, qq) <= square(orthogonal)*math.Max(pp, qq) {
				continue
			}
			rotated = true
			zeta := (qq - pp) / (2 * pq)
			t := math.Copysign(1/(math.Abs(zeta)+math.Sqrt(1+float64(zeta*zeta))), zeta)
			rotate(r.us[p], r.us[q], t)
			rotate(r.v[p][:k], r.v[q][:k], t)
			r.squares[p], r.squares[q] = pp-float64(t*pq), qq+float64(t*pq)
		}
	}
	return rotated
}

// rotate turns two columns by the angle of tangent t.
func rotate(p, q []float64, t float64) {
	cos := 1 / math.Sqrt(1+float64(t*t))
	sin := cos * t
	for i, v := range p {
		w := q[i]
		p[i] = float64(cos*v) - float64(sin*w)
		q[i] = float64(sin*v) + float64(cos*w)
	}
}
