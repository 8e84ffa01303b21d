package main

import (
	"fmt"
	"math"
	"slices"
	"strconv"
	"strings"

	"bankfire/diffusion/catalogue"
	"bankfire/thermal"
)

// studyText says how the law is written in a study.
func studyText(c lawCurve, given *lawConditions) string {
	r := c.row
	needs := r.Needs()
	switch {
	case len(needs) == 0:
		return fmt.Sprintf("In a study:\n\nlaw = %q\n", r.Key)
	case c.law.Terms == nil:
		return fmt.Sprintf("In a study %s:\n\nlaw = %q\n\nWith values that stay the same all along instead,\n\n  %s\n\nprints a line for it.\n",
			givingText(r), r.Key, r.Command())
	}
	line, ok := studyLine(c, given)
	if !ok {
		return "A study cannot give this law under these conditions.\n"
	}
	return fmt.Sprintf("In a study, at %s:\n\n%s\n", conditionsText(r, given), line)
}

// givingText says what a study must give for the law to be named in it: "with
// fO2 and pressure in its [conditions]".
func givingText(r *catalogue.Row) string {
	host, on := r.OnHost()
	rest := slices.DeleteFunc(r.Needs(), func(name string) bool {
		return on && name == host.Variable || r.OwnComposition() && name == r.Composition.Variable
	})
	var parts []string
	if r.OwnComposition() {
		parts = append(parts, "of Fe or Mg in Fo or mole fraction")
	}
	if on {
		parts = append(parts, "that gives "+host.Variable+" of every zone, such as host = 0.55")
	}
	if len(rest) > 0 {
		parts = append(parts, "with "+list(rest)+" in its [conditions]")
	}
	return strings.Join(parts, ", ")
}

// studyLine returns the law under the conditions as a line for a study, good to
// six digits of D. ok is false if it is not one Arrhenius term with a D0 that
// can be written.
func studyLine(c lawCurve, given *lawConditions) (line string, ok bool) {
	r := c.row
	if len(c.law.Terms) != 1 {
		return "", false
	}
	a := c.law.Terms[0]
	d0 := math.Exp(a.LnA)
	if d0 == 0 || math.IsInf(d0, 0) {
		return "", false
	}
	// ln D of rocks holds E/(R T) some thirty times, so E needs two digits more than D0.
	parts := []string{
		fmt.Sprintf(`D0 = "%s m2/s"`, tidy(fmt.Sprintf("%.7g", d0))),
		fmt.Sprintf(`E = "%.9g kJ/mol"`, a.E*thermal.GasConstant/1e3),
		fmt.Sprintf("sigma = %.6g", r.SigmaMid.Value),
	}
	if r.RangeKnown() {
		parts = append(parts, fmt.Sprintf(`range = "%s..%s C"`, celsiusText(r.TMin), celsiusText(r.TMax)))
	}
	parts = append(parts, "citation = "+strconv.Quote(fmt.Sprintf("%s (%s at %s)", r.Citation, r.Key, conditionsText(r, given))))
	cautions := slices.Clone(c.cautions)
	if slices.Contains(r.Needs(), catalogue.FO2) && given.buffer == nil { // in nature a buffer follows the temperature
		cautions = append(cautions, "fO2 held at "+conditionText(catalogue.FO2, given.values[catalogue.FO2])+" at every temperature")
	}
	if len(cautions) > 0 {
		parts = append(parts, "caution = "+strconv.Quote(strings.Join(cautions, "; ")))
	}
	return "law = { " + strings.Join(parts, ", ") + " }", true
}
