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
}

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
		r.addPieces(p, breaks)
	}
	most := math.Inf(-1)
	for i := range r.pieces {
		p := &r.pieces[i]
		p.measure()
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
	r.pieces = append(r.pieces, p)
	return rest
}

// cut finds the stretches of each step. A step ends where the integral has grown
// by its part of the whole.
func (r *route) cut(steps schedule) {
	r.stretches, r.ends, r.times = r.stretches[:0], r.ends[:0], r.times[:0]
	rest, j := r.pieces[0], 0 // what is left of the piece in hand
	r.times = append(r.times, rest.start+rest.from)
	owed := 0.0
	for k, s := range steps {
		owed += s.df
		last := k == len(steps)-1
		for j+1 < len(r.pieces) && (rest.share <= owed || last) {
			owed -= r.pass(rest)
			j++
			rest = r.pieces[j]
		}
		if rest.share <= owed || last {
			owed -= r.pass(rest)
			rest.from, rest.share = rest.to, 0
		} else {
			part := r.split(&rest, owed, pace*s.df)
			owed -= r.pass(part)
		}
		r.ends, r.times = append(r.ends, len(r.stretches)), append(r.times, rest.start+rest.from)
	}
}

// pass adds a piece to the step in hand and returns its share.
func (r *route) pass(p piece) float64 {
	if math.IsNaN(p.ln) && p.leg.Kind != thermal.Hold {
		p.measure()
	}
	r.stretches = append(r.stretches, p)
	return p.share
}

// pace is how closely a step must get the part of the integral that is its own, as
// a part of it. What it misses the next one gets, so a mean is only moved by this
// part of its change from step to step.
const pace = 1e-5

// split takes from the beginning of a piece what has owed of the whole integral, at
// most slack off.
func (r *route) split(rest *piece, owed, slack float64) piece {
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
	from := 0
	for k, to := range r.ends {
		mean, weight := 0.0, 0.0
		for i := from; i < to; i++ {
			s := &r.stretches[i]
			if weight += s.share; s.share > 0 {
				mean += float64(s.share / weight * (over(s) - mean))
			}
		}
		if weight == 0 { // a step of no width: any value near it will do
			mean = over(&r.stretches[to-1])
		}
		dst[k], from = mean, to
	}
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
