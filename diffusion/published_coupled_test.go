package diffusion

import (
	"math"
	"slices"
	"strconv"
	"strings"
	"testing"

	"bankfire/thermal"
	"bankfire/thermal/published"
)

// The coupling of checks F01, F02 and F04: RT ln K = A X.
const (
	couplingA    = 25e3    // J/mol
	couplingTemp = 1273.15 // K
)

// drift is ln K = a X/(RT), a in J/mol.
func drift(a float64) func(x, temp float64) float64 {
	return func(x, temp float64) float64 { return a * x / (thermal.GasConstant * temp) }
}

// fixedLnK is ln K = p X at every temperature.
func fixedLnK(p float64) func(x, temp float64) float64 {
	return func(x, temp float64) float64 { return p * x }
}

// bothCoupled runs a problem with ln K = a X/(RT) twice to a diffusion integral of
// g, m2: along a hold at couplingTemp, and along a ramp from 950 to 1200 K with K
// kept at its value at couplingTemp, so that there D alone matters. The smallest
// length that matters is sqrt(2 g) unless o has another.
func bothCoupled(tb testing.TB, g, a float64, o Options, problem func(h *thermal.History) *Problem) [2]solution {
	tb.Helper()
	if o.Finest == 0 {
		o.Finest = math.Sqrt(2 * g)
	}
	hold := newHistory(tb, thermal.Leg{Kind: thermal.Hold, For: g / math.Exp(testLaw.LnD(couplingTemp)), T0: couplingTemp})
	ramp := rampOf(tb, g)
	onHold, onRamp := problem(hold), problem(ramp)
	onHold.LnK = drift(a)
	onRamp.LnK = fixedLnK(a / (thermal.GasConstant * couplingTemp))
	return [2]solution{solve(tb, onHold, o, hold), solve(tb, onRamp, o, ramp)}
}

// hostOf is a slab of one zone with a host, X as a function of r/testSize.
func hostOf(host func(x float64) float64, inner, outer, start float64) *Problem {
	p := slabOf(testSize, inner, outer, start)
	p.Host = func(r float64) float64 { return host(r / testSize) }
	return p
}

// lastNumber returns what stands behind the last equals sign of a row's quantity.
func lastNumber(t *testing.T, r published.Row) float64 {
	t.Helper()
	v, err := strconv.ParseFloat(strings.TrimSpace(r.Quantity[strings.LastIndex(r.Quantity, "=")+1:]), 64)
	if err != nil {
		t.Fatalf("row %s: %v", r.Row, err)
	}
	return v
}

// atRest is a diffusion integral, in squares of the size, after which nothing
// moves any more; the check asks for 3.
const atRest = 30

// B14: Crank 1975, sections 2.4.1 and 2.4.2. Medium 2 (x < 0, no content, D2 and
// K2) is the inner zone, medium 1 (x > 0, content 1, D1 and K1) the outer one; C2/C1
// at the boundary is K2/K1. Each is 8 sqrt(D t) thick.
func composite(t *testing.T, c *published.Check) {
	const root = testSize / 16 // sqrt(D1 t); 400 graded cells, where the tolerance is meant for 200 even ones
	for _, r := range c.Rows {
		where, media, _ := strings.Cut(r.Quantity, ", ")
		in := numbers(t, published.Row{Row: r.Row, Quantity: media})
		d2, k := in[0], in[1]
		middle := 8 * root * math.Sqrt(d2)
		p := &Problem{Law: testLaw, Zones: []Zone{{Outer: middle, Times: d2, Host: 1}, {Outer: middle + 8*root, Start: 1}}}
		p.LnK = fixedLnK(math.Log(k))
		o := Options{Cells: 400, Finest: root * math.Sqrt2 * math.Min(1, math.Sqrt(d2))}
		hold, ramp := holdOf(t, root*root), rampOf(t, root*root)
		s := [2]solution{solve(t, p, o, hold), solve(t, p, o, ramp)}
		inside := func(x float64) func(s solution) float64 {
			return func(s solution) float64 { v, _ := s.read(middle+x, math.Inf(-1), middle); return v }
		}
		outside := func(x float64) func(s solution) float64 {
			return func(s solution) float64 { v, _ := s.read(middle+x, middle, math.Inf(1)); return v }
		}
		switch where {
		case "C1 at interface (x=0+)":
			judge(t, c, r.Row, s, outside(0))
		case "C2 at interface (x=0-)":
			judge(t, c, r.Row, s, inside(0))
		case "C1 at x=2 sqrt(D1 t)":
			judge(t, c, r.Row, s, outside(2*root))
		case "C2 at x=-2 sqrt(D2 t)":
			judge(t, c, r.Row, s, inside(-2*root*math.Sqrt(d2)))
		}
		through := 2 * root / math.SqrtPi * k * math.Sqrt(d2) / (1 + k*math.Sqrt(d2)) // content 1 has lost, by the derivative of C1 at 0
		for _, s := range s {
			n := slices.Index(s.plan.Faces(), middle)
			got := content(s.plan, append(slices.Clone(s.c[:n]), make([]float64, len(s.c)-n)...))
			wantNear(t, r.Row+": what went through the boundary", got/root, through/root, 2e-4) // the row's tolerance
		}
	}
}

