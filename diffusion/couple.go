package diffusion

import (
	"fmt"
	"math"
	"sync/atomic"

	"gonum.org/v1/gonum/integrate/quad"
)

// A trace element in a zoned host follows u = C/K, K its crystal/melt partition
// coefficient in the host at hand:
//
//	dC/dt = r^-n d/dr (r^n D K du/dr).
//
// Between two cells the flux is (u_L - u_R)/R with R the integral of
// dr/(r^n D K) over the two half cells (exponential fitting: Scharfetter and
// Gummel 1969, IEEE Trans. Electron Devices 16, 64-77). So an element in
// equilibrium stays so to round-off across any jump of the host and in any that is
// smooth, and with V K in the place of V the matrix is the one of sweep.go. C is the conserved variable,
// and K is evaluated anew in every solve, at the step's mean of 1/T. Only ratios
// of K count: all are in units of the K of one cell.

// operator is what a solve needs of the grid.
type operator struct {
	vol     []float64 // V, or V K
	cond    []float64 // conductance of each face at unit D
	k       []float64 // mean K of each cell; nil without coupling
	inverse []float64 // 1/K
	kIn     float64   // K at the inner and the outer end
	kOut    float64
	out     float64   // conductance of the half cell at the outer end, at unit D; that of cond where it is the last
	place   int       // among the operators of paths side by side, from 0
	all     []float64 // of a coupled problem: k, cond, kIn and kOut; then vol and inverse
}

// Operators of paths side by side begin each at its own place in a page of memory. Where
// they happened to lie alike, in every second process, steps took a quarter longer.
const (
	pageNumbers = 512 // float64s in a page of memory
	placeApart  = 56  // float64s from one place to the next, seven cache lines
	places      = 4
)

// resize makes room for n cells of a coupled problem and returns the part that
// depends on temperature alone.
func (op *operator) resize(n int) []float64 {
	if cap(op.all) < 4*n+3 {
		pages := (4*n + 3 + places*placeApart + pageNumbers - 1) / pageNumbers
		op.all = make([]float64, pages*pageNumbers)[op.place*placeApart:]
	}
	op.all = op.all[:4*n+3]
	op.k, op.cond = op.all[:n:n], op.all[n:2*n+1:2*n+1]
	op.vol, op.inverse = op.all[2*n+3:3*n+3:3*n+3], op.all[3*n+3:]
	return op.all[: 2*n+3 : 2*n+3]
}

// hostGrid is the host as the cells see it.
type hostGrid struct {
	half    []float64 // of each cell, the integral of dr/(r^n D) over the half at its inner face and the half at its outer
	x       []float64 // composition in the middle of each cell
	atFaces []float64 // of each cell, at its inner and its outer face, inside it
	inside  []float64 // of each cell, at profilePoints places; nil in steps, where a cell has one composition
	weights []float64 // of K there in its mean

	panels []atomic.Pointer[panel] // by 1/T, made when first asked for
	width  float64                 // of each, 1/K
	wide   []atomic.Pointer[panel] // over so many panels each, which are made from them; nil if over one
	over   int
}

func (p *Problem) layHost(g *grid) *hostGrid {
	n := len(g.centres)
	h := &hostGrid{
		half: make([]float64, 2*n), x: make([]float64, n),
		atFaces: make([]float64, 2*n),
	}
	inner := 0.0 // what the host adds at the inner face of the cell in hand
	if p.Host != nil {
		inner = p.Host(g.faces[0])
		h.addInside(p, g)
	}
	for i := range n {
		a, b := g.faces[i], g.faces[i+1]
		h.half[2*i], h.half[2*i+1] = math.Inf(1), p.halfCell(b, a)
		if a > 0 || p.Shape == Slab {
			h.half[2*i] = p.halfCell(a, b)
		}
		zone := p.Zones[p.zone(g.centres[i])].Host
		h.x[i], h.atFaces[2*i], h.atFaces[2*i+1] = zone, zone, zone
		if p.Host != nil {
			h.x[i] += p.Host(g.centres[i])
			h.atFaces[2*i] += inner
			inner = p.Host(b)
			h.atFaces[2*i+1] += inner
		}
	}
	h.layPanels(p.LnK)
	return h
}

