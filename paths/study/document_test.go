package study

import (
	"errors"
	"fmt"
	"strings"
	"testing"
	"time"
)

// flat writes every value of a tree as "line:col field = value".
func flat(n *node) string {
	var b strings.Builder
	var walk func(n *node)
	walk = func(n *node) {
		switch n.kind {
		case tableNode:
			for _, k := range n.keys {
				fmt.Fprintf(&b, "%d:%d %s ", k.line, k.col, k.value.field)
				walk(k.value)
			}
		case arrayNode:
			fmt.Fprintf(&b, "[%d:%d\n", n.line, n.col)
			for _, item := range n.items {
				fmt.Fprintf(&b, "- %d:%d ", item.line, item.col)
				walk(item)
			}
			b.WriteString("]\n")
		default:
			fmt.Fprintf(&b, "= %d:%d %s %q\n", n.line, n.col, n.kind, n.text)
		}
	}
	walk(n)
	return b.String()
}

func TestDocumentPlaces(t *testing.T) {
	tests := []struct{ name, text, want string }{
		{"text", `a = "x"`, "1:1 a = 1:5 a text \"x\"\n"},
		{"spaces", "\n  a   =   'x'", "2:3 a = 2:11 a text \"x\"\n"},
		{"byte-order mark", "\xef\xbb\xbfa = 1", "1:1 a = 1:5 a number \"1\"\n"},
		{"windows lines", "a = 1\r\nb = 2.5\r\n", "1:1 a = 1:5 a number \"1\"\n2:1 b = 2:5 a number \"2.5\"\n"},
		{"characters, not bytes", `a = { µµ = "é", b = true }`, ""},
		{"quoted characters", `a = { "µµ=" = "é", b = true }`, "1:1 a 1:7 a.\"µµ=\" = 1:15 a text \"é\"\n1:20 a.b = 1:24 true or false \"true\"\n"},
		{"escapes", `a = "x\u0041\n"`, "1:1 a = 1:5 a text \"xA\\n\"\n"},
		{"stray numbers", "a = [nan, -inf, 1e999, 99999999999999999999]",
			"1:1 a [1:5\n- 1:6 = 1:6 a number that is not finite \"nan\"\n- 1:11 = 1:11 a number that is not finite \"-inf\"\n" +
				"- 1:17 = 1:17 a number that is not finite \"1e999\"\n- 1:24 = 1:24 a number that is not finite \"99999999999999999999\"\n]\n"},
		{"headers", "[a]\nb = 1\n[[c]]\nd = 2\n[[c]]\n[c.e]\nf = 3",
			"1:2 a 2:1 a.b = 2:5 a number \"1\"\n3:3 c [3:3\n- 3:3 4:1 c.d = 4:5 a number \"2\"\n- 5:3 6:4 c.e 7:1 c.e.f = 7:5 a number \"3\"\n]\n"},
		{"dotted keys", "a.b = 1\na.c = 2\nd = { e.f = 3, e.g = 4 }",
			"1:1 a 1:3 a.b = 1:7 a number \"1\"\n2:3 a.c = 2:7 a number \"2\"\n3:1 d 3:7 d.e 3:9 d.e.f = 3:13 a number \"3\"\n3:18 d.e.g = 3:22 a number \"4\"\n"},
		{"lists over lines", "a = [ # first\n  { b = 1 },\n  'x',\n]",
			"1:1 a [1:5\n- 2:3 2:5 a.b = 2:9 a number \"1\"\n- 3:3 = 3:3 a text \"x\"\n]\n"},
		{"header after its child", "[a.b]\nc = 1\n[a]\nd = 2", "1:2 a 1:4 a.b 2:1 a.b.c = 2:5 a number \"1\"\n4:1 a.d = 4:5 a number \"2\"\n"},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			root, err := parseDocument([]byte(test.text))
			if test.want == "" {
				if err == nil {
					t.Fatal("bare keys hold ASCII only, but it was read")
				}
				return
			}
			if err != nil {
				t.Fatal(err)
			}
			if got := flat(root); got != test.want {
				t.Errorf("got\n%s\nwant\n%s", got, test.want)
			}
		})
	}
}

