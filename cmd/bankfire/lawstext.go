package main

import (
	"bytes"
	"fmt"
	"io"
	"math"
	"regexp"
	"slices"
	"strconv"
	"strings"

	"bankfire/diffusion/catalogue"
	"bankfire/thermal"
)

// lineWidth is where running text breaks, characters.
const lineWidth = 100

// lawTable is a table with columns close together, of which laws have many.
func lawTable() *table { return spacedTable(2) }

// listLaws prints the rows the filter lets through, one a line.
func listLaws(out io.Writer, filter lawsFilter) error {
	rows := slices.DeleteFunc(catalogue.All(), func(r catalogue.Row) bool { return !filter.chosen(&r) })
	if len(rows) == 0 {
		return noLaw(filter)
	}
	var text bytes.Buffer
	tab := lawTable()
	tab.row("key", "mineral", "species", "tag", "calibrated", "depends on", "checked")
	for _, r := range rows {
		tab.row(r.Key, r.Mineral, r.Species, string(r.Tag), calibratedText(&r), dependsText(&r), yesNo(r.Checked()))
	}
	tab.writeTo(&text)
	fmt.Fprintf(&text, "\n%s.", countText(len(rows)))
	if slices.ContainsFunc(rows, func(r catalogue.Row) bool { return !r.Checked() }) {
		fmt.Fprintf(&text, " checked no: %s.", catalogue.NotChecked)
	}
	fmt.Fprintln(&text)
	_, err := out.Write(text.Bytes())
	return err
}

// noLaw says what a filter that lets nothing through could have asked for.
func noLaw(filter lawsFilter) error {
	all := catalogue.All()
	known := func(of func(r *catalogue.Row) string) string {
		var words []string
		for i := range all {
			words = append(words, of(&all[i]))
		}
		slices.Sort(words)
		return strings.Join(slices.Compact(words), ", ")
	}
	some := func(f lawsFilter) bool {
		return slices.ContainsFunc(all, func(r catalogue.Row) bool { return f.chosen(&r) })
	}
	switch {
	case !some(lawsFilter{mineral: filter.mineral}):
		names := known(func(r *catalogue.Row) string { return r.Mineral })
		return &thermal.InputError{Field: "--mineral", Value: filter.mineral, Problem: "no law", Remedy: "there are " + names}
	case !some(lawsFilter{species: filter.species}):
		names := known(func(r *catalogue.Row) string { return r.Species })
		return &thermal.InputError{Field: "--species", Value: filter.species, Problem: "no law", Remedy: "there are " + names}
	}
	return &thermal.InputError{Field: "bankfire laws", Problem: "no law passes all filters", Remedy: "leave one out"}
}

func countText(n int) string {
	if n == 1 {
		return "1 law"
	}
	return strconv.Itoa(n) + " laws"
}

func yesNo(b bool) string {
	if b {
		return "yes"
	}
	return "no"
}

// calibratedText is "700 to 1150 C".
func calibratedText(r *catalogue.Row) string {
	if !r.RangeKnown() {
		return "not known"
	}
	return fmt.Sprintf("%s to %s C", celsiusText(r.TMin), celsiusText(r.TMax))
}

// celsiusText is temp, K, in C without the round-off of the conversion.
func celsiusText(temp float64) string {
	return fmt.Sprintf("%.6g", math.Round((temp-thermal.ZeroCelsius)*1e3)/1e3)
}

func dependsText(r *catalogue.Row) string {
	return strings.Join(append([]string{"T"}, r.Needs()...), ", ")
}

// showLaw prints everything about a law, and D at the temperatures.
func showLaw(out io.Writer, c lawCurve, opt *lawsOptions) error {
	var text bytes.Buffer
	r := c.row
	fmt.Fprintf(&text, "%s: %s in %s\n\n", r.Key, r.Species, r.Mineral)
	for _, line := range lawLines(r) {
		if line[1] != "" {
			fmt.Fprintf(&text, "  %-12s %s\n", line[0], wrap(line[1], 15))
		}
	}
	if len(opt.temps) > 0 {
		fmt.Fprintf(&text, "\n%s", valuesText(c, opt))
	}
	fmt.Fprintf(&text, "\n%s", studyText(c, &opt.conditions))
	_, err := out.Write(text.Bytes())
	return err
}

// lawLines returns the lines of a law's description: a word and its text.
func lawLines(r *catalogue.Row) [][2]string {
	return [][2]string{
		{"citation", r.Citation},
		{"law", formulaText(r)},
		{"tag", string(r.Tag)},
		{"depends on", dependsText(r)},
		{"direction", r.Direction},
		{"calibrated", calibratedText(r)},
		{"measured at", r.PRange},
		{"uncertainty", uncertaintyText(r)},
		{"error of E", fmt.Sprintf("%.4g kJ/mol (%s)", r.SigmaE.Value/1e3, r.SigmaE.Origin)},
		{"slope error", slopeErrorText(r.Composition)},
		{"as printed", printedText(r)},
		{"known from", knownText(r)},
		{"remark", r.Remark},
	}
}

