package main

import (
	"bytes"
	"fmt"
	"io"
	"strings"
)

// bashStart finds the command, the word before the cursor and what may be its
// flag. It works in bash 3.2, which macOS has, and therefore without mapfile.
const bashStart = `# bash completion for bankfire
_bankfire_words() { COMPREPLY=($(compgen -W "$1" -- "$cur")); }
_bankfire_quoted() {
    compopt -o filenames 2>/dev/null
    cur=${cur#[\"\']}
    cur=${cur//\\/}
    _bankfire_words "$1"
}
_bankfire_directories() { compopt -o filenames 2>/dev/null; COMPREPLY=($(compgen -d -- "$cur")); }
_bankfire_studies() {
    compopt -o filenames 2>/dev/null
    COMPREPLY=($(compgen -d -- "$cur") $(compgen -f -X '!*.toml' -- "$cur"))
}
_bankfire() {
    local IFS=$'\n' i command='' cur=${COMP_WORDS[COMP_CWORD]} before=${COMP_WORDS[COMP_CWORD-1]}
    COMPREPLY=()
    if [[ $cur == = ]]; then
        cur=''
    elif [[ $before == = ]]; then
        before=${COMP_WORDS[COMP_CWORD-2]}
    fi
    for ((i = 1; i < COMP_CWORD; i++)); do
        if [[ ${COMP_WORDS[i]} != -* ]]; then
            command=${COMP_WORDS[i]}
            break
        fi
    done
    case $command,$before,$cur in
`

const bashEnd = `    esac
}
complete -F _bankfire bankfire
`

// writeBash writes the completion for bash: one line of a case for each value of
// a flag, for the flags of each command and for its operands.
func writeBash(w io.Writer, table []completed) error {
	var text bytes.Buffer
	text.WriteString(bashStart)
	var commands []string
	for _, c := range table {
		commands = append(commands, c.name)
		flags := make([]string, len(c.flags))
		for i, f := range c.flags {
			flags[i] = "--" + f.name
			if f.value != "" {
				fmt.Fprintf(&text, "    %s,--%s,*) %s ;;\n", c.name, f.name, bashOffer(f.offer))
			}
		}
		fmt.Fprintf(&text, "    %s,*,-*) _bankfire_words %s ;;\n", c.name, bashList(flags))
		fmt.Fprintf(&text, "    %s,*) %s ;;\n", c.name, bashOffer(c.operands))
	}
	fmt.Fprintf(&text, "    ,*,-*) _bankfire_words %s ;;\n", bashList([]string{"--help", "--version"}))
	fmt.Fprintf(&text, "    ,*) _bankfire_words %s ;;\n", bashList(commands))
	text.WriteString(bashEnd)
	_, err := w.Write(text.Bytes())
	return err
}

// bashOffer is the call that offers.
func bashOffer(o offer) string {
	switch {
	case o.studies:
		return "_bankfire_studies"
	case o.directories:
		return "_bankfire_directories"
	case len(o.words) == 0:
		return ":"
	}
	list := bashList(o.words)
	if strings.Contains(list, " ") {
		return "_bankfire_quoted " + list
	}
	return "_bankfire_words " + list
}

// bashList is the words, one a line, as bash takes a word apart.
func bashList(words []string) string { return single(strings.Join(words, "\n")) }
