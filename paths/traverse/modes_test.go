package traverse

import (
	"math"
	"math/rand/v2"
	"testing"

	"gonum.org/v1/gonum/mat"
)

// moved returns what the modes, smoothed like the points, make of the covariance of
// the spline at its knots.
func moved(x []float64, modes [][]float64, width float64) *mat.Dense {
	n := len(x)
	sum := mat.NewDense(n, n, nil)
	for _, m := range modes {
		s := Smooth(x, m, width).value
		for i := range n {
			for j := range n {
				sum.Set(i, j, sum.At(i, j)+s[i]*s[j])
			}
		}
	}
	return sum
}

// smoother returns the matrix of the smoothing spline of Green and Silverman (1994,
// Nonparametric regression, section 2.1.2), solved densely:
//
//	(W + h^4 Q R^-1 Q')^-1 W.
func smoother(t *testing.T, x []float64, width float64) *mat.Dense {
	t.Helper()
	n := len(x)
	q, r, w := mat.NewDense(n, n-2, nil), mat.NewDense(n-2, n-2, nil), mat.NewDense(n, n, nil)
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
	var bend, left, out mat.Dense
	if err := bend.Solve(r, q.T()); err != nil {
		t.Fatal(err)
	}
	left.Mul(q, &bend)
	left.Scale(math.Pow(width/SmoothingWidth, 4), &left)
	for i := range x {
		share := (x[min(i+1, n-1)] - x[max(i-1, 0)]) / 2
		if i == 0 || i == n-1 {
			share *= 2
		}
		w.Set(i, i, share)
		left.Set(i, i, left.At(i, i)+share)
	}
	if err := out.Solve(&left, w); err != nil {
		t.Fatal(err)
	}
	return &out
}

// The modes have the covariance of the spline but for a hundredth, also between two
// points and at the ends, at uneven spacing and with uneven errors, points with none
// among them; and there are few of them.
func TestModesHaveTheCovariance(t *testing.T) {
	const leaves, roundOff = 0.01, 1e-9 // as the doc says
	rng := rand.New(rand.NewPCG(5, 6))
	for _, c := range []struct {
		n     int
		width float64
	}{{4, 3}, {20, 3}, {80, 8}, {120, 40}} {
		x, sigma := make([]float64, c.n), make([]float64, c.n)
		errors := mat.NewDense(c.n, c.n, nil)
		for i := range x {
			x[i], sigma[i] = float64(i)+0.8*rng.Float64(), 0.5+rng.Float64()
			if i%5 == 2 {
				sigma[i] = 0
			}
			errors.Set(i, i, sigma[i]*sigma[i])
		}
		s := smoother(t, x, c.width)
		var half, want mat.Dense
		half.Mul(s, errors)
		want.Mul(&half, s.T())
		modes, left := Modes(x, sigma, c.width, c.n)
		got := moved(x, modes, c.width)
		for i := range x {
			for j := range x {
				far := (leaves + roundOff) * math.Sqrt(want.At(i, i)*want.At(j, j))
				if !(math.Abs(got.At(i, j)-want.At(i, j)) <= far) {
					t.Errorf("%d points: covariance %g of points %d and %d, want %g +- %g", c.n, got.At(i, j), i, j, want.At(i, j), far)
				}
			}
		}
		if most := 3 + int(2.5*x[c.n-1]/c.width); left != 0 || len(modes) > min(most, c.n) {
			t.Errorf("%d points: %d modes leave out %g, want at most %d and none", c.n, len(modes), left, most)
		}
		if again, _ := Modes(x, sigma, c.width, c.n-1); len(again) > 0 && again[0][0] != modes[0][0] {
			t.Error("the first mode depends on how many there may be")
		}
	}
}

// In closed form, where the points are close: with errors sigma at a spacing of d, far
// from the ends the variance is sigma^2 d/h times the integral of kappa^2, 3/(8 sqrt 2),
// and at an end of that of the deflection there of a beam that rests on springs, by
// loads along it,
//
//	sqrt 2 exp(-u/sqrt 2) cos(u/sqrt 2),
//
// 3/(2 sqrt 2), four times as much (Hetenyi 1946, Beams on elastic foundation, chapter
// 2). The modes are of the whole as the draws from them are.
func TestModesInClosedForm(t *testing.T) {
	const (
		n, step, width = 801, 0.05, 6.0
		far            = 0.03 // what the modes may leave, and at an end spacing of 1/42 of h
	)
	h := width / SmoothingWidth
	x, sigma := even(n, step, func(float64) float64 { return 0.3 })
	modes, _ := Modes(x, sigma, width, n)
	got := moved(x, modes, width)
	for _, c := range []struct {
		at   int
		want float64
	}{{n / 2, 3 / (8 * math.Sqrt2)}, {0, 3 / (2 * math.Sqrt2)}, {n - 1, 3 / (2 * math.Sqrt2)}} {
		want := 0.3 * 0.3 * step / h * c.want
		if v := got.At(c.at, c.at); !(math.Abs(v/want-1) <= far) {
			t.Errorf("variance at point %d is %g, want %g", c.at, v, want)
		}
	}
}

// Modes that are too few are the first of those that are enough, and say what they
// leave out.
func TestModesTooFew(t *testing.T) {
	const n, width, few, roundOff = 60, 4.0, 12, 1e-9
	x, sigma := even(n, 1, func(float64) float64 { return 1 })
	modes, left := Modes(x, sigma, width, few)
	all, none := Modes(x, sigma, width, n)
	if len(modes) != few || none != 0 || len(all) <= few || modes[few-1][0] != all[few-1][0] {
		t.Fatalf("%d modes of %d, the last beginning with %g and %g", len(modes), len(all), modes[few-1][0], all[few-1][0])
	}
	s := smoother(t, x, width)
	var whole mat.Dense
	whole.Mul(s, s.T())
	got, worst := moved(x, modes, width), 0.0
	for i := range x {
		worst = max(worst, 1-got.At(i, i)/whole.At(i, i))
	}
	if !(math.Abs(left-worst) <= roundOff) || !(left > 0.1) {
		t.Errorf("%g is left out, said to be %g", worst, left)
	}
}
