package main

import (
	"bytes"
	"context"
	"fmt"
	"io"

	"github.com/spf13/pflag"
)

// helpCommand is `bankfire help`.
func helpCommand() *command {
	return &command{
		name:  "help",
		args:  "[COMMAND]",
		short: "list the commands, or explain one",
		long:  "Lists the commands or, given the name of one, explains it with its flags and examples.",
		examples: []example{
			{"bankfire help", "list the commands"},
			{"bankfire help laws", "explain one"},
		},
		most: 1,
		run: func(_ context.Context, s streams, operands []string) error {
			if len(operands) == 0 {
				return writeOverview(s.out, commands())
			}
			c, err := find(commands(), operands[0])
			if err != nil {
				return err
			}
			return c.writeHelp(s.out)
		},
	}
}

// writeOverview lists the commands.
func writeOverview(w io.Writer, all []*command) error {
	var text bytes.Buffer
	text.WriteString("bankfire says which temperature-time paths of a magma store reproduce what diffusion\n" +
		"left in its crystals, and how far the others miss.\n\nCommands:\n")
	for _, c := range all {
		fmt.Fprintf(&text, "  %-12s%s\n", c.name, c.short)
	}
	text.WriteString("\nbankfire help COMMAND explains one, with examples; bankfire --version names the version.\n\n" +
		"Results go to the standard output, all else to the standard error. Status: 0 done, 1 failed,\n" +
		"2 the command line or the study is wrong. That nothing reproduces the data is a finding, not a failure.\n")
	_, err := w.Write(text.Bytes())
	return err
}

// writeHelp explains the command.
func (c *command) writeHelp(w io.Writer) error {
	var text bytes.Buffer
	fmt.Fprintf(&text, "bankfire %s", c.name)
	if c.args != "" {
		fmt.Fprintf(&text, " %s", c.args)
	}
	fmt.Fprintf(&text, "\n\n%s\n\nFlags:\n", c.long)
	writeFlags(&text, c.flagSet())
	if len(c.examples) > 0 {
		text.WriteString("\nExamples:\n")
	}
	for _, e := range c.examples {
		fmt.Fprintf(&text, "  %s\n      %s\n", e.line, e.does)
	}
	_, err := w.Write(text.Bytes())
	return err
}

// writeFlags lists the flags, one a line: what to type and what it does.
func writeFlags(text *bytes.Buffer, set *pflag.FlagSet) {
	width := 0
	set.VisitAll(func(f *pflag.Flag) { width = max(width, len(typedFlag(f))) })
	set.VisitAll(func(f *pflag.Flag) {
		_, usage := pflag.UnquoteUsage(f)
		switch f.DefValue {
		case "", "0", "false", "[]":
		default:
			usage += " (default " + f.DefValue + ")"
		}
		fmt.Fprintf(text, "  %-*s  %s\n", width, typedFlag(f), wrap(usage, width+4))
	})
}

// typedFlag is the flag as one types it: "--out DIR", "--help, -h".
func typedFlag(f *pflag.Flag) string {
	text := "--" + f.Name
	if f.Shorthand != "" {
		text += ", -" + f.Shorthand
	}
	if value, _ := pflag.UnquoteUsage(f); value != "" {
		text += " " + value
	}
	return text
}
