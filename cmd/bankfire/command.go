package main

import (
	"bufio"
	"context"
	"errors"
	"fmt"
	"io"
	"os"
	"os/signal"
	"runtime/debug"
	"strings"
	"syscall"

	"github.com/spf13/pflag"

	"bankfire/thermal"
)

// The statuses of the program.
const (
	done   = 0
	failed = 1
	wrong  = 2 // the command line or the study
)

// command is one thing that the program can do. A constructor makes it afresh
// for each run of the program, so that flags and run may share the variables
// that the flags set.
type command struct {
	name     string
	args     string // its operands as the help shows them: "STUDY", "[KEY...]"
	short    string // what it does, in a few words, for the list of commands
	long     string // what it does, in lines of at most 100 characters
	examples []example

	least, most int // number of operands; most < 0 means any

	// flags defines its flags, nil if there are none. The part of a flag's usage
	// in backquotes names its value: "write results to `DIR`".
	flags func(set *pflag.FlagSet)

	// words are the values that completion offers, by the name of an operand or
	// of a flag's value. It needs none for STUDY (study files), DIR (directories)
	// and TOPIC (what help explains).
	words map[string][]string

	// run does the work. An error that is or wraps an *thermal.InputError ends
	// the program with status wrong, any other with failed. The context ends at
	// an interrupt from the keyboard.
	run func(ctx context.Context, s streams, operands []string) error
}

// example is a command line with what it does.
type example struct{ line, does string }

// streams are the standard streams of the program: results go to out and all
// else to err.
type streams struct {
	in       io.Reader
	out, err io.Writer
}

// hinted is an error with a likely next step, which is printed below it.
type hinted struct {
	error
	hint string
}

func (h hinted) Unwrap() error { return h.error }

// execute finds the command that the arguments name, runs it and returns the
// status to exit with, after it has said on s.err what went wrong.
func execute(all []*command, args []string, s streams) int {
	signal.Ignore(syscall.SIGPIPE) // else a reader that stops early, such as head, kills the program
	buffered := bufio.NewWriter(s.out)
	err := dispatch(all, args, streams{s.in, buffered, s.err})
	if flushErr := buffered.Flush(); err == nil {
		err = flushErr
	}
	return report(s.err, err)
}

// report prints the error, one line a problem, and returns the status. That
// nobody reads the results to their end is no error.
func report(w io.Writer, err error) int {
	if err == nil || errors.Is(err, syscall.EPIPE) {
		return done
	}
	for _, line := range strings.Split(err.Error(), "\n") {
		fmt.Fprintf(w, "bankfire: %s\n", line)
	}
	if h := (hinted{}); errors.As(err, &h) {
		fmt.Fprintf(w, "bankfire: hint: %s\n", h.hint)
	}
	if in := (*thermal.InputError)(nil); errors.As(err, &in) {
		return wrong
	}
	return failed
}

// dispatch reads the flags before the command, then runs the command.
func dispatch(all []*command, args []string, s streams) error {
	set := newFlagSet("bankfire")
	set.SetInterspersed(false)
	versionAsked := set.Bool("version", false, "print the version of the program")
	helpAsked, err := parse(set, args)
	switch {
	case err != nil:
		return hinted{err, "bankfire help lists the commands"}
	case helpAsked:
		return writeOverview(s.out, all)
	case *versionAsked:
		_, err := fmt.Fprintln(s.out, "bankfire", version())
		return err
	case set.NArg() == 0:
		err := &thermal.InputError{Problem: "no command given", Remedy: "want " + orList(names(all))}
		return hinted{err, "bankfire help says what each of them does"}
	}
	c, err := find(all, set.Arg(0))
	if err != nil {
		return err
	}
	return c.execute(set.Args()[1:], s)
}

// execute reads the flags and operands of the command, then runs it.
func (c *command) execute(args []string, s streams) error {
	set := c.flagSet()
	helpAsked, err := parse(set, args)
	if err == nil && helpAsked {
		return c.writeHelp(s.out)
	}
	if err == nil {
		err = c.checkOperands(set.Args())
	}
	if err != nil {
		return hinted{err, "bankfire help " + c.name + " shows its flags and examples"}
	}
	ctx, stop := signal.NotifyContext(context.Background(), os.Interrupt)
	defer stop()
	context.AfterFunc(ctx, stop) // a second interrupt ends the program at once
	return c.run(ctx, s, set.Args())
}

// find returns the command of that name.
func find(all []*command, name string) (*command, error) {
	for _, c := range all {
		if c.name == name {
			return c, nil
		}
	}
	return nil, notFound("command", name, names(all))
}

// notFound is the error about a name that none of the known things has.
func notFound(thing, name string, known []string) error {
	err := &thermal.InputError{Field: thing, Value: name, Problem: "there is none of this name"}
	if near := nearestWord(name, known); near != "" {
		err.Remedy = "the nearest is " + near
	}
	return hinted{err, "bankfire help lists the commands"}
}

func names(all []*command) []string {
	names := make([]string, len(all))
	for i, c := range all {
		names[i] = c.name
	}
	return names
}

// checkOperands checks how many there are.
func (c *command) checkOperands(operands []string) error {
	usage := "write bankfire " + c.name
	if c.args != "" {
		usage += " " + c.args
	}
	switch n := len(operands); {
	case n < c.least:
		return &thermal.InputError{Field: c.name, Problem: "no " + c.args + " given", Remedy: usage}
	case c.most >= 0 && n > c.most:
		return &thermal.InputError{Field: c.name, Value: operands[c.most], Problem: "one operand too many", Remedy: usage}
	}
	return nil
}

// version returns the version of the module, which names the revision if the
// program was built in a working copy, "(devel)" if the build was told not to
// look for it, or "unknown".
func version() string {
	info, ok := debug.ReadBuildInfo()
	if !ok || info.Main.Version == "" {
		return "unknown"
	}
	return info.Main.Version
}
