package traverse

import (
	"math"
	"math/rand/v2"
	"testing"

	"gonum.org/v1/gonum/mat"
)

// even returns n positions a step apart, and values of them.
func even(n int, step float64, value func(x float64) float64) (x, y []float64) {
	for i := range n {
		x = append(x, float64(i)*step)
		y = append(y, value(x[i]))
	}
	return x, y
}

// A spike is smoothed into the kernel of Silverman (1984, Ann. Statist. 12,
// 898-916), as high, as wide and as far below zero beside it as that is.
func TestSmoothKernel(t *testing.T) {
	const (
		n, step, width = 801, 0.05, 4.0
		far            = 3e-3 // of the kernel's height: what spacing of 1/28 of h leaves, (step/h)^2 and the ends
	)
	h := width / SmoothingWidth
	x, y := even(n, step, func(float64) float64 { return 0 })
	y[n/2] = 1 / step
	s := Smooth(x, y, width)
	kernel := func(u float64) float64 {
		u = math.Abs(u) / math.Sqrt2
		return math.Exp(-u) * math.Sin(u+math.Pi/4) / 2
	}
	for u := -6.0; u <= 6; u += 0.1 {
		got, want := s.At(x[n/2]+u*h)*h, kernel(u)
		if !(math.Abs(got-want) <= far*kernel(0)) {
			t.Errorf("kernel at %.1f is %g, want %g", u, got, want)
		}
	}
	if got, want := s.At(x[n/2]+width/2)/s.At(x[n/2]), 0.5; !(math.Abs(got-want) <= far) {
		t.Errorf("half the width from the middle it has %g of its height, want %g", got, want)
	}
}

// A wave is left with 1/(1 + (2 pi h/L)^4) of its height, at even and at uneven
// spacing alike: the width is the stated one, not one that goes with the points.
func TestSmoothWaves(t *testing.T) {
	const (
		width, size = 4.0, 60.0
		far         = 5e-3 // what the spacing and the ends leave
	)
	h := width / SmoothingWidth
	rng := rand.New(rand.NewPCG(1, 2))
	for _, length := range []float64{4, 8, 16} {
		x, y := even(1201, size/1200, func(x float64) float64 { return math.Cos(2 * math.Pi * (x - size/2) / length) })
		var ux, uy []float64
		for i := range x {
			if x[i] < 30 || rng.Float64() < 0.5 { // half the points are left out of one half
				ux, uy = append(ux, x[i]), append(uy, y[i])
			}
		}
		want := 1 / (1 + math.Pow(2*math.Pi*h/length, 4))
		for name, got := range map[string]float64{"even": Smooth(x, y, width).At(size / 2), "uneven": Smooth(ux, uy, width).At(size / 2)} {
			if !(math.Abs(got-want) <= far) {
				t.Errorf("%s: a wave of %g is left with %g, want %g", name, length, got, want)
			}
		}
	}
}

// The equations, solved by elimination on a full matrix: the values that a
// natural spline takes are R^-1 Q' of its second derivatives (Green and Silverman
// 1994, Nonparametric regression, section 2.1.2), so that those that are wanted
// solve (W + h^4 Q R^-1 Q') f = W y.
func TestSmoothAgainstDenseElimination(t *testing.T) {
	const roundOff = 1e-10
	rng := rand.New(rand.NewPCG(3, 4))
	for _, n := range []int{3, 4, 5, 12, 40} {
		x, y := make([]float64, n), make([]float64, n)
		for i := range x {
			x[i], y[i] = float64(i)+0.8*rng.Float64(), rng.NormFloat64()
		}
		q, r := mat.NewDense(n, n-2, nil), mat.NewDense(n-2, n-2, nil)
		for j := range n - 2 {
			a, b := x[j+1]-x[j], x[j+2]-x[j+1]
			q.Set(j, j, 1/a)
			q.Set(j+1, j, -1/a-1/b)
			q.Set(j+2, j, 1/b)
			r.Set(j, j, (a+b)/3)
			if j > 0 {
				r.Set(j, j-1, a/6)
				r.Set(j-1, j, a/6)
			}
		}
		const width = 3
		var bend, left mat.Dense
		if err := bend.Solve(r, q.T()); err != nil {
			t.Fatal(err)
		}
		left.Mul(q, &bend)
		left.Scale(math.Pow(width/SmoothingWidth, 4), &left)
		right := mat.NewVecDense(n, nil)
		for i := range x {
			w := (x[min(i+1, n-1)] - x[max(i-1, 0)]) / 2
			if i == 0 || i == n-1 {
				w *= 2
			}
			left.Set(i, i, left.At(i, i)+w)
			right.SetVec(i, w*y[i])
		}
		var want mat.VecDense
		if err := want.SolveVec(&left, right); err != nil {
			t.Fatal(err)
		}
		s := Smooth(x, y, width)
		for i := range x {
			if !(math.Abs(s.At(x[i])-want.AtVec(i)) <= roundOff) {
				t.Errorf("%d points: value %d is %g, want %g", n, i, s.At(x[i]), want.AtVec(i))
			}
		}
	}
}

