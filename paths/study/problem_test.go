package study

import (
	"slices"
	"strings"
	"testing"

	"bankfire/diffusion"
	"bankfire/thermal"
)

func TestProblemZones(t *testing.T) {
	s := everyKey(t)
	p, _, err := s.Crystals[0].Problem(&s.Crystals[0].Elements[0], s.Paths[0].History)
	if err != nil {
		t.Fatal(err)
	}
	if p.Shape != diffusion.Cylinder || len(p.Zones) != 3 {
		t.Fatalf("problem %+v", p)
	}
	near(t, "inner radius", p.R0, 40*um)
	want := []diffusion.Zone{
		{Outer: 140 * um, Start: 0, Edge: 0.4 * um, Times: 1},    // free: at 0 in the problem
		{Outer: 200 * um, Start: 92, Edge: 0.4 * um, Times: 0.1}, // fixed
		{Outer: 212 * um, Start: 58, Edge: 0, Times: 1},          // prior: at its middle; no edge at the rim
	}
	for i, z := range p.Zones {
		near(t, "outer radius", z.Outer, want[i].Outer)
		near(t, "start", z.Start, want[i].Start)
		near(t, "edge", z.Edge, want[i].Edge)
		near(t, "times", z.Times, want[i].Times)
	}
}

func TestProblemFreeValues(t *testing.T) {
	s := everyKey(t)
	p, free, err := s.Crystals[0].Problem(&s.Crystals[0].Elements[0], s.Paths[0].History)
	if err != nil {
		t.Fatal(err)
	}
	want := []struct {
		FreeValue
		start, inner, outer []float64
	}{
		{FreeValue{Name: "core"}, []float64{1, 0, 0}, []float64{1}, []float64{0, 0, 0, 0, 0, 0}},
		{FreeValue{"skin", thermal.Uncertain{Value: 58, Sigma: 1.5}, true}, []float64{0, 0, 1}, []float64{0}, []float64{1, 0, 0, 0, 0, 0}},
		{FreeValue{"rim 2", thermal.Uncertain{Value: 90, Sigma: 3}, true}, []float64{0, 0, 0}, []float64{0}, []float64{0, 1, 0, 0, 0, 0}},
		{FreeValue{Name: "rim 4"}, []float64{0, 0, 0}, []float64{0}, []float64{0, 0, 0, 1, 0, 0}},
	}
	if len(free) != len(want) || len(p.Free) != len(want) {
		t.Fatalf("free values %+v", free)
	}
	for i, w := range want {
		if free[i] != w.FreeValue {
			t.Errorf("free value %d is %+v, want %+v", i, free[i], w.FreeValue)
		}
		b := p.Free[i]
		if !slices.Equal(b.Start, w.start) || !slices.Equal(b.Inner, w.inner) || !slices.Equal(b.Outer, w.outer) {
			t.Errorf("column of %s is %+v", w.Name, b)
		}
	}
}

func TestProblemRims(t *testing.T) {
	s := everyKey(t)
	for i, test := range []struct {
		name     string
		eruption float64 // yr
	}{{"eruption of the study", 6185}, {"eruption of the path", 613}} {
		t.Run(test.name, func(t *testing.T) {
			p, _, err := s.Crystals[0].Problem(&s.Crystals[0].Elements[0], s.Paths[i].History)
			if err != nil {
				t.Fatal(err)
			}
			const day = 86400.0
			from := []float64{0, day, 2 * day, 3 * day, 4 * day, (test.eruption - 1) * yr}
			value := []float64{58, 90, 80, 0, 0, 0}
			for j, r := range p.Outer {
				near(t, "from", r.From, from[j])
				near(t, "value", r.Value, value[j])
			}
			g := p.Outer[5].Given
			near(t, "jump", g.Jumps[0], (test.eruption-5)*yr)
			if len(g.Jumps) != 1 || len(g.Breaks) != 3 {
				t.Errorf("jumps %v, breaks %v", g.Jumps, g.Breaks)
			}
			near(t, "before the jump", g.At((test.eruption-6)*yr), 80)
			near(t, "on the slope", g.At((test.eruption-3.5)*yr), 92.5)
			near(t, "after eruption", g.At((test.eruption+1)*yr), 90)
		})
	}
}

// TestProblemIsLinear holds that a problem with its columns is the problem of
// fixed values: base and (value - base) x column add up.
func TestProblemIsLinear(t *testing.T) {
	build := func(zones, rim string) (*diffusion.Problem, []FreeValue) {
		text := strings.NewReplacer(`["free", "58 ppm"]`, zones, `{ held = "skin" }`, rim).Replace(sound)
		s, err := parse("s.toml", []byte(text), memory(soundFiles()))
		if err != nil {
			t.Fatal(err)
		}
		p, free, err := s.Crystals[0].Problem(&s.Crystals[0].Elements[0], s.Paths[0].History)
		if err != nil {
			t.Fatal(err)
		}
		return p, free
	}
	open, free := build(`["free", "58 +- 2 ppm"]`, `[ { held = "skin" }, { held = "90 +- 3 ppm", from = "1 yr after start" }, { held = "core", from = "2 yr after start" } ]`)
	fixed, none := build(`["71 ppm", "55 ppm"]`, `[ { held = "skin" }, { held = "95 ppm", from = "1 yr after start" }, { held = "core", from = "2 yr after start" } ]`)
	if len(free) != 3 || len(none) != 0 || len(fixed.Free) != 0 {
		t.Fatalf("free values %v and %v", free, none)
	}
	values := []float64{71, 55, 95}
	for i := range open.Zones {
		sum := open.Zones[i].Start
		for k, f := range free {
			sum += (values[k] - f.Prior.Value) * open.Free[k].Start[i]
		}
		near(t, "start", sum, fixed.Zones[i].Start)
	}
	for i := range open.Outer {
		sum := open.Outer[i].Value
		for k, f := range free {
			sum += (values[k] - f.Prior.Value) * open.Free[k].Outer[i]
		}
		near(t, "rim", sum, fixed.Outer[i].Value)
	}
}
