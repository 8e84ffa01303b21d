package paths

import (
	"errors"
	"fmt"
	"math"
	"math/rand/v2"
	"strings"
	"testing"
)

// near fails the test unless got is within tol of want; NaN never is.
func near(t *testing.T, what string, got, want, tol float64) {
	t.Helper()
	if got == want { // infinities
		return
	}
	if !(math.Abs(got-want) <= tol) {
		t.Errorf("%s: got %.12g, want %.12g, difference %.3g, allowed %.3g", what, got, want, got-want, tol)
	}
}

// exact is what round-off leaves of sums of a few terms of order one.
const exact = 1e-12

// curveOf returns the curve with knots at xs that has value and slope of f.
func curveOf(xs []float64, f, slope func(float64) float64) Curve {
	c := Curve{LnM: xs}
	for _, x := range xs {
		c.ChiSq = append(c.ChiSq, f(x))
		c.Slope = append(c.Slope, slope(x))
	}
	return c
}

// A cubic is its own Hermite interpolant, so values, slopes and lowest point
// are known from calculus.
func TestCurveIsExactForACubic(t *testing.T) {
	f := func(x float64) float64 { return x*x*x - 3*x + 5 } // lowest at 1, highest at -1
	slope := func(x float64) float64 { return 3*x*x - 3 }
	c := curveOf([]float64{-1.5, -0.25, 0.5, 2.5}, f, slope)
	for _, x := range []float64{-1.5, -1, -0.25, 0, 0.5, 0.9, 2, 2.5} {
		near(t, fmt.Sprintf("value at %g", x), c.At(x), f(x), exact)
	}
	for i := range 3 {
		q := c.piece(i)
		mid := (q.x0 + q.x1) / 2
		_, got := q.at(mid)
		near(t, fmt.Sprintf("slope at %g", mid), got, slope(mid), exact)
	}
	x, y := c.Lowest()
	near(t, "place of the lowest", x, 1, 1e-9) // a minimum is known to the root of round-off at worst
	near(t, "lowest", y, 3, exact)
	near(t, "before the first knot", c.At(-9), f(-1.5), 0)
	near(t, "after the last knot", c.At(9), f(2.5), 0)
}

func TestQuadraticRoots(t *testing.T) {
	for _, test := range []struct {
		name    string
		a, b, c float64
		want    []float64
	}{
		{"two", 1, -3, 2, []float64{2, 1}},
		{"none", 1, 0, 1, nil},
		{"double", 1, -2, 1, []float64{1, 1}},
		{"straight line", 0, 2, -3, []float64{1.5}},
		{"constant", 0, 0, 4, nil},
		{"one tiny, no digits lost", 1, -1e9, 1, []float64{1e9, 1e-9}},
		{"not a number", math.NaN(), 1, 1, nil},
	} {
		t.Run(test.name, func(t *testing.T) {
			got := quadraticRoots(test.a, test.b, test.c)
			if len(got) != len(test.want) {
				t.Fatalf("got %v, want %v", got, test.want)
			}
			for i := range got {
				near(t, "root", got[i], test.want[i], exact*math.Abs(test.want[i]))
			}
		})
	}
}

// well is a smooth well in a plain of the given height: near its bottom
// height (x-at)^2/2, far away height.
func well(height, at float64) func(float64) float64 {
	return func(x float64) float64 { return -height * math.Expm1(-(x-at)*(x-at)/2) }
}

// wellEnd is how far from its bottom such a well has risen to level.
func wellEnd(height, level float64) float64 { return math.Sqrt(-2 * math.Log1p(-level/height)) }

// step rises from 0 far below at to height far above it.
func step(height, at float64) func(float64) float64 {
	return func(x float64) float64 { return height / (1 + math.Exp(at-x)) }
}

// stepEnd is where such a step has risen to level.
func stepEnd(height, at, level float64) float64 { return at - math.Log(height/level-1) }

