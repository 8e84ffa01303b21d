package paths

import (
	"math"
	"strings"
	"testing"

	"bankfire/diffusion"
	"bankfire/paths/study"
	"bankfire/thermal"
)

// calibrated is an element whose law is known from 700 to 1150 C.
func calibrated() *study.Element {
	return &study.Element{Name: "Ti", Law: study.Law{
		Key: "mine", Law: diffusion.NewLaw(7e-8, 273e3), TMin: 700 + thermal.ZeroCelsius, TMax: 1150 + thermal.ZeroCelsius,
	}}
}

// stay is a hold at a temperature in C.
func stay(c, years float64) thermal.Spec {
	return thermal.Spec{Kind: thermal.SpecHold, Temp: c + thermal.ZeroCelsius, For: years * year}
}

// needed returns for how long D at temperature c must act to do the same as
// years at 800 C.
func needed(c, years float64) float64 {
	d := func(c float64) float64 { return math.Exp(-273e3 / (thermal.GasConstant * (c + thermal.ZeroCelsius))) }
	return years * d(800) / d(c)
}

func TestOutOfRange(t *testing.T) {
	ramp := func(c, years float64) thermal.Spec {
		return thermal.Spec{Kind: thermal.SpecRamp, Temp: c + thermal.ZeroCelsius, For: years * year}
	}
	nameless, unknown, frozen := calibrated(), calibrated(), calibrated()
	nameless.Law.Key = ""
	unknown.Law.TMin, unknown.Law.TMax = 0, 0
	frozen.Law.Law = diffusion.NewLaw(0, 273e3)
	for _, test := range []struct {
		name    string
		element *study.Element
		legs    []thermal.Spec
		want    string
	}{
		{"inside", calibrated(), []thermal.Spec{stay(700, 100), stay(1150, 1)}, ""},
		{"at its ends but for what is not printed", calibrated(), []thermal.Spec{stay(699.6, 100), stay(1150.4, 1)}, ""},
		{"all of it below", calibrated(), []thermal.Spec{stay(650, 100)},
			"mine: 100 % of the diffusion is done below its calibrated range of 700 to 1150 C, down to 650 C"},
		{"some of it below", calibrated(), []thermal.Spec{stay(800, 88), stay(642, needed(642, 12))},
			"mine: 12 % of the diffusion is done below its calibrated range of 700 to 1150 C, down to 642 C"},
		{"a little of it below", calibrated(), []thermal.Spec{stay(800, 980), stay(642, needed(642, 20))},
			"mine: 2.0 % of the diffusion is done below its calibrated range of 700 to 1150 C, down to 642 C"},
		{"next to nothing of it below", calibrated(), []thermal.Spec{stay(800, 1e5), stay(642, needed(642, 90))}, ""},
		{"cooled to room temperature in an hour", calibrated(), []thermal.Spec{stay(800, 100), ramp(20, 1e-4)}, ""},
		{"colder still, but doing nothing there", calibrated(), []thermal.Spec{stay(650, 100), ramp(20, 1e-4), stay(20, 1e6)},
			"mine: 100 % of the diffusion is done below its calibrated range of 700 to 1150 C, down to 650 C"},
		{"above", calibrated(), []thermal.Spec{stay(800, 50), stay(1200, needed(1200, 50))},
			"mine: 50 % of the diffusion is done above its calibrated range of 700 to 1150 C, up to 1200 C"},
		{"on both sides", calibrated(), []thermal.Spec{stay(800, 50), stay(640, needed(640, 20)), stay(1151, needed(1151, 30))},
			"mine: 20 % of the diffusion is done below its calibrated range of 700 to 1150 C, down to 640 C, and 30 % above it, up to 1151 C"},
		{"without a name", nameless, []thermal.Spec{stay(600, 100)},
			"the law of Ti: 100 % of the diffusion is done below its calibrated range of 700 to 1150 C, down to 600 C"},
		{"range not known", unknown, []thermal.Spec{stay(20, 100), stay(1500, 100)}, ""},
		{"where nothing moves", frozen, []thermal.Spec{stay(20, 100)}, ""},
	} {
		t.Run(test.name, func(t *testing.T) {
			if got := strings.Join(outOfRange(test.element, built(t, test.legs)), "; "); got != test.want {
				t.Errorf("got %q, want %q", got, test.want)
			}
		})
	}
}

// Along a slow ramp the depth is where all but a thousandth of G lies on the
// other side, here found by brute force.
func TestOutOfRangeDepth(t *testing.T) {
	h := built(t, []thermal.Spec{{Kind: thermal.SpecRamp, From: 800 + thermal.ZeroCelsius, Temp: 400 + thermal.ZeroCelsius, For: 1e5 * year}})
	sum, parts := 0.0, [40000]float64{}
	for i := range parts {
		temp := 400 + thermal.ZeroCelsius + (float64(i)+0.5)/100
		parts[i] = math.Exp(-273e3 / (thermal.GasConstant * temp))
		sum += parts[i]
	}
	below, depth := 0.0, 0
	share := 0.0
	for i, p := range parts {
		if below += p; below < extrapolationMatters*sum {
			depth = i
		}
		if i < 100*(700-400)-50 {
			share += p / sum
		}
	}
	want := "mine: " + percentText(share) + " of the diffusion is done below its calibrated range of 700 to 1150 C, down to " +
		strings.TrimSuffix(percentText((400+float64(depth)/100)/100), " %") + " C"
	if got := strings.Join(outOfRange(calibrated(), h), "; "); got != want {
		t.Errorf("got %q, want %q", got, want)
	}
}

// The longest path that can be written has its note in no time that anybody
// notices.
func BenchmarkOutOfRange(b *testing.B) {
	h := built(b, []thermal.Spec{{Kind: thermal.SpecRepeat, Times: thermal.MaxLegs / 2, Legs: []thermal.Spec{stay(642, 10), stay(780, 0.01)}}})
	b.ReportAllocs()
	for b.Loop() {
		outOfRange(calibrated(), h)
	}
}
