package thermal

import (
	"fmt"
	"math"
	"math/rand/v2"
	"sort"
	"testing"

	"gonum.org/v1/gonum/integrate/quad"
)

// TestRules compares the quadrature rules with gonum's, and with the integrals of powers up to their degree.
func TestRules(t *testing.T) {
	for _, rule := range rules {
		n := 2 * len(rule.pairs)
		x, w := make([]float64, n), make([]float64, n)
		quad.Legendre{}.FixedLocations(x, w, -0.5, 0.5)
		sort.Float64s(x)
		sum := 0.0
		for i, p := range rule.pairs {
			closeTo(t, fmt.Sprintf("point %d of %d", i, n), p.x, x[n/2+i], 1e-15)
			sum += 2 * p.w
		}
		closeTo(t, fmt.Sprintf("sum of %d weights", n), sum, 1, 1e-15)
		for k := 0; k < 2*n; k += 2 {
			sum := 0.0
			for _, p := range rule.pairs {
				sum += 2 * p.w * math.Pow(2*p.x, float64(k))
			}
			closeTo(t, fmt.Sprintf("%d points, power %d", n, k), sum, 1/float64(k+1), 1e-15)
		}
	}
}

// TestKronrod: 15 points integrate powers up to 22, the 7 inside them up to 13.
func TestKronrod(t *testing.T) {
	for k := range 23 {
		var whole, seven float64
		for _, n := range kronrod15 {
			whole += n.w * math.Pow(n.x, float64(k))
			seven += n.gauss * math.Pow(n.x, float64(k))
		}
		closeTo(t, fmt.Sprintf("15 points, power %d", k), whole, 1/float64(k+1), 1e-15)
		if k <= 13 {
			closeTo(t, fmt.Sprintf("7 points, power %d", k), seven, 1/float64(k+1), 1e-15)
		}
	}
}

// TestConvergent compares e2Scaled with quadrature of exp(u) E2(u) = int_0^1 exp(u (1 - 1/y)) dy.
func TestConvergent(t *testing.T) {
	const tol = 1e-14 // e^u E2(u) itself, or above it, below convergentFrom, the rounding of 1 - u e^u E1(u)
	for _, u := range []float64{0, 1e-9, 0.01, 0.3, 1, 2, 5, 10, 17.9, 18, 18.1, 25, 60, 300, 1e4, 1e9} {
		want := 0.0
		for i := range 60 { // y = exp(-x)
			a, b := 40*float64(i)/60, 40*float64(i+1)/60
			want += quad.Fixed(func(x float64) float64 { return math.Exp(-x - u*math.Expm1(x)) }, a, b, 40, quad.Legendre{}, 0)
		}
		if u > 300 { // too steep for these panels: the asymptotic series, whose next term is 120/u^5
			want = 1 / u * (1 - 2/u + 6/(u*u) - 24/(u*u*u) + 120/(u*u*u*u))
		}
		closeTo(t, fmt.Sprintf("u = %g", u), e2Scaled(u), want, math.Max(tol*want, 1e-15))
	}
}

// TestAgainstQuadrature compares random legs, and random parts of them, with gonum's Gauss-Legendre rule in many panels
// along time.
func TestAgainstQuadrature(t *testing.T) {
	// What 300 panels of 20 points leave of the steepest legs, and the promise of LnArrhenius for sheets.
	const tol = 2e-11
	r := rand.New(rand.NewPCG(2, 1))
	for n := range 300 {
		l := randomLeg(r)
		e, k := between(r, -5000, 80000), r.IntN(2)
		t0, t1 := 0.0, l.length()
		if n%2 == 0 {
			t0 = between(r, 0, t1)
			t1 = between(r, t0, t1)
		}
		got := l.LnArrhenius(e, k, t0, t1)
		closeTo(t, fmt.Sprintf("%d: %v, e = %g, k = %d, %g to %g s", n, l, e, k, t0, t1), got, panels(&l, e, k, t0, t1), tol)
	}
}

// TestCold compares the integral and the mean of 1/T of LnArrheniusCold with gonum's rule, along legs and parts of them; on an
// empty part the mean is what its beginning has.
func TestCold(t *testing.T) {
	const tol = 4e-11 // that of TestAgainstQuadrature, in both integrals
	r := rand.New(rand.NewPCG(2, 6))
	for n := range 300 {
		l := randomLeg(r)
		e, t0, t1 := between(r, -5000, 80000), 0.0, l.length()
		if n%7 == 0 {
			e = 0
		}
		if n%2 == 0 {
			t0 = between(r, 0, t1)
			t1 = between(r, t0, t1)
		}
		name := fmt.Sprintf("%d: %v, e = %g, %g to %g s", n, l, e, t0, t1)
		ln, coldness := l.LnArrheniusCold(e, t0, t1)
		whole := panels(&l, e, 0, t0, t1)
		closeTo(t, name, ln, whole, tol)
		closeTo(t, "mean of 1/T, "+name, coldness*math.Exp(whole-panels(&l, e, 1, t0, t1)), 1, tol)
		if ln, coldness := l.LnArrheniusCold(e, t0, t0); !math.IsInf(ln, -1) || coldness != 1/l.At(t0) {
			t.Errorf("%s: empty part: ln %g, mean of 1/T %g", name, ln, coldness)
		}
	}
}

