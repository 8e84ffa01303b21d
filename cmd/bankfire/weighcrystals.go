package main

import (
	"fmt"
	"io"
	"math"
	"slices"
	"strconv"

	"bankfire/paths"
	"bankfire/paths/study"
)

// writeCrystals writes, where there are several crystals, what each says of the
// paths by itself.
func writeCrystals(w io.Writer, r *paths.Result) {
	if len(r.Crystals) < 2 || ran(r) == 0 {
		return
	}
	fmt.Fprint(w, "Each crystal by itself:\n\n")
	table := newTable()
	table.row("path", "crystal", "verdict", "shift factor", "tail", "chi-square", "above best")
	for i := range r.Paths {
		p := &r.Paths[i]
		for k := range p.Outcome.Crystals {
			f := &p.Outcome.Crystals[k]
			if f.Verdict == paths.Barred {
				table.row(p.Path.Name, r.Crystals[k].Name, f.Verdict.String(), "", "", "", "")
				continue
			}
			table.row(append([]string{p.Path.Name, r.Crystals[k].Name, f.Verdict.String()}, numberCells(f)...)...)
		}
		if s := &p.Outcome.Scatter; s.Degrees > 0 {
			common := paths.Finding{Shift: s.Common, Shift95: s.Common95}
			table.row(p.Path.Name, fmt.Sprintf("scatter of %d", s.Crystals), "", shiftText(&common), tailText(s.Tail), fmt.Sprintf("%s/%d", number(s.ChiSq), s.Degrees), "")
		}
	}
	table.writeTo(w)
	fmt.Fprintln(w)
}

// numberCells are the numbers of a finding: shift factor, tail, chi-square and
// that above best.
func numberCells(f *paths.Finding) []string {
	return []string{shiftText(f), tailText(f.Tail), fmt.Sprintf("%s/%d", number(f.Misfit), f.Degrees), smallText(f.Above)}
}

// writeScatter says along which paths the crystals' amounts of diffusion scatter
// more than their errors.
func writeScatter(w io.Writer, r *paths.Result) {
	var more, within []string
	crystals := 0
	for i := range r.Paths {
		s := &r.Paths[i].Outcome.Scatter
		if !(s.Degrees > 0) {
			continue
		}
		text := fmt.Sprintf("%s (tail %s)", quoted(r.Paths[i].Path.Name), tailText(s.Tail))
		if crystals = max(crystals, s.Crystals); s.Tail >= 1-r.Study.Confidence {
			within = append(within, text)
		} else {
			more = append(more, text)
		}
	}
	subject := fmt.Sprintf("The %s crystals' amounts of diffusion", inWords(crystals))
	but := ""
	if severalLaws(r) {
		but = "; the errors of their laws are not counted"
	}
	switch {
	case len(more) > 0 && len(within) > 0:
		fmt.Fprintf(w, "%s scatter more than their errors along %s, not along %s%s.\n", subject, list(more), list(within), but)
	case len(more) > 0:
		fmt.Fprintf(w, "%s scatter more than their errors along %s%s.\n", subject, list(more), but)
	case len(within) > 0:
		fmt.Fprintf(w, "%s agree within their errors along %s%s.\n", subject, list(within), but)
	}
}

// severalLaws reports whether the measured elements diffuse by more than one law.
func severalLaws(r *paths.Result) bool {
	return slices.ContainsFunc(r.Own, func(o paths.OwnBest) bool { return o.Element.Law.Key != r.Own[0].Element.Law.Key })
}

// inWords is a small number as a word.
func inWords(n int) string {
	words := [...]string{"no", "one", "two", "three", "four", "five", "six", "seven", "eight", "nine", "ten"}
	if n < len(words) {
		return words[n]
	}
	return strconv.Itoa(n)
}

