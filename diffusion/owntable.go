package diffusion

import "math"

// ownTable gives D's factor at the element's own value. Over the values that the
// crystal starts with and its rims hold it has polynomials that are right to
// round-off, as panel has: a solve asks for every cell, and asking the function
// itself would take half of its time. Beyond, and where the function is not smooth,
// that is asked.
type ownTable struct {
	own    func(c float64) float64
	lo     float64              // where the first panel begins
	scale  float64              // panels per unit of c
	panels [][shortForm]float64 // by the distance from the middle, in panels; NaN where no good
}

const (
	ownPanels = 512 // a D that changes 30-fold does so by less than shortReach, as ln, in each
	// ownMargin is the part of the range that the panels go beyond it: what lies at
	// its ends is inside.
	ownMargin = 0.01
	// ownError is how much of the factor the polynomials may miss where they are
	// worst: some units of round-off.
	ownError = 2e-15
)

// ownNodes are the Chebyshev nodes of a panel, from its middle.
var ownNodes = [shortForm]float64{
	-0.5 * 0.9510565162951535, -0.5 * 0.5877852522924731, 0, 0.5 * 0.5877852522924731, 0.5 * 0.9510565162951535,
}

// layOwn makes the table of a plan whose answer starts with the cell means c.
func (p *Problem) layOwn(c []float64) *ownTable {
	t := &ownTable{own: p.Own}
	lo, hi := c[0], c[0]
	for _, v := range append(p.statedValues(), c...) {
		lo, hi = leastMost(lo, hi, v)
	}
	margin := ownMargin * (hi - lo)
	lo, hi = max(lo-margin, 0), hi+margin
	if t.scale = ownPanels / (hi - lo); !(hi > lo) || math.IsInf(t.scale, 0) {
		return t
	}
	t.lo = lo
	t.panels = make([][shortForm]float64, ownPanels)
	for i := range t.panels {
		t.lay(i)
	}
	return t
}

// lay fills in panel i.
func (t *ownTable) lay(i int) {
	f := &t.panels[i]
	value := func(d float64) float64 { return t.own(t.lo + (float64(i)+0.5+d)/t.scale) }
	for j, node := range ownNodes {
		v := value(node)
		for m := range j {
			v = (v - f[m]) / (node - ownNodes[m])
		}
		f[j] = v
	}
	for _, d := range []float64{-0.499, -0.4, -0.15, 0.15, 0.4, 0.499} {
		if v := value(d); !(math.Abs(sumOwn(f, d)-v) <= ownError*v) {
			f[0] = math.NaN()
			return
		}
	}
}

func sumOwn(f *[shortForm]float64, d float64) float64 {
	return sumShort(f, d-ownNodes[0], d-ownNodes[1], d-ownNodes[2], d-ownNodes[3])
}

// look fills dst with D's factor where the element is at c; below zero it is that
// at zero.
func (t *ownTable) look(dst, c []float64) {
	panels, lo, scale := t.panels, t.lo, t.scale
	beyond := float64(len(panels))
	dst = dst[:len(c)]
	for i, v := range c {
		if x := (v - lo) * scale; x >= 0 && x < beyond {
			k := int(x)
			if factor := sumOwn(&panels[k], x-float64(k)-0.5); factor == factor {
				dst[i] = factor
				continue
			}
		}
		if v < 0 {
			v = 0
		}
		dst[i] = t.own(v)
	}
}
