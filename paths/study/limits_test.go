package study

import (
	"errors"
	"math"
	"slices"
	"strings"
	"testing"

	"bankfire/thermal"
)

// twoWakes lives 1000 yr until eruption: 700 C but for wake 1, from 500 to 520
// yr at 800 C, and wake 2, a ramp from 700 to 800 C over the last 10 yr; then
// it cools to 20 C.
const twoWakes = `[
  { name = "store 1", hold = "700 C", for = "500 yr" },
  { name = "wake 1", hold = "800 C", for = "20 yr" },
  { name = "store 2", hold = "700 C", for = "470 yr" },
  { name = "wake 2", ramp = "800 C", for = "10 yr" },
  { name = "tail", ramp = "20 C", for = "1 yr" },
]
eruption = "end of wake 2"`

// withLimits reads the sound study with the path above and the limits.
func withLimits(t *testing.T, limits string) *Study {
	t.Helper()
	before, rest, _ := strings.Cut(sound, "legs = [")
	_, after, _ := strings.Cut(rest, "\n]\n")
	text := before + "legs = " + twoWakes + "\n[limits]\n" + limits + "\n" + after
	s, err := parse("s.toml", []byte(text), memory(soundFiles()))
	if err != nil {
		t.Fatal(err)
	}
	return s
}

func TestLimits(t *testing.T) {
	for _, test := range []struct {
		name, limits string
		want         []string // nil: keeps them
	}{
		{"life within", `life = { shortest = "1 kyr", longest = "1000 yr" }`, nil},
		{"life too short", `life = { shortest = "2 kyr" }`, []string{"its life is 1 kyr, shorter than 2 kyr"}},
		{"life too long", `life = { longest = "999 yr" }`, []string{"its life is 1 kyr, longer than 999 yr"}},
		{"cold enough for the lowest, which stops at eruption", `lowest = "700 C"`, nil},
		{"too cold", `lowest = "701 C"`, []string{`it is as cold as 700 C in "store 1", colder than 701 C`}},
		{"below the highest", `highest = "800 C"`, nil},
		{"above the highest", `highest = "790 C"`, []string{`it gets above 790 C for 21 yr, 20 yr of it in "wake 1"`}},
		{"a threshold kept", `above = [ { threshold = "lock-up", shortest = "25 yr", longest = "25 yr" } ]`, nil},
		{"hot for too long, no leg alone", `above = [ { threshold = "lock-up", longest = "24 yr" } ]`,
			[]string{"it is above lock-up (750 C) for 25 yr, longer than 24 yr"}},
		{"hot for too long in one leg", `above = [ { temperature = "750 C", longest = "19 yr" } ]`,
			[]string{`it is above 750 C for 25 yr, 20 yr of it in "wake 1", longer than 19 yr`}},
		{"hot for too short", `above = [ { temperature = "750 C", shortest = "26 yr" } ]`,
			[]string{"it is above 750 C for 25 yr, shorter than 26 yr"}},
		{"without a break, kept", `above = [ { temperature = "750 C", longest = "20 yr", counts = "without a break" } ]`, nil},
		{"without a break, broken", `above = [ { temperature = "750 C", longest = "19 yr", counts = "without a break" } ]`,
			[]string{`it is above 750 C for 20 yr without a break in "wake 1", longer than 19 yr`}},
		{"never that hot", `above = [ { temperature = "790 C", longest = "0 yr" }, { temperature = "801 C", longest = "0 yr" } ]`,
			[]string{`it gets above 790 C for 21 yr, 20 yr of it in "wake 1"`}},
		{"between, kept", `between = [ { from = "end of wake 1", to = "start of wake 2", shortest = "470 yr", longest = "470 yr" } ]`, nil},
		{"between, too short", `between = [ { from = "end of wake 1", to = "eruption", shortest = "1 kyr" } ]`,
			[]string{`from "end of wake 1" to "eruption" it takes 480 yr, shorter than 1 kyr`}},
		{"between, too long", `between = [ { from = "start", to = "start of wake 2", longest = "1 yr" } ]`,
			[]string{`from "start" to "start of wake 2" it takes 990 yr, longer than 1 yr`}},
		{"between, the other way round", `between = [ { from = "end of wake 2", to = "start of wake 1", longest = "1 yr" } ]`,
			[]string{`"end of wake 2" comes 500 yr after "start of wake 1"`}},
		{"between, to the end", `between = [ { from = "eruption", to = "end", shortest = "2 yr" } ]`,
			[]string{`from "eruption" to "end" it takes 1 yr, shorter than 2 yr`}},
		{"several", "life = { longest = \"1 yr\" }\nlowest = \"710 C\"",
			[]string{"its life is 1 kyr, longer than 1 yr", `it is as cold as 700 C in "store 1", colder than 710 C`}},
	} {
		t.Run(test.name, func(t *testing.T) {
			s := withLimits(t, test.limits)
			got, err := s.Limits.Barred(s.Paths[0].History)
			if err != nil || !slices.Equal(got, test.want) {
				t.Errorf("reasons %q, error %v, want %q", got, err, test.want)
			}
		})
	}
}

