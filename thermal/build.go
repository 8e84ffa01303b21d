package thermal

import (
	"errors"
	"fmt"
	"math"
	"slices"
)

// MaxLegs is the largest number of legs in a path, after reheats and repeats are unrolled.
const MaxLegs = 100_000

// SpecKind says how a leg is written.
type SpecKind int

// The kinds of leg in a study.
const (
	SpecHold SpecKind = iota
	SpecRamp
	SpecRelax
	SpecReheat // rise to a peak, dwell there, relax back
	SpecSheet
	SpecTable
	SpecRepeat // other legs several times over
	SpecPulses // reheats at moments of their own
)

// String is the word a study uses for the kind.
func (k SpecKind) String() string {
	words := [...]string{"hold", "ramp", "relax", "reheat", "sheet", "table", "repeat", "reheats"}
	if k < 0 || int(k) >= len(words) {
		return "leg of no known kind"
	}
	return words[k]
}

// Spec is a leg as a user writes it.
type Spec struct {
	Kind   SpecKind
	Name   string  // "" = none
	Temp   float64 // K: temperature of a hold, end of a ramp, ambient of a relax, peak of a reheat, lowest of reheats, magma of a sheet
	From   float64 // K: where a ramp, relax, reheat or reheats begin; 0 = where the previous leg ended
	For    float64 // s; 0 = not given, which a reheat and a table allow
	Efold  float64 // s, of a relax or reheat
	Rise   float64 // s, of a reheat; 0 = at once
	Dwell  float64 // s, of a reheat
	Sheet  *Sheet  // of a sheet; its Magma is Temp where that is given
	Rows   *Rows   // of a table
	Times  int     // of a repeat
	Legs   []Spec  // of a repeat
	Pulses []Pulse // of reheats, in the order of their beginnings
	Place  Place   // where it stands in the study, for errors

	Setting int // of all legs that it becomes, see Leg; a repeat has none, its legs have theirs
}

// backWithin is how near a reheat without a duration comes to the temperature it rose from before it ends, K.
const backWithin = 1.0

// Build makes dst the path that the specs describe, with its names.
//
// A reheat becomes a ramp to its peak, a hold, and a relaxation towards the temperature that it rose from. It ends when
// For has passed since it began, or without For when it is within 1 K of that temperature; the leg after it begins at that
// temperature, so what is left is a jump. A repeat becomes its legs, Times over. A ramp, relax, reheat or reheats begin where
// the leg before it ended, unless From is given; the first of a path needs From.
//
// Reheats stay where they begin for the time For, but that at each moment At of their Pulses one begins: a rise to its Peak,
// a dwell, and a relaxation. One that begins before the last has come back takes its place from the temperature reached by
// then on, or is not felt if the last was to be as hot still. What goes on at the end is cut there.
//
// A name stands for all the legs that its spec becomes. Inside a repeat its occurrences are counted through the whole
// path: "wake" becomes "wake 1", "wake 2" ... Two stretches of one name are refused.
//
// Errors are *InputError with the spec's Place, joined if there are several; dst is then as before. Legs are counted before
// they are unrolled, so that a repeat of too many costs neither time nor memory.
func Build(dst *History, specs []Spec) error { return new(Builder).Build(dst, specs) }

// Build is the function Build in memory that b keeps and uses again: paths of no more legs than before allocate nothing if
// the specs are the same ones, with other values in them.
func (b *Builder) Build(dst *History, specs []Spec) error {
	if err := errors.Join(checkSpecs(specs, nil)...); err != nil {
		return err
	}
	n := 0.0
	for i := range specs {
		if n += specs[i].count(); n > MaxLegs {
			return tooMany(n, specs[i].Place)
		}
	}
	b.reset(int(n))
	if err := b.unrollAll(specs, false); err != nil {
		return err
	}
	if err := dst.Set(b.legs); err != nil {
		return err
	}
	for _, s := range b.stretches {
		dst.names = append(dst.names, Named{s.name, dst.starts[s.from], dst.starts[s.to]})
	}
	return nil
}

// tooMany is the error for a path of n legs.
func tooMany(n float64, at Place) *InputError {
	return at.Error("", fmt.Sprintf("path of %.6g legs or more", n), fmt.Sprintf("want at most %d after repeats are unrolled", MaxLegs))
}

