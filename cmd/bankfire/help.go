package main

import (
	"bytes"
	"context"
	_ "embed"
	"fmt"
	"io"

	"github.com/spf13/pflag"
)

//go:embed studyhelp.txt
var studyHelp string

//go:embed verdictshelp.txt
var verdictsHelp string

// topic is a page of help that belongs to no command.
type topic struct {
	name, short string
	text        string // in lines of at most lineWidth letters
}

// topics returns the pages in the order in which help lists them.
func topics() []topic {
	return []topic{
		{"study", "the study file: every key, with an example and what it means", studyHelp},
		{"verdicts", "what verdicts, columns and numbers of weigh mean", verdictsHelp},
	}
}

// helpCommand is `bankfire help`.
func helpCommand() *command {
	return &command{
		name:  "help",
		args:  "[TOPIC]",
		short: "list commands and topics, or explain one",
		long: "Lists commands and topics or, given the name of one, explains it: a command with its flags and\n" +
			"examples, a topic in full.",
		examples: []example{
			{"bankfire help", "list commands and topics"},
			{"bankfire help laws", "explain a command"},
			{"bankfire help study", "every key of a study file"},
		},
		most: 1,
		run: func(_ context.Context, s streams, operands []string) error {
			if len(operands) == 0 {
				return writeOverview(s.out, commands())
			}
			return explain(s.out, operands[0])
		},
	}
}

// explain writes the page of a topic, or the help of a command.
func explain(w io.Writer, name string) error {
	for _, t := range topics() {
		if t.name == name {
			_, err := io.WriteString(w, t.text)
			return err
		}
	}
	for _, c := range commands() {
		if c.name == name {
			return c.writeHelp(w)
		}
	}
	return notFound("topic", name, explained(commands()))
}

// explained returns the names of all that help explains.
func explained(all []*command) []string {
	list := names(all)
	for _, t := range topics() {
		list = append(list, t.name)
	}
	return list
}

// writeOverview lists commands and topics.
func writeOverview(w io.Writer, all []*command) error {
	var text bytes.Buffer
	text.WriteString("bankfire says which temperature-time paths of a magma store reproduce what diffusion\n" +
		"left in its crystals, and how far the others miss.\n\nCommands:\n")
	for _, c := range all {
		fmt.Fprintf(&text, "  %-12s%s\n", c.name, c.short)
	}
	text.WriteString("\nTopics of help:\n")
	for _, t := range topics() {
		fmt.Fprintf(&text, "  %-12s%s\n", t.name, t.short)
	}
	text.WriteString("\nbankfire help NAME explains one, a command with examples; bankfire --version names the version.\n\n" +
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
