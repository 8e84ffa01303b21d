package main

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"io"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"syscall"
	"testing"

	"github.com/spf13/pflag"

	"bankfire/thermal"
)

// trial returns a command that fails as its operand says.
func trial() *command {
	var loud bool
	var count int
	input := &thermal.InputError{File: "s.toml", Line: 3, Col: 4, Field: "hold", Value: "x", Problem: "has no unit"}
	errs := map[string]error{
		"fine":    nil,
		"breaks":  errors.New("disk full"),
		"wrong":   input,
		"wrapped": fmt.Errorf("crystal HF-12: %w", input),
		"several": errors.Join(input, &thermal.InputError{Field: "for", Problem: "missing"}),
		"hint":    hinted{input, "look again"},
		"unread":  fmt.Errorf("write: %w", syscall.EPIPE),
		"mingled": fmt.Errorf("weigh: %w", errors.Join(errors.New("no memory"), input)),
	}
	return &command{
		name: "trial", args: "HOW", short: "fail in some way", long: "Fails.", least: 1, most: 1,
		flags: func(set *pflag.FlagSet) {
			set.BoolVar(&loud, "loud", false, "say more")
			set.IntVar(&count, "count", 2, "do it `N` times")
		},
		words: map[string][]string{"HOW": {"fine", "breaks"}},
		run: func(_ context.Context, s streams, operands []string) error {
			fmt.Fprintf(s.out, "loud %t count %d\n", loud, count)
			return errs[operands[0]]
		},
	}
}

func TestStatus(t *testing.T) {
	const ran = "loud false count 2\n"
	for _, test := range []struct {
		name, args string
		status     int
		out, err   string
	}{
		{"done", "trial fine", 0, ran, ""},
		{"flags after operands", "trial fine --loud --count 3", 0, "loud true count 3\n", ""},
		{"failed", "trial breaks", 1, ran, "bankfire: disk full\n"},
		{"wrong study", "trial wrong", 2, ran, "bankfire: s.toml:3:4: hold \"x\": has no unit\n"},
		{"wrong below another error", "trial wrapped", 2, ran, "bankfire: crystal HF-12: s.toml:3:4: hold \"x\": has no unit\n"},
		{"several wrong", "trial several", 2, ran, "bankfire: s.toml:3:4: hold \"x\": has no unit\nbankfire: for: missing\n"},
		{"wrong among others", "trial mingled", 2, ran, "bankfire: weigh: no memory\nbankfire: s.toml:3:4: hold \"x\": has no unit\n"},
		{"hint", "trial hint", 2, ran, "bankfire: s.toml:3:4: hold \"x\": has no unit\nbankfire: hint: look again\n"},
		{"nobody reads on", "trial unread", 0, ran, ""},
		{"no operand", "trial", 2, "", "bankfire: trial: no HOW given; write bankfire trial HOW\n" + trialHint},
		{"operand too many", "trial fine fine", 2, "", "bankfire: trial \"fine\": one operand too many; write bankfire trial HOW\n" + trialHint},
		{"unknown flag", "trial fine --lout", 2, "", "bankfire: flag \"--lout\": trial has none of this name; the nearest is --loud\n" + trialHint},
		{"unknown flag like none", "trial --zzzzzz", 2, "", "bankfire: flag \"--zzzzzz\": trial has none of this name\n" + trialHint},
		{"unknown short flag", "trial -x", 2, "", "bankfire: flag \"-x\": trial has none of this name\n" + trialHint},
		{"flag without value", "trial fine --count", 2, "", "bankfire: --count: has no value; write --count N\n" + trialHint},
		{"flag with a wrong value", "trial fine --count two", 2, "", "bankfire: --count \"two\": cannot be read; want a whole number\n" + trialHint},
		{"unknown command", "trail fine", 2, "", "bankfire: command \"trail\": there is none of this name; the nearest is trial\nbankfire: hint: bankfire help lists the commands\n"},
		{"no command", "", 2, "", "bankfire: no command given; want trial\nbankfire: hint: bankfire help says what each of them does\n"},
		{"unknown flag before the command", "--loud trial", 2, "", "bankfire: flag \"--loud\": bankfire has none of this name\nbankfire: hint: bankfire help lists the commands\n"},
		{"help before all checks", "trial --help", 0, trialHelp, ""},
		{"help in short", "trial -h fine", 0, trialHelp, ""},
	} {
		t.Run(test.name, func(t *testing.T) {
			var out, err bytes.Buffer
			status := execute([]*command{trial()}, strings.Fields(test.args), streams{nil, &out, &err})
			if status != test.status {
				t.Errorf("got status %d, want %d", status, test.status)
			}
			if out.String() != test.out {
				t.Errorf("got out  %q\nwant     %q", out.String(), test.out)
			}
			if err.String() != test.err {
				t.Errorf("got err  %q\nwant     %q", err.String(), test.err)
			}
		})
	}
}

