package thermal

import (
	"math"
	"os"
	"strconv"
	"testing"
)

// TestFuzzSeeds: a fuzz target whose committed seeds have moved would pass without any.
func TestFuzzSeeds(t *testing.T) {
	for _, target := range []string{"FuzzParseQuantity", "FuzzParseMoment"} {
		t.Run(target, func(t *testing.T) {
			seeds, err := os.ReadDir("testdata/fuzz/" + target)
			if err != nil || len(seeds) == 0 {
				t.Errorf("%d seeds, error %v; want some", len(seeds), err)
			}
		})
	}
}

// FuzzParseQuantity: no text makes a reader of quantities panic or give what is not finite; an error is an *InputError
// about that text; what is accepted survives being written in SI and read again, to the bit.
func FuzzParseQuantity(f *testing.F) {
	for _, test := range quantityTests {
		f.Add(test.text, uint8(test.dim))
	}
	for _, test := range refusedQuantities {
		f.Add(test.text, uint8(test.dim))
	}
	f.Fuzz(func(t *testing.T, text string, d uint8) {
		dim := Dimension(int(d) % len(dimensions))
		q, err := ReadQuantity(text, dim)
		fuzzedError(t, text, err)
		if err == nil {
			fuzzedQuantity(t, q)
		}
		u, err := ParseUncertain(text, dim)
		fuzzedError(t, text, err)
		finite(t, text, u.Value, u.Sigma)
		lo, hi, err := ParseRange(text, dim)
		fuzzedError(t, text, err)
		finite(t, text, lo, hi)
		factor, err := ParseFactor(text)
		fuzzedError(t, text, err)
		finite(t, text, factor.Value, factor.Sigma)
		c, _, err := ParseConcentration(text)
		fuzzedError(t, text, err)
		finite(t, text, c.Value, c.Sigma)
	})
}

// fuzzedQuantity writes q in the unit in which we compute, and reads it again.
func fuzzedQuantity(t *testing.T, q Quantity) {
	t.Helper()
	finite(t, q.Unit, q.Value)
	written, _ := findUnit(q.Unit, q.Dim)
	for _, u := range dimensions[q.Dim].units {
		if u.scale != 1 || u.offset != 0 || u.family != written.family {
			continue
		}
		text := strconv.FormatFloat(q.Value, 'g', -1, 64) + " " + u.name
		if again, err := ParseQuantity(text, q.Dim); again != q.Value || err != nil {
			t.Errorf("%v written as %q is read as %g, error %v", q, text, again, err)
		}
		return
	}
	t.Errorf("%s has no unit of scale 1 that %s converts to", q.Dim, q.Unit)
}

// fuzzedError wants no error or an *InputError about the text.
func fuzzedError(t *testing.T, text string, err error) {
	t.Helper()
	if err == nil {
		return
	}
	input, ok := err.(*InputError)
	if !ok || input == nil {
		t.Fatalf("%q: error %#v is no *InputError", text, err)
	}
	if input.Value != text || input.Problem == "" || input.Remedy == "" {
		t.Errorf("%q: error about %q, problem %q, remedy %q", text, input.Value, input.Problem, input.Remedy)
	}
}

func finite(t *testing.T, text string, values ...float64) {
	t.Helper()
	for _, x := range values {
		if math.IsNaN(x - x) {
			t.Errorf("%q is read as %g", text, x)
		}
	}
}

// FuzzParseMoment: no text makes it panic; an error is an *InputError about that text; a moment has a finite offset, a
// name where its event needs one, and is read alike without the space around it.
func FuzzParseMoment(f *testing.F) {
	for _, m := range momentTests {
		f.Add(m.Text)
	}
	for _, test := range refusedMoments {
		f.Add(test.text)
	}
	f.Fuzz(func(t *testing.T, text string) {
		m, err := ParseMoment(text)
		fuzzedError(t, text, err)
		if err != nil {
			return
		}
		finite(t, text, m.Offset)
		named := m.Kind == StartOf || m.Kind == EndOf || m.Kind == Added
		if named != (m.Name != "") || m.Text != text || m.Kind == AfterStart && m.Offset < 0 {
			t.Errorf("%q is read as %+v", text, m)
		}
		again, err := ParseMoment(" " + text + "\t")
		again.Text = text
		if again != m || err != nil {
			t.Errorf("%q between spaces is read as %+v, error %v, want %+v", text, again, err, m)
		}
	})
}
