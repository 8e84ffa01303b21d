package diffusion

import (
	"math"
	"testing"

	"bankfire/thermal"
)

// longHistories are paths on which temperature changes slowly, fast, for a
// short part of a leg only, or not at all.
func longHistories(tb testing.TB) map[string]*thermal.History {
	tb.Helper()
	const year = thermal.Year
	ember := thermal.Leg{Kind: thermal.Relax, For: 1e6 * year, T0: 1250, T1: 900, Tau: thermal.Day}
	sheet := thermal.Leg{Kind: thermal.SheetCooling, For: 1e5 * year,
		Sheet: &thermal.Sheet{Magma: 1400, Host: 800, Thickness: 2, Position: 2, Kappa: 1e-6}}
	return map[string]*thermal.History{
		"hold": newHistory(tb, thermal.Leg{Kind: thermal.Hold, For: 1e4 * year, T0: 1000}),
		"ramp": newHistory(tb, thermal.Leg{Kind: thermal.Ramp, For: 1e4 * year, T0: 700, T1: 1200}),
		// D falls for days in a leg of a million years
		"quench": newHistory(tb, ember),
		// it does so in the middle of a path
		"quench between": newHistory(tb, thermal.Leg{Kind: thermal.Hold, For: year, T0: 950}, ember,
			thermal.Leg{Kind: thermal.Ramp, For: 5 * year, T0: 900, T1: 1100}),
		// D rises and falls inside one leg that begins and ends cold
		"sheet": newHistory(tb, sheet),
		"table": newHistory(tb, thermal.Leg{Kind: thermal.Table, Rows: &thermal.Rows{
			Time: []float64{0, 10 * year, 10 * year, 11 * year, 500 * year}, Temp: []float64{900, 1000, 1150, 1100, 800}}}),
	}
}

// TestRimMeans compares the means of a rim value over the steps with closed forms.
func TestRimMeans(t *testing.T) {
	for name, h := range longHistories(t) {
		t.Run(name, func(t *testing.T) { wantRimMeans(t, testLaw, h) })
	}
}

// wantRimMeans compares the means of a rim value exp(a - b/T) along a history with closed forms: it only shifts the constants
// of the law, so its mean weighted by D is a ratio of two integrals.
func wantRimMeans(t *testing.T, law Law, h *thermal.History) {
	t.Helper()
	const (
		a, b = 8.0, 6000.0
		// five points resolve D to 1e-8 (resolved); D times the value changes by a sixth more, and the error of five
		// points goes with the tenth power of that
		tol = 1e-7
	)
	shifted := Law{Where: law.Where}
	for _, term := range law.Terms {
		shifted.Terms = append(shifted.Terms, Arrhenius{LnA: term.LnA + a, E: term.E + b})
	}
	given := &Given{At: func(at float64) float64 { temp, _ := h.At(at); return math.Exp(a - b/temp) }}
	p := &Problem{Zones: []Zone{{Outer: testSize}}, Law: law, Outer: []Rim{{Kind: Prescribed, Given: given}}}
	plan := newPlan(t, p, Options{})
	got := newCourse(t, plan, h).spans[0].outer.value.fine
	times := stepTimes(plan, h)
	for i := range got {
		if i+1 < len(got) && times[i+1] <= times[i] || plan.steps[i].euler && i > len(got)/2 {
			continue // no time in the step, or a value led to its end
		}
		want := math.Exp(shifted.LnIntegral(h, times[i], times[i+1]) - law.LnIntegral(h, times[i], times[i+1]))
		if diff := math.Abs(got[i]/want - 1); !(diff <= tol) {
			t.Fatalf("step %d of %d, %g to %g s: mean %.12g, want %.12g, relative difference %.2g, allowed %g",
				i, len(got), times[i], times[i+1], got[i], want, diff, tol)
		}
	}
}

// stepTimes returns the times at which the steps of a course along the whole
// history begin and end.
func stepTimes(plan *Plan, h *thermal.History) []float64 {
	var r route
	r.lay(&plan.problem.Law, h, 0, h.Life())
	r.cut(plan.steps, pace, false)
	return r.times
}

// TestStepTimes: between the times of two steps the integral of D grows by the
// plan's fraction.
func TestStepTimes(t *testing.T) {
	for name, h := range longHistories(t) {
		t.Run(name, func(t *testing.T) {
			p := &Problem{Zones: []Zone{{Outer: testSize}}, Law: testLaw}
			plan := newPlan(t, p, Options{})
			total := testLaw.LnIntegral(h, 0, h.Life())
			times := stepTimes(plan, h)
			fraction := 0.0
			for i, s := range plan.steps {
				fraction += s.df
				got := math.Exp(testLaw.LnIntegral(h, 0, times[i+1]) - total)
				// times are found to 1e-12 of their leg, which is 1e-7 of a quench
				if !(math.Abs(got-fraction) <= 1e-6) {
					t.Fatalf("after %d steps: %.9g of the integral, want %.9g", i+1, got, fraction)
				}
			}
		})
	}
}

