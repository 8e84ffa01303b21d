package study

import (
	"fmt"
	"math"
	"strings"

	"bankfire/thermal"
)

// latitude is the range that a nuisance must keep to.
type latitude struct {
	dim         thermal.Dimension
	least, most float64
	below       string // what is wrong with less
	above       string // and with more
	examples    string
}

// steepest is the largest tilt: at it, distances are twelve times as long as they look.
const steepest = 85 * math.Pi / 180

func edgeLatitude() latitude {
	return latitude{thermal.Length, 0, 1, "below zero", "more than 1 m", `"0.5 um", "0.8 +- 0.2 um" or "free 0..2 um"`}
}

func tiltLatitude() latitude {
	return latitude{thermal.Angle, 0, steepest, "below zero", "more than 85 deg", `"20 deg", "20 +- 5 deg" or "0..30 deg"`}
}

func originLatitude() latitude {
	return latitude{thermal.Length, -1, 1, "less than -1 m", "more than 1 m", `"0.5 um", "0 +- 0.5 um" or "free -2..2 um"`}
}

// nuisance reads a value, a value with a standard deviation, or a range, before
// which "free" may stand.
func (d *decoder) nuisance(n *node, l latitude) Nuisance {
	if n == nil {
		return Nuisance{}
	}
	if n.kind == numberNode {
		d.report(n, "a number without a unit", "write "+l.examples)
		return Nuisance{}
	}
	text, ok := d.text(n, "write "+l.examples)
	if !ok {
		return Nuisance{}
	}
	if d.isOpen(n) {
		x, _ := d.filledQuantity(n, n.text, edgeWidth)
		return Nuisance{Value: x}
	}
	var v Nuisance
	var err error
	text, free := strings.CutPrefix(strings.TrimSpace(text), "free")
	switch {
	case free && !strings.Contains(text, ".."):
		d.report(n, "free, but not between which ends", "write "+l.examples)
		return Nuisance{}
	case strings.Contains(text, ".."):
		v.Lo, v.Hi, err = thermal.ParseRange(strings.TrimSpace(text), l.dim)
	default:
		var u thermal.Uncertain
		u, err = thermal.ParseUncertain(text, l.dim)
		v.Value, v.Sigma = u.Value, u.Sigma
	}
	if err != nil {
		d.reportError(n, err)
		return Nuisance{}
	}
	d.inLatitude(n, v, l)
	return v
}

func (d *decoder) inLatitude(n *node, v Nuisance, l latitude) {
	const roundOff = 1e-12 // of 85 deg in rad
	switch {
	case min(v.Value, v.Lo) < l.least:
		d.report(n, l.below, "write "+l.examples)
	case max(v.Value, v.Hi) > l.most*(1+roundOff):
		d.report(n, l.above, "check the unit")
	case v.Sigma > l.most-l.least:
		d.report(n, fmt.Sprintf("its error is %s", l.above), "check the unit")
	}
}
