package thermal

import (
	"errors"
	"fmt"
	"math"
	"slices"
	"strings"
	"testing"
)

func TestTableFrom(t *testing.T) {
	tests := []struct {
		name           string
		times, temps   []float64
		beforeEruption bool
		wantTime       []float64
		wantTemp       []float64
	}{
		{"forwards", []float64{0, 5, 9}, []float64{900, 950, 800}, false, []float64{0, 5, 9}, []float64{900, 950, 800}},
		{"the first row is the start", []float64{-3, 5, 9}, []float64{900, 950, 800}, false, []float64{0, 8, 12}, []float64{900, 950, 800}},
		{"jump", []float64{0, 5, 5, 9}, []float64{900, 950, 800, 700}, false, []float64{0, 5, 5, 9}, []float64{900, 950, 800, 700}},
		{"before eruption, oldest first", []float64{9, 5, 5, 0}, []float64{900, 950, 800, 700}, true, []float64{0, 4, 4, 9}, []float64{900, 950, 800, 700}},
		{"before eruption, youngest first", []float64{0, 5, 5, 9}, []float64{700, 800, 950, 900}, true, []float64{0, 4, 4, 9}, []float64{900, 950, 800, 700}},
		{"before eruption, ends before it", []float64{9, 5}, []float64{900, 950}, true, []float64{0, 4}, []float64{900, 950}},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			times, temps := slices.Clone(test.times), slices.Clone(test.temps)
			got, err := TableFrom(times, temps, test.beforeEruption)
			if err != nil {
				t.Fatal(err)
			}
			if !slices.Equal(got.Time, test.wantTime) || !slices.Equal(got.Temp, test.wantTemp) {
				t.Errorf("got %v, want %v %v", *got, test.wantTime, test.wantTemp)
			}
			if !slices.Equal(times, test.times) || !slices.Equal(temps, test.temps) {
				t.Error("the slices of the caller are changed")
			}
		})
	}
}

func TestTableFromRefuses(t *testing.T) {
	nan := math.NaN()
	tests := []struct {
		name           string
		times, temps   []float64
		beforeEruption bool
		line           int
		want           string
	}{
		{"one row", []float64{0}, []float64{900}, false, 0, "1 rows"},
		{"none", nil, nil, false, 0, "0 rows"},
		{"turns back", []float64{0, 5, 4}, []float64{900, 900, 900}, false, 3, `"4 s": earlier than 5 s in the row above; want times that ascend, or counts = "before eruption"`},
		{"counts down unsaid", []float64{9, 5, 0}, []float64{900, 900, 900}, false, 2, "earlier than 9 s"},
		{"before eruption, turns", []float64{9, 5, 7, 0}, []float64{900, 900, 900, 900}, true, 3, "turns back after 5 s"},
		{"before eruption, rises then falls", []float64{0, 5, 4, 9}, []float64{900, 900, 900, 900}, true, 3, "turns back after 5 s"},
		{"after the eruption", []float64{9, 5, -1}, []float64{900, 900, 900}, true, 3, "negative time before eruption"},
		{"no time passes", []float64{5, 5}, []float64{900, 901}, false, 0, "one time"},
		{"NaN time", []float64{0, nan, 7}, []float64{900, 900, 900}, false, 2, "not a duration"},
		{"infinite time", []float64{0, math.Inf(1)}, []float64{900, 900}, false, 2, "not a duration"},
		{"NaN temperature", []float64{0, 1, 7}, []float64{900, 900, nan}, false, 3, "not a temperature"},
		{"below absolute zero", []float64{0, 1, 7}, []float64{900, -5, 900}, false, 2, `"-278.15 C": not above absolute zero`},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			got, err := TableFrom(test.times, test.temps, test.beforeEruption)
			var refused *InputError
			if !errors.As(err, &refused) || got != nil {
				t.Fatalf("got %v and %v, want nil and an *InputError", got, err)
			}
			if refused.Line != test.line || !strings.Contains(err.Error(), test.want) {
				t.Errorf("got %q in row %d, want %q in row %d", err, refused.Line, test.want, test.line)
			}
		})
	}
}

func TestRowsAt(t *testing.T) {
	l := Leg{Kind: Table, Rows: &Rows{Time: []float64{0, 4, 4, 4, 8, 8}, Temp: []float64{900, 1000, 1, 700, 800, 850}}}
	for _, test := range []struct{ t, before, after float64 }{
		{-1, 900, 900}, {0, 900, 900}, {1, 925, 925}, {4, 1000, 700}, {6, 750, 750}, {8, 800, 850}, {9, 800, 850},
	} {
		closeTo(t, fmt.Sprintf("before %g s", test.t), l.before(test.t), test.before, 0)
		closeTo(t, fmt.Sprintf("after %g s", test.t), l.At(test.t), test.after, 0)
	}
	l.For = 2
	closeTo(t, "cut short", l.At(9), 950, 0)
}