func TestDocumentRefused(t *testing.T) {
	long := strings.Repeat("x", maxStudyBytes)
	tests := []struct {
		name, text string
		line, col  int
		problem    string
	}{
		{"empty", "", 0, 0, "empty"},
		{"blank", " \n\t\r\n", 0, 0, "empty"},
		{"only a byte-order mark", "\xef\xbb\xbf", 0, 0, "empty"},
		{"binary", "a = 1\nb\x00", 2, 2, "zero byte"},
		{"UTF-16", "\xff\xfea\x00", 1, 0, "UTF-16"},
		{"UTF-16, big ends first", "\xfe\xff\x00a", 1, 0, "UTF-16"},
		{"Windows-1252", "a = 'x'\nb = '5 \xb5m'", 2, 8, "not UTF-8"},
		{"too large", long + "x", 0, 0, "larger than"},
		{"too deep a list", "a = " + strings.Repeat("[", 100) + strings.Repeat("]", 100), 1, 5, "nested more than"},
		{"very deep a list", "a = " + strings.Repeat("[", 100_000), 1, 10005, "nest"},
		{"too deep a table", strings.Repeat("a = { ", 200), 1, 1200, "not TOML"},
		{"too deep a key", strings.Repeat("a.", 200) + "a = 1", 1, 129, "nested more than"},
		{"too deep a header", "[" + strings.Repeat("a.", 200) + "a]", 1, 130, "nested more than"},
		{"too many values", "a = [" + strings.Repeat("1,", maxValues) + "]", 1, 2*maxValues + 4, "more than"},
		{"lone carriage return", "a = 1\rb = 2", 1, 6, "not TOML"},
		{"table on a value", "a = 1\n[a]", 2, 2, "given twice, first on line 1"},
		{"key under a value", "a = 1\na.b = 1", 2, 1, "given twice"},
		{"list on a table", "[a]\n[[a]]", 2, 3, "given twice"},
		{"table on a list", "[[a]]\n[a]", 2, 2, "given twice"},
		{"inline table added to", "a = { b = 1 }\n[a.c]", 2, 2, "given twice"},
		{"inner inline table added to", "a = { b.c = 1 }\na.b.d = 2", 2, 1, "given twice"},
		{"key twice in an inline table", "a = { b = 1, b = 2 }", 1, 14, "given twice"},
		{"header of a dotted table", "a.b = 1\n[a]", 2, 2, "given twice"},
		{"dotted key into a header", "[a.b]\n[a]\nb.c = 1", 3, 1, "given twice"},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			began := time.Now()
			root, err := parseDocument([]byte(test.text))
			var e *syntaxError
			if !errors.As(err, &e) || root != nil {
				t.Fatalf("got %v and error %v, want a *syntaxError", root, err)
			}
			if e.line != test.line || e.col != test.col || !strings.Contains(e.problem, test.problem) {
				t.Errorf("got %d:%d %q, want %d:%d and the words %q", e.line, e.col, e.problem, test.line, test.col, test.problem)
			}
			// Two orders above what it takes: a cost that grows with the square of the size shows.
			if took := time.Since(began); took > 20*time.Second {
				t.Errorf("took %v", took)
			}
		})
	}
}

func TestNearest(t *testing.T) {
	known := []string{"title", "threshold", "hold", "for", "from", "rise"}
	tests := []struct{ word, want string }{
		{"titel", "title"}, {"Title", "title"}, {"hodl", "hold"}, {"fro", "for"}, {"form", "from"}, {"thresholds", "threshold"},
		{"rize", "rise"}, {"colour", ""}, {"x", ""}, {"", ""}, {strings.Repeat("title", 1000), ""},
	}
	for _, test := range tests {
		if got := nearest(test.word, known); got != test.want {
			t.Errorf("nearest to %q is %q, want %q", test.word, got, test.want)
		}
	}
}
