package thermal

import (
	"fmt"
	"math"
	"slices"
	"sort"
)

// History is a path: temperature against time from its start at 0 to its end at Life, as a list of legs. Temperature may
// jump from one leg to the next. The zero value is empty, to be filled by Set or Build. A history may be read from any
// number of goroutines until it is set again.
type History struct {
	legs     []Leg
	starts   []float64 // of each leg, and the end of the last, s
	again    []int     // of each leg, how far before it an equal one is; 0 if none of the last few is
	names    []Named
	eruption float64 // s
}

// Named is the stretch of a path that a name stands for: a leg, or all the legs that a reheat or a repeat unrolls to.
type Named struct {
	Name       string
	Start, End float64 // s
}

// Set makes h the path along the given legs, without names, erupting at its end. It copies the legs into memory that h
// owns and uses again, so that setting histories of no more legs than before allocates nothing. A Table leg with For 0
// lasts as long as its rows.
//
// The error is an *InputError that names the leg, counted from 1: a value that is not finite, a negative duration, a
// temperature not above 0 K, a table or sheet that makes no sense, no leg or more than MaxLegs, a path of no duration.
// h is then as before.
func (h *History) Set(legs []Leg) error {
	h.findAgain(legs)
	if err := h.checkLegs(legs); err != nil {
		h.findAgain(h.legs)
		return err
	}
	h.legs = append(h.legs[:0], legs...)
	h.starts = append(h.starts[:0], 0)
	h.names = h.names[:0]
	end := 0.0
	for i := range h.legs {
		l := &h.legs[i]
		l.For = l.length()
		end += l.For
		h.starts = append(h.starts, end)
	}
	h.eruption = end
	return nil
}

// memory is how many legs back an equal one is looked for: more than one occurrence of most repeats has.
const memory = 8

// findAgain finds the legs that come again. In most paths they do so at the same distance as the leg before.
func (h *History) findAgain(legs []Leg) {
	h.again = slices.Grow(h.again[:0], len(legs))[:len(legs)]
	back := 0
	for i := range legs {
		if back == 0 || legs[i] != legs[i-back] {
			back = equalBefore(legs, i)
		}
		h.again[i] = back
	}
}

// Again is how many legs before leg i an equal one is, 0 if none of the last few is: what was found of that holds of this one.
func (h *History) Again(i int) int { return h.again[i] }

// equalBefore is how far before leg i the nearest equal one is, 0 if that is too far.
func equalBefore(legs []Leg, i int) int {
	l := &legs[i]
	for back := 1; back < memory && back <= i; back++ {
		if like := &legs[i-back]; like.For == l.For && *like == *l {
			return back
		}
	}
	return 0
}

// checkLegs is nil, or an *InputError with the first thing that Set refuses. One of equal legs is enough.
func (h *History) checkLegs(legs []Leg) error {
	if len(legs) > MaxLegs {
		return tooMany(float64(len(legs)), Place{})
	}
	lasts := false
	for i := range legs {
		if h.again[i] > 0 {
			continue
		}
		if p := legs[i].check(); p != nil {
			p.Field = fmt.Sprintf("leg %d (%s)", i+1, legs[i].Kind)
			if p.Line != 0 {
				p.Field, p.Line = fmt.Sprintf("%s, row %d", p.Field, p.Line), 0
			}
			return p
		}
		lasts = lasts || legs[i].length() > 0
	}
	if !lasts {
		return &InputError{Problem: "path of no duration", Remedy: "want at least one leg that lasts"}
	}
	return nil
}

// Legs is the legs, which the caller must not change. They are valid until the next Set.
func (h *History) Legs() []Leg { return h.legs }

// Start is the time at which leg i begins, s.
func (h *History) Start(i int) float64 { return h.starts[i] }

// Life is the time from the start to the end of the path, s; 0 if it is empty.
func (h *History) Life() float64 {
	if len(h.starts) == 0 {
		return 0
	}
	return h.starts[len(h.legs)]
}

// Eruption is the moment of eruption, s; the end of the path if SetEruption has not been called since Set.
func (h *History) Eruption() float64 { return h.eruption }

