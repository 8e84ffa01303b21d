package diffusion

import (
	"math"
	"sort"

	"bankfire/thermal"
	"bankfire/thermal/numeric"
)

// route is a span cut for its steps: into pieces along which temperature is
// smooth, and those into stretches that lie in one step each. A mean over a step is
// then one over stretches of one leg, for which closed forms exist; nothing is a
// difference of running integrals, in which a short step would lose its digits.
// Its memory is used again.
type route struct {
	pieces    []piece
	stretches []piece
	ends      []int     // of each step, how many stretches there are up to its end
	times     []float64 // s from the start of the path: at which steps begin and end
	lnG       float64   // ln of the span's integral of D dt, m2
	known     []float64 // of each piece, its mean of the value in hand; NaN is not known yet
}

// piece is a part of one leg along which temperature is smooth and the law does
// not change.
type piece struct {
	leg      *thermal.Leg
	law      *Law    // without windows
	start    float64 // of the leg, s from the start of the path
	from, to float64 // s from the start of the leg
	ln       float64 // ln of the integral of D dt along it; NaN is not known yet
	coldness float64 // mean of 1/T along it, 1/K, weighted by D
	share    float64 // of the span's integral of D dt
	role     role
	of       int // the first piece like the one that it is or was cut from
}

// role is what a stretch is of a piece.
type role int

const (
	wholePiece role = iota
	partOfPiece
	tailOfPiece // all that is left, a good part of the integral
	moment      // no time at all: by what a step ends too early or too late, or the one before it did
)

// measure finds the integral along the piece and the mean of 1/T.
func (p *piece) measure() {
	p.ln, p.coldness = math.Inf(-1), 0
	for _, a := range p.law.Terms {
		ln, coldness := p.leg.LnArrheniusCold(a.E, p.from, p.to)
		if ln += a.LnA; len(p.law.Terms) == 1 {
			p.ln, p.coldness = ln, coldness
		} else if !math.IsInf(ln, -1) {
			p.ln = numeric.LnAdd(p.ln, ln)
			p.coldness += float64(math.Exp(ln-p.ln) * (coldness - p.coldness))
		}
	}
}

// empty reports whether the piece is of no width or nothing diffuses along it.
func (p *piece) empty() bool { return !(p.from < p.to) || math.IsInf(p.ln, -1) }

// lnD returns ln of D at a time, s from the start of the leg.
func (p *piece) lnD(t float64) float64 { return p.law.LnD(p.leg.At(t)) }

// lay finds the pieces from t0 to t1, s, and the integral along them.
func (r *route) lay(law *Law, h *thermal.History, t0, t1 float64) {
	r.pieces = r.pieces[:0]
	legs := h.Legs()
	var breaks []float64
	if law.Where != nil {
		breaks = law.breaks(h)
	}
	for i := sort.Search(len(legs), func(i int) bool { return h.Start(i+1) > t0 }); i < len(legs) && h.Start(i) < t1; i++ {
		p := piece{leg: &legs[i], law: law, start: h.Start(i), to: legs[i].For} // a whole leg by its own length: starts are rounded
		if t0 > p.start {
			p.from = t0 - p.start
		}
		if t1 < h.Start(i+1) {
			p.to = t1 - p.start
		}
		r.addAlike(p, h.Again(i), breaks)
	}
	most := math.Inf(-1)
	for i := range r.pieces {
		p := &r.pieces[i]
		if like := &r.pieces[p.of]; p.of < i {
			p.ln, p.coldness = like.ln, like.coldness
		} else {
			p.measure()
		}
		most = math.Max(most, p.ln)
	}
	if r.lnG = most; math.IsInf(most, -1) {
		return
	}
	sum := 0.0
	for i := range r.pieces {
		p := &r.pieces[i]
		p.share = math.Exp(p.ln - most)
		sum += p.share
	}
	for i := range r.pieces {
		r.pieces[i].share /= sum
	}
	r.lnG += math.Log(sum)
}