// memory is how the catalogue begins what it says of a row that was not checked.
var memory = regexp.MustCompile(`^memory: [a-z]+( \(constants\))?`)

// knownText says how the constants are known: where they were seen, or that they
// were not checked and what else there is to say of them.
func knownText(r *catalogue.Row) string {
	text := strings.NewReplacer("are memory (strong)", "were not checked", "are memory", "were not checked").Replace(r.Confidence)
	if r.Checked() {
		return text
	}
	if said := memory.FindString(text); said != "" {
		return catalogue.NotChecked + text[len(said):]
	}
	return catalogue.NotChecked + "; " + text
}

// formulaText is the law in words of the program.
func formulaText(r *catalogue.Row) string {
	energy := fmt.Sprintf("%.6g kJ/mol", r.E/1e3)
	if r.DV != 0 {
		energy = fmt.Sprintf("(%s + %s %.3g cm3/mol)", energy, above(catalogue.Pressure, r.PRef, pressureText(r.PRef)), r.DV*1e6)
	}
	return fmt.Sprintf("log10 D = %.6g - %s / (ln(10) R T)", r.Log10D0, energy) + termText(r.Composition) + termText(r.FO2) + ", D in m2/s"
}

func termText(t catalogue.Term) string {
	switch t.Form {
	case catalogue.Linear:
		return fmt.Sprintf(" %s %s", slopeText(t.Slope), above(t.Variable, t.Reference, fmt.Sprintf("%g", t.Reference)))
	case catalogue.Power:
		return fmt.Sprintf(" %s log10(%s)", slopeText(t.Slope), over(t.Variable, t.Reference))
	}
	return ""
}

// slopeErrorText is how well the slope against a composition is known, and whose it is.
func slopeErrorText(t catalogue.Term) string {
	switch {
	case t.SlopeOf != "":
		return "that of " + t.SlopeOf + ", from which the slope was taken"
	case t.Sigma > 0:
		return fmt.Sprintf("%.3g, of log10 D against %s (%s)", t.Sigma, t.Variable, catalogue.FromSource)
	}
	return ""
}

// above is "(XFe - 0.1)", or "XFe" where the reference is 0.
func above(variable string, reference float64, text string) string {
	if reference == 0 {
		return variable
	}
	return "(" + variable + " - " + text + ")"
}

// over is "fO2 / 1e-7 Pa", or "aSiO2" where the reference is the number 1.
func over(variable string, reference float64) string {
	if reference == 1 && variable != catalogue.FO2 {
		return variable
	}
	return variable + " / " + conditionText(variable, reference)
}

// conditionText is the value of a condition with its unit.
func conditionText(name string, x float64) string {
	switch name {
	case catalogue.Pressure:
		return pressureText(x)
	case catalogue.FO2:
		return tidy(fmt.Sprintf("%.6g", x)) + " Pa"
	}
	return tidy(fmt.Sprintf("%.6g", x))
}

// pressureText prints a pressure, Pa, in the unit in which it is best read.
func pressureText(p float64) string {
	for _, unit := range []string{"kbar", "bar"} {
		if size, _, _ := thermal.Unit(unit, thermal.Pressure); p >= size {
			return tidy(fmt.Sprintf("%.6g", p/size)) + " " + unit
		}
	}
	return tidy(fmt.Sprintf("%.6g", p)) + " Pa"
}

// tidy takes the zeros and the plus out of an exponent: 1e-7 for 1e-07.
func tidy(number string) string {
	return strings.NewReplacer("e-0", "e-", "e+0", "e", "e+", "e").Replace(number)
}

// slopeText is "+ 3" or "- 4.1".
func slopeText(x float64) string {
	if x < 0 {
		return fmt.Sprintf("- %.4g", -x)
	}
	return fmt.Sprintf("+ %.4g", x)
}

func uncertaintyText(r *catalogue.Row) string {
	where := "in the middle of the calibrated 1/T range"
	if temp, ok := r.Middle(); ok {
		where = fmt.Sprintf("at %.0f C, the middle of the calibrated 1/T range", temp-thermal.ZeroCelsius)
	}
	return fmt.Sprintf("log10 D +- %.3g %s (%s)", r.SigmaMid.Value, where, r.SigmaMid.Origin)
}

func printedText(r *catalogue.Row) string {
	if r.SigmaLog10D0 == 0 {
		return ""
	}
	return fmt.Sprintf("log10 D0 +- %g, strongly correlated with the error of E: not to be combined with it", r.SigmaLog10D0)
}

