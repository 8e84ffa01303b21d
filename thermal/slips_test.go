package thermal

import (
	"math"
	"strings"
	"testing"
)

// Textbook cases of the edit distance; a swap is one slip, not two.
func TestSlips(t *testing.T) {
	long := strings.Repeat("x", mostLetters+1)
	tests := []struct {
		a, b string
		want int
	}{
		{"", "", 0}, {"", "abc", 3}, {"abc", "", 3}, {"kyr", "kyr", 0}, {"yars", "years", 1},
		{"kitten", "sitting", 3}, {"saturday", "sunday", 3}, {"ab", "ba", 1}, {"ca", "abc", 3},
		{long[1:], "x", mostLetters - 1}, {long, "x", math.MaxInt}, {"x", long, math.MaxInt}, {long, long, 0},
	}
	for _, test := range tests {
		t.Run(test.a+" to "+test.b, func(t *testing.T) {
			if got := Slips(test.a, test.b); got != test.want {
				t.Errorf("got %d, want %d", got, test.want)
			}
		})
	}
}