// SetEruption puts the eruption at t seconds from the start. Moments "before eruption" count from it, and times above a
// temperature stop at it; the path itself goes on. It is an *InputError if t is not within the path.
func (h *History) SetEruption(t float64) error {
	t, p := h.within(t)
	if p == nil && t == 0 {
		p = &InputError{Problem: "at the start of the path", Remedy: "want an eruption after the start"}
	}
	if p != nil {
		p.Field = "eruption"
		return p
	}
	h.eruption = t
	return nil
}

// leg is the leg that goes on at t: the first that ends after it, len(legs) from the end of the path on.
func (h *History) leg(t float64) int {
	lo, hi := 0, len(h.legs)
	for lo < hi {
		if mid := (lo + hi) / 2; h.starts[mid+1] > t {
			hi = mid
		} else {
			lo = mid + 1
		}
	}
	return lo
}

// At is the temperature just before and just after t, K. They differ only where it jumps; at the start and before it both
// are the first temperature of the path, at the end and beyond both are the last. At panics on an empty history.
func (h *History) At(t float64) (before, after float64) {
	if !(t > 0) {
		after = h.legs[h.leg(0)].At(0)
		return after, after
	}
	i := sort.SearchFloat64s(h.starts[1:], t) // the first leg that ends at t or later: it began before t
	if i == len(h.legs) {
		i--
	}
	before = h.beforeIn(i, t)
	if j := h.leg(t); j < len(h.legs) {
		return before, h.legs[j].At(t - h.starts[j])
	}
	return before, before
}

// Setting is that of the leg that goes on at t, s, of the last from the end of the path on. It panics on an empty history.
func (h *History) Setting(t float64) int { return h.legs[min(h.leg(t), len(h.legs)-1)].Setting }

// beforeIn is the temperature of leg i just before t, K; at its end exactly that of its end.
func (h *History) beforeIn(i int, t float64) float64 {
	if t >= h.starts[i+1] {
		return h.legs[i].before(math.Inf(1))
	}
	return h.legs[i].before(t - h.starts[i])
}

// Breaks appends to dst the times, s, at which the temperature or its slope may break, ascending and each once: the start,
// the ends of all legs and the rows of tables.
func (h *History) Breaks(dst []float64) []float64 {
	last := math.Inf(-1)
	put := func(t float64) {
		if t > last {
			dst, last = append(dst, t), t
		}
	}
	for i := range h.legs {
		put(h.starts[i])
		if l := &h.legs[i]; l.Kind == Table {
			for _, t := range l.Rows.Time {
				put(min(h.starts[i]+t, h.starts[i+1]))
			}
		}
	}
	put(h.Life())
	return dst
}

// Jumps appends to dst the times, s, at which the temperature jumps so far that 1/T changes by more than a part of its range
// along the path, ascending and each once: where one leg ends and the next begins, and at rows of a table with one time. A
// relaxation that stops short of where the next leg begins leaves a jump too, which may be too small to count.
func (h *History) Jumps(dst []float64, part float64) []float64 {
	lo, hi := h.Range()
	least := part * (1/lo - 1/hi)
	before := 0.0 // the temperature as the next leg begins, K; 0 at the start of the path
	put := func(t, after float64) {
		if before > 0 && math.Abs(1/after-1/before) > least {
			dst = append(dst, t)
		}
	}
	var last [memory][2]float64 // where the legs before begin and end, K, by place
	for i := range h.legs {
		l, this, back := &h.legs[i], &last[i%memory], h.again[i]
		switch {
		case l.For == 0:
			continue
		case back > 0:
			*this = last[(i-back)%memory]
		default:
			*this = [2]float64{l.At(0), l.before(math.Inf(1))}
		}
		put(h.starts[i], this[0])
		if r := l.Rows; l.Kind == Table {
			for j := 1; j+1 < len(r.Time) && r.Time[j] < l.For; j++ {
				if t := r.Time[j]; t > 0 && t == r.Time[j-1] && t != r.Time[j+1] {
					before = r.before(t)
					put(h.starts[i]+t, r.Temp[j])
				}
			}
		}
		before = this[1]
	}
	return dst
}

// Range is the lowest and the highest temperature of the path, K.
func (h *History) Range() (lo, hi float64) {
	lo, hi = math.Inf(1), math.Inf(-1)
	for i := range h.legs {
		if l := &h.legs[i]; l.For > 0 && h.again[i] == 0 {
			a, b := l.Range()
			lo, hi = min(lo, a), max(hi, b)
		}
	}
	return lo, hi
}

