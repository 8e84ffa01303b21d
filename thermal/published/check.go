package published

import (
	"math"
	"slices"
	"strings"
	"sync"
	"testing"
)

// Check is one published check in the course of being judged. It may be used by parallel subtests.
type Check struct {
	ID   string
	Rows []Row // in the order of the file

	tb     testing.TB // the check's own subtest
	mu     sync.Mutex
	judged map[string]bool // by row id
}

// Run runs f as the subtest id, and fails it unless f judges or skips every row of the check. Subtests of f may run in
// parallel.
func Run(t *testing.T, id string, f func(t *testing.T, c *Check)) {
	t.Helper()
	t.Run(id, func(t *testing.T) {
		c := newCheck(t, id)
		t.Cleanup(c.finish)
		f(t, c)
	})
}

// newCheck loads the rows of the check id for the test tb.
func newCheck(tb testing.TB, id string) *Check {
	tb.Helper()
	rows := Load(tb)[id]
	if len(rows) == 0 {
		tb.Fatalf("testdata/checks.csv has no check %s", id)
	}
	tb.Logf("%s %s; source: %s", id, rows[0].Name, rows[0].Source)
	return &Check{ID: id, Rows: rows, tb: tb, judged: make(map[string]bool)}
}

// finish fails the test if a row was neither judged nor skipped.
func (c *Check) finish() {
	var missing []string
	for _, row := range c.Rows {
		if !c.judged[row.Row] {
			missing = append(missing, row.Row)
		}
	}
	if len(missing) > 0 {
		c.tb.Errorf("rows not judged: %s", strings.Join(missing, ", "))
	}
}

// Row is the row with the id, such as "A01.03". It fails the test if there is none.
func (c *Check) Row(row string) Row {
	c.tb.Helper()
	i := slices.IndexFunc(c.Rows, func(r Row) bool { return r.Row == row })
	if i < 0 {
		c.tb.Errorf("check %s has no row %s", c.ID, row)
		return Row{Check: c.ID, Row: row, Expected: math.NaN()}
	}
	return c.Rows[i]
}

// Exact is the row's tolerance for code that evaluates a formula. It fails the test if the row states none.
func (c *Check) Exact(row string) Tol {
	c.tb.Helper()
	return c.tolerance(row, c.Row(row).TolFormula)
}

// Solver is the row's tolerance for a numerical solution. It fails the test if the row states none, or one that is not a
// bound on the value itself ("observed order 2.0 +- 0.15").
func (c *Check) Solver(row string) Tol {
	c.tb.Helper()
	return c.tolerance(row, c.Row(row).TolSolver)
}

func (c *Check) tolerance(row, text string) Tol {
	c.tb.Helper()
	tol, err := parseTol(text, c.Row(row).Quantity)
	if err != nil {
		c.tb.Errorf("row %s: %v", row, err)
	}
	return tol
}

// Program judges a value that the program's own code computed.
func (c *Check) Program(tb testing.TB, row string, got float64, tol Tol) {
	tb.Helper()
	c.judge(tb, row, "program", got, tol)
}

// Formula judges a value computed by a formula that lives in test code only.
func (c *Check) Formula(tb testing.TB, row string, got float64, tol Tol) {
	tb.Helper()
	c.judge(tb, row, "formula", got, tol)
}

// Skip leaves a row out and says why.
func (c *Check) Skip(tb testing.TB, row, why string) {
	tb.Helper()
	c.mark(c.Row(row).Row)
	if why == "" {
		tb.Errorf("row %s is skipped without a reason", row)
	}
	tb.Logf("row %s skipped: %s", row, why)
}

func (c *Check) judge(tb testing.TB, row, by string, got float64, tol Tol) {
	tb.Helper()
	r := c.Row(row)
	c.mark(row)
	if !tol.holds(got, r.Expected) {
		tb.Errorf("row %s %s FAILED: %s: got %.15g, want %s %s, difference %.3g, allowed %v",
			row, by, r.Quantity, got, r.Text, r.Unit, got-r.Expected, tol)
		return
	}
	tb.Logf("row %s %s: %s = %.15g, want %s, within %v", row, by, r.Quantity, got, r.Text, tol)
}

func (c *Check) mark(row string) {
	c.mu.Lock()
	defer c.mu.Unlock()
	c.judged[row] = true
}
