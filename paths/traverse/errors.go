package traverse

import (
	"fmt"
	"math"

	"bankfire/thermal"
)

// Errors say what one standard deviation of each value is. One of Column,
// Percent and Constant must be given; Floor goes with any of them. A column in
// "% of value", or in "%" where the values are in ppm, mole fraction or grey
// levels, holds per cent of each value.
type Errors struct {
	Column   string  // header of a column of errors, with a unit like the values' or per cent of them
	Sigmas   float64 // standard deviations, or standard errors of a mean, that the column holds: 1 or 2; 0 is read as 1 and noted
	Analyses float64 // the value is the mean of so many analyses whose scatter the column holds: it is divided by the root; 0 is 1
	Counts   string  // header of a column of such numbers, without a unit; "" = there is none
	Percent  float64 // per cent of each value's size, one standard deviation
	Constant Amount  // the same for all, one standard deviation
	Floor    Amount  // no standard deviation is taken to be less
}

// Amount is a concentration, above 0, in its unit. The zero value is none.
type Amount struct {
	Value float64
	Unit  string
}

// ParseErrors reads errors that are given as one text: "4 %" of each value, or
// the same "1.5 ppm" for all. A per cent sign is always relative, also where
// the values are themselves in per cent. The error is a *thermal.InputError
// without a place.
func ParseErrors(text string) (Errors, error) {
	c, unit, err := thermal.ParseConcentration(text)
	switch {
	case err != nil:
		return Errors{}, err
	case unit == "%" && (!(c.Value > 0) || c.Sigma != 0):
		return Errors{}, &thermal.InputError{Value: text, Problem: "not a number of per cent above zero", Remedy: `write, for example, "4 %"`}
	case unit == "%":
		return Errors{Percent: c.Value}, nil
	}
	a, err := ParseAmount(text)
	return Errors{Constant: a}, err
}

// ParseAmount reads a concentration above zero, "1.5 ppm". The error is a
// *thermal.InputError without a place.
func ParseAmount(text string) (Amount, error) {
	c, unit, err := thermal.ParseConcentration(text)
	if err != nil {
		return Amount{}, err
	}
	if !(c.Value > 0) || c.Sigma != 0 {
		return Amount{}, &thermal.InputError{Value: text, Problem: "not one amount above zero", Remedy: `write, for example, "1.5 ppm"`}
	}
	return Amount{c.Value, unit}, nil
}

// check refuses errors that say nothing, or two things, or nonsense.
func (e *Errors) check(name string) error {
	given := 0
	for _, is := range []bool{e.Column != "", e.Percent != 0, e.Constant != Amount{}} {
		if is {
			given++
		}
	}
	problem := ""
	switch {
	case given == 0:
		problem = "no errors given"
	case given > 1:
		problem = "errors given in more than one way"
	case !(e.Percent >= 0 && e.Constant.Value >= 0 && e.Floor.Value >= 0):
		problem = "errors below zero"
	case e.Sigmas != 0 && e.Sigmas != 1 && e.Sigmas != 2:
		problem = fmt.Sprintf("a column of %g standard deviations", e.Sigmas)
	case e.Column == "" && (e.Analyses != 0 || e.Counts != "") || e.Analyses != 0 && e.Counts != "":
		problem = "numbers of analyses without a column of errors, or twice"
	case e.Analyses != 0 && !(e.Analyses >= 1 && e.Analyses <= mostAnalyses):
		problem = fmt.Sprintf("errors of %g analyses", e.Analyses)
	}
	if problem == "" {
		return nil
	}
	return &thermal.InputError{File: name, Field: "error", Problem: problem,
		Remedy: `want one of "4 %", "1.5 ppm" or { column = "2se [ppm]", sigmas = 2 }`}
}

// bindErrors converts what is known of the errors into the unit of the values.
func (d *reader) bindErrors() error {
	var err error
	if d.constant, err = d.amount(d.o.Errors.Constant); err != nil {
		return err
	}
	if d.floor, err = d.amount(d.o.Errors.Floor); err != nil {
		return err
	}
	if d.o.Errors.Column == "" {
		return nil
	}
	b := d.columns[wantedColumns]
	d.perColumn = 1 / math.Max(d.o.Errors.Sigmas, 1) / math.Sqrt(math.Max(d.o.Errors.Analyses, 1))
	if d.relative = b.unit == ofValue || b.unit == "%" && percentIsOfValue(d.t.Unit); d.relative {
		d.perColumn /= 100
		return nil
	}
	factor, ok := errorFactor(b.unit, d.t.Unit)
	if ok {
		d.perColumn *= factor
		return nil
	}
	problem, remedy := "in a unit that the values' unit "+d.t.Unit+" does not convert to", "give errors in the unit of the values"
	if b.unit == "%" {
		problem = "per cent of each value, or of the whole like the values in " + d.t.Unit
		remedy = fmt.Sprintf("write [%s] or [%s]", ofValue, d.t.Unit)
	}
	return d.errorAt(d.header[b.index].at, "column", b.title, problem, remedy)
}

