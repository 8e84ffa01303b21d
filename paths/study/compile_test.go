package study

import (
	"testing"

	"bankfire/diffusion"
)

// TestProblemCompiles hands what is read to the solver and runs it.
func TestProblemCompiles(t *testing.T) {
	for _, name := range []string{"every-key", "harrow"} {
		t.Run(name, func(t *testing.T) {
			s, err := Read("testdata/" + name + "/study.toml")
			if err != nil {
				t.Fatal(err)
			}
			h := s.Paths[0].History
			p, free, err := s.Crystals[0].Problem(&s.Crystals[0].Elements[0], h)
			if err != nil {
				t.Fatal(err)
			}
			plan, err := diffusion.Compile(p, diffusion.Options{})
			if err != nil {
				t.Fatal(err)
			}
			var course diffusion.Course
			if err := plan.Course(&course, h, h.Life()); err != nil {
				t.Fatal(err)
			}
			fields := make([]diffusion.Field, 1)
			if err := plan.Run(fields, []diffusion.Job{{Course: &course}}); err != nil {
				t.Fatal(err)
			}
			if got := len(fields[0].Cols); got != 1+len(free) {
				t.Errorf("%d columns, want the answer and %d", got, len(free))
			}
		})
	}
}
