package paths

import "math"

// basin is a function of deviations about the point z: value, gradient and second
// derivatives, row by row.
type basin struct {
	value         float64
	z, grad, bend []float64
	low           []float64 // scratch: the factor of the second derivatives
}

// reset makes room for n deviations.
func (b *basin) reset(n int) {
	if cap(b.bend) < n*n {
		b.z, b.grad, b.bend, b.low = make([]float64, n), make([]float64, n), make([]float64, n*n), make([]float64, n*n)
	}
	b.z, b.grad, b.bend, b.low = b.z[:n], b.grad[:n], b.bend[:n*n], b.low[:n*n]
}

// hold keeps deviation i where it is.
func (b *basin) hold(i int) {
	n := len(b.z)
	for j := range n {
		b.bend[i*n+j], b.bend[j*n+i] = 0, 0
	}
	b.grad[i], b.bend[i*n+i] = 0, 1
}

// size is the sum of the second derivatives by each deviation.
func (b *basin) size() float64 {
	sum := 0.0
	for i := range b.z {
		sum += math.Abs(b.bend[i*len(b.z)+i])
	}
	return sum
}

// step leaves in move where from the point the parabola has its lowest point, its
// second derivatives raised by damp, and returns how far that is below. It is not ok
// where the parabola has none. It is by Cholesky's factors.
func (b *basin) step(move []float64, damp float64) (gain float64, ok bool) {
	n := len(b.z)
	for i := range n {
		for j := range i + 1 {
			x := b.bend[i*n+j]
			if i == j {
				x += damp
			}
			for k := range j {
				x -= float64(b.low[i*n+k] * b.low[j*n+k])
			}
			switch {
			case i != j:
				b.low[i*n+j] = x / b.low[j*n+j]
			case x > 0:
				b.low[i*n+i] = math.Sqrt(x)
			default:
				return 0, false
			}
		}
	}
	for i := range n {
		x := -b.grad[i]
		for k := range i {
			x -= float64(b.low[i*n+k] * move[k])
		}
		move[i] = x / b.low[i*n+i]
	}
	for i := n - 1; i >= 0; i-- {
		x := move[i]
		for k := i + 1; k < n; k++ {
			x -= float64(b.low[k*n+i] * move[k])
		}
		move[i] = x / b.low[i*n+i]
	}
	return -dot(b.grad, move) / 2, true
}
