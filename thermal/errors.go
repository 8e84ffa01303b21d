package thermal

import (
	"strconv"
	"strings"
	"unicode/utf8"
)

// Place is where in a user's file a value stands, for errors. Lines and columns count from 1; 0 means none.
type Place struct {
	File      string
	Line, Col int
	Field     string // the key, column or flag, as the user writes it
}

// Error is an InputError about the value that stands at p.
func (p Place) Error(value, problem, remedy string) *InputError {
	return (&InputError{Value: value, Problem: problem, Remedy: remedy}).At(p)
}

// InputError is the one error for everything a user can write: a study file, a data file, a flag. It says what is wrong
// with which value, and what to write instead, in lower case and without a full stop.
type InputError struct {
	File    string // as the user named it
	Field   string // the key, column or flag
	Value   string // as typed
	Problem string // "below absolute zero"
	Remedy  string // "want at least -273.15 C"
	Line    int    // from 1; 0 = none
	Col     int    // from 1; 0 = none
}

// Error is
//
//	FILE:LINE:COL: FIELD "VALUE": PROBLEM; REMEDY
//
// without the parts that are empty or zero.
func (e *InputError) Error() string {
	return joinFilled(": ", e.place(), e.subject(), joinFilled("; ", e.Problem, e.Remedy))
}

// At is a copy of e that stands at p.
func (e *InputError) At(p Place) *InputError {
	at := *e
	at.File, at.Line, at.Col, at.Field = p.File, p.Line, p.Col, p.Field
	return &at
}

// place is FILE:LINE:COL. A line without a file is "line 3", a column without a line is left out.
func (e *InputError) place() string {
	if e.Line == 0 {
		return e.File
	}
	at := strconv.Itoa(e.Line)
	if e.Col != 0 {
		at += ":" + strconv.Itoa(e.Col)
	}
	if e.File == "" {
		return "line " + at
	}
	return e.File + ":" + at
}

// subject is FIELD "VALUE".
func (e *InputError) subject() string {
	if e.Value == "" {
		return e.Field
	}
	return joinFilled(" ", e.Field, strconv.Quote(e.Value))
}

// joinFilled joins the parts that are not empty.
func joinFilled(sep string, parts ...string) string {
	filled := make([]string, 0, len(parts))
	for _, part := range parts {
		if part != "" {
			filled = append(filled, part)
		}
	}
	return strings.Join(filled, sep)
}

// Shorten cuts a text that is too long to be quoted in an error to 60 characters, the last three of them dots.
func Shorten(text string) string {
	const longest = 60
	if utf8.RuneCountInString(text) <= longest {
		return text
	}
	return string([]rune(text)[:longest-3]) + "..."
}
