package thermal

import (
	"regexp"
	"strconv"
	"strings"
)

// plainMinus writes the typographic minus as strconv reads it.
var plainMinus = strings.NewReplacer("−", "-")

// numberStart is a plain number at the start of a text: sign, digits with at most one point, exponent.
var numberStart = regexp.MustCompile(`^[+\-−]?([0-9]+\.?[0-9]*|\.[0-9]+)([eE][+\-−]?[0-9]+)?`)

// readNumber reads the plain number at the start of text; rest is what follows it.
func readNumber(text string, dim Dimension) (number float64, rest string, refused *InputError) {
	digits := numberStart.FindString(text)
	rest = text[len(digits):]
	if digits == "" {
		return 0, "", refuseStart(text, dim)
	}
	if refused = refuseNotation(text, rest); refused != nil {
		return 0, "", refused
	}
	number, err := strconv.ParseFloat(plainMinus.Replace(digits), 64)
	if err != nil || number == 0 && !isZero(digits) {
		return 0, "", outOfRange()
	}
	return number, rest, nil
}

// isZero says whether a number is written as zero, not rounded to it.
func isZero(digits string) bool {
	mantissa, _, _ := strings.Cut(strings.ToLower(digits), "e")
	return !strings.ContainsAny(mantissa, "123456789")
}

// notFinite is how the values that are no numbers are written.
var notFinite = regexp.MustCompile(`(?i)^[+\-−]?(nan\b|inf\b|infinity\b|∞)`)

// refuseStart says what is wrong with a text that does not begin with a number.
func refuseStart(text string, dim Dimension) *InputError {
	remedy := "want " + dim.String() + ` such as "` + dimensions[dim].like + `"`
	switch {
	case text == "":
		return &InputError{Problem: "is empty", Remedy: remedy}
	case notFinite.MatchString(text):
		return &InputError{Problem: "is not a finite number", Remedy: remedy}
	}
	return &InputError{Problem: "does not begin with a number", Remedy: remedy}
}

// Notations that are not plain numbers, each matched from the start of the whole text.
var (
	decimalComma = regexp.MustCompile(`^([+\-−]?[0-9]*),([0-9]{1,2}|[0-9]{4,})(?:[^0-9,]|$)`)
	someComma    = regexp.MustCompile(`^[+\-−]?[0-9.]*,[0-9]`)
	separated    = regexp.MustCompile(`^[+\-−]?[0-9]+(?:['’_\p{Zs}][0-9]+)+(?:\.[0-9]+)?`)
	powerOfTen   = regexp.MustCompile(`^([+\-−]?[0-9.]+)\s*[x×*·⋅]\s*10[\^*]*([+\-−0-9⁰¹²³⁴⁵⁶⁷⁸⁹⁻⁺]+)`)
	separator    = regexp.MustCompile(`['’_\p{Zs}]`)
)

// plainExponent writes a raised number on the line.
var plainExponent = strings.NewReplacer("⁰", "0", "¹", "1", "²", "2", "³", "3", "⁴", "4", "⁵", "5", "⁶", "6", "⁷", "7",
	"⁸", "8", "⁹", "9", "⁻", "-", "−", "-", "⁺", "", "+", "")

// refuseNotation says what is wrong with a number that is not written plainly.
func refuseNotation(text, rest string) *InputError {
	if comma := decimalComma.FindStringSubmatch(text); comma != nil {
		return &InputError{Problem: "has a decimal comma",
			Remedy: "write " + comma[1] + "." + comma[2] + ", not " + comma[1] + "," + comma[2]}
	}
	if someComma.MatchString(text) {
		return &InputError{Problem: "has a comma in its number", Remedy: "write 1000 for a thousand and 1.0 for one, without commas"}
	}
	if number := separated.FindString(text); number != "" {
		return &InputError{Problem: "has separators in its number",
			Remedy: "write " + separator.ReplaceAllString(number, "") + ", not " + number}
	}
	if power := powerOfTen.FindStringSubmatch(text); power != nil {
		return &InputError{Problem: "has a written-out power of ten",
			Remedy: "write " + power[1] + "e" + plainExponent.Replace(power[2])}
	}
	if strings.Contains(text, "..") {
		return &InputError{Problem: "is a range", Remedy: "want one value; its error, where one may stand, is written with +-"}
	}
	if strings.HasPrefix(rest, ".") {
		return &InputError{Problem: "has two decimal points", Remedy: "want one number and a unit"}
	}
	return nil
}
