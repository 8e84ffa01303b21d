package thermal

import (
	"errors"
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"strings"
	"testing"
)

// coldStore is 100 s at 900 K, a ramp of 10 s to 1000 K, 5 s there, a jump to 950 K and 20 s of relaxation to 900 K.
func coldStore() []Leg {
	return []Leg{
		{Kind: Hold, For: 100, T0: 900},
		{Kind: Ramp, For: 10, T0: 900, T1: 1000},
		{Kind: Hold, For: 5, T0: 1000},
		{Kind: Relax, For: 20, T0: 950, T1: 900, Tau: 5},
	}
}

func set(t testing.TB, legs []Leg) *History {
	t.Helper()
	h := new(History)
	if err := h.Set(legs); err != nil {
		t.Fatal(err)
	}
	return h
}

func TestHistoryAt(t *testing.T) {
	h := set(t, coldStore())
	end := 900 + 50*math.Exp(-4)
	for _, test := range []struct{ t, before, after float64 }{
		{-1, 900, 900}, {0, 900, 900}, {50, 900, 900}, {100, 900, 900}, {104, 940, 940}, {110, 1000, 1000},
		{115, 1000, 950}, {120, 900 + 50/math.E, 900 + 50/math.E}, {135, end, end}, {1000, end, end},
	} {
		before, after := h.At(test.t)
		closeTo(t, fmt.Sprintf("before %g s", test.t), before, test.before, 1e-12)
		closeTo(t, fmt.Sprintf("after %g s", test.t), after, test.after, 1e-12)
	}
	closeTo(t, "life", h.Life(), 135, 0)
	closeTo(t, "start of leg 3", h.Start(3), 115, 0)
	closeTo(t, "legs", float64(len(h.Legs())), 4, 0)
	lo, hi := h.Range()
	closeTo(t, "lowest", lo, 900, 0)
	closeTo(t, "highest", hi, 1000, 0)
}

// TestHistoryLegsOfNoTime: legs of no duration are jumped over, at the start, inside and at the end, also in the range.
func TestHistoryLegsOfNoTime(t *testing.T) {
	h := set(t, []Leg{
		{Kind: Hold, T0: 2000}, {Kind: Hold, For: 5, T0: 900}, {Kind: Hold, T0: 2000}, {Kind: Ramp, T0: 2000, T1: 1500},
		{Kind: Hold, For: 5, T0: 1000}, {Kind: Hold, T0: 2000},
	})
	for _, test := range []struct{ t, before, after float64 }{{0, 900, 900}, {5, 900, 1000}, {7, 1000, 1000}, {10, 1000, 1000}} {
		before, after := h.At(test.t)
		closeTo(t, fmt.Sprintf("before %g s", test.t), before, test.before, 0)
		closeTo(t, fmt.Sprintf("after %g s", test.t), after, test.after, 0)
	}
	if lo, hi := h.Range(); lo != 900 || hi != 1000 {
		t.Errorf("range %g to %g, want 900 to 1000", lo, hi)
	}
	if got := h.Breaks(nil); !slices.Equal(got, []float64{0, 5, 10}) {
		t.Errorf("breaks %v, want 0 5 10", got)
	}
	closeTo(t, "time above 1500 K", h.TimeAbove(1500), 0, 0)
}

func TestBreaks(t *testing.T) {
	legs := append(coldStore(), Leg{Kind: Table, Rows: &Rows{Time: []float64{0, 4, 4, 8}, Temp: []float64{900, 1000, 800, 900}}},
		Leg{Kind: Table, For: 3, Rows: &Rows{Time: []float64{0, 2, 4, 8}, Temp: []float64{900, 1000, 800, 900}}})
	h := set(t, legs)
	want := []float64{-7, 0, 100, 110, 115, 135, 139, 143, 145, 146}
	if got := h.Breaks([]float64{-7}); !slices.Equal(got, want) {
		t.Errorf("got %v, want %v", got, want)
	}
	closeTo(t, "life", h.Life(), 146, 0)
	closeTo(t, "a table without a duration has that of its rows", h.Legs()[4].For, 8, 0)
}

// TestBetweenBreaks: between breaks a random path is smooth, so halving the distance halves a difference; a jump would not.
func TestBetweenBreaks(t *testing.T) {
	r := rand.New(rand.NewPCG(2, 20))
	for n := range 100 {
		h := randomHistory(t, r)
		breaks := h.Breaks(nil)
		if !slices.IsSorted(breaks) || breaks[0] != 0 || breaks[len(breaks)-1] != h.Life() {
			t.Fatalf("path %d: breaks %v", n, breaks)
		}
		for range 20 {
			at := between(r, 0, h.Life())
			before, after := h.At(at)
			_, isBreak := slices.BinarySearch(breaks, at)
			if !isBreak && before != after {
				t.Errorf("path %d: jump from %g to %g K at %g s, which is no break", n, before, after, at)
			}
		}
	}
}

