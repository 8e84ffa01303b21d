package least

import (
	"fmt"
	"math"

	"bankfire/thermal/numeric"
	"gonum.org/v1/gonum/mat"
)

// Prior is what is known of a value beforehand: a Gaussian of standard
// deviation Sigma about Mean. Sigma +Inf is nothing; the value then counts from
// Mean where the data do not see it.
type Prior struct{ Mean, Sigma float64 }

// None is the prior of a value of which nothing is known.
var None = Prior{Sigma: math.Inf(1)}

// Bent is a value that does not enter the model linearly. The fit begins at
// each of Starts and never leaves Lo to Hi. One of the range and the prior's
// Sigma must be finite.
type Bent struct {
	Prior
	Lo, Hi float64
	Starts []float64
}

// Problem is data and what is known beforehand of the values of a model,
//
//	chi-square = sum r_i^2 + sum ((value - mean)/sigma)^2,
//	r_i = (obs_i - model_i)/sigma_i,
//
// where the r of correlated data are first made independent by White. Of a
// datum that is an upper limit,
//
//	r_i = -sqrt(-2 ln Phi(z)),  z = (obs_i - model_i)/sigma_i,
//
// with Phi the normal distribution: near 0 while the model stays below the
// limit, and near z where it is far above. Limits that White mixes with other
// data are an approximation: their likelihood is no sum of squares.
type Problem struct {
	Obs, Sigma []float64     // data and their standard deviations, above 0
	Limit      []bool        // true: obs is an upper limit; nil is none
	White      *mat.TriDense // inverse of the lower Cholesky factor of the correlation of the data; nil is none
	Linear     []Prior       // the values that enter linearly
	Bent       []Bent        // the values that do not
}

// Model fills dst for the given bent values: dst[0] with the part of the model
// that no linear value enters, dst[1+j] with what one unit of linear value j
// adds, one number a datum each. It must not keep its arguments.
type Model func(dst [][]float64, bent []float64)

// Solution is the best fit.
type Solution struct {
	ChiSq     float64 // NaN if the model is no number at each of the starts, or next to where the fit is
	Linear    []float64
	Sigma     []float64 // standard deviations of the linear values, the bent ones held; +Inf where the data do not see one
	Bent      []float64
	Model     []float64 // the model at the data
	Residuals []float64 // r_i before they are made independent
	Rank      int       // how many combinations of the linear values data and priors see
	Settled   bool      // false: the fit gave up while chi-square could still fall
}

// check panics where a problem makes no sense.
func (p *Problem) check() {
	n := len(p.Obs)
	if len(p.Sigma) != n || p.Limit != nil && len(p.Limit) != n {
		panic(fmt.Sprintf("least: %d data, %d sigmas, %d limits", n, len(p.Sigma), len(p.Limit)))
	}
	if p.White != nil {
		if rows, kind := p.White.Triangle(); rows != n || kind != mat.Lower {
			panic(fmt.Sprintf("least: %d data, %d rows of white, upper %v", n, rows, kind))
		}
	}
	for i, s := range p.Sigma {
		if !(s > 0) {
			panic(fmt.Sprintf("least: sigma %g of datum %d is not above 0", s, i))
		}
	}
	for j, v := range p.Linear {
		v.check("linear", j)
	}
	for i, b := range p.Bent {
		b.check(i)
	}
}

func (v Prior) check(kind string, j int) {
	if !(v.Sigma > 0) || math.IsNaN(v.Mean) || math.IsInf(v.Mean, 0) {
		panic(fmt.Sprintf("least: prior %g +- %g of %s value %d", v.Mean, v.Sigma, kind, j))
	}
}

func (v *Bent) check(i int) {
	v.Prior.check("bent", i)
	if !(v.Lo <= v.Hi) || math.IsInf(v.scale(), 1) {
		panic(fmt.Sprintf("least: range %g to %g of bent value %d, prior sigma %g", v.Lo, v.Hi, i, v.Sigma))
	}
	if len(v.Starts) == 0 {
		panic(fmt.Sprintf("least: bent value %d has no start", i))
	}
	for _, x := range v.Starts {
		if !(x >= v.Lo && x <= v.Hi) {
			panic(fmt.Sprintf("least: start %g of bent value %d outside %g to %g", x, i, v.Lo, v.Hi))
		}
	}
}

// scale is a length over which the value may change.
func (v *Bent) scale() float64 { return math.Min(v.Hi-v.Lo, v.Sigma) }

func (v Prior) chiSq(x float64) float64 {
	return square((x - v.Mean) / v.Sigma)
}

func (p *Problem) isLimit(i int) bool { return p.Limit != nil && p.Limit[i] }

// residual returns r of datum i for a model value y, and its slope by y.
func (p *Problem) residual(i int, y float64) (r, slope float64) {
	z := (p.Obs[i] - y) / p.Sigma[i]
	if !p.isLimit(i) {
		return z, -1 / p.Sigma[i]
	}
	if math.IsInf(z, 1) { // no model at all, not one below the limit
		return math.NaN(), math.NaN()
	}
	lnPhi, hazard := Normal(z)
	if lnPhi >= 0 {
		return 0, 0
	}
	r = -math.Sqrt(-2 * lnPhi)
	return r, hazard / (r * p.Sigma[i])
}

// row returns the slope and the right side of the linear equation
//
//	slope dy = right
//
// that stands for datum i near a model value y: slope*right is minus half the
// slope of r^2, and slope^2 half its curvature. A limit that is mixed with
// other data, or far exceeded, gets its own r and the slope of it instead: that
// is right to first order.
func (p *Problem) row(i int, y float64) (slope, right float64) {
	r, slope := p.residual(i, y)
	z := (p.Obs[i] - y) / p.Sigma[i]
	if !p.isLimit(i) || p.White != nil || !(z > farExceeded) {
		return slope, -r
	}
	_, hazard := Normal(z)
	curve := math.Sqrt(hazard * (hazard + z))
	if curve == 0 {
		return 0, 0
	}
	return -curve / p.Sigma[i], hazard / curve
}

// farExceeded is a z below which r is z but for ln(-z)/z^2, and hazard + z is
// lost in round-off.
const farExceeded = -1e3

// Normal returns ln Phi(z) of the normal distribution and its slope phi/Phi.
// Source: Abramowitz and Stegun (1964), 26.2.29, Phi(z) = erfc(-z/sqrt 2)/2.
func Normal(z float64) (lnPhi, hazard float64) {
	if z > 0 {
		above := math.Erfc(z/math.Sqrt2) / 2
		return math.Log1p(-above), math.Exp(-z*z/2) / (math.Sqrt(2*math.Pi) * (1 - above))
	}
	scaled := numeric.ErfcScaled(-z/math.Sqrt2) / 2 // Phi exp(z^2/2)
	return math.Log(scaled) - z*z/2, 1 / (math.Sqrt(2*math.Pi) * scaled)
}

// whiten makes residuals, or a column of their slopes, independent.
func (p *Problem) whiten(v []float64) {
	if p.White == nil {
		return
	}
	w := p.White.RawTriangular()
	for i := len(v) - 1; i >= 0; i-- {
		v[i] = dot(w.Data[i*w.Stride:i*w.Stride+i+1], v)
	}
}
