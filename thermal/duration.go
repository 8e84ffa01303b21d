package thermal

import "math"

// TimeAbove is how long the leg is hotter than temp (K), in s: exact for every kind, in closed form or, along a sheet, as
// the roots of its closed form. A hold at temp itself is not above it.
func (l *Leg) TimeAbove(temp float64) float64 { return l.timeAbove(temp, l.length()) }

// timeAbove is TimeAbove for the part of the leg until the given time, s.
func (l *Leg) timeAbove(temp, until float64) float64 {
	if l.Kind == Table {
		return l.Rows.timeAbove(temp, until)
	}
	from, to := l.above(temp)
	return max(0, min(to, until)-from)
}

// above is the one stretch of a leg that is no table in which it is hotter than temp, s from its start.
func (l *Leg) above(temp float64) (from, to float64) {
	switch l.Kind {
	case Hold:
		return stretch(l.T0, l.T0, temp, l.For, 0)
	case Ramp:
		return stretch(l.T0, l.T1, temp, l.For, l.For*((temp-l.T0)/(l.T1-l.T0)))
	case Relax:
		return stretch(l.T0, l.At(l.For), temp, l.For, l.Tau*math.Log((l.T0-l.T1)/(temp-l.T1)))
	case SheetCooling:
		from, to = l.Sheet.above(temp, l.Since+l.For)
		return max(0, from-l.Since), max(0, to-l.Since)
	}
	panic("thermal: " + l.Kind.String())
}

// stretch is where a temperature that only rises or only falls from a to b, within until seconds, is above temp, which it
// passes at the time crossing if at all.
func stretch(a, b, temp, until, crossing float64) (from, to float64) {
	switch {
	case a > temp && b > temp:
		return 0, until
	case a > temp:
		return 0, max(0, min(crossing, until))
	case b > temp:
		return max(0, min(crossing, until)), until
	}
	return 0, 0
}

// above is the stretch between rows i and i+1 in which the temperature is above temp, s from the start of the table, no
// later than until.
func (r *Rows) above(i int, temp, until float64) (from, to float64) {
	a, b, dt := r.Temp[i], r.Temp[i+1], r.Time[i+1]-r.Time[i]
	from, to = stretch(a, b, temp, dt, dt*((temp-a)/(b-a)))
	return r.Time[i] + from, min(r.Time[i]+to, until)
}

// timeAbove is the time above temp until the given time, s.
func (r *Rows) timeAbove(temp, until float64) float64 {
	sum := 0.0
	for i := 0; i+1 < len(r.Time) && r.Time[i] < until; i++ {
		from, to := r.above(i, temp, until)
		sum += max(0, to-from)
	}
	return sum
}

// TimeAbove is how long the path is hotter than temp (K) before the eruption, s. See Leg.TimeAbove.
func (h *History) TimeAbove(temp float64) float64 {
	sum := 0.0
	var last [memory]float64 // of the legs before, by place
	for i := range h.legs {
		l, this, back := &h.legs[i], &last[i%memory], h.again[i]
		switch {
		case h.starts[i+1] > h.eruption:
			*this = l.timeAbove(temp, max(0, h.eruption-h.starts[i]))
		case back > 0:
			*this = last[(i-back)%memory]
		default:
			*this = l.timeAbove(temp, l.For)
		}
		sum += *this
	}
	return sum
}

// DurationPoint is a point of a duration curve.
type DurationPoint struct {
	Temp float64 // K
	Time float64 // for how long the path is hotter, s
}

// Duration is the duration curve of the path before the eruption at the given temperatures (K): the time above each of
// them, as exact as TimeAbove.
func (h *History) Duration(temps []float64) []DurationPoint {
	curve := make([]DurationPoint, len(temps))
	for i, temp := range temps {
		curve[i] = DurationPoint{temp, h.TimeAbove(temp)}
	}
	return curve
}
