package published

import (
	"encoding/csv"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"strconv"
	"testing"
)

// Row is one published value.
type Row struct {
	Check, Row string  // "A01", "A01.01"
	Name       string  // of the check
	Source     string  // author, year, table or equation
	Inputs     string  // of the check
	Quantity   string  // what is given, with its own inputs
	Unit       string  // of Expected
	Expected   float64 // as recomputed by the authors of the table
	Text       string  // Expected as printed there
	TolFormula string  // for code that evaluates a formula, as printed
	TolSolver  string  // for a numerical solution, as printed
}

// Load reads testdata/checks.csv of the module in which the test runs: rows by check id, in the order of the file.
func Load(tb testing.TB) map[string][]Row {
	tb.Helper()
	root, err := moduleRoot()
	if err != nil {
		tb.Fatal(err)
	}
	checks, err := readChecks(filepath.Join(root, "testdata", "checks.csv"))
	if err != nil {
		tb.Fatal(err)
	}
	return checks
}

// moduleRoot is the nearest folder at or above the working folder that holds a go.mod.
func moduleRoot() (string, error) {
	dir, err := os.Getwd()
	if err != nil {
		return "", err
	}
	for {
		if _, err := os.Stat(filepath.Join(dir, "go.mod")); err == nil {
			return dir, nil
		}
		if dir == filepath.Dir(dir) {
			return "", fmt.Errorf("published: no go.mod at or above the working folder")
		}
		dir = filepath.Dir(dir)
	}
}

// readChecks reads the rows of a file with a header.
func readChecks(name string) (map[string][]Row, error) {
	file, err := os.Open(name)
	if err != nil {
		return nil, err
	}
	defer file.Close()
	records, err := csv.NewReader(file).ReadAll()
	if err != nil {
		return nil, fmt.Errorf("%s: %w", name, err)
	}
	if len(records) < 2 {
		return nil, fmt.Errorf("%s: no rows", name)
	}
	checks := make(map[string][]Row)
	for i, record := range records[1:] {
		row, err := newRow(records[0], record)
		if err != nil {
			return nil, fmt.Errorf("%s: row %d: %w", name, i+1, err)
		}
		checks[row.Check] = append(checks[row.Check], row)
	}
	return checks, nil
}

// newRow makes a Row of one record by the header's names.
func newRow(header, record []string) (Row, error) {
	cell := make(map[string]string, len(header))
	for i, name := range header {
		cell[name] = record[i]
	}
	row := Row{
		Check: cell["check"], Row: cell["row"], Name: cell["name"], Source: cell["source"], Inputs: cell["inputs"],
		Quantity: cell["quantity"], Unit: cell["unit"], Text: cell["expected"],
		TolFormula: cell["tol_formula"], TolSolver: cell["tol_solver"],
	}
	var err error
	row.Expected, err = strconv.ParseFloat(row.Text, 64)
	if err != nil || math.IsInf(row.Expected, 0) || math.IsNaN(row.Expected) {
		return row, fmt.Errorf("expected value %q is not a finite number", row.Text)
	}
	if row.Check == "" || row.Row == "" || row.Source == "" {
		return row, fmt.Errorf("check, row or source is empty")
	}
	return row, nil
}