func TestSetRefuses(t *testing.T) {
	nan, inf := math.NaN(), math.Inf(1)
	rows := &Rows{Time: []float64{0, 5}, Temp: []float64{900, 1000}}
	sheet := func(change func(s *Sheet)) []Leg {
		s := Sheet{Magma: 1273, Host: 373, Thickness: 20, Position: 3, Kappa: 1e-6}
		change(&s)
		return []Leg{{Kind: SheetCooling, For: 5, Sheet: &s}}
	}
	tests := []struct {
		name string
		legs []Leg
		want string
	}{
		{"no leg", nil, "no duration"},
		{"no time", []Leg{{Kind: Hold, T0: 900}}, "no duration"},
		{"too many", make([]Leg, MaxLegs+1), "100001 legs or more; want at most 100000"},
		{"negative duration", []Leg{{Kind: Hold, For: 1, T0: 900}, {Kind: Hold, For: -5, T0: 900}}, `leg 2 (hold) "-5 s": negative duration`},
		{"NaN duration", []Leg{{Kind: Hold, For: nan, T0: 900}}, "not a duration"},
		{"endless", []Leg{{Kind: Hold, For: inf, T0: 900}}, "not a duration"},
		{"no temperature", []Leg{{Kind: Hold, For: 5}}, "absolute zero"},
		{"NaN temperature", []Leg{{Kind: Hold, For: 5, T0: nan}}, "not a temperature"},
		{"infinite end", []Leg{{Kind: Ramp, For: 5, T0: 900, T1: inf}}, "leg 1 (ramp)"},
		{"below absolute zero", []Leg{{Kind: Relax, For: 5, T0: 900, T1: -1, Tau: 3}}, `"-274.15 C": not above absolute zero`},
		{"no e-fold time", []Leg{{Kind: Relax, For: 5, T0: 900, T1: 800}}, "e-fold"},
		{"NaN e-fold time", []Leg{{Kind: Relax, For: 5, T0: 900, T1: 800, Tau: nan}}, "e-fold"},
		{"no sheet", []Leg{{Kind: SheetCooling, For: 5}}, "thickness and temperatures"},
		{"cold magma", sheet(func(s *Sheet) { s.Magma = 300 }), "colder than its host"},
		{"no thickness", sheet(func(s *Sheet) { s.Thickness = 0 }), "thickness"},
		{"NaN position", sheet(func(s *Sheet) { s.Position = nan }), "position"},
		{"no conduction", sheet(func(s *Sheet) { s.Kappa = 0 }), "diffusivity"},
		{"frozen host", sheet(func(s *Sheet) { s.Host = 0 }), "absolute zero"},
		{"no rows", []Leg{{Kind: Table}}, "2 rows"},
		{"table too short", []Leg{{Kind: Table, For: 6, Rows: rows}}, "longer than the table, which ends at 5 s"},
		{"table out of order", []Leg{{Kind: Table, Rows: &Rows{Time: []float64{0, 6, 5}, Temp: []float64{900, 900, 900}}}}, "leg 1 (table), row 3"},
		{"table that starts late", []Leg{{Kind: Table, Rows: &Rows{Time: []float64{1, 6}, Temp: []float64{900, 900}}}}, "not 0"},
		{"NaN in a table", []Leg{{Kind: Table, Rows: &Rows{Time: []float64{0, nan}, Temp: []float64{900, 900}}}}, "row 2"},
		{"no kind", []Leg{{Kind: 17, For: 5}}, "no known kind"},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			h := set(t, coldStore())
			err := h.Set(test.legs)
			var refused *InputError
			if !errors.As(err, &refused) || !strings.Contains(err.Error(), test.want) {
				t.Fatalf("got %v, want an *InputError with %q", err, test.want)
			}
			if h.Life() != 135 || len(h.Legs()) != 4 {
				t.Error("the history is no longer as it was before")
			}
		})
	}
}

// TestEmptyHistory: the zero value answers what it can.
func TestEmptyHistory(t *testing.T) {
	var h History
	if h.Life() != 0 || len(h.Legs()) != 0 || h.TimeAbove(0) != 0 || len(h.Names()) != 0 || len(h.Breaks(nil)) != 1 {
		t.Error("an empty history is not empty")
	}
	if ln := h.LnArrhenius(3e4, 0, 0, 1); !math.IsInf(ln, -1) {
		t.Errorf("ln of the integral along nothing is %g", ln)
	}
}

