package main

import (
	"cmp"
	"math"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"bankfire/paths"
	"bankfire/thermal"
)

// holds is a path of holds at temperatures, C, for years.
func holds(t *testing.T, pairs ...float64) *thermal.History {
	t.Helper()
	var legs []thermal.Leg
	for i := 0; i < len(pairs); i += 2 {
		legs = append(legs, thermal.Leg{Kind: thermal.Hold, T0: pairs[i] + thermal.ZeroCelsius, For: pairs[i+1] * thermal.Year})
	}
	h := new(thermal.History)
	if err := h.Set(legs); err != nil {
		t.Fatal(err)
	}
	return h
}

// Of a hundred and one holds of 1 to 101 years, 5 % last less than 6, half less than 51
// and 95 % less than 96; none is above its own temperature.
func TestDurationBand(t *testing.T) {
	var members []drawnMember
	for k := range 101 {
		members = append(members, drawnMember{history: holds(t, 700, float64((37*k)%101+1))})
	}
	b := durationBand(members, []float64{650 + thermal.ZeroCelsius, 701 + thermal.ZeroCelsius})
	for k, want := range []float64{6, 51, 96} {
		if got := b[k][0] / thermal.Year; math.Abs(got-want) > 1e-9 || b[k][1] != 0 {
			t.Errorf("quantile %d: %g yr and %g s, want %g and 0", k, got, b[k][1], want)
		}
	}
}

func TestHalfTemp(t *testing.T) {
	for _, test := range []struct {
		pairs []float64
		want  float64 // C
	}{{[]float64{700, 30, 800, 10}, 700}, {[]float64{700, 10, 800, 30}, 800}, {[]float64{650, 10, 700, 11, 800, 10}, 700}, {[]float64{700, 5}, 700}} {
		if got := halfTemp(holds(t, test.pairs...)) - thermal.ZeroCelsius; !(math.Abs(got-test.want) <= 1e-9) {
			t.Errorf("%v: %g C, want %g", test.pairs, got, test.want)
		}
	}
}

// A jump of temperature is one on the page; the path begins with its life and ends with 0.
func TestDrawnTrace(t *testing.T) {
	trace := drawnTrace(holds(t, 700, 30, 800, 10))
	jump := slices.IndexFunc(trace.Temp, func(temp float64) bool { return temp > 1000 })
	if jump < 1 || trace.Before[jump] != trace.Before[jump-1] || math.Abs(trace.Before[jump]/thermal.Year-10) > 1e-9 {
		t.Errorf("the jump is at place %d", jump)
	}
	last := len(trace.Before) - 1
	if math.Abs(trace.Before[0]/thermal.Year-40) > 1e-9 || trace.Before[last] != 0 {
		t.Errorf("from %g yr to %g s before eruption", trace.Before[0]/thermal.Year, trace.Before[last])
	}
	if !slices.IsSortedFunc(trace.Before, func(a, b float64) int { return cmp.Compare(b, a) }) {
		t.Error("times do not fall")
	}
}

// Along the line of equal diffusion of holds lies the hold that it was made for; it is said
// that the order of heatings cannot be seen; and a family of which nothing was run has no
// figure.
func TestFamilyShown(t *testing.T) {
	family := `[[family]]
name = "one"
draw = { method = "grid", count = 4 }
legs = [{ hold = "{store}", for = "100 yr" }]
[family.vary]
store = { choices = ["750 C", "751 C"] }
`
	dir := t.TempDir()
	text := strings.Replace(smallStudy, "[[path]]\nname = \"warm\"\nlegs = [{ hold = \"750 C\", for = \"100 yr\" }]\n", family, 1)
	for name, text := range map[string]string{"study.toml": text, "ti.csv": smallTraverse} {
		if err := os.WriteFile(filepath.Join(dir, name), []byte(text), 0o666); err != nil {
			t.Fatal(err)
		}
	}
	r, err := weighStudy(t.Context(), filepath.Join(dir, "study.toml"))
	if err != nil {
		t.Fatal(err)
	}
	fam := &r.Families[0]
	if fam.Tally.Counts[paths.Reproduces] != 2 {
		t.Fatalf("verdicts %v, want two that reproduce", fam.Tally.Counts)
	}
	f := familyShown(r, 0)
	line := f.Equal[1]
	law := fam.Elements[0].Element.Law.Law
	want := law.LnD(751+thermal.ZeroCelsius) + math.Log(100*thermal.Year)
	for i, temp := range line.Temp {
		if got := law.LnD(temp) + math.Log(line.Time[i]); !(math.Abs(got-want) <= 1e-9) {
			t.Fatalf("at %g K ln G is %g, want %g", temp, got, want)
		}
	}
	if !strings.Contains(f.Said, "Ti in HF-1") || !strings.Contains(f.Said, "not the order of its heatings") {
		t.Errorf("said: %q", f.Said)
	}
	if two := onlyHowMuch([]string{"Ti in A", "Sr in B"}); strings.Contains(two, "cooler") || !strings.HasPrefix(two, "Ti in A and Sr in B can each") {
		t.Errorf("of two elements, which know hot from long together: %q", two)
	}
	if len(f.Values) != 1 || math.Abs(f.Values[0].Lo-750) > 1e-9 || math.Abs(f.Values[0].Hi-751) > 1e-9 || f.Values[0].Unit != "°C" || len(f.Values[0].Dots) != 4 {
		t.Errorf("value %+v", f.Values)
	}
	if got := familyFigureNames(r); !slices.Equal(got, []string{"family.png"}) {
		t.Errorf("figures %q", got)
	}
	fam.Shown = paths.Shown{Drawn: []paths.Row{{Verdict: paths.Barred}}}
	if got := familyFigureNames(r); !slices.Equal(got, []string{""}) {
		t.Errorf("figures %q of members that are barred", got)
	}
}
