package thermal

import (
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"bankfire/thermal/numeric"
)

// TestLegsComeAgain: along paths with legs that come again, at one distance and at others, integrals and times above are the
// sums over the legs, wherever the path is cut and whatever counts.
func TestLegsComeAgain(t *testing.T) {
	const tol = 1e-13 // round-off of a sum of 30 legs, and of the times at which one is cut
	r := rand.New(rand.NewPCG(2, 9))
	found := 0
	for n := range 300 {
		legs := []Leg{randomLeg(r)}
		for len(legs) < 30 {
			l := randomLeg(r)
			l.Setting = r.IntN(3)
			if back := 1 + r.IntN(4+n%8); back <= len(legs) {
				l = legs[len(legs)-back]
				l.Setting = (l.Setting + r.IntN(4)/3) % 3
			}
			if l.Kind == SheetCooling { // right to 1e-11 only
				l.Kind = Hold
			}
			legs = append(legs, l)
		}
		h := set(t, legs)
		for _, back := range h.again {
			found += back
		}
		rangeAndJumps(t, h)
		e, k, temp := between(r, -5000, 80000), r.IntN(2), between(r, 700, 1500)
		first, last := r.IntN(10), 10+r.IntN(20)
		t0, t1 := h.Start(first)+between(r, 0, 0.9)*h.legs[first].For, h.Start(last)+between(r, 0.1, 1)*h.legs[last].For
		if n%3 == 0 {
			t0, t1 = 0, h.Life()
		}
		w := Window{Setting: r.IntN(3), Above: temp}
		whole, hot, above := math.Inf(-1), math.Inf(-1), 0.0
		for i := range legs {
			l, from, to := &h.legs[i], math.Max(0, t0-h.Start(i)), h.legs[i].For
			if t1 < h.Start(i+1) {
				to = t1 - h.Start(i)
			}
			above += l.TimeAbove(temp)
			if !(from < to) {
				continue
			}
			whole = numeric.LnAdd(whole, l.LnArrhenius(e, k, from, to))
			if w.Setting == 0 || w.Setting == l.Setting {
				part := l.arrheniusIn(e, k, temp, math.Inf(1), from, to)
				hot = numeric.LnAdd(hot, part.log())
			}
		}
		name := fmt.Sprintf("path %d, e = %g, k = %d, %g to %g s", n, e, k, t0, t1)
		cut := tol * (1 + math.Abs(whole))
		closeTo(t, name, h.LnArrhenius(e, k, t0, t1), whole, cut)
		closeTo(t, "hot part of "+name, h.LnArrheniusIn(e, k, w, t0, t1), hot, cut)
		closeTo(t, "time above of "+name, h.TimeAbove(temp), above, tol*h.Life())
	}
	if found < 1000 {
		t.Errorf("legs came again %d legs later in all; the test would not see much", found)
	}
}

// rangeAndJumps compares both with what each leg says for itself.
func rangeAndJumps(t *testing.T, h *History) {
	t.Helper()
	lo, hi := math.Inf(1), math.Inf(-1)
	for i := range h.legs {
		a, b := h.legs[i].Range()
		lo, hi = min(lo, a), max(hi, b)
	}
	if a, b := h.Range(); a != lo || b != hi {
		t.Errorf("from %g to %g K, want %g to %g K", a, b, lo, hi)
	}
	jumps := h.Jumps(nil, 1e-3)
	for i := 1; i < len(h.legs); i++ {
		before, after := h.legs[i-1].before(math.Inf(1)), h.legs[i].At(0)
		want := math.Abs(1/before-1/after) > 1e-3*(1/lo-1/hi)
		if got := slices.Contains(jumps, h.Start(i)); got != want {
			t.Errorf("from %g to %g K at the start of leg %d: jump %t, want %t", before, after, i, got, want)
		}
	}
}
