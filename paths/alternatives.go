package paths

import (
	"cmp"
	"context"

	"bankfire/paths/study"
)

// attempt is one element run along a path with one of the starts that it may have
// had.
type attempt struct {
	profile *profile
	result  ProfileResult
	curve   Curve
}

// Tried is one combination of the starts of a crystal's elements, judged on a path:
// these elements jointly.
type Tried struct {
	Starts   []StartTaken // of the elements that have a choice, in the study's order
	Verdict  Verdict
	Shift    float64 // the multiplier on D that agrees best
	Tail     float64 // NaN if not judged
	Misfit   float64 // chi-square of the path as it is
	Degrees  int     // of freedom: the choice among combinations takes none
	AboveOne float64 // Misfit less that of the combination that was taken
	Taken    bool
}

// StartTaken is the start of one element in a combination.
type StartTaken struct {
	Element *study.Element
	Name    string // of the start, or its number in the list if it has none
	Named   bool
}

// choose takes, for each crystal, the combination of its elements' starts that does
// best on the path, by itself: the best verdict, of equal ones the largest tail, then
// the least chi-square for its degrees.
func (w *weighedPath) choose(ctx context.Context, of *weighing) error {
	w.starts, w.shared = make([][]Tried, len(of.crystals)), make([]Curve, len(of.crystals))
	for place, c := range of.crystals {
		choices := c.Choices()
		switch {
		case w.bars(c):
			continue
		case len(choices) < 2:
			if err := w.share(ctx, of, place); err != nil {
				return err
			}
			continue
		}
		members := of.members(place)
		best := -1
		for k, choice := range choices {
			w.take(of, members, choice)
			t, err := w.try(ctx, of, place)
			if err != nil {
				return err
			}
			t.Starts = taken(c, choice)
			w.starts[place] = append(w.starts[place], t)
			if best < 0 || t.compare(&w.starts[place][best]) > 0 {
				best = k
			}
		}
		w.take(of, members, choices[best])
		if err := w.share(ctx, of, place); err != nil {
			return err
		}
		list := w.starts[place]
		list[best].Taken = true
		for k := range list {
			list[k].AboveOne = list[k].Misfit - list[best].Misfit
		}
	}
	return nil
}

// members are the numbers of the elements measured in a crystal.
func (w *weighing) members(place int) []int {
	var list []int
	for n := range w.elements {
		if w.elements[n].place == place {
			list = append(list, n)
		}
	}
	return list
}

// take puts the runs with the chosen starts in the place of the crystal's elements.
func (w *weighedPath) take(of *weighing, members, choice []int) {
	for _, n := range members {
		a := &w.tried[n][choice[of.elements[n].index]]
		w.profiles[n], w.results[n], w.curves[n] = a.profile, a.result, a.curve
	}
}

// keep notes what has become of the curve of element n with the start that was taken.
func (w *weighedPath) keep(n int) {
	for k := range w.tried[n] {
		if a := &w.tried[n][k]; a.profile == w.profiles[n] {
			a.curve = w.curves[n]
		}
	}
}

// try judges the elements of a crystal jointly with the starts that are in place.
func (w *weighedPath) try(ctx context.Context, of *weighing, place int) (Tried, error) {
	if err := w.share(ctx, of, place); err != nil {
		return Tried{}, err
	}
	list := w.gather(ctx, of, place)
	if err := sharpenAll(list); err != nil {
		return Tried{}, err
	}
	var cs []Curve
	for _, c := range list {
		cs = append(cs, *c.of)
	}
	for _, n := range of.members(place) {
		w.keep(n)
	}
	f := jointly(cs, alone(cs, of.study.Confidence), of.study.Confidence)
	return Tried{Verdict: f.Verdict, Shift: f.Shift, Tail: f.Tail, Misfit: f.Misfit, Degrees: f.Degrees}, nil
}

// taken names the starts of a choice.
func taken(c *study.Crystal, choice []int) []StartTaken {
	var list []StartTaken
	for n, k := range choice {
		if e := &c.Elements[n]; e.Alternatives != nil {
			list = append(list, StartTaken{e, e.StartName(k), e.Alternatives[k].Name != ""})
		}
	}
	return list
}

// compare is positive if t does better than the other.
func (t *Tried) compare(other *Tried) int {
	return cmp.Or(cmp.Compare(t.rank(), other.rank()), cmp.Compare(t.Tail, other.Tail),
		cmp.Compare(other.Misfit-float64(other.Degrees), t.Misfit-float64(t.Degrees)))
}

// rank is higher for a better verdict.
func (t *Tried) rank() int {
	switch t.Verdict {
	case Reproduces:
		return 4
	case TooSharp, TooSmooth:
		return 3
	case AtOdds:
		return 2
	case WrongShape:
		return 1
	}
	return 0
}
