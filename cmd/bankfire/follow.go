package main

import (
	"bytes"
	"cmp"
	"context"
	"errors"
	"fmt"
	"math"
	"slices"
	"strconv"
	"strings"

	"github.com/spf13/pflag"

	"bankfire/paths"
	"bankfire/paths/study"
	"bankfire/thermal"
)

// followCommand is `bankfire follow`.
func followCommand() *command {
	var name string
	var moments []string
	var asJSON bool
	return &command{
		name:  "follow",
		args:  "STUDY",
		short: "follow one path in detail",
		long: "Runs one path of the study and says what each leg did, and what the profile is at the end\n" +
			"and at moments of your choice, before the instrument's spot has seen it. It needs no traverse;\n" +
			"where there is one, values that the study leaves free are those that fit it best.",
		examples: []example{
			{"bankfire follow study.toml --path \"kept warm\"", "what each leg did, and the final profile"},
			{"bankfire follow study.toml --path \"kept warm\" --at \"400 yr after start\"", "and the profile at that moment"},
			{"bankfire follow study.toml --path \"kept warm\" --json", "the same for another program"},
		},
		least: 1, most: 1,
		flags: func(set *pflag.FlagSet) {
			set.StringVar(&name, "path", "", "the `NAME` of the path; not needed if the study has one only")
			set.StringArrayVar(&moments, "at", nil, "a `MOMENT` at which to show the profile; may be repeated")
			set.BoolVar(&asJSON, "json", false, "print JSON instead of text")
		},
		run: func(ctx context.Context, s streams, operands []string) error {
			st, err := study.Read(operands[0])
			if err != nil {
				return err
			}
			path, err := pathNamed(st, name)
			if err != nil {
				return err
			}
			times, err := resolveMoments(path.History, moments)
			if err != nil {
				return err
			}
			course, err := paths.Follow(ctx, st, path, times)
			if err != nil {
				return err
			}
			if asJSON {
				return writeJSON(s.out, courseSummary(course, moments))
			}
			text := courseText(course, moments)
			_, err = s.out.Write(text.Bytes())
			return err
		},
	}
}

// pathNamed finds the path to follow.
func pathNamed(s *study.Study, name string) (*study.Path, error) {
	if name == "" && len(s.Paths) == 1 {
		return &s.Paths[0], nil
	}
	var names []string
	for i := range s.Paths {
		if s.Paths[i].Name == name {
			return &s.Paths[i], nil
		}
		names = append(names, quoted(s.Paths[i].Name))
	}
	for i := range s.Families {
		names = append(names, quoted(s.Families[i].Name+", member 0"))
	}
	if p := s.Member(name); p != nil {
		if p.History == nil {
			return nil, &thermal.InputError{Field: "--path", Value: name, Problem: "the member is no path: " + p.Barred[0].Why, Remedy: "name another"}
		}
		return p, nil
	}
	if name == "" {
		return nil, &thermal.InputError{Field: "--path", Problem: "the study has several paths", Remedy: "name one of " + list(names)}
	}
	return nil, &thermal.InputError{Field: "--path", Value: name, Problem: "the study has no such path", Remedy: "it has " + list(names)}
}

// resolveMoments turns the moments of the command line into times, s.
func resolveMoments(h *thermal.History, moments []string) ([]float64, error) {
	var times []float64
	var errs []error
	for _, text := range moments {
		m, err := thermal.ParseMoment(text)
		var t float64
		if err == nil {
			t, err = h.Moment(m)
		}
		if in := (*thermal.InputError)(nil); errors.As(err, &in) {
			in.Field, in.Value = "--at", text
		}
		errs = append(errs, err)
		times = append(times, t)
	}
	return times, errors.Join(errs...)
}

// followed is the summary of `bankfire follow`, in SI but for values, which are
// in the element's unit.
type followed struct {
	Schema   int               `json:"schema"`
	Path     string            `json:"path"`
	Life     float64           `json:"duration_s"` // from start to end
	Eruption float64           `json:"eruption_s"` // from the start
	Elements []followedElement `json:"elements"`
}

