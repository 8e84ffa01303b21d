// Package yardstick is what tests measure speeds against: ratios to it hold on any machine. Only tests import it.
package yardstick

import (
	"math"
	"time"
)

// Cells is on how many cells the reference kernel works.
const Cells = 200

// Kernel is the reference: one path by Crank-Nicolson, the matrix factored in every step and solved by plain elimination
// from one end (Thomas 1949).
type Kernel struct{ c, factor, rhs []float64 }

// NewKernel is a kernel with a start.
func NewKernel() *Kernel {
	k := &Kernel{c: make([]float64, Cells), factor: make([]float64, Cells), rhs: make([]float64, Cells)}
	for i := range k.c {
		k.c[i] = float64(i % 7)
	}
	return k
}

// Run does a number of steps of changing length.
func (k *Kernel) Run(steps int) {
	for i := range steps {
		k.step(0.5 + float64(i%10))
	}
}

// step solves (I - r/2 L) w = c and puts c to 2 w - c, sealed at one end and held at 70 at the other.
func (k *Kernel) step(r float64) {
	c, factor, rhs := k.c, k.factor[:len(k.c)], k.rhs[:len(k.c)]
	half := r / 2
	n := len(c)
	inv := 1 / (1 + half)
	factor[0], rhs[0] = half*inv, c[0]*inv
	for i := 1; i < n; i++ {
		diagonal, right := 1+2*half, c[i]
		if i == n-1 {
			diagonal, right = 1+3*half, c[i]+2*half*70
		}
		inv = 1 / (diagonal - half*factor[i-1])
		factor[i] = half * inv
		rhs[i] = (right + half*rhs[i-1]) * inv
	}
	w := rhs[n-1]
	c[n-1] = 2*w - c[n-1]
	for i := n - 2; i >= 0; i-- {
		w = rhs[i] + factor[i]*w
		c[i] = 2*w - c[i]
	}
}

// Steps is the time of one call of f in steps of the kernel, the least of some tries that take turns: what else the machine
// does can spoil a measurement, not improve it. It stops at the first that is no more than enough. f should take a few
// hundred microseconds.
func Steps(f func(), enough float64) float64 {
	const tries, steps = 8, 200
	k, best := NewKernel(), math.Inf(1)
	for try := 0; try < tries && !(best <= enough); try++ {
		best = min(best, Timed(f)/(Timed(func() { k.Run(steps) })/steps))
	}
	return best
}

// Timed is the least time of one call of f among some, s.
func Timed(f func()) float64 {
	best := math.Inf(1)
	for range 5 {
		start := time.Now()
		f()
		best = min(best, time.Since(start).Seconds())
	}
	return best
}
