package study

import "bankfire/paths/traverse"

// Scaled says that an element starts with the shape that the traverse of another one of
// its crystal shows, which hardly diffused,
//
//	start = Lowest (1 - t) + Highest t,
//
// t being the other's smoothed values, from 0 where they are lowest to 1 where they
// are highest.
type Scaled struct {
	Of              string  // the other element
	Lowest, Highest Plateau // values where the other is lowest and highest
	Width           float64 // of the spline that smooths it, m; 0 is one step a zone
	Position        []float64
	Value           []float64 // what was measured of the other: its unit, and m from the crystal's centre, ascending
	steps           []float64 // t of each zone
	spline          *traverse.Spline
	least, most     float64 // of the spline
}

// ends are the two values that a scaled start is made of.
func (s *Scaled) ends() []Plateau { return []Plateau{s.Lowest, s.Highest} }

// endName names one of the two.
func (s *Scaled) endName(k int) string {
	return [...]string{"at lowest ", "at highest "}[k] + s.Of
}

// plateau is the start of zone i between the values at both ends; 0 where it is a
// spline.
func (s *Scaled) plateau(i int, lowest, highest float64) float64 {
	if s.Width > 0 {
		return 0
	}
	return lowest*(1-s.steps[i]) + highest*s.steps[i]
}

// between is the start by a spline, at r, m from the crystal's centre, between the
// values at both ends.
func (s *Scaled) between(lowest, highest float64) func(r float64) float64 {
	return func(r float64) float64 {
		t := (s.spline.At(r) - s.least) / (s.most - s.least)
		return lowest*(1-t) + highest*t
	}
}

// scaledAt is what a rim at r that is held at a zone has of a scaled start: the value
// there, or where it does not lie at that zone the one at the end of the zone that is
// nearest.
func (c *Crystal) scaledAt(s *Scaled, zone int, r, lowest, highest float64) float64 {
	if s.Width == 0 {
		return s.plateau(zone, lowest, highest)
	}
	inner := c.R0
	for _, z := range c.Zones[:zone] {
		inner += z.Width
	}
	return s.between(lowest, highest)(min(max(r, inner), inner+c.Zones[zone].Width))
}

// plateaux are the values that the start is made of.
func (s *Start) plateaux() []Plateau {
	if s.Scaled != nil {
		return s.Scaled.ends()
	}
	return s.Zones
}
