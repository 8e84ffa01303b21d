package main

import (
	"fmt"
	"strings"

	"bankfire/paths"
)

// demandsShown is how many pairs of profiles at odds a sentence names.
const demandsShown = 3

// oddsInWords names the two profiles that disagree most, their laws and the ratio
// that the data demand between these, then other pairs.
func oddsInWords(p *paths.PathResult, odds []paths.Demand) string {
	if len(odds) == 0 {
		return "at odds: the profiles ask for different amounts of diffusion, none of two for amounts that are too different"
	}
	var text strings.Builder
	for k := range odds[:min(len(odds), demandsShown)] {
		d := &odds[k]
		if k == 0 {
			fmt.Fprintf(&text, "at odds: the data demand that D of %s be %s times what its law%s says relative to that of %s%s",
				profileName(p, d.Of), ratioText(d), lawInBrackets(p, d.Of), profileName(p, d.To), lawInBrackets(p, d.To))
			continue
		}
		fmt.Fprintf(&text, "; of %s %s times, relative to %s", profileName(p, d.Of), ratioText(d), profileName(p, d.To))
	}
	if more := len(odds) - demandsShown; more > 0 {
		fmt.Fprintf(&text, "; and %d more", more)
	}
	return text.String()
}

// withinCrystals keeps the pairs of one crystal each.
func withinCrystals(p *paths.PathResult) []paths.Demand {
	var within []paths.Demand
	for _, d := range p.Outcome.Odds {
		if p.Profiles[d.Of].Crystal == p.Profiles[d.To].Crystal {
			within = append(within, d)
		}
	}
	return within
}

func profileName(p *paths.PathResult, i int) string {
	return p.Profiles[i].Element.Name + " in " + p.Profiles[i].Crystal.Name
}

// lawInBrackets is the key of a law; nothing where it stands with its element.
func lawInBrackets(p *paths.PathResult, i int) string {
	if key := p.Profiles[i].Element.Law.Key; key != "" {
		return " (" + key + ")"
	}
	return ""
}

// ratioText is the demanded ratio with its 95 % interval.
func ratioText(d *paths.Demand) string {
	f := paths.Finding{Shift: d.Ratio, Shift95: d.Ratio95}
	return shiftText(&f)
}
