package paths

import (
	"math"
	"testing"
)

// Without a law that has errors, a path that passes needs none, and one that
// does not has none that would help.
func TestLeaningWithoutLaws(t *testing.T) {
	var o Outcome
	Judge(&o, []Curve{bowl(19, 0.1, 0.1, 22, 2)}, nil, 0.95)
	if l := o.WithLaws; l.Verdict != Reproduces || l.Leaning == nil || len(l.Leaning) != 0 {
		t.Errorf("passes as it is: %+v, want it to pass with no deviation", l)
	}
	Judge(&o, []Curve{bowl(19, math.Log(10), 0.5, 22, 2)}, nil, 0.95)
	if l := o.WithLaws; l.Verdict != TooSharp || l.Leaning != nil {
		t.Errorf("fails: %+v, want no deviation that helps", l)
	}
}

// The smallest deviation carries the profile to where it just passes: chi-square
// 19 + ((lnM - ln 10)/0.5)^2 is 31.410, the 95 % of 20 degrees of the NIST/SEMATECH
// e-Handbook, 1.3.6.7.4, at ln 10 less 0.5 sqrt(12.410).
func TestSmallestLeaning(t *testing.T) {
	const tol = 0.01 // of a standard deviation; it is printed to a tenth
	c := bowl(19, math.Log(10), 0.5, 22, 2)
	c.Law = 1
	var o Outcome
	Judge(&o, []Curve{c}, []LawPrior{{Key: "mine", LnD: 0.5}}, 0.95)
	if len(o.WithLaws.Leaning) != 1 {
		t.Fatalf("%+v, want one law", o.WithLaws)
	}
	near(t, "deviation", o.WithLaws.Leaning[0].Sigma, (math.Log(10)-0.5*math.Sqrt(31.410-19))/0.5, tol)
}
