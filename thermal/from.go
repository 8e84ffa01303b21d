package thermal

import "math"

// From is what of the path comes after t seconds from its start: h itself if t is 0, else a history of its own whose times
// count from t. Legs that go on at t are cut there and stay in closed form: a ramp begins at its temperature at t and so
// does a relax, a sheet goes on cooling from its emplacement, a table has a first row at t. Where the temperature jumps at t
// it begins after the jump. Names stand for what is left of their stretches; those that end at t or before are gone. The
// eruption is at 0 if it came before.
//
// A t that rounding alone keeps from the start of a leg is taken for it. The error is an *InputError: t is not within the
// path, or at its end, after which nothing is left.
func (h *History) From(t float64) (*History, error) {
	t, p := h.within(t)
	if p != nil {
		return nil, p
	}
	slack := momentSlack * h.Life()
	if t <= slack {
		return h, nil
	}
	i := h.leg(t + slack)
	if i == len(h.legs) {
		return nil, &InputError{Problem: "at the end of the path", Remedy: "want a moment before it"}
	}
	legs := append([]Leg(nil), h.legs[i:]...)
	if into := t - h.starts[i]; into > slack {
		legs[0] = legs[0].from(into)
	} else {
		t = h.starts[i]
	}
	out := new(History)
	if err := out.Set(legs); err != nil {
		return nil, err
	}
	out.eruption = max(0, min(h.eruption-t, out.Life()))
	for _, n := range h.names {
		if n.End > t+slack {
			out.names = append(out.names, Named{n.Name, max(0, n.Start-t), min(n.End-t, out.Life())})
		}
	}
	return out, nil
}

// from is what of the leg comes after t seconds from its start, t within it.
func (l Leg) from(t float64) Leg {
	switch l.Kind {
	case Ramp, Relax:
		l.T0 = l.At(t)
	case SheetCooling:
		l.Since += t
	case Table:
		l.Rows = l.Rows.from(t)
	}
	l.For -= t
	if l.Kind == Table {
		l.For = math.Min(l.For, l.Rows.end())
	}
	return l
}

// from is the table from t on, with times that count from there.
func (r *Rows) from(t float64) *Rows {
	i := r.interval(t)
	out := &Rows{Time: []float64{0}, Temp: []float64{r.within(i, t)}}
	for i++; i < len(r.Time); i++ {
		out.Time, out.Temp = append(out.Time, r.Time[i]-t), append(out.Temp, r.Temp[i])
	}
	return out
}

// SameFrom reports whether what comes after t seconds of h is what comes after u seconds of other but for rounding: the same
// kinds of legs under the same settings one after the other for the same durations, within a part in 1e12 of the longer path, erupting at the same
// time, and at the same temperatures within a thousandth of a kelvin. Names do not matter, nor legs of no duration. Nothing
// is the same from a time on that a path does not have.
func (h *History) SameFrom(t float64, other *History, u float64) bool {
	a, err1 := h.From(t)
	b, err2 := other.From(u)
	return err1 == nil && err2 == nil && a.alike(b, momentSlack*max(h.Life(), other.Life()))
}

// alike compares two paths, times within slack, s.
func (h *History) alike(other *History, slack float64) bool {
	if !near(h.eruption, other.eruption, slack) {
		return false
	}
	i, j := h.lasting(0, slack), other.lasting(0, slack)
	for i < len(h.legs) && j < len(other.legs) {
		if !h.legs[i].alike(&other.legs[j], slack) {
			return false
		}
		i, j = h.lasting(i+1, slack), other.lasting(j+1, slack)
	}
	return i == len(h.legs) && j == len(other.legs)
}

// lasting is the first leg from i on that lasts longer than slack, s.
func (h *History) lasting(i int, slack float64) int {
	for i < len(h.legs) && h.legs[i].For <= slack {
		i++
	}
	return i
}

// sameTemp is how far apart equal temperatures may be, K: where a steep leg is cut, the rounding of times shows.
const sameTemp = 1e-3

func near(a, b, within float64) bool { return math.Abs(a-b) <= within }

// alike compares two legs, times within slack, s.
func (l *Leg) alike(m *Leg, slack float64) bool {
	if l.Kind != m.Kind || l.Setting != m.Setting || !near(l.For, m.For, slack) {
		return false
	}
	switch l.Kind {
	case SheetCooling:
		return *l.Sheet == *m.Sheet && near(l.Since, m.Since, slack)
	case Table:
		return l.Rows.alike(m.Rows, slack)
	case Hold:
		return near(l.T0, m.T0, sameTemp)
	}
	return near(l.T0, m.T0, sameTemp) && near(l.T1, m.T1, sameTemp) && (l.Kind == Ramp || l.Tau == m.Tau)
}

// alike compares two tables row by row, times within slack, s.
func (r *Rows) alike(o *Rows, slack float64) bool {
	if len(r.Time) != len(o.Time) {
		return false
	}
	for i := range r.Time {
		if !near(r.Time[i], o.Time[i], slack) || !near(r.Temp[i], o.Temp[i], sameTemp) {
			return false
		}
	}
	return true
}
