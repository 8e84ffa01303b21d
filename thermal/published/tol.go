package published

import (
	"fmt"
	"math"
	"strconv"
	"strings"
)

// Tol is how far a value may be from the published one: |got - want| <= Abs + Rel |want|.
type Tol struct{ Abs, Rel float64 }

// fifteenDigits is the tolerance of "exact": the values are printed with 15 digits (half a unit of the last is at most
// 5e-15), and forming a float64 from exact factors costs a few ulps of 1.1e-16.
const fifteenDigits = 6e-15

// String is "abs 1e-4", "rel 1e-12" or their sum.
func (tol Tol) String() string {
	switch {
	case tol.Rel == 0:
		return fmt.Sprintf("abs %g", tol.Abs)
	case tol.Abs == 0:
		return fmt.Sprintf("rel %g", tol.Rel)
	}
	return fmt.Sprintf("abs %g + rel %g", tol.Abs, tol.Rel)
}

// holds says whether got is within tol of want. It is false for NaN and for an infinite difference or tolerance.
func (tol Tol) holds(got, want float64) bool {
	allowed := tol.Abs + tol.Rel*math.Abs(want)
	return math.Abs(got-want) <= allowed && !math.IsInf(allowed, 0)
}

// parseTol reads a tolerance as checks.csv writes it: "rel 1e-12", "abs 5e-5", "exact", each perhaps followed by words,
// which are left to the caller ("abs 1e-6 K", "rel 1e-6 from start 2"). For a quantity that is a mean,
// "abs 5e-5 (mean: rel 1e-12)" means its second part.
func parseTol(text, quantity string) (Tol, error) {
	if _, mean, ok := strings.Cut(text, "(mean: "); ok && strings.HasPrefix(quantity, "mean ") {
		text = strings.TrimSuffix(mean, ")")
	}
	words := strings.Fields(text)
	if len(words) == 1 && words[0] == "exact" {
		return Tol{Rel: fifteenDigits}, nil
	}
	if len(words) < 2 || words[0] != "rel" && words[0] != "abs" {
		return Tol{}, fmt.Errorf("%q is no plain tolerance; state one in the test and say why", text)
	}
	size, err := strconv.ParseFloat(words[1], 64)
	if err != nil || !(size >= 0) || math.IsInf(size, 0) {
		return Tol{}, fmt.Errorf("tolerance %q has no usable number", text)
	}
	if words[0] == "abs" {
		return Tol{Abs: size}, nil
	}
	return Tol{Rel: size}, nil
}
