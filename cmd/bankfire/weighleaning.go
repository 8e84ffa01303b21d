package main

import (
	"cmp"
	"fmt"
	"io"
	"math"
	"slices"
	"strings"

	"bankfire/paths"
)

// writeLeaning says of a path that fails whether it would pass with laws, so many of
// which have errors, that are off by no more than they may be, and of which law most
// is asked.
func writeLeaning(w io.Writer, p *paths.PathResult, laws int) {
	l := &p.Outcome.WithLaws
	switch {
	case laws == 0 || p.Outcome.Verdict == paths.Barred || p.Outcome.Verdict == paths.Unjudged:
	case len(l.Leaning) == 0:
		fmt.Fprintf(w, "No error of the laws would make %s pass.\n", quoted(p.Path.Name))
	case l.Verdict == paths.Reproduces:
		fmt.Fprintf(w, "With the errors of the laws allowed for, %s reproduces what was measured: it asks for %s.\n", quoted(p.Path.Name), askedOf(l.Leaning))
	default:
		fmt.Fprintf(w, "For %s to pass, laws would have to be off by more than their errors allow: it asks for %s.\n", quoted(p.Path.Name), askedOf(l.Leaning))
	}
}

// askedOf is what is asked of the law that would have to be furthest off.
func askedOf(list []paths.Leaning) string {
	most := slices.MaxFunc(list, func(a, b paths.Leaning) int { return cmp.Compare(a.Sigma, b.Sigma) })
	name := most.Law
	if name == "" {
		name = "the law in the study"
	}
	text := fmt.Sprintf("%s to be off by %.1f sigma", name, most.Sigma)
	var kinds []string
	for _, kind := range []struct {
		name  string
		sigma float64
	}{{"D", most.LnD}, {"E", most.E}} {
		if math.Abs(kind.sigma) < 0.05 {
			continue
		}
		way := "larger"
		if kind.sigma < 0 {
			way = "smaller"
		}
		kinds = append(kinds, fmt.Sprintf("%s %s by %.1f", kind.name, way, math.Abs(kind.sigma)))
	}
	if len(kinds) > 0 {
		text += " (" + strings.Join(kinds, ", ") + ")"
	}
	if len(list) > 1 {
		sum := 0.0
		for _, l := range list {
			sum += l.Sigma * l.Sigma
		}
		text += fmt.Sprintf(" and no other by more, in all %.1f sigma", math.Sqrt(sum))
	}
	return text
}
