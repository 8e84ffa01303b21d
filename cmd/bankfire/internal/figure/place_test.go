package figure

import (
	"math"
	"testing"
)

func TestPut(t *testing.T) {
	level := func(y float64) []point { return sample([]point{{0, y}, {100, y}}, 2) }
	numeral := func(curve []point) tag {
		return tag{curve: curve, w: 6, h: 5, offsets: around(6, 5)}
	}
	t.Run("free", func(t *testing.T) {
		c := crowd{bounds: box{0, 0, 100, 100}, curves: [][]point{level(50)}}
		p, ok := c.put(numeral(c.curves[0]), 0)
		if d := distance(p.at, p.anchor); !ok || !(d >= clearance && d <= 6) {
			t.Errorf("put = %+v, %v; want a place close to the curve but off it", p, ok)
		}
	})
	t.Run("keeps off things", func(t *testing.T) {
		c := crowd{bounds: box{0, 0, 100, 100}, curves: [][]point{level(50)}}
		c.things = sample([]point{{0, 42}, {80, 42}, {80, 58}, {0, 58}}, 1)
		p, ok := c.put(numeral(c.curves[0]), 0)
		for _, q := range c.things {
			if !ok || distance(p.at, q) < clearance/2 {
				t.Fatalf("text at %+v stands on the point %v", p.at, q)
			}
		}
	})
	t.Run("anchors where curves part", func(t *testing.T) {
		apartFrom70 := sample([]point{{0, 50}, {70, 50}, {100, 90}}, 2)
		c := crowd{bounds: box{0, 0, 100, 100}, curves: [][]point{level(50), apartFrom70}}
		for own := range c.curves {
			if p, ok := c.put(numeral(c.curves[own]), own); !ok || p.anchor.x < 72 {
				t.Errorf("curve %d is tagged at %v, where the two coincide", own, p.anchor)
			}
		}
	})
	t.Run("texts do not meet", func(t *testing.T) {
		c := crowd{bounds: box{0, 0, 100, 100}}
		for range 12 {
			c.curves = append(c.curves, level(50)) // all the same: only texts can be kept apart
		}
		for own := range c.curves {
			if _, ok := c.put(numeral(c.curves[own]), own); !ok {
				t.Fatalf("no place for tag %d", own)
			}
		}
		for i, b := range c.boxes {
			for _, other := range c.boxes[:i] {
				if b.meets(other) {
					t.Errorf("text %v stands on %v", b, other)
				}
			}
		}
	})
	t.Run("no room", func(t *testing.T) {
		c := crowd{bounds: box{0, 0, 3, 3}}
		if p, ok := c.put(numeral(level(1)), 0); ok {
			t.Errorf("put = %+v in a panel smaller than the text", p)
		}
		if _, ok := c.put(numeral(nil), 0); ok {
			t.Error("a curve without points got a tag")
		}
	})
}

func TestSample(t *testing.T) {
	got := sample([]point{{0, 0}, {3, 0}, {3, 3}}, 2)
	want := []point{{1, 0}, {3, 0}, {3, 2}}
	if len(got) != len(want) {
		t.Fatalf("sample = %v, want %v", got, want)
	}
	for i, p := range got {
		if !(math.Hypot(p.x-want[i].x, p.y-want[i].y) <= 1e-12) { // rounding
			t.Errorf("point %d is %v, want %v", i, p, want[i])
		}
	}
	if got := sample([]point{{1, 1}, {1, 1}}, 2); len(got) != 0 {
		t.Errorf("a line without length has the points %v", got)
	}
}
