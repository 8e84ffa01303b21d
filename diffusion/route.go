package diffusion

import (
	"math"
	"sort"

	"bankfire/thermal"
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
	share    float64 // of the span's integral of D dt
}

// lnAlong is the law's from the beginning of the piece to a time, s from the start
// of its leg.
func (p *piece) lnAlong(by Arrhenius, k int, to float64) float64 {
	return p.law.lnAlong(p.leg, by, k, p.from, to)
}

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
		p.share = p.lnAlong(Arrhenius{}, 0, p.to) // for now its logarithm
		most = math.Max(most, p.share)
	}
	if r.lnG = most; math.IsInf(most, -1) {
		return
	}
	sum := 0.0
	for i := range r.pieces {
		p := &r.pieces[i]
		p.share = math.Exp(p.share - most)
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
	here, j := r.pieces[0], 0 // what is left of the piece in hand
	r.times = append(r.times, here.start+here.from)
	owed := 0.0
	for k, s := range steps {
		owed += s.df
		last := k == len(steps)-1
		for j+1 < len(r.pieces) && (here.share <= owed || last) {
			owed -= r.pass(here)
			j++
			here = r.pieces[j]
		}
		to := here
		if to.share > owed && !last {
			to.to, to.share = r.reach(here, owed, pace*s.df)
		}
		owed -= r.pass(to)
		here.from, here.share = to.to, math.Max(here.share-to.share, 0)
		r.ends, r.times = append(r.ends, len(r.stretches)), append(r.times, here.start+here.from)
	}
}

// pass adds a part of a piece to the step in hand and returns its share.
func (r *route) pass(p piece) float64 {
	r.stretches = append(r.stretches, p)
	return p.share
}

// pace is how closely a step must get the part of the integral that is its own, as
// a part of it. What it misses the next one gets, so a mean is only moved by this
// part of its change from step to step.
const pace = 1e-6

// reach returns the time, s from the start of the leg, until which the integral
// from the piece's beginning grows to owed of the whole, within slack, and to what
// it has grown there. It takes Newton steps along which D grows or falls evenly in
// its logarithm, and halves the rest where these lead out of it.
func (r *route) reach(p piece, owed, slack float64) (t, grown float64) {
	switch {
	case !(owed > 0): // what the step before got too much is all
		return p.from, 0
	case p.leg.Kind == thermal.Hold:
		return p.from + (p.to-p.from)*(owed/p.share), owed
	}
	a, b := p.from, p.to
	lnA, lnB := p.lnD(a), p.lnD(b)
	rate := (lnB - lnA) / (b - a)
	t = a + evenly(owed/p.share*math.Expm1(lnB-lnA), rate, owed/p.share*(b-a))
	for {
		if !(t > a && t < b) {
			t = a + (b-a)/2
		}
		grown = math.Exp(p.lnAlong(Arrhenius{}, 0, t) - r.lnG)
		if !(math.Abs(grown-owed) > slack) || !(t > a && t < b) {
			return t, grown
		}
		lnD := p.lnD(t)
		if grown < owed {
			a, lnA = t, lnD
		} else {
			b, lnB = t, lnD
		}
		rate = (lnB - lnA) / (b - a)
		dt := (owed - grown) * math.Exp(r.lnG-lnD)
		t += evenly(rate*dt, rate, dt)
	}
}

// evenly returns the time until which an integral of exp(rate t) from 0 grows to
// by/rate; where rate is too small to divide by, plain.
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

// coldness returns the mean of 1/T over a piece, 1/K, weighted by D.
func (p *piece) coldness() float64 {
	if p.leg.Kind == thermal.Hold {
		return 1 / p.leg.T0
	}
	plain := p.lnAlong(Arrhenius{}, 0, p.to)
	if math.IsInf(plain, -1) {
		return 1 / p.leg.At(p.from)
	}
	return math.Exp(p.lnAlong(Arrhenius{}, 1, p.to) - plain)
}
