package main

import (
	"fmt"
	"io"
	"math"
	"strconv"
	"strings"

	"bankfire/paths"
	"bankfire/paths/study"
	"bankfire/thermal"
)

// writeFamilies writes what became of each family.
func writeFamilies(w io.Writer, r *paths.Result) {
	for i := range r.Families {
		f := &r.Families[i]
		s := &f.Summary
		fmt.Fprintf(w, "Family %s, %s drawn%s:\n\n", quoted(f.Family.Name), counted(f.Family.Count(), "path"), drawnText(f.Family))
		writeValues(w, f, s)
		fmt.Fprintln(w)
		for _, sentence := range familySentences(r, f, s) {
			fmt.Fprintln(w, sentence)
		}
		fmt.Fprintln(w)
	}
}

// counted is a number of things.
func counted(n int64, thing string) string {
	if n == 1 {
		return "1 " + thing
	}
	return strconv.FormatInt(n, 10) + " " + thing + "s"
}

// drawnText says how members were drawn.
func drawnText(f *study.Family) string {
	text := fmt.Sprintf(" (%s, seed %d)", f.Method(), f.Seed)
	if f.Count() < f.Asked {
		text = fmt.Sprintf(" (%s, of the %d asked for)", f.Method(), f.Asked)
	}
	return text
}

// writeValues writes the table of the values.
func writeValues(w io.Writer, f *paths.FamilyResult, s *paths.FamilySummary) {
	table := newTable()
	table.row("value", "drawn", "spread", "of those that reproduce", "nine in ten of them", "")
	for k := range s.Values {
		v, of := &f.Family.Values[k], &s.Values[k]
		row := []string{v.Name, valueRange(v, drawnEnds(v, of)), v.Spread()}
		if math.IsNaN(of.Kept[0]) {
			table.row(append(row, "none", "", "")...)
			continue
		}
		table.row(append(row, valueRange(v, of.Kept), valueRange(v, [2]float64{of.Kept90[0], of.Kept90[2]}), openText(of.Open))...)
	}
	table.writeTo(w)
}

// drawnEnds are the ends of a range, else what was drawn.
func drawnEnds(v *study.Value, of *paths.ValueSummary) [2]float64 {
	if lo, hi, ok := v.Ends(); ok {
		return [2]float64{lo, hi}
	}
	return of.Drawn
}

// openText says at which ends of its range the data do not bound a value.
func openText(open [2]bool) string {
	switch open {
	case [2]bool{true, true}:
		return "not bounded by the data"
	case [2]bool{true, false}:
		return "not bounded from below by the data"
	case [2]bool{false, true}:
		return "not bounded from above by the data"
	}
	return ""
}

func valueRange(v *study.Value, x [2]float64) string {
	return valueText(v, x[0]) + " to " + valueText(v, x[1])
}

// valueText prints a value in the unit that people would write.
func valueText(v *study.Value, x float64) string {
	switch {
	case v.Plain():
		return number(x)
	case v.Dim() == thermal.Temperature && v.Level():
		return celsius(x)
	case v.Dim() == thermal.Temperature:
		return fmt.Sprintf("%.0f K", x)
	case v.Dim() == thermal.Duration && x < 0:
		return "-" + thermal.DurationText(-x)
	case v.Dim() == thermal.Duration:
		return thermal.DurationText(x)
	case v.Dim() == thermal.Length && math.Abs(x) < oneMillimetre:
		return number(x/1e-6) + " um"
	}
	return number(x) + " " + siUnit(v)
}

// oneMillimetre is the length below which people write um.
const oneMillimetre = 1e-3

