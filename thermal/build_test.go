package thermal

import (
	"errors"
	"fmt"
	"math"
	"os"
	"slices"
	"strings"
	"testing"
)

// built is the path of the specs.
func built(t *testing.T, specs ...Spec) *History {
	t.Helper()
	h := new(History)
	if err := Build(h, specs); err != nil {
		t.Fatal(err)
	}
	return h
}

// sameLegs fails the test unless h has the wanted legs, numbers within rounding.
func sameLegs(t *testing.T, h *History, want ...Leg) {
	t.Helper()
	got := h.Legs()
	if len(got) != len(want) {
		t.Fatalf("got %d legs %v, want %d", len(got), got, len(want))
	}
	for i, w := range want {
		g := got[i]
		if g.Kind != w.Kind {
			t.Errorf("leg %d is a %s, want a %s", i, g.Kind, w.Kind)
		}
		closeTo(t, fmt.Sprintf("duration of leg %d", i), g.For, w.For, 1e-14*w.For)
		closeTo(t, fmt.Sprintf("T0 of leg %d", i), g.T0, w.T0, 1e-12)
		closeTo(t, fmt.Sprintf("T1 of leg %d", i), g.T1, w.T1, 1e-12)
		closeTo(t, fmt.Sprintf("e-fold time of leg %d", i), g.Tau, w.Tau, 0)
	}
}

var (
	store  = Spec{Kind: SpecHold, Name: "store", Temp: 963.15, For: 6000}
	reheat = Spec{Kind: SpecReheat, Name: "wake", Temp: 1043.15, Rise: 2, Dwell: 15, Efold: 10, For: 80}
)

func TestBuildReheat(t *testing.T) {
	rise := Leg{Kind: Ramp, For: 2, T0: 963.15, T1: 1043.15}
	dwell := Leg{Kind: Hold, For: 15, T0: 1043.15}
	back := func(duration float64) Leg {
		return Leg{Kind: Relax, For: duration, T0: 1043.15, T1: 963.15, Tau: 10}
	}
	first := Leg{Kind: Hold, For: 6000, T0: 963.15}
	tests := []struct {
		name   string
		change func(s *Spec)
		want   []Leg
	}{
		{"for counts the whole reheat", func(s *Spec) {}, []Leg{first, rise, dwell, back(63)}},
		{"without for it ends within 1 K", func(s *Spec) { s.For = 0 }, []Leg{first, rise, dwell, back(10 * math.Log(80))}},
		{"for at the end of the dwell", func(s *Spec) { s.For = 17 }, []Leg{first, rise, dwell}},
		{"no rise", func(s *Spec) { s.Rise = 0 }, []Leg{first, dwell, back(65)}},
		{"no dwell", func(s *Spec) { s.Dwell = 0 }, []Leg{first, rise, back(78)}},
		{"from another temperature", func(s *Spec) { s.From = 900 }, []Leg{first,
			{Kind: Ramp, For: 2, T0: 900, T1: 1043.15}, dwell, {Kind: Relax, For: 63, T0: 1043.15, T1: 900, Tau: 10}}},
		{"peak within 1 K", func(s *Spec) { s.Temp, s.For = 963.65, 0 }, []Leg{first,
			{Kind: Ramp, For: 2, T0: 963.15, T1: 963.65}, {Kind: Hold, For: 15, T0: 963.65}}},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			s := reheat
			test.change(&s)
			sameLegs(t, built(t, store, s), test.want...)
		})
	}
}

// TestBuildJumpsBack: what a reheat has not cooled is a jump to the temperature that it rose from.
func TestBuildJumpsBack(t *testing.T) {
	short := reheat
	short.For = 20 // 3 s of cooling
	h := built(t, store, short, Spec{Kind: SpecRamp, Temp: 1000, For: 5})
	end := 963.15 + 80*math.Exp(-0.3)
	before, after := h.At(6020)
	closeTo(t, "before the jump", before, end, 1e-12)
	closeTo(t, "after the jump", after, 963.15, 1e-12)
	unlimited := reheat
	unlimited.For = 0
	h = built(t, store, unlimited, Spec{Kind: SpecRamp, Temp: 1000, For: 5})
	before, after = h.At(h.Start(4))
	closeTo(t, "before the jump, without for", before, 964.15, 1e-10)
	closeTo(t, "after the jump, without for", after, 963.15, 1e-12)
}

