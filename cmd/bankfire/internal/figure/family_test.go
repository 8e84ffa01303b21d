package figure

import (
	"bytes"
	"errors"
	"fmt"
	"image/color"
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"bankfire/thermal"
)

// inventedFamily is a family of holds that looks real, with so many open values.
func inventedFamily(values int) *Family {
	f := &Family{
		Title: "Harrow Fell rhyolite", Subject: `Family "cooler but longer": of 2000 paths drawn (halton, seed 1), 412 reproduce what was measured.`,
		Said:       "Ti in HF-12 can tell of a path only how much diffusion it did in all.",
		Thresholds: []Threshold{{"lock-up", 730 + thermal.ZeroCelsius}, {"solidus", 670 + thermal.ZeroCelsius}},
	}
	for c := 600.0; c <= 800; c += 2 {
		f.Temps = append(f.Temps, c+thermal.ZeroCelsius)
		for k, years := range []float64{30, 300, 3000} {
			times := years * year * (800 - c) / 200
			f.Kept[k], f.All[k] = append(f.Kept[k], times), append(f.All[k], times*[]float64{0.3, 3, 20}[k])
		}
	}
	noise := rand.New(rand.NewPCG(5, 6))
	for i := range 300 {
		temp, life := 600+150*noise.Float64()+thermal.ZeroCelsius, 100*math.Pow(1000, noise.Float64())*year
		f.Stores = append(f.Stores, Store{life, temp, i%3 == 0})
		if i%3 == 0 {
			f.Traces = append(f.Traces, Trace{[]float64{life, life / 100, life / 100, 0}, []float64{temp, temp, temp + 60, temp + 20}})
		}
	}
	f.Best = f.Traces[0]
	for _, e := range []struct {
		name  string
		times float64
	}{{"a tenth", 0.1}, {"as those that reproduce", 1}, {"ten times", 10}} {
		line := Equal{Name: e.name, Light: e.times != 1, Temp: f.Temps}
		for _, temp := range f.Temps {
			line.Time = append(line.Time, e.times*1000*year*math.Exp(30e3*(1/temp-1/950.0)))
		}
		f.Equal = append(f.Equal, line)
	}
	for k := range values {
		v := Value{Name: fmt.Sprintf("value %d", k+1), Unit: "°C", Lo: 600, Hi: 760}
		switch k % 3 {
		case 1:
			v.Lo, v.Hi, v.Log, v.Years, v.Unit = 100, 3e5, true, true, "yr"
		case 2:
			v.Lo, v.Hi, v.Log, v.Unit = 1e-9, 1e-5, true, ""
		}
		for i := range 200 {
			at := v.Lo + (v.Hi-v.Lo)*noise.Float64()
			v.Dots = append(v.Dots, Dot{at, 40 + 1000*noise.Float64()*float64(i%3), i%3 == 0})
		}
		f.Values = append(f.Values, v)
	}
	return f
}

func mustComposeFamily(t *testing.T, f *Family) *drawing {
	t.Helper()
	d, err := composeFamily(f)
	if err != nil {
		t.Fatal(err)
	}
	return d
}

// No text stands on another, nothing lies beyond the page, and the page is one of A4
// paper, whatever a family has.
func TestFamilyFits(t *testing.T) {
	const a4 = 297 / 25.4 * 72 // pt
	for values := range mostValues + 3 {
		f := inventedFamily(values)
		if values%2 == 1 {
			f.Title, f.Subject, f.Said = strings.Repeat("a long title ", 30), strings.Repeat("many words ", 50), strings.Repeat("much to say ", 80)
			for k := range f.Values {
				f.Values[k].Name = strings.Repeat("long ", 20)
			}
			f.Thresholds[0].Name = strings.Repeat("long name ", 9)
		}
		d := mustComposeFamily(t, f)
		checkTexts(t, d)
		if d.h > a4 {
			t.Errorf("%d values: the page is %.0f pt high, more than %.0f", values, d.h, a4)
		}
		if more := says(d, "more values are not drawn"); more != (values > mostValues) {
			t.Errorf("%d values: that some are missing is said: %v", values, more)
		}
	}
}

func TestFamilyIsDeterministic(t *testing.T) {
	var a, b bytes.Buffer
	for _, w := range []*bytes.Buffer{&a, &b} {
		if err := DrawFamily(w, inventedFamily(2)); err != nil {
			t.Fatal(err)
		}
	}
	if !bytes.Equal(a.Bytes(), b.Bytes()) {
		t.Error("the same data drawn twice give different bytes")
	}
}

func TestFamilyWords(t *testing.T) {
	d := mustComposeFamily(t, inventedFamily(3))
	for _, want := range []string{
		"Not a forecast; decisions about safety belong to the responsible authorities.", "365.25 days", "412 reproduce",
		"temperature (°C)", "time spent above the temperature", "time before eruption", "lock-up", "solidus", "all drawn", "5 to 95 %",
		"only how much diffusion", "as those that reproduce", "lines of equal diffusion", "value 1 (°C)", "value 2", "chi-square", "100 kyr", "10⁻⁷",
	} {
		if !says(d, want) {
			t.Errorf("the figure does not say %q", want)
		}
	}
	f := inventedFamily(1)
	f.Equal, f.Said = nil, ""
	if says(mustComposeFamily(t, f), "equal diffusion") {
		t.Error("the figure speaks of lines of equal diffusion where there are none")
	}
}

