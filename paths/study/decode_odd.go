package study

import (
	"fmt"
	"math"
	"regexp"
	"slices"
	"strings"

	"bankfire/diffusion/catalogue"
)

// What no magma has, or no law of diffusion: it is used as written, and noted.
const (
	saturated    = 1     // activity in a melt that is saturated
	oxygenOfAir  = 2.1e4 // Pa
	leastEnergy  = 2e4   // J/mol; the least of the catalogue, of argon in quartz, is 43 kJ/mol
	mostLogSigma = 1.5   // standard deviation of log10 D, a factor of 30
)

// oddLaw notes constants of a law of the study that no mineral has.
func (d *decoder) oddLaw(n *node, e float64, law *Law) {
	if v := n.get("E"); v != nil && e > 0 && e < leastEnergy {
		d.noteOnce("E = %q on line %d is less than that of any law of the catalogue: is the unit right?", v.text, v.line)
	}
	if v := n.get("sigma"); v != nil && law.Sigma > mostLogSigma {
		d.noteOnce("sigma = %s on line %d is of log10 D, a factor of %.2g: is it meant in per cent, or of ln D?", v.text, v.line, math.Pow(10, law.Sigma))
	}
}

// symbols are the chemical symbols in the species of a law, but not in its remarks:
// "K (43K tracer)" is of K, "CaAl-NaSi interdiffusion" of Ca, Al, Na and Si.
func symbols(species string) []string {
	species, _, _ = strings.Cut(species, " ")
	return symbol.FindAllString(species, -1)
}

var symbol = regexp.MustCompile(`[A-Z][a-z]?`)

// otherElement notes a law of the catalogue that is for another element.
func (d *decoder) otherElement(e *Element) {
	for _, law := range e.Law.all() {
		if law.Row != nil && !e.among(symbols(law.Row.Species)) {
			d.noteOnce("%s: law %s is for %s: is it the right one?", e.Name, law.Key, law.Row.Species)
		}
	}
}

// oneOfSeveral notes a law of one ingredient of a flux that several share.
func (d *decoder) oneOfSeveral(e *Element) {
	for _, law := range e.Law.all() {
		if law.Row != nil && law.Row.Tag == catalogue.Multicomponent {
			d.noteOnce("%s: law %s is of one ingredient of a flux that several share; where the others vary too, write the D of their exchange instead, with D0 and E of your own",
				e.Name, law.Key)
		}
	}
}

// among reports whether the element is one of those with the symbols, or a component
// of theirs: Fo where Mg is, An where Ca is.
func (e *Element) among(symbols []string) bool {
	u := &units{element: e.Name}
	return slices.ContainsFunc(symbols, func(s string) bool {
		of := map[string]string{"Fe": "Fo", "Mg": "Fo", "Ca": "An", "Na": "An"}[s]
		_, component := u.of(of, moleFraction)
		return component || startsWithSymbol(e.Name, s)
	})
}

// alongAxes are the axes along which a law of the catalogue holds, nil where that is
// not known or it is none of them.
func alongAxes(row *catalogue.Row) []string {
	for _, of := range []struct {
		stated string
		axes   []string
	}{
		{"[100] and [010]", []string{"a", "b"}},
		{"[100]", []string{"a"}}, {"parallel to a", []string{"a"}},
		{"[010]", []string{"b"}}, {"parallel to b", []string{"b"}},
		{"[001]", []string{"c"}}, {"parallel to c", []string{"c"}},
	} {
		if strings.HasPrefix(row.Direction, of.stated) {
			return of.axes
		}
	}
	return nil
}

// otherAxis notes laws that stand for an axis and were measured along another.
func (d *decoder) otherAxis(axis string, law *Law, e *Element) {
	for _, part := range law.all() {
		if part.Row == nil {
			continue
		}
		if along := alongAxes(part.Row); along != nil && !slices.Contains(along, axis) {
			d.noteOnce("%s: law %s is for diffusion along %s, but stands for axis %s: is it the right one?", e.Name, part.Key, strings.Join(along, " or "), axis)
		}
	}
}