// valuesText is the table of D at the temperatures, with what the law rests on.
func valuesText(c lawCurve, opt *lawsOptions) string {
	var text bytes.Buffer
	tab := lawTable()
	tab.row("T [C]", "D [m2/s]", "log10 D [m2/s]", "D [um2/yr]", "")
	for _, temp := range opt.temps {
		lnD := c.law.LnD(temp)
		perYear := math.Exp(lnD) * thermal.Year * 1e12
		tab.row(celsiusText(temp), fmt.Sprintf("%.4g", math.Exp(lnD)), fmt.Sprintf("%.3f", lnD/math.Ln10),
			fmt.Sprintf("%.4g", perYear), beyondText(c.row, temp))
	}
	tab.writeTo(&text)
	fmt.Fprintf(&text, "\nA year is 365.25 d.%s\n", givenText(c.row, &opt.conditions))
	for _, caution := range c.cautions {
		fmt.Fprintf(&text, "Caution: %s.\n", caution)
	}
	return text.String()
}

// givenText is " At XAn 0.5." for the conditions the law depends on.
func givenText(r *catalogue.Row, given *lawConditions) string {
	if at := conditionsText(r, given); at != "" {
		return " At " + at + "."
	}
	return ""
}

// conditionsText is "pressure 5 kbar, XFe 0.1": the conditions the law depends on.
func conditionsText(r *catalogue.Row, given *lawConditions) string {
	var parts []string
	for _, name := range r.Needs() {
		if name == catalogue.FO2 && given.buffer != nil {
			parts = append(parts, name+" "+given.along)
			continue
		}
		parts = append(parts, name+" "+conditionText(name, given.values[name]))
	}
	return strings.Join(parts, ", ")
}

// beyondText says how far temp, K, is outside the calibrated range.
func beyondText(r *catalogue.Row, temp float64) string {
	below, above := r.Extrapolation(temp, temp)
	switch {
	case !r.RangeKnown():
		return "calibrated range not known"
	case below > 0:
		return fmt.Sprintf("%.5g K below the calibrated range", below)
	case above > 0:
		return fmt.Sprintf("%.5g K above the calibrated range", above)
	}
	return ""
}

// compareLaws prints log10 D of several laws side by side and each D as a
// multiple of the first.
func compareLaws(out io.Writer, curves []lawCurve, opt *lawsOptions) error {
	var text bytes.Buffer
	for i, c := range curves {
		about := c.row.Key + ": " + c.row.Citation + "; calibrated " + calibratedText(c.row)
		fmt.Fprintf(&text, "%d  %s\n", i+1, wrap(about, 3))
	}
	fmt.Fprintln(&text)
	tab := lawTable()
	tab.row(compareHeader(len(curves))...)
	for _, temp := range opt.temps {
		tab.row(compareLine(curves, temp)...)
	}
	tab.writeTo(&text)
	fmt.Fprintf(&text, "\nD in m2/s. Parentheses: outside the calibrated range, or range not known.\n")
	for i, c := range curves {
		if at := givenText(c.row, &opt.conditions); at != "" {
			fmt.Fprintf(&text, "%d:%s\n", i+1, at)
		}
		for _, note := range lawNotes(c, opt.temps) {
			fmt.Fprintf(&text, "%d: %s.\n", i+1, note)
		}
	}
	_, err := out.Write(text.Bytes())
	return err
}

func compareHeader(laws int) []string {
	head := []string{"T [C]"}
	for i := range laws {
		head = append(head, fmt.Sprintf("log10 D%d", i+1))
	}
	for i := 1; i < laws; i++ {
		head = append(head, fmt.Sprintf("D%d/D1", i+1))
	}
	return head
}

func compareLine(curves []lawCurve, temp float64) []string {
	cells := []string{celsiusText(temp)}
	for _, c := range curves {
		cell := fmt.Sprintf("%.3f", c.law.LnD(temp)/math.Ln10)
		if beyondText(c.row, temp) != "" {
			cell = "(" + cell + ")"
		}
		cells = append(cells, cell)
	}
	first := curves[0].law.LnD(temp)
	for _, c := range curves[1:] {
		cells = append(cells, fmt.Sprintf("%.4g", math.Exp(c.law.LnD(temp)-first)))
	}
	return cells
}

// wrap breaks text between words so that no line is longer than lineWidth if it
// begins at column indent, and indents all lines but the first.
func wrap(text string, indent int) string {
	var out strings.Builder
	column := indent
	for i, word := range strings.Fields(text) {
		switch {
		case i == 0:
		case column+1+len(word) > lineWidth:
			out.WriteString("\n" + strings.Repeat(" ", indent))
			column = indent
		default:
			out.WriteString(" ")
			column++
		}
		out.WriteString(word)
		column += len(word)
	}
	return out.String()
}
