package paths

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"
)

// bowl is the curve of a well-behaved profile: chi-square floor at the
// multiplier exp(at), rising as ((lnM - at)/sigma)^2. With its own slopes it is
// exact.
func bowl(floor, at, sigma float64, points, free int) Curve {
	c := Curve{Points: points, Free: free}
	for x := -14.0; x <= 14; x++ {
		c.LnM = append(c.LnM, x)
		c.ChiSq = append(c.ChiSq, floor+square((x-at)/sigma))
		c.Slope = append(c.Slope, 2*(x-at)/sigma/sigma)
	}
	return c
}

// The critical values are those of the NIST/SEMATECH e-Handbook, 1.3.6.7.4: for
// 20 degrees of freedom 31.410, for 19 30.144, for 1 3.841 (95 %), for 20 37.566
// (99 %).
func TestVerdicts(t *testing.T) {
	ln := math.Log
	for _, test := range []struct {
		name       string
		c          Curve
		confidence float64
		want       Verdict
	}{
		{"passes as it is", bowl(19, 0.1, 0.1, 22, 2), 0.95, Reproduces},
		{"just passes", bowl(31.40, 0, 1, 22, 2), 0.95, Reproduces},
		{"just fails, and no shift mends it", bowl(31.42, 0, 1, 22, 2), 0.95, WrongShape},
		{"passes at a higher confidence", bowl(37.5, 0, 1, 22, 2), 0.99, Reproduces},
		{"fails at a higher confidence", bowl(37.6, 0, 1, 22, 2), 0.99, WrongShape},
		{"passes because two values are known, not free", bowl(33.9, 0, 1, 22, 0), 0.95, Reproduces},
		{"needs more diffusion", bowl(19, ln(10), 0.5, 22, 2), 0.95, TooSharp},
		{"needs less diffusion", bowl(19, -ln(10), 0.5, 22, 2), 0.95, TooSmooth},
		{"at the best multiplier one degree is spent: just passes", bowl(30.14, 3, 0.5, 22, 2), 0.95, TooSharp},
		{"at the best multiplier one degree is spent: just fails", bowl(30.15, 3, 0.5, 22, 2), 0.95, WrongShape},
		// 30.15 .. 31.41 passes with 20 degrees, not with 19: the path itself decides
		{"reproduces although its best would not pass with a degree less", bowl(31.0, 0, 1, 22, 2), 0.95, Reproduces},
		{"fits nothing", bowl(500, 1, 0.1, 22, 2), 0.95, WrongShape},
		{"one degree: passes", bowl(0, 1.9, 1, 3, 2), 0.95, Reproduces},
		{"one degree: the shift spends it", bowl(0, 2, 1, 3, 2), 0.95, TooSharp},
		// if the shift spent it and yet something is left, a bound was met and the degree is back
		{"one degree: the shift leaves a little", bowl(1e-3, 2, 1, 3, 2), 0.95, TooSharp},
		{"one degree: the shift leaves too much", bowl(4, 2, 1, 3, 2), 0.95, WrongShape},
		{"no degree: nothing can be judged", bowl(0.5, 0, 1, 2, 2), 0.95, Unjudged},
		{"no degree, met exactly", bowl(0, 0, 1, 2, 2), 0.95, Unjudged},
		{"fewer points than values", bowl(0, 0, 1, 2, 3), 0.95, Unjudged},
	} {
		t.Run(test.name, func(t *testing.T) {
			var o Outcome
			Judge(&o, []Curve{test.c}, nil, test.confidence)
			if o.Verdict != test.want {
				t.Errorf("%s (tail %g, misfit %g of %d), want %s", o.Verdict, o.Tail, o.Misfit, o.Degrees, test.want)
			}
			if want := test.c.Points - test.c.Free; o.Degrees != want || o.Points != test.c.Points {
				t.Errorf("%d degrees of %d points, want %d of %d", o.Degrees, o.Points, want, test.c.Points)
			}
			if got, want := fmt.Sprintf("%+v", o.Profiles), fmt.Sprintf("%+v", []Finding{o.Finding}); got != want { // NaN equals NaN
				t.Errorf("the only profile %s is not the joint finding %s", got, want)
			}
			if judged := o.Verdict != Unjudged; judged == math.IsNaN(o.Tail) || judged == math.IsNaN(o.WithLaws.Tail) || o.WithLaws.Verdict != o.Verdict {
				t.Errorf("%s has tail %g, with laws %+v", o.Verdict, o.Tail, o.WithLaws)
			}
		})
	}
}

