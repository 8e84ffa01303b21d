package thermal

import "strings"

// MomentKind says which event a moment is counted from.
type MomentKind int

// The events.
const (
	AfterStart     MomentKind = iota // the start of the path
	BeforeEruption                   // the eruption
	BeforeEnd                        // the end of the path
	StartOf                          // the start of the leg Name
	EndOf                            // the end of the leg Name
	Added                            // the addition of the zone Name to the crystal
)

// Moment is a point of a path as a user writes it: an event and a time from it. It becomes a time only together with a
// history, see History.Moment.
type Moment struct {
	Kind   MomentKind
	Offset float64 // s, positive later: "3 yr before eruption" has -3 yr
	Name   string  // of the leg (StartOf, EndOf) or zone (Added), else empty
	Text   string  // as the user wrote it
}

// What a moment may look like, and that of an eruption.
const (
	momentForms   = `want start, end, eruption, "start of LEG", "end of LEG" or "ZONE added", alone or after "3 yr after" or "3 yr before"`
	eruptionForms = `write a moment such as "end of wake 2", "200 yr before end" or "4 kyr after start"`
)

// ParseMoment reads a moment: one of the events
//
//	start, end, eruption, start of LEG, end of LEG, ZONE added
//
// alone, or a duration after or before it: "4 kyr after start", "3 yr before eruption", "3 yr after end of wake 1". "Start
// of path" and "end of path" are start and end. The name of a zone does not begin with a digit. The error is an
// *InputError with Value, Problem and Remedy set; a bare duration is one, since it could be counted from either end.
func ParseMoment(text string) (Moment, error) {
	m, refused := readMoment(text)
	if refused != nil {
		if refused.Problem == bareDuration {
			refused.Remedy += ` or "` + strings.TrimSpace(text) + ` before eruption"`
		}
		return Moment{}, refused.of(text)
	}
	return m, nil
}

// ParseEruption is ParseMoment for the moment of eruption itself, which counts from the path or one of its legs.
func ParseEruption(text string) (Moment, error) {
	m, refused := readMoment(text)
	switch {
	case refused != nil && refused.Remedy == momentForms:
		refused.Remedy = eruptionForms
	case refused != nil:
	case m.Kind == BeforeEruption:
		refused = &InputError{Problem: "counts from the eruption itself", Remedy: eruptionForms}
	case m.Kind == Added:
		refused = &InputError{Problem: "counts from a zone", Remedy: eruptionForms}
	}
	if refused != nil {
		return Moment{}, refused.of(text)
	}
	return m, nil
}

func readMoment(text string) (Moment, *InputError) {
	plain := strings.TrimSpace(text)
	read := readEvent
	if numberStart.MatchString(plain) {
		read = readOffset
	}
	m, refused := read(plain)
	if refused != nil {
		return Moment{}, refused
	}
	m.Text = text
	return m, nil
}

// bareDuration is what is wrong with a duration in the place of a moment.
const bareDuration = "is a duration, not a moment"

// readOffset reads a duration and the event that it is counted from.
func readOffset(text string) (Moment, *InputError) {
	duration, event, later, ok := cutOffset(text)
	offset, err := ParseQuantity(duration, Duration)
	if err != nil {
		return Moment{}, err.(*InputError)
	}
	if !ok {
		return Moment{}, &InputError{Problem: bareDuration, Remedy: `write "` + text + ` after start"`}
	}
	if offset < 0 {
		return Moment{}, &InputError{Problem: "counts a negative duration", Remedy: `want "after" or "before" and a positive one`}
	}
	m, refused := readEvent(event)
	if refused != nil {
		return Moment{}, refused
	}
	m.Offset = offset
	if !later {
		m.Offset = 0 - offset // not -0
	}
	switch {
	case m.Kind == AfterStart && m.Offset < 0:
		return Moment{}, &InputError{Problem: "lies before the start of the path", Remedy: `write "after start"`}
	case m.Kind == BeforeEnd && m.Offset > 0:
		return Moment{}, &InputError{Problem: "lies after the end of the path", Remedy: `write "before end"`}
	}
	return m, nil
}

// cutOffset cuts text at its first word "after" (later) or "before". ok is false if there is none.
func cutOffset(text string) (duration, event string, later, ok bool) {
	text += " " // so that a last word is found, too
	after, before := strings.Index(text, " after "), strings.Index(text, " before ")
	later = after >= 0 && (before < 0 || after < before)
	word := " before "
	if later {
		word = " after "
	}
	duration, event, ok = strings.Cut(text, word)
	return duration, strings.TrimSpace(event), later, ok
}

// readEvent reads an event without an offset.
func readEvent(text string) (Moment, *InputError) {
	switch text {
	case "start", "start of path":
		return Moment{Kind: AfterStart}, nil
	case "end", "end of path":
		return Moment{Kind: BeforeEnd}, nil
	case "eruption":
		return Moment{Kind: BeforeEruption}, nil
	case "":
		return Moment{}, &InputError{Problem: "is incomplete", Remedy: momentForms}
	}
	if name, ok := strings.CutPrefix(text, "start of "); ok {
		return Moment{Kind: StartOf, Name: strings.TrimSpace(name)}, nil
	}
	if name, ok := strings.CutPrefix(text, "end of "); ok {
		return Moment{Kind: EndOf, Name: strings.TrimSpace(name)}, nil
	}
	if name, ok := strings.CutSuffix(text, " added"); ok {
		return Moment{Kind: Added, Name: strings.TrimSpace(name)}, nil
	}
	return Moment{}, &InputError{Problem: "is no moment", Remedy: momentForms}
}
