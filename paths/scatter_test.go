package paths

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"sync"
	"testing"

	"bankfire/paths/study"
)

// apart is one bowl a crystal, of sigma 0.5 and the lowest points given.
func apart(at ...float64) []Curve {
	var cs []Curve
	for k, x := range at {
		c := bowl(20, x, 0.5, 22, 2)
		c.Crystal = k
		cs = append(cs, c)
	}
	return cs
}

// TestScatterOfParabolas: for amounts with Gaussian errors it is the weighted sum
// of squares about the weighted mean, done by hand.
func TestScatterOfParabolas(t *testing.T) {
	var o Outcome
	Judge(&o, apart(-1, 0, 1, 2), nil, 0.95)
	s := o.Scatter
	if s.Crystals != 4 || s.Degrees != 3 {
		t.Fatalf("%d crystals, %d degrees", s.Crystals, s.Degrees)
	}
	near(t, "common", s.Common, math.Exp(0.5), 1e-9)
	near(t, "chi-square", s.ChiSq, (2.25+0.25+0.25+2.25)/0.25, 1e-9)
	// with three degrees the tail is erfc(sqrt(x/2)) + sqrt(2 x/pi) exp(-x/2) (Abramowitz and Stegun 1964, 26.4.4)
	near(t, "tail", s.Tail, math.Erfc(math.Sqrt(10))+math.Sqrt(40/math.Pi)*math.Exp(-10), 1e-12)
	// the 68 % interval of one value is 0.99446 standard deviations to either side, of a mean of four half of that
	near(t, "half the interval", math.Log(s.Common68[1]/s.Common68[0])/2, 0.994457883*0.25, 1e-6)
}

// TestScatterOfWhom: crystals that no amount of diffusion suits, or that leave
// theirs open on a side, have no say; nor is there scatter among two.
func TestScatterOfWhom(t *testing.T) {
	bad := bowl(200, 3, 0.5, 22, 2)
	bad.Crystal = 7
	open := curveOf([]float64{-10, -5, 0, 5, 10}, func(x float64) float64 { return 20 + square(math.Max(x, 0)) },
		func(x float64) float64 { return 2 * math.Max(x, 0) })
	open.Points, open.Free, open.Crystal = 22, 2, 8
	for _, test := range []struct {
		name     string
		cs       []Curve
		crystals int
		chiSq    float64 // NaN is none
	}{
		{"one that does not fit", append(apart(0, 1, 2), bad), 3, 8},
		{"one with an upper limit", append(apart(0, 1, 2), open), 3, 8},
		{"two", apart(0, 2), 2, math.NaN()},
		{"one", apart(0), 1, math.NaN()},
		{"all alike", apart(1, 1, 1), 3, 0},
	} {
		t.Run(test.name, func(t *testing.T) {
			var o Outcome
			Judge(&o, test.cs, nil, 0.95)
			if s := o.Scatter; s.Crystals != test.crystals || math.IsNaN(s.Tail) != math.IsNaN(test.chiSq) {
				t.Fatalf("got %+v", s)
			}
			if !math.IsNaN(test.chiSq) {
				near(t, "chi-square", o.Scatter.ChiSq, test.chiSq, 1e-9)
			}
		})
	}
}

// TestChance: numbers of a binomial table (N = 20 at 0.05: 0.7358 at most 1, 0.9245
// at most 2, 0.9841 at most 3; Abramowitz and Stegun 1964, table 26.1 by its
// incomplete beta function) and by hand.
func TestChance(t *testing.T) {
	for _, test := range []struct {
		crystals   int
		confidence float64
		most       int
	}{{2, 0.95, 1}, {4, 0.95, 1}, {20, 0.95, 3}, {20, 0.68, 10}, {3, 0.99, 0}, {2, 0.1, 2}} {
		t.Run(fmt.Sprintf("%d at %g", test.crystals, test.confidence), func(t *testing.T) {
			var o Outcome
			Judge(&o, apart(make([]float64, test.crystals)...), nil, test.confidence)
			c := o.Chance
			if c.Judged != test.crystals || c.Most != test.most {
				t.Errorf("got %+v, want at most %d of %d", c, test.most, test.crystals)
			}
			near(t, "expected", c.Expected, float64(test.crystals)*(1-test.confidence), 1e-12)
			near(t, "worst", c.Worst, 1-math.Pow(1-Tail(20, 20), float64(test.crystals)), 1e-12)
		})
	}
	for _, test := range []struct {
		name   string
		off    float64 // ln of the amount that one of ten asks for
		failed int
		allows bool
	}{{"none fails", 0, 0, true}, {"one fails barely", 1.8, 1, true}, {"one fails badly", 5, 1, false}} {
		t.Run(test.name, func(t *testing.T) {
			var o Outcome
			Judge(&o, apart(append(make([]float64, 9), test.off)...), nil, 0.95)
			if c := o.Chance; c.Failed != test.failed || c.Allows(0.95) != test.allows {
				t.Errorf("got %+v", c)
			}
		})
	}
	var o Outcome
	if Judge(&o, apart(0), nil, 0.95); o.Chance != (Chance{}) {
		t.Errorf("one crystal: %+v", o.Chance)
	}
}

