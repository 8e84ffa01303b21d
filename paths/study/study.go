package study

import (
	"fmt"
	"math"
	"slices"

	"bankfire/diffusion"
	"bankfire/diffusion/catalogue"
	"bankfire/paths/traverse"
	"bankfire/thermal"
)

// Study is a study file read and checked: plain data in SI, times in s from
// the start of each path, values of an element in that element's unit.
type Study struct {
	Title      string
	File       string  // the study file as the user named it
	Confidence float64 // of the verdicts, 0 to 1; 0.95 where the study says nothing
	Thresholds []Threshold
	Conditions Conditions
	Settings   []Setting // those of legs that state conditions of their own
	Limits     Limits
	Sharing    Sharing
	Paths      []Path   // names differ from each other and from those of families
	Families   []Family // at least one of the two
	Crystals   []Crystal
	Inputs     []Input  // the study first, then every other file in the order of its first use
	Notes      []string // what was assumed or looks odd and stops nothing
}

// Input is one file that the study rests on.
type Input struct {
	Name   string // as written in the study; without its folder where that was an absolute one
	SHA256 string // of its bytes, in lower-case hexadecimal
}

// Threshold is a temperature that the user named; time above it is reported.
type Threshold struct {
	Name string
	Temp float64 // K
}

// Path is one temperature-time path, written out leg by leg.
type Path struct {
	Name     string
	History  *thermal.History
	Eruption float64 // that of History, s from the start; the end of the path where the study says nothing
	Barred   []Bar   // why crystals cannot have seen it: it does not have moments of theirs, or dissolves them; see also Limits
	Place    thermal.Place
	Crystals []Crystal // of a member of a family: the study's with its values in them; nil where these are the study's
}

// Crystal is a crystal of the study as the path has it.
func (p *Path) Crystal(c *Crystal) *Crystal {
	for i := range p.Crystals {
		if p.Crystals[i].Name == c.Name {
			return &p.Crystals[i]
		}
	}
	return c
}

// Limits are what the user rules out whatever the crystals say. The zero value
// rules out nothing. Life and all times stop at eruption.
type Limits struct {
	Life    [2]float64  // shortest and longest time from start to eruption, s; 0 is none
	Lowest  float64     // coldest that a path may be before eruption, K; 0 is none
	Above   []TimeLimit // times spent above temperatures
	Between []Interval  // times between two moments
	Place   thermal.Place
}

// TimeLimit bounds the time that a path spends above a temperature before
// eruption.
type TimeLimit struct {
	Name    string  // of the threshold; "" where the temperature was typed
	Temp    float64 // K
	Stretch bool    // the longest time without a break, not the total
	Least   float64 // s, 0 is none
	Most    float64 // s, +Inf is none; 0 is never
	Place   thermal.Place
}

// Interval bounds the time between two moments of a path. It does not concern a
// path without the legs that they count from; one that has them the other way
// round is barred.
type Interval struct {
	From, To thermal.Moment
	Least    float64 // s, 0 is none
	Most     float64 // s, +Inf is none
	Place    thermal.Place
}

// Crystal is a shape, the zones it is made of and the elements measured in it.
type Crystal struct {
	Name, Mineral string
	Shape         diffusion.Shape
	R0            float64         // inner radius, m; 0 is the centre
	Zones         []Zone          // at least one, from the inside outwards
	Hosted        bool            // every zone has a Host, or the crystal has
	Host          *Host           // a smoothed profile of the host; nil is one value a zone
	HostLaw       *Law            // by which the host itself moves; nil if that is not known or does not matter
	Elements      []Element       // at least one
	Exists        *thermal.Moment // from which on it sees a path; nil is the start
	ExistsPlace   thermal.Place   // of Exists
	Moves         []Move          // of its rim, once all zones are there; the widths of these are those in the end
	Dissolves     *TimeLimit      // bars a path from it, counted from when it exists; nil is never
	Place         thermal.Place
}

// Zone is a growth zone with its width. Widths add up from the inner radius
// outwards.
type Zone struct {
	Name  string
	Width float64 // m, above 0
	Times float64 // factor on D, above 0; 1 where the study says nothing
	Host  float64 // composition of the host, a mole fraction, if the crystal is Hosted; 0 where it has a Host of its own
	// HostSigma is the standard deviation of Host; 0 if the study states none.
	HostSigma  float64
	Added      *thermal.Moment // nil is that it is there from the start; counted from the path, whatever zone the study counts from
	AddedPlace thermal.Place
}

