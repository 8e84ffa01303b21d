package main

import (
	"bytes"
	"fmt"
	"io"
	"strings"
)

// fishStart defines the command that stands before the cursor.
const fishStart = `# fish completion for bankfire
function __bankfire_command
    set -l words (commandline -opc)
    for word in $words[2..-1]
        if not string match -q -- '-*' $word
            echo $word
            return 0
        end
    end
    return 1
end
complete -c bankfire -f
complete -c bankfire -n 'not __bankfire_command >/dev/null' -l help -s h -d 'show this help'
complete -c bankfire -n 'not __bankfire_command >/dev/null' -l version -d 'print the version of the program'
`

// writeFish writes the completion for fish.
func writeFish(w io.Writer, table []completed) error {
	var text bytes.Buffer
	text.WriteString(fishStart)
	for _, c := range table {
		fmt.Fprintf(&text, "complete -c bankfire -n 'not __bankfire_command >/dev/null' -a %s -d %s\n", c.name, fishQuote(c.short))
	}
	for _, c := range table {
		here := "complete -c bankfire -n 'contains -- " + c.name + " (__bankfire_command)'"
		for _, f := range c.flags {
			fmt.Fprintf(&text, "%s -l %s%s -d %s\n", here, f.name, fishValue(f), fishQuote(f.usage))
		}
		if offered := fishOffer(c.operands); offered != "" {
			fmt.Fprintf(&text, "%s -a %s\n", here, offered)
		}
	}
	_, err := w.Write(text.Bytes())
	return err
}

// fishValue says that the flag takes a value, and which.
func fishValue(f completedFlag) string {
	if f.value == "" {
		return ""
	}
	if offered := fishOffer(f.offer); offered != "" {
		return " -x -a " + offered
	}
	return " -x"
}

// fishOffer is the argument of -a that offers, "" for nothing.
func fishOffer(o offer) string {
	switch {
	case o.studies:
		return "'(__fish_complete_suffix .toml)'"
	case o.directories:
		return "'(__fish_complete_directories)'"
	case len(o.words) == 0:
		return ""
	}
	words := make([]string, len(o.words))
	for i, word := range o.words {
		words[i] = fishQuote(word)
	}
	return fishQuote(strings.Join(words, " "))
}

// fishQuote quotes text for fish.
func fishQuote(text string) string {
	return "'" + strings.NewReplacer(`\`, `\\`, `'`, `\'`).Replace(text) + "'"
}
