package study

import (
	"fmt"
	"math"
	"slices"

	"bankfire/diffusion/catalogue"
	"bankfire/paths/traverse"
)

// hostFile reads the host of a crystal from a measured profile, smoothed into one
// step a zone, the median of the points in it, which a point that straddles a
// boundary does not move; or by a spline.
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
	smooth := d.smoothing(n)
	o := traverse.Options{Size: c.Size(), Unstated: n.get("error") == nil}
	o.Position, _ = d.text(d.need(n, "position", example), `name the column of positions, such as "distance [um]"`)
	o.Value = d.valueColumn(n, example)
	o.Zero = d.zero(d.need(n, "zero", `say where positions count from: zero = "rim" or zero = "centre"`))
	o.Errors = d.errors(n.get("error"), hostErrorTable)
	file := d.need(n, "file", `name the file, such as file = "an.csv"`)
	if d.faults > before || !c.sized() {
		return
	}
	t, ok := d.hostPoints(n, file, o, c)
	switch {
	case !ok:
	case smooth > 0:
		d.spline(n, t, smooth, c)
	default:
		d.steps(file, t, c)
	}
}

// smoothing reads how measured points are smoothed: the width of a spline, m; 0 is
// steps.
func (d *decoder) smoothing(n *node) (spline float64) {
	const remedy = `write smooth = "steps": one value a zone, the median of the points in it; or smooth = "spline" and a width`
	smooth := d.need(n, "smooth", remedy)
	text, ok := d.text(smooth, remedy)
	switch {
	case !ok:
	case text == "spline":
		const example = `write what the spline averages over, such as width = "8 um"`
		w := d.need(n, "width", example)
		spline, _ = d.quantity(w, width)
	case text != "steps":
		d.reportWord(smooth, "no way to smooth it", []string{"steps", "spline"}, remedy)
	case n.get("width") != nil:
		d.report(n.get("width"), "steps have no width", `leave it out, or write smooth = "spline"`)
	}
	return spline
}

// hostComponent says what a host in a unit, from a column with a header, is as a
// mole fraction: Fo is turned into the XFe that laws ask for.
func hostComponent(header, unit string) (of component, ok bool) {
	switch unit {
	case moleFraction:
		of.scale = 1
	case "mol%", "An", "Fo":
		of.scale = 0.01
	default:
		return of, false
	}
	if named(header, unit) == "Fo" {
		of.scale, of.offset = -of.scale, 1
	}
	return of, true
}

// hostPoints reads the points of a host, from the inside outwards and in mole
// fractions.
func (d *decoder) hostPoints(n, file *node, o traverse.Options, c *Crystal) (t *traverse.Traverse, ok bool) {
	label, r, ok := d.dataFile(file)
	if !ok {
		return nil, false
	}
	t, err := traverse.Read(label, r, o)
	if err != nil {
		d.unread(n, err)
		return nil, false
	}
	d.notes = append(d.notes, d.named(file, label, t.Notes)...)
	of, ok := hostComponent(o.Value, t.Unit)
	if !ok {
		d.report(n.get("value"), fmt.Sprintf("in %s, but a host is a mole fraction", t.Unit), "want mole fraction, mol%, An or Fo")
		return nil, false
	}
	if component := named(o.Value, t.Unit); component == "An" {
		d.hostIs, d.hostLine = catalogue.XAn, n.get("value").line
	}
	if of.offset != 0 {
		d.hostIs, d.hostLine = catalogue.XFe, n.get("value").line
		d.note("%s: Fo of the host is read as XFe, 1 less Fo as a mole fraction", c.Name)
	}
	for i, r := range t.Position {
		t.Value[i] = of.value(t.Value[i])
		if t.Sigma != nil {
			t.Sigma[i] = of.sigma(t.Sigma[i])
		}
		switch x := t.Value[i]; {
		case r < c.R0-positionSlack*c.Size():
			d.row(label, t.Line[i], "position", "outside the crystal", "check the widths of the zones, and where positions count from")
			return nil, false
		case !(x >= 0 && x <= 1):
			d.row(label, t.Line[i], "value", fmt.Sprintf("%.4g is no mole fraction", x), "check the unit")
			return nil, false
		}
	}
	if last := len(t.Position) - 1; t.Position[0] > t.Position[last] {
		slices.Reverse(t.Position)
		slices.Reverse(t.Value)
		slices.Reverse(t.Sigma)
	}
	return t, true
}

