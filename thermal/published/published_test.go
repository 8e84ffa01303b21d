package published

import (
	"fmt"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"
)

// recorder is a test that keeps what it is told instead of failing.
type recorder struct {
	testing.TB
	errors, logs []string
}

func (r *recorder) Helper() {}
func (r *recorder) Errorf(format string, args ...any) {
	r.errors = append(r.errors, fmt.Sprintf(format, args...))
}
func (r *recorder) Logf(format string, args ...any) {
	r.logs = append(r.logs, fmt.Sprintf(format, args...))
}

// TestJudge feeds the judge with right, wrong and meaningless values.
func TestJudge(t *testing.T) {
	inf, nan := math.Inf(1), math.NaN()
	tests := []struct {
		name string
		got  float64
		tol  Tol
		pass bool
	}{
		{"equal", 0.25, Tol{}, true},
		{"within rel", 0.25 + 0.24e-12, Tol{Rel: 1e-12}, true},
		{"outside rel", 0.25 + 0.26e-12, Tol{Rel: 1e-12}, false},
		{"within abs", 0.2501, Tol{Abs: 2e-4}, true},
		{"outside abs", 0.2503, Tol{Abs: 2e-4}, false},
		{"other sign", -0.25, Tol{Rel: 1e-12}, false},
		{"NaN", nan, Tol{Abs: 1}, false},
		{"infinite", inf, Tol{Abs: 1}, false},
		{"NaN tolerance", 0.25, Tol{Abs: nan}, false},
		{"infinite tolerance", 0.3, Tol{Abs: inf}, false},
		{"infinite both", inf, Tol{Abs: inf}, false},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			r := &recorder{TB: t}
			c := newCheck(r, "A02")
			c.Program(r, "A02.05", test.got, test.tol) // i2erfc(0) = 0.25
			if pass := len(r.errors) == 0; pass != test.pass {
				t.Errorf("pass %v, want %v: %q", pass, test.pass, r.errors)
			}
		})
	}
}

func TestLogsAreCountable(t *testing.T) {
	r := &recorder{TB: t}
	c := newCheck(r, "A02")
	c.Program(r, "A02.05", 0.25, Tol{Rel: 1e-12})
	c.Formula(r, "A02.05", 0.25, Tol{Abs: 1e-12})
	c.Skip(r, "A02.06", "why")
	want := []string{
		"A02 repeated integrals of erfc; scaled erfc; source: Crank 1975, Table 2.1; Carslaw & Jaeger 1959, App. II; A&S 7.2",
		"row A02.05 program: i2erfc(0) = 0.25, want 0.25, within rel 1e-12",
		"row A02.05 formula: i2erfc(0) = 0.25, want 0.25, within abs 1e-12",
		"row A02.06 skipped: why",
	}
	if got := strings.Join(r.logs, "\n"); got != strings.Join(want, "\n") {
		t.Errorf("got\n%s\nwant\n%s", got, strings.Join(want, "\n"))
	}
}

// TestComplaints: what a test of ours gets wrong fails it.
func TestComplaints(t *testing.T) {
	tests := []struct {
		name, want string
		do         func(r *recorder, c *Check)
	}{
		{"rows left over", "rows not judged: A02.02, A02.03", func(r *recorder, c *Check) {
			c.Program(r, "A02.01", 1/math.SqrtPi, Tol{Rel: 1e-12})
			for _, row := range c.Rows[3:] {
				c.Skip(r, row.Row, "not part of this")
			}
			c.finish()
		}},
		{"no such row", "check A02 has no row A02.99", func(r *recorder, c *Check) { c.Program(r, "A02.99", 1, Tol{Abs: 9}) }},
		{"no solver tolerance", `row A02.01: "" is no plain tolerance`, func(r *recorder, c *Check) { c.Solver("A02.01") }},
		{"skip without a reason", "without a reason", func(r *recorder, c *Check) { c.Skip(r, "A02.01", "") }},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			r := &recorder{TB: t}
			test.do(r, newCheck(r, "A02"))
			if got := strings.Join(r.errors, "\n"); !strings.Contains(got, test.want) {
				t.Errorf("got %q, want %q in it", got, test.want)
			}
		})
	}
}

func TestParseTol(t *testing.T) {
	tests := []struct {
		text, quantity string
		want           Tol
		refused        bool
	}{
		{text: "rel 1e-12", want: Tol{Rel: 1e-12}},
		{text: "abs 5e-5", want: Tol{Abs: 5e-5}},
		{text: "abs 1e-6 K", want: Tol{Abs: 1e-6}},
		{text: "rel 1e-6 from start 2", want: Tol{Rel: 1e-6}},
		{text: "exact", want: Tol{Rel: fifteenDigits}},
		{text: "abs 5e-5 (mean: rel 1e-12)", quantity: "C/C0 at x=0", want: Tol{Abs: 5e-5}},
		{text: "abs 5e-5 (mean: rel 1e-12)", quantity: "mean C/C0 at any time", want: Tol{Rel: 1e-12}},
		{text: "", refused: true},
		{text: "observed order 2.0 +- 0.15", refused: true},
		{text: "abs NaN", refused: true},
		{text: "abs -1", refused: true},
		{text: "rel", refused: true},
	}
	for _, test := range tests {
		t.Run(test.text+" of "+test.quantity, func(t *testing.T) {
			got, err := parseTol(test.text, test.quantity)
			if got != test.want || (err != nil) != test.refused {
				t.Errorf("got %v and error %v, want %v, refused %v", got, err, test.want, test.refused)
			}
		})
	}
}

// TestLoad counts what the table says about itself: 91 checks with 934 values.
func TestLoad(t *testing.T) {
	checks := Load(t)
	rows := 0
	for _, check := range checks {
		rows += len(check)
	}
	if len(checks) != 91 || rows != 934 {
		t.Errorf("%d checks with %d rows, want 91 with 934", len(checks), rows)
	}
}

func TestReadChecksRefuses(t *testing.T) {
	const header = "check,row,source,expected\n"
	tests := []struct{ name, text, want string }{
		{"no rows", header, "no rows"},
		{"NaN", header + "A01,A01.01,s,NaN\n", "not a finite number"},
		{"no number", header + "A01,A01.01,s,\n", "not a finite number"},
		{"no source", header + "A01,A01.01,,1\n", "source is empty"},
		{"ragged", header + "A01,A01.01\n", "wrong number of fields"},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			name := filepath.Join(t.TempDir(), "checks.csv")
			if err := os.WriteFile(name, []byte(test.text), 0o600); err != nil {
				t.Fatal(err)
			}
			if _, err := readChecks(name); err == nil || !strings.Contains(err.Error(), test.want) {
				t.Errorf("got %v, want an error with %q", err, test.want)
			}
		})
	}
}