// familySentences say in words what the members show.
func familySentences(r *paths.Result, f *paths.FamilyResult, s *paths.FamilySummary) []string {
	out := []string{familyTally(f)}
	if f.Tally.Counts[paths.Reproduces] > 0 {
		out = append(out, "How many do depends on how they were drawn, and their ranges are no confidence intervals: each passes by itself.")
	}
	kept := f.Tally.Counts[paths.Reproduces]
	for k := range s.Values {
		if kept > 0 && s.Values[k].Open != [2]bool{} {
			out = append(out, openSentence(&f.Family.Values[k], s.Values[k].Open))
		}
	}
	for _, t := range s.TradeOffs {
		how := "rises"
		if t.Rank < 0 {
			how = "falls"
		}
		out = append(out, fmt.Sprintf("Among those that reproduce, %s %s as %s rises (rank correlation %.2f): the data bound the two together better than each.",
			f.Family.Values[t.B].Name, how, f.Family.Values[t.A].Name, t.Rank))
	}
	if kept > 0 {
		out = append(out, keptSentences(r, f, s)...)
	}
	if n := f.Tally.Counts[paths.TooSharp]; n > 0 {
		out = append(out, fmt.Sprintf("Those that are too sharp need %s x more diffusion (half of them more than %s x).", span(s.More[0], s.More[2]), number(s.More[1])))
	}
	if n := f.Tally.Counts[paths.TooSmooth]; n > 0 {
		out = append(out, fmt.Sprintf("Those that are too smooth need %s x less diffusion (half of them more than %s x).", span(1/s.Less[2], 1/s.Less[0]), number(1/s.Less[1])))
	}
	for _, b := range f.Barred {
		if b.Words == b.Why {
			out = append(out, fmt.Sprintf("Barred, %d of them, such as member %d: %s.", b.Count, b.First, b.Why))
			continue
		}
		out = append(out, fmt.Sprintf("Barred by %s: %d, such as member %d: %s.", b.Words, b.Count, b.First, b.Why))
	}
	for n, m := range f.Methods {
		out = append(out, methodSentence(r, f, n, m))
	}
	return out
}

func span(lo, hi float64) string { return number(lo) + " to " + number(hi) }

// openSentence says where a value is not bounded.
func openSentence(v *study.Value, open [2]bool) string {
	lo, hi, _ := v.Ends()
	switch open {
	case [2]bool{true, true}:
		return fmt.Sprintf("%s is %s: members reproduce at %s and at %s.", v.Name, openText(open), valueText(v, lo), valueText(v, hi))
	case [2]bool{true, false}:
		return fmt.Sprintf("%s is %s: members reproduce down to %s, the end of its range.", v.Name, openText(open), valueText(v, lo))
	}
	return fmt.Sprintf("%s is %s: members reproduce up to %s, the end of its range.", v.Name, openText(open), valueText(v, hi))
}

// familyTally says how many members have which verdict.
func familyTally(f *paths.FamilyResult) string {
	var others []string
	for v := paths.Unjudged; v <= paths.Barred; v++ {
		if n := f.Tally.Counts[v]; n > 0 && v != paths.Reproduces {
			others = append(others, fmt.Sprintf("%d %s", n, severalText(v)))
		}
	}
	of := counted(f.Family.Count(), "path") + " drawn"
	if n := f.Tally.Count(); n < f.Family.Count() {
		of = counted(n, "path") + " screened so far"
	}
	text := fmt.Sprintf("Of the %s (%s), %d reproduce what was measured", of, spreadsText(f.Family), f.Tally.Counts[paths.Reproduces])
	if f.Tally.Counts[paths.Reproduces] == 0 {
		text = fmt.Sprintf("Of the %s (%s), none reproduces what was measured", of, spreadsText(f.Family))
	}
	if len(others) == 0 {
		return text + "."
	}
	return text + "; " + list(others) + "."
}

// severalText is a verdict of several members.
func severalText(v paths.Verdict) string {
	if v == paths.WrongShape {
		return "are of wrong shape"
	}
	return "are " + v.String()
}

// spreadsText says how the values are spread: "log in wait, even in store".
func spreadsText(f *study.Family) string {
	var words []string
	for i := range f.Values {
		if v := &f.Values[i]; v.Kind != study.Tied {
			words = append(words, v.Spread()+" in "+v.Name)
		}
	}
	return strings.Join(words, ", ")
}

