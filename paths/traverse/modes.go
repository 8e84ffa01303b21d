package traverse

import "math"

// leastLeft is the part of a point's variance that modes may leave out.
const leastLeft = 0.01

// Modes returns by how much points at x, with independent errors of standard
// deviation sigma, may be off in ways that are independent of each other and have a
// standard deviation of 1 each, as far as a spline of the given width through them
// tells: with the modes m_k smoothed like the points, the covariance of the spline's
// values,
//
//	S diag(sigma^2) S' = sum over k of (S m_k)(S m_k)',  S y the values of Smooth(x, y, width),
//
// is met but for leastLeft of the variance at any point, and of the geometric mean of
// two variances between two. They are one and a half to three a width, where points
// are much closer. Of more than most that are needed the last are left out: left is
// then the largest part of a point's variance that is missing, otherwise 0.
//
// The variance that is missing most decides what each further mode is made of, as in
// Cholesky's factors of a covariance with pivots (Harbrecht, Peters and Schneider
// 2012, Appl. Numer. Math. 62, 428-440). Modes panics where Smooth does.
func Modes(x, sigma []float64, width float64, most int) (modes [][]float64, left float64) {
	rows, missing := errorRows(x, sigma, width)
	whole := append([]float64(nil), missing...)
	var units [][]float64
	for {
		j, part := worst(missing, whole)
		if part <= leastLeft {
			return modes, 0
		}
		if len(modes) == most {
			return modes, part
		}
		unit := rows[j]
		for range 2 { // once more, for what round-off left
			for _, u := range units {
				take(unit, u, dot(unit, u))
			}
		}
		size := math.Sqrt(dot(unit, unit))
		mode := make([]float64, len(x))
		for i := range unit {
			unit[i] /= size
			mode[i] = sigma[i] * unit[i]
		}
		for i, v := range Smooth(x, mode, width).value {
			missing[i] -= v * v
		}
		units, modes = append(units, unit), append(modes, mode)
	}
}

// errorRows returns of each point what the errors of all, in units of their standard
// deviations, do to the spline there, and its variance.
func errorRows(x, sigma []float64, width float64) (rows [][]float64, variance []float64) {
	n := len(x)
	rows, variance = make([][]float64, n), make([]float64, n)
	for j := range rows {
		rows[j] = make([]float64, n)
	}
	spike := make([]float64, n)
	for i := range x {
		spike[i] = sigma[i]
		for j, v := range Smooth(x, spike, width).value {
			rows[j][i] = v
			variance[j] += v * v
		}
		spike[i] = 0
	}
	return rows, variance
}

// worst returns the point where the largest part of the whole is missing, and that
// part.
func worst(missing, whole []float64) (at int, part float64) {
	for j, w := range whole {
		if w > 0 && missing[j]/w > part {
			at, part = j, missing[j]/w
		}
	}
	return at, part
}

func dot(a, b []float64) float64 {
	sum := 0.0
	for i, v := range a {
		sum += v * b[i]
	}
	return sum
}

// take takes so many times b off a.
func take(a, b []float64, times float64) {
	for i, v := range b {
		a[i] -= times * v
	}
}