// RangeIn is the lowest and the highest temperature of the path after t0 and before t1, s; +Inf and -Inf if no time lies
// between.
func (h *History) RangeIn(t0, t1 float64) (lo, hi float64) {
	lo, hi = math.Inf(1), math.Inf(-1)
	for i := range h.legs {
		if from, to := max(t0, h.starts[i]), min(t1, h.starts[i+1]); from < to {
			a, b := h.legs[i].rangeIn(from-h.starts[i], to-h.starts[i])
			lo, hi = min(lo, a), max(hi, b)
		}
	}
	return lo, hi
}

// Names is the named stretches of the path in the order in which they begin, which the caller must not change. Only Build
// names legs.
func (h *History) Names() []Named { return h.names }

// Moment is the time of m, s from the start. It is an *InputError if m lies outside the path or counts from a leg that
// the path does not have, and for the addition of a zone, of which a path knows nothing.
func (h *History) Moment(m Moment) (float64, error) {
	at, p := h.event(m)
	if p == nil {
		at, p = h.within(at + m.Offset)
	}
	if p != nil {
		p.Value = m.Text
		return 0, p
	}
	return at, nil
}

// event is the time from which m is counted, s.
func (h *History) event(m Moment) (float64, *InputError) {
	switch m.Kind {
	case AfterStart:
		return 0, nil
	case BeforeEruption:
		return h.eruption, nil
	case BeforeEnd:
		return h.Life(), nil
	case StartOf, EndOf:
		return h.edge(m)
	}
	return 0, &InputError{Problem: "counts from a zone, which is no part of a path", Remedy: "want a moment of the path"}
}

// edge is the start or end of a named leg, s.
func (h *History) edge(m Moment) (float64, *InputError) {
	for _, n := range h.names {
		if n.Name == m.Name && m.Kind == StartOf {
			return n.Start, nil
		}
		if n.Name == m.Name {
			return n.End, nil
		}
	}
	return 0, &InputError{Problem: fmt.Sprintf("the path has no leg %q", m.Name), Remedy: h.nearestName(m.Name)}
}

// nearestName is a remedy for a name that the path does not have.
func (h *History) nearestName(name string) string {
	if len(h.names) == 0 {
		return `name a leg: name = "` + name + `"`
	}
	best, least := "", math.MaxInt
	for _, n := range h.names {
		if d := Slips(name, n.Name); d < least {
			best, least = n.Name, d
		}
	}
	if best == "" { // names too long to compare
		return fmt.Sprintf("the first that it has is %q", h.names[0].Name)
	}
	return fmt.Sprintf("the nearest is %q", best)
}

// momentSlack is how far a moment may lie outside the path, as a share of its life, and be taken as its end: the rounding of sums.
const momentSlack = 1e-12

// within is t moved into the path if rounding alone keeps it outside, or what is wrong with it.
func (h *History) within(t float64) (float64, *InputError) {
	life := h.Life()
	slack := momentSlack * life
	switch {
	case t >= -slack && t <= life+slack:
		return max(0, min(t, life)), nil
	case t < 0:
		return 0, &InputError{Problem: timeText(-t) + " before the start of the path", Remedy: "want a moment within its " + timeText(life)}
	case t > life:
		return 0, &InputError{Problem: timeText(t-life) + " after the end of the path", Remedy: "want a moment within its " + timeText(life)}
	}
	return 0, &InputError{Problem: "not a finite time", Remedy: "want a moment within the path's " + timeText(life)}
}

// timeText is a duration for messages, in the unit in which it is best read.
func timeText(t float64) string {
	units := [...]struct {
		name string
		size float64
	}{{"Myr", 1e6 * Year}, {"kyr", 1e3 * Year}, {"yr", Year}, {"day", Day}, {"h", 3600}, {"min", 60}}
	for _, u := range units {
		if math.Abs(t) >= u.size {
			return fmt.Sprintf("%.4g %s", t/u.size, u.name)
		}
	}
	return fmt.Sprintf("%.4g s", t)
}

// tempText is a temperature for messages.
func tempText(temp float64) string { return fmt.Sprintf("%.6g C", temp-ZeroCelsius) }