// TestBreaksAreNotAsked: a given rim is asked for its value only between its
// breaks, where it has one.
func TestBreaksAreNotAsked(t *testing.T) {
	for name, h := range longHistories(t) {
		t.Run(name, func(t *testing.T) {
			life := h.Life()
			given := &Given{Breaks: []float64{0, life / 3, life}, Jumps: []float64{life / 2, life * 0.9}}
			given.At = func(at float64) float64 {
				for _, b := range append(given.Breaks, given.Jumps...) {
					if at == b {
						t.Fatalf("asked for the value at %g s, where it breaks", at)
					}
				}
				if !(at > 0 && at < life) {
					t.Fatalf("asked for the value at %g s of %g", at, life)
				}
				return at / life
			}
			p := &Problem{Zones: []Zone{{Outer: testSize}}, Law: testLaw, Outer: []Rim{{Kind: Prescribed, Given: given}}}
			for _, span := range newCourse(t, newPlan(t, p, Options{}), h).spans {
				if i, v := 0, span.outer.value.fine; len(v) == 0 || rangeOf(v) > 1 || math.IsNaN(v[i]) {
					t.Errorf("values %v", v)
				}
			}
		})
	}
}

// TestStiffRim: far above the time in which the crystal follows, a rim that
// moves in step with G drags the profile along at a known distance (Crank 1975,
// equation 5.31 without its sum): C = v - v' (a^2 - r^2)/4 in a cylinder.
func TestStiffRim(t *testing.T) {
	for _, times := range []float64{1e1, 1e3, 1e6} { // G/a^2
		h := holdOf(t, times*testSize*testSize)
		given := &Given{At: func(at float64) float64 { return at / h.Life() }}
		p := &Problem{Shape: Cylinder, Zones: []Zone{{Outer: testSize}}, Law: testLaw, Outer: []Rim{{Kind: Prescribed, Given: given}}}
		plan := newPlan(t, p, Options{})
		want := make([]float64, len(plan.Centres()))
		for i := range want {
			a, b := plan.Faces()[i]/testSize, plan.Faces()[i+1]/testSize
			want[i] = 1 - (1-(a*a+b*b)/2)/4/times
		}
		// the sum of equation 5.31 is below 1e-20, and the cells are exact for a parabola that moves evenly
		wantClose(t, "profile", run(t, plan, h).Cols[0], want, 1e-10)
	}
}

// TestKinkedRimDoesNotRing: a rim that follows a fast cooling and then a long
// slow warming leaves no waves between cells, though the steps are far too long
// for them. Compared with eight times as many steps.
func TestKinkedRimDoesNotRing(t *testing.T) {
	h := newHistory(t, thermal.Leg{Kind: thermal.Relax, For: 2.4e5, T0: 1156, T1: 956, Tau: 7.4e4},
		thermal.Leg{Kind: thermal.Ramp, For: 3.7e7, T0: 964, T1: 989})
	law := testLaw
	law.Terms = []Arrhenius{{LnA: testLaw.Terms[0].LnA + 2*math.Log(testSize) - testLaw.LnIntegral(h, 0, h.Life()), E: testLaw.Terms[0].E}}
	given := &Given{At: func(at float64) float64 { temp, _ := h.At(at); return (temp - 956) / 200 }}
	p := &Problem{Zones: []Zone{{Outer: testSize}}, Law: law, Outer: []Rim{{Kind: Prescribed, Given: given}}}
	plan := newPlan(t, p, Options{})
	fine := newFiner(t, plan, Options{}, 1)
	// the default steps are good to 1e-4 where a rim moves this fast; without damping at the end, 4e-2
	wantClose(t, "profile", run(t, plan, h).Cols[0], onto(plan, fine, run(t, fine, h).Cols[0]), 1e-4)
}

// TestCourseRefusesTimes: a course ends within its history.
func TestCourseRefusesTimes(t *testing.T) {
	h := holdOf(t, 1e-10)
	plan := newPlan(t, &Problem{Zones: []Zone{{Outer: testSize}}, Law: testLaw}, Options{})
	for _, until := range []float64{-1, math.NaN(), h.Life() * 1.01, math.Inf(1)} {
		if err := plan.Course(new(Course), h, until); err == nil {
			t.Errorf("a course until %g s of %g was accepted", until, h.Life())
		}
	}
	c := new(Course)
	if err := plan.Course(c, h, 0); err != nil || !math.IsInf(c.LnG(), -1) {
		t.Errorf("until 0 s: error %v, ln G %g, want none and -Inf", err, c.LnG())
	}
}
