package main

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"math"

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
		run: func(_ context.Context, s streams, operands []string) error {
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
			course, err := paths.Follow(st, path, times)
			if err != nil {
				return err
			}
			if asJSON {
				return writeJSON(s.out, courseSummary(course))
			}
			text := courseText(course)
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
	Duration float64 `json:"duration_s"`
	Share    float64 `json:"share_of_g"`
}

type snapshot struct {
	Time  float64   `json:"time_s"`
	Value []float64 `json:"value"`
}

func courseSummary(c *paths.Course) followed {
	out := followed{Schema: summarySchema, Path: c.Path.Name, Elements: []followedElement{}}
	for i := range c.Elements {
		e := &c.Elements[i]
		f := followedElement{
			Crystal: e.Crystal.Name, Element: e.Element.Name, Unit: e.Element.Unit,
			PositionM: e.Centres, Start: e.Start, Final: e.Final, NumErr: e.NumErr,
			G: math.Exp(e.LnG), Method: "steps",
			Legs: []legDone{}, Snapshots: []snapshot{}, FreeValues: freeValues(e.Free), Notes: filled(e.Notes),
		}
		for _, l := range e.Legs {
			f.Legs = append(f.Legs, legDone{l.Name, l.Duration, l.Share})
		}
		for _, s := range e.Snapshots {
			f.Snapshots = append(f.Snapshots, snapshot{s.Time, s.Value})
		}
		out.Elements = append(out.Elements, f)
	}
	return out
}

// courseText is the report for people.
func courseText(c *paths.Course) bytes.Buffer {
	var text bytes.Buffer
	fmt.Fprintf(&text, "path %s, %s from start to end\n", quoted(c.Path.Name), thermal.DurationText(c.Path.History.Life()))
	for i := range c.Elements {
		writeElement(&text, &c.Elements[i])
	}
	fmt.Fprintf(&text, "\nA year is 365.25 days. %s\n", care)
	return text
}

func writeElement(text *bytes.Buffer, e *paths.ElementCourse) {
	fmt.Fprintf(text, "\n%s in %s: G = %s m2, sqrt(2 G) = %s um\n", e.Element.Name, e.Crystal.Name,
		number(math.Exp(e.LnG)), number(math.Sqrt2*math.Exp(e.LnG/2)*1e6))
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
	legs := newTable()
	legs.row("leg", "duration", "part of G")
	for _, l := range e.Legs {
		legs.row(l.Name, thermal.DurationText(l.Duration), percent(l.Share))
	}
	legs.writeTo(text)
	writeProfiles(text, e)
}

// shownCells is about how many cells of a profile the report prints.
const shownCells = 25

// writeProfiles prints start, snapshots and end side by side, at some of the
// cells.
func writeProfiles(text *bytes.Buffer, e *paths.ElementCourse) {
	fmt.Fprintf(text, "\nprofiles in %s, numerical error up to %s; --json has every cell\n\n", e.Element.Unit, number(e.NumErr))
	table := newTable()
	head := []string{"from centre [um]", "start"}
	for _, s := range e.Snapshots {
		head = append(head, "at "+thermal.DurationText(s.Time))
	}
	table.row(append(head, "end")...)
	every := max(1, len(e.Centres)/shownCells)
	for i := every / 2; i < len(e.Centres); i += every {
		row := []string{fmt.Sprintf("%.2f", e.Centres[i]*1e6), number(e.Start[i])}
		for _, s := range e.Snapshots {
			row = append(row, number(s.Value[i]))
		}
		table.row(append(row, number(e.Final[i]))...)
	}
	table.writeTo(text)
}
