package thermal

import (
	"math"
	"strconv"
	"strings"
)

// Quantity is a value with the unit in which it was written.
type Quantity struct {
	Value float64   // SI, see Dimension
	Dim   Dimension // what it measures
	Unit  string    // usual spelling of the unit in which it was written
}

// Uncertain is a value and its standard deviation, both SI. Sigma 0 means that no error was given.
type Uncertain struct{ Value, Sigma float64 }

// ParseQuantity reads a number with a unit, "690 C" or "1.2e-12 m2/s", as SI. The error is an *InputError with Value,
// Problem and Remedy set; the caller knows the place. It refuses whatever is not a finite number with a unit of dim, a
// temperature not above absolute zero, decimal commas and thousands separators. Other signs are the caller's to judge.
func ParseQuantity(text string, dim Dimension) (float64, error) {
	q, err := ReadQuantity(text, dim)
	return q.Value, err
}

// ReadQuantity is ParseQuantity for callers that also need the unit.
func ReadQuantity(text string, dim Dimension) (Quantity, error) {
	if refused := refuseCompound(text, dim); refused != nil {
		return Quantity{}, refused.of(text)
	}
	tm, refused := readTerm(text, dim)
	if refused == nil {
		refused = tm.needUnit(text, dim)
	}
	if refused != nil {
		return Quantity{}, refused.of(text)
	}
	value, refused := tm.absolute(dim)
	if refused != nil {
		return Quantity{}, refused.of(text)
	}
	return Quantity{Value: value, Dim: dim, Unit: tm.unit.name}, nil
}

// ParseUncertain reads "92 +- 2 ppm", "1 kyr +- 50 yr" or "92 ppm" (Sigma 0) as SI. The error after +- is one standard
// deviation, in a unit of dim, and scales without an offset: 10 F is a difference of 5.56 K. "±" and "+/-" serve for
// "+-". Errors are as those of ParseQuantity.
func ParseUncertain(text string, dim Dimension) (Uncertain, error) {
	value, sigma, refused := readUncertain(text, dim)
	if refused != nil {
		return Uncertain{}, refused.of(text)
	}
	u := Uncertain{}
	if u.Value, refused = value.absolute(dim); refused != nil {
		return Uncertain{}, refused.of(text)
	}
	if u.Sigma, refused = sigma.difference(); refused != nil {
		return Uncertain{}, refused.of(text)
	}
	return u, nil
}

// ParseFactor reads a plain number, perhaps with an error: "10 +- 3" or "10" (Sigma 0). Its sign is the caller's to
// judge. Errors are as those of ParseQuantity.
func ParseFactor(text string) (Uncertain, error) {
	left, right, with := cutError(text)
	value, refused := readPlain(left)
	if refused != nil {
		return Uncertain{}, refused.of(text)
	}
	if !with {
		return Uncertain{Value: value}, nil
	}
	sigma, refused := readPlain(right)
	if refused == nil && sigma < 0 {
		refused = &InputError{Problem: "has a negative error", Remedy: "want an error of at least 0"}
	}
	if refused != nil {
		return Uncertain{}, refused.of(text)
	}
	return Uncertain{value, sigma}, nil
}

// readPlain reads a number without a unit.
func readPlain(text string) (float64, *InputError) {
	const remedy = `want plain numbers such as "10" or "10 +- 3"`
	text = strings.TrimSpace(text)
	if !numberStart.MatchString(text) {
		return 0, &InputError{Problem: "is not a plain number", Remedy: remedy}
	}
	number, rest, refused := readNumber(text, Concentration)
	if rest = strings.TrimSpace(rest); refused == nil && rest != "" {
		refused = &InputError{Problem: "has a unit or more, " + strconv.Quote(rest), Remedy: remedy}
	}
	return number, refused
}

// ParseConcentration reads a concentration, perhaps with an error, in the unit in which it is written; the unit comes
// back in its usual spelling. ConcentrationFactor converts. Errors are as those of ParseQuantity.
func ParseConcentration(text string) (value Uncertain, unit string, err error) {
	v, sigma, refused := readUncertain(text, Concentration)
	if refused != nil {
		return Uncertain{}, "", refused.of(text)
	}
	value = Uncertain{v.number, sigma.number * (sigma.unit.scale / v.unit.scale)}
	if math.IsInf(value.Sigma, 0) {
		return Uncertain{}, "", outOfRange().of(text)
	}
	return value, v.unit.name, nil
}

// ParseRange reads "0..2 um" or "10 day..3 yr" as SI, lo < hi. Errors are as those of ParseQuantity.
func ParseRange(text string, dim Dimension) (lo, hi float64, err error) {
	low, high, isRange := strings.Cut(text, "..")
	if !isRange || strings.HasPrefix(high, ".") {
		return 0, 0, &InputError{Value: text, Problem: "is no range", Remedy: `want both ends, such as "` + dimensions[dim].span() + `"`}
	}
	from, to, refused := readPair(text, low, high, dim)
	if refused != nil {
		return 0, 0, refused.of(text)
	}
	if lo, refused = from.absolute(dim); refused != nil {
		return 0, 0, refused.of(text)
	}
	if hi, refused = to.absolute(dim); refused != nil {
		return 0, 0, refused.of(text)
	}
	if !(lo < hi) {
		return 0, 0, &InputError{Value: text, Problem: "does not run upwards", Remedy: "want the smaller end first"}
	}
	return lo, hi, nil
}