// count is into how many legs the spec unrolls, at most.
func (s *Spec) count() float64 {
	switch s.Kind {
	case SpecReheat:
		return 3
	case SpecPulses:
		return 3 * float64(len(s.Pulses)+1)
	case SpecRepeat:
		sum := 0.0
		for i := range s.Legs {
			sum += s.Legs[i].count()
		}
		return float64(s.Times) * sum
	}
	return 1
}

// checkSpecs appends everything that is wrong with the specs by themselves.
func checkSpecs(specs []Spec, errs []error) []error {
	for i := range specs {
		s := &specs[i]
		if p := s.check(); p != nil {
			errs = append(errs, p.At(s.Place))
		}
		errs = checkSpecs(s.Legs, errs)
	}
	return errs
}

// check is nil, or what is wrong with the spec by itself.
func (s *Spec) check() *InputError {
	if s.From != 0 {
		if p := s.checkFrom(); p != nil {
			return p
		}
	}
	if s.For == 0 && s.Kind != SpecReheat && s.Kind != SpecTable && s.Kind != SpecRepeat {
		return &InputError{Problem: s.Kind.String() + " without a duration", Remedy: `write for = "10 yr", say`}
	}
	switch s.Kind {
	case SpecHold, SpecRamp:
		return firstProblem(checkTemperature(s.Temp), checkDuration(s.For))
	case SpecRelax:
		return firstProblem(checkTemperature(s.Temp), checkDuration(s.For), checkEfold(s.Efold))
	case SpecReheat:
		return firstProblem(checkTemperature(s.Temp), checkDuration(s.For), checkDuration(s.Rise), checkDuration(s.Dwell),
			checkEfold(s.Efold), s.checkReheat())
	case SpecPulses:
		return firstProblem(checkTemperature(s.Temp), checkDuration(s.For), s.checkPulses())
	case SpecSheet:
		return firstProblem(s.sheet().check(), checkDuration(s.For))
	case SpecTable:
		return firstProblem(s.Rows.check(s.For), checkDuration(s.For))
	case SpecRepeat:
		return s.checkRepeat()
	}
	return &InputError{Problem: s.Kind.String(), Remedy: "want hold, ramp, relax, reheat, sheet, table, repeat or reheats"}
}

func (s *Spec) checkFrom() *InputError {
	if s.Kind != SpecRamp && s.Kind != SpecRelax && s.Kind != SpecReheat && s.Kind != SpecPulses {
		return &InputError{Problem: s.Kind.String() + " with from", Remedy: "leave it out; ramp, relax, reheat and reheats have it"}
	}
	return checkTemperature(s.From)
}

func (s *Spec) checkReheat() *InputError {
	if s.For != 0 && s.For < s.Rise+s.Dwell {
		return &InputError{Value: timeText(s.For), Problem: "shorter than rise and dwell together, " + timeText(s.Rise+s.Dwell),
			Remedy: "for counts the whole reheat; want it longer, or leave it out"}
	}
	return nil
}

func (s *Spec) checkRepeat() *InputError {
	switch {
	case s.Times < 1:
		return &InputError{Value: fmt.Sprint(s.Times), Problem: "repeats less than once", Remedy: "want a whole number from 1"}
	case len(s.Legs) == 0:
		return &InputError{Problem: "repeat of no legs", Remedy: "write legs = [ ... ]"}
	case s.For != 0:
		return &InputError{Problem: "repeat with a duration", Remedy: "leave for out; its legs have theirs"}
	}
	return nil
}

// sheet is the sheet with its magma's temperature, nil if there is none.
func (s *Spec) sheet() *Sheet {
	if s.Sheet == nil || s.Temp == 0 || s.Temp == s.Sheet.Magma {
		return s.Sheet
	}
	filled := *s.Sheet
	filled.Magma = s.Temp
	return &filled
}

// Builder unrolls specs into paths, one after the other. The zero value is ready; it is for one goroutine.
type Builder struct {
	legs      []Leg
	stretches []stretchOf
	taken     map[string]bool
	counts    map[*Spec]int // occurrences so far of what is named inside a repeat
	counted   map[occurrence]string
	temp      float64 // where the path has got to, K; 0 at its start
	setting   int     // of the spec that is unrolled
}

// occurrence is one of those that a repeat makes of a named spec.
type occurrence struct {
	name string
	of   int // from 1
}