// TestBuildChains: a leg begins where the one before it ended, whatever kind that was.
func TestBuildChains(t *testing.T) {
	rows := &Rows{Time: []float64{0, 5, 8}, Temp: []float64{900, 1000, 870}}
	sheet := &Sheet{Host: 373, Thickness: 20, Position: 3, Kappa: 1e-6}
	h := built(t,
		Spec{Kind: SpecTable, Rows: rows},
		Spec{Kind: SpecRamp, Temp: 950, For: 10},
		Spec{Kind: SpecRelax, Temp: 850, For: 20, Efold: 10},
		Spec{Kind: SpecRamp, Temp: 950, For: 10},
		Spec{Kind: SpecRamp, Temp: 940, For: 10, From: 990},
		Spec{Kind: SpecSheet, Temp: 1273, Sheet: sheet, For: 1e8},
		Spec{Kind: SpecRamp, Temp: 950, For: 10},
	)
	s := *sheet
	s.Magma = 1273
	relaxed := 850 + 100*math.Exp(-2)
	sameLegs(t, h,
		Leg{Kind: Table, For: 8},
		Leg{Kind: Ramp, For: 10, T0: 870, T1: 950},
		Leg{Kind: Relax, For: 20, T0: 950, T1: 850, Tau: 10},
		Leg{Kind: Ramp, For: 10, T0: relaxed, T1: 950},
		Leg{Kind: Ramp, For: 10, T0: 990, T1: 940},
		Leg{Kind: SheetCooling, For: 1e8},
		Leg{Kind: Ramp, For: 10, T0: s.At(1e8), T1: 950},
	)
	if sheet.Magma != 0 {
		t.Error("the spec's sheet is changed")
	}
}

func TestBuildNames(t *testing.T) {
	wake := Spec{Kind: SpecRamp, Name: "wake", Temp: 1000, For: 5, From: 900}
	rest := Spec{Kind: SpecHold, Temp: 900, For: 2}
	inner := Spec{Kind: SpecRepeat, Name: "pair", Times: 2, Legs: []Spec{wake, rest}}
	tests := []struct {
		name  string
		specs []Spec
		want  []Named
	}{
		{"a reheat is one stretch", []Spec{store, reheat}, []Named{{"store", 0, 6000}, {"wake", 6000, 6080}}},
		{"counted in a repeat", []Spec{rest, {Kind: SpecRepeat, Times: 3, Legs: []Spec{wake}}},
			[]Named{{"wake 1", 2, 7}, {"wake 2", 7, 12}, {"wake 3", 12, 17}}},
		{"once is counted, too", []Spec{{Kind: SpecRepeat, Times: 1, Legs: []Spec{wake}}}, []Named{{"wake 1", 0, 5}}},
		{"a repeat has one name", []Spec{inner}, []Named{{"pair", 0, 14}, {"wake 1", 0, 5}, {"wake 2", 7, 12}}},
		{"nested, counted through", []Spec{{Kind: SpecRepeat, Times: 2, Legs: []Spec{inner}}},
			[]Named{{"pair 1", 0, 14}, {"wake 1", 0, 5}, {"wake 2", 7, 12}, {"pair 2", 14, 28}, {"wake 3", 14, 19}, {"wake 4", 21, 26}}},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			if got := built(t, test.specs...).Names(); !slices.Equal(got, test.want) {
				t.Errorf("got %v, want %v", got, test.want)
			}
		})
	}
}

// TestBuildFull: as many legs as are allowed are built; one more is not, however they are nested, and costs nothing.
func TestBuildFull(t *testing.T) {
	many := func(times ...int) Spec {
		s := Spec{Kind: SpecHold, Temp: 900, For: 1}
		for _, n := range times {
			s = Spec{Kind: SpecRepeat, Times: n, Legs: []Spec{s}, Place: Place{File: "s.toml", Line: 9}}
		}
		return s
	}
	h := built(t, many(1000, 100))
	closeTo(t, "life", h.Life(), MaxLegs, 0)
	for _, s := range []Spec{many(MaxLegs + 1), many(1000, 1000), many(math.MaxInt, math.MaxInt, math.MaxInt)} {
		var err error
		allocated := testing.AllocsPerRun(1, func() { err = Build(h, []Spec{s}) })
		var refused *InputError
		if !errors.As(err, &refused) || refused.Line != 9 || !strings.Contains(err.Error(), "want at most 100000") {
			t.Errorf("got %v, want an *InputError about too many legs", err)
		}
		if !(allocated < 100) {
			t.Errorf("%g allocations before the refusal", allocated)
		}
	}
	closeTo(t, "life afterwards", h.Life(), MaxLegs, 0)
}