// refuseCompound refuses a value with an error, and a range, where a single value is wanted.
func refuseCompound(text string, dim Dimension) *InputError {
	single := `want a single value such as "` + dimensions[dim].like + `"`
	if _, _, ok := cutError(text); ok {
		return &InputError{Problem: "has an error", Remedy: single}
	}
	if strings.Contains(text, "..") {
		return &InputError{Problem: "is a range", Remedy: single}
	}
	return nil
}

// readUncertain reads a value and its error; without an error the second term is 0 in the unit of the first.
func readUncertain(text string, dim Dimension) (value, sigma term, refused *InputError) {
	left, right, ok := cutError(text)
	if !ok {
		if value, refused = readTerm(text, dim); refused == nil {
			refused = value.needUnit(text, dim)
		}
		return value, term{unit: value.unit}, refused
	}
	if value, sigma, refused = readPair(text, left, right, dim); refused != nil {
		return term{}, term{}, refused
	}
	if sigma.number < 0 {
		return term{}, term{}, &InputError{Problem: "has a negative error", Remedy: "want an error of at least 0"}
	}
	return value, sigma, nil
}

// cutError cuts text at its first sign for plus or minus.
func cutError(text string) (value, sigma string, ok bool) {
	for _, sign := range []string{"+-", "±", "+/-"} {
		if value, sigma, ok = strings.Cut(text, sign); ok {
			return value, sigma, true
		}
	}
	return text, "", false
}

// readPair reads the two terms of text, of one unit family; the left one may leave its unit to the right one.
func readPair(text, left, right string, dim Dimension) (l, r term, refused *InputError) {
	if l, refused = readSide(left, dim); refused != nil {
		return term{}, term{}, refused
	}
	if r, refused = readSide(right, dim); refused != nil {
		return term{}, term{}, refused
	}
	if refused = r.needUnit(text, dim); refused != nil {
		return term{}, term{}, refused
	}
	if l.unit.name == "" {
		l.unit = r.unit
	}
	if l.unit.family != r.unit.family {
		return term{}, term{}, &InputError{Problem: "has units that do not convert", Remedy: "want both in " + l.unit.name}
	}
	return l, r, nil
}

// readSide is readTerm for one side of a pair.
func readSide(text string, dim Dimension) (term, *InputError) {
	text = strings.TrimSpace(text)
	if !numberStart.MatchString(text) && !notFinite.MatchString(text) {
		return term{}, &InputError{Problem: "lacks a number", Remedy: "want one on both sides"}
	}
	return readTerm(text, dim)
}

// term is a number with its unit, the zero unit if there is none.
type term struct {
	number float64
	unit   unit
}

// readTerm reads a number and, if there is one, its unit.
func readTerm(text string, dim Dimension) (term, *InputError) {
	number, rest, refused := readNumber(strings.TrimSpace(text), dim)
	if refused != nil {
		return term{}, refused
	}
	tm := term{number: number}
	rest = strings.TrimSpace(rest)
	if rest == "" {
		return tm, nil
	}
	u, ok := findUnit(rest, dim)
	if !ok {
		return term{}, UnitError(rest, dim)
	}
	tm.unit = u
	return tm, nil
}

// needUnit refuses a term without a unit at the end of text.
func (tm term) needUnit(text string, dim Dimension) *InputError {
	if tm.unit.name != "" {
		return nil
	}
	return &InputError{Problem: "has no unit",
		Remedy: "want " + unitList(dim) + `, such as "` + strings.TrimSpace(text) + " " + dimensions[dim].usual() + `"`}
}

// leastTemperature is the lowest temperature accepted, K: the rounding of -459.67 F must not pass for a temperature.
const leastTemperature = 1e-9

// absolute is the term in SI. Temperatures must be above absolute zero.
func (tm term) absolute(dim Dimension) (float64, *InputError) {
	value, refused := tm.difference()
	if refused != nil || dim != Temperature {
		return value, refused
	}
	value += tm.unit.offset
	if !(value >= leastTemperature) {
		zero := strconv.FormatFloat(0-tm.unit.offset/tm.unit.scale, 'g', 6, 64)
		return 0, &InputError{Problem: "not above absolute zero", Remedy: "want more than " + zero + " " + tm.unit.name}
	}
	return value, nil
}

// difference is the term in SI without an offset.
func (tm term) difference() (float64, *InputError) {
	value := float64(tm.number * tm.unit.scale) // rounded here, so that an offset is not fused into it
	if math.IsInf(value, 0) || value == 0 && tm.number != 0 {
		return 0, outOfRange()
	}
	return value, nil
}

// of is e as an error about a value.
func (e *InputError) of(value string) error {
	about := *e
	about.Value = value
	return &about
}

func outOfRange() *InputError {
	return &InputError{Problem: "is beyond the range of numbers", Remedy: "want a size between 1e-300 and 1e300 in SI units"}
}
