package figure

import (
	"bytes"
	"errors"
	"image"
	"image/color"
	"image/png"
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"bankfire/thermal"
)

func TestDrawIsDeterministic(t *testing.T) {
	var a, b bytes.Buffer
	for _, w := range []*bytes.Buffer{&a, &b} {
		if err := Draw(w, invented(4)); err != nil {
			t.Fatal(err)
		}
	}
	if !bytes.Equal(a.Bytes(), b.Bytes()) {
		t.Error("the same data drawn twice give different bytes")
	}
}

// The size is 180 mm at 300 dots an inch: 180/25.4*300 = 2125.98; the file says so to
// programs that set pages, 300/0.0254 = 11811 pixels a metre.
func TestDrawSize(t *testing.T) {
	heights := map[int]int{}
	for _, n := range []int{1, 4, mostPaths + 5} {
		var b bytes.Buffer
		if err := Draw(&b, invented(n)); err != nil {
			t.Fatal(err)
		}
		if !bytes.Contains(b.Bytes(), []byte("pHYs\x00\x00\x2e\x23\x00\x00\x2e\x23\x01")) {
			t.Error("the file does not state its size on paper")
		}
		im, err := png.Decode(&b)
		if err != nil {
			t.Fatal(err)
		}
		if got := im.Bounds().Dx(); got != 2126 {
			t.Errorf("%d paths: width %d, want 2126 pixels", n, got)
		}
		heights[n] = im.Bounds().Dy()
	}
	if heights[1] >= heights[4] || heights[4] >= heights[mostPaths+5] {
		t.Errorf("heights by number of paths %v: want rising", heights)
	}
}

// However much there is to say, the figure fits a printed page.
func TestFitsPage(t *testing.T) {
	f := invented(mostPaths + 5)
	f.Title = strings.Repeat("a long title ", 20)
	for i := range f.Paths {
		f.Paths[i].Verdict = strings.Repeat("many words ", 60)
	}
	d, err := compose(f)
	if err != nil {
		t.Fatal(err)
	}
	const a4 = 297 / 25.4 * 72 // pt
	if d.h > a4 {
		t.Errorf("the page is %.0f pt high, more than %.0f", d.h, a4)
	}
	checkTexts(t, d)
}

// A sentence of a usual length is there to its end.
func TestVerdictIsWhole(t *testing.T) {
	f := invented(4)
	f.Paths[1].Verdict = "at odds: the data demand that D of Sr in HF-P3 be 38.6 (29.5 to 51.2) times what its law (plagioclase-sr-giletti1994) " +
		"says relative to that of Ti in HF-12 (quartz-ti-cherniak2007)"
	f.Paths[2].Verdict = "barred: it is above lock-up (730 C) for 9 kyr without a break, 3 kyr of it within wake 3, longer than 3 kyr; " +
		"its life is 900 yr, shorter than 1 kyr, and it ends before zone mantle"
	d, err := compose(f)
	if err != nil {
		t.Fatal(err)
	}
	for _, end := range []string{"(quartz-ti-cherniak2007)", "mantle"} {
		if !says(d, end) {
			t.Errorf("no line ends in %q", end)
		}
	}
	checkTexts(t, d)
}

