package main

import (
	"bytes"
	"os"
	"path/filepath"
	"regexp"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
)

// block is a shell session in a README file: a command line of the program
// and what it prints.
var block = regexp.MustCompile("(?m)^```console\n\\$ bankfire (.*)\n((?:.*\n)*?)```$")

// TestDoc runs every command that a README file shows and compares what it
// prints with what the file says. It holds the text; the numbers in it are
// checked by the tests of the packages that compute them.
func TestDoc(t *testing.T) {
	t.Chdir(filepath.Join("..", ".."))
	files, err := filepath.Glob(filepath.Join("examples", "*", "README.md"))
	if err != nil {
		t.Fatal(err)
	}
	blocks := 0
	for _, name := range append([]string{"README.md"}, files...) {
		t.Run(name, func(t *testing.T) {
			text, err := os.ReadFile(name)
			if err != nil {
				t.Fatal(err)
			}
			shown := block.FindAllSubmatchIndex(text, -1)
			if len(shown) == 0 {
				t.Errorf("%s shows no command", name)
			}
			blocks += len(shown)
			got := rewritten(t, string(text), shown)
			if *update {
				if err := os.WriteFile(name, []byte(got), 0o644); err != nil {
					t.Fatal(err)
				}
			} else if diff := cmp.Diff(string(text), got); diff != "" {
				t.Errorf("%s is not what the program prints (-file +program); after review, go test ./cmd/bankfire -run TestDoc -update\n%s", name, diff)
			}
		})
	}
	if blocks == 0 {
		t.Error("no command was run")
	}
}

// rewritten returns the text with every output replaced by what the program
// prints now.
func rewritten(t *testing.T, text string, shown [][]int) string {
	var out strings.Builder
	from := 0
	for _, at := range shown {
		line := text[at[2]:at[3]]
		var stdout, stderr bytes.Buffer
		if status := run(words(t, line), strings.NewReader(""), &stdout, &stderr); status != done {
			t.Errorf("bankfire %s: status %d\n%s", line, status, &stderr)
		}
		out.WriteString(text[from:at[4]])
		out.Write(stdout.Bytes())
		from = at[5]
	}
	return out.String() + text[from:]
}

// words splits a command line at blanks outside double quotes.
func words(t *testing.T, line string) []string {
	var words []string
	for i, part := range strings.Split(line, `"`) {
		if i%2 == 1 {
			words = append(words, part)
		} else {
			words = append(words, strings.Fields(part)...)
		}
	}
	if strings.Count(line, `"`)%2 == 1 {
		t.Fatalf("quotes do not pair up in %q", line)
	}
	return words
}