// addInside adds the compositions inside each cell, at the places over which the means
// of a start are taken too: so one that is proportional to K is at rest to round-off.
// The middle for the mean would be of second order, a parabola of fourth, but an element
// at rest would be off by it for ever.
func (h *hostGrid) addInside(p *Problem, g *grid) {
	var at, weight [profilePoints]float64
	quad.Legendre{}.FixedLocations(at[:], weight[:], 0, 1)
	h.inside, h.weights = make([]float64, 0, len(g.centres)*profilePoints), make([]float64, 0, len(g.centres)*profilePoints)
	for i, centre := range g.centres {
		a, b := g.faces[i], g.faces[i+1]
		zone, perVolume := p.Zones[p.zone(centre)].Host, (b-a)/volume(p.Shape, a, b)
		for q, x := range at {
			r := a + (b-a)*x
			h.inside = append(h.inside, zone+p.Host(r))
			h.weights = append(h.weights, weight[q]*p.Shape.area(r)*perVolume)
		}
	}
}

// couple fills the field's operator for a stage and a temperature, K.
func (f *Field) couple(p *Plan, stage int, temp float64) *operator {
	op, h := &f.op, p.host
	values := op.resize(len(h.x))
	switch at := h.panelAt(p.problem.LnK, 1/temp); {
	case at == nil:
		h.evaluate(values, p.problem.LnK, temp)
		op.finish(p.grid.volumes)
	case at.short != nil:
		at.readShort(op, p.grid.volumes, 1/temp)
	default:
		at.read(values, 1/temp)
		op.finish(p.grid.volumes)
	}
	op.kIn, op.kOut, op.out = values[len(values)-2], values[len(values)-1], op.cond[len(h.x)]
	if n := p.stages[stage].cells(); n < len(h.x) {
		op.vol, op.k, op.inverse, op.cond = op.vol[:n], op.k[:n], op.inverse[:n], op.cond[:n+1]
		op.kOut, op.out = h.end(p.problem.LnK, temp, n)
	}
	return op
}

// finish fills in what follows from K.
func (op *operator) finish(volumes []float64) {
	k, vol, inverse := op.k[:len(volumes)], op.vol[:len(volumes)], op.inverse[:len(volumes)]
	for i, v := range volumes {
		vol[i], inverse[i] = float64(v*k[i]), 1/k[i]
	}
}

// evaluate fills in K of the cells, the conductances and K at both ends.
func (h *hostGrid) evaluate(dst []float64, lnK func(x, temp float64) float64, temp float64) {
	n := len(h.x)
	k, cond, ends := dst[:n], dst[n:2*n+1], dst[2*n+1:]
	unit := lnK(h.x[n/2], temp)
	inside, outer := math.Inf(1), math.NaN() // resistance of the half cell inside the face in hand, and ln K there
	for i, x := range h.x {
		inner, middle := outer, lnK(x, temp)
		here := middle - unit
		if i == 0 || h.atFaces[2*i] != h.atFaces[2*i-1] {
			inner = lnK(h.atFaces[2*i], temp) - unit
		}
		outer = lnK(h.atFaces[2*i+1], temp) - unit
		k[i] = math.Exp(here)
		inverse := 1 / k[i]
		if h.inside != nil {
			k[i] *= h.meanK(i, lnK, temp, middle)
		}
		r := h.half[2*i] * meanInverse(inverse, here, inner)
		if i == 0 {
			ends[0], cond[0] = math.Exp(inner), 1/r
		} else {
			cond[i] = 1 / (inside + r)
		}
		inside = h.half[2*i+1] * meanInverse(inverse, here, outer)
	}
	ends[1], cond[n] = math.Exp(outer), 1/inside
}