// A value below detection is a triangle at its limit, without a bar, and says so.
func TestLimits(t *testing.T) {
	f := invented(1)
	f.Points = []Point{{At: 100e-6, Value: 90, Sigma: 2}, {At: 190e-6, Value: 60, Sigma: 20, Limit: true}}
	f.Paths[0].Residuals = []float64{0, -1.5}
	d, err := compose(f)
	if err != nil {
		t.Fatal(err)
	}
	var rings, triangles, bars int
	p := newPage(f)
	for i := range d.marks {
		switch m := &d.marks[i]; {
		case m.kind == ring:
			rings++
		case m.kind == stroke && len(m.at) == 5 && m.at[0] == m.at[3]:
			triangles++
			if !(m.at[2].y > m.at[0].y && m.at[0].y == m.at[1].y) {
				t.Errorf("the triangle %v does not point down", m.at)
			}
		case m.kind == stroke && len(m.at) == 2 && m.at[0].x == m.at[1].x && p.left.inset(1).holds(d.reach(m)) && m.pen.ink == mist:
			bars++
		}
	}
	if rings != 2 || triangles != 3 || bars != 1 { // point and residual; the same and the key; one
		t.Errorf("%d rings, %d triangles, %d bars", rings, triangles, bars)
	}
	if !says(d, "below detection") || !says(d, "of limits") {
		t.Error("the figure does not say what the triangles are")
	}
	if f.Points[1].Limit = false; says(mustCompose(t, f), "below detection") {
		t.Error("the figure speaks of limits where there are none")
	}
}

func mustCompose(t *testing.T, f *Weighing) *drawing {
	t.Helper()
	d, err := compose(f)
	if err != nil {
		t.Fatal(err)
	}
	return d
}

// A barred path is thin and light, lies below the others, and has no residuals.
func TestBarred(t *testing.T) {
	f := invented(4)
	f.Paths[3].Barred, f.Paths[3].Residuals, f.Paths[3].Profile = true, nil, Line{}
	p, im := laidOut(t, f)
	if look := p.looks[3]; look.ink != ghost || look.width >= p.looks[0].width {
		t.Errorf("the barred path is drawn with %v, another with %v", look, p.looks[0])
	}
	if n := count(im, p.right, ghost); n < 20 {
		t.Errorf("%d pixels of the barred path in the duration panel", n)
	}
	d, last := mustCompose(t, f), -1
	for i := range d.marks {
		switch m := &d.marks[i]; {
		case m.kind != stroke || !p.right.holds(d.reach(m)):
		case m.pen.ink == ghost:
			last = i
		case m.pen.ink == embers[0] && i < last:
			t.Error("the barred path lies on another")
		}
	}
	if !says(d, "barred: not run") {
		t.Error("the figure does not say why there are no residuals")
	}
}

func TestNamesOfLines(t *testing.T) {
	tests := []struct {
		name  string
		spoil func(f *Weighing)
		want  string
	}{
		{"start of all", func(*Weighing) {}, "start"},
		{"start of one", func(f *Weighing) { f.StartOf = 3 }, "start of path 3"},
		{"half crystal", func(*Weighing) {}, "distance from the centre (µm)"},
		{"piece from zero", func(f *Weighing) { f.Cut = true }, "distance from the inner end (µm)"},
		{"piece of a crystal", func(f *Weighing) { f.Cut, f.Inner = true, 52.5e-6 }, "distance from the centre, inner end at 52.5 (µm)"},
		{"no such end", func(f *Weighing) { f.Cut, f.Inner = true, math.NaN() }, "distance from the centre (µm)"},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			f := invented(3)
			test.spoil(f)
			for _, m := range mustCompose(t, f).marks {
				if m.text == test.want {
					return
				}
			}
			t.Errorf("no text is %q", test.want)
		})
	}
}

// Every panel shows every path in the path's own colour.
func TestInkOfEveryPath(t *testing.T) {
	f := invented(8)
	p, im := laidOut(t, f)
	for i, look := range p.looks {
		row := box{p.right.x0 - 30, p.strip[i].y0, pageWidth, p.strip[i].y1}
		for name, b := range map[string]box{"profile": p.left, "durations": p.right, "residuals": p.strip[i], "verdict": row} {
			if n := count(im, b, look.ink); n < 20 { // a line is at least 3 pixels thick
				t.Errorf("path %d has %d pixels of its colour in the panel %s", i+1, n, name)
			}
		}
	}
	if n := count(im, p.left, ink); n < 20 {
		t.Errorf("%d pixels of points and start in the profile panel", n)
	}
	if n := count(im, p.strip[0], ash); n < 1000 {
		t.Errorf("%d pixels of the two-sigma band", n)
	}
}

