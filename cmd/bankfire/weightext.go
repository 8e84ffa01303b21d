package main

import (
	"bytes"
	"fmt"
	"io"
	"math"
	"slices"
	"strings"

	"bankfire/diffusion/catalogue"
	"bankfire/paths"
	"bankfire/paths/study"
	"bankfire/thermal"
)

// care is the caution that every result carries.
const care = "A storage time is not a forecast; decisions about safety belong to the responsible authorities."

// weighingText is the report for people.
func weighingText(r *paths.Result) bytes.Buffer {
	var text bytes.Buffer
	fmt.Fprintf(&text, "%s\n\n", r.Study.Title)
	var common, notes []string
	if len(r.Paths) > 0 { // there are none where every member of every family is barred
		common, notes = writeVerdicts(&text, r)
		fmt.Fprintln(&text)
	}
	writeCrystals(&text, r)
	writeStarts(&text, r)
	writeSentences(&text, r)
	writeFamilies(&text, r)
	writeFits(&text, r)
	for _, note := range gathered(common) {
		fmt.Fprintf(&text, "every path: %s\n", note)
	}
	for i, note := range notes {
		fmt.Fprintf(&text, "[%d] %s\n", i+1, note)
	}
	for _, note := range r.Study.Notes {
		fmt.Fprintf(&text, "note: %s\n", note)
	}
	fmt.Fprintf(&text, "\nVerdicts at %s confidence. Shift factor: what D would have to be multiplied by to agree best, with its 95 %%\n"+
		"interval. Above best: chi-square above that of each profile's own best fit. Law off by: the smallest error of the\n"+
		"law, in its sigma, with which the path would pass. bankfire help verdicts explains all. A year is 365.25 days.\n%s\n",
		percent(r.Study.Confidence), care)
	return text
}

// writeVerdicts writes the table of paths and returns the notes that concern
// every path that was run, and those its last column refers to.
func writeVerdicts(w io.Writer, r *paths.Result) (common, notes []string) {
	if !r.Study.Sharing.Whole() {
		fmt.Fprint(w, "All crystals along one path:\n\n")
	}
	table := newTable()
	head := []string{"path", "verdict", "shift factor", "tail", "chi-square", "above best", "law off by", "life"}
	for _, t := range r.Study.Thresholds {
		head = append(head, "above "+t.Name)
	}
	table.row(append(head, "")...)
	beside := make([][]string, len(r.Paths))
	for i := range r.Paths {
		beside[i] = notesBeside(&r.Paths[i])
	}
	common = commonNotes(r, beside)
	var list numbered
	for i := range r.Paths {
		p := &r.Paths[i]
		o := &p.Outcome
		row := append([]string{p.Path.Name, o.Verdict.String()}, findingCells(o, r.WithErrors())...)
		row = append(row, thermal.DurationText(p.Life))
		for _, above := range p.Above {
			row = append(row, thermal.DurationText(above))
		}
		own := slices.DeleteFunc(beside[i], func(note string) bool { return slices.Contains(common, note) })
		table.row(append(row, list.marks(own))...)
	}
	table.writeTo(w)
	return common, list
}

// notesBeside are the notes of a path and of its profiles, each once. The reasons
// why one is barred stand in the sentences.
func notesBeside(p *paths.PathResult) []string {
	var notes []string
	add := func(more []string) {
		for _, note := range more {
			if !slices.Contains(notes, note) {
				notes = append(notes, note)
			}
		}
	}
	if p.Outcome.Verdict != paths.Barred {
		add(p.Notes)
	}
	for j := range p.Profiles {
		add(p.Profiles[j].Notes)
	}
	return notes
}

// commonNotes are the notes that stand beside every path that was run, if those
// are two or more.
func commonNotes(r *paths.Result, beside [][]string) []string {
	if ran(r) < 2 {
		return nil
	}
	var common []string
	first := true
	for i := range r.Paths {
		switch {
		case len(r.Paths[i].Profiles) == 0:
		case first:
			common, first = slices.Clone(beside[i]), false
		default:
			common = slices.DeleteFunc(common, func(note string) bool { return !slices.Contains(beside[i], note) })
		}
	}
	return common
}

// findingCells are the cells of a path's row that a barred path does not have.
func findingCells(o *paths.Outcome, errors int) []string {
	if o.Verdict == paths.Barred {
		return make([]string, 5)
	}
	return append(numberCells(&o.Finding), leaningText(&o.WithLaws, errors))
}

