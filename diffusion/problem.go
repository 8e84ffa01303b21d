package diffusion

import (
	"fmt"
	"math"
	"slices"
)

// Shape is the geometry of a crystal. Its value is the exponent n of the
// radius in
//
//	dC/dt = r^-n d/dr (r^n D dC/dr).
type Shape int

// The three shapes: diffusion along one direction, towards an axis, towards a
// point.
const (
	Slab Shape = iota
	Cylinder
	Ball
)

func (s Shape) String() string {
	return [...]string{"slab", "cylinder", "ball"}[s]
}

// Zone is one growth zone, listed from the inside outwards.
type Zone struct {
	Outer float64 // radius of its outer boundary, m
	Start float64 // plateau value before diffusion, in the element's unit
	Edge  float64 // width w of the edge at its outer boundary, m: an error function of standard deviation w/4; 0 is a jump
	Times float64 // factor on D in this zone; 0 is read as 1
	Host  float64 // composition of the host in this zone, in the unit that LnK asks for
	Added float64 // s from the start of the path: when it was added, with its edge to the zone inside; 0 or less is before
	// Form makes of a plateau a profile that is proportional to it: Start, and what a
	// free value adds to it, times Form(r). It must be smooth, also a little way into
	// the neighbours where there is an edge. nil is 1.
	Form func(r float64) float64
}

// RimKind says what holds at an end of the crystal.
type RimKind int

// The kinds of rim.
const (
	Sealed     RimKind = iota // nothing passes
	Held                      // the value is kept at Rim.Value
	Prescribed                // the value is given as a function of time
	Transfer                  // the surface exchanges with a value outside at a finite rate
	Following                 // the value follows temperature
)

// Rim is what holds at one end of the crystal from a time on, until the next
// rim in the list.
type Rim struct {
	Kind        RimKind
	From        float64    // s from the start of the path; the first of a list must not be later than 0
	Value       float64    // of a held rim, in the element's unit; of transfer, the value in equilibrium with what is outside
	Given       *Given     // of a prescribed rim; of transfer, instead of Value unless nil
	Equilibrium *Arrhenius // of a following rim, whose value is exp(LnA - E/T) in the element's unit; of transfer, instead of Value unless nil
	Rate        Arrhenius  // of transfer: the coefficient k = exp(LnA - E/T), LnA ln(m/s), E in K
}

// Given is a rim value known as a function of time. At must be smooth between
// consecutive entries of Breaks and Jumps; it is never evaluated at one of them.
type Given struct {
	At     func(t float64) float64 // value at t, s
	Breaks []float64               // kinks, s
	Jumps  []float64               // discontinuities, s: the solution is damped after each
}

// Basis is a value left open: the solution is linear in it, so its derivative
// is solved along as one more right-hand side.
type Basis struct {
	Start        []float64               // change of each zone's start per unit of the value
	Inner, Outer []float64               // the same of each entry of Problem.Inner and Problem.Outer; nil is no change
	Profile      func(r float64) float64 // the same of Problem.Profile; nil is no change
}

// Problem is one element in one crystal without its history: plain data in SI.
type Problem struct {
	Shape   Shape
	R0      float64                 // inner radius, m; 0 is the centre
	Zones   []Zone                  // at least one, from the inside outwards
	Profile func(r float64) float64 // added to the zones' start, nil is nothing
	Law     Law
	Spread  func(r float64) float64 // D(r, t) = Law(T) Times Spread(r); nil is 1; must be positive
	// LnK makes the element one that is coupled to a zoned host: the logarithm of
	// its crystal/melt partition coefficient in a host of composition x at a
	// temperature, K. The flux is then -D (dC/dr - C d(ln K)/dr), and an element at
	// rest is proportional to K, not flat. nil is no coupling.
	LnK     func(x, temp float64) float64
	Host    func(r float64) float64 // added to the zones' Host; smooth within each zone; nil is nothing
	Own     func(c float64) float64 // factor on D at the element's own value c, never negative; nil is 1; leaves no value free
	Inner   []Rim                   // nil is sealed (at the centre, symmetry)
	Outer   []Rim                   // nil is sealed
	Moves   []Move                  // of the outer face, in the order of time, after all zones were added; the zones are those after them
	Free    []Basis
	thick   bool                       // with layers of twice the thickness, for their error
	layered int                        // layers over which the face moves; 0 is defaultLayers; set by tests
	source  func(r, t float64) float64 // dC/dt beside diffusion, per s, for manufactured solutions; set by tests only, with Own
}

// size returns the outer radius of the crystal, m.
func (p *Problem) size() float64 { return p.Zones[len(p.Zones)-1].Outer }

