package least

import (
	"fmt"
	"math"
	"math/big"
	"testing"
)

// digits is the precision of the reference in bits: Phi(-40) is 2^-1164 of the
// terms that cancel, and 200 bits more make the rest exact.
const digits = 2600

func exact(x float64) *big.Float { return new(big.Float).SetPrec(digits).SetFloat64(x) }

// expBig is e^x of x >= 0 by its power series.
func expBig(x *big.Float) *big.Float {
	sum, term := exact(1), exact(1)
	for n := 1; term.Sign() != 0 && term.MantExp(nil) > sum.MantExp(nil)-digits; n++ {
		term.Mul(term, x).Quo(term, exact(float64(n)))
		sum.Add(sum, term)
	}
	return sum
}

// piBig is pi by Machin's formula, 16 atan 1/5 - 4 atan 1/239.
func piBig() *big.Float {
	atan := func(q float64) *big.Float {
		sum, power := exact(0), new(big.Float).Quo(exact(1), exact(q))
		for n := 0; power.MantExp(nil) > -digits; n++ {
			term := new(big.Float).Quo(power, exact(float64(1-2*(n%2))*float64(2*n+1)))
			sum.Add(sum, term)
			power.Quo(power, exact(q*q))
		}
		return sum
	}
	a, b := atan(5), atan(239)
	return a.Mul(a, exact(16)).Sub(a, b.Mul(b, exact(4)))
}

// normalBig returns Phi(z), 1 - Phi(z) and phi(z): Abramowitz and Stegun (1964),
// 26.2.10, Phi = 1/2 + phi (z + z^3/3 + z^5/(3 5) + ...).
func normalBig(z float64) (below, above, density *big.Float) {
	x := exact(z)
	square := new(big.Float).Mul(x, x)
	density = expBig(new(big.Float).Quo(square, exact(2)))
	root := piBig()
	root.Sqrt(root.Mul(root, exact(2)))
	density.Quo(exact(1), density.Mul(density, root))

	series, term := exact(0), new(big.Float).Copy(x)
	for n := 3.0; term.Sign() != 0 && term.MantExp(nil) > -2*digits; n += 2 {
		series.Add(series, term)
		term.Mul(term, square).Quo(term, exact(n))
	}
	series.Mul(series, density)
	below = new(big.Float).Add(exact(0.5), series)
	above = new(big.Float).Sub(exact(0.5), series)
	return below, above, density
}

func float(x *big.Float) float64 {
	f, _ := x.Float64()
	return f
}

// limitBig returns r of a limit and its slope by z.
func limitBig(z float64) (r, slope float64) {
	below, above, density := normalBig(z)
	mantissa := new(big.Float)
	exponent := below.MantExp(mantissa)
	lnPhi := math.Log(float(mantissa)) + float64(exponent)*math.Ln2
	if z > -1 {
		lnPhi = math.Log1p(-float(above))
	}
	r = -math.Sqrt(-2 * lnPhi)
	return r, -float(new(big.Float).Quo(density, below)) / r
}

// The residual of a limit and its slope, from far above the limit to far below
// it, against 2600 bits.
func TestLimitResidual(t *testing.T) {
	const relative = 1e-13 // z^2/2 rounded, 1e-16 of 800
	const underflow = 1e-150
	for _, z := range []float64{-40, -37.5, -30, -20, -12, -8, -5, -3, -2, -1.5, -1, -0.5, -1e-3, -1e-9, 0,
		1e-9, 1e-3, 0.5, 1, 1.5, 2, 3, 5, 8, 12, 20, 30, 37, 38, 38.5, 40} {
		t.Run(fmt.Sprint(z), func(t *testing.T) {
			const sigma = 0.25
			p := Problem{Obs: []float64{1}, Sigma: []float64{sigma}, Limit: []bool{true}}
			r, slope := p.residual(0, 1-z*sigma)
			wantR, wantSlope := limitBig(z)
			if diff := math.Abs(r - wantR); !(diff <= relative*math.Abs(wantR)+underflow) {
				t.Errorf("r = %.17g, want %.17g", r, wantR)
			}
			if z > 38 { // r is too small for digits of its slope
				return
			}
			wantSlope /= -sigma
			if diff := math.Abs(slope - wantSlope); !(diff <= relative*math.Abs(wantSlope)+underflow) {
				t.Errorf("slope = %.17g, want %.17g", slope, wantSlope)
			}
		})
	}
}

// The row that stands for a limit has the slope of r^2/2, and by differences
// its curvature.
func TestLimitRow(t *testing.T) {
	const h, relative = 1e-4, 1e-6 // differences of slopes at h lose h^2 and 1e-16/h
	p := Problem{Obs: []float64{0}, Sigma: []float64{1}, Limit: []bool{true}}
	half := func(y float64) float64 {
		r, slope := p.residual(0, y)
		return r * slope
	}
	for _, z := range []float64{-30, -5, -1, 0, 1, 3, 6} {
		t.Run(fmt.Sprint(z), func(t *testing.T) {
			slope, right := p.row(0, -z)
			if want := -half(-z); !(math.Abs(slope*right-want) <= 1e-12*math.Abs(want)) {
				t.Errorf("slope of r^2/2: got %g, want %g", -slope*right, -want)
			}
			want := (half(-z+h) - half(-z-h)) / (2 * h)
			if !(math.Abs(slope*slope-want) <= relative*math.Abs(want)) {
				t.Errorf("curvature: got %g, want %g", slope*slope, want)
			}
		})
	}
}

// Very far beyond a limit r is z, very far below it nothing, and no model is no
// fit.
func TestLimitWithoutBounds(t *testing.T) {
	tests := []struct{ z, r, slope float64 }{
		{-1e4, -1e4, -1}, {-1e7, -1e7, -1}, {-1e150, -1e150, -1}, {1e4, 0, 0}, {1e300, 0, 0},
		{math.NaN(), math.NaN(), math.NaN()}, {math.Inf(1), math.NaN(), math.NaN()},
	}
	p := Problem{Obs: []float64{0}, Sigma: []float64{1}, Limit: []bool{true}}
	for _, test := range tests {
		t.Run(fmt.Sprint(test.z), func(t *testing.T) {
			const far = 3e-7 // ln(z^2 2 pi)/(2 z^2) at 1e4 is 1.1e-7
			r, slope := p.residual(0, -test.z)
			rowSlope, right := p.row(0, -test.z)
			for _, pair := range [][2]float64{{r, test.r}, {slope, test.slope}, {rowSlope, test.slope}, {-right, test.r}} {
				got, want := pair[0], pair[1]
				if math.IsNaN(want) != math.IsNaN(got) || math.Abs(got-want) > far*math.Abs(want) {
					t.Errorf("r %g, slope %g, row %g %g; want %g, %g", r, slope, rowSlope, right, test.r, test.slope)
				}
			}
		})
	}
}