// One and 1.96 standard deviations either side; the 68 % are those of the word,
// not of one sigma.
func TestShiftAndItsIntervals(t *testing.T) {
	var o Outcome
	Judge(&o, []Curve{bowl(19, -1.3, 0.25, 22, 2)}, nil, 0.95)
	near(t, "shift factor", o.Shift, math.Exp(-1.3), 1e-9)
	const one, two = 0.994457883209753, 1.959963984540054 // standard normal deviates of 68 and 95 %
	near(t, "68 %, lower", o.Shift68[0], math.Exp(-1.3-0.25*one), 1e-9)
	near(t, "68 %, upper", o.Shift68[1], math.Exp(-1.3+0.25*one), 1e-9)
	near(t, "95 %, lower", o.Shift95[0], math.Exp(-1.3-0.25*two), 1e-9)
	near(t, "95 %, upper", o.Shift95[1], math.Exp(-1.3+0.25*two), 1e-9)
	near(t, "misfit", o.Misfit, 19+square(1.3/0.25), 1e-9)
	if o.Ranges != 1 {
		t.Errorf("%d ranges, want 1", o.Ranges)
	}
}

// Where the data set no bound, the end is open; what is known stays known.
func TestOneSidedIntervals(t *testing.T) {
	inf := math.Inf(1)
	left, right := step(500, 5), step(500, -5)
	mirrored := func(x float64) float64 { return right(-x) }
	// the lowest is that of the end of the scan
	end := scanDecades * math.Ln10
	level := func(f func(float64) float64) float64 { return f(-end) + Critical(0.95, 1) }
	for _, test := range []struct {
		name    string
		f       func(float64) float64
		lo, hi  float64
		verdict Verdict
	}{
		{"only an upper limit, which the path keeps", left, -inf, stepEnd(500, 5, level(left)), Reproduces},
		{"only an upper limit, which the path breaks", right, -inf, stepEnd(500, -5, level(right)), TooSmooth},
		{"only a lower limit, which the path breaks", mirrored, -stepEnd(500, -5, level(right)), inf, TooSharp},
		{"no information", func(float64) float64 { return 18 }, -inf, inf, Reproduces},
	} {
		t.Run(test.name, func(t *testing.T) {
			c, _ := scanned(t, test.f)
			var o Outcome
			Judge(&o, []Curve{c}, nil, 0.95)
			if o.Verdict != test.verdict {
				t.Errorf("%s, want %s", o.Verdict, test.verdict)
			}
			near(t, "ln of the lower end", math.Log(o.Shift95[0]), test.lo, 0.01)
			near(t, "ln of the upper end", math.Log(o.Shift95[1]), test.hi, 0.01)
		})
	}
}

// Two profiles share one multiplier: they can each pass and not agree.
func TestJointVerdict(t *testing.T) {
	agree := []Curve{bowl(20, 1, 0.5, 22, 2), bowl(30, 1, 0.5, 31, 1)}
	differ := []Curve{bowl(20, -1, 0.1, 22, 2), bowl(30, 1, 0.1, 31, 1)}
	for _, test := range []struct {
		name  string
		cs    []Curve
		joint Finding
		each  []Verdict
	}{
		// the weights add up: the sum of two bowls of sigma 0.5 is one of 0.5/sqrt 2
		{"agree", agree, Finding{Verdict: Reproduces, Shift: math.E, Misfit: 20 + 30 + 4 + 4, Points: 53, Degrees: 50}, []Verdict{Reproduces, Reproduces}},
		{"differ", differ, Finding{Verdict: AtOdds, Shift: 1, Misfit: 20 + 30 + 100 + 100, Points: 53, Degrees: 50}, []Verdict{TooSmooth, TooSharp}},
	} {
		t.Run(test.name, func(t *testing.T) {
			var o Outcome
			Judge(&o, test.cs, nil, 0.95)
			if o.Verdict != test.joint.Verdict || o.Points != test.joint.Points || o.Degrees != test.joint.Degrees {
				t.Errorf("got %+v, want %+v", o.Finding, test.joint)
			}
			near(t, "shift factor", o.Shift, test.joint.Shift, 1e-9)
			near(t, "misfit", o.Misfit, test.joint.Misfit, 1e-9)
			for i, want := range test.each {
				if o.Profiles[i].Verdict != want {
					t.Errorf("profile %d: %s, want %s", i, o.Profiles[i].Verdict, want)
				}
			}
		})
	}
}