// F01: equilibrium with a rim held at 1, the integral of zero flux. Each row is a
// slab whose host rises evenly to its X(x) - X(rim) at the inner end.
func restingRim(t *testing.T, c *published.Check) {
	for i, r := range c.Rows {
		a := couplingA
		if i == 4 {
			a = -couplingA
		}
		rise := lastNumber(t, r)
		host := func(x float64) float64 { return 0.1 + rise*(1-x) }
		s := bothCoupled(t, atRest*testSize*testSize, a, even(testSize), fixed(hostOf(host, nothing, 1, 0)))
		judge(t, c, r.Row, s, func(s solution) float64 { return s.at(0) })
	}
}

// F02: equilibrium between sealed ends, the integral of zero flux.
func restingSealed(t *testing.T, c *published.Check) {
	gaussian := func(x float64) float64 { return 0.3 + 0.4*math.Exp(-(x/0.2)*(x/0.2)) }
	for _, r := range c.Rows {
		shape, text, _ := strings.Cut(r.Quantity, ", ")
		p := hostOf(func(x float64) float64 { return 0.2 + 0.6*x }, nothing, nothing, 1)
		switch {
		case strings.HasPrefix(text, "X=0.3+0.4 exp(-(x/0.2)^2)"):
			p = hostOf(gaussian, nothing, nothing, 1)
		case strings.HasPrefix(text, "X=0.7-0.4 r^2"):
			p = hostOf(func(x float64) float64 { return 0.7 - 0.4*x*x }, nothing, nothing, 1)
			p.Shape = map[string]Shape{"cylinder": Cylinder, "sphere": Ball}[shape]
		case strings.HasSuffix(text, "zone"):
			p = slabOf(testSize, nothing, nothing, 1)
			p.Zones = []Zone{{Outer: 0.3 * testSize, Start: 1, Host: 0.8}, {Outer: testSize, Start: 1, Host: 0.3}}
		}
		var at float64
		switch {
		case strings.HasSuffix(text, "0.8 zone"):
			at = 0.15
		case strings.HasSuffix(text, "0.3 zone"):
			at = 0.65
		default:
			at = lastNumber(t, r)
		}
		o := even(testSize)
		o.Faces[60] = 0.3 * testSize // to the bit
		s := bothCoupled(t, atRest*testSize*testSize, couplingA, o, fixed(p))
		judge(t, c, r.Row, s, func(s solution) float64 { return s.at(at * testSize) })
		wantNear(t, r.Row+": mean", worst(c, r.Row, s, solution.mean), 1, 1e-12) // the row's tolerance of the mean
	}
}