func TestBuildRefuses(t *testing.T) {
	at := Place{File: "s.toml", Line: 12, Col: 5, Field: "legs"}
	nan := math.NaN()
	hold := Spec{Kind: SpecHold, Temp: 900, For: 5}
	tests := []struct {
		name  string
		specs []Spec
		want  string
	}{
		{"no legs", nil, "no duration"},
		{"first ramp", []Spec{{Kind: SpecRamp, Temp: 900, For: 5}}, `s.toml:12:5: legs: nothing before this ramp says where it begins; write from = "690 C", say`},
		{"first relax", []Spec{{Kind: SpecRelax, Temp: 900, For: 5, Efold: 5}}, "nothing before this relax"},
		{"first reheat", []Spec{reheat}, "nothing before this reheat"},
		{"hold without for", []Spec{{Kind: SpecHold, Temp: 900}}, "hold without a duration"},
		{"negative for", []Spec{{Kind: SpecHold, Temp: 900, For: -3}}, `"-3 s": negative duration`},
		{"NaN for", []Spec{hold, {Kind: SpecRamp, Temp: 900, For: nan}}, "not a duration"},
		{"no temperature", []Spec{{Kind: SpecHold, For: 3}}, "absolute zero"},
		{"from NaN", []Spec{{Kind: SpecRamp, Temp: 900, For: 3, From: nan}}, "not a temperature"},
		{"from below absolute zero", []Spec{{Kind: SpecRamp, Temp: 900, For: 3, From: -4}}, "absolute zero"},
		{"hold from", []Spec{{Kind: SpecHold, Temp: 900, For: 3, From: 800}}, "hold with from"},
		{"relax without e-fold", []Spec{hold, {Kind: SpecRelax, Temp: 900, For: 5}}, "e-fold"},
		{"reheat without e-fold", []Spec{hold, {Kind: SpecReheat, Temp: 990, Dwell: 5}}, "e-fold"},
		{"reheat too short", []Spec{hold, {Kind: SpecReheat, Temp: 990, Rise: 5, Dwell: 5, Efold: 1, For: 9}}, `"9 s": shorter than rise and dwell together, 10 s`},
		{"reheat downwards", []Spec{hold, {Kind: SpecReheat, Temp: 890, Efold: 1}}, `"616.85 C": peak below 626.85 C`},
		{"NaN rise", []Spec{hold, {Kind: SpecReheat, Temp: 990, Rise: nan, Efold: 1}}, "not a duration"},
		{"sheet without a sheet", []Spec{{Kind: SpecSheet, Temp: 900, For: 3}}, "thickness"},
		{"table without rows", []Spec{{Kind: SpecTable}}, "2 rows"},
		{"repeat of nothing", []Spec{{Kind: SpecRepeat, Times: 3}}, "repeat of no legs"},
		{"repeat never", []Spec{{Kind: SpecRepeat, Legs: []Spec{hold}}}, `"0": repeats less than once`},
		{"repeat with for", []Spec{{Kind: SpecRepeat, Times: 2, For: 4, Legs: []Spec{hold}}}, "repeat with a duration"},
		{"wrong inside a repeat", []Spec{{Kind: SpecRepeat, Times: 2, Legs: []Spec{{Kind: SpecHold, Temp: 900}}}}, "hold without a duration"},
		{"one name twice", []Spec{store, store}, `"store": second leg of this name`},
		{"a counted name taken", []Spec{{Kind: SpecHold, Name: "wake 2", Temp: 900, For: 5},
			{Kind: SpecRepeat, Times: 2, Legs: []Spec{{Kind: SpecHold, Name: "wake", Temp: 900, For: 5}}}}, `"wake 2": second leg of this name`},
		{"no kind", []Spec{{Kind: 99, Temp: 900, For: 5}}, "no known kind"},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			placed := placeAll(test.specs, at)
			h := set(t, coldStore())
			err := Build(h, placed)
			var refused *InputError
			if !errors.As(err, &refused) || !strings.Contains(err.Error(), test.want) {
				t.Fatalf("got %v, want an *InputError with %q", err, test.want)
			}
			if len(test.specs) > 0 && (refused.File != at.File || refused.Line != at.Line) {
				t.Errorf("error %q stands nowhere", err)
			}
			if h.Life() != 135 {
				t.Error("the history is no longer as it was before")
			}
		})
	}
}

// placeAll is a copy of the specs, all at one place.
func placeAll(specs []Spec, at Place) []Spec {
	placed := slices.Clone(specs)
	for i := range placed {
		placed[i].Place = at
		placed[i].Legs = placeAll(placed[i].Legs, at)
	}
	return placed
}

// TestBuildJoinsErrors: what is wrong with each leg by itself is reported at once.
func TestBuildJoinsErrors(t *testing.T) {
	var h History
	err := Build(&h, []Spec{
		{Kind: SpecHold, Temp: 900, Place: Place{Line: 1}},
		{Kind: SpecRepeat, Times: 0, Place: Place{Line: 2}, Legs: []Spec{{Kind: SpecHold, For: 3, Place: Place{Line: 3}}}},
	})
	for _, want := range []string{"line 1: hold without", `line 2: "0": repeats`, `line 3: "-273.15 C"`} {
		if err == nil || !strings.Contains(err.Error(), want) {
			t.Errorf("got %v, want it to contain %q", err, want)
		}
	}
}

