package figure

import (
	"slices"
	"strings"
	"testing"
)

func TestWrap(t *testing.T) {
	f, h := newFonts(), hand{size: 7}
	width := f.width("a dozen letters", h)
	tests := []struct {
		name, text string
		most       int
		want       []string
	}{
		{"fits", "a dozen letters", 1, []string{"a dozen letters"}},
		{"wraps", "a dozen letters and more", 2, []string{"a dozen letters", "and more"}},
		{"white space", "  a\n\tdozen \x00 letters ", 2, []string{"a dozen letters"}},
		{"empty", " ", 2, nil},
		{"cut behind a word", "a dozen letters, and more", 1, []string{"a dozen…"}},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			if got := f.wrap(test.text, h, width, test.most); !slices.Equal(got, test.want) {
				t.Errorf("wrap(%q) = %q, want %q", test.text, got, test.want)
			}
		})
	}
	for _, text := range []string{strings.Repeat("wordwithoutend", 9), strings.Repeat("many words ", 30), "中文字中文字中文字中文字中文字"} {
		for most := 1; most <= 3; most++ {
			lines := f.wrap(text, h, width, most)
			if len(lines) == 0 || len(lines) > most || !strings.HasSuffix(lines[len(lines)-1], "…") {
				t.Errorf("wrap(%.12q..., %d lines) = %q; want a last line that ends in an ellipsis", text, most, lines)
			}
			for _, l := range lines {
				if f.width(l, h) > width {
					t.Errorf("line %q is wider than asked", l)
				}
			}
		}
	}
}
