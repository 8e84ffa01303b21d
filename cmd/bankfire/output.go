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
	"bankfire/thermal"
)

// output is how a command gives out the result of a weighing.
type output struct {
	disk                   results.Disk
	flags                  *pflag.FlagSet
	out                    string
	replace, asJSON, quiet bool
	jobs                   int
}

func (o *output) define(set *pflag.FlagSet) {
	o.flags = set
	set.StringVar(&o.out, "out", "", "write tables and figures to the folder `DIR`")
	set.BoolVar(&o.replace, "replace", false, "replace results of an earlier run in the folder")
	set.BoolVar(&o.asJSON, "json", false, "print the summary as JSON instead of text")
	set.BoolVar(&o.quiet, "quiet", false, "print nothing but errors")
	set.IntVar(&o.jobs, "jobs", runtime.NumCPU(), "run `N` paths at the same time; the results do not depend on it")
}

// check refuses flags that cannot be meant.
func (o *output) check() error {
	switch {
	case o.jobs < 1:
		return &thermal.InputError{Field: "--jobs", Value: strconv.Itoa(o.jobs), Problem: "below 1", Remedy: "want 1 or more"}
	case o.replace && !o.flags.Changed("out"):
		return &thermal.InputError{Field: "--replace", Problem: "there is no folder whose results to replace", Remedy: "add --out DIR"}
	}
	return nil
}

// open returns the folder that the results go to, nil if nobody asked for files.
func (o *output) open() (*results.Folder, error) {
	if !o.flags.Changed("out") {
		return nil, nil
	}
	return results.Open(o.disk, o.out, o.replace)
}

// give writes the result to the folder, unless that is nil, and prints it. Rows of
// members come from the parts.
func (o *output) give(ctx context.Context, w io.Writer, folder *results.Folder, r *paths.Result, from *parts, log *runLog) error {
	log.took = time.Since(log.started)
	summary := summarise(r, log.made)
	if folder != nil {
		if err := folder.Write(weighingFiles(ctx, r, from, summary, log)); err != nil {
			return err
		}
	}
	return o.print(w, r, summary)
}

// print prints the result as the flags ask.
func (o *output) print(w io.Writer, r *paths.Result, summary *weighing) error {
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

// say tells the user something that is no result.
func (o *output) say(w io.Writer, format string, args ...any) {
	if !o.quiet {
		fmt.Fprintf(w, "bankfire: "+format+"\n", args...)
	}
}

// writeJSON writes v with an indent, ending in a line break.
func writeJSON(w io.Writer, v any) error {
	e := json.NewEncoder(w)
	e.SetEscapeHTML(false)
	e.SetIndent("", "  ")
	return e.Encode(v)
}
