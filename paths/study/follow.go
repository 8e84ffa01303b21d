package study

import (
	"fmt"
	"math"

	"bankfire/diffusion/catalogue"
	"bankfire/paths/traverse"
	"bankfire/thermal"
)

// Following is a rim in equilibrium with what is outside at every temperature: K of
// a Partition in the Host at the rim times what the melt has; or what a
// Solubility gives; or, without either, what the Table says.
type Following struct {
	Partition  *Partition // nil is none
	Host       float64
	Solubility *Solubility    // nil is none
	Melt       float64        // with a Partition: what the melt has, in the element's unit, unless Table
	Table      *ByTemperature // what the melt has; without a relation, what the rim has; nil is none
}

// At is the value of the rim at a temperature, K, in a leg of a setting, in the
// element's unit.
func (f *Following) At(setting int, temp float64) float64 {
	if f.Solubility != nil {
		return f.Solubility.At(setting, temp)
	}
	x := f.Melt
	if f.Table != nil {
		x = f.Table.At(temp)
	}
	if f.Partition != nil {
		x *= math.Exp(f.Partition.LnK(f.Host, temp))
	}
	return x
}

// possible reports a rim that would have more than all there is somewhere between
// two temperatures: relations and the pieces of tables are largest at their ends.
func (f *Following) possible(setting int, lo, hi float64, unit string, at thermal.Place) error {
	temps := []float64{lo, hi}
	if f.Table != nil {
		for _, temp := range f.Table.Temp {
			if lo < temp && temp < hi {
				temps = append(temps, temp)
			}
		}
	}
	for _, temp := range temps {
		if !(lo <= hi) { // it holds at no time
			return nil
		}
		if x := f.At(setting, temp); !(x <= traverse.Whole(unit)) {
			return at.Error("", fmt.Sprintf("is in equilibrium with what is outside at %.3g %s at %.0f C, more than all there is", x, unit, temp-thermal.ZeroCelsius),
				"check the relation and the melt")
		}
	}
	return nil
}

// Solubility is a solubility relation of the catalogue under the conditions of each
// leg.
type Solubility struct {
	Row      *catalogue.Solubility
	Contents map[int]catalogue.Content // by the setting of legs
	PerPPM   float64                   // of the element's unit
}

// At is what the crystal takes up at a temperature, K, in a leg of a setting, in the
// element's unit.
func (s *Solubility) At(setting int, temp float64) float64 {
	return s.PerPPM * s.Contents[setting].PPM(temp)
}

// beyond says by how much temperatures, K, leave those for which the relation was
// calibrated, "" if they do not.
func (s *Solubility) beyond(lo, hi float64) string {
	const slack = 0.5 // K: reports print whole degrees
	if !s.Row.RangeKnown() || !(lo <= hi) {
		return ""
	}
	degrees := func(temp float64) float64 { return temp - thermal.ZeroCelsius }
	var how string
	if below := s.Row.TMin - lo; below > slack {
		how = fmt.Sprintf("at %.0f C, %.0f C below", degrees(lo), below)
	}
	if above := hi - s.Row.TMax; above > slack {
		if how != "" {
			how += ", and "
		}
		how += fmt.Sprintf("at %.0f C, %.0f C above", degrees(hi), above)
	}
	if how == "" {
		return ""
	}
	return fmt.Sprintf("solubility %s: used %s its calibrated range of %.0f to %.0f C", s.Row.Key, how, degrees(s.Row.TMin), degrees(s.Row.TMax))
}

// ByTemperature is a value against temperature, linear between its rows.
type ByTemperature struct {
	Temp  []float64 // K, rising
	Value []float64 // in the element's unit
	Place thermal.Place
}

// At is the value at a temperature, K; beyond the rows that of the nearest one.
func (b *ByTemperature) At(temp float64) float64 { return interpolate(b.Temp, b.Value, temp) }

// covers reports temperatures, K, for which there are no rows.
func (b *ByTemperature) covers(lo, hi float64) error {
	const slack = 1e-6 // K, the rounding of temperatures
	first, last := b.Temp[0], b.Temp[len(b.Temp)-1]
	if !(lo < first-slack || hi > last+slack) {
		return nil
	}
	needs, rows := thermal.TemperatureText(lo), "add rows down to it"
	switch {
	case lo != hi:
		needs, rows = needs+" to "+thermal.TemperatureText(hi), "add rows at both ends"
	case hi > last:
		rows = "add rows up to it"
	}
	return b.Place.Error("", fmt.Sprintf("holds temperatures from %s to %s only, but the path needs %s",
		thermal.TemperatureText(first), thermal.TemperatureText(last), needs), rows)
}

// Solubilities are the solubility relations of the element's start and of its rims,
// once each; nil if there are none.
func (e *Element) Solubilities() []*Solubility {
	var out []*Solubility
	for k := range e.Starts() {
		if s := e.Starting(k).Start.Solubility; s != nil {
			out = withSolubility(out, s)
		}
	}
	for _, rims := range [][]Rim{e.Inner, e.Rims} {
		for i := range rims {
			if f := rims[i].Following; f != nil && f.Solubility != nil {
				out = withSolubility(out, f.Solubility)
			}
		}
	}
	return out
}

func withSolubility(list []*Solubility, s *Solubility) []*Solubility {
	for _, known := range list {
		if known.Row.Key == s.Row.Key {
			return list
		}
	}
	return append(list, s)
}

// Beyond says by how much the relations that an element's rims follow along a path
// leave the temperatures for which they were calibrated.
func (c *Crystal) Beyond(e *Element, h *thermal.History) []string {
	var out []string
	for _, rims := range [][]Rim{e.Inner, e.Rims} {
		for i := range rims {
			f := rims[i].Following
			if f == nil || f.Solubility == nil {
				continue
			}
			from, until, err := c.inForce(rims, i, h)
			if err != nil {
				continue // barred for it
			}
			if s := f.Solubility.beyond(h.RangeIn(from, until)); s != "" {
				out = append(out, s)
			}
		}
	}
	return out
}

// inForce is the time, s, from and until which rim i of a list is in force on a path,
// from the start of that, and the crystal sees it: at no time if until is not later.
func (c *Crystal) inForce(rims []Rim, i int, h *thermal.History) (from, until float64, err error) {
	begins, err := c.Begins(h)
	if err != nil {
		return 0, 0, err
	}
	if from, err = rims[i].from(h); err != nil {
		return 0, 0, err
	}
	from = max(from, begins)
	until = h.Life()
	if i+1 < len(rims) {
		next, err := rims[i+1].from(h)
		if err != nil {
			return 0, 0, err
		}
		until = min(until, next)
	}
	return from, until, nil
}