// panels is ln of the integral along a leg by gonum's Gauss-Legendre rule, in panels that crowd towards t = 0.
func panels(l *Leg, e float64, k int, t0, t1 float64) float64 {
	lo, hi := l.Range()
	ln := math.Max(-e/lo, -e/hi)
	edges := []float64{t0, t1}
	for i := range 300 {
		x := float64(i) / 300
		edges = append(edges, t0+(t1-t0)*x*x*x*x*x*x)
	}
	if l.Kind == Table {
		for _, t := range l.Rows.Time {
			edges = append(edges, math.Max(t0, math.Min(t, t1)))
		}
	}
	sort.Float64s(edges)
	sum := 0.0
	for i := range len(edges) - 1 {
		sum += quad.Fixed(func(t float64) float64 {
			temp := l.At(t)
			return math.Exp(-e/temp-ln) / math.Pow(temp, float64(k))
		}, edges[i], edges[i+1], 20, quad.Legendre{}, 0)
	}
	return math.Log(sum) + ln
}

// TestAdditive: the integral over a path is the sum of those over its pieces, wherever it is cut.
func TestAdditive(t *testing.T) {
	const tol = 2e-12 // twelve sheets, each with its own quadrature
	r := rand.New(rand.NewPCG(2, 2))
	for n := range 200 {
		h := randomHistory(t, r)
		e, k := between(r, -5000, 80000), r.IntN(2)
		cuts := []float64{0, h.Life()}
		for range 5 {
			cuts = append(cuts, between(r, 0, h.Life()), decades(r, 1, h.Life()))
		}
		sort.Float64s(cuts)
		var sum scaled
		for i := range len(cuts) - 1 {
			sum.add(scaled{1, h.LnArrhenius(e, k, cuts[i], cuts[i+1])})
		}
		closeTo(t, fmt.Sprintf("path %d, e = %g, k = %d", n, e, k), sum.log(), h.LnArrhenius(e, k, 0, h.Life()), tol)
	}
}

// TestNoActivation: with e = 0 and k = 0 the integral is the time, to the last digit.
func TestNoActivation(t *testing.T) {
	r := rand.New(rand.NewPCG(2, 3))
	for range 100 {
		h := randomHistory(t, r)
		t0 := between(r, 0, h.Life())
		t1 := between(r, t0, h.Life())
		closeTo(t, "ln of time", h.LnArrhenius(0, 0, t0, t1), math.Log(t1-t0), 1e-12) // cuts of legs are differences of times
		closeTo(t, "ln of life", h.LnArrhenius(0, 0, 0, h.Life()), math.Log(h.Life()), 1e-15*float64(len(h.legs))+1e-14)
	}
}

// TestFlat: a ramp, a relaxation and a table that hardly move are holds.
func TestFlat(t *testing.T) {
	const temp, tol = 1000.0, 4e-14 // rounding of e/T = 80 is 1e-14
	for _, e := range []float64{-5000, 0, 1, 30000, 80000} {
		for _, off := range []float64{0, 1e-13, -1e-12, 1e-9, -1e-6} {
			for k := range 2 {
				hold := Leg{Kind: Hold, For: 7, T0: temp}
				want := hold.LnArrhenius(e, k, 0, 7)
				for _, l := range []Leg{
					{Kind: Ramp, For: 7, T0: temp, T1: temp + off},
					{Kind: Relax, For: 7, T0: temp + off, T1: temp, Tau: 3},
					{Kind: Relax, For: 7, T0: temp, T1: temp + off, Tau: 3},
					{Kind: Table, Rows: &Rows{Time: []float64{0, 3, 7}, Temp: []float64{temp, temp + off, temp}}},
				} {
					slack := tol + math.Abs(off)*(math.Abs(e/temp)+1)/temp
					closeTo(t, fmt.Sprintf("%s, e = %g, k = %d, off by %g K", l.Kind, e, k, off), l.LnArrhenius(e, k, 0, 7), want, slack)
				}
			}
		}
	}
}