// leaningText says by how much the laws and other constants, so many as have errors,
// would have to be off: the one that is furthest.
func leaningText(l *paths.LawsAllowed, errors int) string {
	switch {
	case l.Verdict == paths.Unjudged:
		return ""
	case errors == 0:
		return "no error stated"
	case l.Leaning == nil:
		return "no error helps"
	case len(l.Leaning)+len(l.Others) == 0:
		return ""
	}
	list := asking(l)
	text := fmt.Sprintf("%.1f sigma", list[0].sigma)
	if len(list) == 1 || text == "0.0 sigma" {
		return text
	}
	return "up to " + text + " (" + strings.TrimPrefix(list[0].name, "the ") + ")"
}

// gathered returns the notes with all that say of constants that they were not
// checked in one: "law: the QFM buffer: constants ..." names both.
func gathered(notes []string) []string {
	var rest, subjects []string
	for _, note := range notes {
		subject, ok := strings.CutSuffix(note, ": "+catalogue.NotChecked)
		if !ok {
			rest = append(rest, note)
			continue
		}
		for _, name := range strings.Split(subject, ": ") {
			if !slices.Contains(subjects, name) {
				subjects = append(subjects, name)
			}
		}
	}
	if len(subjects) == 0 {
		return rest
	}
	return append([]string{catalogue.NotChecked + ": " + strings.Join(subjects, ", ")}, rest...)
}

// numbered is a list of notes without repeats.
type numbered []string

// marks returns the numbers of the notes, ascending, which join the list as
// needed.
func (n *numbered) marks(notes []string) string {
	var numbers []int
	for _, note := range notes {
		i := slices.Index(*n, note)
		if i < 0 {
			i = len(*n)
			*n = append(*n, note)
		}
		numbers = append(numbers, i+1)
	}
	slices.Sort(numbers)
	var marks strings.Builder
	for _, i := range numbers {
		fmt.Fprintf(&marks, "[%d]", i)
	}
	return marks.String()
}

// writeSentences says in words what the table shows.
func writeSentences(w io.Writer, r *paths.Result) {
	var fit []string
	written := r.Written()
	for i := range written {
		if r.Paths[i].Outcome.Verdict == paths.Reproduces {
			fit = append(fit, quoted(r.Paths[i].Path.Name))
		}
	}
	for i := range r.Own {
		own := &r.Own[i]
		for _, finding := range own.Findings {
			fmt.Fprintf(w, "%s in %s: %s.\n", own.Element.Name, own.Crystal.Name, finding)
		}
		if own.Scatter > 0 {
			fmt.Fprintf(w, "%s in %s: an extra scatter of %s %s was added to the errors.\n",
				own.Element.Name, own.Crystal.Name, number(own.Scatter), own.Element.Traverse.Unit)
		}
	}
	writeEdges(w, r)
	shared := r.Study.Sharing.Whole()
	switch {
	case !shared && ran(r) > 0:
		writeHistories(w, r)
	case slices.ContainsFunc(written, func(p paths.PathResult) bool { return p.Outcome.Verdict != paths.Unjudged }):
		fmt.Fprintln(w, tally(fit, len(written), ran(r)))
	}
	if shared {
		writeScatter(w, r)
		writeChance(w, r)
	}
	for i := range r.Paths {
		if o := &r.Paths[i].Outcome; o.Verdict == paths.Barred || shared && o.Verdict != paths.Reproduces {
			fmt.Fprintf(w, "%s is %s.\n", quoted(r.Paths[i].Path.Name), verdictInWords(&r.Paths[i]))
			writeLeaning(w, &r.Paths[i], r.WithErrors())
		} else if within := withinCrystals(&r.Paths[i]); !shared && len(within) > 0 {
			fmt.Fprintf(w, "Along %s elements of one crystal are %s.\n", quoted(r.Paths[i].Path.Name), oddsInWords(&r.Paths[i], within))
		}
	}
	fmt.Fprintln(w)
}

// tally says which of n paths, of which some were run, reproduce the data.
func tally(fit []string, n, ran int) string {
	switch {
	case ran == 0:
		return "Every path is barred: nothing was weighed."
	case n == 1 && len(fit) == 1:
		return "The path reproduces what was measured."
	case n == 1:
		return "The path does not reproduce what was measured."
	case len(fit) == 0:
		return fmt.Sprintf("None of the %d paths reproduces what was measured.", n)
	case len(fit) == 2 && n == 2:
		return "Both paths reproduce what was measured: the data cannot tell them apart."
	case len(fit) == n:
		return fmt.Sprintf("All %d paths reproduce what was measured: the data cannot tell them apart.", n)
	case len(fit) == 1:
		return fmt.Sprintf("Of the %d paths, %s reproduces what was measured.", n, fit[0])
	}
	return fmt.Sprintf("Of the %d paths, %s reproduce what was measured: the data cannot tell these apart.", n, list(fit))
}

