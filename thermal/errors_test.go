package thermal

import (
	"strings"
	"testing"
)

func TestInputError(t *testing.T) {
	tests := []struct {
		name string
		err  InputError
		want string
	}{
		{"everything", InputError{"paths.toml", "hold", "-300 C", "below absolute zero", "want more than -273.15 C", 14, 9},
			`paths.toml:14:9: hold "-300 C": below absolute zero; want more than -273.15 C`},
		{"no column", InputError{File: "a.csv", Line: 3, Field: "x [um]", Value: "7,5", Problem: "p", Remedy: "r"},
			`a.csv:3: x [um] "7,5": p; r`},
		{"no line", InputError{File: "a.csv", Problem: "has no rows"}, `a.csv: has no rows`},
		{"no file", InputError{Line: 3, Col: 4, Problem: "p"}, `line 3:4: p`},
		{"value alone", InputError{Value: "x", Problem: "p", Remedy: "r"}, `"x": p; r`},
		{"field alone", InputError{Field: "--at", Problem: "p"}, `--at: p`},
		{"quotes and letters stay readable", InputError{Value: "3 µm \"", Problem: "p"}, `"3 µm \"": p`},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			if got := test.err.Error(); got != test.want {
				t.Errorf("got  %s\nwant %s", got, test.want)
			}
		})
	}
}

func TestPlace(t *testing.T) {
	place := Place{File: "s.toml", Line: 2, Col: 5, Field: "for"}
	const want = `s.toml:2:5: for "12": has no unit; write 12 yr`
	if got := place.Error("12", "has no unit", "write 12 yr").Error(); got != want {
		t.Errorf("got  %s\nwant %s", got, want)
	}
	bare := &InputError{Value: "12", Problem: "has no unit", Remedy: "write 12 yr"}
	if got := bare.At(place).Error(); got != want {
		t.Errorf("got  %s\nwant %s", got, want)
	}
	if bare.File != "" {
		t.Errorf("At changed its receiver")
	}
}

func TestShorten(t *testing.T) {
	for name, test := range map[string]struct{ text, want string }{
		"what fits": {strings.Repeat("µ", 60), strings.Repeat("µ", 60)},
		"too long":  {strings.Repeat("µ", 61), strings.Repeat("µ", 57) + "..."},
	} {
		t.Run(name, func(t *testing.T) {
			if got := Shorten(test.text); got != test.want {
				t.Errorf("got  %s\nwant %s", got, test.want)
			}
		})
	}
}
