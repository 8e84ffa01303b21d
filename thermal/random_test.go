package thermal

import (
	"math"
	"math/rand/v2"
	"testing"
)

// between is a random number from lo to hi.
func between(r *rand.Rand, lo, hi float64) float64 { return lo + (hi-lo)*r.Float64() }

// decades is a random number from lo to hi, even in its logarithm.
func decades(r *rand.Rand, lo, hi float64) float64 {
	return math.Exp(between(r, math.Log(lo), math.Log(hi)))
}

// randomLeg is a leg of any kind at magmatic temperatures that lasts from an hour to a million years.
func randomLeg(r *rand.Rand) Leg {
	l := Leg{
		Kind: Kind(r.IntN(5)),
		For:  decades(r, 3600, 1e6*Year),
		T0:   between(r, 600, 1600),
		T1:   between(r, 600, 1600),
	}
	l.Tau = l.For * decades(r, 0.01, 100)
	switch l.Kind {
	case SheetCooling:
		l.Sheet = randomSheet(r, l.For)
	case Table:
		l.Rows = randomRows(r, l.For)
		l.For = 0
	}
	return l
}

// randomSheet is one that cools within a few decades of the given time.
func randomSheet(r *rand.Rand, duration float64) *Sheet {
	s := &Sheet{Magma: between(r, 1000, 1600), Host: between(r, 300, 900), Kappa: decades(r, 3e-7, 3e-6)}
	s.Thickness = math.Sqrt(s.Kappa * duration * decades(r, 1e-3, 1e3))
	s.Position = s.Thickness * between(r, -1.5, 1.5)
	if r.IntN(8) == 0 {
		s.Position = s.Thickness / 2
	}
	return s
}

// randomRows is a table of 2 to 12 rows, some of them jumps.
func randomRows(r *rand.Rand, duration float64) *Rows {
	n := 2 + r.IntN(11)
	rows := &Rows{Time: []float64{0}, Temp: []float64{between(r, 600, 1600)}}
	for len(rows.Time) < n {
		t := rows.end()
		if len(rows.Time) == n-1 || r.IntN(4) > 0 {
			t += duration * r.Float64()
		}
		rows.Time, rows.Temp = append(rows.Time, t), append(rows.Temp, between(r, 600, 1600))
	}
	return rows
}

// randomHistory is a path of 1 to 12 random legs.
func randomHistory(t testing.TB, r *rand.Rand) *History {
	t.Helper()
	legs := make([]Leg, 1+r.IntN(12))
	for i := range legs {
		legs[i] = randomLeg(r)
	}
	h := new(History)
	if err := h.Set(legs); err != nil {
		t.Fatal(err)
	}
	return h
}

// closeTo fails the test unless got is within tol of want.
func closeTo(t testing.TB, what string, got, want, tol float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tol) && got != want {
		t.Errorf("%s: got %.17g, want %.17g, difference %.3g, allowed %.3g", what, got, want, got-want, tol)
	}
}