// percentIsOfValue reports whether an error in "%" can only be one of each
// value, the values being in no kind of per cent.
func percentIsOfValue(unit string) bool {
	return unit == "ppm" || unit == "mole fraction" || unit == Grey
}

// errorFactor converts an error to the unit of the values: where that is Fo or
// An, differences are those of mol%.
func errorFactor(from, to string) (factor float64, ok bool) {
	if factor, ok = thermal.ConcentrationFactor(from, to); ok || to != "Fo" && to != "An" {
		return factor, ok
	}
	return thermal.ConcentrationFactor(from, "mol%")
}

// mostAnalyses is more than anyone averages.
const mostAnalyses = 1e6

// amount converts an amount of the options into the unit of the values.
func (d *reader) amount(a Amount) (float64, error) {
	if a == (Amount{}) {
		return 0, nil
	}
	factor, ok := errorFactor(a.Unit, d.t.Unit)
	v := a.Value * factor
	if ok && d.usable(v) {
		return v, nil
	}
	e := &thermal.InputError{File: d.name, Field: "error", Value: fmt.Sprintf("%g %s", a.Value, a.Unit),
		Problem: "too small an error", Remedy: "want what the instrument resolves"}
	if !ok {
		e.Problem = "does not convert to the values' unit " + d.t.Unit
		e.Remedy = "give errors in the unit of the values"
	}
	return 0, e
}

// leastError, of the whole, is below what any instrument resolves; smaller
// errors would only overflow a misfit.
const leastError = 1e-15

// sigma returns one standard deviation of the current row's value v.
func (d *reader) sigma(v float64) (float64, bool) {
	e := &d.o.Errors
	if e.Column != "" {
		return d.typedSigma(v)
	}
	sigma := math.Max(d.constant+math.Abs(v)*e.Percent/100, d.floor)
	if !d.usable(sigma) {
		d.refuse(valueColumn, fmt.Sprintf("%g %% of it is no error above zero", e.Percent),
			"give a floor for the errors, or leave the row out")
		return 0, false
	}
	return sigma, true
}

// typedSigma returns the standard deviation of v from the current row's error
// column.
func (d *reader) typedSigma(v float64) (float64, bool) {
	typed, ok := d.quantity(wantedColumns)
	if !ok {
		return 0, false
	}
	sigma := typed * d.perColumn
	if d.relative {
		sigma *= math.Abs(v)
	}
	if d.o.Errors.Counts != "" {
		n, ok := d.analyses(wantedColumns + 1)
		if !ok {
			return 0, false
		}
		sigma /= math.Sqrt(n)
	}
	sigma = math.Max(sigma, d.floor)
	switch {
	case typed < 0:
		d.refuse(wantedColumns, "an error below zero", "write the size of the error")
	case !d.usable(sigma):
		d.refuse(wantedColumns, "an error must be above zero", "give a floor for the errors, or leave the row out")
	default:
		return sigma, true
	}
	return 0, false
}

// analyses reads how many analyses the current row's value is the mean of.
func (d *reader) analyses(k int) (float64, bool) {
	n, ok := d.number(k)
	if ok && !(n >= 1 && n <= mostAnalyses && n == math.Trunc(n)) {
		d.refuse(k, "not a number of analyses", "write a whole number of at least 1")
		return 0, false
	}
	return n, ok
}

func (d *reader) usable(sigma float64) bool {
	return sigma >= leastError*Whole(d.t.Unit) && finite(sigma)
}

func (d *reader) noteErrors() {
	e := &d.o.Errors
	if e.Column != "" && e.Sigmas == 0 && e.Analyses == 0 && e.Counts == "" {
		d.note("column %q read as one standard deviation", e.Column)
	}
	if d.relative {
		d.note("column %q is taken as per cent of each value", e.Column)
	}
	cent := Whole(d.t.Unit) == 100 && d.t.Unit != "wt%"
	if e.Column != "" && !d.relative && d.t.Unit == "%" {
		d.note("column %q is taken as per cent of the whole, like the values", e.Column)
	}
	if e.Percent != 0 && cent {
		d.note("errors of %g %% are taken of each value, not of the whole", e.Percent)
	}
}
