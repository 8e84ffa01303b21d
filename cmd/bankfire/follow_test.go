package main

import (
	"math"
	"slices"
	"strings"
	"testing"

	"bankfire/paths"
)

// Numbers that stand in one table have the same decimals: as many as show three
// digits of the range that they span.
func TestAlike(t *testing.T) {
	for _, test := range []struct {
		name    string
		columns [][]float64
		want    string
	}{
		{"tens", [][]float64{{80, 77.94}, {57.9, 58}}, "80.0 77.9 57.9 58.0"},
		{"near each other", [][]float64{{80, 79}, {79.5, 79.1234}}, "80.00 79.00 79.50 79.12"},
		{"all the same", [][]float64{{92.47, 92.47}, {92.47, 92.47 + 1e-12}}, "92.5 92.5 92.5 92.5"},
		{"hundreds", [][]float64{{1234, 900}, {100, 0}}, "1234 900 100 0"},
		{"small", [][]float64{{0.012, 0.002}}, "0.0120 0.0020"},
		{"traces", [][]float64{{1.2e-9, 3e-10}}, "1.20e-09 3.00e-10"},
		{"nothing", [][]float64{{0, 0}}, "0 0"},
		{"round-off below zero", [][]float64{{50, -1e-13}}, "50.0 0.0"},
		{"below zero", [][]float64{{50, -1}}, "50.0 -1.0"},
	} {
		t.Run(test.name, func(t *testing.T) {
			value := alike(test.columns)
			var got []string
			for _, x := range slices.Concat(test.columns...) {
				got = append(got, value(x))
			}
			if text := strings.Join(got, " "); text != test.want {
				t.Errorf("got %s, want %s", text, test.want)
			}
		})
	}
}

func TestInTime(t *testing.T) {
	order := inTime([]paths.Snapshot{{Time: 30}, {Time: 10}, {Time: 20}, {Time: 10}})
	if want := []int{1, 3, 2, 0}; !slices.Equal(order, want) {
		t.Errorf("got %v, want %v", order, want)
	}
}

func TestShareText(t *testing.T) {
	for _, test := range []struct {
		share float64
		want  string
	}{{1, "100.00 %"}, {0.0916, "9.16 %"}, {0.5, "50.00 %"}, {6e-5, "0.01 %"}, {1e-6, "< 0.01 %"}, {math.SmallestNonzeroFloat64, "< 0.01 %"}, {0, "0.00 %"}} {
		if got := shareText(test.share); got != test.want {
			t.Errorf("%g: got %s, want %s", test.share, got, test.want)
		}
	}
}