// steps gives each zone the median of its points and notes it.
func (d *decoder) steps(file *node, t *traverse.Traverse, c *Crystal) {
	ends := c.pointsUpTo(t.Position)
	for i := range c.Zones {
		z := &c.Zones[i]
		from, next := ends[i], ends[i+1]
		in := slices.Sorted(slices.Values(t.Value[from:next]))
		if len(in) == 0 {
			d.report(file, fmt.Sprintf("no point of the host lies in zone %s", z.Name), "give the host of each zone by hand: host = 0.55")
			continue
		}
		z.Host = median(in)
		text := fmt.Sprintf("%s: host of zone %s is %.4g, the median of %s from %.4g to %.4g", c.Name, z.Name, z.Host, count(len(in), "point"), in[0], in[len(in)-1])
		if t.Sigma != nil {
			z.HostSigma = medianSigma(t.Sigma[from:next])
			text += fmt.Sprintf(", with an error of %.2g", z.HostSigma)
		}
		d.note("%s", text)
	}
}

// pointsUpTo returns how many of ascending positions, m from the centre, lie in each
// zone and further in: those of zone i are from entry i to before entry i+1.
func (c *Crystal) pointsUpTo(position []float64) []int {
	ends := make([]int, len(c.Zones)+1)
	outer, last := c.R0, len(c.Zones)-1
	for i, z := range c.Zones {
		outer += z.Width
		ends[i+1], _ = slices.BinarySearch(position, outer)
	}
	ends[last+1] = len(position)
	return ends
}

// median returns that of values which ascend.
func median(ascending []float64) float64 {
	n := len(ascending)
	return (ascending[(n-1)/2] + ascending[n/2]) / 2
}

// medianSigma returns the standard deviation of the median of values with the given
// ones: that of their mean, times sqrt(pi/2) from three on, which is the limit for
// many values with normal errors and 8 % too much for three.
func medianSigma(sigma []float64) float64 {
	sum := 0.0
	for _, s := range sigma {
		sum += s * s
	}
	ofMean := math.Sqrt(sum) / float64(len(sigma))
	if len(sigma) < 3 {
		return ofMean
	}
	return math.Sqrt(math.Pi/2) * ofMean
}

const (
	fewestInSpline = 4
	mostInSpline   = 2000
	// perWidth is how many points a spline of a width should average over: fewer, and
	// it follows their noise.
	perWidth = 3
)

// splines reports points of which no spline can be made, or none of the width.
func (d *decoder) splines(position []float64, points, wide *node, width float64) bool {
	count := len(position)
	if count < fewestInSpline || count > mostInSpline {
		d.report(points, fmt.Sprintf("%d points, and a spline is made of %d to %d", count, fewestInSpline, mostInSpline), `write smooth = "steps", or choose other points`)
		return false
	}
	if long := position[count-1] - position[0]; width > long {
		d.report(wide, fmt.Sprintf("wider than the traverse, which is %.4g um long", long*1e6), "choose a width between the spacing of the points and the zones")
		return false
	}
	return true
}

// spline gives the crystal the smoothed profile, and notes what it cannot know.
func (d *decoder) spline(n *node, t *traverse.Traverse, width float64, c *Crystal) {
	count, first, last := len(t.Position), t.Position[0], t.Position[len(t.Position)-1]
	if !d.splines(t.Position, n.get("file"), n.get("width"), width) {
		return
	}
	c.Host = NewHost(t.Position, t.Value, t.Sigma, width)
	least, most := c.Host.spline.Range(c.R0, c.Size())
	d.note("%s: host from %.4g to %.4g, a spline through %d points that averages over %.4g um, also across the boundaries of zones", c.Name, least, most, count, width*1e6)
	if spacing := (last - first) / float64(count-1); width < perWidth*spacing*(1-positionSlack) {
		d.note("%s: the width of its host, %.4g um, holds few points %.3g um apart, so that their noise may show as drift", c.Name, width*1e6, spacing*1e6)
	}
	d.noteGaps(c.Name+": its host", t.Position, width, c)
}

// noteGaps notes how much of the crystal lies beyond the points of a spline.
func (d *decoder) noteGaps(what string, position []float64, width float64, c *Crystal) {
	for _, gap := range []struct {
		where string
		size  float64
	}{{"innermost", position[0] - c.R0}, {"outermost", c.Size() - position[len(position)-1]}} {
		if gap.size > width/2 {
			d.note("%s is not measured over the %s %.4g um, where it is taken to stay as it is at the last point", what, gap.where, gap.size*1e6)
		}
	}
}
