package study

import (
	"cmp"
	"errors"
	"fmt"
	"math"
	"slices"
	"strconv"
	"strings"

	"bankfire/paths/draw"
	"bankfire/thermal"
)

// Family is paths with some values left open. Its members are counted from 0.
type Family struct {
	Name   string
	Seed   uint64
	Asked  int64   // how many members the study asks for; a grid may have fewer
	Values []Value // those drawn first, then those that follow from others, then those that are counted
	Place  thermal.Place

	points   *draw.Points
	specs    []thermal.Spec // with what holds in the middle where a value is open
	holes    []hole
	random   []randomReheats
	eruption *openMoment   // nil is the end of the path
	crystals *openCrystals // nil where they are the same for all members

	vary   *node
	names  names            // of the values that are drawn or tied
	middle []float64        // these in the middle
	used   []bool           // which of these something speaks of
	known  map[*node]parsed // what is in braces in crystals
}

// ValueKind says where a value comes from.
type ValueKind int

// The kinds of value.
const (
	Ranged  ValueKind = iota // from a range
	Chosen                   // one of several
	Normal                   // normally distributed
	Tied                     // follows from others
	Counted                  // how many reheats a leg at random has
)

// Value is one open value of a family.
type Value struct {
	Name        string
	Kind        ValueKind
	Lo, Hi      float64   // of Ranged
	Log         bool      // of Ranged: even in the logarithm
	Choices     []float64 // of Chosen
	Mean, Sigma float64   // of Normal

	is   measure
	tie  expression // of Tied
	rate string     // of Counted
}

// Rate is how many reheats there are in a time, on average, of a Counted value.
func (v *Value) Rate() string { return v.rate }

// drawn reports whether the value is a coordinate of the points that are drawn.
func (v *Value) drawn() bool { return v.Kind != Tied && v.Kind != Counted }

// Plain reports whether the value is a number without a unit.
func (v *Value) Plain() bool { return v.is.plain }

// Dim is what the value measures, unless it is Plain.
func (v *Value) Dim() thermal.Dimension { return v.is.dim }

// Spread says how the value is drawn: "even", "log", "one of 3", "normal", "Poisson",
// or as what it follows from others.
func (v *Value) Spread() string {
	switch {
	case v.Kind == Tied:
		return "= " + v.tie.text
	case v.Kind == Normal:
		return "normal"
	case v.Kind == Counted:
		return "Poisson"
	case v.Kind == Chosen:
		return fmt.Sprintf("one of %d", len(v.Choices))
	case v.Log:
		return "log"
	}
	return "even"
}

// levels is how many steps a grid takes along the value; 0 is as many as there is
// room for.
func (v *Value) levels() int {
	switch {
	case v.Kind == Chosen:
		return len(v.Choices)
	case v.Kind == Ranged && v.is.whole:
		return int(v.Hi-v.Lo) + 1
	}
	return 0
}

// at is the value, in SI, at the fraction u of its distribution, 0 <= u < 1.
func (v *Value) at(u float64) float64 {
	lo, hi := v.Lo, v.Hi
	switch {
	case v.Kind == Chosen:
		return v.Choices[int(u*float64(len(v.Choices)))]
	case v.Kind == Normal:
		return v.Mean + v.Sigma*math.Sqrt2*math.Erfinv(2*math.Max(u, leastU)-1)
	}
	if v.is.whole { // each whole number, the last one too, has a part of the range
		hi++
	}
	x := lo + float64(u*(hi-lo))
	if v.Log {
		x = lo * math.Exp(float64(u*math.Log(hi/lo)))
	}
	if v.is.whole {
		return math.Min(math.Floor(x), v.Hi)
	}
	return math.Max(lo, math.Min(x, hi))
}

// leastU keeps a normal value finite.
const leastU = 0x1p-54

// hole is a value of a leg that is filled for each member.
type hole struct {
	at    []int // the leg, counted through the lists of legs
	key   string
	value expression
	bound bound
	words string // `for = "{wait}" on line 12`
}

// openMoment is the eruption of members.
type openMoment struct {
	moment thermal.Moment
	offset *expression // the size of the moment's offset; nil is as it stands
}

// Count is how many members the family has.
func (f *Family) Count() int64 { return f.points.Count() }