// reset forgets the path before and makes room for n legs.
func (b *Builder) reset(n int) {
	b.legs, b.stretches = slices.Grow(b.legs[:0], n), b.stretches[:0]
	b.temp, b.setting = 0, 0
	if b.taken == nil {
		b.taken, b.counts, b.counted = map[string]bool{}, map[*Spec]int{}, map[occurrence]string{}
	}
	clear(b.taken)
	clear(b.counts)
}

// count returns the name of the next occurrence of a spec.
func (b *Builder) count(s *Spec) string {
	b.counts[s]++
	key := occurrence{s.Name, b.counts[s]}
	name, known := b.counted[key]
	if !known {
		name = fmt.Sprintf("%s %d", key.name, key.of)
		b.counted[key] = name
	}
	return name
}

// stretchOf is a name and the legs from ... to-1 that it stands for.
type stretchOf struct {
	name     string
	from, to int
}

func (b *Builder) unrollAll(specs []Spec, repeated bool) error {
	for i := range specs {
		if err := b.named(&specs[i], repeated); err != nil {
			return err
		}
	}
	return nil
}

// named unrolls a spec and notes its name.
func (b *Builder) named(s *Spec, repeated bool) error {
	if s.Name == "" {
		return b.unroll(s, repeated)
	}
	name := s.Name
	if repeated {
		name = b.count(s)
	}
	if b.taken[name] {
		return s.Place.Error(name, "second leg of this name in the path", "want names that differ; inside a repeat they are counted")
	}
	b.taken[name] = true
	at := len(b.stretches)
	b.stretches = append(b.stretches, stretchOf{name: name, from: len(b.legs)})
	err := b.unroll(s, repeated)
	b.stretches[at].to = len(b.legs)
	return err
}

func (b *Builder) unroll(s *Spec, repeated bool) error {
	b.setting = s.Setting
	switch s.Kind {
	case SpecHold:
		b.put(Leg{Kind: Hold, For: s.For, T0: s.Temp})
	case SpecSheet:
		b.put(Leg{Kind: SheetCooling, For: s.For, Sheet: s.sheet()})
	case SpecTable:
		b.put(Leg{Kind: Table, For: s.For, Rows: s.Rows})
	case SpecRepeat:
		for range s.Times {
			if err := b.unrollAll(s.Legs, true); err != nil {
				return err
			}
		}
	default:
		return b.unrollFrom(s)
	}
	return nil
}

// unrollFrom unrolls what begins where the path has got to.
func (b *Builder) unrollFrom(s *Spec) error {
	from := s.From
	if from == 0 {
		from = b.temp
	}
	if from == 0 {
		return s.Place.Error("", "nothing before this "+s.Kind.String()+" says where it begins", `write from = "690 C", say`)
	}
	switch s.Kind {
	case SpecRamp:
		b.put(Leg{Kind: Ramp, For: s.For, T0: from, T1: s.Temp})
	case SpecRelax:
		b.put(Leg{Kind: Relax, For: s.For, T0: from, T1: s.Temp, Tau: s.Efold})
	case SpecPulses:
		return b.pulses(s, from)
	default:
		return b.reheat(s, from)
	}
	return nil
}

// reheat unrolls a reheat that rises from base.
func (b *Builder) reheat(s *Spec, base float64) error {
	if s.Temp < base {
		return s.Place.Error(tempText(s.Temp), "peak below "+tempText(base)+", where the reheat begins", "want a peak above it, or a ramp down")
	}
	back := s.For - s.Rise - s.Dwell
	if s.For == 0 {
		back = s.Efold * max(0, math.Log((s.Temp-base)/backWithin))
	}
	if s.Rise > 0 {
		b.add(Leg{Kind: Ramp, For: s.Rise, T0: base, T1: s.Temp})
	}
	if s.Dwell > 0 {
		b.add(Leg{Kind: Hold, For: s.Dwell, T0: s.Temp})
	}
	if back > 0 {
		b.add(Leg{Kind: Relax, For: back, T0: s.Temp, T1: base, Tau: s.Efold})
	}
	b.temp = base
	return nil
}

// put appends a leg and goes to its end.
func (b *Builder) put(l Leg) {
	b.add(l)
	b.temp = l.At(math.Inf(1))
}

// add appends a leg.
func (b *Builder) add(l Leg) {
	l.Setting = b.setting
	b.legs = append(b.legs, l)
}
