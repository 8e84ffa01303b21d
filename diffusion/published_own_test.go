package diffusion

import (
	"math"
	"strings"
	"testing"

	"bankfire/thermal"
	"bankfire/thermal/published"
	"gonum.org/v1/gonum/integrate/quad"
)

// G03, rows 3 to 6: the steady state where D follows the concentration itself.
// The flux is read in the middle.
func steadyOwn(t *testing.T, c *published.Check) {
	for i, own := range []func(float64) float64{growing(2), growing(5), func(v float64) float64 { return 1 + 10*v }} {
		p := slabOf(testSize, 0, 1, 0)
		p.Own = own
		s := both(t, 1e3*testSize*testSize, Options{}, fixed(p))
		judge(t, c, rowID(c, i+3), s, func(s solution) float64 { return s.at(testSize / 2) })
		if i == 0 {
			judge(t, c, rowID(c, 6), s, func(s solution) float64 {
				value, slope := s.read(testSize/2, 0, testSize)
				return own(value) * slope * testSize
			})
		}
	}
}

// G04: Polyanin and Zaitsev 2004, the separable solution of D = D0 exp(beta C).
func separable(t *testing.T, c *published.Check) {
	const beta, kappa = 2, 4
	dimensions := map[string]float64{"plane": 1, "cylinder": 2, "sphere": 3}
	for _, r := range c.Rows {
		in := numbers(t, r)
		d := dimensions[strings.Fields(r.Quantity)[0]]
		exact := func(x, g float64) float64 {
			return math.Log((math.Exp(beta)-kappa*x*x/(2*d))/(1+kappa*g)) / beta
		}
		problem := func(h *thermal.History) *Problem {
			rim := func(g float64) float64 { return exact(1, g/testSize/testSize) }
			p := moving(Shape(d-1), testSize, rim)(h)
			p.Own = growing(beta)
			p.Profile = func(x float64) float64 { return exact(x/testSize, 0) }
			return p
		}
		s := both(t, in[1]*testSize*testSize, Options{}, problem)
		judge(t, c, r.Row, s, func(s solution) float64 { return s.at(in[0] * testSize) })
	}
}

// front returns the outer or inner face of the last cell, on the way from the
// content of a crystal into what is empty, that holds more than a thousandth.
func (s solution) front() float64 {
	const empty = 1e-3
	faces, c := s.plan.Faces(), s.c
	if c[0] > empty {
		i := 0
		for i < len(c) && c[i] > empty {
			i++
		}
		return faces[i]
	}
	i := len(c)
	for i > 0 && c[i-1] > empty {
		i--
	}
	return faces[i]
}

// judgeFront judges the position of a front, in units of a length, within two cells.
func judgeFront(t *testing.T, c *published.Check, row string, s [2]solution, unit float64, position func(s solution) float64) {
	t.Helper()
	cell := (s[0].plan.Faces()[1] - s[0].plan.Faces()[0]) / unit
	c.Program(t, row, worst(c, row, s, position), published.Tol{Abs: 2 * cell})
}

// spreading is the solution of Pattle 1959 in d dimensions: where and how high a
// heap is that began as (1 - r^2)^(1/n).
type spreading struct{ d, n float64 }

func (p spreading) radius(g float64) float64 {
	return math.Pow(1+g*2*(p.d*p.n+2)/p.n, 1/(p.d*p.n+2))
}

func (p spreading) at(r, g float64) float64 {
	r1 := p.radius(g)
	return math.Pow(r1, -p.d) * math.Pow(math.Max(0, 1-r*r/(r1*r1)), 1/p.n)
}

// problem has the unit length of a crystal of 2.2.
func (p spreading) problem(unit float64) *Problem {
	return &Problem{
		Shape: Shape(p.d - 1), Zones: []Zone{{Outer: heapSize * unit}}, Law: testLaw, Own: power(p.n),
		Profile: func(r float64) float64 { return p.at(r/unit, 0) },
	}
}

const heapSize = 2.2

