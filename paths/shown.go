package paths

import (
	"context"
	"slices"

	"bankfire/paths/draw"
)

// Shown are some members of a family for figures, by their index. One can be in both lists.
type Shown struct {
	Drawn      []Row // a fair sample of all that were drawn
	Reproduces []Row // a fair sample of those that reproduce
}

// How many members are shown at most. Where they must be run, which takes time, fewer are.
const (
	mostShown    = 600
	mostShownRun = 120
)

// show judges some members once more. It shows nothing where nothing was screened.
func (e *engine) show(ctx context.Context, t *Tally) (s Shown, err error) {
	if t.Count() == 0 {
		return s, nil
	}
	most := mostShown
	if e.steps {
		most = mostShownRun
	}
	if s.Drawn, err = e.rows(ctx, e.anyOf(most)); err != nil {
		return Shown{}, err
	}
	kept := slices.Clone(t.sample[:min(len(t.sample), most)]) // by the hash: fair
	if s.Reproduces, err = e.rows(ctx, kept); err != nil {
		return Shown{}, err
	}
	return s, nil
}

// anyOf are so many members drawn at random, or all if there are no more: the outputs of
// SplitMix modulo their number, in which no order of the members shows.
func (e *engine) anyOf(most int) []int64 {
	n := e.family.Count()
	out := make([]int64, min(int64(most), n))
	for k := range out {
		out[k] = int64(k)
		if n > int64(most) {
			out[k] = int64(draw.SplitMix(1, uint64(k)) % uint64(n))
		}
	}
	return out
}

// rows judges members, each once.
func (e *engine) rows(ctx context.Context, indices []int64) ([]Row, error) {
	slices.Sort(indices)
	indices = slices.Compact(indices)
	values, above, elements := len(e.family.Values), len(e.study.Thresholds), len(e.elements)
	members, all := make([]member, len(indices)), make([]*member, len(indices))
	for k, i := range indices {
		numbers := make([]float64, elements+values+above)
		all[k] = &members[k]
		members[k] = member{Row: Row{Index: i, StandIn: numbers[:elements:elements]}, values: numbers[elements:][:values], above: numbers[elements+values:]}
	}
	var d desk
	for at := 0; at < len(members); at += stepChunk {
		if err := e.judge(ctx, &d, members[at:min(at+stepChunk, len(members))]); err != nil {
			return nil, err
		}
	}
	return rowsOf(all), nil
}
