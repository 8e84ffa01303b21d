package figure

import (
	"math"
	"slices"
	"strings"
	"testing"

	"bankfire/thermal"
)

// Expected places are found by hand.
func TestSpread(t *testing.T) {
	tests := []struct {
		name       string
		want, high []float64
		lo, hi     float64
		places     []float64
	}{
		{"free", []float64{10, 30}, []float64{8, 8}, 0, 100, []float64{10, 30}},
		{"two close", []float64{49, 51}, []float64{8, 8}, 0, 100, []float64{46, 54}},
		{"two alike", []float64{50, 50}, []float64{8, 4}, 0, 100, []float64{47, 53}},
		{"pushed on", []float64{50, 50, 56}, []float64{8, 8, 8}, 0, 100, []float64{44, 52, 60}},
		{"at the end", []float64{99}, []float64{8}, 0, 100, []float64{96}},
		{"at the start", []float64{1, 2}, []float64{8, 8}, 0, 100, []float64{4, 12}},
		{"just room", []float64{1, 2}, []float64{8, 8}, 0, 16, []float64{4, 12}},
		{"none", nil, nil, 0, 100, nil},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			got := spread(test.want, test.high, test.lo, test.hi)
			const rounding = 1e-12 // a few operations on numbers of order 100
			near := func(a, b float64) bool { return math.Abs(a-b) <= rounding }
			if !slices.EqualFunc(got, test.places, near) {
				t.Errorf("spread = %v, want %v", got, test.places)
			}
		})
	}
}

// The name of a threshold stands where no line crosses it, and a line leads to it from its
// own temperature, however close the next one is.
func TestThresholdNames(t *testing.T) {
	for _, temps := range [][]float64{{730, 735}, {735, 730}, {730, 730.5, 731}, {730, 730}, {640, 820}, {740}} {
		f := invented(4)
		f.Thresholds = nil
		for i, c := range temps {
			f.Thresholds = append(f.Thresholds, Threshold{strings.Repeat("name ", 1+2*i) + string(rune('A'+i)), c + thermal.ZeroCelsius})
		}
		p := newPage(f)
		p.durations()
		for i, c := range temps {
			text := p.theText(t, string(rune('A'+i)))
			if !p.leads(p.levelOf(c), text) {
				t.Errorf("%v: no line leads from %g C to its name at %v", temps, c, text)
			}
			for k := range p.d.marks {
				if m := &p.d.marks[k]; m.kind == stroke && crosses(m.at[0], m.at[1], text) {
					t.Errorf("%v: the name of %g C is crossed from %v to %v", temps, c, m.at[0], m.at[1])
				}
			}
		}
		checkTexts(t, p.d)
	}
}

// theText is where the text with an ending stands.
func (p *page) theText(t *testing.T, end string) box {
	t.Helper()
	for i := range p.d.marks {
		if m := &p.d.marks[i]; m.kind == words && strings.HasSuffix(m.text, end) && m.at[0].x > p.right.x1 {
			return p.d.reach(m)
		}
	}
	t.Fatalf("nothing ends in %q", end)
	return box{}
}

// levelOf is how low a temperature, C, lies in the duration panel.
func (p *page) levelOf(c float64) float64 {
	return axis{p.tempSpan().padded(0.06), p.right.y1, p.right.y0}.at(celsius(c + thermal.ZeroCelsius))
}

// leads reports whether a line goes from the right end of a level to beside a text, whose
// last line it is in a paragraph of two lines at most.
func (p *page) leads(level float64, text box) bool {
	near := text.inset(-2)
	near.y0 -= leading * smallSize / 2
	for i := range p.d.marks {
		m := &p.d.marks[i]
		if m.kind == stroke && m.at[0] == (point{p.right.x1, level}) && near.holds(box{m.at[1].x, m.at[1].y, m.at[1].x, m.at[1].y}) {
			return true
		}
	}
	return false
}

// However many thresholds there are, those that find no room only lose their names.
func TestManyThresholds(t *testing.T) {
	f := invented(2)
	f.Thresholds = nil
	for i := range 60 {
		f.Thresholds = append(f.Thresholds, Threshold{"x", 650 + float64(i) + thermal.ZeroCelsius})
	}
	p := newPage(f)
	p.durations()
	if n := len(p.names); n < 20 || n >= 60 {
		t.Errorf("%d names", n)
	}
	checkTexts(t, p.d)
	checkMarks(t, p.d)
}
