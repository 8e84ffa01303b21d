package traverse

import (
	"bytes"
	"fmt"
	"strings"
	"testing"

	"bankfire/thermal"
)

// variants are the ways in which the fuzz target reads its files.
var variants = []func(o *Options){
	func(o *Options) {},
	func(o *Options) { o.Errors = Errors{Percent: 4, Floor: Amount{0.1, "ppm"}} },
	func(o *Options) { o.Zero, o.Size, o.Skip = Rim, 20e-6, "skip" },
	func(o *Options) { o.Position, o.Value, o.Errors = "x", "Ti", Errors{Column: "err"} },
	func(o *Options) { o.From, o.To = -2e-6, 3e-6 },
	func(o *Options) { o.Below = AsLimit },
	func(o *Options) { o.Below, o.Value, o.Errors = LeftOut, "Ti", Errors{Column: "rsd", Sigmas: 2} },
	func(o *Options) { o.Position, o.Errors = "x", Errors{Column: "sd", Counts: "n"} },
	func(o *Options) {
		o.Value, o.Errors, o.Zero, o.Size, o.Beyond = "BSE", Errors{Column: "err", Analyses: 4}, Rim, 1e-5, 1e-6
	},
}

// FuzzRead: a reader never panics, says where the trouble is, and what it
// accepts is finite, in order, and comes back unchanged when written and read.
func FuzzRead(f *testing.F) {
	for _, seed := range seeds(f) {
		for how := range variants {
			f.Add([]byte(seed), uint8(how))
		}
	}
	f.Fuzz(func(t *testing.T, data []byte, how uint8) {
		o := standard()
		variants[int(how)%len(variants)](&o)
		got, err := Read("ti.csv", bytes.NewReader(data), o)
		if err != nil {
			checkRefusal(t, got == nil, err)
			return
		}
		checkReading(t, got)
	})
}

// FuzzReadColumns: the same for plain tables.
func FuzzReadColumns(f *testing.F) {
	for _, seed := range append(seeds(f), "t [yr],T [C]\n0,700\n10,750\n", "t [kyr]\tT [K]\n0\t900\n") {
		f.Add([]byte(strings.NewReplacer("distance [um]", "t [yr]", "Ti [ppm]", "T [C]").Replace(seed)))
	}
	columns := []Column{{"t", thermal.Duration}, {"T", thermal.Temperature}}
	f.Fuzz(func(t *testing.T, data []byte) {
		got, err := ReadColumns("ti.csv", bytes.NewReader(data), columns)
		if err != nil {
			checkRefusal(t, got == nil, err)
			return
		}
		for k, column := range got.Columns {
			if len(column) != len(got.Line) || len(column) == 0 {
				t.Fatalf("column %d: %d values in %d rows", k, len(column), len(got.Line))
			}
			for i, v := range column {
				if !finite(v) || columns[k].Dim == thermal.Temperature && !(v > 0) {
					t.Fatalf("column %d, row %d: %g", k, i, v)
				}
			}
		}
	})
}

// FuzzParse: the texts of a spot and of errors.
func FuzzParse(f *testing.F) {
	for _, seed := range []string{"0.8 um fwhm", "15 um top-hat", "point", "4 %", "1.5 ppm", "0.01 wt%", "-1e400 um sigma", "1e-310 m sigma", "%", "0.5 mol%", "4. %", "2 grey"} {
		f.Add(seed)
	}
	f.Fuzz(func(t *testing.T, text string) {
		if s, err := ParseSpot(text); err != nil {
			checkProblem(t, err)
		} else if s.check(); s.Kind == Point && s.Width != 0 {
			t.Fatalf("%q: %v", text, s)
		}
		if e, err := ParseErrors(text); err != nil {
			checkProblem(t, err)
		} else if !(e.Percent > 0 || e.Constant.Value > 0) || !finite(e.Percent+e.Constant.Value) {
			t.Fatalf("%q: %v", text, e)
		}
	})
}

// seeds are the files of the other tests, without the two that are large.
func seeds(f *testing.F) []string {
	const largest = 4096
	var all []string
	for _, r := range readings {
		all = append(all, r.text)
	}
	for _, r := range refusals {
		if len(r.text) <= largest {
			all = append(all, r.text)
		}
	}
	if len(all) < len(readings)+2 {
		f.Fatal("no seeds")
	}
	return all
}

func checkRefusal(t *testing.T, isNil bool, err error) {
	t.Helper()
	all := []error{err}
	if joined, ok := err.(interface{ Unwrap() []error }); ok {
		all = joined.Unwrap()
	}
	if !isNil || len(all) > maxProblems {
		t.Fatalf("a result beside %d errors", len(all))
	}
	for _, err := range all {
		if e := checkProblem(t, err); e.File != "ti.csv" || e.Line < 0 || e.Line == 0 && e.Col != 0 {
			t.Fatalf("place %q %d %d", e.File, e.Line, e.Col)
		}
	}
}

func checkProblem(t *testing.T, err error) *thermal.InputError {
	t.Helper()
	e, ok := err.(*thermal.InputError)
	if !ok || e == nil || e.Problem == "" || e.Remedy == "" {
		t.Fatalf("%#v is no complete input error", err)
	}
	return e
}

func checkReading(t *testing.T, got *Traverse) {
	t.Helper()
	n := len(got.Position)
	if n == 0 || len(got.Value) != n || len(got.Sigma) != n || len(got.Line) != n || got.Limit != nil && len(got.Limit) != n {
		t.Fatalf("lengths of %v", got)
	}
	for i, x := range got.Position {
		if got.Limit != nil && got.Limit[i] && !(got.Value[i] > 0) {
			t.Fatalf("limit %d of %v", i, got)
		}
		if !finite(x) || !finite(got.Value[i]) || !finite(got.Sigma[i]) || !(got.Sigma[i] > 0) {
			t.Fatalf("point %d of %v", i, got)
		}
		if i > 0 && !(got.Line[i] > got.Line[i-1]) {
			t.Fatalf("line %d behind line %d", got.Line[i], got.Line[i-1])
		}
	}
	checkRoundTrip(t, got)
}

// checkRoundTrip writes a traverse as a file and reads it back.
func checkRoundTrip(t *testing.T, got *Traverse) {
	t.Helper()
	var text strings.Builder
	fmt.Fprintf(&text, "x [m],v [%s],s [%[1]s]\n", got.Unit)
	for i, x := range got.Position {
		fmt.Fprintf(&text, "%g,%g,%g\n", x, got.Value[i], got.Sigma[i])
	}
	again, err := Read("again", strings.NewReader(text.String()), Options{Position: "x", Value: "v", Errors: Errors{Column: "s", Sigmas: 1}})
	if err != nil {
		t.Fatalf("%v in\n%s", err, text.String())
	}
	for i := range got.Position {
		if again.Position[i] != got.Position[i] || again.Value[i] != got.Value[i] || again.Sigma[i] != got.Sigma[i] {
			t.Fatalf("point %d comes back as %g, %g, %g from\n%s", i, again.Position[i], again.Value[i], again.Sigma[i], text.String())
		}
	}
}
