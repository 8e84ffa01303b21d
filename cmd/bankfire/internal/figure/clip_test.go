package figure

import (
	"math"
	"slices"
	"testing"
)

func TestClip(t *testing.T) {
	in := box{0, 0, 10, 10}
	nan := math.NaN()
	tests := []struct {
		name string
		give []point
		want [][]point
	}{
		{"inside", []point{{1, 1}, {2, 5}, {9, 9}}, [][]point{{{1, 1}, {2, 5}, {9, 9}}}},
		{"outside", []point{{-1, 1}, {-2, 5}}, nil},
		{"through", []point{{-5, 5}, {15, 5}}, [][]point{{{0, 5}, {10, 5}}}},
		{"corner to corner", []point{{-5, -5}, {15, 15}}, [][]point{{{0, 0}, {10, 10}}}},
		{"out and in again", []point{{5, 5}, {5, 15}, {7, 15}, {7, 5}}, [][]point{{{5, 5}, {5, 10}}, {{7, 10}, {7, 5}}}},
		{"broken", []point{{1, 1}, {2, 2}, {nan, 3}, {4, 4}, {5, 5}}, [][]point{{{1, 1}, {2, 2}}, {{4, 4}, {5, 5}}}},
		{"infinite", []point{{1, 1}, {math.Inf(1), 1}}, nil},
		{"far ends", []point{{5, -1 << 40}, {5, 1 << 40}}, [][]point{{{5, 0}, {5, 10}}}},
		{"one point", []point{{1, 1}}, nil},
		{"none", nil, nil},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			if got := clip(test.give, in); !slices.EqualFunc(got, test.want, slices.Equal[[]point]) {
				t.Errorf("clip(%v) = %v, want %v", test.give, got, test.want)
			}
		})
	}
	for _, piece := range clip([]point{{5, -1e200}, {7, 1e200}, {1e170, 3}}, in) {
		for _, p := range piece {
			if !in.holds(box{p.x, p.y, p.x, p.y}) {
				t.Errorf("a line between ends beyond all digits is clipped to %v, outside the box", piece)
			}
		}
	}
}
