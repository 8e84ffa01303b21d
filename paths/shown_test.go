package paths

import (
	"fmt"
	"math"
	"slices"
	"testing"
)

// TestShown: what is shown of members is what screening found, in steps too, and both
// samples are fair.
func TestShown(t *testing.T) {
	if underRace {
		t.Skip("other tests see what runs side by side")
	}
	for _, test := range []struct {
		rim         string
		count, most int
	}{{heldRim, 5000, mostShown}, {stepsRim, mostShownRun + 4, mostShownRun}, {heldRim, 60, mostShown}} {
		t.Run(fmt.Sprintf("%d members", test.count), func(t *testing.T) {
			r, rows := screened(t, familyStudy(t, test.count, test.rim, ""), 2)
			f := &r.Families[0]
			shown := f.Shown
			for name, list := range map[string][]Row{"drawn": shown.Drawn, "reproducing": shown.Reproduces} {
				for k := range list {
					if got, want := fmt.Sprint(list[k]), fmt.Sprint(rows[list[k].Index]); got != want {
						t.Errorf("%s: member %d is %s, was %s", name, list[k].Index, got, want)
					}
					if k > 0 && list[k].Index <= list[k-1].Index {
						t.Errorf("%s: member %d after %d", name, list[k].Index, list[k-1].Index)
					}
				}
			}
			kept := f.Tally.Counts[Reproduces]
			if n := min(int64(test.most), kept); int64(len(shown.Reproduces)) != n || n == 0 ||
				slices.ContainsFunc(shown.Reproduces, func(r Row) bool { return r.Verdict != Reproduces }) {
				t.Errorf("%d of %d that reproduce are shown, or others", len(shown.Reproduces), kept)
			}
			fair(t, shown.Drawn, test.count, test.most)
		})
	}
}

// fair wants as many members from each quarter of a family as a draw at random has,
// within five standard deviations; all of a small family.
func fair(t *testing.T, rows []Row, count, most int) {
	t.Helper()
	if count <= most {
		if len(rows) != count {
			t.Errorf("%d of %d members are shown", len(rows), count)
		}
		return
	}
	var quarters [4]float64
	for _, r := range rows {
		quarters[4*r.Index/int64(count)]++
	}
	n := float64(len(rows))
	if !(n > 0.5*float64(most)) || n > float64(most) { // drawn with repetition
		t.Errorf("%g members are shown, want some %d", n, most)
	}
	for k, q := range quarters {
		if !(math.Abs(q-n/4) <= 5*math.Sqrt(n*3/16)) {
			t.Errorf("%g of %g members are of quarter %d", q, n, k)
		}
	}
}