// meanK returns the mean of K over cell i in units of the K whose logarithm is unit.
func (h *hostGrid) meanK(i int, lnK func(x, temp float64) float64, temp, unit float64) float64 {
	sum := 0.0
	inside, weights := h.inside[i*profilePoints:][:profilePoints], h.weights[i*profilePoints:][:profilePoints]
	for q, x := range inside {
		sum += float64(weights[q] * expNear(lnK(x, temp)-unit))
	}
	return sum
}

// expNear is exp(x), as its series near 0.
func expNear(x float64) float64 {
	if math.Abs(x) < evenK {
		return 1 + x*(1+x/2*(1+x/3*(1+x/4)))
	}
	return math.Exp(x)
}

// end returns, as evaluate does of all cells, K at the outer end of the first n and
// the conductance of the half cell there.
func (h *hostGrid) end(lnK func(x, temp float64) float64, temp float64, n int) (k, cond float64) {
	unit := lnK(h.x[len(h.x)/2], temp)
	here, outer := lnK(h.x[n-1], temp)-unit, lnK(h.atFaces[2*n-1], temp)-unit
	return math.Exp(outer), 1 / (h.half[2*n-1] * meanInverse(math.Exp(-here), here, outer))
}

// meanInverse returns the mean of 1/K over a stretch along which ln K goes evenly
// from a, where 1/K is inverse, to b,
//
//	exp(-(a+b)/2) sinh(h)/h,  h = (b-a)/2,
//
// which is inverse (1 - exp(-2h))/(2h).
func meanInverse(inverse, a, b float64) float64 {
	h := (b - a) / 2
	if math.Abs(h) < evenK {
		return inverse * (1 - h*(1-h*2/3*(1-h/2*(1-h*2/5))))
	}
	return math.Exp(-(a+b)/2) * math.Sinh(h) / h
}

// evenK is the change of ln K below which the series of exp(h), and of what is made of it, have round-off with so few terms.
const evenK = 1e-3

// panel holds what evaluate gives over a range of 1/T, as polynomials that are
// right to round-off: evaluating K anew for every cell in every solve would take
// ten times as long as the solve. They are in Newton's form, by divided differences
// (Abramowitz and Stegun 1964, 25.1.4 and 25.2.26).
type panel struct {
	nodes [panelNodes]float64  // 1/T, 1/K, at which it was evaluated
	short [][shortForm]float64 // of each value, if so few terms are enough,
	long  [][panelNodes]float64
}

const (
	panelNodes = 8
	shortForm  = 5
	// panelReach is by how much ln K may change along a panel. Interpolation in 8
	// Chebyshev nodes is then wrong by 2 (reach/4)^8/8! of K, 1e-17 at 0.1, and at
	// twice the change still by less than round-off. Up to shortReach 5 terms do.
	panelReach = 0.1
	shortReach = 0.008
	// panelError is how much the polynomials may miss at the ends and in the middle,
	// where they are worst. An ln K of 12 is rounded by 2e-15 itself.
	panelError   = 2e-14
	coldestPanel = 300.0 // K: no panels below
	// leastPanels keeps each narrow beside the 1/T it is at, for an ln K that is
	// not linear in 1/T, and mostPanels their number.
	leastPanels, mostPanels = 100, 1000
	mostOver                = 12 // panels in a wide one
)

// panelOrder is the order of the nodes in the Newton forms: each far from those
// before it, so that a form without its last terms is nearly as good as any.
var panelOrder = [panelNodes]float64{0, 7, 4, 2, 6, 1, 5, 3}

// layPanels divides 1/T into panels along which no cell's ln K changes, beside
// that of the one whose K is the unit, by more than panelReach. How fast it
// changes is seen at hostTrial; newPanel sees whether that was right.
func (h *hostGrid) layPanels(lnK func(x, temp float64) float64) {
	const warmer = hostTrial * 1.05
	unit := h.x[len(h.x)/2]
	moves := 0.0
	for _, x := range append(h.atFaces[:len(h.atFaces):len(h.atFaces)], h.x...) {
		cool, warm := lnK(x, hostTrial)-lnK(unit, hostTrial), lnK(x, warmer)-lnK(unit, warmer)
		moves = math.Max(moves, math.Abs(warm-cool))
	}
	moves /= (1.0/hostTrial - 1/warmer) * coldestPanel
	if moves/panelReach <= mostPanels { // not if NaN
		n := min(max(int(math.Ceil(moves/shortReach)), leastPanels), mostPanels)
		h.panels = make([]atomic.Pointer[panel], n)
		h.width = 1 / coldestPanel / float64(n)
		if h.over = int(math.Min(panelReach*float64(n)/moves, mostOver)); h.over > 1 {
			h.wide = make([]atomic.Pointer[panel], (n+h.over-1)/h.over)
		}
	}
}