// G05: Pattle 1959, in 200 even cells.
func finiteFront(t *testing.T, c *published.Check) {
	const unit = testSize
	for i := range 6 {
		heap := spreading{d: float64(1 + i/2), n: float64(1 + i%2)}
		s := both(t, unit*unit, Options{Faces: uniform(0, heap.problem(unit).size(), 200)}, fixed(heap.problem(unit)))
		judgeFront(t, c, rowID(c, 3*i+1), s, unit, func(s solution) float64 { return s.front() / unit })
		judge(t, c, rowID(c, 3*i+2), s, func(s solution) float64 { return s.at(0) })
		judge(t, c, rowID(c, 3*i+3), s, func(s solution) float64 { return s.at(unit / 2) })
		for _, s := range s {
			t.Logf("%+v: content %.17g of what it was, least value %.2g", heap, content(s.plan, s.c)/content(s.plan, s.plan.Start(0)), least(s.c))
		}
	}
}

func least(c []float64) float64 {
	lo := math.Inf(1)
	for _, v := range c {
		lo = math.Min(lo, v)
	}
	return lo
}

// wideOpen is a crystal 10 sqrt(G) wide, empty at first, with its outer rim held
// at 1, where D follows the concentration itself.
func wideOpen(own func(float64) float64) *Problem {
	p := slabOf(testSize, nothing, 1, 0)
	p.Own = own
	return p
}

const wideRoot = testSize / 10

// wideCells are the 400 over eta = 0..10 that H01 asks for.
var wideCells = Options{Faces: uniform(0, testSize, 400)}

// H01: Fujita 1952; Storm 1951.
func fujita(t *testing.T, c *published.Check) {
	for i, lambda := range []float64{0.5, 0.75, -1, -3} {
		s := both(t, wideRoot*wideRoot, wideCells, fixed(wideOpen(func(v float64) float64 { return 1 / (1 - lambda*v) / (1 - lambda*v) })))
		mu := rootOf(t, func(mu float64) float64 { return math.SqrtPi*mu*math.Exp(mu*mu)*math.Erfc(mu) - lambda }, -2, 2)
		c.Formula(t, rowID(c, 6*i+1), mu, c.Exact(rowID(c, 6*i+1)))
		judge(t, c, rowID(c, 6*i+2), s, func(s solution) float64 { return content(s.plan, s.c) / wideRoot })
		for j, eta := range []float64{0.5, 1, 2, 4} {
			judge(t, c, rowID(c, 6*i+3+j), s, func(s solution) float64 { return s.at(testSize - eta*wideRoot) })
		}
	}
}

// ownLaws are those of H02, in its order.
var ownLaws = []func(float64) float64{
	func(v float64) float64 { return 1 + v },
	func(v float64) float64 { return 1 + 10*v },
	func(v float64) float64 { return math.Pow(10, v) },
	func(v float64) float64 { return math.Pow(10, -v) },
	func(v float64) float64 { return math.Exp(3 * v) },
}

// H02: Crank 1975, chapters 7 and 9.
func ownUptake(t *testing.T, c *published.Check) {
	for i, own := range ownLaws {
		s := both(t, wideRoot*wideRoot, wideCells, fixed(wideOpen(own)))
		judge(t, c, rowID(c, 6*i+1), s, func(s solution) float64 { return content(s.plan, s.c) / wideRoot })
		for j, eta := range []float64{0.5, 1, 2, 3, 4} {
			judge(t, c, rowID(c, 6*i+2+j), s, func(s solution) float64 { return s.at(testSize - eta*wideRoot) })
		}
	}
}

// H03: Polubarinova-Kochina 1962; Heaslet and Alksne 1961. 200 even cells over
// eta = 0..2.
func emptyHalfSpace(t *testing.T, c *published.Check) {
	const root = testSize / 2
	for i := range 2 {
		s := both(t, root*root, even(testSize), fixed(wideOpen(power(float64(i+1)))))
		judgeFront(t, c, rowID(c, 2*i+1), s, root, func(s solution) float64 { return (testSize - s.front()) / root })
		judge(t, c, rowID(c, 2*i+2), s, func(s solution) float64 { return content(s.plan, s.c) / root })
	}
}

