package figure

import (
	"math"
	"slices"
	"testing"
)

// labels lists the labels of the major ticks.
func labels(ticks []tick) []string {
	var out []string
	for _, t := range ticks {
		if t.label != "" {
			out = append(out, t.label)
		}
	}
	return out
}

// Expected labels are what one would write by hand on graph paper.
func TestRoundTicks(t *testing.T) {
	tests := []struct {
		name   string
		lo, hi float64
		most   int
		power  int
		want   []string
	}{
		{"micrometres", 87, 198, 7, 0, []string{"100", "120", "140", "160", "180"}},
		{"temperatures", 638, 792, 7, 0, []string{"650", "700", "750"}},
		{"ends included", 0, 1, 5, 0, []string{"0.0", "0.2", "0.4", "0.6", "0.8", "1.0"}},
		{"about zero", -0.03, 0.03, 6, 0, []string{"−0.03", "−0.02", "−0.01", "0.00", "0.01", "0.02", "0.03"}},
		{"negative", -42, -11, 4, 0, []string{"−40", "−30", "−20"}},
		{"two decimals", 0.412, 0.467, 6, 0, []string{"0.42", "0.43", "0.44", "0.45", "0.46"}},
		{"small", 0, 6e-7, 6, -7, []string{"0", "1", "2", "3", "4", "5", "6"}},
		{"large", 1.5e7, 1.9e7, 4, 7, []string{"1.5", "1.6", "1.7", "1.8", "1.9"}},
		{"far from zero", 9990, 10010, 4, 0, []string{"9990", "9995", "10000", "10005", "10010"}},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			ticks, power := roundTicks(span{test.lo, test.hi}, test.most)
			if got := labels(ticks); !slices.Equal(got, test.want) || power != test.power {
				t.Errorf("roundTicks(%g..%g, %d) = %q, power %d; want %q, power %d",
					test.lo, test.hi, test.most, got, power, test.want, test.power)
			}
		})
	}
}

func TestDecadeTicks(t *testing.T) {
	tests := []struct {
		name   string
		lo, hi float64 // log10 of years
		most   int
		want   []string
		ticks  int // minor ones included, counted by hand
	}{
		{"two decades", -0.05, 2.05, 7, []string{"1 yr", "10 yr", "100 yr"}, 3 + 16 + 1}, // 0.9 yr lies inside
		{"storage", 0.5, 5.1, 7, []string{"10 yr", "100 yr", "1 kyr", "10 kyr", "100 kyr"}, 5 + 6 + 4*8},
		{"every second", -2.1, 6.2, 7, []string{"0.01 yr", "1 yr", "100 yr", "10 kyr", "1 Myr"}, 9},
		{"very short", -6, -4, 7, []string{"10⁻⁶ yr", "10⁻⁵ yr", "10⁻⁴ yr"}, 3 + 16},
		{"very long", 9, 13, 7, []string{"1 Gyr", "10 Gyr", "100 Gyr", "10¹² yr", "10¹³ yr"}, 5 + 32},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			ticks := decadeTicks(span{test.lo, test.hi}, test.most)
			if got := labels(ticks); !slices.Equal(got, test.want) {
				t.Errorf("decadeTicks(%g..%g) = %q, want %q", test.lo, test.hi, got, test.want)
			}
			if len(ticks) != test.ticks {
				t.Errorf("decadeTicks(%g..%g): %d ticks, want %d", test.lo, test.hi, len(ticks), test.ticks)
			}
			for _, k := range ticks {
				if !(k.at >= test.lo-1e-9 && k.at <= test.hi+1e-9) { // the slack of the tick search
					t.Errorf("tick at %g lies outside %g..%g", k.at, test.lo, test.hi)
				}
			}
		})
	}
}

// Whatever the data, an axis has some ticks, not too many, and finite ones.
func TestTicksAlwaysFinite(t *testing.T) {
	values := []float64{0, 1, -1, 1e-300, 5e-324, 3e-7, 1e150, -1e150, math.Pi, 1e10, 1e10 + 1}
	for _, a := range values {
		for _, b := range values {
			s := newSpan()
			s.take(a, b, math.NaN(), math.Inf(1), math.Inf(-1))
			p := s.padded(0.05)
			ticks, _ := roundTicks(p, 6)
			if len(ticks) < 2 || len(ticks) > 8 {
				t.Errorf("%g..%g: %d ticks", a, b, len(ticks))
			}
			for _, k := range ticks {
				if !finite(k.at) {
					t.Errorf("%g..%g: tick at %g", a, b, k.at)
				}
			}
		}
	}
}

func TestSpanPadded(t *testing.T) {
	tests := []struct {
		name string
		give []float64
		want span
	}{
		{"empty", nil, span{0, 1}},
		{"not finite", []float64{math.NaN(), math.Inf(1)}, span{0, 1}},
		{"zero", []float64{0}, span{-1, 1}},
		{"single", []float64{50}, span{45, 55}},
		{"range", []float64{3, 1, 2}, span{0.8, 3.2}},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			s := newSpan()
			s.take(test.give...)
			got := s.padded(0.1)
			const rounding = 1e-12 // a few operations on numbers of order one
			if !(math.Abs(got.lo-test.want.lo) <= rounding && math.Abs(got.hi-test.want.hi) <= rounding) {
				t.Errorf("padded = %v, want %v", got, test.want)
			}
		})
	}
}
