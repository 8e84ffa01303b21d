package traverse

import (
	"fmt"
	"math"
	"strconv"
	"strings"

	"bankfire/thermal"
)

// Errors say what one standard deviation of each value is. One of Column,
// Percent and Constant must be given; Floor goes with any of them.
type Errors struct {
	Column   string  // header of a column of errors, with a unit like the values'
	Sigmas   float64 // standard deviations, or standard errors of a mean, that the column holds: 1 or 2; 0 is read as 1 and noted
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
	if number, ok := strings.CutSuffix(strings.TrimSpace(text), "%"); ok && !strings.HasSuffix(number, "wt") {
		v, err := strconv.ParseFloat(strings.TrimSpace(number), 64)
		if err != nil || !(v > 0) || !finite(v) {
			return Errors{}, &thermal.InputError{Value: text, Problem: "not a number of per cent above zero", Remedy: `write, for example, "4 %"`}
		}
		return Errors{Percent: v}, nil
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
	factor, ok := thermal.ConcentrationFactor(b.unit, d.t.Unit)
	if !ok {
		return d.errorAt(d.header[b.index].at, "column", b.title, "in a unit that the values' unit "+d.t.Unit+" does not convert to",
			"give errors in the unit of the values")
	}
	d.perColumn = factor / math.Max(d.o.Errors.Sigmas, 1)
	return nil
}

// amount converts an amount of the options into the unit of the values.
func (d *reader) amount(a Amount) (float64, error) {
	if a == (Amount{}) {
		return 0, nil
	}
	factor, ok := thermal.ConcentrationFactor(a.Unit, d.t.Unit)
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
		return d.typedSigma()
	}
	sigma := math.Max(d.constant+math.Abs(v)*e.Percent/100, d.floor)
	if !d.usable(sigma) {
		d.refuse(valueColumn, fmt.Sprintf("%g %% of it is no error above zero", e.Percent),
			"give a floor for the errors, or leave the row out")
		return 0, false
	}
	return sigma, true
}

// typedSigma returns the standard deviation in the current row's error column.
func (d *reader) typedSigma() (float64, bool) {
	typed, ok := d.quantity(wantedColumns)
	if !ok {
		return 0, false
	}
	sigma := math.Max(typed*d.perColumn, d.floor)
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

func (d *reader) usable(sigma float64) bool {
	return sigma >= leastError*whole(d.t.Unit) && finite(sigma)
}

func (d *reader) noteErrors() {
	e := &d.o.Errors
	if e.Column != "" && e.Sigmas == 0 {
		d.note("column %q read as one standard deviation", e.Column)
	}
	if e.Percent != 0 && d.t.Unit == "%" {
		d.note("errors of %g %% are taken of each value, not of the whole", e.Percent)
	}
}
