package paths

import (
	"bytes"
	"context"
	"errors"
	"slices"
	"strings"
	"testing"
	"time"

	"bankfire/paths/study"
	"bankfire/thermal"
)

const heldRim = `{ held = "mantle" }`

// prepared is a study made ready.
func prepared(t *testing.T, s *study.Study, o ScreenOptions) *Screening {
	t.Helper()
	sc, err := NewScreening(t.Context(), s, o)
	if err != nil {
		t.Fatal(err)
	}
	return sc
}

// screenedBytes are those of the blocks, which must come in order.
func screenedBytes(t *testing.T, sc *Screening, from, to int64) (out [][]byte) {
	t.Helper()
	if err := sc.Screen(t.Context(), from, to, func(b *Block) error {
		if b.Number != from+int64(len(out)) {
			t.Errorf("block %d comes after %d others from %d on", b.Number, len(out), from)
		}
		out = append(out, bytesOf(t, b))
		return nil
	}); err != nil {
		t.Fatal(err)
	}
	return out
}

// second is another family for familyStudy.
const second = `[[family]]
name = "second"
draw = { method = "random", count = 5000 }
legs = [ { hold = "{store}", for = "1 kyr" } ]
[family.vary]
store = { from = "600 C", to = "700 C" }
`

// TestPartsAreTheWhole: blocks do not depend on jobs or on what is screened with them,
// through the bounds of families.
func TestPartsAreTheWhole(t *testing.T) {
	make := func(jobs int) *Screening {
		return prepared(t, familyStudy(t, 9000, heldRim, second), ScreenOptions{Jobs: jobs})
	}
	one := make(1)
	if one.Blocks() != 5 {
		t.Fatalf("%d blocks, want 3 of 9000 members and 2 of 5000", one.Blocks())
	}
	want := screenedBytes(t, one, 0, 5)
	if one.Done() != 14000 {
		t.Errorf("%d done", one.Done())
	}
	for _, jobs := range []int{2, 3, 8} {
		sc := make(jobs)
		if got := screenedBytes(t, sc, 0, 5); !slices.EqualFunc(got, want, bytes.Equal) {
			t.Errorf("%d jobs: other blocks", jobs)
		}
		for _, cut := range []int64{1, 3} {
			if got := slices.Concat(screenedBytes(t, sc, cut, 5), screenedBytes(t, sc, 0, cut)); !slices.EqualFunc(got, slices.Concat(want[cut:], want[:cut]), bytes.Equal) {
				t.Errorf("%d jobs, cut at %d: other blocks", jobs, cut)
			}
		}
	}
}

// TestChunksAreNoParts: members that are run in chunks make the blocks that one worker makes.
func TestChunksAreNoParts(t *testing.T) {
	const members = stepChunk + 3
	want := screenedBytes(t, prepared(t, familyStudy(t, members, stepsRim, ""), ScreenOptions{Jobs: 1}), 0, 1)
	got := screenedBytes(t, prepared(t, familyStudy(t, members, stepsRim, ""), ScreenOptions{Jobs: 3}), 0, 1)
	if !bytes.Equal(got[0], want[0]) {
		t.Error("three jobs make another block than one")
	}
}

// TestScreenStops: what the sink has is whole, and Screen returns.
func TestScreenStops(t *testing.T) {
	sc := prepared(t, familyStudy(t, 60_000, heldRim, ""), ScreenOptions{Jobs: 3})
	ctx, stop := context.WithCancel(t.Context())
	given := int64(0)
	err := sc.Screen(ctx, 0, sc.Blocks(), func(b *Block) error {
		if b.Tally.Count() != BlockSize {
			t.Errorf("a block of %d", b.Tally.Count())
		}
		if given++; given == 2 {
			stop()
		}
		return nil
	})
	if err != context.Canceled || given != 2 {
		t.Errorf("%v after %d blocks, stopped after 2", err, given)
	}
	full := errors.New("full")
	if err := sc.Screen(t.Context(), 0, sc.Blocks(), func(*Block) error { return full }); err != full {
		t.Errorf("the error of a sink becomes %v", err)
	}
	if err := sc.Screen(t.Context(), 4, 4, nil); err != nil {
		t.Errorf("no blocks: %v", err)
	}
}

// TestScreenStopsWithinABlock: a family that is run takes far longer than a block may.
func TestScreenStopsWithinABlock(t *testing.T) {
	sc := prepared(t, familyStudy(t, BlockSize, stepsRim, ""), ScreenOptions{Jobs: 2})
	ctx, stop := context.WithTimeout(t.Context(), 50*time.Millisecond)
	defer stop()
	if err := sc.Screen(ctx, 0, 1, func(*Block) error { t.Error("a block"); return nil }); err != context.DeadlineExceeded {
		t.Error(err)
	}
}

// TestFinishTakesWhatThereIs: the tally of some blocks is that of their members, one
// that cannot be the family's is refused.
func TestFinishTakesWhatThereIs(t *testing.T) {
	sc := prepared(t, familyStudy(t, 9000, heldRim, second), ScreenOptions{})
	tallies := make([]Tally, 2)
	if err := sc.Screen(t.Context(), 1, 2, func(b *Block) error { tallies[b.Family].Add(&b.Tally); return nil }); err != nil {
		t.Fatal(err)
	}
	r, err := sc.Finish(t.Context(), tallies)
	if err != nil {
		t.Fatal(err)
	}
	f, none := &r.Families[0], &r.Families[1]
	if f.Tally.Count() != BlockSize || f.Best() < BlockSize || f.Best() >= 2*BlockSize || len(r.Paths) != 1 {
		t.Errorf("of block 1 %d members, the best %d; %d paths", f.Tally.Count(), f.Best(), len(r.Paths))
	}
	if none.Tally.Count() != 0 || none.Best() != -1 {
		t.Errorf("of nothing %d members, the best %d", none.Tally.Count(), none.Best())
	}
	if _, err := sc.Finish(t.Context(), []Tally{{}, tallies[0]}); err == nil || !strings.Contains(err.Error(), `"second"`) {
		t.Errorf("the tally of another family: %v", err)
	}
}

// TestMethodIsForced: both agree, and a table that cannot be says why.
func TestMethodIsForced(t *testing.T) {
	const members = 5
	tallies := map[Method]Tally{}
	for _, by := range []Method{ByChoice, ByTable, InSteps} {
		sc := prepared(t, familyStudy(t, members, heldRim, ""), ScreenOptions{Jobs: 2, Method: by})
		if m := sc.engines[0].methods[0]; m.Table != (by != InSteps) {
			t.Errorf("method %v is %v", by, m)
		}
		if err := sc.Screen(t.Context(), 0, 1, func(b *Block) error { tallies[by] = b.Tally; return nil }); err != nil {
			t.Fatal(err)
		}
	}
	table, steps := tallies[ByTable], tallies[InSteps]
	if table.Counts != steps.Counts || table.Best != steps.Best || !(max(table.Misfit-steps.Misfit, steps.Misfit-table.Misfit) <= 2*curveError) {
		t.Errorf("by table %v, chi-square %v; in steps %v, %v", table.Counts, table.Misfit, steps.Counts, steps.Misfit)
	}
	var in *thermal.InputError
	_, err := NewScreening(t.Context(), familyStudy(t, members, stepsRim, ""), ScreenOptions{Method: ByTable})
	if !errors.As(err, &in) || !strings.Contains(in.Problem, "Ti in Q") || !strings.Contains(in.Problem, "rim") || in.Remedy == "" {
		t.Errorf("a table where rims change: %v", err)
	}
}