// keptSentences say what those that reproduce have in common.
func keptSentences(r *paths.Result, f *paths.FamilyResult, s *paths.FamilySummary) []string {
	nine := func(q paths.Quantiles, text func(float64) string) string {
		return text(q[0]) + " to " + text(q[2]) + ", half of them below " + text(q[1])
	}
	out := []string{fmt.Sprintf("Nine in ten of those that reproduce live %s.", nine(s.Life, thermal.DurationText))}
	for k, t := range r.Study.Thresholds {
		out = append(out, fmt.Sprintf("They spend %s above %s (%s).", nine(s.Above[k], thermal.DurationText), t.Name, celsius(t.Temp)))
	}
	for k, e := range f.Elements {
		out = append(out, fmt.Sprintf("Their stand-in temperature for %s in %s is %s.", e.Element.Name, e.Crystal.Name, nine(s.StandIn[k], celsius)))
	}
	before := len(out)
	if text := durationSentence(s.Duration); text != "" {
		out = append(out, text)
	}
	for n, e := range f.Elements {
		if text := legsText(s.Shares[n]); text != "" {
			out = append(out, fmt.Sprintf("In the median, of the diffusion of %s in %s %s.", e.Element.Name, e.Crystal.Name, text))
		}
	}
	if s.Sampled < f.Tally.Counts[paths.Reproduces] {
		out = append(out, fmt.Sprintf("The last %s and rank correlations are of a fair sample of %d of them.", counted(int64(len(out)-before), "line"), s.Sampled))
	}
	return out
}

// mostHot is of how many temperatures of a duration curve the text speaks.
const mostHot = 4

// durationSentence says for how long half of the members are hotter than some
// temperatures, "" if they are never hotter than any.
func durationSentence(curve []paths.DurationQuantiles) string {
	var hot []paths.DurationQuantiles // without the first, above which is all of their lives
	for _, d := range curve[min(1, len(curve)):] {
		if d.Time[1] > 0 {
			hot = append(hot, d)
		}
	}
	if len(hot) == 0 {
		return ""
	}
	var words []string
	for k, n := 0, min(mostHot, len(hot)); k < n; k++ {
		d := hot[k*(len(hot)-1)/max(1, n-1)]
		words = append(words, thermal.DurationText(d.Time[1])+" above "+celsius(d.Temp))
	}
	words[0] = strings.Replace(words[0], " above", " or more above", 1)
	return "Half of them spend " + list(words) + "."
}

// leastShare is the least median share that the text speaks of.
const leastShare = 0.01

// legsText says what legs do of the diffusion, "" if none does a part of it.
func legsText(shares []paths.DiffusionShare) string {
	var words []string
	for _, of := range shares {
		if of.Share[1] < leastShare {
			continue
		}
		name := of.Name
		if name == "" {
			name = of.Kind.String() + " legs without a name"
		}
		words = append(words, fmt.Sprintf("%.0f %% is done in %s", 100*of.Share[1], name))
	}
	if len(words) == 0 {
		return ""
	}
	for k := range words[1:] {
		words[k+1] = strings.Replace(words[k+1], " is done", "", 1)
	}
	return list(words)
}

// methodSentence says how the members were run for element n, and how far the one that
// agrees best, which was run by itself as well, differs from that.
func methodSentence(r *paths.Result, f *paths.FamilyResult, n int, m paths.FamilyMethod) string {
	e := f.Elements[n]
	of := e.Element.Name + " in " + e.Crystal.Name
	if !m.Table {
		text := fmt.Sprintf("Method for %s: steps along each path, since %s.", of, m.Why)
		if f.Tally.NumErrOf >= 0 {
			text += fmt.Sprintf(" Numerical error of those that were audited: at most %s sigma, of member %d.", oneDigit(f.Tally.NumErr), f.Tally.NumErrOf)
		}
		if f.Best() >= 0 && len(f.Methods) == 1 {
			off := math.Abs(r.Paths[f.Path].Outcome.Misfit - f.Tally.Misfit)
			text += fmt.Sprintf(" By the plan of a path that is written out, member %d has a chi-square that differs by %s.", f.Best(), smallText(off))
		}
		return text
	}
	text := fmt.Sprintf("Method for %s: a table of chi-square against G, since %s. Numerical error, wherever members have their G: at most %s sigma.", of, m.Why, oneDigit(m.NumErr))
	if f.Best() >= 0 && len(f.Methods) == 1 {
		off := math.Abs(r.Paths[f.Path].Outcome.Misfit - f.Tally.Misfit)
		text += fmt.Sprintf(" Run in steps, member %d has a chi-square that differs by %s.", f.Best(), smallText(off))
	}
	return text
}