// Element is one element of a crystal: how it moves, what it started from,
// what held at the ends and what was measured.
type Element struct {
	Name, Unit string // Unit is that of every value below and of the traverse
	Law        Law
	Partition  *Partition // couples it to the host; nil is no coupling
	Start      Start
	// Alternatives are the starts of which one is true, two or more, Start being the
	// first; nil if there is no choice.
	Alternatives []Start
	Inner        []Rim              // nil is sealed: at the centre, symmetry
	Rims         []Rim              // at least one
	Traverse     *traverse.Traverse // nil if nothing was measured; then no value is free
	Tilt         Nuisance           // of the boundaries against the measured line, rad, 0 to below a right angle; see traverse.Place
	Origin       Nuisance           // m, added to every measured position counted as in the file; see traverse.Place
	Scatter      bool               // scatter beyond the errors is fitted
	Open         string             // what of it differs between the members of families: "its start"; "" is nothing
	Place        thermal.Place
}

// Nuisance is a value of no interest by itself, of which the study says more or
// less: Value exactly; Value with a Gaussian prior of standard deviation Sigma;
// or that it is free between Lo and Hi, evenly likely inside.
type Nuisance struct {
	Value, Sigma float64 // unless Ranged; Sigma 0 is exact
	Lo, Hi       float64 // Lo < Hi if Ranged, else both 0
}

// Fixed reports whether the value is known exactly.
func (n Nuisance) Fixed() bool { return n.Sigma == 0 && !n.Ranged() }

// Ranged reports whether the value is free within a range.
func (n Nuisance) Ranged() bool { return n.Lo < n.Hi }

// Middle returns the value to begin with: Value, or the middle of the range.
func (n Nuisance) Middle() float64 {
	if n.Ranged() {
		return n.Lo + (n.Hi-n.Lo)/2
	}
	return n.Value
}

// Law is the diffusivity of an element with what is known about it.
type Law struct {
	Key        string         // key in the catalogue, name of a [[law]], or "" for one written with the element; see Parts
	Row        *catalogue.Row // nil unless it is from the catalogue
	Law        diffusion.Law
	Sigma      float64 // standard deviation of log10 D at mid-range; 0 if the study does not say
	TMin, TMax float64 // calibrated range, K; both 0 if the study does not say
	Citation   string
	Caution    string // what else belongs beside every verdict that rests on the law; "" is nothing
	// In a host of composition X, D has the factor exp(HostSlope (X - HostAt)).
	HostSlope, HostAt float64
	// Where the element has the value C, D has the factor exp(OwnSlope (C - OwnAt)).
	OwnSlope, OwnAt float64
	// Standard deviations of the slopes, D at HostAt, or as much above as HeldAbove says,
	// and at OwnAt held; 0 if none is stated.
	HostSlopeSigma, OwnSlopeSigma float64
	HeldAbove                     float64
	SlopeOf                       string            // the law whose HostSlope it is; "" is its own
	Times                         thermal.Uncertain // the user's factor on D, which Law holds; its error is one beside Sigma; 0 is none
	Fugacities                    []Fugacity        // under which Law holds, one a setting; nil if it does not depend on fO2
	Parts                         []Part            // of which a law by direction is the sum; then Row and Fugacities are nil, Key joins theirs, and Sigma is 0
	Switch                        string            // of a law that is Parts[0] above it and else Parts[1]: "fO2 1e-10 Pa" or "800 C"; "" is none
}

// Fugacity is what the fO2 of a law's constants is in legs of a setting.
type Fugacity struct {
	Setting int               // thermal.Leg's
	Buffer  *catalogue.Buffer // that it follows; nil is none
	FO2     float64           // Pa, at every temperature, if it follows none
}

// Part is a law's part in a law by direction, or one of the two of a switch.
type Part struct {
	Axes  string  // along which it is the law: "a", "b and c", "c (6 times that along a and b)"
	Share float64 // cos2 of the angle between the boundary's normal and the axis, summed over the axes; those on which D is less by a ratio count so much less
	Law   Law     // with a Key
}

// Cautions returns the sentences that belong beside every verdict that rests on
// the law: those of the catalogue, what fO2 was, and what the study says of it.
func (l *Law) Cautions() []string {
	return l.cautions(func(int) bool { return true })
}

// CautionsOn returns those that concern a path: of its legs' conditions alone.
func (l *Law) CautionsOn(h *thermal.History) []string {
	return l.cautions(func(setting int) bool {
		return slices.ContainsFunc(h.Legs(), func(leg thermal.Leg) bool { return leg.Setting == setting })
	})
}

