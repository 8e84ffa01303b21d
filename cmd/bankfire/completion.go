package main

import (
	"context"
	"io"
	"strings"

	"github.com/spf13/pflag"

	"bankfire/thermal"
)

// completionCommand is `bankfire completion`.
func completionCommand() *command {
	writers := map[string]func(io.Writer, []completed) error{
		"bash": writeBash, "zsh": writeZsh, "fish": writeFish,
	}
	shells := []string{"bash", "zsh", "fish"}
	return &command{
		name:  "completion",
		args:  "SHELL",
		short: "print what makes a shell complete commands, flags and keys",
		long: "Prints a script for bash, zsh or fish. Once the shell has read it, the tab key completes commands,\n" +
			"flags, keys of laws and the names of study files.",
		examples: []example{
			{"source <(bankfire completion bash)", "for this session, in bash or zsh; put the line into ~/.bashrc or ~/.zshrc to keep it"},
			{"bankfire completion fish > ~/.config/fish/completions/bankfire.fish", "for every session of fish"},
		},
		least: 1,
		most:  1,
		words: map[string][]string{"SHELL": shells},
		run: func(_ context.Context, s streams, operands []string) error {
			write, known := writers[operands[0]]
			if !known {
				return &thermal.InputError{Field: "shell", Value: operands[0], Problem: "not known", Remedy: "want " + orList(shells)}
			}
			return write(s.out, completeAll(commands()))
		},
	}
}

// completed is what completion knows of a command.
type completed struct {
	name, short string
	flags       []completedFlag
	operands    offer
}

// completedFlag is what it knows of a flag.
type completedFlag struct {
	name, usage string
	value       string // the name of its value, "" if it takes none
	offer       offer
}

// offer is what completion has for a value: words, or files of a kind. The zero
// value has nothing: only the user knows.
type offer struct {
	words       []string
	studies     bool
	directories bool
}

// completeAll gathers what completion knows of the commands.
func completeAll(all []*command) []completed {
	table := make([]completed, len(all))
	for i, c := range all {
		offerFor := func(value string) offer {
			switch value {
			case "TOPIC":
				return offer{words: explained(all)}
			case "STUDY":
				return offer{studies: true}
			case "DIR":
				return offer{directories: true}
			}
			return offer{words: c.words[value]}
		}
		first, _, _ := strings.Cut(c.args, " ") // studies come with folders, so they serve the second operand too
		table[i] = completed{name: c.name, short: c.short, operands: offerFor(strings.Trim(first, "[.]"))}
		c.flagSet().VisitAll(func(f *pflag.Flag) {
			value, usage := pflag.UnquoteUsage(f)
			table[i].flags = append(table[i].flags, completedFlag{f.Name, usage, value, offerFor(value)})
		})
	}
	return table
}

// single quotes text for a shell.
func single(text string) string { return "'" + strings.ReplaceAll(text, "'", `'\''`) + "'" }
