package main

import (
	"bytes"
	"fmt"
	"io"
	"math"
	"strings"

	"bankfire/paths"
)

// care is the caution that every result carries.
const care = "A storage time is not a forecast; decisions about safety belong to the responsible authorities."

// weighingText is the report for people.
func weighingText(r *paths.Result) bytes.Buffer {
	var text bytes.Buffer
	fmt.Fprintf(&text, "%s\n\n", r.Study.Title)
	notes := writeVerdicts(&text, r)
	fmt.Fprintln(&text)
	writeSentences(&text, r)
	writeFits(&text, r)
	for i, note := range notes {
		fmt.Fprintf(&text, "[%d] %s\n", i+1, note)
	}
	fmt.Fprintf(&text, "\nVerdicts at %s confidence; D factor: what D would have to be multiplied by, with its 95 %% interval.\n"+
		"A year is 365.25 days. %s\n", percent(r.Study.Confidence), care)
	return text
}

// writeVerdicts writes the table of paths and returns the notes its last
// column refers to.
func writeVerdicts(w io.Writer, r *paths.Result) []string {
	table := newTable()
	head := []string{"path", "verdict", "D factor", "95 %", "tail", "chi-square", "life"}
	for _, t := range r.Study.Thresholds {
		head = append(head, "above "+t.Name)
	}
	table.row(append(head, "")...)
	var notes numbered
	for i := range r.Paths {
		p := &r.Paths[i]
		o := &p.Outcome
		row := []string{p.Path.Name, o.Verdict.String(), number(o.Shift), intervalText(o.Shift95), tailText(o.Tail),
			fmt.Sprintf("%s/%d", number(o.Misfit), o.Degrees), timeText(p.Life)}
		for _, above := range p.Above {
			row = append(row, timeText(above))
		}
		marks := notes.marks(p.Notes)
		for j := range p.Profiles {
			marks += notes.marks(p.Profiles[j].Notes)
		}
		table.row(append(row, marks)...)
	}
	table.writeTo(w)
	return notes
}

// numbered is a list of notes without repeats.
type numbered []string

// marks returns the numbers of the notes, which join the list as needed.
func (n *numbered) marks(notes []string) string {
	var marks strings.Builder
	for _, note := range notes {
		i := 0
		for i < len(*n) && (*n)[i] != note {
			i++
		}
		if i == len(*n) {
			*n = append(*n, note)
		}
		fmt.Fprintf(&marks, "[%d]", i+1)
	}
	return marks.String()
}

// writeSentences says in words what the table shows.
func writeSentences(w io.Writer, r *paths.Result) {
	var fit []string
	for i := range r.Paths {
		if r.Paths[i].Outcome.Verdict == paths.Reproduces {
			fit = append(fit, quoted(r.Paths[i].Path.Name))
		}
	}
	switch n := len(r.Paths); {
	case len(fit) == 0:
		fmt.Fprintf(w, "None of the %d paths reproduces what was measured.\n", n)
	case len(fit) == n:
		fmt.Fprintf(w, "All of the %d paths reproduce what was measured: the data cannot tell them apart.\n", n)
	case len(fit) == 1:
		fmt.Fprintf(w, "Of the %d paths, %s reproduces what was measured.\n", n, fit[0])
	default:
		fmt.Fprintf(w, "Of the %d paths, %s reproduce what was measured: the data cannot tell these apart.\n", n, list(fit))
	}
	for i := range r.Paths {
		if o := &r.Paths[i].Outcome; o.Verdict != paths.Reproduces {
			fmt.Fprintf(w, "%s is %s.\n", quoted(r.Paths[i].Path.Name), verdictInWords(o))
		}
	}
	fmt.Fprintln(w)
}

// writeFits writes, for each measured element, what the traverse decided on
// each path and how much diffusion the path did.
func writeFits(w io.Writer, r *paths.Result) {
	for n := range r.Paths[0].Profiles {
		first := &r.Paths[0].Profiles[n]
		fmt.Fprintf(w, "%s in %s, fitted for each path:\n\n", first.Element.Name, first.Crystal.Name)
		fits := newTable()
		head := []string{"path"}
		for _, f := range first.Free {
			head = append(head, f.Name)
		}
		fits.row(append(head, "sqrt(2 G)", "same G at", "numerical error")...)
		for i := range r.Paths {
			q := &r.Paths[i].Profiles[n]
			row := []string{r.Paths[i].Path.Name}
			for _, f := range q.Free {
				row = append(row, withError(f.Value, f.Sigma, q.Element.Unit))
			}
			fits.row(append(row, number(math.Sqrt2*math.Exp(q.LnG/2)*1e6)+" um", celsius(q.StandIn), oneDigit(q.NumErr)+" sigma")...)
		}
		fits.writeTo(w)
		fmt.Fprintln(w)
	}
}

// verdictInWords is the verdict with how far the path misses.
func verdictInWords(o *paths.Outcome) string {
	switch o.Verdict {
	case paths.TooSharp:
		return fmt.Sprintf("too sharp: needs %s x more diffusion", number(o.Shift))
	case paths.TooSmooth:
		return fmt.Sprintf("too smooth: needs %s x less diffusion", number(1/o.Shift))
	case paths.WrongShape:
		return "of wrong shape: no amount of diffusion along it fits"
	default:
		return "reproduces"
	}
}
