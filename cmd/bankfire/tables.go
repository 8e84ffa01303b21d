package main

import (
	"encoding/csv"
	"io"
	"math"
	"slices"
	"strconv"
	"strings"

	"bankfire/paths"
	"bankfire/thermal"
)

// The tables are CSV as in RFC 4180: UTF-8, lines that end in CR LF, a header
// with the units. A cell where there is no number is empty.

// csvTable writes such a table.
type csvTable struct{ *csv.Writer }

func newCSV(w io.Writer) csvTable {
	table := csvTable{csv.NewWriter(w)}
	table.UseCRLF = true
	return table
}

func (t csvTable) row(cells ...string) { t.Write(cells) } // end returns its error

// end returns the first error of all rows.
func (t csvTable) end() error {
	t.Flush()
	return t.Error()
}

// cell prints a number of a table.
func cell(x float64) string {
	if math.IsInf(x, 0) || math.IsNaN(x) {
		return ""
	}
	return plain(x)
}

// pathsTable writes paths.csv, a row a path.
func pathsTable(w io.Writer, r *paths.Result) error {
	table := newCSV(w)
	head := pathsHead(r)
	table.row(head...)
	for i := range r.Paths {
		p := &r.Paths[i]
		o := &p.Outcome
		row := []string{p.Path.Name, o.Verdict.String(), cell(o.Tail), cell(o.Misfit), cell(o.Above), strconv.Itoa(o.Points),
			strconv.Itoa(o.Degrees), cell(o.Shift)}
		for _, x := range [][2]float64{o.Shift68, o.Shift95} {
			row = append(row, openEnd(x[0]), openEnd(x[1]))
		}
		row = append(row, cell(p.Life/thermal.Year))
		for _, above := range p.Above {
			row = append(row, cell(above/thermal.Year))
		}
		if len(r.Crystals) > 1 {
			for k := range o.Crystals {
				row = append(row, crystalCells(&o.Crystals[k])...)
			}
		}
		for k := range r.Crystals {
			if hasChoice(r, k) {
				row = append(row, takenText(p, k))
			}
		}
		for j := range p.Profiles {
			if q := &p.Profiles[j]; q.Ran() {
				row = append(row, profileCells(q, &o.Profiles[j], freeOf(r, j))...)
			} else {
				row = append(row, make([]string, len(profileHead(freeOf(r, j))))...)
			}
		}
		row = append(row, make([]string, len(head)-1-len(row))...) // a path that was not run has no profiles
		table.row(append(row, strings.Join(p.Notes, "; "))...)
	}
	return table.end()
}

func pathsHead(r *paths.Result) []string {
	head := []string{"path", "verdict", "tail", "misfit", "misfit_above_best", "points", "degrees_of_freedom", "shift_factor",
		"shift_68_low", "shift_68_high", "shift_95_low", "shift_95_high", "life [yr]"}
	for _, t := range r.Study.Thresholds {
		head = append(head, "above "+t.Name+" [yr]")
	}
	if len(r.Crystals) > 1 && profilesOf(r) != nil {
		for _, c := range r.Crystals {
			for _, name := range crystalHead {
				head = append(head, c.Name+": "+name)
			}
		}
	}
	for k, c := range r.Crystals {
		if hasChoice(r, k) {
			head = append(head, c.Name+": start taken")
		}
	}
	for i := range profilesOf(r) {
		q := &profilesOf(r)[i]
		for _, name := range profileHead(freeOf(r, i)) {
			head = append(head, q.Element.Name+" in "+q.Crystal.Name+": "+name)
		}
	}
	return append(head, "notes")
}

// crystalHead names the columns of a crystal in paths.csv, where there are several.
var crystalHead = []string{"verdict", "misfit", "degrees_of_freedom", "shift_factor", "shift_68_low", "shift_68_high"}

