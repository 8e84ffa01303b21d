package main

import (
	"bytes"
	"fmt"
	"io"
	"os"
	"regexp"
	"runtime"
	"strings"
	"time"

	"bankfire/paths"
)

// runLog keeps what may differ between equal runs, for run.log. Nothing of it
// belongs into another file.
type runLog struct {
	made    program
	started time.Time
	took    time.Duration // until the files were written
	jobs    int
}

// write writes run.log.
func (l *runLog) write(w io.Writer, r *paths.Result) error {
	var text bytes.Buffer
	fmt.Fprintf(&text, "%s %s, build %s, %s\n", l.made.Name, l.made.Version, l.made.Build, runtime.Version())
	fmt.Fprintf(&text, "command: %s\n", commandLine(os.Args))
	fmt.Fprintf(&text, "folder: %s\n", orReason(os.Getwd()))
	fmt.Fprintf(&text, "host: %s, %s %s, %d processors\n", orReason(os.Hostname()), runtime.GOOS, runtime.GOARCH, runtime.NumCPU())
	fmt.Fprintf(&text, "started: %s\n", l.started.Format(time.RFC3339))
	fmt.Fprintf(&text, "took: %s with %d jobs\n", l.took.Round(time.Millisecond), l.jobs)
	for _, warning := range warnings(r) {
		fmt.Fprintf(&text, "warning: %s\n", warning)
	}
	_, err := w.Write(text.Bytes())
	return err
}

func orReason(text string, err error) string {
	if err != nil {
		return err.Error()
	}
	return text
}

var wordsafe = regexp.MustCompile(`^[A-Za-z0-9_./:=,@%+-]+$`)

// commandLine writes arguments as one would type them in a POSIX shell.
func commandLine(args []string) string {
	words := make([]string, len(args))
	for i, arg := range args {
		words[i] = arg
		if !wordsafe.MatchString(arg) {
			words[i] = "'" + strings.ReplaceAll(arg, "'", `'\''`) + "'"
		}
	}
	return strings.Join(words, " ")
}

// warnings returns every note of the result once.
func warnings(r *paths.Result) []string {
	var all numbered
	all.marks(r.Study.Notes)
	for i := range r.Paths {
		p := &r.Paths[i]
		all.marks(p.Notes)
		for j := range p.Profiles {
			all.marks(p.Profiles[j].Notes)
		}
	}
	return all
}
