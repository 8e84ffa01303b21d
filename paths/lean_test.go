package paths

import (
	"math"
	"testing"

	"bankfire/paths/study"
	"bankfire/thermal"
)

// How near a minimum is found: of chi-square a little more than the fit of
// deviations settles for, of a deviation about its root.
const (
	leanChiSq = 1e-6
	leanZ     = 3e-4
)

// on puts a curve on a law, with derivatives of ln G by its activation energy.
func on(law int, byE [2]float64, c Curve) Curve {
	c.Law, c.ByE = law, byE
	return c
}

// ridge is two or more parabolas of widths s_i about at_i on one law: with rows
// (sD, ByE_i sE)/s_i and right sides at_i/s_i, least squares at the price l for
// each z^2 are the normal equations (A'A + l) z = A'b.
type ridge struct{ a, b [][]float64 }

func (r *ridge) add(law LawPrior, byE, at, width float64) {
	r.a = append(r.a, []float64{law.LnD / width, byE * law.E / width})
	r.b = append(r.b, []float64{at / width})
}

// at returns the deviations at a price, and the chi-square of the profiles
// above their floors.
func (r *ridge) at(price float64) (z [2]float64, chiSq float64) {
	dd, de, ee, d, e := price, 0.0, price, 0.0, 0.0
	for i, a := range r.a {
		b := r.b[i][0]
		dd, de, ee = dd+a[0]*a[0], de+a[0]*a[1], ee+a[1]*a[1]
		d, e = d+a[0]*b, e+a[1]*b
	}
	det := dd*ee - de*de
	z = [2]float64{(ee*d - de*e) / det, (dd*e - de*d) / det}
	for i, a := range r.a {
		chiSq += square(a[0]*z[0] + a[1]*z[1] - r.b[i][0])
	}
	return z, chiSq
}

// A parabola of width s about at, under a law known to S = hypot(sD, ByE sE),
// is least together with the deviations at
//
//	at^2/(s^2 + S^2) above its floor, with |z| = at S/(s^2 + S^2),
//
// which is at/S shrunk by the prior; it passes, allowed x^2 above its floor,
// from |z| = (|at| - s x)/S on.
func TestLeaningOnOneLaw(t *testing.T) {
	const byE = -2e-5 // per J/mol
	const floor, pass = 19.0, 35.0
	for _, test := range []struct {
		name      string
		at, width float64
		law       LawPrior
	}{
		{"ln D alone", 2.2, 0.3, LawPrior{Key: "a", LnD: 0.6}},
		{"E alone", 2.2, 0.3, LawPrior{Key: "a", E: 15e3}},
		{"both", -2.2, 0.3, LawPrior{Key: "a", LnD: 0.6, E: 15e3}},
		{"a profile that knows much", 3, 0.01, LawPrior{Key: "a", LnD: 0.6, E: 15e3}},
		{"a law known well", 2, 0.3, LawPrior{Key: "a", LnD: 0.01}},
		{"far off", -9, 0.1, LawPrior{Key: "a", LnD: 0.6, E: 15e3}},
		{"a profile that knows little", 3, 5, LawPrior{Key: "a", LnD: 0.6, E: 15e3}},
		{"nothing to lean for", 0, 0.3, LawPrior{Key: "a", LnD: 0.6, E: 15e3}},
	} {
		t.Run(test.name, func(t *testing.T) {
			c := on(1, [2]float64{byE, 0}, bowl(floor, test.at, test.width, 22, 2))
			least, z := lean([]Curve{c}, []LawPrior{test.law}, pass)
			size := math.Hypot(test.law.LnD, byE*test.law.E)
			near(t, "chi-square", least, floor+square(test.at)/(square(test.width)+square(size)), leanChiSq)
			if len(z) != 2 {
				t.Fatalf("deviations %v, want two", z)
			}
			want := math.Max(0, math.Abs(test.at)-test.width*math.Sqrt(pass-floor)) / size
			near(t, "leaning over what is wanted", math.Hypot(z[0], z[1]), want, leanZ*math.Max(1, want))
			// the likeliest direction: each by its part of S^2
			near(t, "share of ln D", z[0]*size, math.Hypot(z[0], z[1])*test.law.LnD*math.Copysign(1, test.at), 0.02*size*math.Max(1, want))
		})
	}
}