// Crystals that share a true history scatter about it as their errors say: the
// tails of the scatter are even between 0 and 1, the common value's interval holds
// the truth and so many crystals fail as chance has it. Those that fail by chance
// whatever the amount of diffusion have no say, which leaves too few now and then.
func TestScatterOfTheTruth(t *testing.T) {
	if underRace {
		t.Skip("other tests see what runs side by side")
	}
	const repeats, crystals = 100, 4
	p := couple{core: 40, mantle: 90, reach: 2 * um, spot: 0.5 * um, sigma: 3, points: 11, window: 6 * um}
	path := p.path(t, "as it was", 1)
	count(t, simulateCrystals(t, repeats, func(i int) *study.Study {
		var of []*study.Study
		for k := range crystals {
			q := p
			q.points, q.mantle = 11+k, 90+10*float64(k)
			of = append(of, q.study(rand.New(rand.NewPCG(50, uint64(crystals*i+k))), path))
		}
		return inCrystals(of...)
	}))
}

// The same for amounts with Gaussian errors, of many sizes, and more of them.
func TestScatterOfALinearModel(t *testing.T) {
	rng := rand.New(rand.NewPCG(51, 1))
	outcomes := make([]Outcome, 1000)
	for i := range outcomes {
		var cs []Curve
		for k := range 5 {
			sigma, floor := 0.2+0.1*float64(k), 0.0
			for range 20 {
				floor += square(rng.NormFloat64())
			}
			c := bowl(floor, sigma*rng.NormFloat64(), sigma, 21, 0)
			c.Crystal = k
			cs = append(cs, c)
		}
		Judge(&outcomes[i], cs, nil, 0.95)
	}
	count(t, outcomes)
}

// count holds the rates of scatter and chance over outcomes of a true path to
// limits of 3.3 standard deviations of the binomial distribution.
func count(t *testing.T, outcomes []Outcome) {
	t.Helper()
	below, counted, inside, judged, failed := map[float64]int{}, 0, 0, 0, 0
	levels := []float64{0.05, 0.25, 0.5, 0.75}
	for _, o := range outcomes {
		judged, failed = judged+o.Chance.Judged, failed+o.Chance.Failed
		if math.IsNaN(o.Scatter.Tail) {
			continue
		}
		counted++
		for _, level := range levels {
			if o.Scatter.Tail < level {
				below[level]++
			}
		}
		if o.Scatter.Common68[0] <= 1 && 1 <= o.Scatter.Common68[1] {
			inside++
		}
	}
	if counted < len(outcomes)*9/10 {
		t.Errorf("scatter in %d of %d only", counted, len(outcomes))
	}
	for _, level := range levels {
		rate(t, fmt.Sprintf("tail below %g", level), below[level], counted, level)
	}
	rate(t, "common 68 % interval", inside, counted, 0.68)
	rate(t, "crystals fail", failed, judged, 0.05)
}

// simulateCrystals weighs the first path of repeats of a study.
func simulateCrystals(t *testing.T, repeats int, make func(i int) *study.Study) []Outcome {
	t.Helper()
	if underRace {
		t.Skip("a long simulation; TestWeighSameBitsWhateverTheJobs runs the same side by side")
	}
	out, errs, next := []Outcome{}, []error{}, sync.Mutex{}
	for range repeats {
		out, errs = append(out, Outcome{}), append(errs, nil)
	}
	at := -1
	var team sync.WaitGroup
	for range 4 {
		team.Go(func() {
			for {
				next.Lock()
				at++
				i := at
				next.Unlock()
				if i >= repeats {
					return
				}
				r, err := Weigh(context.Background(), make(i), 1)
				if errs[i] = err; err == nil {
					out[i] = r.Paths[0].Outcome
				}
			}
		})
	}
	team.Wait()
	if err := firstErrors(errs); err != nil {
		t.Fatal(err)
	}
	return out
}