func TestMoment(t *testing.T) {
	var h History
	if err := Build(&h, []Spec{
		{Kind: SpecHold, Name: "store", Temp: 900, For: 100},
		{Kind: SpecRamp, Name: "wake", Temp: 1000, For: 10},
		{Kind: SpecHold, Temp: 600, For: 40},
	}); err != nil {
		t.Fatal(err)
	}
	if err := h.SetEruption(110); err != nil {
		t.Fatal(err)
	}
	tests := []struct {
		m       Moment
		want    float64
		problem string
	}{
		{m: Moment{Kind: AfterStart, Offset: 7}, want: 7},
		{m: Moment{Kind: AfterStart, Offset: 150 * (1 + 1e-15)}, want: 150},
		{m: Moment{Kind: BeforeEruption, Offset: -3}, want: 107},
		{m: Moment{Kind: BeforeEruption, Offset: 3}, want: 113},
		{m: Moment{Kind: BeforeEnd}, want: 150},
		{m: Moment{Kind: BeforeEnd, Offset: -30}, want: 120},
		{m: Moment{Kind: StartOf, Name: "wake"}, want: 100},
		{m: Moment{Kind: EndOf, Name: "wake", Offset: 2}, want: 112},
		{m: Moment{Kind: EndOf, Name: "wake", Offset: -2}, want: 108},
		{m: Moment{Kind: AfterStart, Offset: 2 * Year, Text: "2 yr after start"}, problem: `"2 yr after start": 2 yr after the end of the path; want a moment within its 2.5 min`},
		{m: Moment{Kind: StartOf, Name: "store", Offset: -1, Text: "1 s before start of store"}, problem: "1 s before the start of the path"},
		{m: Moment{Kind: EndOf, Name: "wale", Text: "end of wale"}, problem: `"end of wale": the path has no leg "wale"; the nearest is "wake"`},
		{m: Moment{Kind: EndOf, Name: strings.Repeat("w", 65), Text: "end of w"}, problem: `; the first that it has is "store"`},
		{m: Moment{Kind: Added, Name: "mantle"}, problem: "zone"},
		{m: Moment{Kind: AfterStart, Offset: math.NaN()}, problem: "not a finite time"},
	}
	for _, test := range tests {
		t.Run(fmt.Sprint(test.m), func(t *testing.T) {
			got, err := h.Moment(test.m)
			var refused *InputError
			switch {
			case test.problem == "" && err != nil:
				t.Error(err)
			case test.problem == "":
				closeTo(t, "moment", got, test.want, 0)
			case !errors.As(err, &refused) || !strings.Contains(err.Error(), test.problem):
				t.Errorf("got %g and %v, want an *InputError with %q", got, err, test.problem)
			}
		})
	}
}

// TestMomentWithoutNames: the remedy is to name a leg.
func TestMomentWithoutNames(t *testing.T) {
	_, err := set(t, coldStore()).Moment(Moment{Kind: EndOf, Name: "wake", Text: "end of wake"})
	if want := `"end of wake": the path has no leg "wake"; name a leg: name = "wake"`; err == nil || err.Error() != want {
		t.Errorf("got %v, want %s", err, want)
	}
}

func TestSetEruption(t *testing.T) {
	h := set(t, coldStore())
	closeTo(t, "eruption at the end", h.Eruption(), 135, 0)
	closeTo(t, "above 899 K", h.TimeAbove(899), 135, 1e-12)
	for _, bad := range []float64{-1, 0, 136, math.NaN(), math.Inf(1)} {
		if err := h.SetEruption(bad); err == nil || h.Eruption() != 135 {
			t.Errorf("eruption at %g s: %v, eruption now at %g", bad, err, h.Eruption())
		}
	}
	if err := h.SetEruption(112); err != nil {
		t.Fatal(err)
	}
	closeTo(t, "above 899 K until the eruption", h.TimeAbove(899), 112, 1e-12)
	closeTo(t, "above 950 K until the eruption", h.TimeAbove(950), 5+2, 1e-12)
	closeTo(t, "the path goes on", h.Life(), 135, 0)
	if err := h.Set(coldStore()); err != nil {
		t.Fatal(err)
	}
	closeTo(t, "set anew", h.Eruption(), 135, 0)
}

func TestTimeText(t *testing.T) {
	for want, seconds := range map[string]float64{
		"0 s": 0, "59 s": 59, "1.5 min": 90, "2 h": 7200, "10 day": 10 * Day, "3.5 yr": 3.5 * Year, "12 kyr": 12e3 * Year,
		"-2 Myr": -2e6 * Year, "NaN s": math.NaN(),
	} {
		if got := timeText(seconds); got != want {
			t.Errorf("%g s is written %q, want %q", seconds, got, want)
		}
	}
}

