package main

import (
	"errors"
	"strings"

	"github.com/spf13/pflag"

	"bankfire/thermal"
)

// newFlagSet returns a set with the one flag that every command has.
func newFlagSet(name string) *pflag.FlagSet {
	set := pflag.NewFlagSet(name, pflag.ContinueOnError)
	set.SortFlags = false
	set.BoolP("help", "h", false, "show this help")
	return set
}

// flagSet returns the flags of the command.
func (c *command) flagSet() *pflag.FlagSet {
	set := newFlagSet(c.name)
	if c.flags != nil {
		c.flags(set)
	}
	return set
}

// parse reads the flags and reports whether help was asked for. The error is an
// *thermal.InputError.
func parse(set *pflag.FlagSet, args []string) (helpAsked bool, err error) {
	if err := set.Parse(args); err != nil {
		return false, flagError(set, err)
	}
	return set.GetBool("help")
}

// flagError says in our words what pflag could not read.
func flagError(set *pflag.FlagSet, err error) error {
	var (
		unknown *pflag.NotExistError
		missing *pflag.ValueRequiredError
		invalid *pflag.InvalidValueError
	)
	switch {
	case errors.As(err, &unknown):
		return unknownFlag(set, unknown)
	case errors.As(err, &missing):
		value, _ := pflag.UnquoteUsage(missing.GetFlag())
		flag := "--" + missing.GetFlag().Name
		return &thermal.InputError{Field: flag, Problem: "has no value", Remedy: "write " + flag + " " + value}
	case errors.As(err, &invalid):
		flag := invalid.GetFlag()
		return &thermal.InputError{
			Field: "--" + flag.Name, Value: invalid.GetValue(), Problem: "cannot be read", Remedy: "want " + wanted(flag),
		}
	}
	return &thermal.InputError{Field: set.Name(), Problem: err.Error()}
}

// unknownFlag suggests the nearest flag of the set.
func unknownFlag(set *pflag.FlagSet, err *pflag.NotExistError) error {
	typed := "--" + err.GetSpecifiedName()
	if short := err.GetSpecifiedShortnames(); short != "" {
		typed = "-" + short
	}
	in := &thermal.InputError{Field: "flag", Value: typed, Problem: set.Name() + " has none of this name"}
	var known []string
	set.VisitAll(func(f *pflag.Flag) { known = append(known, f.Name) })
	if near := nearestWord(strings.TrimLeft(typed, "-"), known); near != "" {
		in.Remedy = "the nearest is --" + near
	}
	return in
}

// wanted says what a flag's value must be.
func wanted(flag *pflag.Flag) string {
	switch flag.Value.Type() {
	case "bool":
		return "true or false, or the flag alone"
	case "int", "uint":
		return "a whole number"
	case "float64":
		return "a number"
	}
	value, _ := pflag.UnquoteUsage(flag)
	return value
}

// nearestWord returns the known word that a mistyped one probably means, or ""
// if none is near.
func nearestWord(typed string, known []string) string {
	best, least := "", 3 // more than two slips are another word
	for _, word := range known {
		n := thermal.Slips(typed, word)
		if strings.HasPrefix(word, typed) {
			n = min(n, 1)
		}
		if n < least && n < len(word) {
			best, least = word, n
		}
	}
	return best
}
