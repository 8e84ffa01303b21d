package study

import (
	"math"

	"bankfire/thermal"
)

// limits reads the table [limits]: what the user rules out.
func (d *decoder) limits(n *node, thresholds []Threshold) Limits {
	const example = `write [limits] with life, lowest, highest, above or between`
	var l Limits
	if !d.is(n, tableNode, example) {
		return l
	}
	l.Place = d.place(n)
	d.keys(n, limitsTable)
	if len(n.keys) == 0 {
		d.report(n, "no limit", example)
	}
	if v := n.get("life"); d.is(v, tableNode, `write life = { shortest = "1 kyr", longest = "300 kyr" }`) {
		d.keys(v, lifeTable)
		l.Life[0], l.Life[1] = d.spans(v, duration)
		if math.IsInf(l.Life[1], 1) {
			l.Life[1] = 0
		}
	}
	if v := n.get("lowest"); v != nil {
		l.Lowest, _ = d.quantity(v, temperature)
	}
	if v := n.get("highest"); v != nil {
		hot, _ := d.quantity(v, temperature)
		l.Above = append(l.Above, TimeLimit{Temp: hot, Place: d.place(v)})
	}
	l.Above = append(l.Above, d.timeLimits(n.get("above"), thresholds)...)
	l.Between = d.intervals(n.get("between"))
	return l
}

// spans reads the shortest and the longest time that a limit allows, s: 0 and
// +Inf where it does not say.
func (d *decoder) spans(n *node, b bound) (least, most float64) {
	most = math.Inf(1)
	shortest, longest := n.get("shortest"), n.get("longest")
	if shortest == nil && longest == nil {
		d.report(n, "neither shortest nor longest", `write longest = "100 yr", say`)
		return least, most
	}
	ok := true
	if shortest != nil {
		least, ok = d.quantity(shortest, duration)
	}
	if longest != nil {
		top, read := d.quantity(longest, b)
		if read {
			most = top
		}
		if ok && read && top < least {
			d.report(longest, "less than the shortest, "+span(least), "exchange them")
		}
	}
	return least, most
}

// timeLimits reads the limits of time above temperatures.
func (d *decoder) timeLimits(n *node, thresholds []Threshold) []TimeLimit {
	const example = `write above = [ { threshold = "lock-up", longest = "100 yr" }, { temperature = "820 C", longest = "2 yr", counts = "without a break" } ]`
	if n == nil || d.tooMany(n, "limits") {
		return nil
	}
	var out []TimeLimit
	for _, t := range d.tables(n, example) {
		d.keys(t, aboveTable)
		l := TimeLimit{Place: d.place(t)}
		d.limitTemperature(t, &l, thresholds)
		l.Least, l.Most = d.spans(t, pause)
		if v := t.get("counts"); v != nil {
			l.Stretch = d.stretch(v)
		}
		out = append(out, l)
	}
	return out
}

// limitTemperature reads the temperature of a limit, or the threshold that it
// is named by.
func (d *decoder) limitTemperature(n *node, l *TimeLimit, thresholds []Threshold) {
	const example = `write temperature = "820 C", or the name of a [[threshold]]`
	name, temp := n.get("threshold"), n.get("temperature")
	switch {
	case name != nil && temp != nil:
		d.report(temp, "a threshold is given as well", "keep one of them")
	case temp != nil:
		l.Temp, _ = d.quantity(temp, temperature)
	case name == nil:
		d.report(n, "neither threshold nor temperature", example)
	default:
		d.limitThreshold(name, l, thresholds, example)
	}
}

func (d *decoder) limitThreshold(n *node, l *TimeLimit, thresholds []Threshold, example string) {
	text, ok := d.text(n, example)
	if !ok {
		return
	}
	var names []string
	for _, t := range thresholds {
		if t.Name == text {
			l.Name, l.Temp = t.Name, t.Temp
			return
		}
		names = append(names, t.Name)
	}
	d.reportWord(n, "no threshold has this name", names, example)
}

// stretch reads how a time above a temperature counts.
func (d *decoder) stretch(n *node) bool {
	const remedy = `write "in all" (the default) or "without a break"`
	text, ok := d.text(n, remedy)
	switch {
	case !ok || text == "in all":
	case text == "without a break":
		return true
	default:
		d.reportWord(n, "no way to count times", []string{"in all", "without a break"}, remedy)
	}
	return false
}

// intervals reads the limits of time between two moments.
func (d *decoder) intervals(n *node) []Interval {
	const example = `write between = [ { from = "end of wake 1", to = "start of wake 2", shortest = "1 kyr" } ]`
	if n == nil || d.tooMany(n, "limits") {
		return nil
	}
	var out []Interval
	for _, t := range d.tables(n, example) {
		d.keys(t, betweenTable)
		l := Interval{Place: d.place(t)}
		from, ok1 := d.pathMoment(d.need(t, "from", example))
		to, ok2 := d.pathMoment(d.need(t, "to", example))
		if ok1 && ok2 {
			l.From, l.To = *from, *to
		}
		l.Least, l.Most = d.spans(t, pause)
		out = append(out, l)
	}
	return out
}

// pathMoment reads a moment that a path has without a crystal.
func (d *decoder) pathMoment(n *node) (*thermal.Moment, bool) {
	if n == nil {
		return nil, false
	}
	m, ok := d.moment(n)
	if ok && m.Kind == thermal.Added {
		d.report(n, "counts from a zone, which paths do not have", `write another moment, such as "3 yr before eruption"`)
		return nil, false
	}
	return m, ok
}