// A profile that cannot be judged by itself has its part in the joint verdict,
// and is no proof that each would pass alone.
func TestJointVerdictWithoutDegrees(t *testing.T) {
	for _, test := range []struct {
		name string
		with Curve
		want Verdict
	}{
		{"agrees", bowl(20, 0, 0.5, 22, 2), Reproduces},
		{"differs", bowl(20, 5, 0.1, 22, 2), WrongShape},
	} {
		t.Run(test.name, func(t *testing.T) {
			var o Outcome
			Judge(&o, []Curve{bowl(0, 0, 0.1, 2, 2), test.with}, nil, 0.95)
			if o.Verdict != test.want || o.Profiles[0].Verdict != Unjudged {
				t.Errorf("jointly %s, the first %s, want %s and %s", o.Verdict, o.Profiles[0].Verdict, test.want, Unjudged)
			}
		})
	}
}

// Memory is reused; what was there before does not shine through.
func TestJudgeOverwrites(t *testing.T) {
	var o, fresh Outcome
	Judge(&o, []Curve{bowl(20, -1, 0.1, 22, 2), bowl(30, 1, 0.1, 31, 1)}, nil, 0.95)
	Judge(&o, []Curve{bowl(19, 2, 0.5, 22, 2)}, nil, 0.95)
	Judge(&fresh, []Curve{bowl(19, 2, 0.5, 22, 2)}, nil, 0.95)
	if got, want := fmt.Sprintf("%+v", o), fmt.Sprintf("%+v", fresh); got != want {
		t.Errorf("got %s, want %s", got, want)
	}
}

// What is not a number, or was never judged, passes nowhere.
func TestNothingPassesThatIsNoNumber(t *testing.T) {
	nan := math.NaN()
	for name, c := range map[string]Curve{
		"everywhere":     bowl(nan, 0, 1, 22, 2),
		"at the path":    withValue(bowl(19, 0, 1, 22, 2), 14, nan),
		"at the best":    withValue(bowl(19, 2, 0.5, 22, 2), 16, nan),
		"a width of 0/0": bowl(19, 0, 0, 22, 2),
	} {
		t.Run(name, func(t *testing.T) {
			var o Outcome
			Judge(&o, []Curve{c}, nil, 0.95)
			if o.Verdict == Reproduces || name == "everywhere" && o.Verdict != WrongShape {
				t.Errorf("verdict %s", o.Verdict)
			}
		})
	}
	if v := (&Outcome{}).Verdict; v == Reproduces {
		t.Errorf("the zero outcome %s", v)
	}
	if Tail(nan, 5) >= 0.05 || Tail(nan, 0) >= 0.05 {
		t.Errorf("tails of what is not a number: %g and %g", Tail(nan, 5), Tail(nan, 0))
	}
}

func withValue(c Curve, knot int, chiSq float64) Curve {
	c.ChiSq[knot] = chiSq
	return c
}

// A path that is true passes at the stated rate, and its interval holds the
// truth at the stated rate, where the model is linear in ln D: binomial bounds
// of 3.3 standard deviations, which one test in a thousand breaks by chance.
func TestJudgeRatesOfALinearModel(t *testing.T) {
	const repeats, points = 4000, 20
	rng := rand.New(rand.NewPCG(6, 1))
	passes, in68, in95 := 0, 0, 0
	for range repeats {
		// with y_i = lnM + noise, chi-square is the scatter about the mean plus n (lnM - mean)^2
		sum, sumSq := 0.0, 0.0
		for range points {
			y := rng.NormFloat64()
			sum, sumSq = sum+y, sumSq+y*y
		}
		mean := sum / points
		var o Outcome
		Judge(&o, []Curve{bowl(sumSq-points*mean*mean, mean, 1/math.Sqrt(points), points, 0)}, nil, 0.95)
		if o.Verdict == Reproduces {
			passes++
		}
		if o.Shift68[0] <= 1 && 1 <= o.Shift68[1] {
			in68++
		}
		if o.Shift95[0] <= 1 && 1 <= o.Shift95[1] {
			in95++
		}
	}
	rate(t, "reproduces", passes, repeats, 0.95)
	rate(t, "68 % interval", in68, repeats, 0.68)
	rate(t, "95 % interval", in95, repeats, 0.95)
}

// rate fails the test where n of repeats is too far from the rate p: by more
// than 3.3 standard deviations of the binomial distribution.
func rate(t *testing.T, what string, n, repeats int, p float64) {
	t.Helper()
	mean, sigma := p*float64(repeats), math.Sqrt(p*(1-p)*float64(repeats))
	t.Logf("%s: %d of %d, %.1f %%, expected %.0f +- %.1f", what, n, repeats, 100*float64(n)/float64(repeats), mean, sigma)
	if !(math.Abs(float64(n)-mean) <= 3.3*sigma) {
		t.Errorf("%s: %d of %d, want %.0f +- %.1f", what, n, repeats, mean, sigma)
	}
}