const trialHint = "bankfire: hint: bankfire help trial shows its flags and examples\n"

const trialHelp = `bankfire trial HOW

Fails.

Flags:
  --help, -h  show this help
  --loud      say more
  --count N   do it N times (default 2)
`

// fullDisk takes nothing.
type fullDisk struct{ err error }

func (d fullDisk) Write([]byte) (int, error) { return 0, d.err }

func TestResultsNotWritten(t *testing.T) {
	for _, test := range []struct {
		name   string
		out    io.Writer
		status int
		err    string
	}{
		{"disk full", fullDisk{syscall.ENOSPC}, failed, "bankfire: no space left on device\n"},
		{"pipe closed", fullDisk{syscall.EPIPE}, done, ""},
	} {
		t.Run(test.name, func(t *testing.T) {
			var err bytes.Buffer
			status := execute([]*command{trial()}, []string{"trial", "fine"}, streams{nil, test.out, &err})
			if status != test.status || err.String() != test.err {
				t.Errorf("got %d %q, want %d %q", status, err.String(), test.status, test.err)
			}
		})
	}
}

func TestNearestWord(t *testing.T) {
	known := []string{"weigh", "follow", "laws", "completion", "at"}
	for _, test := range []struct{ typed, want string }{
		{"wiegh", "weigh"}, {"weight", "weigh"}, {"folow", "follow"}, {"law", "laws"}, {"comp", "completion"},
		{"zebra", ""}, {"x", ""}, {"", "weigh"},
	} {
		t.Run(test.typed, func(t *testing.T) {
			if got := nearestWord(test.typed, known); got != test.want {
				t.Errorf("got %q, want %q", got, test.want)
			}
		})
	}
}

// TestCommandTable holds what help and completion need of every command.
func TestCommandTable(t *testing.T) {
	for _, c := range commands() {
		t.Run(c.name, func(t *testing.T) {
			if c.short == "" || c.long == "" || len(c.examples) == 0 || c.run == nil {
				t.Errorf("short %q, long %q, %d examples", c.short, c.long, len(c.examples))
			}
			for _, line := range strings.Split(c.long, "\n") {
				if len(line) > lineWidth {
					t.Errorf("%d letters in %q", len(line), line)
				}
			}
			for _, e := range c.examples {
				if !strings.Contains(e.line, "bankfire "+c.name) {
					t.Errorf("example %q is of another command", e.line)
				}
			}
			c.flagSet().VisitAll(func(f *pflag.Flag) {
				if f.Usage == "" {
					t.Errorf("--%s has no usage", f.Name)
				}
				if value, _ := pflag.UnquoteUsage(f); value != strings.ToUpper(value) {
					t.Errorf("--%s: name its value %q in backquotes and capitals", f.Name, value)
				}
			})
		})
	}
}

// TestHelpExamples runs the examples that the help shows, in a folder with a study.
func TestHelpExamples(t *testing.T) {
	bash, err := exec.LookPath("bash")
	if err != nil {
		t.Skip(err)
	}
	for _, c := range commands() {
		t.Run(c.name, func(t *testing.T) {
			home := t.TempDir()
			t.Setenv("HOME", home)
			if err := os.MkdirAll(filepath.Join(home, ".config/fish/completions"), 0o777); err != nil {
				t.Fatal(err)
			}
			if err := os.CopyFS(home, os.DirFS("../../examples")); err != nil {
				t.Fatal(err)
			}
			folder, lines := "cold-store", []string{}
			if c.name == "gather" {
				folder, lines = "cooler-but-longer", []string{"bankfire weigh study.toml --part 1/1 --out results"}
			}
			for _, e := range c.examples {
				lines = append(lines, e.line)
			}
			for _, line := range lines {
				shell := exec.Command(bash, "-c", line)
				shell.Dir = filepath.Join(home, folder)
				if out, err := shell.CombinedOutput(); err != nil {
					t.Errorf("%s: %v\n%s", line, err, out)
				}
			}
		})
	}
}
