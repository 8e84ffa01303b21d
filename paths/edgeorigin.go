package paths

import (
	"context"
	"math"

	"bankfire/paths/study"
)

// EdgeOrigin compares two ways in which the boundaries of a crystal may have come to
// be as wide as they are in several elements, of which the width of the edges is open
// down to a jump: growth, edges of one width in all of them and no diffusion; or
// diffusion, edges that begin as jumps and widen with the root of each element's D, one
// multiplier on D for all, along whichever path suits best. Both have one value that is
// fitted for all elements, besides each element's own.
//
// Neither contains the other, but the difference of the two chi-squares can be judged
// all the same: where the models differ by d standard errors, and the one is true, it is
// normal with mean d^2 and standard deviation 2 d in favour of that. So it exceeds the
// critical value x of one degree in favour of the wrong one with the probability that a
// normal deviate exceeds (x + d^2)/(2 d), which is largest at d^2 = x: that it exceeds
// sqrt(x), 2.5 % at a confidence of 95 %.
type EdgeOrigin struct {
	Crystal   *study.Crystal
	Elements  []*study.Element
	Width     float64     // of the edges by growth, m
	Growth    float64     // chi-square by growth
	Diffusion float64     // and by diffusion
	Path      *study.Path // along which that was found
	Degrees   int         // points less the fitted values, in both
	Prefers   Origin
}

// Origin is how edges came to be as wide as they are.
type Origin int

// The origins.
const (
	UnknownOrigin Origin = iota // the data do not prefer one, or neither passes
	ByGrowth
	ByDiffusion
)

func (o Origin) String() string { return [...]string{"not known", "growth", "diffusion"}[o] }

// edgeOrigins compares the two on a path, for each crystal of which elements share the
// width of their edges.
func (w *weighedPath) edgeOrigins(ctx context.Context, of *weighing, path *study.Path) error {
	w.edges = make([]EdgeOrigin, len(of.crystals))
	for place, c := range of.crystals {
		list := w.sharing(of, place)
		if list == nil {
			continue
		}
		if lo, _ := w.widths(list); lo > 0 || !w.profiles[list[0]].lens.edge.Ranged() {
			continue
		}
		o := EdgeOrigin{Crystal: c, Path: path}
		o.Width, o.Growth = w.common(list, func(p *profile) float64 { return p.fitStart().ChiSq })
		var cs []Curve
		var each []sampler
		for _, n := range list {
			sharp, err := w.profiles[n].sharp(of.elements[n].on(path))
			if err != nil {
				return err
			}
			one, err := scan(sharp.points, sharp.counted, sharp.sampler(ctx))
			if err != nil {
				return err
			}
			cs, each = append(cs, one), append(each, sharp.sampler(ctx))
			o.Elements = append(o.Elements, sharp.element)
		}
		if err := sharpen(cs, each); err != nil {
			return err
		}
		sum := Sum(cs)
		_, o.Diffusion = sum.Lowest()
		o.Degrees = sum.Points - sum.Free - 1
		w.edges[place] = o
	}
	return nil
}

// judgeEdges says how the edges of each crystal came to be, by the paths that suit
// either way best.
func (w *weighing) judgeEdges() []EdgeOrigin {
	var all []EdgeOrigin
	for place := range w.crystals {
		var best *EdgeOrigin
		growth, width := math.Inf(1), 0.0
		for i := range w.paths {
			if len(w.paths[i].edges) == 0 || w.paths[i].edges[place].Elements == nil {
				continue
			}
			o := &w.paths[i].edges[place]
			if o.Growth < growth {
				growth, width = o.Growth, o.Width
			}
			if best == nil || o.Diffusion < best.Diffusion {
				best = o
			}
		}
		if best == nil {
			continue
		}
		o := *best
		o.Growth, o.Width = growth, width
		o.Prefers = origin(o.Growth, o.Diffusion, o.Degrees, w.study.Confidence)
		all = append(all, o)
	}
	return all
}

// origin is the one that is preferred by so much that chance does not do it, and that
// passes by itself.
func origin(growth, diffusion float64, degrees int, confidence float64) Origin {
	better, found := growth, ByGrowth
	if diffusion < growth {
		better, found = diffusion, ByDiffusion
	}
	if !(math.Abs(growth-diffusion) > Critical(confidence, 1)) || degrees < 1 || !(Tail(better, degrees) >= 1-confidence) {
		return UnknownOrigin
	}
	return found
}

// sharp returns the profile with edges that begin as jumps.
func (p *profile) sharp(m element) (*profile, error) {
	e := *p.element
	e.Start.Edge = study.Nuisance{}
	m.element = &e
	q, err := newProfile(&m, p.path, p.refined)
	if err != nil {
		return nil, err
	}
	q.points, q.counted = p.points, p.counted
	return q, nil
}
