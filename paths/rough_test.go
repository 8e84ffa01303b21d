package paths

import (
	"math"
	"testing"
)

// Where chi-square is as rough as a rasp far above its lowest, the scan does not
// follow every tooth down, and the lowest is found as without them.
func TestScanOfARoughCurve(t *testing.T) {
	smooth := func(x float64) float64 { return 20 + 700*(1-math.Exp(-x*x/2)) }
	rough := func(x float64) float64 {
		if x > -5 {
			return smooth(x)
		}
		// teeth of any depth: the digits of a sine
		_, tooth := math.Modf(1e4 * math.Abs(math.Sin(1e5*x)))
		return smooth(x) - 300*tooth
	}
	want, least := scanned(t, smooth)
	got, n := scanned(t, rough)
	const more = 80 // a few teeth in each of sixteen rounds, and the lowest once more
	if most := least + more; n > most {
		t.Errorf("asked %d times, without teeth %d, want no more than %d", n, least, most)
	}
	for _, x := range []float64{-0.3, 0, 0.1, 0.25} {
		near(t, "curve", got.At(x), want.At(x), curveError)
	}
}