type followedElement struct {
	Crystal    string       `json:"crystal"`
	Element    string       `json:"element"`
	Unit       string       `json:"unit"`
	PositionM  []float64    `json:"position_m"`
	Start      []float64    `json:"start"`
	Final      []float64    `json:"final"`
	NumErr     float64      `json:"numerical_error"`
	G          float64      `json:"diffusion_integral_m2"`
	Method     string       `json:"method"`
	Legs       []legDone    `json:"legs"`
	Snapshots  []snapshot   `json:"snapshots"`
	FreeValues []fittedFree `json:"free_values"`
	Notes      []string     `json:"notes"`
}

type legDone struct {
	Name     string  `json:"name"`
	Start    float64 `json:"start_s"`
	Duration float64 `json:"duration_s"`
	First    float64 `json:"start_temperature_K"`
	Highest  float64 `json:"highest_temperature_K"`
	Last     float64 `json:"end_temperature_K"`
	Share    float64 `json:"share_of_g"`
}

type snapshot struct {
	Moment string    `json:"moment"` // as typed
	Time   float64   `json:"time_s"`
	Value  []float64 `json:"value"`
}

// courseSummary returns the summary. The snapshots are those of the moments, in
// their order.
func courseSummary(c *paths.Course, moments []string) followed {
	out := followed{
		Schema: summarySchema, Path: c.Path.Name, Life: c.Path.History.Life(), Eruption: c.Path.History.Eruption(),
		Elements: []followedElement{},
	}
	for i := range c.Elements {
		e := &c.Elements[i]
		f := followedElement{
			Crystal: e.Crystal.Name, Element: e.Element.Name, Unit: e.Element.Unit,
			PositionM: e.Centres, Start: e.Start, Final: e.Final, NumErr: e.NumErr,
			G: math.Exp(e.LnG), Method: "steps",
			Legs: []legDone{}, Snapshots: []snapshot{}, FreeValues: freeValues(e.Free), Notes: filled(e.Notes),
		}
		for _, l := range e.Legs {
			f.Legs = append(f.Legs, legDone{l.Name, l.Start, l.Duration, l.First, l.Highest, l.Last, l.Share})
		}
		for k, s := range e.Snapshots {
			f.Snapshots = append(f.Snapshots, snapshot{moments[k], s.Time, s.Value})
		}
		out.Elements = append(out.Elements, f)
	}
	return out
}

// courseText is the report for people.
func courseText(c *paths.Course, moments []string) bytes.Buffer {
	var text bytes.Buffer
	fmt.Fprintf(&text, "path %s, %s from start to end\n", quoted(c.Path.Name), thermal.DurationText(c.Path.History.Life()))
	for i := range c.Elements {
		writeElement(&text, c, &c.Elements[i], moments)
	}
	fmt.Fprintf(&text, "\nA year is 365.25 days. %s\n", care)
	return text
}

func writeElement(text *bytes.Buffer, c *paths.Course, e *paths.ElementCourse, moments []string) {
	fmt.Fprintf(text, "\n%s in %s: G = %s m2, sqrt(2 G) = %s\n", e.Element.Name, e.Crystal.Name,
		number(math.Exp(e.LnG)), blurText(e.Crystal, e.Element, e.LnG))
	if e.GEnough {
		fmt.Fprintf(text, "The profile knows the path by G alone (%s): the order of heating cannot be seen in it.\n", e.WhyG)
	} else {
		fmt.Fprintf(text, "The profile knows more of the path than G: %s.\n", e.WhyG)
	}
	for _, f := range e.Free {
		fmt.Fprintf(text, "fitted %s: %s\n", f.Name, withError(f.Value, f.Sigma, f.Unit))
	}
	for _, note := range e.Notes {
		fmt.Fprintf(text, "note: %s\n", note)
	}
	fmt.Fprintln(text)
	writeLegs(text, e.Legs, c.Path.History)
	writeProfiles(text, e, moments)
}