// crystalCells are the cells of those columns.
func crystalCells(f *paths.Finding) []string {
	return []string{f.Verdict.String(), cell(f.Misfit), strconv.Itoa(f.Degrees), cell(f.Shift), openEnd(f.Shift68[0]), openEnd(f.Shift68[1])}
}

// profileHead names the columns of a profile in paths.csv.
func profileHead(free []paths.FreeFit) []string {
	head := []string{"verdict", "misfit", "shift_factor", "stand-in temperature [C]", "sqrt(2 G) [um]"}
	for _, f := range free {
		unit := ""
		if f.Unit != "" {
			unit = " [" + f.Unit + "]"
		}
		head = append(head, f.Name+unit, f.Name+" sigma"+unit)
	}
	return append(head, "numerical error [sigma]")
}

// profileCells are the cells of those columns.
func profileCells(q *paths.ProfileResult, f *paths.Finding, free []paths.FreeFit) []string {
	standIn := ""
	if q.StandIn > 0 {
		standIn = cell(q.StandIn - thermal.ZeroCelsius)
	}
	row := []string{f.Verdict.String(), cell(f.Misfit), cell(f.Shift), standIn, cell(math.Sqrt2 * math.Exp(q.LnG/2) * 1e6)}
	for i := range free {
		if v := fitted(q.Free, free[i].Name); v != nil {
			row = append(row, cell(v.Value), cell(v.Sigma))
		} else {
			row = append(row, "", "")
		}
	}
	return append(row, cell(q.NumErr))
}

// profilesTable writes profiles.csv: for every profile and path, at the centres
// of the cells, what the instrument would show of the fitted model before and
// after diffusion.
func profilesTable(w io.Writer, r *paths.Result) error {
	table := newCSV(w)
	table.row("crystal", "element", "path", "from centre [um]", "unit", "start", "end")
	for q, path := range profiles(r) {
		for k, x := range q.Centres {
			table.row(q.Crystal.Name, q.Element.Name, path, cell(x*1e6), q.Element.Traverse.Unit, cell(q.Start[k]), cell(q.Final[k]))
		}
	}
	return table.end()
}

// pointsTable writes points.csv: for every profile and path, at the points of
// the traverse, what was measured, what the instrument would show of the fitted
// model and the difference.
func pointsTable(w io.Writer, r *paths.Result) error {
	table := newCSV(w)
	table.row("crystal", "element", "path", "line", "from centre [um]", "unit", "measured", "sigma", "modelled", "residual [sigma]")
	for q, path := range profiles(r) {
		t := q.Element.Traverse
		for k, x := range q.At {
			table.row(q.Crystal.Name, q.Element.Name, path, strconv.Itoa(t.Line[k]), cell(x*1e6), t.Unit,
				cell(t.Value[k]), cell(q.Sigma[k]), cell(q.Seen[k]), cell(q.Residuals[k]))
		}
	}
	return table.end()
}

// profiles goes through the profiles in the order of the study, and for each
// through the paths that were run.
func profiles(r *paths.Result) func(yield func(q *paths.ProfileResult, path string) bool) {
	return func(yield func(*paths.ProfileResult, string) bool) {
		for n := range profilesOf(r) {
			for i := range r.Paths {
				p := &r.Paths[i]
				if len(p.Profiles) > 0 && p.Profiles[n].Ran() && !yield(&p.Profiles[n], p.Path.Name) {
					return
				}
			}
		}
	}
}

// profilesOf returns for each element the profile of the first path that was run for
// it, one that was not run if none was; none if nothing was run.
func profilesOf(r *paths.Result) []paths.ProfileResult {
	var out []paths.ProfileResult
	for i := range r.Paths {
		if out == nil {
			out = slices.Clone(r.Paths[i].Profiles)
		}
		for n := range r.Paths[i].Profiles {
			if !out[n].Ran() {
				out[n] = r.Paths[i].Profiles[n]
			}
		}
	}
	return out
}
