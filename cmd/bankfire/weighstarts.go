package main

import (
	"fmt"
	"io"
	"slices"
	"strings"

	"bankfire/paths"
)

// hasChoice reports whether elements of crystal k may have had several starts, which
// were tried.
func hasChoice(r *paths.Result, k int) bool {
	return slices.ContainsFunc(r.Paths, func(p paths.PathResult) bool { return k < len(p.Starts) && len(p.Starts[k]) > 0 })
}

// startsText names the starts of a combination: "melt A" if all have that name, else
// with the elements.
func startsText(t *paths.Tried) string {
	var each []string
	one := t.Starts[0].Named || len(t.Starts) == 1
	for _, s := range t.Starts {
		one = one && s.Name == t.Starts[0].Name
		each = append(each, s.Element.Name+" "+s.Name)
	}
	if one {
		return t.Starts[0].Name
	}
	return strings.Join(each, ", ")
}

// takenText names the starts that were taken for crystal k on the path, "" if none
// were tried.
func takenText(p *paths.PathResult, k int) string {
	if k < len(p.Starts) {
		for i := range p.Starts[k] {
			if t := &p.Starts[k][i]; t.Taken {
				return startsText(t)
			}
		}
	}
	return ""
}

// writeStarts writes, for each crystal with a choice of starts, what became of each
// choice on every path.
func writeStarts(w io.Writer, r *paths.Result) {
	for k, c := range r.Crystals {
		if !hasChoice(r, k) {
			continue
		}
		fmt.Fprintf(w, "Starts of %s, of which every path takes the best; the choice costs no degree of freedom:\n\n", c.Name)
		table := newTable()
		table.row("path", "start", "verdict", "shift factor", "tail", "chi-square", "above that taken", "")
		for i := range r.Paths {
			p := &r.Paths[i]
			if k >= len(p.Starts) {
				continue
			}
			for j := range p.Starts[k] {
				t := &p.Starts[k][j]
				taken := ""
				if t.Taken {
					taken = "taken"
				}
				table.row(p.Path.Name, startsText(t), t.Verdict.String(), number(t.Shift), tailText(t.Tail),
					fmt.Sprintf("%s/%d", number(t.Misfit), t.Degrees), number(t.AboveOne), taken)
			}
		}
		table.writeTo(w)
		fmt.Fprintln(w)
	}
}

// writeEdges says how the edges of crystals came to be as wide as they are, where the
// data tell.
func writeEdges(w io.Writer, r *paths.Result) {
	for i := range r.Edges {
		e := &r.Edges[i]
		var names []string
		for _, of := range e.Elements {
			names = append(names, of.Name)
		}
		of, are, them := "The edges of "+e.Crystal.Name, "are", "them"
		if boundary := e.BoundaryText(); boundary != "" {
			of, are, them = fmt.Sprintf("The edge between %s in %s", boundary, e.Crystal.Name), "is", "it"
		}
		growth, diffusion := number(e.Growth), number(e.Diffusion)
		switch e.Prefers {
		case paths.ByGrowth:
			fmt.Fprintf(w, "%s %s of one width in %s, %s um, as growth makes %s, not of widths with the root of D, as diffusion would: chi-square %s against %s, of %d.\n",
				of, are, list(names), number(e.Width*1e6), them, growth, diffusion, e.Degrees)
		case paths.ByDiffusion:
			fmt.Fprintf(w, "%s in %s %s of widths with the root of D, as diffusion makes %s, not of one width, as growth would: chi-square %s against %s, of %d.\n",
				of, list(names), are, them, diffusion, growth, e.Degrees)
		}
	}
}
