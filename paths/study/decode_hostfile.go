package study

import (
	"fmt"
	"slices"

	"bankfire/paths/traverse"
	"bankfire/thermal"
)

// hostFile reads the host of a crystal from a measured profile, smoothed into one
// step a zone: the median of the points in it, which a point that straddles a
// boundary does not move.
func (d *decoder) hostFile(n *node, c *Crystal) {
	const example = `write host = { file = "an.csv", position = "distance [um]", zero = "rim", value = "XAn [mole fraction]", smooth = "steps" }`
	if !d.is(n, tableNode, example) {
		return
	}
	d.keys(n, hostTable)
	if c.Hosted {
		d.report(n, "the zones have a host already", "give it in one way")
		return
	}
	c.Hosted = true
	before := d.faults
	d.steps(d.need(n, "smooth", `write smooth = "steps": one host a zone, the median of the points in it`))
	position, _ := d.text(d.need(n, "position", example), `name the column of positions, such as "distance [um]"`)
	value := d.valueColumn(n, example)
	zero := d.zero(d.need(n, "zero", `say where positions count from: zero = "rim" or zero = "centre"`))
	file := d.need(n, "file", `name the file, such as file = "an.csv"`)
	if d.faults > before || !c.sized() {
		return
	}
	t, label := d.columns(file, traverse.Column{Header: position, Dim: thermal.Length}, traverse.Column{Header: value, Dim: thermal.Concentration})
	if t == nil {
		return
	}
	scale, ok := hostScale(t.Units[1])
	if !ok {
		d.report(n.get("value"), fmt.Sprintf("in %s, but a host is a mole fraction", t.Units[1]), "want mole fraction, mol% or An")
		return
	}
	points, ok := d.hostPoints(t, label, zero, scale, c)
	if ok {
		d.setHosts(file, points, c)
	}
}

func (d *decoder) steps(n *node) {
	const remedy = `write smooth = "steps": one host a zone, the median of the points in it`
	text, ok := d.text(n, remedy)
	switch {
	case !ok || text == "steps":
	case text == "spline":
		d.report(n, "a spline is not known in this version", remedy)
	default:
		d.reportWord(n, "no way to smooth a host", []string{"steps"}, remedy)
	}
}

// hostScale turns a host in a unit into a mole fraction.
func hostScale(unit string) (scale float64, ok bool) {
	switch unit {
	case moleFraction:
		return 1, true
	case "mol%", "An":
		return 0.01, true
	}
	return 0, false
}

// hostPoints sorts the points of a host into the zones.
func (d *decoder) hostPoints(t *traverse.Table, label string, zero traverse.Zero, scale float64, c *Crystal) (points [][]float64, ok bool) {
	points = make([][]float64, len(c.Zones))
	slack := positionSlack * c.Size()
	for i, r := range t.Columns[0] {
		if zero == traverse.Rim {
			r = c.Size() - r
		}
		x := scale * t.Columns[1][i]
		switch {
		case r < c.R0-slack || r > c.Size()+slack:
			d.row(label, t.Line[i], "position", "outside the crystal", "check the widths of the zones, and where positions count from")
			return nil, false
		case !(x >= 0 && x <= 1):
			d.row(label, t.Line[i], "value", fmt.Sprintf("%.4g is no mole fraction", x), "check the unit")
			return nil, false
		}
		outer, zone := c.R0, 0
		for zone = range c.Zones {
			if outer += c.Zones[zone].Width; r < outer {
				break
			}
		}
		points[zone] = append(points[zone], x)
	}
	return points, true
}

// setHosts gives each zone the median of its points and notes it.
func (d *decoder) setHosts(file *node, points [][]float64, c *Crystal) {
	for i := range c.Zones {
		z, in := &c.Zones[i], points[i]
		if len(in) == 0 {
			d.report(file, fmt.Sprintf("no point of the host lies in zone %s", z.Name), "give the host of each zone by hand: host = 0.55")
			continue
		}
		slices.Sort(in)
		z.Host = (in[(len(in)-1)/2] + in[len(in)/2]) / 2
		d.note("%s: host of zone %s is %.4g, the median of %s from %.4g to %.4g", c.Name, z.Name, z.Host, count(len(in), "point"), in[0], in[len(in)-1])
	}
}
