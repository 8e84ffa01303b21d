package study

import (
	"strings"
	"testing"

	"bankfire/thermal"
)

// TestMoves: moves of the rim in the crystal's own time, what is grown and lost, and what
// is refused or bars a path.
func TestMoves(t *testing.T) {
	s, err := existing(t, `exists_from = "10 yr after start"
grows = [ { rate = "0.5 um/yr", from = "12 yr after start", until = "22 yr after start" }, { rate = "-1 um/yr", from = "22 yr after start", until = "25 yr after start" } ]`)
	if err != nil {
		t.Fatal(err)
	}
	c, h := &s.Crystals[0], s.Paths[0].History
	p, _, err := c.Problem(&c.Elements[0], h)
	if err != nil || len(p.Moves) != 2 {
		t.Fatalf("moves %+v, %v", p, err)
	}
	near(t, "from", p.Moves[0].From/thermal.Year, 2)
	near(t, "until", p.Moves[1].Until/thermal.Year, 15)
	near(t, "rate", p.Moves[1].Rate*1e6*thermal.Year, -1)
	grown, lost := c.GrownLost(h)
	near(t, "grown", grown*1e6, 5)
	near(t, "lost", lost*1e6, 3)

	s, err = existing(t, `grows = [ { rate = "-1 um/yr", from = "start of wake", until = "end of wake" } ]`)
	if err != nil {
		t.Fatal(err)
	}
	bars, err := s.Barred(&s.Paths[1])
	if err != nil || len(bars) != 1 || !strings.Contains(Whys(bars)[0], `the path has no leg "wake"`) {
		t.Errorf("barred %q, %v", Whys(bars), err)
	}
	for keys, want := range map[string]string{
		`grows = [ { rate = "1 um/yr", from = "1 yr after start", until = "25 yr after start" } ]`:                                                                             "the rim grows by 24 um",
		`grows = [ { rate = "1 um/yr", from = "5 yr after start", until = "2 yr after start" } ]`:                                                                              "comes before it",
		`grows = [ { rate = "0 um/yr", from = "1 yr after start", until = "2 yr after start" } ]`:                                                                              "no rate",
		`grows = [ { rate = "1 um", from = "1 yr after start", until = "2 yr after start" } ]`:                                                                                 "velocity",
		`grows = [ { rate = "1 um/yr", from = "1 yr after start" } ]`:                                                                                                          "missing",
		`grows = [ { rate = "1 um/yr", from = "1 yr after start", until = "4 yr after start" }, { rate = "1 um/yr", from = "3 yr after start", until = "5 yr after start" } ]`: "still moves otherwise",
	} {
		if _, err := existing(t, keys); err == nil || !strings.Contains(err.Error(), want) {
			t.Errorf("%s: got %v, want %q", keys, err, want)
		}
	}
}