// Candidate is one member of a family, in memory that is used again.
type Candidate struct {
	Index   int64
	Values  []float64 // SI, in the order of the family's
	History thermal.History
	// Crystals are the study's with the member's values in them, nil where they have no
	// place for any. They are never changed, and made anew for each member.
	Crystals []Crystal
	// Barred is what rules the member out, in words that are the same for all members
	// that it rules out alike, and Why those about this one. Both are "" if nothing does;
	// else the history is that of the member before.
	Barred, Why string

	family  *Family
	unit    []float64
	specs   []thermal.Spec
	fill    []target
	random  []randomReheats // with the candidate's own ranges
	builder thermal.Builder
}

// target is where the value of a hole goes.
type target struct {
	values []*float64
	times  *int
}

// At makes dst member i of the family, a function of the study, the seed and i
// alone. It allocates only when dst was of another family before, where crystals differ
// from member to member, or where a member has more legs than any before, or is barred. It panics unless 0 <= i < Count.
func (f *Family) At(dst *Candidate, i int64) {
	if i < 0 || i >= f.Count() {
		panic(fmt.Sprintf("study: no member %d of %d", i, f.Count()))
	}
	if dst.family != f {
		dst.bind(f)
	}
	dst.Index, dst.Barred, dst.Why, dst.Crystals = i, "", "", nil
	f.points.At(dst.unit, i)
	dst.Values = dst.Values[:0]
	for k := range f.Values {
		switch v := &f.Values[k]; v.Kind {
		case Tied:
			dst.Values = append(dst.Values, v.tie.at(dst.Values))
		case Counted:
			dst.Values = append(dst.Values, 0)
		default:
			dst.Values = append(dst.Values, v.at(dst.unit[k]))
		}
	}
	for k := range f.holes {
		if !dst.put(&f.holes[k], &dst.fill[k]) {
			return
		}
	}
	for k := range dst.random {
		if !dst.reheat(&dst.random[k], f.points.Stream(i, k)) {
			return
		}
	}
	if err := dst.builder.Build(&dst.History, dst.specs); err != nil {
		dst.refuse(err)
		return
	}
	dst.erupt(f.eruption)
	if f.crystals != nil && dst.Barred == "" {
		dst.grow(f)
	}
}

// grow makes the crystals of the member.
func (c *Candidate) grow(f *Family) {
	var wrong *thermal.InputError
	if c.Crystals, wrong = f.crystals.at(f, c.Values); wrong == nil {
		return
	}
	c.Barred, c.Why = fmt.Sprintf("%s on line %d cannot be", wrong.Field, wrong.Line), wrong.Problem
}

// bind makes dst ready for the family.
func (c *Candidate) bind(f *Family) {
	drawn := 0
	for i := range f.Values {
		if f.Values[i].drawn() {
			drawn++
		}
	}
	*c = Candidate{family: f, unit: make([]float64, drawn), specs: cloneSpecs(f.specs), random: slices.Clone(f.random)}
	for i := range f.holes {
		c.fill = append(c.fill, c.target(&f.holes[i]))
	}
}

func cloneSpecs(specs []thermal.Spec) []thermal.Spec {
	out := slices.Clone(specs)
	for i := range out {
		out[i].Legs = cloneSpecs(out[i].Legs)
		if s := out[i].Sheet; s != nil {
			own := *s
			out[i].Sheet = &own
		}
	}
	return out
}

// leg is the spec that stands there, counted through the lists of legs.
func (c *Candidate) leg(at []int) *thermal.Spec {
	var s *thermal.Spec
	for specs := c.specs; len(at) > 0; at = at[1:] {
		s = &specs[at[0]]
		specs = s.Legs
	}
	return s
}

// target finds where the value of the hole goes.
func (c *Candidate) target(h *hole) target {
	s := c.leg(h.at)
	if s.Kind == thermal.SpecPulses {
		for i := range c.random {
			if to := c.random[i].target(h); to != nil {
				return target{values: to}
			}
		}
	}
	switch h.key {
	case "sheet":
		return target{values: []*float64{&s.Temp, &s.Sheet.Magma}}
	case "hold", "ramp", "relax", "reheat":
		return target{values: []*float64{&s.Temp}}
	case "from":
		return target{values: []*float64{&s.From}}
	case "for":
		return target{values: []*float64{&s.For}}
	case "efold":
		return target{values: []*float64{&s.Efold}}
	case "rise":
		return target{values: []*float64{&s.Rise}}
	case "dwell":
		return target{values: []*float64{&s.Dwell}}
	case "host":
		return target{values: []*float64{&s.Sheet.Host}}
	case "thickness":
		return target{values: []*float64{&s.Sheet.Thickness}}
	case "position":
		return target{values: []*float64{&s.Sheet.Position}}
	case "kappa":
		return target{values: []*float64{&s.Sheet.Kappa}}
	case "repeat":
		return target{times: &s.Times}
	}
	panic("study: no leg has an open " + h.key)
}

