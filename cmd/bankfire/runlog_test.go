package main

import (
	"bytes"
	"os/exec"
	"regexp"
	"slices"
	"strings"
	"testing"
	"time"
)

func TestCommandLine(t *testing.T) {
	args := []string{"bankfire", "weigh", "my study.toml", "--out", "it's", "", "$HOME", "a\nb", "*", "x;y", "~"}
	line := commandLine(args)
	if want := "bankfire weigh 'my study.toml' --out 'it'\\''s' '' "; !strings.HasPrefix(line, want) {
		t.Errorf("got %s, want %s", line, want)
	}
	sh, err := exec.LookPath("sh")
	if err != nil {
		t.Skip(err)
	}
	out, err := exec.Command(sh, "-c", "printf '%s\\0' "+line).Output()
	if got := strings.Split(strings.TrimSuffix(string(out), "\x00"), "\x00"); err != nil || !slices.Equal(got, args) {
		t.Errorf("a shell reads %q, %v; want %q", got, err, args)
	}
}

func TestRunLog(t *testing.T) {
	r := smallResult(t)
	r.Study.Notes = []string{"odd"}
	r.Paths[0].Notes = []string{"odder"}
	r.Paths[0].Profiles[0].Notes = []string{"odd", "oddest"}
	started := time.Date(2026, 3, 1, 10, 0, 0, 0, time.FixedZone("", 3600))
	log := &runLog{made: program{"bankfire", "v1.2.3", "12ab"}, started: started, took: 1234567 * time.Microsecond, jobs: 3}
	var text bytes.Buffer
	if err := log.write(&text, r); err != nil {
		t.Fatal(err)
	}
	for _, want := range []string{
		`^bankfire v1\.2\.3, build 12ab, go1\.\S+\n`, `\ncommand: \S+`, `\nfolder: /.*/cmd/bankfire\n`, `\nhost: .+, \w+ \w+, \d+ processors\n`,
		`\nstarted: 2026-03-01T10:00:00\+01:00\n`, `\ntook: 1\.235s with 3 jobs\n`, `\nwarning: odd\nwarning: odder\nwarning: oddest\n$`,
	} {
		if !regexp.MustCompile(want).MatchString(text.String()) {
			t.Errorf("no %s in\n%s", want, text.String())
		}
	}
}
