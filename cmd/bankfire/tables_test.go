package main

import (
	"bytes"
	"encoding/csv"
	"io"
	"math"
	"strconv"
	"strings"
	"testing"

	"bankfire/paths"
	"bankfire/paths/study"
)

// readTable writes a table and reads it back as maps from header to cell.
func readTable(t *testing.T, r *paths.Result, write func(io.Writer, *paths.Result) error) []map[string]string {
	t.Helper()
	var text bytes.Buffer
	if err := write(&text, r); err != nil {
		t.Fatal(err)
	}
	if lines, ends := strings.Count(text.String(), "\n"), strings.Count(text.String(), "\r\n"); lines != ends {
		t.Errorf("%d of %d lines end in CR LF", ends, lines)
	}
	cells, err := csv.NewReader(&text).ReadAll() // which wants as many cells in every row
	if err != nil {
		t.Fatal(err)
	}
	var rows []map[string]string
	for _, line := range cells[1:] {
		row := map[string]string{}
		for i, name := range cells[0] {
			if _, twice := row[name]; twice {
				t.Errorf("two columns %q", name)
			}
			row[name] = line[i]
		}
		rows = append(rows, row)
	}
	return rows
}

// sixDigits is how far a number of the tables may be off, relative.
const sixDigits = 5.1e-6

// checkCell checks a cell against a number, or "" against one that does not exist.
func checkCell(t *testing.T, row map[string]string, name string, want float64) {
	t.Helper()
	text, there := row[name]
	if math.IsNaN(want) && there && text == "" {
		return
	}
	got, err := strconv.ParseFloat(text, 64)
	if err != nil || !(math.Abs(got-want) <= sixDigits*math.Abs(want)) {
		t.Errorf("column %q is %q, want %.7g", name, text, want)
	}
}

func TestPathsTable(t *testing.T) {
	r := smallResult(t)
	p := &r.Paths[0]
	p.Path.Name = "warm, \"then\"\r\ncold"
	p.Notes = []string{"one", "two"}
	p.Life, p.Above = 36525*86400, []float64{365.25 * 86400}
	r.Study.Thresholds = []study.Threshold{{Name: "lock-up", Temp: 1000}}
	p.Outcome.Shift68, p.Outcome.Shift95 = [2]float64{0.5, 2}, [2]float64{0, math.Inf(1)}
	q := &p.Profiles[0]
	q.StandIn, q.LnG = 263.15, math.Log(8e-12)
	q.Free[0].Value, q.Free[0].Sigma = 91.5, math.Inf(1)
	row := readTable(t, r, pathsTable)[0]
	for name, want := range map[string]string{
		"path": "warm, \"then\"\ncold", "verdict": p.Outcome.Verdict.String(), "notes": "one; two", // csv reads CR LF as LF
		"Ti in HF-1: verdict": p.Outcome.Verdict.String(),
	} {
		if row[name] != want {
			t.Errorf("column %q is %q, want %q", name, row[name], want)
		}
	}
	for name, want := range map[string]float64{
		"tail": p.Outcome.Tail, "misfit": p.Outcome.Misfit, "points": 6, "degrees_of_freedom": 4,
		"shift_factor": p.Outcome.Shift, "shift_68_low": 0.5, "shift_68_high": 2, "shift_95_low": math.NaN(), "shift_95_high": math.NaN(),
		"life [yr]": 100, "above lock-up [yr]": 1,
		"Ti in HF-1: stand-in temperature [C]": -10, "Ti in HF-1: sqrt(2 G) [um]": 4,
		"Ti in HF-1: core [ppm]": 91.5, "Ti in HF-1: core sigma [ppm]": math.NaN(), "Ti in HF-1: mantle [ppm]": q.Free[1].Value,
		"Ti in HF-1: numerical error [sigma]": q.NumErr,
	} {
		checkCell(t, row, name, want)
	}
}

func TestPathsTableWithoutStandIn(t *testing.T) {
	r := smallResult(t)
	r.Paths[0].Profiles[0].StandIn = 0
	checkCell(t, readTable(t, r, pathsTable)[0], "Ti in HF-1: stand-in temperature [C]", math.NaN())
}