// Every panel shows those that reproduce as embers; the others are slates beside them.
func TestFamilyInks(t *testing.T) {
	f := inventedFamily(4)
	p, im := newFamilyPage(f), paint(mustComposeFamily(t, f))
	for name, want := range map[string]struct {
		in   box
		inks []color.RGBA
	}{
		"bands":  {p.right, []color.RGBA{glow, haze, bandPens[0].ink, bandPens[1].ink}},
		"paths":  {p.traces, []color.RGBA{thread, embers[0]}},
		"stores": {p.stores, []color.RGBA{embers[0], slates[3], ink}},
		"value":  {p.values[3], []color.RGBA{embers[0], slates[3]}},
	} {
		for _, c := range want.inks {
			if n := count(im, want.in, c); n < 100 {
				t.Errorf("%s: %d pixels of %v", name, n, c)
			}
		}
	}
}

// In grey, what means different things differs too.
func TestFamilyInGrey(t *testing.T) {
	const apart = 50 // of 255
	for _, pair := range [][2]color.RGBA{{glow, haze}, {embers[0], slates[3]}, {thread, embers[0]}, {bandPens[0].ink, glow}, {bandPens[1].ink, haze}, {haze, rgb(0x9aa1a7)}} {
		a, b := color.GrayModel.Convert(pair[0]).(color.Gray).Y, color.GrayModel.Convert(pair[1]).(color.Gray).Y
		if diff := math.Abs(float64(a) - float64(b)); diff < apart {
			t.Errorf("%v and %v differ by %.0f in grey", pair[0], pair[1], diff)
		}
	}
}

// The median passes where it was put: at 700 C, half of 300 years.
func TestFamilyMedian(t *testing.T) {
	d := mustComposeFamily(t, inventedFamily(0))
	where := map[string]point{}
	var median []point
	for i := range d.marks {
		m := &d.marks[i]
		if m.kind == words {
			if _, seen := where[m.text]; !seen { // those of the first panel come first
				where[m.text] = m.at[0]
			}
		}
		if m.kind == stroke && m.pen.ink == bandPens[0].ink && m.pen.width == bandPens[0].width && len(m.at) > len(median) {
			median = m.at
		}
	}
	decade := where["1 kyr"].x - where["100 yr"].x
	want := point{where["100 yr"].x + math.Log10(1.5)*decade, where["700"].y - capHeight*smallSize/2}
	nearby := math.Inf(1)
	for _, q := range sample(median, 0.1) {
		nearby = math.Min(nearby, math.Hypot(q.x-want.x, q.y-want.y))
	}
	if !(nearby < 0.2) { // pt: samples lie 0.1 apart
		t.Errorf("the median passes %.2f pt from 150 yr above 700 C", nearby)
	}
}

func TestPoorFamily(t *testing.T) {
	nan := math.NaN()
	tests := []struct {
		name  string
		spoil func(f *Family)
		want  string // words in the figure; empty: an error
	}{
		{"nothing", func(f *Family) { *f = Family{} }, ""},
		{"only NaN", func(f *Family) {
			*f = Family{Temps: []float64{900}, Kept: Band{{nan}, {nan}, {nan}}, All: Band{{nan}, {0}, {math.Inf(1)}}}
		}, ""},
		{"none reproduces", func(f *Family) {
			f.Traces, f.Best, f.Equal, f.Said = nil, Trace{}, nil, ""
			for k := range f.Kept {
				f.Kept[k] = make([]float64, len(f.Temps))
			}
		}, "no member reproduces the data"},
		{"no stores", func(f *Family) { f.Stores = nil }, "no members"},
		{"NaN here and there", func(f *Family) {
			f.Temps[3], f.Kept[0][5], f.Stores[0].Life, f.Stores[1].Temp, f.Traces[1].Temp[1], f.Traces[2].Before[0] = nan, nan, nan, nan, nan, nan
			f.Equal[0].Time[2], f.Values[0].Dots[0].At, f.Values[0].Dots[1].Misfit, f.Values[1].Lo = nan, nan, nan, nan
		}, "value 1"},
		{"one member", func(f *Family) {
			f.Temps, f.Stores, f.Traces, f.Equal = []float64{900, 901}, f.Stores[:1], f.Traces[:1], nil
			for k := range f.Kept {
				f.Kept[k], f.All[k] = []float64{year, 0}, []float64{year, 0}
			}
		}, "value 1"},
		{"a value that does not vary", func(f *Family) {
			f.Values[0].Lo, f.Values[0].Hi = 5, 5
			f.Values[0].Dots = []Dot{{5, 1, true}}
		}, "value 1"},
		{"chi-square of zero", func(f *Family) { f.Values[0].Dots = []Dot{{650, 0, true}} }, "value 1"},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			f := inventedFamily(2)
			test.spoil(f)
			var b bytes.Buffer
			err := DrawFamily(&b, f)
			if test.want == "" {
				if !errors.Is(err, errNothing) || b.Len() > 0 {
					t.Errorf("error %v and %d bytes, want that there is nothing to draw", err, b.Len())
				}
				return
			}
			if err != nil {
				t.Fatal(err)
			}
			d := mustComposeFamily(t, f)
			checkTexts(t, d)
			if !says(d, test.want) {
				t.Errorf("the figure does not say %q", test.want)
			}
		})
	}
}

func TestPowers(t *testing.T) {
	tests := []struct {
		s    span
		want string
	}{
		{span{1.6, 2.6}, "50 100 200"}, {span{-0.1, 3.1}, "1 10 100 1000"}, {span{-9, -5}, "10⁻⁹ 10⁻⁸ 10⁻⁷ 10⁻⁶ 10⁻⁵"}, {span{-2.1, -1.2}, "0.01 0.02 0.05"},
	}
	for _, test := range tests {
		var got []string
		for _, k := range powers(test.s) {
			got = append(got, k.label)
		}
		if text := strings.Join(got, " "); text != test.want {
			t.Errorf("%v: ticks %q, want %q", test.s, text, test.want)
		}
	}
}
