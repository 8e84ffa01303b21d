package paths

import (
	"context"
	"math"
	"slices"

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
//
// Where boundaries have widths of their own, each is looked at by itself: by the points
// that are nearer to it than to the next one, see nearBoundary, with the other edges in the
// middle of what they may be.
type EdgeOrigin struct {
	Crystal   *study.Crystal
	Boundary  int // the zone inside the boundary; -1 is all of them, of one width
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

// BoundaryText names the boundary: "core and mantle"; "" is all of them.
func (o *EdgeOrigin) BoundaryText() string {
	if o.Boundary < 0 {
		return ""
	}
	return o.Crystal.Zones[o.Boundary].Name + " and " + o.Crystal.Zones[o.Boundary+1].Name
}

// edgeOrigins compares the two on a path, for each width of edges that elements of a
// crystal share.
func (w *weighedPath) edgeOrigins(ctx context.Context, of *weighing, path *study.Path) error {
	w.edges = make([][]EdgeOrigin, len(of.crystals))
	for place := range of.crystals {
		s := w.sharing(of, place)
		if s == nil {
			continue
		}
		for i := range s.widths {
			one := &s.widths[i]
			if one.lo > 0 || !w.profiles[one.of[0]].lens.edges.known[one.number].Ranged() {
				continue
			}
			o, err := w.edgeOrigin(ctx, of, path, one)
			if err != nil {
				return err
			}
			if o != nil {
				o.Crystal, o.Path = of.crystals[place], path
				w.edges[place] = append(w.edges[place], *o)
			}
		}
	}
	return nil
}

// edgeOrigin compares the two for one width; nil if the points at it do not suffice.
func (w *weighedPath) edgeOrigin(ctx context.Context, of *weighing, path *study.Path, one *sharedWidth) (*EdgeOrigin, error) {
	o := &EdgeOrigin{Boundary: -1}
	if len(w.profiles[one.of[0]].lens.edges.known) > 1 {
		o.Boundary = one.number
	}
	grown := &weighedPath{}
	shared := &sharing{widths: []sharedWidth{{number: one.number, lo: one.lo, hi: one.hi}}}
	var cs []Curve
	var each []sampler
	for _, n := range one.of {
		whole, sharp, err := w.profiles[n].origins(of.elements[n].on(path), o.Boundary)
		if err != nil {
			return nil, err
		}
		if whole == nil {
			continue
		}
		k := len(grown.profiles)
		grown.profiles = append(grown.profiles, whole)
		shared.of, shared.widths[0].of = append(shared.of, k), append(shared.of, k)
		curve, err := scan(sharp.points, sharp.counted, sharp.sampler(ctx))
		if err != nil {
			return nil, err
		}
		cs, each = append(cs, curve), append(each, sharp.sampler(ctx))
		o.Elements = append(o.Elements, w.profiles[n].element)
	}
	if len(o.Elements) < 2 {
		return nil, nil
	}
	widths, chiSq := grown.common(shared, beforeDiffusion)
	o.Width, o.Growth = widths[0], chiSq
	if err := sharpen(cs, each); err != nil {
		return nil, err
	}
	sum := Sum(cs)
	_, o.Diffusion = sum.Lowest()
	o.Degrees = sum.Points - sum.Free - 1
	return o, nil
}

// judgeEdges says how the edges of each crystal came to be, by the paths that suit
// either way best.
func (w *weighing) judgeEdges() []EdgeOrigin {
	var all []EdgeOrigin
	for place, c := range w.crystals {
		for boundary := -1; boundary < len(c.Zones)-1; boundary++ {
			var best *EdgeOrigin
			growth, width := math.Inf(1), 0.0
			for i := range w.paths {
				o := w.paths[i].edgeAt(place, boundary)
				if o == nil {
					continue
				}
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
	}
	return all
}

// edgeAt is what the path says of a boundary of a crystal; nil if nothing.
func (w *weighedPath) edgeAt(place, boundary int) *EdgeOrigin {
	if len(w.edges) == 0 {
		return nil
	}
	list := w.edges[place]
	i := slices.IndexFunc(list, func(o EdgeOrigin) bool { return o.Boundary == boundary })
	if i < 0 {
		return nil
	}
	return &list[i]
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

// origins returns the profile with its edges as the study has them, and with edges that
// begin as jumps. Of one boundary, others -1, it is what the points near it know, with
// the other edges of known widths: nil if these are too few.
func (p *profile) origins(m element, boundary int) (whole, sharp *profile, err error) {
	e := *p.element
	if boundary < 0 {
		e.Start.Edge = study.Nuisance{}
		m.element = &e
		if sharp, err = newProfile(&m, p.path, p.refined); err != nil {
			return nil, nil, err
		}
		sharp.points, sharp.counted = p.points, p.counted
		return p, sharp, nil
	}
	if m.element = nearBoundary(p.crystal, &e, boundary); len(m.element.Traverse.Value) <= p.open() {
		return nil, nil, nil
	}
	if m.white, err = overlapWhite(m.element); err != nil {
		return nil, nil, err
	}
	if whole, err = newProfile(&m, p.path, p.refined); err != nil {
		return nil, nil, err
	}
	at := whole.fitStart()
	whole.points, whole.counted = telling(&whole.fit, at), whole.spent(at)
	jump := *m.element
	jump.Start.Edges = slices.Clone(jump.Start.Edges)
	jump.Start.Edges[boundary] = study.Nuisance{}
	m.element = &jump
	if sharp, err = newProfile(&m, p.path, p.refined); err != nil {
		return nil, nil, err
	}
	sharp.points, sharp.counted = whole.points, whole.counted
	return whole, sharp, nil
}

// nearBoundary returns the element with the points that lie between the middles of the two
// zones at a boundary, or from the centre if the first of them begins there, and with
// the other edges in the middle of what they may be.
func nearBoundary(c *study.Crystal, e *study.Element, boundary int) *study.Element {
	inner := c.R0
	for _, z := range c.Zones[:boundary] {
		inner += z.Width
	}
	outer := inner + c.Zones[boundary].Width + c.Zones[boundary+1].Width/2
	if boundary > 0 || !c.Mirrored(e) {
		inner += c.Zones[boundary].Width / 2
	}
	out := *e
	out.Start.Edges = nil
	for k, n := range e.Start.Edges {
		if k != boundary {
			n = study.Nuisance{Value: n.Middle()}
		}
		out.Start.Edges = append(out.Start.Edges, n)
	}
	t := *e.Traverse
	t.Position, t.Value, t.Sigma, t.Line, t.Limit = nil, nil, nil, nil, nil
	at := make([]float64, len(e.Traverse.Position))
	e.Traverse.Place(at, e.Origin.Middle(), e.Tilt.Middle())
	for i, r := range at {
		if r = math.Abs(r); r < inner || r > outer {
			continue
		}
		t.Position, t.Value, t.Sigma = append(t.Position, e.Traverse.Position[i]), append(t.Value, e.Traverse.Value[i]), append(t.Sigma, e.Traverse.Sigma[i])
		t.Line = append(t.Line, e.Traverse.Line[i])
		if e.Traverse.Limit != nil {
			t.Limit = append(t.Limit, e.Traverse.Limit[i])
		}
	}
	out.Traverse = &t
	return &out
}