// FuzzBuild: no specs make Build panic. It refuses with an *InputError, or makes a path of finite temperatures whose
// integral is a number.
func FuzzBuild(f *testing.F) {
	f.Fuzz(func(t *testing.T, data []byte) {
		r := specReader{data: data}
		specs := r.specs(4)
		var h History
		if err := Build(&h, specs); err != nil {
			var refused *InputError
			if !errors.As(err, &refused) || h.Life() != 0 {
				t.Fatalf("error %v, life %g", err, h.Life())
			}
			return
		}
		lo, hi := h.Range()
		if !(lo >= coldest && hi <= hottest && h.Life() > 0) || math.IsInf(h.Life(), 0) || len(h.Legs()) > MaxLegs {
			t.Fatalf("%d legs, life %g s, %g to %g K", len(h.Legs()), h.Life(), lo, hi)
		}
		for _, n := range h.Names() {
			if !(n.Start >= 0 && n.Start <= n.End && n.End <= h.Life()) {
				t.Fatalf("%q from %g to %g s of %g s", n.Name, n.Start, n.End, h.Life())
			}
		}
		for _, at := range []float64{0, h.Life() / 3, h.Life()} {
			if before, after := h.At(at); !(before >= lo-1e-9 && before <= hi+1e-9 && after >= lo-1e-9 && after <= hi+1e-9) {
				t.Fatalf("%g and %g K at %g s, range %g to %g K", before, after, at, lo, hi)
			}
		}
		if ln := h.LnArrhenius(3e4, 0, 0, h.Life()); math.IsNaN(ln) || math.IsInf(ln, 0) {
			t.Fatalf("ln of the integral is %g", ln)
		}
		if above := h.TimeAbove((lo + hi) / 2); !(above >= 0 && above <= h.Life()*(1+1e-12)) {
			t.Fatalf("%g s above the middle of %g s", above, h.Life())
		}
	})
}

// TestFuzzBuildSeeds: the committed seeds are there.
func TestFuzzBuildSeeds(t *testing.T) {
	if seeds, err := os.ReadDir("testdata/fuzz/FuzzBuild"); err != nil || len(seeds) == 0 {
		t.Errorf("%d seeds, error %v; want some", len(seeds), err)
	}
}

// specReader makes specs of bytes, so that a fuzzer can write them.
type specReader struct{ data []byte }

// next is the next byte, 0 after the last.
func (r *specReader) next() int {
	if len(r.data) == 0 {
		return 0
	}
	b := r.data[0]
	r.data = r.data[1:]
	return int(b)
}

// number is a value that a leg may or may not have.
func (r *specReader) number(usual float64) float64 {
	odd := [...]float64{0, -1, math.NaN(), math.Inf(1), math.Inf(-1), 1e-300, 1e300, math.MaxFloat64, 1e20, 1e-9}
	b := r.next()
	if b < len(odd) {
		return odd[b]
	}
	return usual * float64(b) / 128
}

// specs is a few specs, with repeats nested to the given depth.
func (r *specReader) specs(depth int) []Spec {
	specs := make([]Spec, r.next()%5)
	for i := range specs {
		specs[i] = r.spec(depth)
	}
	return specs
}

func (r *specReader) spec(depth int) Spec {
	s := Spec{Kind: SpecKind(r.next()%9 - 1)}
	s.Name = [...]string{"", "a", "a 1", "wake", "a 2", "é"}[r.next()%6]
	switch s.Kind {
	case SpecSheet:
		s.Sheet = &Sheet{Host: r.number(500), Thickness: r.number(30), Position: r.number(20), Kappa: r.number(1e-6)}
	case SpecTable:
		s.Rows = &Rows{}
		for range r.next() % 6 {
			s.Rows.Time, s.Rows.Temp = append(s.Rows.Time, r.number(1e9)), append(s.Rows.Temp, r.number(1000))
		}
	case SpecRepeat:
		if s.Times = r.next() - 1; s.Times > 250 {
			s.Times = math.MaxInt
		}
		if depth > 0 {
			s.Legs = r.specs(depth - 1)
		}
		return s
	}
	s.Temp, s.For = r.number(1000), r.number(1e9)
	if s.Kind != SpecHold && s.Kind != SpecTable && s.Kind != SpecSheet {
		s.From, s.Efold, s.Rise, s.Dwell = r.number(900), r.number(1e8), r.number(1e8), r.number(1e8)
	}
	return s
}
