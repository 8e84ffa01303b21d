package traverse

import (
	"errors"
	"regexp"
	"strconv"
	"strings"
)

// fault is what is wrong with one cell; no fault is nil.
type fault struct{ problem, remedy string }

// numbers reads the numbers of one table and keeps an eye on its decimal sign.
type numbers struct {
	commaSeparates bool // the table's cells are separated by commas
	points, commas bool // seen in numbers so far
	certain        bool // a comma was seen that can only be a decimal sign
}

// thousands matches a number whose comma may just as well be a separator of
// thousands as a decimal sign.
var thousands = regexp.MustCompile(`^[+-]?[1-9]\d{0,2},\d{3}$`)

// parse reads one cell: a decimal number with or without an exponent, always
// finite. A comma is a decimal sign where it separates no cells.
func (n *numbers) parse(text string) (float64, *fault) {
	text = strings.Replace(text, "\u2212", "-", 1) // the minus sign of typesetters
	if f := notNumber(text); f != nil {
		return 0, f
	}
	if strings.Contains(text, ",") {
		return n.decimalComma(text)
	}
	v, f := plain(text)
	if f == nil && strings.Contains(text, ".") {
		n.points = true
		if n.commas {
			return 0, mixedSigns()
		}
	}
	return v, f
}

// notNumber names the things that commonly stand where a number should.
func notNumber(text string) *fault {
	switch {
	case text == "":
		return &fault{"blank", "fill it in, or leave the row out"}
	case strings.ContainsAny(text[:1], "<>"):
		return &fault{"a limit and not a number", "leave the row out, or mark it in a flag column"}
	case text[0] == '#':
		return &fault{"an error that a spreadsheet left", "mend it in the spreadsheet, or leave the row out"}
	}
	switch strings.ToLower(strings.TrimLeft(text, "+-")) {
	case "nan", "inf", "infinity":
		return &fault{"not a finite number", "write a number, or leave the row out"}
	}
	return nil
}

// plain reads a number with a decimal point.
func plain(text string) (float64, *fault) {
	if strings.Trim(text, "0123456789+-.eE") == "" {
		v, err := strconv.ParseFloat(text, 64)
		switch {
		case err == nil:
			return v, nil
		case errors.Is(err, strconv.ErrRange):
			return 0, &fault{"too large for a number", "check the exponent"}
		}
	}
	return 0, &fault{"not a number", "write only the number, such as 12.5; its unit belongs in the header"}
}

// decimalComma reads a number that holds a comma.
func (n *numbers) decimalComma(text string) (float64, *fault) {
	switch {
	case strings.Count(text, ",") > 1 || strings.Contains(text, "."):
		return 0, &fault{"thousands are set off", "write 1234.5 and not 1,234.5"}
	case n.commaSeparates:
		return 0, &fault{"a comma inside a number, in a table separated by commas",
			"write a decimal point, or separate the columns by semicolons or tabs"}
	}
	v, f := plain(strings.Replace(text, ",", ".", 1))
	if f != nil {
		return 0, f
	}
	n.commas = true
	n.certain = n.certain || !thousands.MatchString(text)
	if n.points {
		return 0, mixedSigns()
	}
	return v, nil
}

func mixedSigns() *fault {
	return &fault{"decimal points and decimal commas in one table", "write all numbers with a decimal point"}
}

// ambiguous reports whether every comma seen may have been a separator of
// thousands.
func (n *numbers) ambiguous() bool { return n.commas && !n.certain }
