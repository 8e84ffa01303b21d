package paths

import (
	"cmp"
	"math"
	"slices"

	"gonum.org/v1/gonum/stat"

	"bankfire/paths/study"
	"bankfire/thermal"
)

// DurationQuantiles are the times that members spend above a temperature.
type DurationQuantiles struct {
	Temp float64 // K
	Time Quantiles
}

// DiffusionShare is the part of the diffusion integral that is done in a leg of the family,
// all that a repeat makes of it together.
type DiffusionShare struct {
	Name  string       // in the study; "" of legs that neither have a name nor are part of one that has
	Kind  thermal.Kind // of legs without a name, which stand together
	Share Quantiles
}

// sampled is what is read of the sample of members that reproduce: lists of one entry a
// member.
type sampled struct {
	values  [][]float64 // one list a value
	legs    []DiffusionShare
	shares  [][][]float64 // one list a measured element and leg
	between [2]float64    // of their temperatures before eruption, K
	count   int
}

// readSample draws the members of the sample again.
func (e *engine) readSample(sample []int64) *sampled {
	s := &sampled{values: make([][]float64, len(e.family.Values)), shares: make([][][]float64, len(e.elements)), between: noRange()}
	var c study.Candidate
	for _, i := range sample {
		e.family.At(&c, i)
		for k, x := range c.Values {
			s.values[k] = append(s.values[k], x)
		}
		lo, hi := c.History.RangeIn(0, c.History.Eruption())
		s.between = [2]float64{math.Min(s.between[0], lo), math.Max(s.between[1], hi)}
		for n := range e.elements {
			s.share(e, n, &study.Path{History: &c.History, Crystals: c.Crystals})
		}
		s.count++
	}
	return s
}

// drawn are the values of members of which each is as likely, one list a value.
func (e *engine) drawn() [][]float64 {
	values := make([][]float64, len(e.family.Values))
	var c study.Candidate
	for _, i := range e.anyOf(mostSampled) {
		e.family.At(&c, i)
		for v, x := range c.Values {
			values[v] = append(values[v], x)
		}
	}
	return values
}

// share adds the parts of the diffusion integral of element n that a member's legs do.
func (s *sampled) share(e *engine, n int, path *study.Path) {
	h := e.seen(n, path)
	law := e.elements[n].element.Law.Law
	all := law.LnIntegral(h, 0, h.Life())
	legs := h.Legs()
	for from := 0; from < len(legs); {
		of, to := legOf(e.family, h, from), from+1
		for to < len(legs) && legOf(e.family, h, to) == of {
			to++
		}
		end := h.Life()
		if to < len(legs) {
			end = h.Start(to)
		}
		if part := math.Exp(law.LnIntegral(h, h.Start(from), end) - all); part > 0 { // false for NaN, where nothing diffuses
			s.add(n, of, part)
		}
		from = to
	}
}

// add adds a part to that of the member in hand.
func (s *sampled) add(n int, of DiffusionShare, part float64) {
	k := slices.Index(s.legs, of)
	if k < 0 {
		k = len(s.legs)
		s.legs = append(s.legs, of)
	}
	for len(s.shares[n]) <= k {
		s.shares[n] = append(s.shares[n], nil)
	}
	list := &s.shares[n][k]
	for len(*list) <= s.count { // 0 of the members that have no such leg
		*list = append(*list, 0)
	}
	(*list)[s.count] += part
}

// legOf is what leg i of a member counts as: the innermost named stretch it is part of.
func legOf(f *study.Family, h *thermal.History, i int) DiffusionShare {
	from, to := h.Start(i), h.Life()
	if i+1 < len(h.Legs()) {
		to = h.Start(i + 1)
	}
	names := h.Names()
	for k := len(names) - 1; k >= 0; k-- {
		if names[k].Start <= from && to <= names[k].End {
			return DiffusionShare{Name: f.Unnumbered(names[k].Name)}
		}
	}
	return DiffusionShare{Kind: h.Legs()[i].Kind}
}

// legShares are the shares of the diffusion of each element, that with the largest
// median first.
func (s *sampled) legShares() [][]DiffusionShare {
	out := make([][]DiffusionShare, len(s.shares))
	for n, lists := range s.shares {
		for k, list := range lists {
			if list == nil {
				continue
			}
			list = append(list, make([]float64, s.count-len(list))...)
			of := s.legs[k]
			of.Share = quantilesOf(list)
			out[n] = append(out[n], of)
		}
		slices.SortStableFunc(out[n], func(a, b DiffusionShare) int { return cmp.Compare(b.Share[1], a.Share[1]) })
	}
	return out
}

// quantilesOf are those of numbers, which it sorts.
func quantilesOf(x []float64) Quantiles {
	slices.Sort(x)
	var q Quantiles
	for i, p := range quantileParts {
		q[i] = stat.Quantile(p, stat.Empirical, x, nil)
	}
	return q
}

// mostTemps is how many temperatures a duration curve has at most.
const mostTemps = 40

// durations is the duration curve of members before eruption, at temperatures that are
// round in degrees Celsius and reach from where all of it is hotter to where nothing is.
func (e *engine) durations(sample []int64, between [2]float64) []DurationQuantiles {
	temps := roundTemps(between)
	times := make([][]float64, len(temps))
	var c study.Candidate
	for _, i := range sample {
		e.family.At(&c, i)
		for k, temp := range temps {
			times[k] = append(times[k], c.History.TimeAbove(temp))
		}
	}
	out := make([]DurationQuantiles, len(temps))
	for k, temp := range temps {
		out[k] = DurationQuantiles{temp, quantilesOf(times[k])}
	}
	return out
}

// roundTemps are at most mostTemps temperatures, evenly spaced and round in degrees
// Celsius, from the last below the range to the first that is not.
func roundTemps(between [2]float64) []float64 {
	lo, hi := between[0]-thermal.ZeroCelsius, between[1]-thermal.ZeroCelsius
	for decade := 1.0; ; decade *= 10 {
		for _, step := range [...]float64{1, 2, 5} {
			step *= decade
			first, last := math.Ceil(lo/step-1e-9)-1, math.Ceil(hi/step-1e-9) // round-off is no step
			if first*step+thermal.ZeroCelsius <= 0 {
				first++
			}
			if last-first >= mostTemps {
				continue
			}
			var temps []float64
			for k := first; k <= last; k++ {
				temps = append(temps, k*step+thermal.ZeroCelsius)
			}
			return temps
		}
	}
}
