package study

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"bankfire/paths/draw"
	"bankfire/thermal"
)

// mostReheats is how many a leg has at most: each becomes three legs.
const mostReheats = thermal.MaxLegs / 4

// randomReheats is a leg of reheats that begin at random: one follows another after
// a time that is exponentially distributed, a Poisson process in time.
type randomReheats struct {
	at         []int      // the leg, counted through the lists of legs
	count, per expression // there are count of them in the time per, on average
	each       [4]Value   // what each draws for itself, in the order of eachReheat
	name       string     // of their number
	value      int        // the place of that among the values
	rate       string     // as it was written
	words      string     // "the reheats on line 12"
}

// target finds where the value of a hole in the leg goes, nil if it is none of what
// each reheat draws.
func (r *randomReheats) target(h *hole) []*float64 {
	key, end, _ := strings.Cut(h.key, ".")
	k := slices.Index(eachReheat, key)
	if k < 0 || !slices.Equal(r.at, h.at) {
		return nil
	}
	switch v := &r.each[k]; end {
	case "from":
		return []*float64{&v.Lo}
	case "to":
		return []*float64{&v.Hi}
	default:
		return []*float64{&v.Lo, &v.Hi}
	}
}

// reheat draws the reheats of a leg from numbers of its own, or bars the member
// because of what they would be drawn from.
func (c *Candidate) reheat(r *randomReheats, from draw.Stream) bool {
	s := c.leg(r.at)
	count, per := r.count.at(c.Values), r.per.at(c.Values)
	c.Barred = r.wrong(count, per, s.For)
	if c.Why = c.Barred; c.Barred != "" {
		return false
	}
	s.Temp, _, _ = r.each[0].Ends()
	s.Pulses = s.Pulses[:0]
	at := 0.0
	for n := uint64(0); len(s.Pulses) < mostReheats; n += 1 + uint64(len(r.each)) {
		at -= per / count * math.Log1p(-from.Unit(n))
		if !(at < s.For) {
			break
		}
		s.Pulses = append(s.Pulses, thermal.Pulse{At: at, Peak: r.each[0].at(from.Unit(n + 1)), Rise: r.each[1].at(from.Unit(n + 2)),
			Dwell: r.each[2].at(from.Unit(n + 3)), Efold: r.each[3].at(from.Unit(n + 4))})
	}
	c.Values[r.value] = float64(len(s.Pulses))
	return true
}

// wrong says what keeps reheats from being drawn, "" if nothing.
func (r *randomReheats) wrong(count, per, span float64) string {
	switch {
	case count < 0:
		return r.words + " are fewer than none"
	case !(per > 0):
		return r.words + " are per no time"
	case !(span/per*count <= mostReheats/2):
		return fmt.Sprintf("%s are more than %d, on average", r.words, mostReheats/2)
	}
	for i := range r.each {
		switch v := &r.each[i]; {
		case v.Kind != Ranged:
		case v.Lo > v.Hi:
			return fmt.Sprintf("the range of %s of %s ends below where it begins", eachReheat[i], r.words)
		case v.Log && !(v.Lo > 0):
			return fmt.Sprintf("the range of %s of %s begins at zero, but is log", eachReheat[i], r.words)
		}
	}
	return ""
}