func (l *Law) cautions(holds func(setting int) bool) []string {
	var out []string
	add := func(caution string) {
		if !slices.Contains(out, caution) {
			out = append(out, caution)
		}
	}
	if l.Row != nil {
		out = l.Row.Cautions()
	}
	for _, f := range l.Fugacities {
		switch {
		case !holds(f.Setting):
		case f.Buffer == nil:
			add(fmt.Sprintf("fO2 held at %.3g Pa at every temperature", f.FO2))
		default:
			for _, caution := range f.Buffer.Cautions() {
				add(caution)
			}
		}
	}
	for _, caution := range l.partCautions(holds) {
		add(caution)
	}
	if times := l.TimesText(); times != "" {
		out = append(out, times)
	}
	if l.Caution != "" {
		out = append(out, l.Caution)
	}
	return out
}

// partCautions are those of the parts, with the key of a part that has one which
// others have not.
func (l *Law) partCautions(holds func(setting int) bool) []string {
	parts, having := make([][]string, len(l.Parts)), map[string]int{}
	for i := range l.Parts {
		parts[i] = l.Parts[i].Law.cautions(holds)
		for _, caution := range parts[i] {
			having[caution]++
		}
	}
	var out []string
	for i, list := range parts {
		for _, caution := range list {
			if having[caution] < len(parts) {
				caution = l.Parts[i].Law.Key + ": " + caution
			}
			out = append(out, caution)
		}
	}
	return out
}

// Conditions are what held along the paths, but in legs that state their own.
type Conditions struct {
	Given  catalogue.Conditions // pressure, activities and an fO2 that stays the same, as far as given
	Buffer *catalogue.Buffer    // that fO2 follows; nil is none
	Offset float64              // of fO2 from the buffer, log10 units
	Typed  []string             // all of them as the study has them: "pressure 2 kbar"
}

// Fugacity returns the oxygen fugacity along the buffer, at 1 bar where no
// pressure is given.
func (c *Conditions) Fugacity() catalogue.Fugacity {
	p, given := c.Given[catalogue.Pressure]
	if !given {
		p = 1e5
	}
	return c.Buffer.Fugacity(c.Offset, p)
}

// Partition is a crystal/melt partition relation, R T ln K = A X + B.
type Partition struct {
	Key  string               // key in the catalogue, or name of a [[partition]]
	Row  *catalogue.Partition // nil unless it is from the catalogue
	A, B float64              // J/mol
	// Standard deviations, J/mol, 0 if none is stated: of A, R T ln K in a host At held,
	// and of B, which is that of R T ln K there.
	SigmaA, SigmaB float64
	At             float64
}

// LnK returns the logarithm of the partition coefficient in a host of
// composition x at temp, K.
func (p *Partition) LnK(x, temp float64) float64 {
	return (float64(p.A*x) + p.B) / (thermal.GasConstant * temp)
}

// Cautions returns the sentences that belong beside every verdict that rests on
// the relation.
func (p *Partition) Cautions() []string {
	if p.Row == nil {
		return nil
	}
	return p.Row.Cautions()
}

// Plateau is a value before the measured traverse has been looked at.
type Plateau struct {
	Free         bool    // fitted from the traverse alone
	Value, Sigma float64 // unless Free: the value, and its standard deviation from other analyses; 0 is exact
}

// Start is an element's profile before diffusion.
type Start struct {
	Name       string      // of an alternative; "" if it has none
	Zones      []Plateau   // one a zone
	Edge       Nuisance    // width of the edges between zones, m, at least 0: error functions of standard deviation width/4; 0 is a jump
	Edges      []Nuisance  // instead, one a boundary, from the inside outwards, two or more; nil is Edge for all
	Solubility *Solubility // that gives the zones; nil is none
	Melts      []Grown     // one a zone if each is in equilibrium with a melt by the element's Partition; else nil
	Scaled     *Scaled     // a start with the shape of another element, instead of Zones, which are then all 0; nil is none
}

// Widths are those of the edges: one for all boundaries, or one each.
func (s *Start) Widths() []Nuisance {
	if s.Edges != nil {
		return s.Edges
	}
	return []Nuisance{s.Edge}
}

// Grown is how a zone grew in equilibrium with a melt: its plateau is that in a host of
// the composition Host, and elsewhere it goes as K.
type Grown struct {
	Temp float64 // K
	Host float64
}