// writeFits writes, for each measured element, what the traverse decided on
// each path and how much diffusion the path did.
func writeFits(w io.Writer, r *paths.Result) {
	for n := range r.Own {
		var fits *table
		for i := range r.Paths {
			if len(r.Paths[i].Profiles) == 0 {
				continue
			}
			q := &r.Paths[i].Profiles[n]
			if !q.Ran() {
				continue
			}
			if fits == nil {
				fmt.Fprintf(w, "%s in %s, fitted for each path:\n\n", q.Element.Name, q.Crystal.Name)
				fits = newTable()
				fits.row(fitHead(freeOf(r, n))...)
			}
			fits.row(append([]string{r.Paths[i].Path.Name}, fitCells(q, freeOf(r, n))...)...)
		}
		if fits != nil {
			fits.writeTo(w)
			fmt.Fprintln(w)
		}
	}
}

// freeOf are the values fitted to profile n on any path, in their order: with one
// start other values may be open than with another.
func freeOf(r *paths.Result, n int) []paths.FreeFit {
	var all []paths.FreeFit
	for i := range r.Paths {
		if len(r.Paths[i].Profiles) == 0 {
			continue
		}
		for _, f := range r.Paths[i].Profiles[n].Free {
			if fitted(all, f.Name) == nil {
				all = append(all, f)
			}
		}
	}
	return all
}

// fitted returns the value of that name; nil if it is not there.
func fitted(free []paths.FreeFit, name string) *paths.FreeFit {
	for i := range free {
		if free[i].Name == name {
			return &free[i]
		}
	}
	return nil
}

func fitHead(free []paths.FreeFit) []string {
	head := []string{"path"}
	for _, f := range free {
		head = append(head, f.Name)
	}
	return append(head, "sqrt(2 G)", "stand-in temperature", "numerical error")
}

func fitCells(q *paths.ProfileResult, free []paths.FreeFit) []string {
	var cells []string
	for i := range free {
		f := fitted(q.Free, free[i].Name)
		if f == nil {
			cells = append(cells, "")
			continue
		}
		cell := withError(f.Value, f.Sigma, f.Unit)
		if f.AtEnd {
			cell += " (end of range)"
		}
		cells = append(cells, cell)
	}
	return append(cells, blurText(q.Crystal, q.Element, q.LnG), celsius(q.StandIn), oneDigit(q.NumErr)+" sigma")
}

// blurText is sqrt(2 G) with the integral exp(lnG) of the law, m2; from the slowest to
// the fastest place where D differs within the crystal.
func blurText(c *study.Crystal, e *study.Element, lnG float64) string {
	least, most := c.Factors(e)
	blur := func(factor float64) string { return number(math.Sqrt(2*factor) * math.Exp(lnG/2) * 1e6) }
	if slow, fast := blur(least), blur(most); slow != fast {
		return slow + " to " + fast + " um"
	}
	return blur(most) + " um"
}

// timesText is by what factor diffusion should differ; where the data set no
// bound to it, by what factor at least.
func timesText(best, least float64, open bool) string {
	if open {
		return "at least " + number(least) + " x"
	}
	return number(best) + " x"
}

// verdictInWords is the verdict with how far the path misses, or why it was
// not run.
func verdictInWords(p *paths.PathResult) string {
	switch o := &p.Outcome; o.Verdict {
	case paths.TooSharp:
		return "too sharp: needs " + timesText(o.Shift, o.Shift95[0], math.IsInf(o.Shift95[1], 1)) + " more diffusion"
	case paths.TooSmooth:
		return "too smooth: needs " + timesText(1/o.Shift, 1/o.Shift95[1], o.Shift95[0] == 0) + " less diffusion"
	case paths.WrongShape:
		return "of wrong shape: no amount of diffusion along it fits"
	case paths.AtOdds:
		return oddsInWords(p, o.Odds)
	case paths.Unjudged:
		return "not judged: no degrees of freedom are left"
	case paths.Barred:
		return "barred: " + strings.Join(study.Whys(p.Barred), "; ")
	default:
		return o.Verdict.String()
	}
}