// addAlike is addPieces for a leg that comes again so many pieces later, if each of these is a whole leg; 0 is that it
// does not.
func (r *route) addAlike(p piece, again int, breaks []float64) {
	before := len(r.pieces)
	r.addPieces(p, breaks)
	last := len(r.pieces) - 1
	if last != before || again == 0 || again > last {
		return
	}
	now, like := &r.pieces[last], &r.pieces[last-again]
	if *like.leg == *now.leg && like.from == now.from && like.to == now.to {
		now.of = like.of
	}
}

// addPieces adds a part of a leg, cut at the rows of a table and at the given
// times, s from the start of the path.
func (r *route) addPieces(p piece, breaks []float64) {
	until := p.to
	if p.leg.Kind == thermal.Table && breaks == nil {
		for _, row := range p.leg.Rows.Time {
			p = r.addPiece(p, math.Min(row, until))
		}
	}
	for _, t := range breaks {
		p = r.addPiece(p, math.Min(t-p.start, until))
	}
	r.addPiece(p, until)
}

// addPiece adds the part until a time, s from the start of the leg, if that is not
// empty, and returns the rest.
func (r *route) addPiece(p piece, to float64) piece {
	if !(p.from < to) {
		return p
	}
	rest := p
	rest.from, p.to = to, to
	if p.law.Where != nil {
		law := p.law.acting(p.leg.Setting, p.leg.At(p.from+(to-p.from)/2))
		p.law = &law
	}
	p.of = len(r.pieces)
	r.pieces = append(r.pieces, p)
	return rest
}

// cut finds the stretches of each step. A step ends where the integral has grown
// by its part of the whole, or as near to that as within says, as a part of the step.
// What it misses the next one gets, so a mean is moved by this part of its change from
// step to step; unless they are settled, so that it is moved by the square of that.
func (r *route) cut(steps schedule, within float64, settled bool) {
	r.stretches, r.ends, r.times = r.stretches[:0], r.ends[:0], r.times[:0]
	rest, j := r.pieces[0], 0 // what is left of the piece in hand
	r.times = append(r.times, rest.start+rest.from)
	owed := 0.0
	for k, s := range steps {
		if settled && owed != 0 {
			r.settle(rest, -owed)
		}
		owed += s.df
		last := k == len(steps)-1
		for j+1 < len(r.pieces) && (rest.share <= owed || last) {
			owed -= r.passRest(rest, settled)
			j++
			rest = r.pieces[j]
		}
		if rest.share <= owed || last {
			owed -= r.passRest(rest, settled)
			rest.from, rest.share = rest.to, 0
		} else {
			part := r.split(&rest, owed, within*s.df)
			owed -= r.pass(part)
		}
		if settled && owed != 0 && !last {
			r.settle(rest, owed)
		}
		r.ends, r.times = append(r.ends, len(r.stretches)), append(r.times, rest.start+rest.from)
	}
}

// settle adds to the step in hand a share of what holds at the moment.
func (r *route) settle(at piece, share float64) {
	at.to, at.share, at.role = at.from, share, moment
	r.stretches = append(r.stretches, at)
}

// passRest passes what is left of a piece.
func (r *route) passRest(p piece, settled bool) float64 {
	if settled && p.leg.Kind != thermal.Hold && p.role == partOfPiece && p.share > tailShare*r.pieces[p.of].share {
		p.role = tailOfPiece
		r.stretches = append(r.stretches, p)
		return p.share
	}
	return r.pass(p)
}

// tailShare is the part of its piece from which on the mean over a tail is found from
// those over the piece and what was cut off it, of which it loses so many digits.
const tailShare = 0.05

// pass adds a piece to the step in hand and returns its share.
func (r *route) pass(p piece) float64 {
	if math.IsNaN(p.ln) && p.leg.Kind != thermal.Hold {
		p.measure()
	}
	r.stretches = append(r.stretches, p)
	return p.share
}

// How closely steps get the part of the integral that is their own: of a plan, and of
// one so coarse that its longest step is longer than coarseStep, if they are settled.
const (
	pace       = 1e-5
	coarsePace = 3e-3
	coarseStep = 0.025
)