// Rim says what holds at an end of the crystal from a moment on, until the
// next rim of the list.
type Rim struct {
	Kind      diffusion.RimKind
	Zone      int                 // held at the plateau of this zone; -1 if it is not tied to one
	Value     Plateau             // held and tied to no zone; of transfer, in equilibrium with what is outside
	Rate      diffusion.Arrhenius // of transfer: its coefficient, ln(m/s) and K
	Given     *Series             // prescribed; of transfer, instead of Value
	Following *Following          // the same, unless Given
	From      *thermal.Moment     // nil in the first of a list: from the start of the path
	Assumed   bool                // held at the plateau of the zone that was outermost, since the study does not say
	Place     thermal.Place       // of its moment, or of the rim if it has none
}

// valued reports whether the rim has a value of its own.
func (r *Rim) valued() bool {
	if r.Kind == diffusion.Transfer {
		return r.Given == nil && r.Following == nil
	}
	return r.Kind == diffusion.Held && r.Zone < 0
}

// Series is a value against time, linear between its rows; equal times jump.
type Series struct {
	Time           []float64 // s, never falling
	Value          []float64 // in the element's unit
	BeforeEruption bool      // Time counts from eruption and is negative before it, else it counts from the start
	Place          thermal.Place
}

// FreeValue describes one column of a Problem's Basis: a value that the
// traverse decides, alone or together with a prior.
type FreeValue struct {
	Name     string            // "core", "rim", "rim 2"
	Prior    thermal.Uncertain // if HasPrior
	HasPrior bool
}

// Size returns the outer radius of the crystal, m.
func (c *Crystal) Size() float64 {
	r := c.R0
	for _, z := range c.Zones {
		r += z.Width
	}
	return r
}

// Mirrored reports whether the inner end of the crystal is a centre of
// symmetry for the element, so that what lies beyond it is its mirror image.
func (c *Crystal) Mirrored(e *Element) bool { return c.R0 == 0 && e.Inner == nil }

// Factor is the factor on D of the element's law in zone i. What a smoothed host
// adds, Spread has.
func (c *Crystal) Factor(e *Element, i int) float64 {
	z := &c.Zones[i]
	if e.Law.HostSlope == 0 || c.Host != nil {
		return z.Times
	}
	return z.Times * e.Law.onHost(z.Host)
}

// onHost is the factor on D in a host of composition x.
func (l *Law) onHost(x float64) float64 { return math.Exp(l.HostSlope * (x - l.HostAt)) }

// Spread returns the factor that a smoothed host adds to D, as a function of the
// distance from the centre, m; nil is 1.
func (c *Crystal) Spread(e *Element) func(r float64) float64 {
	if e.Law.HostSlope == 0 || c.Host == nil {
		return nil
	}
	return func(r float64) float64 { return e.Law.onHost(c.Host.At(r)) }
}

// Factors are the least and the largest Factor of all zones, times that which the
// element's own value makes of D at the values that the study states.
func (c *Crystal) Factors(e *Element) (least, most float64) {
	least, most = math.Inf(1), 0
	for i := range c.Zones {
		f := c.Factor(e, i)
		lo, hi := f, f
		if c.Host != nil {
			x, y := c.HostRange(i)
			lo, hi = f*e.Law.onHost(x), f*e.Law.onHost(y)
		}
		least, most = min(least, lo, hi), max(most, lo, hi)
	}
	if e.Law.OwnSlope != 0 {
		lo, hi := c.values(e)
		a, b := math.Exp(e.Law.lnOwn(lo)), math.Exp(e.Law.lnOwn(hi))
		least, most = least*min(a, b), most*max(a, b)
	}
	return least, most
}

// all returns the law, or the parts of one by direction or with a switch.
func (l *Law) all() []*Law {
	if l.Parts == nil {
		return []*Law{l}
	}
	var out []*Law
	for i := range l.Parts {
		out = append(out, l.Parts[i].Law.all()...)
	}
	return out
}

// Partitions are the relations of the element and of its rims, once each; nil if
// there are none.
func (e *Element) Partitions() []*Partition {
	var out []*Partition
	add := func(p *Partition) {
		if !slices.ContainsFunc(out, func(q *Partition) bool { return q.Key == p.Key }) {
			out = append(out, p)
		}
	}
	if e.Partition != nil {
		add(e.Partition)
	}
	for _, rims := range [][]Rim{e.Inner, e.Rims} {
		for i := range rims {
			if f := rims[i].Following; f != nil && f.Partition != nil {
				add(f.Partition)
			}
		}
	}
	return out
}