// laidOut composes f and returns the measures of the page with the picture.
func laidOut(t *testing.T, f *Weighing) (*page, image.Image) {
	t.Helper()
	d, err := compose(f)
	if err != nil {
		t.Fatal(err)
	}
	return newPage(f), paint(d)
}

// count counts the pixels of exactly one colour in a box of the page.
func count(im image.Image, b box, c color.RGBA) int {
	n := 0
	for y := int(b.y0 * dots); y < int(b.y1*dots); y++ {
		for x := int(b.x0 * dots); x < int(b.x1*dots); x++ {
			if color.RGBAModel.Convert(im.At(x, y)) == c {
				n++
			}
		}
	}
	return n
}

// No text stands on another or beyond the page, for any number of paths.
func TestTextsDoNotMeet(t *testing.T) {
	for _, n := range []int{0, 1, 2, 3, 4, 6, 7, 9, 12, mostPaths} {
		f := invented(n)
		f.Title = strings.Repeat("a long title ", 12)
		for i := range f.Paths {
			if i%3 == 0 {
				f.Paths[i].Name = strings.Repeat("a long name ", 1+i)
				f.Paths[i].Verdict = strings.Repeat("many words ", 1+i)
			}
		}
		d, err := compose(f)
		if err != nil {
			t.Fatal(err)
		}
		checkTexts(t, d)
	}
}

func checkTexts(t *testing.T, d *drawing) {
	t.Helper()
	var texts []*mark
	paper := box{0, 0, d.w, d.h}
	for i := range d.marks {
		m := &d.marks[i]
		b := d.reach(m)
		if !paper.holds(b) {
			t.Errorf("mark %q at %v reaches %v, beyond the page", m.text, m.at[0], b)
		}
		if m.kind != words {
			continue
		}
		for _, other := range texts {
			if b.meets(d.reach(other)) {
				t.Errorf("text %q stands on %q", m.text, other.text)
			}
		}
		texts = append(texts, m)
	}
}

// says reports whether a text of the drawing contains some words.
func says(d *drawing, text string) bool {
	for i := range d.marks {
		if strings.Contains(d.marks[i].text, text) {
			return true
		}
	}
	return false
}

func TestWords(t *testing.T) {
	d, err := compose(invented(4))
	if err != nil {
		t.Fatal(err)
	}
	for _, want := range []string{
		"Not a forecast; decisions about safety belong to the responsible authorities.", "365.25 days",
		"temperature (°C)", "distance from the centre (µm)", "Ti (ppm)", "kept warm", "reproduces", "needs 3.2 x more diffusion",
		"lock-up", "solidus", "start", "±2σ",
	} {
		if !says(d, want) {
			t.Errorf("the figure does not say %q", want)
		}
	}
}

// Temperature rises up the page.
func TestTemperatureRisesUpwards(t *testing.T) {
	d, err := compose(invented(1))
	if err != nil {
		t.Fatal(err)
	}
	y := map[string]float64{}
	for _, m := range d.marks {
		y[m.text] = m.at[0].y
	}
	if !(y["740"] < y["680"]) || y["740"] == 0 {
		t.Errorf("740 C is at %g pt, 680 C at %g pt from the top", y["740"], y["680"])
	}
}