// writeLegs prints what each leg did, and where among them the eruption is.
func writeLegs(text *bytes.Buffer, legs []paths.LegShare, h *thermal.History) {
	table := newTable()
	table.row("leg", "begins after", "duration", "start [C]", "highest [C]", "end [C]", "part of G")
	eruption := h.Eruption()
	told := eruption <= legs[0].Start && legs[0].Start > 0 // before the crystal
	for i, l := range legs {
		table.row(l.Name, thermal.DurationText(l.Start), thermal.DurationText(l.Duration),
			degrees(l.First), degrees(l.Highest), degrees(l.Last), shareText(l.Share))
		end := h.Life()
		if i+1 < len(legs) {
			end = legs[i+1].Start
		}
		if !told && eruption <= end {
			told = true
			table.row(eruptionCells(h, l.Name, eruption < end)...)
		}
	}
	table.writeTo(text)
}

// eruptionCells is the row of the eruption in the table of legs.
func eruptionCells(h *thermal.History, leg string, within bool) []string {
	what := "-- eruption --"
	if within {
		what = "-- eruption, within " + leg + " --"
	}
	temp, _ := h.At(h.Eruption())
	return []string{what, thermal.DurationText(h.Eruption()), "", "", "", degrees(temp), ""}
}

// shareText prints a share to a hundredth of a per cent.
func shareText(x float64) string {
	if x > 0 && x < 0.00005 {
		return "< 0.01 %"
	}
	return fmt.Sprintf("%.2f %%", 100*x)
}

// degrees prints a temperature, K, in whole C.
func degrees(temp float64) string { return fmt.Sprintf("%.0f", temp-thermal.ZeroCelsius) }

// shownCells is about how many cells of a profile the report prints.
const shownCells = 25

// writeProfiles prints start, snapshots in the order of time and end side by
// side, at some of the cells.
func writeProfiles(text *bytes.Buffer, e *paths.ElementCourse, moments []string) {
	fmt.Fprintf(text, "\nprofiles in %s, numerical error up to %s; --json has every cell\n\n", e.Element.Unit, number(e.NumErr))
	heads, columns := []string{"start"}, [][]float64{e.Start}
	for _, k := range inTime(e.Snapshots) {
		heads, columns = append(heads, moments[k]), append(columns, e.Snapshots[k].Value)
	}
	heads, columns = append(heads, "end"), append(columns, e.Final)
	value := alike(columns)
	table := newTable()
	table.row(append([]string{"from centre [um]"}, heads...)...)
	every := max(1, len(e.Centres)/shownCells)
	for i := every / 2; i < len(e.Centres); i += every {
		row := []string{fmt.Sprintf("%.2f", e.Centres[i]*1e6)}
		for _, column := range columns {
			row = append(row, value(column[i]))
		}
		table.row(row...)
	}
	table.writeTo(text)
}

// inTime returns the numbers of the snapshots in the order of their times.
func inTime(snapshots []paths.Snapshot) []int {
	order := make([]int, len(snapshots))
	for k := range order {
		order[k] = k
	}
	slices.SortStableFunc(order, func(a, b int) int { return cmp.Compare(snapshots[a].Time, snapshots[b].Time) })
	return order
}

// alike returns a way to print the numbers of the columns, all with the same
// decimals: three digits of the range that they span, or of the largest where
// they span none.
func alike(columns [][]float64) func(float64) string {
	lowest, highest := math.Inf(1), math.Inf(-1)
	for _, column := range columns {
		lowest, highest = math.Min(lowest, slices.Min(column)), math.Max(highest, slices.Max(column))
	}
	span, largest := highest-lowest, math.Max(highest, -lowest)
	if span <= roundOff*largest {
		span = largest
	}
	n := decimals(span, 3)
	if n > mostDecimals {
		return func(x float64) string { return strconv.FormatFloat(x, 'e', 2, 64) }
	}
	return func(x float64) string {
		text := strconv.FormatFloat(x, 'f', n, 64)
		if strings.Trim(text, "-0.") == "" { // no zero below zero
			text = strings.TrimPrefix(text, "-")
		}
		return text
	}
}

// roundOff is the part of a value below which a difference is none; numbers with
// more than mostDecimals are printed with an exponent.
const (
	roundOff     = 1e-9
	mostDecimals = 7
)
