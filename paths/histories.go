package paths

import (
	"context"
	"math"
	"slices"

	"bankfire/paths/study"
)

// Group is the paths of a study that are the same from the moment on from which
// its crystals share their history: any of them may have been the past of any
// crystal. A path that does not have the moment is a group by itself.
type Group struct {
	Paths   []*study.Path // in the study's order
	Choices []Choice      // one a crystal, in the order of Result.Crystals
	// Outcome is that of the best combination: each crystal along the path of the
	// group along which its chi-square as it is is least, which makes the least
	// joint one. Its tail tests this combination as if it had been named before the
	// data were seen. Picking the best of several makes that lenient: a combination
	// that fails is out with all others of the group, one that passes is no better
	// known for it. Barred if a crystal bars all paths of the group.
	Outcome Outcome
}

// Choice is the path of one crystal in a combination.
type Choice struct {
	Path *study.Path   // nil if the crystal bars all
	Of   int           // paths of the group that it does not bar
	Also []*study.Path // others with which, all other crystals staying as they are, the combination passes
}

// Combinations returns in how many ways the crystals can be given paths of the
// group that they do not bar.
func (g *Group) Combinations() float64 {
	n := 1.0
	for _, c := range g.Choices {
		n *= float64(c.Of)
	}
	return n
}

// ReproducedBy returns the paths that reproduce crystal k of Crystals by itself.
func (r *Result) ReproducedBy(k int) []*study.Path {
	var out []*study.Path
	for i := range r.Paths {
		if of := r.Paths[i].Outcome.Crystals; k < len(of) && of[k].Verdict == Reproduces {
			out = append(out, r.Paths[i].Path)
		}
	}
	return out
}

// groups finds the combinations of paths that end alike. The paths' verdicts are
// known.
func (w *weighing) groups(ctx context.Context, r *Result) error {
	if w.study.Sharing.From == nil {
		return nil
	}
	for _, of := range w.alike() {
		g := Group{Choices: make([]Choice, len(w.crystals))}
		for _, i := range of {
			g.Paths = append(g.Paths, &w.study.Paths[i])
		}
		if err := w.combine(ctx, &g, r, of); err != nil {
			return err
		}
		r.Groups = append(r.Groups, g)
	}
	return nil
}

// alike returns the numbers of the paths that were run, those together that are
// the same from the shared moment on.
func (w *weighing) alike() [][]int {
	var groups [][]int
	starts := make([]float64, len(w.paths)) // of the shared part; negative where a path has none
	for i := range w.paths {
		if len(w.paths[i].profiles) == 0 {
			continue
		}
		var err error
		if starts[i], err = w.study.Sharing.Start(w.study.Paths[i].History); err != nil {
			starts[i] = -1
		}
		k := slices.IndexFunc(groups, func(g []int) bool {
			return starts[i] >= 0 && starts[g[0]] >= 0 &&
				w.study.Paths[i].History.SameFrom(starts[i], w.study.Paths[g[0]].History, starts[g[0]])
		})
		if k < 0 {
			groups = append(groups, []int{i})
		} else {
			groups[k] = append(groups[k], i)
		}
	}
	return groups
}

// combine gives each crystal the path of those numbered in of along which its
// chi-square is least, judges them jointly, and finds what else passes.
func (w *weighing) combine(ctx context.Context, g *Group, r *Result, of []int) error {
	best := make([]int, len(w.crystals))
	for k := range w.crystals {
		best[k] = -1
		for _, i := range of {
			misfit := r.Paths[i].Outcome.Crystals[k].Misfit
			if math.IsNaN(misfit) {
				continue
			}
			if g.Choices[k].Of++; best[k] < 0 || misfit < r.Paths[best[k]].Outcome.Crystals[k].Misfit {
				best[k] = i
			}
		}
		if best[k] < 0 {
			g.Outcome.Finding = notRun(Barred)
			continue
		}
		g.Choices[k].Path = r.Paths[best[k]].Path
	}
	if slices.Contains(best, -1) {
		return nil
	}
	if err := w.judgeCombination(ctx, &g.Outcome, best); err != nil {
		return err
	}
	for k := range g.Choices {
		for _, i := range of {
			f := &r.Paths[i].Outcome.Crystals[k]
			swapped := g.Outcome.Misfit + f.Misfit - g.Outcome.Crystals[k].Misfit
			degrees := g.Outcome.Degrees + f.Degrees - g.Outcome.Crystals[k].Degrees
			if i != best[k] && degrees > 0 && Tail(swapped, degrees) >= 1-w.study.Confidence {
				g.Choices[k].Also = append(g.Choices[k].Also, r.Paths[i].Path)
			}
		}
	}
	return nil
}

// judgeCombination judges crystals each along a path of its own. Their curves are
// copied, to be made right around their common lowest point.
func (w *weighing) judgeCombination(ctx context.Context, dst *Outcome, path []int) error {
	var cs []Curve
	var each []sampler
	for place := range w.crystals {
		for _, one := range w.paths[path[place]].gather(ctx, w, place) {
			c := *one.of
			c.LnM, c.ChiSq, c.Slope = slices.Clone(c.LnM), slices.Clone(c.ChiSq), slices.Clone(c.Slope)
			cs, each = append(cs, c), append(each, one.sample)
		}
	}
	if err := sharpen(cs, each); err != nil {
		return err
	}
	Judge(dst, cs, w.laws, w.study.Confidence)
	return nil
}