func TestBelow(t *testing.T) {
	xs := make([]float64, 401)
	for i := range xs {
		xs[i] = float64(i)/20 - 10
	}
	inf := math.Inf(1)
	rises, falls := step(100, 2), func(x float64) float64 { return step(100, -2)(-x) }
	two := func(x float64) float64 { return math.Min(well(50, -4)(x), well(50, 5)(x)) }
	for _, test := range []struct {
		name   string
		f      func(float64) float64
		level  float64
		lo, hi float64
		ranges int
	}{
		{"well", well(50, 1), 1, 1 - wellEnd(50, 1), 1 + wellEnd(50, 1), 1},
		{"open towards less diffusion", rises, 3.84, -inf, stepEnd(100, 2, 3.84), 1},
		{"open towards more diffusion", falls, 3.84, -stepEnd(100, -2, 3.84), inf, 1},
		{"no information", func(float64) float64 { return 7 }, 8, -inf, inf, 1},
		{"two wells", two, 2, -4 - wellEnd(50, 2), 5 + wellEnd(50, 2), 2},
		{"above the lower plain", two, 60, -inf, inf, 1},
		{"nowhere", well(50, 0), -1, math.NaN(), math.NaN(), 0},
	} {
		t.Run(test.name, func(t *testing.T) {
			c := curveThrough(xs, test.f)
			lo, hi := c.Below(test.level)
			if math.IsNaN(test.lo) {
				if !math.IsNaN(lo) || !math.IsNaN(hi) {
					t.Errorf("got %g to %g, want no interval", lo, hi)
				}
			} else {
				near(t, "lower end", lo, test.lo, 1e-3) // knots 0.05 apart
				near(t, "upper end", hi, test.hi, 1e-3)
			}
			if n := c.Ranges(test.level); n != test.ranges {
				t.Errorf("%d ranges, want %d", n, test.ranges)
			}
		})
	}
}

// curveThrough returns the curve with knots at xs on f, slopes from the knots.
func curveThrough(xs []float64, f func(float64) float64) Curve {
	c := Curve{}
	for _, x := range xs {
		c.LnM, c.ChiSq = append(c.LnM, x), append(c.ChiSq, f(x))
	}
	c.settleSlopes()
	return c
}

// Where one piece leaves the level and comes back to it, two ranges lie in it.
func TestRangesWithinOnePiece(t *testing.T) {
	for _, test := range []struct {
		name   string
		c      Curve
		ranges int
		lo, hi float64
	}{
		{"a hump between two knots below", Curve{LnM: []float64{0, 2}, ChiSq: []float64{0, 0}, Slope: []float64{4, -4}}, 2,
			math.Inf(-1), math.Inf(1)},
		{"a dip between two knots above", Curve{LnM: []float64{0, 2}, ChiSq: []float64{2, 2}, Slope: []float64{-4, 4}}, 1,
			1 - math.Sqrt(0.5), 1 + math.Sqrt(0.5)}, // 2 (x-1)^2 = 1
		// (x-1)(x-2)(3.5-x) + 1 falls through the level at 1, rises at 2, falls at 3.5
		{"a dip, a hump and the last knot below", Curve{LnM: []float64{0, 4}, ChiSq: []float64{8, -2}, Slope: []float64{-12.5, -8.5}}, 2,
			1, math.Inf(1)},
	} {
		t.Run(test.name, func(t *testing.T) {
			if n := test.c.Ranges(1); n != test.ranges {
				t.Errorf("%d ranges, want %d", n, test.ranges)
			}
			lo, hi := test.c.Below(1)
			near(t, "lower end", lo, test.lo, 1e-9)
			near(t, "upper end", hi, test.hi, 1e-9)
		})
	}
}

// The sum of curves is their sum everywhere, not only at the knots.
func TestSum(t *testing.T) {
	rng := rand.New(rand.NewPCG(4, 1))
	var cs []Curve
	for k := range 3 {
		c := Curve{Points: 10 + k, Free: k}
		for x := -14.0; x < 14; x += 0.2 + 2*rng.Float64() {
			c.LnM, c.ChiSq = append(c.LnM, x), append(c.ChiSq, 100*rng.Float64())
		}
		c.LnM, c.ChiSq = append(c.LnM, 14), append(c.ChiSq, 50)
		c.settleSlopes()
		cs = append(cs, c)
	}
	sum := Sum(cs)
	if sum.Points != 33 || sum.Free != 3 {
		t.Errorf("%d points and %d free values, want 33 and 3", sum.Points, sum.Free)
	}
	worst := 0.0
	for range 1000 {
		x := (2*rng.Float64() - 1) * 15
		want := 0.0
		for i := range cs {
			want += cs[i].At(x)
		}
		worst = math.Max(worst, math.Abs(sum.At(x)-want))
	}
	near(t, "largest difference", worst, 0, 1e-10) // hundreds, with the round-off of cubics
}

// scanned scans f and counts how often it is asked.
func scanned(t *testing.T, f func(float64) float64) (Curve, int) {
	t.Helper()
	n := 0
	c, err := scan(20, 2, func(lnM []float64) ([]float64, error) {
		var out []float64
		for _, x := range lnM {
			out = append(out, f(x))
			n++
		}
		return out, nil
	})
	if err != nil {
		t.Fatal(err)
	}
	return c, n
}

