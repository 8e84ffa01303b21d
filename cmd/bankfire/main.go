// Command bankfire weighs temperature-time paths of a magma store against what
// was measured in its crystals: which paths reproduce the diffusion profiles,
// which cannot, in which direction they miss and by how much.
//
// bankfire help lists commands and topics, and bankfire help NAME explains one;
// the topic study is the reference of the study file. Results go to the standard
// output, everything else to the standard error. The status is 0 if done, 1 if it
// failed, and 2 if the command line or the study is wrong; that no path reproduces
// the data is a finding, status 0.
package main

import (
	"io"
	"os"
)

func main() { os.Exit(run(os.Args[1:], os.Stdin, os.Stdout, os.Stderr)) }

// run does what the arguments say and returns the status to exit with.
func run(args []string, stdin io.Reader, stdout, stderr io.Writer) int {
	return execute(commands(), args, streams{stdin, stdout, stderr})
}

// commands returns the commands in the order in which help lists them.
func commands() []*command {
	return []*command{
		checkCommand(),
		weighCommand(),
		gatherCommand(),
		followCommand(),
		lawsCommand(),
		completionCommand(),
		helpCommand(),
	}
}