// TestShortParts: the integral over a part that is almost nothing is its length times the value there.
func TestShortParts(t *testing.T) {
	r := rand.New(rand.NewPCG(2, 4))
	for n := range 500 {
		l := randomLeg(r)
		e, k := between(r, -5000, 80000), r.IntN(2)
		t0 := between(r, 0.01, 0.99) * l.length()
		t1 := t0 * (1 + 1e-12)
		if l.At(t0) == l.before(t0) {
			temp := l.At(t0)
			want := -e/temp - float64(k)*math.Log(temp) + math.Log(t1-t0)
			// over 1e-12 of its age no leg changes e/T by more than 1e-12 (e/T) dlnT/dlnt, at most about 1e-9
			closeTo(t, fmt.Sprintf("%d: %v at %g s, e = %g, k = %d", n, l, t0, e, k), l.LnArrhenius(e, k, t0, t1), want, 1e-9)
		}
	}
}

// TestPowerPanics: only the powers that diffusion needs.
func TestPowerPanics(t *testing.T) {
	defer func() {
		if got := fmt.Sprint(recover()); got != "thermal: integral of T^-2 exp(-e/T), want a power of 0 or 1" {
			t.Errorf("panic %q", got)
		}
	}()
	set(t, coldStore()).LnArrhenius(3e4, 2, 0, 1)
}

// TestPulse: ten days at 850 C in a million years at 500 C are not missed. Closed form: the two holds added.
func TestPulse(t *testing.T) {
	const cold, hot, e = 773.15, 1123.15, 40000.0
	var h History
	for _, at := range []float64{0, 0.123456789, 0.5, 1} {
		life, pulse := 1e6*Year, 10*Day
		legs := []Leg{{Kind: Hold, For: at * life, T0: cold}, {Kind: Hold, For: pulse, T0: hot}, {Kind: Hold, For: (1 - at) * life, T0: cold}}
		if err := h.Set(legs); err != nil {
			t.Fatal(err)
		}
		share := pulse * math.Exp(-e/hot) / (pulse*math.Exp(-e/hot) + life*math.Exp(-e/cold))
		want := math.Log(life*math.Exp(-e/cold)) - math.Log1p(-share)
		closeTo(t, fmt.Sprintf("pulse at %g", at), h.LnArrhenius(e, 0, 0, h.Life()), want, 1e-13)
		if share < 0.02 {
			t.Errorf("the pulse adds %g; the test would not see it", share)
		}
	}
}

// TestExtremes: no input within what Set accepts gives NaN, and nothing but e/T beyond float64 gives an infinity.
func TestExtremes(t *testing.T) {
	temps := []float64{coldest, 20, 77, 300, 1000, 1001, 5000, hottest}
	times := []float64{shortest, 1, 1e13, longest}
	for _, e := range []float64{0, 1e-300, 1e-9, 3, 1e4, 1e5, -1e-9, -3, -1e4, -1e5} {
		for _, a := range temps {
			for _, b := range temps {
				for _, dt := range times {
					legs := []Leg{{Kind: Hold, For: dt, T0: a}, {Kind: Ramp, For: dt, T0: a, T1: b}}
					for _, tau := range times {
						legs = append(legs, Leg{Kind: Relax, For: dt, T0: a, T1: b, Tau: tau})
					}
					for _, x := range []float64{0, 0.5, 0.5 + 1e-16, 0.9, 1e6} {
						s := &Sheet{Magma: math.Max(a, b), Host: math.Min(a, b), Thickness: 1, Position: x, Kappa: 1e-6}
						legs = append(legs, Leg{Kind: SheetCooling, For: dt, Sheet: s})
					}
					sane(t, legs, e)
				}
			}
		}
	}
}

// sane checks that the integrals of all legs lie between those of holds at the extremes of exp(-e/T) and T^-k.
func sane(t *testing.T, legs []Leg, e float64) {
	t.Helper()
	for i := range legs {
		l := &legs[i]
		if p := l.check(); p != nil {
			t.Fatal(p)
		}
		cold, hot := l.Range()
		for k := range 2 {
			low := math.Min(-e/cold, -e/hot) - float64(k)*math.Log(hot) + math.Log(l.For)
			high := math.Max(-e/cold, -e/hot) - float64(k)*math.Log(cold) + math.Log(l.For)
			// Rounding of e/T and of the logarithms; a relaxation also rounds e/ambient and 1 - w, ambient/T.
			slack := 1e-13 * (1 + math.Abs(low) + math.Abs(high))
			if l.Kind == Relax {
				slack += 1e-15 * (math.Abs(e/l.T1) + l.T0/l.T1 + l.T1/l.T0)
			}
			if got := l.LnArrhenius(e, k, 0, l.For); !(got >= low-slack && got <= high+slack) {
				t.Errorf("%v %v, e = %g, k = %d: ln = %g, want between %g and %g", *l, l.Sheet, e, k, got, low, high)
			}
		}
	}
}
