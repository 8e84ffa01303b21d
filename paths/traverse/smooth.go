package traverse

import (
	"fmt"
	"math"
	"sort"
)

// Spline is a natural cubic spline, constant beyond its first and last knot.
type Spline struct {
	at, value, bend []float64 // knots, value and second derivative there
}

// SmoothingWidth is the full width at half maximum of the kernel of a smoothing
// spline,
//
//	kappa(u) = exp(-|u|/sqrt 2) sin(|u|/sqrt 2 + pi/4)/2,
//
// twice sqrt 2 times the root of exp(v) = 2 (sin v + cos v).
const SmoothingWidth = 2.866557563380696

// Smooth returns the smoothing spline f through points y at x, ascending, that
// makes
//
//	sum of w_i (y_i - f(x_i))^2 + h^4 integral of f''^2 dx,  h = width/SmoothingWidth,
//
// least, w_i being the half of the distance between the neighbours of point i (at
// an end, the distance to the one there is). So weighted, it is the mean of y under
// kappa((x - x_i)/h)/h whatever the spacing, where that is well below width and an
// end is not near: a wave of wavelength L is left with 1/(1 + (2 pi h/L)^4) of its
// height. A straight line stays one. Smooth panics unless there are three points or
// more, x ascends and width is above 0.
//
// Sources: Reinsch (1967), Numer. Math. 10, 177-183, for the equations; Silverman
// (1984), Ann. Statist. 12, 898-916, for the kernel.
func Smooth(x, y []float64, width float64) *Spline {
	n := len(x)
	if n < 3 || len(y) != n || !(width > 0) {
		panic(fmt.Sprintf("traverse: a spline of %d positions, %d values, width %g m", n, len(y), width))
	}
	step, pull := make([]float64, n-1), make([]float64, n) // distances, and h^4/w
	for i := range step {
		if step[i] = x[i+1] - x[i]; !(step[i] > 0) {
			panic(fmt.Sprintf("traverse: position %g m of a spline does not come after %g m", x[i+1], x[i]))
		}
	}
	penalty := math.Pow(width/SmoothingWidth, 4)
	for i := range pull {
		inner, outer := step[max(i-1, 0)], step[min(i, n-2)]
		pull[i] = penalty / ((inner + outer) / 2)
	}
	s := &Spline{at: x, bend: make([]float64, n), value: append([]float64(nil), y...)}
	copy(s.bend[1:], bends(step, pull, y))
	for i := range s.value {
		s.value[i] -= pull[i] * s.kink(step, i)
	}
	return s
}

// kink is row i of Q bend: by how much the slope of the straight pieces through
// the second derivatives changes at knot i.
func (s *Spline) kink(step []float64, i int) float64 {
	sum := 0.0
	if i > 0 {
		sum += (s.bend[i-1] - s.bend[i]) / step[i-1]
	}
	if i < len(step) {
		sum += (s.bend[i+1] - s.bend[i]) / step[i]
	}
	return sum
}

// bends solves Reinsch's equations
//
//	(R + Q' P Q) bend = Q' y
//
// for the second derivatives at the inner knots, P being diagonal with the given
// pull: five diagonals, by Cholesky's factors L D L'.
func bends(step, pull, y []float64) []float64 {
	n := len(step) - 1
	d, e, f := make([]float64, n), make([]float64, n), make([]float64, n) // D, and L one and two below it
	b := make([]float64, n)
	for j := range n {
		p, q := 1/step[j], 1/step[j+1] // column j of Q is p, -(p + q), q
		diagonal := (step[j]+step[j+1])/3 + p*p*pull[j] + (p+q)*(p+q)*pull[j+1] + q*q*pull[j+2]
		b[j] = p*y[j] - (p+q)*y[j+1] + q*y[j+2]
		var below, beyond float64 // the matrix at (j, j-1) and (j, j-2)
		if j > 0 {
			before := 1 / step[j-1]
			below = step[j]/6 - p*(before+p)*pull[j] - p*(p+q)*pull[j+1]
		}
		if j > 1 {
			beyond = pull[j] / step[j-1] * p
		}
		if j > 1 {
			f[j] = beyond / d[j-2]
			below -= f[j] * d[j-2] * e[j-1]
			diagonal -= f[j] * beyond
			b[j] -= f[j] * b[j-2]
		}
		if j > 0 {
			e[j] = below / d[j-1]
			diagonal -= e[j] * below
			b[j] -= e[j] * b[j-1]
		}
		d[j] = diagonal
	}
	for j := n - 1; j >= 0; j-- {
		b[j] /= d[j]
		if j+1 < n {
			b[j] -= e[j+1] * b[j+1]
		}
		if j+2 < n {
			b[j] -= f[j+2] * b[j+2]
		}
	}
	return b
}

// At returns the spline at x.
func (s *Spline) At(x float64) float64 {
	last := len(s.at) - 1
	switch {
	case x <= s.at[0]:
		return s.value[0]
	case x >= s.at[last]:
		return s.value[last]
	}
	i := sort.SearchFloat64s(s.at, x)
	h := s.at[i] - s.at[i-1]
	b := (x - s.at[i-1]) / h
	a := 1 - b
	return a*s.value[i-1] + b*s.value[i] - h*h/6*a*b*((1+a)*s.bend[i-1]+(1+b)*s.bend[i])
}

// Range returns the least and the largest value between lo and hi: among those at
// both, at the knots and where the spline turns between them.
func (s *Spline) Range(lo, hi float64) (least, most float64) {
	least, most = math.Inf(1), math.Inf(-1)
	see := func(x float64) {
		y := s.At(math.Min(math.Max(x, lo), hi))
		least, most = math.Min(least, y), math.Max(most, y)
	}
	see(lo)
	see(hi)
	for i, x := range s.at {
		see(x)
		if i > 0 {
			for _, b := range s.turns(i) {
				see(s.at[i-1] + b*(x-s.at[i-1]))
			}
		}
	}
	return least, most
}

// turns returns where the slope is zero between knots i-1 and i, as parts of the way:
// with m0 and m1 the second derivatives there, h apart, the slope at b is
//
//	y1 - y0 - h^2 (2 m0 + m1)/6 + h^2 (m0 b + (m1 - m0) b^2/2).
func (s *Spline) turns(i int) []float64 {
	h := s.at[i] - s.at[i-1]
	m0, m1 := h*h*s.bend[i-1], h*h*s.bend[i]
	a, half, c := (m1-m0)/2, m0/2, s.value[i]-s.value[i-1]-(2*m0+m1)/6
	root := half*half - a*c
	if !(root >= 0) {
		return nil
	}
	q := -(half + math.Copysign(math.Sqrt(root), half))
	var out []float64
	for _, b := range []float64{q / a, c / q} {
		if b > 0 && b < 1 {
			out = append(out, b)
		}
	}
	return out
}
