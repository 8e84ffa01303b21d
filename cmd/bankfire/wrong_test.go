package main

import (
	"errors"
	"os"
	"os/exec"
	"path/filepath"
	"regexp"
	"strconv"
	"strings"
	"testing"
	"time"

	"github.com/google/go-cmp/cmp"
	"github.com/rogpeppe/go-internal/testscript"
)

// patience is far above the tenth of a second that a refusal takes, for slow machines
// under the race detector, and plenty far above the memory. Linux counts to the latter
// what the test itself held when it started the program.
const (
	patience = 20 * time.Second
	plenty   = 1 << 30 // bytes
)

// wrongFile is the script command
//
//	wrong STUDY MESSAGE...
//
// It demands that check and weigh refuse the study with exactly these messages, one a
// line, in status wrong, print nothing else, leave no folder of results and take no more
// than a moment. Within a message, "..." stands for any text.
func wrongFile(ts *testscript.TestScript, neg bool, args []string) {
	if neg || len(args) < 2 {
		ts.Fatalf("usage: wrong STUDY MESSAGE...")
	}
	for _, command := range [][]string{{"check", args[0]}, {"weigh", args[0], "--out", "results"}} {
		began := time.Now()
		got, want := refusal(ts, command), "bankfire: "+strings.Join(args[1:], "\nbankfire: ")+"\n"
		if took := time.Since(began); took > patience {
			ts.Fatalf("%s took %v", command[0], took)
		}
		if !sameBut(want, got) {
			ts.Fatalf("%s does not say what it should; wanted -, got +:\n%s", command[0], cmp.Diff(want, got))
		}
	}
}

// refusal runs a command that must refuse and returns what it said.
func refusal(ts *testscript.TestScript, command []string) string {
	var exit *exec.ExitError
	if err := ts.Exec("bankfire", command...); !errors.As(err, &exit) || exit.ExitCode() != wrong {
		ts.Fatalf("%s: %v, want status %d", command[0], err, wrong)
	}
	if held := peakMemory(exit.ProcessState); held > plenty {
		ts.Fatalf("%s took %d bytes of memory", command[0], held)
	}
	if out := ts.ReadFile("stdout"); out != "" {
		ts.Fatalf("%s printed %q", command[0], out)
	}
	if _, err := os.Stat(ts.MkAbs("results")); !errors.Is(err, os.ErrNotExist) {
		ts.Fatalf("%s left a folder of results", command[0])
	}
	return ts.ReadFile("stderr")
}

// sameBut reports whether a text is the wanted one, in which "..." stands for any text
// within a line.
func sameBut(want, got string) bool {
	pattern := strings.ReplaceAll(regexp.QuoteMeta(want), `\.\.\.`, `.*`)
	return regexp.MustCompile("^" + pattern + "$").MatchString(got)
}

// editedFile is the script command
//
//	edited FILE OLD NEW MESSAGE...
//
// It puts NEW for OLD, which must be in the file once, and demands of study.toml what
// `wrong` does; then the file is as it was. In OLD and NEW, \n is a line end, \r a
// carriage return and \xff a byte.
func editedFile(ts *testscript.TestScript, neg bool, args []string) {
	if neg || len(args) < 4 {
		ts.Fatalf("usage: edited FILE OLD NEW MESSAGE...")
	}
	sound, before, after := ts.ReadFile(args[0]), escaped(args[1]), escaped(args[2])
	if n := strings.Count(sound, before); n != 1 {
		ts.Fatalf("%q is in %s %d times", before, args[0], n)
	}
	write := func(text string) { ts.Check(os.WriteFile(ts.MkAbs(args[0]), []byte(text), 0o666)) }
	write(strings.Replace(sound, before, after, 1))
	wrongFile(ts, false, append([]string{"study.toml"}, args[3:]...))
	write(sound)
}

// escaped puts the bytes that the escapes of a script's argument stand for.
func escaped(text string) string {
	return escapes.ReplaceAllStringFunc(text, func(e string) string {
		switch e {
		case `\n`:
			return "\n"
		case `\r`:
			return "\r"
		}
		b, _ := strconv.ParseUint(e[2:], 16, 8)
		return string([]byte{byte(b)})
	})
}

var escapes = regexp.MustCompile(`\\n|\\r|\\x[0-9a-f]{2}`)

// bigFile is the script command
//
//	bigfile FILE BYTES [LINE]
//
// It writes a file of that many bytes, all of them copies of a line.
func bigFile(ts *testscript.TestScript, neg bool, args []string) {
	if neg || len(args) < 2 || len(args) > 3 {
		ts.Fatalf("usage: bigfile FILE BYTES [LINE]")
	}
	size, err := strconv.Atoi(args[1])
	ts.Check(err)
	line := "1.5,60\n"
	if len(args) == 3 {
		line = escaped(args[2]) + "\n"
	}
	f, err := os.Create(ts.MkAbs(args[0]))
	ts.Check(err)
	chunk := strings.Repeat(line, 1+(1<<20)/len(line))
	for ; size > 0; size -= len(chunk) {
		_, err := f.WriteString(chunk[:min(len(chunk), size)])
		ts.Check(err)
	}
	ts.Check(f.Close())
}

// fewestWrong is how many wrong studies and data files the scripts must at least hold.
const fewestWrong = 200

// TestWrongAreMany counts them, so that a script that moved does not go unseen.
func TestWrongAreMany(t *testing.T) {
	scripts, err := filepath.Glob("testdata/script/wrong_*.txtar")
	if err != nil {
		t.Fatal(err)
	}
	count := 0
	for _, name := range scripts {
		text, err := os.ReadFile(name)
		if err != nil {
			t.Fatal(err)
		}
		commands, _, _ := strings.Cut(string(text), "\n-- ")
		count += len(regexp.MustCompile(`(?m)^(wrong|edited) `).FindAllString(commands, -1))
	}
	t.Logf("%d wrong studies and data files in %d scripts", count, len(scripts))
	if count < fewestWrong {
		t.Errorf("%d wrong studies and data files, want at least %d", count, fewestWrong)
	}
}

// TestSameBut: the comparison of the scripts can fail.
func TestSameBut(t *testing.T) {
	for _, test := range []struct {
		want, got string
		same      bool
	}{
		{"a.b: c\n", "a.b: c\n", true},
		{"a.b: c\n", "aXb: c\n", false},
		{"a: ... d\n", "a: b c d\n", true},
		{"a: ... d\n", "a: b\nd\n", false},
		{"a\n", "a\nb\n", false},
		{"a\n", "", false},
	} {
		if got := sameBut(test.want, test.got); got != test.same {
			t.Errorf("%q and %q: %v", test.want, test.got, got)
		}
	}
}
