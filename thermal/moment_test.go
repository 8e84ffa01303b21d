package thermal

import (
	"fmt"
	"testing"
)

// momentTests are read by TestParseMoment and seed FuzzParseMoment.
var momentTests = []Moment{
	{AfterStart, 0, "", "start"},
	{AfterStart, 4000 * Year, "", "4 kyr after start"},
	{BeforeEruption, 0, "", " eruption "},
	{BeforeEruption, -3 * Year, "", "3 yr before eruption"},
	{BeforeEruption, 10 * Day, "", "10 days after eruption"},
	{StartOf, 0, "wake 1", "start of wake 1"},
	{EndOf, 0, "wake 1", "end of wake 1"},
	{EndOf, 3 * Year, "wake 1", "3 yr after end of wake 1"},
	{StartOf, -3 * Year, "wake 1", "3yr before start of wake 1"},
	{Added, 0, "mantle", "mantle added"},
	{Added, 1000 * Year, "rim zone", "1 kyr after rim zone added"},
	{EndOf, 0, "before after", "end of before after"},
	{StartOf, 3 * Year, "after dark", "3 yr after start of after dark"},
	{AfterStart, 0, "", "0 s before start"},
	{BeforeEnd, 0, "", "end"},
	{BeforeEnd, 0, "", "end of path"},
	{AfterStart, 0, "", "start of path"},
	{BeforeEnd, -200 * Year, "", "200 yr before end"},
	{BeforeEnd, -200 * Year, "", "200 yr before end of path"},
	{EndOf, -200 * Year, "wake 1", "200 yr before end of wake 1"},
}

func TestParseMoment(t *testing.T) {
	for _, want := range momentTests {
		t.Run(want.Text, func(t *testing.T) {
			got, err := ParseMoment(want.Text)
			if got != want || err != nil {
				t.Errorf("got %+v and error %v, want %+v", got, err, want)
			}
		})
	}
}

// refusedMoments are read by TestParseMomentRefuses and seed FuzzParseMoment.
var refusedMoments = []struct{ text, want string }{
	{"", `is incomplete; ` + momentForms},
	{"3 yr", `"3 yr": is a duration, not a moment; write "3 yr after start" or "3 yr before eruption"`},
	{"3 yr after", `"3 yr after": is incomplete; ` + momentForms},
	{"wake 1", `"wake 1": is no moment; ` + momentForms},
	{"3 yr after wake 1", `"3 yr after wake 1": is no moment; ` + momentForms},
	{"end of ", `"end of ": is no moment; ` + momentForms},
	{" added", `" added": is no moment; ` + momentForms},
	{"3 yr before start", `"3 yr before start": lies before the start of the path; write "after start"`},
	{"3 yr after end", `"3 yr after end": lies after the end of the path; write "before end"`},
	{"-3 yr after start", `"-3 yr after start": counts a negative duration; want "after" or "before" and a positive one`},
	{"3 after start", `"3 after start": has no unit; want s, min, h, day, yr, kyr or Myr, such as "3 yr"`},
	{"750 C after start", `"750 C after start": is a temperature; want a duration in s, min, h, day, yr, kyr or Myr`},
	{"3,5 yr after start", `"3,5 yr after start": has a decimal comma; write 3.5, not 3,5`},
	{"3 ka before eruption", `"3 ka before eruption": unit "ka" ` + age + `; write kyr for a duration`},
}

func TestParseMomentRefuses(t *testing.T) {
	for _, test := range refusedMoments {
		t.Run(test.text, func(t *testing.T) {
			got, err := ParseMoment(test.text)
			checkRefused(t, err, test.text, test.want)
			if got != (Moment{}) {
				t.Errorf("a refused moment is %+v", got)
			}
		})
	}
}

func TestParseEruption(t *testing.T) {
	for _, want := range momentTests {
		t.Run(want.Text, func(t *testing.T) {
			got, err := ParseEruption(want.Text)
			about := fmt.Sprintf("%q: ", want.Text)
			switch want.Kind {
			case BeforeEruption:
				checkRefused(t, err, want.Text, about+"counts from the eruption itself; "+eruptionForms)
			case Added:
				checkRefused(t, err, want.Text, about+"counts from a zone; "+eruptionForms)
			default:
				if got != want || err != nil {
					t.Errorf("got %+v and error %v, want %+v", got, err, want)
				}
			}
		})
	}
	for _, test := range []struct{ text, want string }{
		{"1200 yr", `"1200 yr": is a duration, not a moment; write "1200 yr after start"`},
		{"wake 1", `"wake 1": is no moment; ` + eruptionForms},
		{"3 yr after", `"3 yr after": is incomplete; ` + eruptionForms},
		{"3 ka after start", `"3 ka after start": unit "ka" ` + age + `; write kyr for a duration`},
	} {
		t.Run(test.text, func(t *testing.T) {
			_, err := ParseEruption(test.text)
			checkRefused(t, err, test.text, test.want)
		})
	}
}
