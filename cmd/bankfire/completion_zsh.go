package main

import (
	"bytes"
	"fmt"
	"io"
	"strings"
)

const zshStart = `#compdef bankfire
_bankfire() {
    local -a commands
    commands=(
`

const zshMiddle = `    )
    _arguments -C '--help[show this help]' '--version[print the version of the program]' \
        '1:command:{_describe command commands}' '*:: :->rest' && return
    [[ $state == rest ]] || return
    case $words[1] in
`

// zshEnd serves a file on fpath, which calls the function, as well as source.
const zshEnd = `    esac
}
if [[ $funcstack[1] == _bankfire ]]; then
    _bankfire "$@"
else
    compdef _bankfire bankfire
fi
`

// writeZsh writes the completion for zsh.
func writeZsh(w io.Writer, table []completed) error {
	var text bytes.Buffer
	text.WriteString(zshStart)
	for _, c := range table {
		fmt.Fprintf(&text, "        %s\n", single(c.name+":"+c.short))
	}
	text.WriteString(zshMiddle)
	for _, c := range table {
		fmt.Fprintf(&text, "    %s) _arguments", c.name)
		for _, f := range c.flags {
			fmt.Fprintf(&text, " \\\n        %s", single(zshFlag(f)))
		}
		fmt.Fprintf(&text, " \\\n        %s ;;\n", single("*:operand:"+zshOffer(c.operands)))
	}
	text.WriteString(zshEnd)
	_, err := w.Write(text.Bytes())
	return err
}

// zshFlag is the flag as _arguments takes it: "--out=[usage]:DIR:_files -/".
func zshFlag(f completedFlag) string {
	usage := strings.NewReplacer(`[`, `\[`, `]`, `\]`).Replace(f.usage)
	if f.value == "" {
		return "--" + f.name + "[" + usage + "]"
	}
	return "--" + f.name + "=[" + usage + "]:" + f.value + ":" + zshOffer(f.offer)
}

// zshOffer is the action of _arguments that offers.
func zshOffer(o offer) string {
	switch {
	case o.studies:
		return `_files -g "*.toml"`
	case o.directories:
		return "_files -/"
	case len(o.words) == 0:
		return " "
	}
	words := make([]string, len(o.words))
	for i, word := range o.words {
		words[i] = strings.NewReplacer(" ", `\ `, "(", `\(`, ")", `\)`, ":", `\:`).Replace(word)
	}
	return "(" + strings.Join(words, " ") + ")"
}