// H04: a wave that keeps its speed. 200 even cells over twice the way that it goes.
func travellingWave(t *testing.T, c *published.Check) {
	const unit = testSize / 2
	problem := func(h *thermal.History) *Problem {
		p := moving(Slab, testSize, func(g float64) float64 { return g / unit / unit })(h)
		p.Own = power(1)
		return p
	}
	s := both(t, unit*unit, even(testSize), problem)
	judge(t, c, "H04.01", s, func(s solution) float64 { return s.at(testSize - unit/4) })
	judgeFront(t, c, "H04.02", s, unit, func(s solution) float64 { return (testSize - s.front()) / unit })
}

// H05: Crank 1975, section 10.6. What an uptake of M = 2 sqrt(Dbar t/pi) says of
// Dbar is as well known as M in H02 is asked to be; the weighted mean is a formula.
func weightedMean(t *testing.T, c *published.Check) {
	const p, uptake = 5.0 / 3, 3e-4
	for i, own := range ownLaws[1:3] {
		s := both(t, wideRoot*wideRoot, wideCells, fixed(wideOpen(own)))
		row := rowID(c, 2*i+1)
		mean := func(s solution) float64 { m := content(s.plan, s.c) / wideRoot; return math.Pi / 4 * m * m }
		c.Program(t, row, worst(c, row, s, mean), published.Tol{Abs: math.Sqrt(math.Pi*c.Row(row).Expected) * uptake})
		c.Formula(t, rowID(c, 2*i+2), p*weightedIntegral(own), c.Exact(rowID(c, 2*i+2)))
	}
}

// weightedIntegral returns the integral of v^(2/3) D dv from 0 to 1, with v = z^3
// smooth.
func weightedIntegral(own func(float64) float64) float64 {
	return quad.Fixed(func(z float64) float64 { return 3 * math.Pow(z, 4) * own(z*z*z) }, 0, 1, 40, nil, 0)
}

// The manufactured solution of G06 and G07, in SI.
const (
	madeMean, madeSwing, madePeriod = 1273.15, 50, 86400.0
	madeSize, madeFade              = 1e-4, 43200.0
	madeHost, madeHostWave          = 0.5, 0.2
	madeC, madeWave                 = 1, 0.5
	madeD0, madeE                   = 1e-3, 250e3
	madeB, madeG, madeA             = -1, 1.5, 25e3
)

func madeTemp(t float64) float64 { return madeMean + madeSwing*math.Sin(2*math.Pi*t/madePeriod) }

// made is the manufactured solution at a place and time.
type made struct{ c, d, flux, source float64 }

// madeAt differentiates the solution by hand, with n the exponent of the radius:
//
//	J = -D (C' - C a X'),  S = dC/dt + J' + n J/x,  a = A/(R T).
func madeAt(n, x, t float64) made {
	const k = math.Pi / madeSize
	sin, cos := math.Sincos(k * x)
	a := madeA / (thermal.GasConstant * madeTemp(t))
	fade := madeWave * math.Exp(-t/madeFade)
	host, host1, host2 := madeHost+madeHostWave*cos, -madeHostWave*k*sin, -madeHostWave*k*k*cos
	c, c1, c2 := madeC+fade*cos, -fade*k*sin, -fade*k*k*cos
	d0 := madeD0 * math.Exp(-madeE/(thermal.GasConstant*madeTemp(t)))
	ofHost, ofOwn := 1+madeB*host, 1+madeG*c
	d, d1 := d0*ofHost*ofOwn, d0*(madeB*host1*ofOwn+ofHost*madeG*c1)
	drive := c1 - c*a*host1
	drive1 := c2 - c1*a*host1 - c*a*host2
	m := made{c: c, d: d, flux: -d * drive}
	m.source = -fade*cos/madeFade - d1*drive - d*drive1 + n*m.flux/x
	return m
}