// blurred is chi-square of an error-function profile against m times the
// diffusion that made it, seen without noise by a spot: what is really
// scanned. precision is the height of the step in sigmas, truth the ln of the
// right multiplier and spot its square relative to 4 G.
func blurred(precision, truth, spot float64) func(float64) float64 {
	return func(lnM float64) float64 {
		sum := 0.0
		for i := range 41 {
			x := float64(i-20) / 5
			seen := math.Erf(x / math.Sqrt(1+spot))
			model := math.Erf(x / math.Sqrt(math.Exp(lnM-truth)+spot))
			sum += precision * precision / 4 * (seen - model) * (seen - model)
		}
		return sum
	}
}

// crossed returns where f reaches level between inside, where it is lower, and
// outside, where it is higher; infinity at the same side if it is not.
func crossed(f func(float64) float64, level, inside, outside float64) float64 {
	if f(outside) <= level {
		return math.Copysign(math.Inf(1), outside)
	}
	return bisect(func(x float64) bool { return f(x) > level }, outside, inside)
}

// The shift factor and its intervals are wanted to 1 %. So must they be
// whatever the curve is like, and without asking for ever.
func TestScan(t *testing.T) {
	const (
		percent  = 0.01 // of m
		mostAsks = 160  // each is a solve: 25 of the first scan, then halvings around one or two minima
	)
	parabola := func(sigma, at float64) func(float64) float64 {
		return func(x float64) float64 { return (x - at) * (x - at) / sigma / sigma }
	}
	two := func(depth float64) func(float64) float64 {
		return func(x float64) float64 { return well(1000, -8)(x) + well(depth, 7)(x) }
	}
	for _, test := range []struct {
		name string
		f    func(float64) float64
		at   float64 // of the lowest
		ends bool    // whether outside is above the level at both ends
	}{
		{"parabola, sigma 2", parabola(2, 0.3), 0.3, true},
		{"parabola, sigma 0.5", parabola(0.5, -6.1), -6.1, true},
		{"parabola, sigma 0.005", parabola(0.005, 1.234), 1.234, true},
		{"parabola, sigma 0.005 at a knot", parabola(0.005, 0), 0, true},
		{"well of sigma 1", well(40, 2.2), 2.2, true},
		{"well of sigma 0.03", well(1e3, -3.3), -3.3, true},
		{"well of sigma 0.005", well(4e4, 5.5), 5.5, true},
		{"well of sigma 0.001", well(1e6, 5.1), 5.1, true},
		{"two wells, the left deeper", two(990), -8, true},
		{"two wells, the right deeper", two(1010), 7, true},
		{"profile, 20 sigma high", blurred(20, 0, 0.05), 0, true},
		{"profile, 300 sigma high", blurred(300, -4, 0.05), -4, true},
		{"profile, 5000 sigma high", blurred(5000, 6.9, 0.05), 6.9, true},
		{"profile finer than the spot", blurred(30, -6, 1), math.NaN(), true},
	} {
		t.Run(test.name, func(t *testing.T) {
			c, asked := scanned(t, test.f)
			t.Logf("asked %d times", asked)
			if asked > mostAsks {
				t.Errorf("asked %d times, want at most %d", asked, mostAsks)
			}
			x, low := c.Lowest()
			if !math.IsNaN(test.at) {
				near(t, "ln m of the lowest", x, test.at, percent)
				near(t, "lowest", low, test.f(test.at), 2*curveError)
			}
			for _, rise := range []float64{Critical(0.68, 1), Critical(0.95, 1)} {
				level := test.f(x) + rise
				lo, hi := c.Below(level)
				wantLo, wantHi := crossed(test.f, level, x, -scanDecades*math.Ln10), crossed(test.f, level, x, scanDecades*math.Ln10)
				near(t, "ln m of the lower end", lo, wantLo, percent)
				near(t, "ln m of the upper end", hi, wantHi, percent)
				if width := wantHi - wantLo; !math.IsInf(width, 0) {
					near(t, "width", hi-lo, width, 0.05*width) // 1 % of m says little where the interval is narrower
				}
			}
		})
	}
}

// Of two minima the deeper is found, whatever the curve through the first few
// knots looks like.
func TestScanFindsTheDeeperWell(t *testing.T) {
	rng := rand.New(rand.NewPCG(4, 2))
	for range 500 {
		height := math.Pow(10, 1+6*rng.Float64())
		left, right := -11+8*rng.Float64(), 3+8*rng.Float64()
		shallower := 3.0 + 10*rng.Float64() // by so much chi-square
		f := func(x float64) float64 { return well(height+shallower, left)(x) + well(height, right)(x) }
		c, _ := scanned(t, f)
		x, low := c.Lowest()
		// the other well has died away at a distance of 6 and more
		if !(math.Abs(x-left) <= 0.01) || !(math.Abs(low-height) <= 2*curveError) {
			t.Fatalf("wells of %g at %g and %g at %g: lowest %g at %g", height+shallower, left, height, right, low, x)
		}
	}
}

