package thermal

import "math"

// Kind says how temperature changes along a leg.
type Kind int

// The kinds of leg. Reheats and repeats of a study are unrolled into these by Build.
const (
	Hold         Kind = iota // T = T0
	Ramp                     // T = T0 + (T1 - T0) t/For
	Relax                    // T = T1 + (T0 - T1) exp(-t/Tau), T1 the ambient temperature
	SheetCooling             // conductive cooling of an intrusion, see Sheet
	Table                    // linear between rows, see Rows
)

// String is the word a study uses for the kind.
func (k Kind) String() string {
	switch k {
	case Hold:
		return "hold"
	case Ramp:
		return "ramp"
	case Relax:
		return "relax"
	case SheetCooling:
		return "sheet"
	case Table:
		return "table"
	}
	return "leg of no known kind"
}

// Leg is one piece of a path. It is a value, so that a million histories need no memory of their own; what Sheet and Rows
// point to is shared and never changed. Fields that a kind does not use are ignored. History.Set checks a leg; methods of
// one that Set would refuse may return NaN.
type Leg struct {
	Kind   Kind
	For    float64 // duration, s; for a Table 0 means all its rows
	T0, T1 float64 // K: T0 of Hold, Ramp and Relax, T1 of Ramp (its end) and Relax (the ambient temperature)
	Tau    float64 // e-fold time of Relax, s
	Sheet  *Sheet  // of SheetCooling
	Since  float64 // of SheetCooling: time from the emplacement to the start of the leg, s
	Rows   *Rows   // of Table

	Setting int // which of the caller's sets of conditions holds during the leg; 0 is none in particular
}

// Limits of what Set accepts. They are far beyond anything a rock has seen, and keep every intermediate result of the
// integrals within the range of float64.
const (
	coldest = 1.0  // K
	hottest = 1e5  // K
	longest = 1e20 // s, 3e12 yr

	shortest = 1e-9 // s, of an e-fold time
)

// length is the duration of the leg, s.
func (l *Leg) length() float64 {
	if l.Kind == Table && l.For == 0 {
		return l.Rows.end()
	}
	return l.For
}

// At is the temperature, K, at t seconds from the start of the leg; before the start and after the end it is that of the
// start and the end. Where a table jumps it is the temperature after the jump.
func (l *Leg) At(t float64) float64 {
	t = max(0, min(t, l.length()))
	switch l.Kind {
	case Hold:
		return l.T0
	case Ramp:
		return l.ramp(t)
	case Relax:
		return l.T1 + (l.T0-l.T1)*math.Exp(-t/l.Tau)
	case SheetCooling:
		return l.Sheet.At(l.Since + t)
	case Table:
		return l.Rows.after(t)
	}
	panic("thermal: " + l.Kind.String())
}

// before is the temperature as t is approached from earlier times, K.
func (l *Leg) before(t float64) float64 {
	if l.Kind == Table {
		return l.Rows.before(max(0, min(t, l.length())))
	}
	return l.At(t)
}

// ramp is the temperature at t within a ramp, with its end exactly T1.
func (l *Leg) ramp(t float64) float64 {
	if t >= l.For {
		return l.T1
	}
	return l.T0 + (l.T1-l.T0)*(t/l.For)
}

// Range is the lowest and the highest temperature of the leg, K.
func (l *Leg) Range() (lo, hi float64) {
	switch l.Kind {
	case SheetCooling:
		return l.Sheet.span(l.Since, l.Since+l.For)
	case Table:
		return l.Rows.span(l.length())
	}
	a, b := l.At(0), l.At(l.For)
	return min(a, b), max(a, b)
}

// rangeIn is the same after t0 and before t1, s from its start.
func (l *Leg) rangeIn(t0, t1 float64) (lo, hi float64) {
	if l.Kind == SheetCooling {
		return l.Sheet.span(t0, t1)
	}
	a, b := l.At(t0), l.before(t1)
	lo, hi = min(a, b), max(a, b)
	if l.Kind == Table {
		for i, t := range l.Rows.Time {
			if t > t0 && t < t1 {
				lo, hi = min(lo, l.Rows.Temp[i]), max(hi, l.Rows.Temp[i])
			}
		}
	}
	return lo, hi
}

// check is nil, or what is wrong with the leg: the value, the problem and the remedy.
func (l *Leg) check() *InputError {
	switch l.Kind {
	case Hold:
		return firstProblem(checkDuration(l.For), checkTemperature(l.T0))
	case Ramp:
		return firstProblem(checkDuration(l.For), checkTemperature(l.T0), checkTemperature(l.T1))
	case Relax:
		return firstProblem(checkDuration(l.For), checkTemperature(l.T0), checkTemperature(l.T1), checkEfold(l.Tau))
	case SheetCooling:
		return firstProblem(checkDuration(l.For), checkDuration(l.Since), l.Sheet.check())
	case Table:
		return firstProblem(checkDuration(l.For), l.Rows.check(l.For))
	}
	return &InputError{Problem: l.Kind.String(), Remedy: "want hold, ramp, relax, sheet or table"}
}

// firstProblem is the first that is not nil.
func firstProblem(problems ...*InputError) *InputError {
	for _, p := range problems {
		if p != nil {
			return p
		}
	}
	return nil
}

func checkTemperature(temp float64) *InputError {
	if temp >= coldest && temp <= hottest {
		return nil
	}
	return noTemperature(temp)
}

func noTemperature(temp float64) *InputError {
	if temp <= 0 {
		return &InputError{Value: tempText(temp), Problem: "not above absolute zero", Remedy: "want a temperature above -273.15 C"}
	}
	return &InputError{Value: tempText(temp), Problem: "not a temperature that a rock can have", Remedy: "want one between 1 and 100,000 K"}
}

func checkDuration(t float64) *InputError {
	if t >= 0 && t <= longest {
		return nil
	}
	return noDuration(t)
}

func noDuration(t float64) *InputError {
	if t < 0 {
		return &InputError{Value: timeText(t), Problem: "negative duration", Remedy: "times run forward; want a positive duration"}
	}
	return &InputError{Value: timeText(t), Problem: "not a duration", Remedy: "want one of at most 1e20 s (3e12 yr)"}
}

func checkEfold(t float64) *InputError {
	if t >= shortest && t <= longest {
		return nil
	}
	return &InputError{Value: timeText(t), Problem: "not an e-fold time", Remedy: "want one between 1e-9 s and 1e20 s"}
}