func TestPoorData(t *testing.T) {
	nan := math.NaN()
	tests := []struct {
		name  string
		spoil func(f *Weighing)
		want  string // words in the figure; empty: an error
	}{
		{"nothing", func(f *Weighing) { *f = Weighing{} }, ""},
		{"only names", func(f *Weighing) { *f = Weighing{Title: "t", Paths: []Path{{Name: "p", Verdict: "barred"}}} }, ""},
		{"only NaN", func(f *Weighing) {
			*f = Weighing{Points: []Point{{At: nan, Value: 1, Sigma: 1}, {At: 1, Value: nan, Sigma: 1}}}
		}, ""},
		{"no points", func(f *Weighing) { f.Points = nil; f.unmodel() }, "no residuals"},
		{"no profiles either", func(f *Weighing) {
			f.Points, f.Start = nil, Line{}
			f.unmodel()
		}, "no measured points and no profiles"},
		{"no paths", func(f *Weighing) { f.Paths = nil }, "no paths"},
		{"no durations", func(f *Weighing) { f.Paths[0].Duration = nil; f.Paths = f.Paths[:1] }, "no duration curves"},
		{"no errors", func(f *Weighing) {
			for i := range f.Points {
				f.Points[i].Sigma = [...]float64{0, nan, -1, math.Inf(1)}[i%4]
			}
		}, "no errors given"},
		{"NaN residuals", func(f *Weighing) {
			for i := range f.Paths[0].Residuals {
				f.Paths[0].Residuals[i] = nan
			}
		}, "no finite residuals"},
		{"one point", func(f *Weighing) {
			f.Points = f.Points[:1]
			for i := range f.Paths {
				f.Paths[i].Residuals = f.Paths[i].Residuals[:1]
			}
		}, "±1σ"},
		{"only thresholds", func(f *Weighing) { *f = Weighing{Thresholds: f.Thresholds} }, "lock-up"},
		{"far residual", func(f *Weighing) { f.Paths[0].Residuals[3] = -2e8 }, "to −10⁸σ"},
		{"tiny values", func(f *Weighing) { f.scale(1e-7) }, "Ti (10⁻⁵ ppm)"},
		{"huge values", func(f *Weighing) { f.scale(1e60) }, "Ti (10⁶² ppm)"},
		{"all zero", func(f *Weighing) { f.scale(0) }, "kept warm"},
		{"too many paths", func(f *Weighing) { *f = *invented(mostPaths + 3) }, "3 more paths are not drawn"},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			f := invented(3)
			test.spoil(f)
			d, err := compose(f)
			if (err != nil) != (test.want == "") || err != nil && !errors.Is(err, errNothing) {
				t.Fatalf("error %v", err)
			}
			if err != nil {
				return
			}
			if !says(d, test.want) {
				t.Errorf("the figure does not say %q", test.want)
			}
			checkTexts(t, d)
		})
	}
}

func (f *Weighing) unmodel() {
	for i := range f.Paths {
		f.Paths[i].Profile, f.Paths[i].Residuals = Line{}, nil
	}
}

func (f *Weighing) scale(by float64) {
	times := func(values []float64) {
		for i := range values {
			values[i] *= by
		}
	}
	times(f.Start.Value)
	for i := range f.Paths {
		times(f.Paths[i].Profile.Value)
	}
	for i := range f.Points {
		f.Points[i].Value *= by
		f.Points[i].Sigma *= by
	}
}

// Numbers of any kind anywhere: no panic, and every mark is finite and on the page.
func TestRandomDataStayOnThePage(t *testing.T) {
	odd := []float64{math.NaN(), math.Inf(1), math.Inf(-1), 0, -1, 1e300, -1e300, 1e149, 5e-324, 1e-200, math.MaxFloat64}
	random := rand.New(rand.NewPCG(3, 5))
	for round := range 40 {
		share := random.Float64()
		spoil := func(x *float64) {
			if random.Float64() < share {
				*x = odd[random.IntN(len(odd))]
			}
		}
		f := invented(3)
		for i := range f.Points {
			f.Points[i].Limit = random.IntN(4) == 0
		}
		f.Paths[random.IntN(3)].Barred = random.IntN(2) == 0
		f.spoil(spoil)
		d, err := compose(f)
		if err != nil {
			continue
		}
		checkMarks(t, d)
		if round%20 == 0 {
			paint(d)
		}
	}
}

