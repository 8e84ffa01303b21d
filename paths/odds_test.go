package paths

import (
	"context"
	"math"
	"math/rand/v2"
	"testing"

	"bankfire/diffusion"
	"bankfire/paths/study"
)

// The interval of the ratio of two parabolas is that of the difference of two
// values with Gaussian errors; 1.95996 and 0.994457883 are the standard deviations
// of a value within 95 and 68 %. Golden section meets it to its own 1e-9.
func TestDemandOfParabolas(t *testing.T) {
	for _, test := range []struct{ x, y, sx, sy float64 }{
		{2, -1, 0.3, 0.4}, {-3, 4, 0.1, 0.1}, {5, 0, 0.01, 0.9}, {0, 7, 1.5, 0.2},
	} {
		cs := []Curve{bowl(20, test.x, test.sx, 22, 2), bowl(19, test.y, test.sy, 22, 2)}
		var o Outcome
		Judge(&o, cs, nil, 0.95)
		list := Demands(cs, o.Profiles, 0.95)
		if o.Verdict != AtOdds || len(list) != 1 {
			t.Fatalf("%s with %d pairs, want at odds with one", o.Verdict, len(list))
		}
		d, sigma, apart := list[0], math.Hypot(test.sx, test.sy), math.Abs(test.x-test.y)
		if (d.Of == 0) != (test.x > test.y) || d.Of+d.To != 1 {
			t.Errorf("%d relative to %d for %+v", d.Of, d.To, test)
		}
		const golden = 1e-8
		near(t, "ratio", math.Log(d.Ratio), apart, golden)
		near(t, "chi-square", d.ChiSq, square(apart/sigma), golden*square(apart/sigma))
		for k, z := range map[*[2]float64]float64{&d.Ratio68: 0.994457883, &d.Ratio95: 1.959963985} {
			near(t, "lower end", math.Log(k[0]), apart-z*sigma, golden)
			near(t, "upper end", math.Log(k[1]), apart+z*sigma, golden)
		}
	}
}

// Curves with two lowest points and lopsided ones: the profile likelihood on a fine
// lattice, done as its definition says.
func TestDemandIsTheProfileLikelihood(t *testing.T) {
	const step = 1e-2 // of the lattice in ln m, by which an end may be off
	rng := rand.New(rand.NewPCG(60, 1))
	for range 20 {
		cs := []Curve{rough(rng), rough(rng)}
		xs := lattice(-7, 7, step)
		values := func(c *Curve) []float64 {
			out := make([]float64, len(xs))
			for i, x := range xs {
				out[i] = c.At(x)
			}
			return out
		}
		a, b := values(&cs[0]), values(&cs[1])
		_, least := cs[0].Lowest()
		_, other := cs[1].Lowest()
		level := Critical(0.95, 1)
		lo, hi := math.Inf(1), math.Inf(-1)
		for i := range xs {
			for j := range xs {
				if a[i]+b[j] <= least+other+level {
					lo, hi = math.Min(lo, xs[i]-xs[j]), math.Max(hi, xs[i]-xs[j])
				}
			}
		}
		got := ratioInterval(&cs[0], &cs[1], level)
		near(t, "lower end", math.Log(got[0]), lo, 2*step)
		near(t, "upper end", math.Log(got[1]), hi, 2*step)
	}
}

func lattice(from, to, step float64) []float64 {
	var xs []float64
	for i := range int(math.Round((to-from)/step)) + 1 {
		xs = append(xs, from+float64(i)*step)
	}
	return xs
}

// rough is a curve of two lowest points with knots half a unit apart, high at its
// ends.
func rough(rng *rand.Rand) Curve {
	c := Curve{Points: 22, Free: 2}
	x1, x2, s1, s2, extra := 4*rng.Float64()-2, 4*rng.Float64()-2, 0.3+rng.Float64(), 0.3+rng.Float64(), 6*rng.Float64()
	for i := -14; i <= 14; i++ {
		x := float64(i) / 2
		c.LnM = append(c.LnM, x)
		// a soft minimum of two parabolas
		p, q := square((x-x1)/s1), extra+square((x-x2)/s2)
		c.ChiSq = append(c.ChiSq, 20+math.Min(p, q)-math.Log1p(math.Exp(-math.Abs(p-q))))
	}
	c.settleSlopes()
	return c
}

