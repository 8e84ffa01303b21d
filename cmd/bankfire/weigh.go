package main

import (
	"bytes"
	"context"
	"encoding/json"
	"io"
	"runtime"
	"strconv"

	"github.com/spf13/pflag"

	"bankfire/paths"
	"bankfire/paths/study"
	"bankfire/thermal"
)

// weighCommand is `bankfire weigh`.
func weighCommand() *command {
	var out string
	var replace, asJSON, quiet bool
	var jobs int
	return &command{
		name:  "weigh",
		args:  "STUDY",
		short: "give every path of a study its verdict",
		long: "Runs every path of the study against the measured traverse and gives each its verdict:\n" +
			"reproduces, too sharp (the path diffuses too little), too smooth (too much) or wrong shape\n" +
			"(no amount of diffusion would do), with the factor by which D would have to be multiplied\n" +
			"for the path to agree best.",
		examples: []example{
			{"bankfire weigh study.toml", "print the verdicts"},
			{"bankfire weigh study.toml --out results", "and write tables and a figure to a new folder"},
			{"bankfire weigh study.toml --json", "print the summary for another program"},
		},
		least: 1, most: 1,
		flags: func(set *pflag.FlagSet) {
			set.StringVar(&out, "out", "", "write tables and figures to the folder `DIR`")
			set.BoolVar(&replace, "replace", false, "replace results that are already in the folder")
			set.BoolVar(&asJSON, "json", false, "print the summary as JSON instead of text")
			set.BoolVar(&quiet, "quiet", false, "print nothing but errors")
			set.IntVar(&jobs, "jobs", runtime.NumCPU(), "run `N` paths at the same time; the results do not depend on it")
		},
		run: func(ctx context.Context, s streams, operands []string) error {
			if err := checkJobs(jobs); err != nil {
				return err
			}
			folder, err := openFolder(out, replace)
			if err != nil {
				return err
			}
			result, err := weighStudy(ctx, operands[0], jobs)
			if err != nil {
				return err
			}
			if err := folder.writeWeighing(result); err != nil {
				return err
			}
			switch {
			case asJSON:
				return writeJSON(s.out, weighingSummary(result))
			case quiet:
				return nil
			}
			text := weighingText(result)
			folder.describe(&text)
			_, err = s.out.Write(text.Bytes())
			return err
		},
	}
}

// checkJobs refuses a number of jobs that cannot be meant.
func checkJobs(jobs int) error {
	if jobs < 1 {
		return &thermal.InputError{Field: "--jobs", Value: strconv.Itoa(jobs), Problem: "below 1", Remedy: "want 1 or more"}
	}
	return nil
}

func weighStudy(ctx context.Context, file string, jobs int) (*paths.Result, error) {
	s, err := study.Read(file)
	if err != nil {
		return nil, err
	}
	return paths.Weigh(ctx, s, jobs)
}

// writeWeighing writes the files of a weighing; nothing if there is no folder.
func (f *folder) writeWeighing(r *paths.Result) error {
	if f == nil {
		return nil
	}
	var summary bytes.Buffer
	if err := writeJSON(&summary, weighingSummary(r)); err != nil {
		return err
	}
	table, err := pathsTable(r)
	if err != nil {
		return err
	}
	files := []file{{"summary.json", summary.Bytes()}, {"paths.csv", table}}
	for i, name := range figureNames(r) {
		picture, err := weighingFigure(r, i)
		if err != nil {
			return err
		}
		files = append(files, file{name, picture})
	}
	return f.write(files)
}

// writeJSON writes v with an indent, ending in a line break.
func writeJSON(w io.Writer, v any) error {
	e := json.NewEncoder(w)
	e.SetEscapeHTML(false)
	e.SetIndent("", "  ")
	return e.Encode(v)
}
