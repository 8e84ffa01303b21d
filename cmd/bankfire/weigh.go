package main

import (
	"context"
	"encoding/json"
	"fmt"
	"io"
	"runtime"
	"strconv"
	"strings"
	"time"

	"github.com/spf13/pflag"

	"bankfire/cmd/bankfire/internal/results"
	"bankfire/paths"
	"bankfire/paths/study"
	"bankfire/thermal"
)

// weighCommand is `bankfire weigh`.
func weighCommand() *command { return newWeighCommand(results.OnDisk{}, weighStudy) }

// newWeighCommand is `bankfire weigh` with its results on that disk and with
// what computes them.
func newWeighCommand(disk results.Disk, compute func(context.Context, string, int) (*paths.Result, [][]paths.Row, error)) *command {
	w := &weigh{disk: disk, compute: compute}
	return &command{
		name:  "weigh",
		args:  "STUDY",
		short: "give every path and family of a study its verdict",
		long: "Runs every path of the study against the measured traverse and gives each its verdict:\n" +
			"reproduces, too sharp (the path diffuses too little), too smooth (too much) or wrong shape\n" +
			"(no amount of diffusion would do), with the factor by which D would have to be multiplied\n" +
			"for the path to agree best. Of a family it draws the members, gives each its verdict and says what\n" +
			"those that reproduce have in common. bankfire help verdicts explains these and the columns of\n" +
			"the report.",
		examples: []example{
			{"bankfire weigh study.toml", "print the verdicts"},
			{"bankfire weigh study.toml --out results", "and write tables and a figure to a new folder"},
			{"bankfire weigh study.toml --json", "print the summary for another program"},
		},
		least: 1, most: 1,
		flags: w.define,
		run:   w.run,
	}
}

// weigh is one run of the command.
type weigh struct {
	disk                   results.Disk
	compute                func(ctx context.Context, file string, jobs int) (*paths.Result, [][]paths.Row, error)
	flags                  *pflag.FlagSet
	out                    string
	replace, asJSON, quiet bool
	jobs                   int
}

func (o *weigh) define(set *pflag.FlagSet) {
	o.flags = set
	set.StringVar(&o.out, "out", "", "write tables and figures to the folder `DIR`")
	set.BoolVar(&o.replace, "replace", false, "replace results of an earlier run in the folder")
	set.BoolVar(&o.asJSON, "json", false, "print the summary as JSON instead of text")
	set.BoolVar(&o.quiet, "quiet", false, "print nothing but errors")
	set.IntVar(&o.jobs, "jobs", runtime.NumCPU(), "run `N` paths at the same time; the results do not depend on it")
}

func (o *weigh) run(ctx context.Context, s streams, operands []string) error {
	log := &runLog{made: thisProgram(), started: time.Now(), jobs: o.jobs}
	if err := o.check(); err != nil {
		return err
	}
	folder, err := o.open()
	if err != nil {
		return err
	}
	result, rows, err := o.compute(ctx, operands[0], o.jobs)
	if err != nil {
		return err
	}
	log.took = time.Since(log.started)
	summary := summarise(result, log.made)
	if folder != nil {
		files := weighingFiles(result, rows, summary, log)
		if err := folder.Write(files); err != nil {
			return err
		}
	}
	return o.print(s.out, result, summary)
}

// check refuses flags that cannot be meant.
func (o *weigh) check() error {
	switch {
	case o.jobs < 1:
		return &thermal.InputError{Field: "--jobs", Value: strconv.Itoa(o.jobs), Problem: "below 1", Remedy: "want 1 or more"}
	case o.replace && !o.flags.Changed("out"):
		return &thermal.InputError{Field: "--replace", Problem: "there is no folder whose results to replace", Remedy: "add --out DIR"}
	}
	return nil
}

// open returns the folder that the results go to, nil if nobody asked for files.
func (o *weigh) open() (*results.Folder, error) {
	if !o.flags.Changed("out") {
		return nil, nil
	}
	return results.Open(o.disk, o.out, o.replace)
}

// weighStudy weighs the study in the file, jobs paths at a time, and returns the rows of
// the members of each family.
func weighStudy(ctx context.Context, file string, jobs int) (*paths.Result, [][]paths.Row, error) {
	s, err := study.Read(file)
	if err != nil {
		return nil, nil, err
	}
	screening, err := paths.NewScreening(ctx, s, paths.ScreenOptions{Keep: paths.Keep{All: true}, Jobs: jobs})
	if err != nil {
		return nil, nil, err
	}
	tallies, rows := make([]paths.Tally, len(s.Families)), make([][]paths.Row, len(s.Families))
	err = screening.Screen(ctx, 0, screening.Blocks(), func(b *paths.Block) error {
		tallies[b.Family].Add(&b.Tally)
		rows[b.Family] = append(rows[b.Family], b.Rows...)
		return nil
	})
	if err != nil {
		return nil, nil, err
	}
	r, err := screening.Finish(ctx, tallies)
	return r, rows, err
}

// print prints the result as the flags ask.
func (o *weigh) print(w io.Writer, r *paths.Result, summary *weighing) error {
	switch {
	case o.asJSON:
		return writeJSON(w, summary)
	case o.quiet:
		return nil
	}
	text := weighingText(r)
	if len(summary.Files) > 0 {
		fmt.Fprintf(&text, "\nwritten to %s: %s\n", o.out, strings.Join(summary.Files, " "))
	}
	_, err := w.Write(text.Bytes())
	return err
}

// writeJSON writes v with an indent, ending in a line break.
func writeJSON(w io.Writer, v any) error {
	e := json.NewEncoder(w)
	e.SetEscapeHTML(false)
	e.SetIndent("", "  ")
	return e.Encode(v)
}