// An open side of a profile leaves the ratio open, on the side that it concerns.
func TestDemandThatIsOpen(t *testing.T) {
	upper := curveOf([]float64{-10, -5, -2, 0, 2, 5, 10}, func(x float64) float64 { return 20 + 40*square(math.Max(x+2, 0)) },
		func(x float64) float64 { return 80 * math.Max(x+2, 0) })
	upper.Points, upper.Free = 22, 2
	cs := []Curve{bowl(20, 3, 0.1, 22, 2), upper}
	var o Outcome
	Judge(&o, cs, nil, 0.95)
	list := Demands(cs, o.Profiles, 0.95)
	if len(list) != 1 || list[0].Of != 0 || !math.IsInf(list[0].Ratio95[1], 1) || !(list[0].Ratio95[0] > 50 && list[0].Ratio95[0] < math.Exp(5)) {
		t.Errorf("got %+v, want a ratio of at least somewhat below e^5", list)
	}
}

// Of several, those that disagree most come first; one that does not pass alone has
// no say.
func TestDemandsOfWhom(t *testing.T) {
	cs := []Curve{bowl(20, 0, 0.5, 22, 2), bowl(20, 0.3, 0.5, 22, 2), bowl(20, 4, 0.5, 22, 2), bowl(200, 9, 0.5, 22, 2), bowl(20, -3, 0.5, 22, 2)}
	var o Outcome
	Judge(&o, cs, nil, 0.95)
	var got [][2]int
	for _, d := range Demands(cs, o.Profiles, 0.95) {
		got = append(got, [2]int{d.Of, d.To})
	}
	want := [][2]int{{2, 4}, {2, 0}, {2, 1}, {1, 4}, {0, 4}}
	if len(got) != len(want) {
		t.Fatalf("got %v, want %v", got, want)
	}
	for k := range want {
		if got[k] != want[k] {
			t.Fatalf("got %v, want %v", got, want)
		}
	}
}

// The law of one of two elements is 1200 times slower than the truth: the path is
// at odds, and the ratio demanded holds 1200 at the rates promised. With the true
// laws the study reproduces as often as its confidence says. Both within 3.3
// standard deviations of the binomial distribution.
func TestDemandOfASlowerLaw(t *testing.T) {
	if underRace {
		t.Skip("many simulations")
	}
	const repeats, slower = 40, 1200
	p := couple{core: 40, mantle: 90, reach: 2 * um, spot: 0.5 * um, sigma: 3, points: 13, window: 6 * um}
	path := p.path(t, "as it was", 1)
	run := func(times float64, seed uint64) []Outcome {
		return simulateCrystals(t, repeats, func(i int) *study.Study {
			rng := rand.New(rand.NewPCG(seed, uint64(i)))
			s, other := p.study(rng, path), p.study(rng, path)
			second := other.Crystals[0].Elements[0]
			second.Name, second.Law.Law = "Al", diffusion.NewLaw(7e-8/times, 273e3)
			s.Crystals[0].Elements = append(s.Crystals[0].Elements, second)
			return s
		})
	}
	odds, in68, in95 := 0, 0, 0
	for _, o := range run(slower, 61) {
		if len(o.Odds) == 0 {
			continue
		}
		odds++
		d := o.Odds[0]
		if d.Of != 1 || d.To != 0 {
			t.Fatalf("%d relative to %d, want the second relative to the first", d.Of, d.To)
		}
		if d.Ratio68[0] <= slower && slower <= d.Ratio68[1] {
			in68++
		}
		if d.Ratio95[0] <= slower && slower <= d.Ratio95[1] {
			in95++
		}
	}
	// each of the two passes alone at 95 %, at the best of its own amounts
	rate(t, "at odds", odds, repeats, 0.95*0.95)
	rate(t, "68 % interval holds the truth", in68, odds, 0.68)
	rate(t, "95 % interval holds the truth", in95, odds, 0.95)
	passes := 0
	for _, o := range run(1, 62) {
		if o.Verdict == Reproduces {
			passes++
		}
	}
	rate(t, "reproduces with the true law", passes, repeats, 0.95)
}

// A study that was weighed says it of the joint verdict or of a crystal's, by the
// profiles' places among those that were run and those that were not.
func TestWeighSaysWhatIsDemanded(t *testing.T) {
	p := sharp()
	s := p.study(nil, p.path(t, "as it was", 1), p.path(t, "too long", 30))
	second := s.Crystals[0].Elements[0]
	second.Name, second.Law.Law = "Al", diffusion.NewLaw(7e-8/20, 273e3)
	s.Crystals[0].Elements = append(s.Crystals[0].Elements, second)
	r, err := Weigh(context.Background(), s, 1)
	if err != nil {
		t.Fatal(err)
	}
	for i := range r.Paths {
		odds := r.Paths[i].Outcome.Odds
		if len(odds) != 1 || odds[0].Of != 1 || odds[0].To != 0 {
			t.Fatalf("%+v, want of the second relative to the first", odds)
		}
		near(t, "ratio", odds[0].Ratio, 20, 0.2)
	}
}