// F03: the ratio across one face at rest, exact in the form of Scharfetter and
// Gummel 1969. What central averaging makes of it is in no code of this program.
func restingStep(t *testing.T, c *published.Check) {
	for _, r := range c.Rows {
		p := lastNumber(t, r)
		if strings.HasPrefix(r.Quantity, "(1+p/2)/(1-p/2)") {
			c.Formula(t, r.Row, (1+p/2)/(1-p/2), c.Exact(r.Row))
			continue
		}
		crystal := slabOf(testSize, nothing, nothing, 1, 1)
		crystal.Zones[1].Host = 1
		s := bothCoupled(t, atRest*testSize*testSize, p*thermal.GasConstant*couplingTemp, Options{}, fixed(crystal))
		ratio := func(s solution) float64 { return s.c[len(s.c)-1] / s.c[0] }
		c.Program(t, r.Row, worst(c, r.Row, s, ratio), c.Exact(r.Row)) // the row states no tolerance for solvers
	}
}

// F04: Smoluchowski 1916; Gardiner, Handbook of stochastic methods, section 5.2.1.
func sealedDrift(t *testing.T, c *published.Check) {
	c.Formula(t, "F04.01", drift(couplingA)(0.6, couplingTemp), c.Exact("F04.01"))
	p := hostOf(func(x float64) float64 { return 0.2 + 0.6*x }, nothing, nothing, 1)
	for _, r := range c.Rows[1:] {
		in := numbers(t, r)
		s := bothCoupled(t, in[1]*testSize*testSize, couplingA, even(testSize), fixed(p))
		judge(t, c, r.Row, s, func(s solution) float64 { return s.at(in[0] * testSize) })
	}
}

// F05: Ogata and Banks 1961, US Geological Survey Professional Paper 411-A. The
// slab is 6 units long, of which content reaches 4.5.
func driftingHalfSpace(t *testing.T, c *published.Check) {
	const unit = testSize / 6
	for _, r := range c.Rows {
		in := numbers(t, r)
		host := func(x float64) float64 { return in[2] * thermal.GasConstant * couplingTemp / couplingA * 6 * x }
		s := bothCoupled(t, in[1]*unit*unit, couplingA, Options{}, fixed(hostOf(host, 1, nothing, 0)))
		judge(t, c, r.Row, s, func(s solution) float64 { return s.at(in[0] * unit) })
	}
}

// F06: the Green function of drift and diffusion, along the cooling ramp of the
// check: D and D/T both matter, so there is no hold that does the same.
func driftingGaussian(t *testing.T, c *published.Check) {
	const size, middle, sigma, cells = 400e-6, 200e-6, 10e-6, 400
	h := newHistory(t, thermal.Leg{Kind: thermal.Ramp, For: 10 * thermal.Day, T0: 1373.15, T1: 1073.15})
	p := &Problem{
		Zones: []Zone{{Outer: size}}, Law: NewLaw(3e-6, 250e3), LnK: drift(couplingA),
		Host:    func(r float64) float64 { return 2000 * r },
		Profile: func(r float64) float64 { return math.Exp(-(r - middle) * (r - middle) / (2 * sigma * sigma)) },
	}
	s := solve(t, p, Options{Faces: uniform(0, size, cells)}, h)
	moment := func(c []float64, f func(r float64) float64) float64 {
		sum := 0.0
		for i, r := range s.plan.Centres() {
			sum += s.plan.Volumes()[i] * c[i] * f(r)
		}
		return sum / content(s.plan, c)
	}
	mean := moment(s.c, func(r float64) float64 { return r })
	variance := moment(s.c, func(r float64) float64 { return (r - mean) * (r - mean) })
	variance -= math.Pow(size/cells, 2) / 12 // of the cells themselves (Sheppard 1898)
	start := solution{s.plan, s.plan.Start(0)}
	c.Program(t, "F06.01", math.Exp(p.Law.LnIntegral(h, 0, h.Life())), c.Exact("F06.01"))
	c.Program(t, "F06.02", mean-middle, c.Solver("F06.02"))
	c.Program(t, "F06.03", math.Sqrt(variance), c.Solver("F06.03"))
	c.Program(t, "F06.04", s.at(mean)/start.at(middle), c.Solver("F06.04"))
}