// A straight line stays one whatever the width, and goes on level beyond its ends.
func TestSmoothKeepsLines(t *testing.T) {
	const roundOff = 1e-9
	line := func(x float64) float64 { return 0.3 + 0.02*x }
	for _, width := range []float64{0.01, 1, 20} {
		x, y := even(31, 0.7, line)
		s := Smooth(x, y, width)
		for at := 0.0; at <= 21; at += 0.13 {
			if !(math.Abs(s.At(at)-line(at)) <= roundOff) {
				t.Errorf("width %g: %g at %g, want %g", width, s.At(at), at, line(at))
			}
		}
		for at, want := range map[float64]float64{-5: line(0), 40: line(21)} {
			if !(math.Abs(s.At(at)-want) <= roundOff) {
				t.Errorf("width %g: %g at %g, want %g", width, s.At(at), at, want)
			}
		}
		if least, most := s.Range(3, 40); !(math.Abs(least-line(3)) <= roundOff && math.Abs(most-line(21)) <= roundOff) {
			t.Errorf("width %g: range %g to %g", width, least, most)
		}
	}
}

// White noise leaves no more than its part: the mean over many draws of the
// squares of value and slope is sigma^2 times the spacing times the integral of the
// square of the kernel, 3/(8 sqrt 2)/h, and of its slope, 1/(8 sqrt 2)/h^3, by
// Parseval from 1/(1 + k^4).
func TestSmoothNoise(t *testing.T) {
	const (
		n, step, width, sigma, draws = 201, 0.25, 4.0, 0.02, 400
		deviations                   = 4 // of a mean of squares over the draws
	)
	h := width / SmoothingWidth
	rng := rand.New(rand.NewPCG(5, 6))
	values, slopes := 0.0, 0.0
	for range draws {
		x, y := even(n, step, func(float64) float64 { return sigma * rng.NormFloat64() })
		s := Smooth(x, y, width)
		const dx = 1e-3
		middle := x[n/2]
		values += math.Pow(s.At(middle), 2) / draws
		slopes += math.Pow((s.At(middle+dx)-s.At(middle-dx))/(2*dx), 2) / draws
	}
	for name, check := range map[string][2]float64{
		"value": {values, sigma * sigma * step * 3 / (8 * math.Sqrt2) / h},
		"slope": {slopes, sigma * sigma * step / (8 * math.Sqrt2) / (h * h * h)},
	} {
		if got, want := check[0], check[1]; !(math.Abs(got/want-1) <= deviations*math.Sqrt(2.0/draws)) {
			t.Errorf("variance of the %s %g, want %g", name, got, want)
		}
	}
	if raw := 2 * sigma * sigma / (step * step); !(slopes < raw/200) {
		t.Errorf("variance of the slope %g, of that between raw points %g", slopes, raw)
	}
}

// Least and most of a spline are those of a fine search, wherever it turns.
func TestRangeAgainstSearch(t *testing.T) {
	const places = 20000
	rng := rand.New(rand.NewPCG(5, 6))
	for range 20 {
		var x, y []float64
		for i := range 7 {
			x, y = append(x, float64(i)+0.8*rng.Float64()), append(y, rng.NormFloat64())
		}
		s := Smooth(x, y, 0.5)
		lo, hi := rng.Float64()*3, 4+rng.Float64()*3
		least, most := math.Inf(1), math.Inf(-1)
		for k := range places + 1 {
			v := s.At(lo + (hi-lo)*float64(k)/places)
			least, most = math.Min(least, v), math.Max(most, v)
		}
		const fine = 1e-5 // of values of order one that bend, 7/20000 apart
		if gotLeast, gotMost := s.Range(lo, hi); !(math.Abs(gotLeast-least) <= fine && math.Abs(gotMost-most) <= fine) {
			t.Errorf("from %g to %g, a search finds %g to %g", gotLeast, gotMost, least, most)
		}
	}
}
