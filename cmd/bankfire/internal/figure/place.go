package figure

import "math"

// tag is a short label that wants a place beside its own curve.
type tag struct {
	curve   []point // of the page, clipped; points on it may anchor the tag
	w, h    float64 // size of the text
	offsets []point // from the anchor to the middle of the text, in order of preference
}

// place is where a tag went.
type place struct {
	anchor point // on the curve
	at     box   // of the text
}

// crowd is what tags keep away from.
type crowd struct {
	bounds box
	curves [][]point // by owner, sampled finely
	things []point   // data points and error bars
	boxes  []box     // text that stands already
	lines  []point   // leaders that stand already
}

// Costs of a place, in square points; only their order matters.
const (
	clearance = 3.0 // pt that a text wants free around it
	apart     = 6.0 // pt that an anchor wants to other curves
	overText  = 1e5 // a text on another
)

// add puts the parts of curves that lie in a box into the crowd.
func (c *crowd) add(in box, curves ...[]point) {
	for _, at := range curves {
		var near []point
		for _, piece := range clip(at, in) {
			near = append(near, sample(piece, 2)...)
		}
		c.curves = append(c.curves, thin(near, mostThings))
	}
}

// put finds the place of least cost for the tag of the curve with number own and remembers
// it. ok is false if nothing lies within the bounds. An anchor should lie where other curves
// are far.
func (c *crowd) put(t tag, own int) (best place, ok bool) {
	least := math.Inf(1)
	for _, a := range t.curve {
		lonely := c.lonely(a, own)
		near := c.near(t.reach(a))
		for rank, o := range t.offsets {
			p := place{a, boxAround(point{a.x + o.x, a.y + o.y}, t.w, t.h)}
			if !c.bounds.holds(p.at) {
				continue
			}
			if cost := lonely + 0.01*float64(rank) + c.crowding(p, near); cost < least {
				best, least, ok = p, cost, true
			}
		}
	}
	if ok {
		c.boxes = append(c.boxes, best.at)
		c.lines = append(c.lines, sample([]point{best.anchor, nearest(best.at, best.anchor)}, 1)...)
	}
	return best, ok
}

// lonely is the price of an anchor that other curves come near.
func (c *crowd) lonely(a point, own int) float64 {
	gap := apart
	for i, curve := range c.curves {
		if i == own {
			continue
		}
		for _, p := range curve {
			gap = min(gap, math.Hypot(p.x-a.x, p.y-a.y))
		}
	}
	return 4 * square(apart-gap)
}

// reach is the box that the texts around an anchor may touch.
func (t *tag) reach(a point) box {
	b := box{a.x, a.y, a.x, a.y}
	for _, o := range t.offsets {
		m := boxAround(point{a.x + o.x, a.y + o.y}, t.w, t.h)
		b = box{min(b.x0, m.x0), min(b.y0, m.y0), max(b.x1, m.x1), max(b.y1, m.y1)}
	}
	return b.inset(-clearance)
}

// near lists all points of the crowd in a box.
func (c *crowd) near(b box) []point {
	var out []point
	add := func(ps []point) {
		for _, p := range ps {
			if p.x > b.x0 && p.x < b.x1 && p.y > b.y0 && p.y < b.y1 {
				out = append(out, p)
			}
		}
	}
	for _, curve := range c.curves {
		add(curve)
	}
	add(c.things)
	add(c.lines)
	return out
}

// crowding is the price of a text and its leader among the points near them.
func (c *crowd) crowding(p place, near []point) (cost float64) {
	for _, q := range near {
		if gap := distance(p.at, q); gap < clearance {
			cost += square(clearance - gap)
		}
	}
	end := nearest(p.at, p.anchor)
	for _, other := range c.boxes {
		if other.inset(-1.5).meets(p.at) || crosses(p.anchor, end, other) {
			cost += overText
		}
	}
	return cost
}

// crosses reports whether the segment a-b enters a box.
func crosses(a, b point, in box) bool {
	_, _, ok := within(a, b, in)
	return ok
}

func square(x float64) float64 { return x * x }

func boxAround(m point, w, h float64) box {
	return box{m.x - w/2, m.y - h/2, m.x + w/2, m.y + h/2}
}

// nearest is the point of a box that is nearest to p.
func nearest(b box, p point) point {
	return point{min(max(p.x, b.x0), b.x1), min(max(p.y, b.y0), b.y1)}
}

func distance(b box, p point) float64 {
	q := nearest(b, p)
	return math.Hypot(q.x-p.x, q.y-p.y)
}

// sample gives points along a polyline, a step apart, starting half a step in.
func sample(at []point, step float64) []point {
	var out []point
	next := step / 2
	for i := 1; i < len(at); i++ {
		long := math.Hypot(at[i].x-at[i-1].x, at[i].y-at[i-1].y)
		for ; next < long; next += step {
			out = append(out, between(at[i-1], at[i], next/long))
		}
		next -= long
	}
	return out
}

// around is the compass of offsets for a text of a size: close first, then farther.
func around(w, h float64) []point {
	var out []point
	for _, gap := range []float64{4, 8, 13} {
		for k := range 8 {
			s, c := math.Sincos(math.Pi * float64(2*k+1) / 8)
			out = append(out, point{c * (gap + w/2), s * (gap + h/2)})
		}
	}
	return out
}

// mostThings bounds the work of finding places among the points of one thing.
const mostThings = 1000

// thin keeps n to 2n of the points, evenly spread, if there are more.
func thin(at []point, n int) []point {
	every := max(1, len(at)/n)
	var out []point
	for i := every / 2; i < len(at); i += every {
		out = append(out, at[i])
	}
	return out
}
