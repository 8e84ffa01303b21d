package diffusion

import (
	"math"
	"strings"
	"testing"

	"bankfire/thermal/numeric"
	"bankfire/thermal/published"
)

// spreadSlab is a slab with D given as a function of x/size and a start of the
// same kind.
func spreadSlab(spread, start func(x float64) float64, inner, outer float64) *Problem {
	p := slabOf(testSize, inner, outer, 0)
	p.Spread = func(r float64) float64 { return spread(r / testSize) }
	p.Profile = func(r float64) float64 { return start(r / testSize) }
	return p
}

func rootOf(t *testing.T, f func(float64) float64, lo, hi float64) float64 {
	t.Helper()
	x, err := numeric.Root(f, lo, hi, 0)
	if err != nil {
		t.Fatal(err)
	}
	return x
}

// G01: the Euler equation. The start is the slowest mode.
func quadraticSpread(t *testing.T, c *published.Check) {
	phase := func(w float64) float64 { return math.Atan(-1 / (2 * w)) }
	w := rootOf(t, func(w float64) float64 { return w*math.Ln2 + phase(w) - math.Pi/2 }, 1, 4)
	phi := phase(w)
	c.Formula(t, "G01.01", w, c.Exact("G01.01"))
	c.Formula(t, "G01.02", phi, c.Exact("G01.02"))
	c.Formula(t, "G01.03", w*w+0.25, c.Exact("G01.03"))
	mode := func(x float64) float64 { return math.Cos(w*math.Log1p(x)+phi) / math.Sqrt(1+x) / math.Cos(phi) }
	p := spreadSlab(func(x float64) float64 { return (1 + x) * (1 + x) }, mode, nothing, 0)
	for _, r := range c.Rows[3:] {
		in := numbers(t, r)
		s := both(t, in[1]*testSize*testSize, Options{}, fixed(p))
		judge(t, c, r.Row, s, func(s solution) float64 { return s.at(in[0] * testSize) })
	}
}

// G02: Bessel functions of exp(-b x/2). The start is the slowest mode, so the
// profile keeps its shape and the value at 0 falls as exp(-lambda G). 400 even
// cells, since D changes 400-fold for b = 6.
func exponentialSpread(t *testing.T, c *published.Check) {
	for _, r := range c.Rows {
		in := numbers(t, published.Row{Quantity: strings.ReplaceAll(r.Quantity, ")", " ")})
		b := in[len(in)-1]
		lambda, mode := slowestMode(t, b)
		p := spreadSlab(func(x float64) float64 { return math.Exp(b * x) }, mode, nothing, 0)
		s := both(t, testSize*testSize/lambda, Options{Faces: uniform(0, testSize, 400)}, fixed(p))
		f := func(s solution) float64 { return s.at(in[0]*testSize) / s.at(0) }
		if strings.HasPrefix(r.Quantity, "decay rate") {
			f = func(s solution) float64 { return -lambda * math.Log(s.at(0)) }
		}
		// the row says "decay rate rel 2e-4"; the shape is held to as much
		c.Program(t, r.Row, worst(c, r.Row, s, f), published.Tol{Rel: 2e-4})
	}
}

// slowestMode returns the decay rate and the shape, 1 at 0, of the slowest mode
// under D = exp(b x), sealed at 0 and held at 0 at 1.
func slowestMode(t *testing.T, b float64) (lambda float64, mode func(x float64) float64) {
	t.Helper()
	at := func(k, x float64) float64 {
		z := math.Exp(-b * x / 2)
		return z * (math.J1(k*z)*math.Y0(k) - math.Y1(k*z)*math.J0(k))
	}
	last := func(k float64) float64 { return at(k, 1) }
	k := 0.01
	for math.Signbit(last(k)) == math.Signbit(last(k*1.05)) {
		k *= 1.05
	}
	k = rootOf(t, last, k, k*1.05)
	return k * b / 2 * k * b / 2, func(x float64) float64 { return at(k, x) / at(k, 0) }
}

// G03: the steady state through D = exp(b x), and through D that follows C itself.
func steadySpread(t *testing.T, c *published.Check) {
	for i, b := range []float64{2, -4} {
		p := spreadSlab(func(x float64) float64 { return math.Exp(b * x) }, func(float64) float64 { return 0 }, 0, 1)
		s := both(t, 1e3*testSize*testSize, Options{}, fixed(p))
		judge(t, c, rowID(c, i+1), s, func(s solution) float64 { return s.at(testSize / 2) })
	}
	steadyOwn(t, c)
}