// Chi-square carries the round-off of a solve. It must not be taken for a
// slope where a minimum falls on a knot but for round-off.
func TestScanBearsRoundOff(t *testing.T) {
	rng := rand.New(rand.NewPCG(4, 3))
	for range 200 {
		at := math.Pow(10, -15+10*rng.Float64()) // of the knot at 0
		f := func(x float64) float64 {
			noise := 1e-9 * math.Sin(1e6*x+1e17*(x-at)) // of the last digits of some 1e5
			return 400*(x-at)*(x-at) + noise
		}
		c, _ := scanned(t, f)
		lo, hi := c.Below(1)
		x, low := c.Lowest()
		if !(math.Abs(x) <= 0.01) || !(math.Abs(low) <= 2*curveError) || !(math.Abs(hi-0.05) <= 0.002) || !(math.Abs(lo+0.05) <= 0.002) {
			t.Fatalf("minimum at %g: found %g at %g, 1 above it from %g to %g, want -0.05 to 0.05", at, low, x, lo, hi)
		}
	}
}

// Profiles that disagree meet where neither is at its best. The joint curve must
// be right there as well.
func TestSharpenMakesTheJointCurveRight(t *testing.T) {
	for _, test := range []struct {
		name string
		fs   []func(float64) float64
		near float64 // the joint minimum, roughly
	}{
		{"wells side by side", []func(float64) float64{well(500, -0.9), well(500, 0.8)}, 0},
		{"profiles side by side", []func(float64) float64{blurred(100, -0.4, 0.05), blurred(60, 1.1, 0.3)}, 0},
		{"three", []func(float64) float64{blurred(100, -3, 0.05), blurred(60, -2, 0.3), well(300, -2.2)}, -2.6},
		{"a limit and a well", []func(float64) float64{step(900, 0.1), well(300, 1.3)}, -10},
	} {
		t.Run(test.name, func(t *testing.T) {
			var cs []Curve
			var each []sampler
			asked := 0
			sum := func(x float64) (y float64) {
				for _, f := range test.fs {
					y += f(x)
				}
				return y
			}
			for _, f := range test.fs {
				c, _ := scanned(t, f)
				cs = append(cs, c)
				each = append(each, func(lnM []float64) (out []float64, err error) {
					for _, x := range lnM {
						out = append(out, f(x))
						asked++
					}
					return out, nil
				})
			}
			if err := sharpen(cs, each); err != nil {
				t.Fatal(err)
			}
			if most := 60 * len(cs); asked > most {
				t.Errorf("asked %d times, want at most %d", asked, most)
			}
			joint := Sum(cs)
			x, low := joint.Lowest()
			near(t, "lowest", low, sum(x), 2*curveError)
			for _, rise := range []float64{Critical(0.68, 1), Critical(0.95, 1)} {
				lo, hi := joint.Below(sum(x) + rise)
				near(t, "lower end", lo, crossed(sum, sum(x)+rise, x, -scanDecades*math.Ln10), 0.01)
				near(t, "upper end", hi, crossed(sum, sum(x)+rise, x, scanDecades*math.Ln10), 0.01)
			}
			if y := sum(x) - curveError; y > sum(x-0.01) || y > sum(x+0.01) {
				t.Errorf("%g is not the minimum: %g, but %g and %g beside it", x, y, sum(x-0.01), sum(x+0.01))
			}
		})
	}
}

// What cannot be a chi-square is an error that says where.
func TestScanRefusesWhatIsNoNumber(t *testing.T) {
	failed := errors.New("the solver failed")
	for _, test := range []struct {
		name  string
		value float64
		err   error
		want  string
	}{
		{"not a number", math.NaN(), nil, "at a multiplier of 1 "},
		{"infinite", math.Inf(1), nil, "at a multiplier of 1 "},
		{"an error", 0, failed, failed.Error()},
	} {
		t.Run(test.name, func(t *testing.T) {
			_, err := scan(9, 2, func(lnM []float64) ([]float64, error) {
				out := make([]float64, len(lnM))
				for i, x := range lnM {
					out[i] = x * x
					if x == 0 {
						out[i] = test.value
					}
				}
				return out, test.err
			})
			if err == nil || !strings.Contains(err.Error(), test.want) {
				t.Errorf("got %v, want an error with %q", err, test.want)
			}
		})
	}
}