// Two profiles on one law whose E they feel differently ask for a compromise.
func TestLeaningOfTwoProfilesOnOneLaw(t *testing.T) {
	law := LawPrior{Key: "shared", LnD: 0.6, E: 15e3}
	at, width, byE := [2]float64{1.5, 0.5}, [2]float64{0.2, 0.1}, [2]float64{-4e-5, 1e-5}
	var cs []Curve
	var r ridge
	for i := range at {
		cs = append(cs, on(1, [2]float64{byE[i], 0}, bowl(20, at[i], width[i], 22, 2)))
		r.add(law, byE[i], at[i], width[i])
	}
	z, chiSq := r.at(1)
	best := 40 + chiSq + square(z[0]) + square(z[1])
	// a price at which it passes with just so much
	smallest, allowed := r.at(2.5)
	got, dev := lean(cs, []LawPrior{law}, 40+allowed)
	near(t, "chi-square", got, best, leanChiSq)
	if len(dev) != 2 {
		t.Fatalf("deviations %v, want two", dev)
	}
	near(t, "of ln D", dev[0], smallest[0], leanZ)
	near(t, "of E", dev[1], smallest[1], leanZ)
	// a profile without a law only adds its misfit
	cs = append(cs, bowl(7, 2, 1, 9, 0))
	got, dev = lean(cs, []LawPrior{law}, 40+allowed+7+4)
	near(t, "chi-square with one more", got, best+7+4, leanChiSq)
	near(t, "of ln D with one more", dev[0], smallest[0], leanZ)
	near(t, "of E with one more", dev[1], smallest[1], leanZ)
}

// Two profiles that feel their law's E alike cannot be brought to different
// amounts of diffusion by it.
func TestLeaningDoesNotHelpWhatIsAtOdds(t *testing.T) {
	law := LawPrior{Key: "shared", LnD: 0.6, E: 15e3}
	cs := []Curve{on(1, [2]float64{1e-5}, bowl(20, 1, 0.1, 22, 2)), on(1, [2]float64{1e-5}, bowl(20, 2, 0.1, 22, 2))}
	// the best compromise, half way, is 0.5/0.1 off each: 40 + 2*25
	if _, z := lean(cs, []LawPrior{law}, 89.9); z != nil {
		t.Errorf("passes with deviations %v", z)
	}
	if _, z := lean(cs, []LawPrior{law}, 90.1); z == nil {
		t.Error("does not pass with what the best compromise leaves")
	}
}

// Laws that share no profile deviate each for itself, however well the
// profiles know what they want.
func TestLeaningOnSeveralLaws(t *testing.T) {
	laws := []LawPrior{{Key: "a", LnD: 0.6, E: 15e3}, {Key: "b", LnD: 0.3, E: 10e3}, {Key: "c", LnD: 0.5}}
	at, width, byE := []float64{3, -2, 1}, []float64{0.01, 0.02, 0.01}, []float64{-2e-5, 3e-5, 0}
	var cs []Curve
	best, allowed := 0.0, 0.0
	z := make([]float64, len(laws))
	const price = 3.0
	for i, law := range laws {
		cs = append(cs, on(i+1, [2]float64{byE[i], 0}, bowl(20, at[i], width[i], 22, 2)))
		size := math.Hypot(law.LnD, byE[i]*law.E)
		best += 20 + square(at[i])/(square(width[i])+square(size))
		norm := price*square(width[i]) + square(size) // of the same parabola at the price
		z[i] = math.Abs(at[i]) * size / norm
		allowed += 20 + square(at[i]*price*width[i]/norm)
	}
	got, dev := lean(cs, laws, allowed)
	near(t, "chi-square", got, best, leanChiSq)
	if len(dev) != 2*len(laws) {
		t.Fatalf("deviations %v, want two a law", dev)
	}
	for i, law := range laws {
		near(t, "leaning on "+law.Key, math.Hypot(dev[2*i], dev[2*i+1]), z[i], leanZ)
	}
}

// The second derivative by E counts: shift = b e + c e^2/2. What is least is
// looked for on a grid, which no descent has a part in.
func TestLeaningWhereEBends(t *testing.T) {
	law := LawPrior{Key: "a", E: 15e3}
	const b, c, at, width, pass = -2e-5, 3e-9, 0.9, 0.05, 24.0
	best, first := math.Inf(1), math.Inf(1)
	for i := -50_000; i <= 50_000; i++ {
		x := float64(i) * 1e-4
		e := x * law.E
		chi := 20 + square((b*e+c*e*e/2-at)/width)
		best = math.Min(best, chi+x*x)
		if chi <= pass {
			first = math.Min(first, math.Abs(x))
		}
	}
	got, z := lean([]Curve{on(1, [2]float64{b, c}, bowl(20, at, width, 22, 2))}, []LawPrior{law}, pass)
	near(t, "chi-square", got, best, leanChiSq)
	if len(z) != 2 {
		t.Fatalf("deviations %v, want two", z)
	}
	near(t, "leaning", math.Hypot(z[0], z[1]), first, leanZ)
}

// No laws: the misfit as it is.
func TestLeaningOnNothing(t *testing.T) {
	cs := []Curve{bowl(20, 1, 0.5, 22, 2)}
	got, z := lean(cs, nil, 30)
	near(t, "chi-square", got, 24, 1e-12)
	if z == nil || len(z) != 0 {
		t.Errorf("passes with %v, want no deviations", z)
	}
	if _, z = lean(cs, nil, 23); z != nil {
		t.Errorf("passes with %v, want that it does not", z)
	}
}