func TestTableFromPanics(t *testing.T) {
	defer func() {
		if got := fmt.Sprint(recover()); got != "thermal: 2 times, 1 temperatures" {
			t.Errorf("panic %q", got)
		}
	}()
	TableFrom([]float64{0, 1}, []float64{900}, false)
}

// TestRowsCutShort: a leg shorter than its table ends between rows, and what lies beyond is no part of it.
func TestRowsCutShort(t *testing.T) {
	l := Leg{Kind: Table, For: 5, Rows: &Rows{Time: []float64{0, 4, 8, 9}, Temp: []float64{900, 1000, 800, 2000}}}
	lo, hi := l.Range()
	closeTo(t, "lowest", lo, 900, 0)
	closeTo(t, "highest", hi, 1000, 0)
	closeTo(t, "above 950 K", l.TimeAbove(950), 2+1, 1e-13)
	closeTo(t, "ln of the time", l.LnArrhenius(0, 0, 0, 9), math.Log(5), 1e-15)
	l.Rows.Temp[2] = 400
	lo, _ = l.Range()
	closeTo(t, "lowest, at the cut", lo, 850, 0)
}

// TestCoarse: on samples of the cooling sheet of check C06 the estimate finds every table that is off by more than 1 %, and
// no table that is off by less than 0.2 %; 200 equally spaced rows beside the contact are off by 28 % (C06), and so says
// the estimate, within 3 %.
func TestCoarse(t *testing.T) {
	const start, end = 1.0, 30 * Day
	e := 250e3 / GasConstant
	for _, x := range []float64{0, 0.5, 0.9, 0.99} {
		leg := Leg{Kind: SheetCooling, For: end, Sheet: &Sheet{Magma: 1473.15, Host: 473.15, Thickness: 2, Position: x, Kappa: 1e-6}}
		for _, n := range []int{25, 50, 100, 200, 400, 2000} {
			for _, spacing := range []string{"equal", "log"} {
				rows := sampled(t, &leg, start, end, n, spacing == "log")
				table := Leg{Kind: Table, Rows: rows}
				off := math.Abs(math.Expm1(table.LnArrhenius(e, 0, 0, end) - leg.LnArrhenius(e, 0, start, end)))
				step, ratio, coarse := rows.Coarse(e)
				what := fmt.Sprintf("x = %g, %d rows, %s spacing: off by %.4f, ratio %.4f at row %d, coarse %v", x, n, spacing, off, ratio, step, coarse)
				if off > 0.01 && !coarse || off < 0.002 && coarse {
					t.Error(what)
				}
				if x == 0.9 && n == 200 && spacing == "equal" && !(step == 0 && math.Abs(ratio-1.28) < 0.03) {
					t.Error(what, "want 1.28 from the first interval")
				}
			}
		}
	}
}

// sampled is a table of n rows along a leg.
func sampled(t *testing.T, l *Leg, start, end float64, n int, log bool) *Rows {
	t.Helper()
	times, temps := make([]float64, n), make([]float64, n)
	for i := range times {
		x := float64(i) / float64(n-1)
		times[i] = start + (end-start)*x
		if log {
			times[i] = start * math.Pow(end/start, x)
		}
		temps[i] = l.At(times[i])
	}
	rows, err := TableFrom(times, temps, false)
	if err != nil {
		t.Fatal(err)
	}
	return rows
}

// TestCoarseLeavesStepsAlone: holds joined by jumps, a single ramp and any table at e = 0 are exact as they stand.
func TestCoarseLeavesStepsAlone(t *testing.T) {
	for name, rows := range map[string]Rows{
		"steps": {Time: []float64{0, 5, 5, 9, 9, 20}, Temp: []float64{900, 900, 1100, 1100, 900, 900}},
		"ramp":  {Time: []float64{0, 5}, Temp: []float64{900, 1400}},
		"line":  {Time: []float64{0, 5, 6, 9}, Temp: []float64{900, 1400, 1500, 1800}},
	} {
		if step, ratio, coarse := rows.Coarse(3e4); coarse || !(math.Abs(ratio-1) < 1e-9) {
			t.Errorf("%s: ratio %g, coarse %v at row %d", name, ratio, coarse, step)
		}
	}
	bent := Rows{Time: []float64{0, 5, 9}, Temp: []float64{900, 1400, 900}}
	if _, ratio, coarse := bent.Coarse(0); coarse || !(math.Abs(ratio-1) < 1e-14) {
		t.Errorf("e = 0: ratio %g, coarse %v", ratio, coarse)
	}
	if _, ratio, coarse := bent.Coarse(3e4); !coarse {
		t.Errorf("three rows up and down by 500 K: ratio %g, not coarse", ratio)
	}
}
