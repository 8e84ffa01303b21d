package study

import (
	"math"
	"slices"
	"strings"
	"testing"
)

// existing is the sound study with two more paths and more keys of its crystal.
func existing(t *testing.T, keys string) (*Study, error) {
	t.Helper()
	return parse("s.toml", []byte(existingText(keys)), memory(soundFiles()))
}

func existingText(keys string) string {
	text := strings.Replace(sound, "[[crystal]]\n", `[[path]]
name = "short"
legs = [ { name = "store", hold = "750 C", for = "30 yr" } ]

[[path]]
name = "hot"
legs = [
  { name = "store", hold = "750 C", for = "100 yr" },
  { name = "first", hold = "800 C", for = "1 yr" },
  { name = "rest", hold = "700 C", for = "1 yr" },
  { name = "wake", ramp = "820 C", for = "10 yr" },
  { hold = "810 C", for = "3 yr" },
]

[[crystal]]
`, 1)
	return strings.Replace(text, "shape = \"slab\"\n", "shape = \"slab\"\n"+keys+"\n", 1)
}

// TestExistence: which paths are barred for what a crystal of one moment and one
// solubility cannot have seen.
func TestExistence(t *testing.T) {
	for _, test := range []struct {
		name, keys string
		want       [3]string // of warm, short and hot; "" is not barred
		begins     [3]float64
	}{
		{"from a time on", `exists_from = "50 yr after start"`,
			[3]string{"", `Q1 exists from "50 yr after start": the path ends before that`, ""}, [3]float64{50, math.NaN(), 50}},
		{"at the end", `exists_from = "30 yr after start"`,
			[3]string{"", `Q1 exists from "30 yr after start": the path ends before that`, ""}, [3]float64{30, math.NaN(), 30}},
		{"before the start", `exists_from = "100 yr before eruption"`,
			[3]string{"", `Q1 exists from "100 yr before eruption": 70 yr before the start of the path`, ""}, [3]float64{705, math.NaN(), 15}},
		{"with a leg", `exists_from = "start of wake"`,
			[3]string{"", `Q1 exists from "start of wake": the path has no leg "wake"`, ""}, [3]float64{800, math.NaN(), 102}},
		// hot is above 790 C for 1 yr in first and, from 0.75 of the ramp from 700 to 820 C on, for 2.5 + 3 yr
		{"too hot for too long", `dissolves = { above = "790 C", longer = "5 yr" }`,
			[3]string{"", "", "Q1 dissolves: it is above 790 C for 5.5 yr without a break, longer than 5 yr"}, [3]float64{}},
		{"not in one stretch", `dissolves = { above = "790 C", longer = "6 yr" }`, [3]string{}, [3]float64{}},
		{"never", `dissolves = { above = "790 C", longer = "0 s" }`,
			[3]string{"", "", "Q1 dissolves: it gets above 790 C for 5.5 yr without a break"}, [3]float64{}},
		{"in a leg", `dissolves = { above = "780 C", longer = "100 day" }` + "\nexists_from = \"50 yr after start\"",
			[3]string{"", `Q1 exists from "50 yr after start": the path ends before that`,
				"Q1 dissolves: it is above 780 C for 6.333 yr without a break, longer than 100 day"}, [3]float64{50, math.NaN(), 50}},
		{"before it exists", `dissolves = { above = "790 C", longer = "0 s" }` + "\nexists_from = \"1 yr before end\"",
			[3]string{"", "", "Q1 dissolves: it gets above 790 C for 1 yr without a break"}, [3]float64{804, 29, 114}},
	} {
		t.Run(test.name, func(t *testing.T) {
			s, err := existing(t, test.keys)
			if err != nil {
				t.Fatal(err)
			}
			for i := range s.Paths {
				p := &s.Paths[i]
				bars, err := s.Barred(p)
				got := Whys(bars)
				var want []string
				if test.want[i] != "" {
					want = []string{test.want[i]}
				}
				if err != nil || !slices.Equal(got, want) {
					t.Errorf("%s: barred %q, %v, want %q", p.Name, got, err, want)
				}
				begins, err := s.Crystals[0].Begins(p.History)
				if math.IsNaN(test.begins[i]) != (err != nil) {
					t.Errorf("%s: begins %g, %v", p.Name, begins, err)
				}
				if err == nil {
					near(t, "begins", begins, test.begins[i]*yr)
				}
			}
		})
	}
}

// TestExistenceNamesTheLeg: the leg in which a crystal dissolves by itself.
func TestExistenceNamesTheLeg(t *testing.T) {
	s, err := existing(t, `dissolves = { above = "750 C", longer = "4 yr" }`)
	if err != nil {
		t.Fatal(err)
	}
	bars, err := s.Barred(&s.Paths[0])
	got := Whys(bars)
	if want := `Q1 dissolves: it is above 750 C for 5 yr without a break in "wake", longer than 4 yr`; err != nil || len(got) != 1 || got[0] != want {
		t.Errorf("got %q, %v, want %q", got, err, want)
	}
}

// TestExistenceOnNoPath: a crystal that no path can have seen is a mistake.
func TestExistenceOnNoPath(t *testing.T) {
	_, err := existing(t, `exists_from = "2 kyr after start"`)
	list := problems(t, err)
	if len(list) != 1 || list[0].Line == 0 || list[0].Field != "crystal.exists_from" ||
		!strings.Contains(list[0].Problem, `the path ends before that (path "warm", and it is no better on any other)`) {
		t.Errorf("got %v", list)
	}
}
