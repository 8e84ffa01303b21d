package study

import (
	"fmt"
	"slices"
)

// Starts is how many starts the element may have had: 1 if there is no choice.
func (e *Element) Starts() int { return max(1, len(e.Alternatives)) }

// Starting returns the element with start k of those it may have had.
func (e *Element) Starting(k int) *Element {
	if e.Alternatives == nil {
		return e
	}
	with := *e
	with.Start = e.Alternatives[k]
	return &with
}

// StartName is the name of start k for people.
func (e *Element) StartName(k int) string {
	if name := e.Alternatives[k].Name; name != "" {
		return name
	}
	return fmt.Sprintf("start %d", k+1)
}

// mostChoices bounds the combinations of a crystal: each is judged for every path.
const mostChoices = 100

// Choices are the combinations of the starts that the elements of the crystal may
// have had, for each the number of every element's start. An alternative with a name
// goes with those of that name in other elements: melt A of the one with melt A of the
// other.
func (c *Crystal) Choices() [][]int {
	choices, _ := c.choices()
	return choices
}

// choices lists mostChoices of them at most, and says whether these are all.
func (c *Crystal) choices() (choices [][]int, complete bool) {
	choices = [][]int{nil}
	for n := range c.Elements {
		var longer [][]int
		for _, chosen := range choices {
			for k := range c.Elements[n].Starts() {
				if !c.goesWith(chosen, n, k) {
					continue
				}
				if len(longer) == mostChoices {
					return longer, false
				}
				longer = append(longer, append(chosen[:n:n], k))
			}
		}
		choices = longer
	}
	return choices, true
}

// goesWith reports whether start k of element n can go with those chosen for the
// elements before it.
func (c *Crystal) goesWith(chosen []int, n, k int) bool {
	e := &c.Elements[n]
	for i, j := range chosen {
		if other := &c.Elements[i]; !e.agrees(k, other, j) || !other.agrees(j, e, k) {
			return false
		}
	}
	return true
}

// agrees reports whether no start of the other element but number j has the name of
// start k.
func (e *Element) agrees(k int, other *Element, j int) bool {
	if e.Alternatives == nil || e.Alternatives[k].Name == "" {
		return true
	}
	i := slices.IndexFunc(other.Alternatives, func(s Start) bool { return s.Name == e.Alternatives[k].Name })
	return i < 0 || i == j
}

// choosable reports alternatives that are too many together, or that exclude each
// other.
func (d *decoder) choosable(n *node, c *Crystal) {
	switch choices, complete := c.choices(); {
	case !complete:
		d.report(n, fmt.Sprintf("the alternatives of its elements have more than %d combinations", mostChoices),
			"give those that belong together one name, such as name = \"melt A\" in both")
	case len(choices) == 0:
		d.report(n, "no alternatives of its elements go together: those of one name do", "give alternatives that belong together one name in all elements")
	}
}

// oneEdge reports measured elements of a crystal that leave a width of their edges
// open in different ways: it is one width, that with which the zones grew. Where one of
// them has a width for each boundary, all that leave any open have.
func (d *decoder) oneEdge(n *node, c *Crystal) {
	var first *Element
	var widths []Nuisance
	for i := range c.Elements {
		e := &c.Elements[i]
		for k := range e.Starts() {
			s := e.Starting(k).Start
			other := s.Widths()
			switch {
			case e.Traverse == nil || !slices.ContainsFunc(other, Nuisance.open):
			case first == nil:
				first, widths = e, slices.Clone(other)
			case len(other) != len(widths):
				d.report(n, fmt.Sprintf("%s and %s leave widths of the edges open, one with a width for each boundary and one with a width for all", first.Name, e.Name),
					"state widths in both as a list of one a boundary, or in neither")
				return
			case !agree(widths, other):
				d.report(n, fmt.Sprintf("%s and %s leave the width of the edges open in different ways, but it is one width for all elements", first.Name, e.Name),
					"state it alike in both, or a width without an error in one")
				return
			}
		}
	}
}

func (n Nuisance) open() bool { return !n.Fixed() }

// agree reports whether all widths that are open in both lists are so in the same way;
// those that are only in the other one are taken over.
func agree(widths, other []Nuisance) bool {
	for k, w := range other {
		switch {
		case w.Fixed():
		case widths[k].Fixed():
			widths[k] = w
		case w != widths[k]:
			return false
		}
	}
	return true
}