// upsideDown notes two regimes of which the hotter is calibrated at lower temperatures
// than the colder.
func (d *decoder) upsideDown(at switching, laws [2]Law, e *Element) {
	above, below := &laws[0], &laws[1]
	if above.TMax > 0 && below.TMin > 0 && above.TMax <= below.TMin {
		d.noteOnce("%s: above %s its law is %s, which was calibrated at lower temperatures than %s: are they the wrong way round?", e.Name, at.text, above.Key, below.Key)
	}
}

// takenAlong notes the direction of a traverse where the law is for one alone and D is
// known to be another along others. A law by direction says it itself.
func (d *decoder) takenAlong(law *node, e *Element) {
	if law == nil || slices.ContainsFunc(directionKeys[:], func(key string) bool { return law.get(key) != nil }) {
		return
	}
	for _, part := range e.Law.all() {
		if part.Row == nil || !directed(part.Row) {
			continue
		}
		if along := alongAxes(part.Row); along != nil {
			d.noteOnce("%s: diffusion is taken to run along %s, as in its law %s; if it does not, write a law by direction, with the angles of the normal",
				e.Name, strings.Join(along, " or "), part.Key)
			return
		}
	}
}

// directed reports whether the source of a law gives D along other directions too, as
// rows of their own or as so many times slower.
func directed(row *catalogue.Row) bool {
	return strings.Contains(row.Direction, "times slower") || slices.ContainsFunc(catalogue.All(), func(other catalogue.Row) bool {
		return other.Mineral == row.Mineral && other.Species == row.Species && other.Citation == row.Citation && other.Direction != row.Direction
	})
}

// rimRelations notes a rim that follows another relation than the one which couples
// the element to the host inside, or one where nothing does.
func (d *decoder) rimRelations(e *Element) {
	for _, r := range slices.Concat(e.Inner, e.Rims) {
		switch {
		case r.Following == nil || r.Following.Partition == nil:
		case e.Partition == nil:
			d.noteOnce("%s: its rim follows partition %s, but inside nothing couples it to the host; if it should, write partition = %q beside rim",
				e.Name, r.Following.Partition.Key, r.Following.Partition.Key)
		case e.Partition.Key != r.Following.Partition.Key:
			d.noteOnce("%s: its rim follows partition %s, but inside it is coupled to the host by %s: should both be one?",
				e.Name, r.Following.Partition.Key, e.Partition.Key)
		}
	}
}

// otherHost reports a host that is known as XAn or XFe, where the element takes the
// other of the two from it.
func (d *decoder) otherHost(n *node, c *Crystal, e *Element) {
	asked := func(key, v string) {
		if at := n.get(key); at != nil && d.hostIs != "" && v != d.hostIs && (v == catalogue.XAn || v == catalogue.XFe) {
			d.report(at, fmt.Sprintf("takes the host as %s, but the file of the host gives %s (line %d)", v, d.hostIs, d.hostLine),
				"name the right column under value in host, or another law or relation")
		}
	}
	for _, law := range e.Law.all() {
		if law.Row != nil && law.HostSlope != 0 {
			asked("law", law.Row.Composition.Variable)
		}
	}
	if p := e.Partition; p != nil && p.Row != nil {
		asked("partition", p.Row.Host)
	}
}

// twiceMeasured notes a traverse that is read from the same rows and column of the
// same file as an earlier one.
func (d *decoder) twiceMeasured(n *node, c *Crystal, e *Element) {
	var rows []string
	for _, key := range []string{"file", "position", "zero", "value", "window", "skip"} {
		text := ""
		if v := n.get(key); v != nil {
			text = v.text
		}
		rows = append(rows, text)
	}
	key, who := strings.Join(rows, "\x00"), e.Name+" in "+c.Name
	if first, twice := d.measured[key]; twice {
		d.note("%s is compared with the same points as %s, which so count twice: is its file the right one?", who, first)
		return
	}
	d.measured[key] = who
}