// check reports the first thing that makes the problem unusable. Studies are
// checked where they are read, so these errors carry no place in a file.
func (p *Problem) check() error {
	if p.Shape < Slab || p.Shape > Ball {
		return fmt.Errorf("diffusion: shape %d is none of slab, cylinder, ball", int(p.Shape))
	}
	if len(p.Zones) == 0 {
		return fmt.Errorf("diffusion: a crystal needs at least one zone")
	}
	if !(p.R0 >= 0) || math.IsInf(p.R0, 0) {
		return fmt.Errorf("diffusion: inner radius %g m is not a length", p.R0)
	}
	if err := p.Law.check(); err != nil {
		return err
	}
	if err := p.checkZones(); err != nil {
		return err
	}
	if err := p.checkMoves(); err != nil {
		return err
	}
	if err := p.checkRims("inner", p.Inner); err != nil {
		return err
	}
	if err := p.checkRims("outer", p.Outer); err != nil {
		return err
	}
	if err := p.checkHost(); err != nil {
		return err
	}
	if err := p.checkOwn(); err != nil {
		return err
	}
	return p.checkFree()
}

func (p *Problem) checkZones() error {
	inside := p.R0
	for i, z := range p.Zones {
		if !(z.Outer > inside) || math.IsInf(z.Outer, 0) {
			return fmt.Errorf("diffusion: zone %d ends at %g m, not outside %g m", i, z.Outer, inside)
		}
		if !finite(z.Start) || !(z.Edge >= 0) || !(z.Times >= 0) || !finite(z.Edge+z.Times) {
			return fmt.Errorf("diffusion: zone %d has start %g, edge %g m, factor %g", i, z.Start, z.Edge, z.Times)
		}
		if before := p.Zones[max(i-1, 0)].Added; !finite(z.Added) || i == 0 && z.Added > 0 || z.Added < before {
			return fmt.Errorf("diffusion: zone %d is added at %g s, before what it lies on", i, z.Added)
		}
		inside = z.Outer
	}
	return nil
}

func (p *Problem) checkRims(end string, rims []Rim) error {
	for i, r := range rims {
		switch {
		case i == 0 && !(r.From <= 0):
			return fmt.Errorf("diffusion: the first %s rim begins at %g s, after the path", end, r.From)
		case i > 0 && !(r.From > rims[i-1].From):
			return fmt.Errorf("diffusion: %s rim %d begins at %g s, not after the one before", end, i, r.From)
		case r.Kind == Held && !finite(r.Value):
			return fmt.Errorf("diffusion: %s rim %d is held at %g", end, i, r.Value)
		case r.Kind == Prescribed && (r.Given == nil || r.Given.At == nil):
			return fmt.Errorf("diffusion: %s rim %d is prescribed without a function", end, i)
		case r.Kind == Transfer && !(finite(r.Value) && finite(r.Rate.LnA) && finite(r.Rate.E) && (r.Given == nil || r.Given.At != nil)):
			return fmt.Errorf("diffusion: %s rim %d exchanges with %g at exp(%g - %g K/T) m/s", end, i, r.Value, r.Rate.LnA, r.Rate.E)
		case r.Kind == Following && r.Equilibrium == nil:
			return fmt.Errorf("diffusion: %s rim %d follows nothing", end, i)
		case r.Equilibrium != nil && (r.Equilibrium.check() != nil || r.Given != nil):
			return fmt.Errorf("diffusion: %s rim %d follows exp(%g - %g K/T), or a function too", end, i, r.Equilibrium.LnA, r.Equilibrium.E)
		case r.Kind < Sealed || r.Kind > Following:
			return fmt.Errorf("diffusion: %s rim %d is of no known kind", end, i)
		}
	}
	if end == "inner" && p.R0 == 0 && p.Shape != Slab {
		for i, r := range rims {
			if r.Kind != Sealed {
				return fmt.Errorf("diffusion: inner rim %d: the centre of a %s cannot be held", i, p.Shape)
			}
		}
	}
	return nil
}

// checkOwn refuses a factor on D that is not one at a stated start or rim value.
func (p *Problem) checkOwn() error {
	if p.Own == nil {
		return nil
	}
	for _, v := range p.statedValues() {
		if f := p.own(v); !(f >= 0) || math.IsInf(f, 0) {
			return fmt.Errorf("diffusion: D is multiplied by %g where the element is at %g", f, v)
		}
	}
	return nil
}

// statedValues returns the values that the crystal starts with or a rim holds.
func (p *Problem) statedValues() []float64 {
	var stated []float64
	for _, z := range p.Zones {
		stated = append(stated, z.Start)
	}
	for _, r := range slices.Concat(p.Inner, p.Outer) {
		if (r.Kind == Held || r.Kind == Transfer) && r.Given == nil && r.Equilibrium == nil {
			stated = append(stated, r.Value)
		}
	}
	return stated
}

func (p *Problem) checkFree() error {
	if p.Own != nil && len(p.Free) > 0 {
		return fmt.Errorf("diffusion: where D depends on the element itself the solution is not linear in %d free values", len(p.Free))
	}
	for i, b := range p.Free {
		if len(b.Start) != len(p.Zones) ||
			b.Inner != nil && len(b.Inner) != len(p.Inner) ||
			b.Outer != nil && len(b.Outer) != len(p.Outer) {
			return fmt.Errorf("diffusion: free value %d does not match the zones and rims", i)
		}
	}
	return nil
}

func finite(x float64) bool { return !math.IsNaN(x) && !math.IsInf(x, 0) }
