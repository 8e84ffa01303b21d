package main

import (
	"cmp"
	"fmt"
	"io"
	"math"
	"slices"
	"strings"

	"bankfire/paths"
	"bankfire/paths/study"
)

// writeLeaning says of a path that fails whether it would pass with laws and other
// constants, so many of which have errors, that are off by no more than they may be, and
// of which most is asked.
func writeLeaning(w io.Writer, p *paths.PathResult, errors int) {
	l := &p.Outcome.WithLaws
	switch {
	case errors == 0 || p.Outcome.Verdict == paths.Barred || p.Outcome.Verdict == paths.Unjudged:
	case len(l.Leaning)+len(l.Others) == 0:
		fmt.Fprintf(w, "No error of the laws would make %s pass.\n", quoted(p.Path.Name))
	case l.Verdict == paths.Reproduces:
		fmt.Fprintf(w, "With the errors of the laws allowed for, %s reproduces what was measured: it asks for %s.\n", quoted(p.Path.Name), askedOf(l))
	default:
		fmt.Fprintf(w, "For %s to pass, laws would have to be off by more than their errors allow: it asks for %s.\n", quoted(p.Path.Name), askedOf(l))
	}
}

// asked is what a path asks of a law or of another constant.
type asked struct {
	sigma float64
	name  string // "mine", "the composition slope of mine"
	text  string // "mine to be off by 1.8 sigma (D larger by 1.8)"
}

// askedOf says what is asked of the law that would have to be furthest off; where other
// constants have errors, what is asked of each.
func askedOf(l *paths.LawsAllowed) string {
	list := asking(l)
	sum := 0.0
	for _, a := range list {
		sum += a.sigma * a.sigma
	}
	inAll := fmt.Sprintf(", in all %.1f sigma", math.Sqrt(sum))
	switch {
	case len(list) == 1:
		return list[0].text
	case len(l.Others) == 0:
		return list[0].text + " and no other by more" + inAll
	}
	var texts []string
	for i, a := range list {
		if i == 0 || a.sigma >= leastAsked {
			texts = append(texts, a.text)
		}
	}
	if len(texts) == 1 {
		return texts[0]
	}
	return strings.Join(texts[:len(texts)-1], ", ") + " and " + texts[len(texts)-1] + inAll
}

// leastAsked is how many sigma are named, as 0.1.
const leastAsked = 0.05

// asking lists what is asked, most first.
func asking(l *paths.LawsAllowed) []asked {
	var list []asked
	for _, on := range l.Leaning {
		list = append(list, askedOfLaw(on))
	}
	for _, off := range l.Others {
		name := constantName(off.Deviation)
		list = append(list, asked{math.Abs(off.Sigma), name, fmt.Sprintf("%s to be %s by %.1f sigma", name, larger(off.Sigma), math.Abs(off.Sigma))})
	}
	slices.SortStableFunc(list, func(a, b asked) int { return cmp.Compare(b.sigma, a.sigma) })
	return list
}

func askedOfLaw(on paths.Leaning) asked {
	name := on.Law
	if name == "" {
		name = "the law in the study"
	}
	text := fmt.Sprintf("%s to be off by %.1f sigma", name, on.Sigma)
	var kinds []string
	for _, kind := range []struct {
		name  string
		sigma float64
	}{{"D", on.LnD}, {"E", on.E}} {
		if math.Abs(kind.sigma) >= leastAsked {
			kinds = append(kinds, fmt.Sprintf("%s %s by %.1f", kind.name, larger(kind.sigma), math.Abs(kind.sigma)))
		}
	}
	if len(kinds) > 0 {
		text += " (" + strings.Join(kinds, ", ") + ")"
	}
	return asked{on.Sigma, on.Law, text}
}

func larger(sigma float64) string {
	if sigma < 0 {
		return "smaller"
	}
	return "larger"
}

// constantName names a constant with what it belongs to: "the composition slope of mine",
// "A of kx".
func constantName(d study.Deviation) string {
	name := d.What.String() + " of " + d.Of
	if d.What == study.HostSlope || d.What == study.OwnSlope {
		return "the " + name
	}
	return name
}
