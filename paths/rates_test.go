package paths

import (
	"context"
	"math"
	"math/rand/v2"
	"sync"
	"testing"
)

// simulate weighs one true path against repeats of the same measurement, each
// with noise of its own, and returns the outcomes. Repeat i depends on seed and
// i alone.
func simulate(t *testing.T, p couple, seed uint64, repeats int) []Outcome {
	t.Helper()
	if underRace {
		t.Skip("a long simulation; TestWeighSameBitsWhateverTheJobs runs the same side by side")
	}
	out, errs := make([]Outcome, repeats), make([]error, repeats)
	path := p.path(t, "as it was", 1)
	next := make(chan int)
	var team sync.WaitGroup
	for range 4 {
		team.Go(func() {
			for i := range next {
				r, err := Weigh(context.Background(), p.study(rand.New(rand.NewPCG(seed, uint64(i))), path), 1)
				if errs[i] = err; err == nil {
					out[i] = r.Paths[0].Outcome
				}
			}
		})
	}
	for i := range repeats {
		next <- i
	}
	close(next)
	team.Wait()
	if err := firstErrors(errs); err != nil {
		t.Fatal(err)
	}
	return out
}

// The interval holds the truth, and a true path reproduces, as often as is
// said, plateaux and all. The limits of the counts are 3.3 standard deviations
// of the binomial distribution.
func TestRatesAreAsStated(t *testing.T) {
	if underRace {
		t.Skip("other tests see what runs side by side")
	}
	const repeats = 300
	p := couple{core: 40, mantle: 90, reach: 2 * um, spot: 0.5 * um, sigma: 3, points: 15, window: 6 * um}
	passes, in68, in95 := 0, 0, 0
	for _, o := range simulate(t, p, 8, repeats) {
		if o.Verdict == Reproduces {
			passes++
		}
		if o.Shift68[0] <= 1 && 1 <= o.Shift68[1] {
			in68++
		}
		if o.Shift95[0] <= 1 && 1 <= o.Shift95[1] {
			in95++
		}
	}
	rate(t, "reproduces", passes, repeats, 0.95)
	rate(t, "68 % interval", in68, repeats, 0.68)
	rate(t, "95 % interval", in95, repeats, 0.95)
}

// Where the profile sets an upper limit only, the truth lies below the limit at
// least as often as is said.
func TestRateOfAnUpperLimit(t *testing.T) {
	const repeats = 60
	p := couple{core: 40, mantle: 90, reach: 0.1 * um, spot: 1 * um, sigma: 2, points: 15, window: 4 * um}
	below, open := 0, 0
	for _, o := range simulate(t, p, 9, repeats) {
		if 1 <= o.Shift95[1] {
			below++
		}
		if o.Shift95[0] == 0 {
			open++
		}
		if math.IsInf(o.Shift95[1], 1) {
			t.Errorf("no upper limit: %+v", o)
		}
	}
	t.Logf("limit above the truth in %d, open below in %d of %d", below, open, repeats)
	// 95 % less 3.3 standard deviations
	if least := 0.95*repeats - 3.3*math.Sqrt(0.95*0.05*repeats); !(float64(below) >= least) {
		t.Errorf("limit above the truth in %d of %d, want at least %.0f", below, repeats, least)
	}
	if !(float64(open) >= 0.9*repeats) {
		t.Errorf("open below in %d of %d only, though the spot hides the truth", open, repeats)
	}
}
