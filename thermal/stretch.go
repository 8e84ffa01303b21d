package thermal

import "math"

// LongestAbove is the longest time without a break in which the path is hotter than temp (K) before the eruption, from
// start to end, s; both are 0 if it never is. The ends are as exact as TimeAbove; a dip to exactly temp, for a moment, is
// no break.
func (h *History) LongestAbove(temp float64) (start, end float64) {
	now := stretches{slack: momentSlack * h.Life()}
	for i := range h.legs {
		l, from := &h.legs[i], h.starts[i]
		if from >= h.eruption {
			break
		}
		until := math.Min(l.For, h.eruption-from)
		if l.Kind == Table {
			now.addRows(l.Rows, from, temp, until)
			continue
		}
		a, b := l.above(temp)
		now.add(from+a, from+math.Min(b, until))
	}
	return now.bestFrom, now.bestTo
}

// stretches joins times of heat, given in their order, and keeps the longest.
type stretches struct {
	slack            float64 // s, a gap not longer is none
	from, to         float64 // the stretch that may still go on
	bestFrom, bestTo float64
}

func (s *stretches) add(from, to float64) {
	if !(to > from) {
		return
	}
	if s.to == 0 || from > s.to+s.slack {
		s.from = from
	}
	s.to = to
	if s.to-s.from > s.bestTo-s.bestFrom {
		s.bestFrom, s.bestTo = s.from, s.to
	}
}

// addRows adds the part of a table until the given time; the table begins at from on the path.
func (s *stretches) addRows(r *Rows, from, temp, until float64) {
	for i := 0; i+1 < len(r.Time) && r.Time[i] < until; i++ {
		x, y := r.above(i, temp, until)
		s.add(from+x, from+y)
	}
}

// DurationText is a duration (s) for messages, in the unit in which it is best read: "800 yr".
func DurationText(t float64) string { return timeText(t) }

// TemperatureText is a temperature (K) for messages: "750 C".
func TemperatureText(temp float64) string { return tempText(temp) }
