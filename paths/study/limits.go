package study

import (
	"errors"
	"fmt"
	"math"
	"slices"

	"bankfire/thermal"
)

// Barred returns in words every limit that the path breaks, naming the leg where
// one leg breaks it; none if it keeps them all. An Interval does not concern a
// path without its legs; a path that has its moments the other way round, or has
// one beyond its ends, breaks it. The error
// is an *thermal.InputError about a moment that is no path's: the addition of a
// zone.
func (l *Limits) Barred(h *thermal.History) (reasons []string, err error) {
	reasons = append(l.life(h), l.lowest(h)...)
	for i := range l.Above {
		reasons = append(reasons, l.Above[i].broken(h)...)
	}
	for i := range l.Between {
		why, err := l.Between[i].broken(h)
		if err != nil {
			return nil, err
		}
		reasons = append(reasons, why...)
	}
	return reasons, nil
}

// limitSlack is how far beyond a limit, as a share of it, round-off may carry a
// path that keeps it.
const limitSlack = 1e-9

func less(x, limit float64) bool { return x < limit*(1-limitSlack) }

func more(x, limit float64) bool { return x > limit*(1+limitSlack) }

func (l *Limits) life(h *thermal.History) []string {
	life := h.Eruption()
	switch shortest, longest := l.Life[0], l.Life[1]; {
	case less(life, shortest):
		return []string{fmt.Sprintf("its life is %s, shorter than %s", span(life), span(shortest))}
	case longest > 0 && more(life, longest):
		return []string{fmt.Sprintf("its life is %s, longer than %s", span(life), span(longest))}
	}
	return nil
}

// lowest checks the coldest moment before eruption. Between break points no leg
// has a lowest temperature: it is at one of them.
func (l *Limits) lowest(h *thermal.History) []string {
	if l.Lowest == 0 {
		return nil
	}
	coldest, from, to := math.Inf(1), 0.0, 0.0
	times := h.Breaks(nil)
	for i, t := range times {
		if t >= h.Eruption() {
			break
		}
		next := math.Min(times[i+1], h.Eruption())
		_, first := h.At(t)
		last, _ := h.At(next)
		if low := math.Min(first, last); low < coldest {
			coldest, from, to = low, t, next
		}
	}
	if !less(coldest, l.Lowest) {
		return nil
	}
	return []string{fmt.Sprintf("it is as cold as %s%s, colder than %s",
		thermal.TemperatureText(coldest), within(h, from, to), thermal.TemperatureText(l.Lowest))}
}

// broken says how the path breaks the limit, if it does.
func (l *TimeLimit) broken(h *thermal.History) []string {
	from, to := h.LongestAbove(l.Temp)
	time, where := h.TimeAbove(l.Temp), within(h, from, to)
	how := ""
	if l.Stretch {
		time, how = to-from, " without a break"
	} else if less(to-from, time) { // several stretches: name a leg only if it breaks the limit by itself
		if where = ""; more(to-from, l.Most) {
			where = fmt.Sprintf(", %s of it%s", span(to-from), within(h, from, to))
		}
	}
	hot := fmt.Sprintf("above %s", l.temperature())
	switch {
	case less(time, l.Least):
		return []string{fmt.Sprintf("it is %s for %s%s, shorter than %s", hot, span(time), how, span(l.Least))}
	case l.Most == 0 && time > 0:
		return []string{fmt.Sprintf("it gets %s for %s%s%s", hot, span(time), how, where)}
	case more(time, l.Most):
		return []string{fmt.Sprintf("it is %s for %s%s%s, longer than %s", hot, span(time), how, where, span(l.Most))}
	}
	return nil
}

// temperature is that of the limit with the threshold's name.
func (l *TimeLimit) temperature() string {
	if l.Name == "" {
		return thermal.TemperatureText(l.Temp)
	}
	return fmt.Sprintf("%s (%s)", l.Name, thermal.TemperatureText(l.Temp))
}

// broken says how the path breaks the limit, if it does.
func (l *Interval) broken(h *thermal.History) ([]string, error) {
	if !l.concerns(h) {
		return nil, nil
	}
	var at [2]float64
	for i, m := range []thermal.Moment{l.From, l.To} {
		if m.Kind == thermal.Added {
			_, err := h.Moment(m)
			return nil, err
		}
		var in *thermal.InputError
		var err error
		if at[i], err = h.Moment(m); errors.As(err, &in) {
			return []string{fmt.Sprintf("%q: %s", m.Text, in.Problem)}, nil
		}
	}
	time, which := at[1]-at[0], fmt.Sprintf("from %q to %q", l.From.Text, l.To.Text)
	switch {
	case time < -limitSlack*h.Life():
		return []string{fmt.Sprintf("%q comes %s after %q", l.From.Text, span(-time), l.To.Text)}, nil
	case less(time, l.Least):
		return []string{fmt.Sprintf("%s it takes %s, shorter than %s", which, span(time), span(l.Least))}, nil
	case more(time, l.Most):
		return []string{fmt.Sprintf("%s it takes %s, longer than %s", which, span(time), span(l.Most))}, nil
	}
	return nil, nil
}

// concerns reports whether the path has the legs that the moments count from.
func (l *Interval) concerns(h *thermal.History) bool {
	for _, m := range []thermal.Moment{l.From, l.To} {
		of := m.Kind == thermal.StartOf || m.Kind == thermal.EndOf
		if of && !slices.ContainsFunc(h.Names(), func(n thermal.Named) bool { return n.Name == m.Name }) {
			return false
		}
	}
	return true
}

// within is " in NAME" with the shortest named stretch of the path that holds
// the time from one moment to another, "" if none does.
func within(h *thermal.History, from, to float64) string {
	best, least := "", math.Inf(1)
	slack := limitSlack * h.Life()
	for _, n := range h.Names() {
		if n.Start <= from+slack && n.End >= to-slack && n.End-n.Start < least {
			best, least = fmt.Sprintf(" in %q", n.Name), n.End-n.Start
		}
	}
	return best
}

func span(t float64) string { return thermal.DurationText(t) }