func madeProblem(shape Shape) *Problem {
	return &Problem{
		Shape: shape, Zones: []Zone{{Outer: madeSize}}, Law: NewLaw(madeD0, madeE),
		Profile: func(r float64) float64 { return madeAt(0, r, 0).c },
		Host:    func(r float64) float64 { return madeHost + madeHostWave*math.Cos(math.Pi*r/madeSize) },
		LnK:     func(x, temp float64) float64 { return madeA * x / (thermal.GasConstant * temp) },
		Spread: func(r float64) float64 {
			return 1 + madeB*(madeHost+madeHostWave*math.Cos(math.Pi*r/madeSize))
		},
		Own:    func(c float64) float64 { return 1 + madeG*c },
		source: func(r, t float64) float64 { return madeAt(float64(shape), r, t).source },
	}
}

// madeHistory is the swing of temperature up to a time, in straight lines that
// keep within 2e-5 K of it.
func madeHistory(t *testing.T, until float64) *thermal.History {
	t.Helper()
	n := int(4000 * until / madePeriod)
	rows := &thermal.Rows{Time: uniform(0, until, n), Temp: make([]float64, n+1)}
	for i, at := range rows.Time {
		rows.Temp[i] = madeTemp(at)
	}
	return newHistory(t, thermal.Leg{Kind: thermal.Table, For: until, Rows: rows})
}

// madeRun solves the problem in n even cells and n even steps without damping.
func madeRun(t *testing.T, shape Shape, n int, h *thermal.History) solution {
	t.Helper()
	return solve(t, madeProblem(shape), Options{Faces: uniform(0, madeSize, n), Fractions: equalSteps(n), Damp: -1}, h)
}

// madeError is the largest error of a cell mean at the end of the history.
func madeError(s solution, h *thermal.History) float64 {
	want := make([]float64, len(s.c))
	addProfile(want, s.plan.problem.Shape, s.plan.grid, func(r float64) float64 { return madeAt(0, r, h.Life()).c })
	_, err := farthest(s.c, want)
	return err
}

// G06, G07: Roache 1998; Salari and Knupp 2000. Rows give D, the flux and the source
// at a place and time, which are formulas here, and C, which the program must find
// from the source: to 5e-5 in 400 cells and steps, and with second order.
func manufactured(shape Shape) func(t *testing.T, c *published.Check) {
	return func(t *testing.T, c *published.Check) {
		for i := 0; i < len(c.Rows); i += 4 {
			in := numbers(t, c.Rows[i])
			at := madeAt(float64(shape), in[0]*madeSize, in[1])
			s := madeRun(t, shape, 400, madeHistory(t, in[1]))
			for j, v := range []float64{at.source, s.at(in[0] * madeSize), at.d, at.flux} {
				row := c.Rows[i+j].Row
				if j == 1 {
					c.Program(t, row, v, published.Tol{Abs: 5e-5})
				} else {
					c.Formula(t, row, v, c.Exact(row))
				}
			}
		}
		h := madeHistory(t, madePeriod/2)
		wantOrder(t, 2, 0.15, []int{20, 40, 80, 160}, func(n int) float64 { return madeError(madeRun(t, shape, n, h), h) })
	}
}

// wantOrder prints the errors and the orders between one n and the next, and
// holds the orders within a bound.
func wantOrder(t *testing.T, order, within float64, ns []int, err func(n int) float64) {
	t.Helper()
	before := 0.0
	for i, n := range ns {
		e := err(n)
		if i == 0 {
			t.Logf("n %4d: error %.3e", n, e)
		} else {
			p := math.Log(before/e) / math.Log(float64(n)/float64(ns[i-1]))
			t.Logf("n %4d: error %.3e, order %.3f", n, e, p)
			if !(math.Abs(p-order) <= within) {
				t.Errorf("n %d: order %.3f, want %g within %g", n, p, order, within)
			}
		}
		before = e
	}
}
