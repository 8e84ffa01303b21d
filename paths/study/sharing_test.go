package study

import (
	"slices"
	"strings"
	"testing"
)

// TestSharing: what the crystals share, and whom that makes a path barred for.
func TestSharing(t *testing.T) {
	const keys = `dissolves = { above = "790 C", longer = "5 yr" }`
	const why = "Q1 dissolves: it is above 790 C for 5.5 yr without a break, longer than 5 yr"
	for _, test := range []struct {
		name, history string
		whole, each   bool
		from          string
		crystal       string
	}{
		{"left out", "", true, false, "", ""},
		{"shared", `history = "shared"`, true, false, "", ""},
		{"each", `history = "each"`, false, true, "", "Q1"},
		{"shared from", `history = { shared_from = "start of wake" }`, false, false, "start of wake", "Q1"},
	} {
		t.Run(test.name, func(t *testing.T) {
			text := strings.Replace(existingText(keys), "confidence", test.history+"\nconfidence", 1)
			s, err := parse("s.toml", []byte(text), memory(soundFiles()))
			if err != nil {
				t.Fatal(err)
			}
			if s.Sharing.Whole() != test.whole || s.Sharing.Each != test.each || (s.Sharing.From != nil) != (test.from != "") {
				t.Fatalf("%+v", s.Sharing)
			}
			if got, err := s.Barred(&s.Paths[2]); err != nil || !slices.Equal(got, []Bar{{test.crystal, why}}) {
				t.Errorf("barred %q, %v", got, err)
			}
			notes := strings.Join(s.Notes, "\n")
			if alone := strings.Contains(notes, "there is nothing to share"); alone == test.whole {
				t.Errorf("notes %s", notes)
			}
			if strings.Contains(notes, `history: path "short" can only be that of all crystals, since nothing of it comes after "start of wake": the path has no leg "wake"`) != (test.from != "") {
				t.Errorf("notes %s", notes)
			}
		})
	}
}

// TestSharedFromTheEnd: there must be something to share.
func TestSharedFromTheEnd(t *testing.T) {
	text := strings.Replace(existingText(""), "confidence", "history = { shared_from = \"end\" }\nconfidence", 1)
	_, err := parse("s.toml", []byte(text), memory(soundFiles()))
	list := problems(t, err)
	if len(list) != 1 || list[0].Line != 2 || list[0].Field != "history.shared_from" || list[0].Value != "end" ||
		!strings.Contains(list[0].Problem, `at the end of the path (path "warm", and it is no better on any other)`) {
		t.Errorf("got %v", list)
	}
}