// panelAt returns the panel for a value of 1/T, nil where there is none: ln K
// need not be smooth in T.
func (h *hostGrid) panelAt(lnK func(x, temp float64) float64, coldness float64) *panel {
	i := int(coldness / h.width)
	if !(i >= 0 && i < len(h.panels)) {
		return nil
	}
	at := h.panels[i].Load()
	if at == nil {
		at = h.newPanel(lnK, i)
		h.panels[i].Store(at) // another goroutine may do the same, to the bit
	}
	if !at.fits() {
		return nil
	}
	return at
}

// fits reports whether the panel has polynomials.
func (at *panel) fits() bool { return at.short != nil || at.long != nil }

// newPanel returns panel i, one without polynomials if they are no good: made from the
// wide one that it lies in, where that is good and few terms do.
func (h *hostGrid) newPanel(lnK func(x, temp float64) float64, i int) *panel {
	from := float64(i) * h.width
	exactly := func(dst []float64, coldness float64) { h.evaluate(dst, lnK, 1/coldness) }
	if h.wide != nil {
		if wide := h.wideAt(exactly, i/h.over); wide.fits() {
			if at := h.fitFew(wide, from); at.fits() {
				return at
			}
		}
	}
	return h.fit(exactly, from, h.width)
}

// fitFew returns the panel that begins at a value of 1/T, made from the wide one around
// it; one without polynomials if few terms will not do.
func (h *hostGrid) fitFew(wide *panel, from float64) *panel {
	n := 2*len(h.x) + 3
	values, tried := make([]float64, n), make([]float64, n)
	at := &panel{short: make([][shortForm]float64, n)}
	at.place(from, h.width)
	for j := range shortForm {
		wide.read(values, at.nodes[j])
		at.add(j, values)
	}
	middle := from + h.width/2 // few terms are worst there, and what the wide one is right for has no surprises elsewhere
	wide.read(values, middle)
	if at.read(tried, middle); !same(tried, values) {
		return &panel{}
	}
	return at
}

// wideAt returns a wide panel.
func (h *hostGrid) wideAt(exactly func([]float64, float64), i int) *panel {
	at := h.wide[i].Load()
	if at == nil {
		width := h.width * float64(h.over)
		at = h.fit(exactly, float64(i)*width, width)
		h.wide[i].Store(at)
	}
	return at
}

// fit returns a panel that begins at a value of 1/T, of a width, for what values gives,
// one without polynomials if they are no good.
func (h *hostGrid) fit(values func(dst []float64, coldness float64), from, width float64) *panel {
	v := make([]float64, 2*len(h.x)+3)
	at := &panel{long: make([][panelNodes]float64, len(v))}
	at.place(from, width)
	for j := range panelNodes {
		values(v, at.nodes[j])
		at.add(j, v)
		if j+1 == shortForm {
			if at.shorten(); at.good(values, from, width) {
				at.long = nil
				return at
			}
			at.short = nil
		}
	}
	if at.good(values, from, width) {
		return at
	}
	return &panel{}
}

// place lays the nodes of a panel that begins at a value of 1/T, of a width.
func (at *panel) place(from, width float64) {
	for j, place := range panelOrder {
		at.nodes[j] = from + width/2*(1-math.Cos(math.Pi*(place+0.5)/panelNodes))
	}
}

