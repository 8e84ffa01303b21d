package study

import (
	"cmp"
	"fmt"
	"math"

	"bankfire/diffusion/catalogue"
	"bankfire/thermal"
)

// slope reads a slope of ln D, perhaps with its error.
func (d *decoder) slope(n *node, example string) (slope thermal.Uncertain, ok bool) {
	switch {
	case n == nil:
		return slope, false
	case n.kind == textNode:
		var err error
		if slope, err = thermal.ParseFactor(n.text); err != nil {
			d.reportError(n, err)
			return slope, false
		}
	case d.is(n, numberNode, example):
		slope.Value = n.number
	default:
		return slope, false
	}
	if !(math.Abs(slope.Value)+MostDeviation*slope.Sigma <= maxSlope) {
		d.report(n, fmt.Sprintf("not from -%d to %d%s", maxSlope, maxSlope, withDeviation(slope.Sigma)), example)
		return slope, false
	}
	return slope, true
}

// slopeOf takes the slope of a law, and with it what it may be off by, from another one:
// a law of the catalogue or a [[law]] above.
func (d *decoder) slopeOf(n, of *node, law *Law) {
	const example = `write the key of a law that depends on the host, such as slope_of = "plagioclase-sr-giletti1994", or the name of a [[law]] above`
	if v := n.get("ln_slope"); v != nil {
		d.report(v, "a slope, beside one taken from another law", "leave one of both out")
		return
	}
	key, ok := d.text(of, example)
	if !ok {
		return
	}
	from, own := d.laws[key]
	if !own {
		row, err := catalogue.Find(key)
		if err != nil {
			d.unknownLaw(of, key, err)
			return
		}
		from = hostTerm(row)
	}
	if from.HostSlope == 0 && from.HostSlopeSigma == 0 {
		d.report(of, "this law does not depend on a host", example)
		return
	}
	law.HostSlope, law.HostSlopeSigma, law.SlopeOf = from.HostSlope, from.HostSlopeSigma, from.slopeKey()
}

// slopeKey is the law that the slope on the host is of.
func (l *Law) slopeKey() string { return cmp.Or(l.SlopeOf, l.Key) }

// slopeSigma is the standard deviation that a study states for the slope of a law that it
// has by name.
type slopeSigma struct {
	sigma float64
	line  int
}

// likeSlope reads the error of the slope by which a law with a name depends on a
// composition: of the host, or of the element itself.
func (d *decoder) likeSlope(n *node, law *Law) {
	const example = `write the standard deviation of the slope of ln D, such as slope_sigma = 0.9`
	sigma, ok := d.number(n, example)
	switch known, stated := d.slopeSigmas[law.slopeKey()]; {
	case !ok:
	case !law.onAHost() && !law.onItself():
		d.report(n, "this law depends on no composition", "leave it out")
	case math.Abs(law.HostSlope)+MostDeviation*sigma > maxSlope:
		d.report(n, fmt.Sprintf("with it the slope is not from -%d to %d%s", maxSlope, maxSlope, withDeviation(sigma)), example)
	case law.HostSlopeSigma > 0 || law.OwnSlopeSigma > 0:
		d.report(n, "the slope of this law has an error already", "leave one of both out")
	case stated && known.sigma != sigma:
		d.report(n, fmt.Sprintf("another error of the slope of %s than %g in line %d, which it shares", law.slopeKey(), known.sigma, known.line), "state one")
	case law.onItself():
		law.OwnSlopeSigma = sigma
		if row := law.Row; row != nil { // stated for XFe, of which the element has another unit
			law.OwnSlopeSigma *= math.Abs(law.OwnSlope / (math.Ln10 * row.Composition.Slope))
		}
	default:
		law.HostSlopeSigma = sigma
		d.slopeSigmas[law.slopeKey()] = slopeSigma{sigma, n.line}
	}
}

// heldAt reads the host in which D is held when the slope, of which n states the error,
// is off.
func (d *decoder) heldAt(at, n *node, law *Law) {
	x := d.host(at)
	switch {
	case n == nil:
		d.report(at, "the host in which D is held when its slope is off, of which no error is stated", "write slope_sigma too, or leave it out")
	case law.onAHost():
		law.HeldAbove = x - law.HostAt
	default:
		d.report(at, "this law depends on no host", "leave it out")
	}
}

// shareSlopes gives every law the error that the study states elsewhere for its slope.
func (d *decoder) shareSlopes(crystals []Crystal) {
	for i := range crystals {
		for j := range crystals[i].Elements {
			law := &crystals[i].Elements[j].Law
			if law.HostSlopeSigma > 0 || law.HostSlope == 0 {
				continue
			}
			for _, part := range law.all() {
				if known, stated := d.slopeSigmas[part.slopeKey()]; stated && part.slopeKey() != "" {
					law.HostSlopeSigma, law.SlopeOf = known.sigma, part.slopeKey()
				}
			}
		}
	}
}