// writeChance says how many crystals fail by chance along a true path, and along
// which paths it may have been chance.
func writeChance(w io.Writer, r *paths.Result) {
	for i := range r.Paths {
		c := &r.Paths[i].Outcome.Chance
		if c.Judged == 0 {
			continue
		}
		fmt.Fprintf(w, "Along a path that is true, %s of %d crystals fails by chance on average, at %s confidence, and no more than %d in 95 of 100 studies.\n",
			number(c.Expected), c.Judged, percent(r.Study.Confidence), c.Most)
		break
	}
	for i := range r.Paths {
		c := &r.Paths[i].Outcome.Chance
		if c.Failed == 0 || !c.Allows(r.Study.Confidence) {
			continue
		}
		verb := "fail"
		if c.Failed == 1 {
			verb = "fails"
		}
		fmt.Fprintf(w, "Along %s %d of %d crystals %s, which chance may have done.\n", quoted(r.Paths[i].Path.Name), c.Failed, c.Judged, verb)
	}
}

// writeHistories says, of crystals that need not share a path, which paths
// reproduce each and, where they end alike, all together.
func writeHistories(w io.Writer, r *paths.Result) {
	var without []string
	for k, c := range r.Crystals {
		by := r.ReproducedBy(k)
		if len(by) == 0 {
			without = append(without, c.Name)
			fmt.Fprintf(w, "%s by itself is reproduced by no path.\n", c.Name)
			continue
		}
		fmt.Fprintf(w, "%s by itself is reproduced by %s.\n", c.Name, list(quotedAll(by)))
	}
	switch {
	case r.Study.Sharing.From != nil:
		writeGroups(w, r)
	case len(without) == 0:
		fmt.Fprintln(w, "Every crystal has a path of its own that reproduces it.")
	default:
		fmt.Fprintf(w, "Not every crystal has a path that reproduces it: %s.\n", list(without))
	}
}

// writeGroups says what paths that end alike can do together.
func writeGroups(w io.Writer, r *paths.Result) {
	found := 0
	for i := range r.Groups {
		g := &r.Groups[i]
		if g.Outcome.Verdict == paths.Reproduces {
			found++
		}
		if len(g.Paths) == 1 {
			fmt.Fprintf(w, "%s ends like no other path. For all crystals, it %s%s.\n", quoted(g.Paths[0].Name), doesWhat(&g.Outcome), fitText(&g.Outcome))
			continue
		}
		fmt.Fprintf(w, "%s are the same from %s on.", list(quotedAll(g.Paths)), quoted(r.Study.Sharing.From.Text))
		writeChoices(w, r, g)
	}
	switch {
	case found == 0:
		fmt.Fprintln(w, "No paths that end alike reproduce all crystals.")
	case len(r.Groups) > 1 && found == 1:
		fmt.Fprintf(w, "Of %d ends, one reproduces all crystals.\n", len(r.Groups))
	case len(r.Groups) > 1:
		fmt.Fprintf(w, "Of %d ends, %d reproduce all crystals.\n", len(r.Groups), found)
	}
}

// writeChoices says which of the paths of a group is best for which crystal.
func writeChoices(w io.Writer, r *paths.Result, g *paths.Group) {
	var best, also []string
	for k, c := range g.Choices {
		name := r.Crystals[k].Name
		if c.Path == nil {
			fmt.Fprintf(w, " %s bars all of them.\n", name)
			return
		}
		best = append(best, fmt.Sprintf("%s for %s", quoted(c.Path.Name), name))
		if len(c.Also) > 0 {
			also = append(also, fmt.Sprintf("%s for %s", list(quotedAll(c.Also)), name))
		}
	}
	fmt.Fprintf(w, " The best of %s combinations, %s, %s%s.\n", number(g.Combinations()), list(best), doesWhat(&g.Outcome), fitText(&g.Outcome))
	if len(also) > 0 {
		fmt.Fprintf(w, "Instead of these it may be, one at a time, %s.\n", list(also))
	}
}

// doesWhat is a verdict as what a path does or is.
func doesWhat(o *paths.Outcome) string {
	if o.Verdict == paths.Reproduces {
		return "reproduces what was measured"
	}
	return "is " + o.Verdict.String()
}

// fitText is chi-square and tail in brackets, where there are any.
func fitText(o *paths.Outcome) string {
	if math.IsNaN(o.Misfit) {
		return ""
	}
	return fmt.Sprintf(" (chi-square %s/%d, tail %s)", number(o.Misfit), o.Degrees, tailText(o.Tail))
}

func quotedAll(list []*study.Path) []string {
	var names []string
	for _, p := range list {
		names = append(names, quoted(p.Name))
	}
	return names
}
