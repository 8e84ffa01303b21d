package main

import (
	"fmt"
	"math"
	"strconv"
	"strings"

	"bankfire/paths"
	"bankfire/thermal"
)

// number prints x with three digits, without an exponent where people would
// not use one.
func number(x float64) string {
	if a := math.Abs(x); a >= 1e6 || a < 1e-3 && a > 0 {
		return strconv.FormatFloat(x, 'e', 2, 64)
	}
	three, err := strconv.ParseFloat(strconv.FormatFloat(x, 'e', 2, 64), 64)
	if err != nil { // not a number
		return strconv.FormatFloat(x, 'f', -1, 64)
	}
	return trimmed(strconv.FormatFloat(three, 'f', decimals(three, 3), 64))
}

// tailText prints a probability; below a thousandth nobody should read digits.
func tailText(x float64) string {
	switch {
	case math.IsNaN(x):
		return ""
	case x < 0.001:
		return "< 0.001"
	}
	return number(x)
}

// smallText prints a difference of chi-square; below a thousandth nobody should read
// digits.
func smallText(x float64) string {
	if x < 0.001 {
		return "< 0.001"
	}
	return number(x)
}

// oneDigit prints a size of which only the magnitude matters.
func oneDigit(x float64) string { return strconv.FormatFloat(x, 'g', 1, 64) }

// decimals returns how many decimals show the given number of digits of x.
func decimals(x float64, digits int) int {
	if x == 0 {
		return 0
	}
	return max(0, digits-1-int(math.Floor(math.Log10(math.Abs(x)))))
}

// trimmed returns a decimal number without the zeros, or the point, at its end.
func trimmed(s string) string {
	if strings.Contains(s, ".") {
		s = strings.TrimSuffix(strings.TrimRight(s, "0"), ".")
	}
	return s
}

// plain prints x for another program, with six digits: fewer than two machines
// can disagree on.
func plain(x float64) string { return strconv.FormatFloat(x, 'g', 6, 64) }

// openEnd is plain, and empty where there is no number.
func openEnd(x float64) string {
	if math.IsInf(x, 0) || math.IsNaN(x) || x <= 0 {
		return ""
	}
	return plain(x)
}

// shiftText prints the shift factor with its 95 % interval; where the data leave
// a side open, the limit alone, because the best factor is then one of many.
func shiftText(f *paths.Finding) string {
	limits := intervalText(f.Shift95)
	if f.Shift95[0] > 0 && !math.IsInf(f.Shift95[1], 1) {
		return number(f.Shift) + " (" + limits + ")"
	}
	return limits
}

// intervalText prints an interval of a factor; a side that the data leave open
// is not there.
func intervalText(x [2]float64) string {
	lo, hi := x[0] > 0, !math.IsInf(x[1], 1)
	switch {
	case lo && hi:
		return number(x[0]) + " to " + number(x[1])
	case lo:
		return "> " + number(x[0])
	case hi:
		return "< " + number(x[1])
	}
	return "not bounded"
}

func celsius(temp float64) string {
	if temp == 0 {
		return "no temperature"
	}
	return fmt.Sprintf("%.0f C", temp-thermal.ZeroCelsius)
}

// withError prints a value to the digits that its error leaves.
func withError(value, sigma float64, unit string) string {
	if math.IsInf(sigma, 1) || !(sigma > 0) {
		return number(value) + " " + unit
	}
	n := decimals(sigma, 2)
	return fmt.Sprintf("%.*f +- %.*f %s", n, value, n, sigma, unit)
}

func percent(x float64) string { return number(100*x) + " %" }

func quoted(name string) string { return `"` + name + `"` }

// list joins words as a sentence does.
func list(words []string) string {
	if len(words) < 2 {
		return strings.Join(words, "")
	}
	last := len(words) - 1
	return strings.Join(words[:last], ", ") + " and " + words[last]
}