// put fills a hole, or bars the member because of what it would be filled with.
func (c *Candidate) put(h *hole, to *target) bool {
	x := h.value.at(c.Values)
	switch b := &h.bound; {
	case x < 0:
		c.Barred = h.words + " is below zero"
	case x == 0 && !b.zero:
		c.Barred = h.words + " is zero"
	case !(x <= b.top):
		c.Barred = h.words + " is more than " + b.topText
	case to.times != nil:
		*to.times = int(math.Round(x))
		return true
	default:
		for _, v := range to.values {
			*v = x
		}
		return true
	}
	c.Why = c.Barred
	return false
}

// refuse bars a member whose values do not make a path.
func (c *Candidate) refuse(err error) {
	c.Barred, c.Why = "its values do not make a path", err.Error()
	var in *thermal.InputError
	if errors.As(err, &in) {
		c.Why = in.Problem
		if in.Line > 0 {
			c.Barred = fmt.Sprintf("the leg on line %d cannot be", in.Line)
		}
	}
}

// erupt sets the eruption of the member.
func (c *Candidate) erupt(at *openMoment) {
	if at == nil {
		return
	}
	m := at.moment
	if at.offset != nil {
		if m.Offset = math.Copysign(at.offset.at(c.Values), m.Offset); m.Offset == 0 {
			m.Offset = 0
		}
	}
	t, err := c.History.Moment(m)
	if err == nil {
		err = c.History.SetEruption(t)
	}
	if err != nil {
		c.refuse(err)
		c.Barred = fmt.Sprintf("it does not have its eruption, %q", m.Text)
	}
}

// Level reports whether the value is a temperature on a scale with a zero of its
// own; one that is not may be a difference, K.
func (v *Value) Level() bool { return v.is.level }

// Unit is the unit that values are in if they are concentrations, else "" for SI.
func (v *Value) Unit() string { return v.is.unit }

// Ends are the ends of what may be drawn; there are none of a Normal value or one that
// follows from others.
func (v *Value) Ends() (lo, hi float64, ok bool) {
	switch v.Kind {
	case Ranged:
		return v.Lo, v.Hi, true
	case Chosen:
		return slices.Min(v.Choices), slices.Max(v.Choices), true
	}
	return 0, 0, false
}

// Steps reports whether only some values between the ends can be drawn.
func (v *Value) Steps() bool { return v.Kind == Chosen || v.is.whole }

// Step is the value nearest to x of those that can be drawn, where Steps.
func (v *Value) Step(x float64) float64 {
	if v.Kind != Chosen {
		return math.Max(v.Lo, math.Min(math.Round(x), v.Hi))
	}
	return slices.MinFunc(v.Choices, func(a, b float64) int { return cmp.Compare(math.Abs(a-x), math.Abs(b-x)) })
}

// Below is the part of a range's distribution that lies below x.
func (v *Value) Below(x float64) float64 {
	if v.Log {
		return math.Log(x/v.Lo) / math.Log(v.Hi/v.Lo)
	}
	return (x - v.Lo) / (v.Hi - v.Lo)
}

// Method is how members are drawn.
func (f *Family) Method() draw.Method { return f.points.Method() }

// Unnumbered is the name of a leg of a member as the study has it: without the number
// that comes to a name inside a repeat.
func (f *Family) Unnumbered(name string) string {
	at := strings.LastIndexByte(name, ' ')
	if at < 0 {
		return name
	}
	if _, err := strconv.ParseUint(name[at+1:], 10, 64); err != nil || !repeated(f.specs, name[:at], false) {
		return name
	}
	return name[:at]
}

// repeated reports whether a leg of the name is inside a repeat.
func repeated(specs []thermal.Spec, name string, inside bool) bool {
	return slices.ContainsFunc(specs, func(s thermal.Spec) bool {
		return inside && s.Name == name || repeated(s.Legs, name, true)
	})
}