func checkMarks(t *testing.T, d *drawing) {
	t.Helper()
	paper := box{0, 0, d.w, d.h}
	for i := range d.marks {
		if m := &d.marks[i]; !paper.holds(d.reach(m)) {
			t.Errorf("mark %q of kind %d reaches %v, beyond the page", m.text, m.kind, d.reach(m))
		}
	}
}

func (f *Weighing) spoil(each func(x *float64)) {
	all := func(values []float64) {
		for i := range values {
			each(&values[i])
		}
	}
	each(&f.Inner)
	for i := range f.Points {
		each(&f.Points[i].At)
		each(&f.Points[i].Value)
		each(&f.Points[i].Sigma)
	}
	all(f.Start.At)
	all(f.Start.Value)
	for k := range f.Paths {
		p := &f.Paths[k]
		all(p.Profile.At)
		all(p.Profile.Value)
		all(p.Residuals)
		for i := range p.Duration {
			each(&p.Duration[i].Temp)
			each(&p.Duration[i].Time)
		}
	}
	for i := range f.Thresholds {
		each(&f.Thresholds[i].Temp)
	}
}

func TestMismatchPanics(t *testing.T) {
	tests := []struct {
		name  string
		spoil func(f *Weighing)
		want  string
	}{
		{"residuals", func(f *Weighing) { f.Paths[0].Residuals = []float64{1} }, `figure: path "kept warm": len(Residuals) 1 != len(Points) 43`},
		{"profile", func(f *Weighing) { f.Start.At = nil }, `figure: profile "start": len(At) 0 != len(Value) 4`},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			defer func() {
				if got := recover(); got != test.want {
					t.Errorf("panic %v, want %q", got, test.want)
				}
			}()
			f := invented(1)
			test.spoil(f)
			_, _ = compose(f)
		})
	}
}

// failing is a writer that takes nothing.
type failing struct{}

var errFull = errors.New("disk full")

func (failing) Write([]byte) (int, error) { return 0, errFull }

func TestDrawReportsWriter(t *testing.T) {
	if err := Draw(failing{}, invented(1)); !errors.Is(err, errFull) {
		t.Errorf("error %v, want %v", err, errFull)
	}
}

// A path far shorter than all others is still on the time axis.
func TestShortPathIsOnTheAxis(t *testing.T) {
	f := invented(2)
	for i := range f.Paths[1].Duration {
		f.Paths[1].Duration[i].Time *= 1e-15
	}
	p, im := laidOut(t, f)
	if n := count(im, p.right, p.looks[1].ink); n < 20 {
		t.Errorf("%d pixels of the short path", n)
	}
}

// Colours of one kind differ in grey (ITU-R BT.601 luma) from the next by at least 20 of 255.
func TestColoursDifferInGrey(t *testing.T) {
	grey := func(c color.RGBA) float64 { return 0.299*float64(c.R) + 0.587*float64(c.G) + 0.114*float64(c.B) }
	for name, palette := range map[string][]color.RGBA{"embers": embers, "slates": slates} {
		for i := range palette {
			next := palette[(i+1)%len(palette)]
			if d := math.Abs(grey(palette[i]) - grey(next)); !(d >= 20) {
				t.Errorf("%s %d and the next differ by %.0f in grey", name, i, d)
			}
		}
	}
}

// bend keeps the last constant and the first zero point.
func TestBend(t *testing.T) {
	curve := []thermal.DurationPoint{{Temp: 1, Time: 9}, {Temp: 2, Time: 9}, {Temp: 3, Time: 4}, {Temp: 4, Time: 0}, {Temp: 5, Time: 0}}
	if got := bend(curve); len(got) != 3 || got[0].Temp != 2 || got[2].Temp != 4 {
		t.Errorf("bend = %v", got)
	}
	if got := bend(nil); len(got) != 0 {
		t.Errorf("bend(nil) = %v", got)
	}
}