func TestNoLimits(t *testing.T) {
	s, err := parse("s.toml", []byte(sound), memory(soundFiles()))
	if err != nil {
		t.Fatal(err)
	}
	if got, err := s.Limits.Barred(s.Paths[0].History); err != nil || got != nil {
		t.Errorf("reasons %q, error %v", got, err)
	}
}

// TestLimitOfZone: that a zone was added is a moment of no path.
func TestLimitOfZone(t *testing.T) {
	s := withLimits(t, `lowest = "600 C"`)
	m, err := thermal.ParseMoment("mantle added")
	if err != nil {
		t.Fatal(err)
	}
	l := Limits{Between: []Interval{{From: m, To: m, Most: math.Inf(1)}}}
	reasons, err := l.Barred(s.Paths[0].History)
	var in *thermal.InputError
	if reasons != nil || !errors.As(err, &in) {
		t.Errorf("reasons %q, error %v, want an input error", reasons, err)
	}
}

// TestBarredPaths: a moment of a rim that one path lacks bars that path alone;
// a limit between legs does not concern it.
func TestBarredPaths(t *testing.T) {
	text := strings.Replace(sound, "[[crystal]]\n", `[[path]]
name = "short"
legs = [ { name = "store", hold = "750 C", for = "90 yr" } ]

[[path]]
name = "no wake"
legs = [ { hold = "750 C", for = "900 yr" } ]

[limits]
between = [
  { from = "end of store", to = "end of wake", longest = "1 yr" },
  { from = "start", to = "700 yr after start", longest = "1 kyr" },
]

[[crystal]]
`, 1)
	text = strings.Replace(text, `rim = { held = "skin" }`,
		`rim = [ { held = "skin" }, { held = "60 ppm", from = "100 yr after start" }, { held = "70 ppm", from = "1 yr after start of wake" } ]`, 1)
	s, err := parse("s.toml", []byte(text), memory(soundFiles()))
	if err != nil {
		t.Fatal(err)
	}
	want := [][]Bar{nil,
		{{"Q1", `the rim of Ti in Q1 from "100 yr after start": 10 yr after the end of the path`},
			{"Q1", `the rim of Ti in Q1 from "1 yr after start of wake": the path has no leg "wake"`}},
		{{"Q1", `the rim of Ti in Q1 from "1 yr after start of wake": the path has no leg "wake"`}},
	}
	for i, p := range s.Paths {
		if !slices.Equal(p.Barred, want[i]) {
			t.Errorf("%s: barred %q, want %q", p.Name, p.Barred, want[i])
		}
	}
	for i, want := range [][]string{{`from "end of store" to "end of wake" it takes 5 yr, longer than 1 yr`}, {`"700 yr after start": 610 yr after the end of the path`}, nil} {
		got, err := s.Limits.Barred(s.Paths[i].History)
		if err != nil || !slices.Equal(got, want) {
			t.Errorf("%s: limits say %q, %v, want %q", s.Paths[i].Name, got, err, want)
		}
	}
	const note = `the limit from "end of store" to "end of wake" concerns 1 of the 3 paths: the others do not have its legs`
	if !slices.Contains(s.Notes, note) {
		t.Errorf("notes %q", s.Notes)
	}
}