// F07: Uhlenbeck and Ornstein 1930. The rim has its exact value at all times. The
// variance is read off the values at 0 and at half of the crystal, in the shape
// in which it is farthest from the row.
func ornsteinUhlenbeck(t *testing.T, c *published.Check) {
	const s0 = 0.02
	ratio := func(s solution) float64 { return s.at(testSize/2) / s.at(0) }
	for block := 0; block < len(c.Rows); block += 5 {
		in := numbers(t, published.Row{Quantity: strings.ReplaceAll(c.Rows[block].Quantity, "(", ",")})
		g, q := in[0], in[1]
		variance := func(g float64) float64 { return (s0+1/(2*q))*math.Exp(4*q*g) - 1/(2*q) }
		var all [2]solution
		for shape := Slab; shape <= Ball; shape++ {
			s := bothCoupled(t, g*testSize*testSize, couplingA, even(testSize), func(h *thermal.History) *Problem {
				p := hostOf(func(x float64) float64 { return q * thermal.GasConstant * couplingTemp / couplingA * x * x }, nothing, 0, 0)
				p.Shape = shape
				p.Profile = func(r float64) float64 { return math.Exp(-r * r / (testSize * testSize) / (2 * s0)) }
				p.Outer = []Rim{{Kind: Prescribed, Given: &Given{At: func(at float64) float64 {
					now := variance(grown(h)(at) / (testSize * testSize))
					return math.Pow(s0/now, float64(shape+1)/2) * math.Exp(-1/(2*now))
				}}}}
				return p
			})
			judge(t, c, rowID(c, block+2+int(shape)), s, func(s solution) float64 { return s.at(0) })
			if shape == Slab {
				all = s
				continue
			}
			worse := func(a, b solution) solution {
				if want := c.Row(rowID(c, block+5)).Expected; math.Abs(ratio(b)-want) > math.Abs(ratio(a)-want) {
					return b
				}
				return a
			}
			all = [2]solution{worse(all[0], s[0]), worse(all[1], s[1])}
		}
		judge(t, c, rowID(c, block+1), all, func(s solution) float64 { return -0.125 / math.Log(ratio(s)) })
		judge(t, c, rowID(c, block+5), all, ratio)
	}
}

// exponential is C = exp(a x + D (a^2 - a p) t) of check F08 in a slab, x in its
// size, p being the slope of ln K there and so far G and so far the integral of D p.
func exponential(a, x, g, gp float64) float64 { return math.Exp(a*x + a*a*g - a*gp) }

// exponentialSlab is the slab of check F08 with its rims exact: grown gives the
// integrals of D and of D times the slope of ln K, up to a time.
func exponentialSlab(a float64, host func(x float64) float64, grown func(at float64) (g, gp float64)) *Problem {
	rim := func(x float64) []Rim {
		return []Rim{{Kind: Prescribed, Given: &Given{At: func(at float64) float64 {
			g, gp := grown(at)
			return exponential(a, x, g, gp)
		}}}}
	}
	p := hostOf(host, 0, 0, 0)
	p.Profile = func(r float64) float64 { return exponential(a, r/testSize, 0, 0) }
	p.Inner, p.Outer = rim(0), rim(1)
	return p
}

// F08: an exponential keeps its shape; the formula is its own proof.
func exponentialMode(t *testing.T, c *published.Check) {
	const a, slope = 3, 2
	host := func(x float64) float64 { return slope * thermal.GasConstant * couplingTemp / couplingA * x }
	s := bothCoupled(t, 0.1*testSize*testSize, couplingA, even(testSize), func(h *thermal.History) *Problem {
		return exponentialSlab(a, host, func(at float64) (g, gp float64) {
			g = grown(h)(at) / (testSize * testSize)
			return g, slope * g
		})
	})
	for _, r := range c.Rows {
		in := numbers(t, published.Row{Quantity: strings.ReplaceAll(r.Quantity, ")", "")})
		judge(t, c, r.Row, s, func(s solution) float64 { return s.at(in[0] * testSize) })
	}
}