// TestNoAllocation: setting a history again, and asking it anything but a curve, allocates nothing.
func TestNoAllocation(t *testing.T) {
	r := rand.New(rand.NewPCG(2, 21))
	var sets [][]Leg
	for range 20 {
		sets = append(sets, slices.Clone(randomHistory(t, r).Legs()))
	}
	var h History
	breaks := make([]float64, 0, 1000)
	next, sum := 0, 0.0
	work := func() {
		if err := h.Set(sets[next%len(sets)]); err != nil {
			t.Fatal(err)
		}
		next++
		half := h.Life() / 2
		before, after := h.At(half)
		lo, hi := h.Range()
		breaks = h.Breaks(breaks[:0])
		sum += h.LnArrhenius(3e4, 0, 0, half) + h.LnArrhenius(-3e3, 1, half, h.Life()) + h.TimeAbove(1000) + before + after + lo + hi
		sum += math.Exp(h.LnArrheniusIn(3e4, 0, Window{Above: 900, Below: 1000}, 0, half))
		at, err := h.Moment(Moment{Kind: AfterStart, Offset: half})
		if err != nil {
			t.Fatal(err)
		}
		sum += at
	}
	for range sets { // grow to the largest
		work()
	}
	if n := testing.AllocsPerRun(100, work); n != 0 {
		t.Errorf("%g allocations a history, want none", n)
	}
	if math.IsNaN(sum) {
		t.Error("NaN")
	}
}

// TestJumps: between legs and inside a table, by hand; a rise that is no jump, legs of no time and what is too small
// are none.
func TestJumps(t *testing.T) {
	hold := func(temp float64) Leg { return Leg{Kind: Hold, For: 10, T0: temp} }
	table := Leg{Kind: Table, Rows: &Rows{Time: []float64{0, 5, 5, 5, 8, 10, 10}, Temp: []float64{1000, 1010, 1500, 1100, 1100, 1100, 1200}}}
	for _, test := range []struct {
		name string
		legs []Leg
		part float64
		want []float64
	}{
		{"one hold", []Leg{hold(1000)}, 1e-4, nil},
		{"two holds", []Leg{hold(1000), hold(900)}, 1e-4, []float64{10}},
		{"a ramp between", []Leg{hold(1000), {Kind: Ramp, For: 5, T0: 1000, T1: 900}, hold(900)}, 1e-4, nil},
		{"an excursion of no time", []Leg{hold(1000), {Kind: Hold, T0: 1300}, hold(1000)}, 1e-4, nil},
		{"small and large", []Leg{hold(1000), hold(1000.5), hold(900), hold(1200)}, 0.01, []float64{20, 30}},
		{"all", []Leg{hold(1000), hold(1000.5), hold(900), hold(1200)}, 0, []float64{10, 20, 30}},
		{"a table", []Leg{hold(1000), table, hold(1200)}, 1e-4, []float64{15, 20}},
	} {
		if got := set(t, test.legs).Jumps(nil, test.part); !slices.Equal(got, test.want) {
			t.Errorf("%s: jumps at %v, want %v", test.name, got, test.want)
		}
	}
}

// TestRangeIn: no time between is colder or hotter, and some are about as cold and as
// hot.
func TestRangeIn(t *testing.T) {
	const (
		samples = 2000
		about   = 0.005 // of the temperature, which sheets pass between the samples
		steep   = 1e-4  // of it, by which times that are rounded may be off where a table is steep
	)
	for i := range 100 {
		r := rand.New(rand.NewPCG(17, uint64(i)))
		h := randomHistory(t, r)
		t0 := h.Life() * r.Float64()
		t1 := t0 + (h.Life()-t0)*r.Float64()
		lo, hi := h.RangeIn(t0, t1)
		_, first := h.At(t0)
		last, _ := h.At(t1)
		coldest, hottest := min(first, last), max(first, last)
		see := func(at float64) {
			if before, after := h.At(at); t0 < at && at < t1 {
				coldest, hottest = min(coldest, before, after), max(hottest, before, after)
			}
		}
		for _, at := range h.Breaks(nil) {
			see(at)
		}
		for k := range samples {
			see(t0 + (t1-t0)*math.Pow(float64(k)/samples, 3))
		}
		if !(lo <= coldest*(1+steep) && hi >= hottest*(1-steep) && lo >= coldest*(1-about) && hi <= hottest*(1+about)) {
			t.Errorf("path %d: %g to %g K from %g to %g s, but some are %g to %g K", i, lo, hi, t0, t1, coldest, hottest)
		}
	}
	h := randomHistory(t, rand.New(rand.NewPCG(17, 0)))
	if lo, hi := h.RangeIn(5, 5); !math.IsInf(lo, 1) || !math.IsInf(hi, -1) {
		t.Errorf("%g to %g K in no time", lo, hi)
	}
}