// TestTablesOfPathsNotRun has one path that was not run before one that was, and then alone.
func TestTablesOfPathsNotRun(t *testing.T) {
	r := smallResult(t)
	r.Paths = append(r.Paths, r.Paths[0])
	notRun(r)
	rows := readTable(t, r, pathsTable)
	for _, name := range []string{"tail", "misfit", "shift_factor", "shift_95_high", "Ti in HF-1: verdict", "Ti in HF-1: core [ppm]"} {
		if rows[0][name] != "" {
			t.Errorf("column %q of the path not run is %q", name, rows[0][name])
		}
	}
	if rows[0]["notes"] != "lives longer than 1 kyr" || rows[1]["Ti in HF-1: core [ppm]"] == "" {
		t.Errorf("got %q", rows)
	}
	if points := readTable(t, r, pointsTable); len(points) != 6 {
		t.Errorf("%d points, want those of the one path that was run", len(points))
	}
	r.Paths = r.Paths[:1]
	if rows := len(readTable(t, r, pathsTable)); rows != 1 {
		t.Errorf("%d rows, want 1", rows)
	}
	if curves := len(readTable(t, r, profilesTable)); curves != 0 {
		t.Errorf("%d cells, want none", curves)
	}
}

// TestPointsTable checks the table against the file of the traverse and itself.
func TestPointsTable(t *testing.T) {
	r := smallResult(t)
	rows := readTable(t, r, pointsTable)
	measured := strings.Split(strings.TrimSpace(smallTraverse), "\n")[1:]
	if len(rows) != len(measured) {
		t.Fatalf("%d rows, want %d", len(rows), len(measured))
	}
	misfit := 0.0
	for i, row := range rows {
		position, value, _ := strings.Cut(measured[i], ",")
		for name, want := range map[string]string{
			"crystal": "HF-1", "element": "Ti", "path": "warm", "line": strconv.Itoa(i + 2),
			"from centre [um]": position, "unit": "ppm", "measured": value, "sigma": "2",
		} {
			if row[name] != want {
				t.Errorf("row %d: %q is %q, want %q", i, name, row[name], want)
			}
		}
		residual, err := strconv.ParseFloat(row["residual [sigma]"], 64)
		if err != nil {
			t.Fatal(err)
		}
		v, _ := strconv.ParseFloat(value, 64)
		checkCell(t, row, "modelled", v-2*residual)
		misfit += residual * residual
	}
	if want := r.Paths[0].Outcome.Misfit; !(math.Abs(misfit-want) <= 1e-4*want) { // squares of six digits
		t.Errorf("residuals make a misfit of %g, want %g", misfit, want)
	}
}

// TestProfilesTable checks that the curves run from near the centre to near the rim, and
// between the plateaux.
func TestProfilesTable(t *testing.T) {
	r := smallResult(t)
	rows := readTable(t, r, profilesTable)
	q := &r.Paths[0].Profiles[0]
	if len(rows) != len(q.Centres) || len(rows) < 50 {
		t.Fatalf("%d rows, want %d", len(rows), len(q.Centres))
	}
	for i, row := range rows {
		checkCell(t, row, "from centre [um]", q.Centres[i]*1e6)
		checkCell(t, row, "start", q.Start[i])
		checkCell(t, row, "end", q.Final[i])
	}
	last := rows[len(rows)-1]
	checkCell(t, rows[0], "start", q.Free[0].Value) // of the core
	checkCell(t, last, "end", q.Free[1].Value)      // of the mantle, which holds the rim
	if x, err := strconv.ParseFloat(last["from centre [um]"], 64); err != nil || !(x > 39 && x < 40) {
		t.Errorf("the last cell is at %g um of 40, %v", x, err)
	}
}

// TestTableOnFullDisk checks that the error of a writer is not lost.
func TestTableOnFullDisk(t *testing.T) {
	r := smallResult(t)
	for name, write := range map[string]func(io.Writer, *paths.Result) error{
		"paths.csv": pathsTable, "profiles.csv": profilesTable, "points.csv": pointsTable,
		"run.log": (&runLog{}).write,
	} {
		t.Run(name, func(t *testing.T) {
			if err := write(fullDisk{io.ErrShortWrite}, r); err != io.ErrShortWrite {
				t.Errorf("got %v", err)
			}
		})
	}
}

// TestTablesOfRelativeValues has what the instrument shows in its own unit, and what was fitted in the element's.
func TestTablesOfRelativeValues(t *testing.T) {
	r := smallResult(t)
	q := &r.Paths[0].Profiles[0]
	element, line := *q.Element, *q.Element.Traverse
	line.Unit, line.Grey = "grey", true
	element.Traverse, q.Element = &line, &element
	for name, write := range map[string]func(io.Writer, *paths.Result) error{"points": pointsTable, "profiles": profilesTable} {
		if row := readTable(t, r, write)[0]; row["unit"] != "grey" {
			t.Errorf("%s in %q", name, row["unit"])
		}
	}
	if row := readTable(t, r, pathsTable)[0]; row["Ti in HF-1: core [ppm]"] == "" {
		t.Errorf("no core in ppm: %q", row)
	}
}