// A path that misses the profiles by what the law may be off reproduces with
// law errors and is too sharp without; one that misses by more needs deviations
// that are told, and stays too sharp.
func TestVerdictWithLawErrors(t *testing.T) {
	laws := []LawPrior{{Key: "a", LnD: 0.6}}
	// 20 degrees at 95 %: 31.410 (NIST/SEMATECH e-Handbook, 1.3.6.7.4)
	const floor, pass, width = 19.0, 31.410, 0.1
	for _, test := range []struct {
		at   float64
		with Verdict
	}{{0.9, Reproduces}, {1.5, Reproduces}, {1.55, TooSharp}, {9, TooSharp}} {
		var o Outcome
		Judge(&o, []Curve{on(1, [2]float64{}, bowl(floor, test.at, width, 22, 2))}, laws, 0.95)
		want := (test.at - width*math.Sqrt(pass-floor)) / 0.6 // of 1.96 that 95 % allow
		if o.Verdict != TooSharp || o.WithLaws.Verdict != test.with {
			t.Errorf("off by %g, %g sigma: %s and with law errors %s, want too sharp and %s", test.at, want, o.Verdict, o.WithLaws.Verdict, test.with)
		}
		if len(o.WithLaws.Leaning) != 1 || o.WithLaws.Leaning[0].Law != "a" {
			t.Fatalf("leaning on %+v, want on a", o.WithLaws.Leaning)
		}
		near(t, "leaning", o.WithLaws.Leaning[0].Sigma, want, leanZ*math.Max(1, want))
		near(t, "leaning on ln D", o.WithLaws.Leaning[0].LnD, want, leanZ*math.Max(1, want))
		near(t, "leaning on E, which has no error", o.WithLaws.Leaning[0].E, 0, leanZ)
		near(t, "misfit", o.WithLaws.Misfit, floor+square(test.at)/(width*width+0.36), leanChiSq)
		near(t, "tail", o.WithLaws.Tail, Tail(floor+square(test.at)/(width*width+0.36), 20), 1e-5)
	}
}

// Of holds at T_i that do the parts w_i of the diffusion, with x_i = 1/T_i - 1/Tmid,
//
//	d ln G/dE = -(mean of x)/R,  d2 ln G/dE2 = (mean of x^2 - (mean of x)^2)/R^2.
func TestByE(t *testing.T) {
	const low, high = 1000.0, 1400.0 // K, calibrated
	middle := (1/low + 1/high) / 2
	year := thermal.Year
	for _, test := range []struct {
		name string
		legs []thermal.Leg
	}{
		{"one hold", []thermal.Leg{{Kind: thermal.Hold, For: 500 * year, T0: hot}}},
		{"one hold in the middle of the range", []thermal.Leg{{Kind: thermal.Hold, For: 500 * year, T0: 1 / middle}}},
		{"storage and a pulse", []thermal.Leg{{Kind: thermal.Hold, For: 9000 * year, T0: 950}, {Kind: thermal.Hold, For: 2 * year, T0: 1200}}},
	} {
		t.Run(test.name, func(t *testing.T) {
			p := &profile{
				element: &study.Element{Law: study.Law{Law: law(), TMin: low, TMax: high}},
				history: history(t, test.legs...),
			}
			all, mean, meanSq := 0.0, 0.0, 0.0
			for _, l := range test.legs {
				w, x := l.For*math.Exp(law().LnD(l.T0)), 1/l.T0-middle
				all, mean, meanSq = all+w, mean+w*x, meanSq+w*x*x
			}
			mean, meanSq = mean/all, meanSq/all
			const r = thermal.GasConstant
			const sigma = 14e3
			got := p.byE(sigma)
			// differences over one standard deviation leave what the next two derivatives do
			near(t, "first derivative", got[0]*sigma, -mean/r*sigma, 1e-3)
			near(t, "second derivative", got[1]*sigma*sigma, (meanSq-mean*mean)/r/r*sigma*sigma, 2e-3)
			// what they are for: ln G where E is off by a standard deviation
			for _, d := range []float64{-sigma, sigma} {
				sum := 0.0
				for _, l := range test.legs {
					sum += l.For * math.Exp(law().LnD(l.T0)-d/r*(1/l.T0-middle))
				}
				near(t, "ln G", d*(got[0]+d*got[1]/2), math.Log(sum/all), 1e-9)
			}
			if p.byE(0) != [2]float64{} {
				t.Error("a law without an error of E has derivatives by it")
			}
		})
	}
}

// A law of unknown range is taken to be known best where it is used: at the
// temperature that stands in for the path, E does not matter to first order.
func TestByEOfALawOfUnknownRange(t *testing.T) {
	p := sharp()
	s := p.study(nil, p.path(t, "as it was", 1))
	c := &s.Crystals[0]
	q, err := newProfile(&element{crystal: c, element: &c.Elements[0]}, &s.Paths[0], 0)
	if err != nil {
		t.Fatal(err)
	}
	near(t, "first derivative", q.byE(14e3)[0]*14e3, 0, 1e-6)
}