// good tries the panel that begins at a value of 1/T, of a width.
func (at *panel) good(values func(dst []float64, coldness float64), from, width float64) bool {
	v, tried := make([]float64, len(at.long)), make([]float64, len(at.long))
	for _, part := range []float64{0.001, 0.5, 1} { // not 0, where the first begins
		coldness := from + part*width
		values(v, coldness)
		if at.read(tried, coldness); !same(tried, v) {
			return false
		}
	}
	return true
}

// same says whether a is b within panelError.
func same(a, b []float64) bool {
	for i := range a {
		if !(math.Abs(a[i]-b[i]) <= panelError*b[i]) {
			return false
		}
	}
	return true
}

// add takes in the values at node j.
func (at *panel) add(j int, values []float64) {
	var per [panelNodes]float64 // over the distances of the nodes
	for m := range j {
		per[m] = 1 / (at.nodes[j] - at.nodes[m])
	}
	for i, v := range values {
		form := at.form(i)
		for m, was := range form[:j] { // v becomes the divided difference of nodes 0 to m and j
			v = float64((v - was) * per[m])
		}
		form[j] = v
	}
}

// form is the terms of value i.
func (at *panel) form(i int) []float64 {
	if at.long == nil {
		return at.short[i][:]
	}
	return at.long[i][:]
}

// shorten leaves the last terms out.
func (at *panel) shorten() {
	at.short = make([][shortForm]float64, len(at.long))
	for i := range at.short {
		at.short[i] = [shortForm]float64(at.long[i][:])
	}
}

// read does what evaluate does.
func (at *panel) read(dst []float64, coldness float64) {
	var d [panelNodes]float64 // from the nodes
	for j, node := range at.nodes {
		d[j] = coldness - node
	}
	for i := range at.short {
		dst[i] = sumShort(&at.short[i], d[0], d[1], d[2], d[3])
	}
	for i := range at.long {
		f := &at.long[i]
		v := f[4] + float64((f[5]+float64((f[6]+float64(f[7]*d[6]))*d[5]))*d[4])
		dst[i] = f[0] + float64((f[1]+float64((f[2]+float64((f[3]+float64(v*d[3]))*d[2]))*d[1]))*d[0])
	}
}

// sumShort returns the value of a polynomial of few terms so far from its nodes.
func sumShort(f *[shortForm]float64, d0, d1, d2, d3 float64) float64 {
	return f[0] + float64((f[1]+float64((f[2]+float64((f[3]+float64(f[4]*d3))*d2))*d1))*d0)
}

// readShort does what read does, and finish beside it, while the polynomials leave
// the divider idle.
func (at *panel) readShort(op *operator, volumes []float64, coldness float64) {
	d0, d1 := coldness-at.nodes[0], coldness-at.nodes[1]
	d2, d3 := coldness-at.nodes[2], coldness-at.nodes[3]
	n := len(volumes)
	k, cond, vol, inverse := op.k[:n], op.cond[:n], op.vol[:n], op.inverse[:n]
	forK, forCond := at.short[:n], at.short[n:2*n]
	for i, v := range volumes {
		x := sumShort(&forK[i], d0, d1, d2, d3)
		k[i], vol[i], inverse[i] = x, float64(v*x), 1/x
		cond[i] = sumShort(&forCond[i], d0, d1, d2, d3)
	}
	for i := 2 * n; i < len(at.short); i++ {
		op.all[i] = sumShort(&at.short[i], d0, d1, d2, d3)
	}
}

// potential returns C/K.
func (f *Field) potential(op *operator, c []float64) []float64 {
	f.u = resized(f.u, len(c))
	inverse, u := op.inverse[:len(c)], f.u[:len(c)]
	for i, v := range c {
		u[i] = float64(v * inverse[i])
	}
	return f.u
}

// checkHost refuses a host for which ln K is not a number.
func (p *Problem) checkHost() error {
	if p.LnK == nil {
		return nil
	}
	for i, z := range p.Zones {
		if k := p.LnK(z.Host, hostTrial); !finite(k) {
			return fmt.Errorf("diffusion: ln K is %g in the host of zone %d, composition %g", k, i, z.Host)
		}
	}
	return nil
}

// hostTrial is a temperature, K, at which every relation must have a value.
const hostTrial = 1000