// split takes from the beginning of a piece what has owed of the whole integral, at
// most slack off.
func (r *route) split(rest *piece, owed, slack float64) piece {
	rest.role = partOfPiece
	part := *rest
	switch {
	case !(owed > 0): // the step before got all of it
		part.to, part.share = part.from, 0
	case rest.leg.Kind == thermal.Hold:
		part.to, part.share = part.from+(part.to-part.from)*(owed/part.share), owed
	default:
		r.reach(&part, owed, slack)
	}
	rest.from, rest.share, rest.ln = part.to, math.Max(rest.share-part.share, 0), math.NaN() // until it is asked for
	return part
}

// reach shortens the piece until it has owed of the whole integral, at most slack
// off. The time at which the integral has grown so far is guessed by a rational
// function of it that never falls, from D at both ends of the piece (Gregory and
// Delbourgo 1982, IMA J. Numer. Anal. 2, 123-130), and then by Newton's method, with
// D growing or falling evenly in its logarithm. Where that leads out of what lies
// between, as in a quench, it is halved.
func (r *route) reach(p *piece, owed, slack float64) {
	a, b := p.from, p.to
	width, x := b-a, owed/p.share
	slowA, slowB := p.share*math.Exp(r.lnG-p.lnD(a)), p.share*math.Exp(r.lnG-p.lnD(b)) // s
	t := a + width*(width*x*x+slowA*x*(1-x))/(width+(slowA+slowB-2*width)*x*(1-x))
	for {
		if !(t > a && t < b) {
			t = a + (b-a)/2
		}
		p.to = t
		p.measure()
		grown := math.Exp(p.ln - r.lnG)
		if !(math.Abs(grown-owed) > slack) || !(t > a && t < b) {
			p.share = grown
			return
		}
		if grown < owed {
			a = t
		} else {
			b = t
		}
		lnD, back := p.lnD(t), nearby*(t-p.from)
		rate, dt := (lnD-p.lnD(t-back))/back, (owed-grown)*math.Exp(r.lnG-lnD)
		t += evenly(rate*dt, rate, dt)
	}
}

// nearby is how far before a time the slope of ln D there is taken, as a part of
// the way that has been gone along the piece.
const nearby = 1e-4

// evenly returns the time in which an integral of exp(rate t) grows from 0 to
// by/rate; where by is too small, plain.
func evenly(by, rate, plain float64) float64 {
	if !(math.Abs(by) > 1e-8) {
		return plain
	}
	return math.Log1p(by) / rate
}

// means writes to dst the mean over each step of a value, weighted by D; over gives
// that over a stretch.
func (r *route) means(dst []float64, over func(p *piece) float64) {
	r.known = resized(r.known, len(r.pieces))
	for i := range r.known {
		r.known[i] = math.NaN()
	}
	from := 0
	cutOff := 0.0 // of the piece in hand, the integral of the value over what was cut off
	for k, to := range r.ends {
		mean, weight := 0.0, 0.0
		for i := from; i < to; i++ {
			s := &r.stretches[i]
			if s.share == 0 {
				continue
			}
			var value float64
			switch s.role {
			case wholePiece:
				value = r.overWhole(s.of, over)
			case tailOfPiece:
				value = (r.overWhole(s.of, over)*r.pieces[s.of].share - cutOff) / s.share
			default:
				value = over(s)
			}
			if s.role == partOfPiece {
				if s.from == r.pieces[s.of].from {
					cutOff = 0
				}
				cutOff += s.share * value
			}
			weight += s.share
			mean += float64(s.share / weight * (value - mean))
		}
		if weight == 0 { // a step of no width: any value near it will do
			mean = over(&r.stretches[to-1])
		}
		dst[k], from = mean, to
	}
}

// overWhole is the mean of the value in hand over a piece, found once.
func (r *route) overWhole(piece int, over func(p *piece) float64) float64 {
	if math.IsNaN(r.known[piece]) {
		r.known[piece] = over(&r.pieces[piece])
	}
	return r.known[piece]
}

// meanColdness returns the mean of 1/T over the piece, 1/K, weighted by D.
func (p *piece) meanColdness() float64 {
	switch {
	case p.leg.Kind == thermal.Hold:
		return 1 / p.leg.T0
	case p.empty(): // any value near it will do
		return 1 / p.leg.At(p.from)
	}
	return p.coldness
}
