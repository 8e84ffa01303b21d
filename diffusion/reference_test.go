package diffusion

import (
	"fmt"
	"math"
	"slices"
	"testing"

	"gonum.org/v1/gonum/mat"

	"bankfire/thermal"
)

// few is a problem in a few cells, put together here from the definition of finite
// volumes alone, so that it shares no code with the solver:
//
//	V dc/dt = flux in - flux out,  flux = D(T) f (u_L - u_R)/R,  u = C/K,
//
// R the integral of dr/(r^n h K) over the two half cells at a face, h what D is
// multiplied by in the middle of each, f the mean of D's factor at the element's own
// value on both sides. Rims lie half a cell from the means beside them; one that
// exchanges holds the value at which what comes from outside is what goes on.
type few struct {
	*Problem
	beyond func(t, temp float64) float64 // what the outer rim leads to; nil is its value
	faces  []float64
	cells  []fewCell
}

// fewCell is a cell: its volume, the compositions of the host at its inner face, in
// its middle and at its outer face, the weights of K there in its mean, and the
// integrals of dr/(r^n h) over its halves.
type fewCell struct {
	volume, inner, outer float64
	host                 [3]float64 // at the inner face, the centroid and the outer face
	inside, weight       []float64  // at even places, with Simpson's weights for the mean
	start                float64
}

func newFew(p *Problem, beyond func(t, temp float64) float64, faces []float64) *few {
	f := &few{Problem: p, beyond: beyond, faces: faces}
	if beyond == nil && len(p.Outer) > 0 {
		f.beyond = func(t, temp float64) float64 { return p.Outer[0].Value }
	}
	for i := 1; i < len(faces); i++ {
		f.cells = append(f.cells, f.cell(faces[i-1], faces[i]))
	}
	return f
}

// cell measures a cell by the moments of r.
func (f *few) cell(a, b float64) fewCell {
	n := float64(f.Shape)
	moment := func(m float64) float64 { return (math.Pow(b, n+1+m) - math.Pow(a, n+1+m)) / (n + 1 + m) }
	c := fewCell{volume: moment(0)}
	r, square := moment(1)/c.volume, moment(2)/c.volume
	zone := f.Zones[0]
	for _, z := range f.Zones[1:] {
		if a >= zone.Outer {
			zone = z
		}
	}
	for i, at := range []float64{a, r, b} {
		c.host[i] = zone.Host
		if f.Host != nil {
			c.host[i] += f.Host(at)
		}
	}
	const parts = 20
	for i := range parts + 1 {
		at, weight := a+(b-a)*float64(i)/parts, float64(2+2*(i%2))
		if i == 0 || i == parts {
			weight = 1
		}
		x := zone.Host
		if f.Host != nil {
			x += f.Host(at)
		}
		c.inside, c.weight = append(c.inside, x), append(c.weight, weight*math.Pow(at, n)*(b-a)/(3*parts)/c.volume)
	}
	half := func(face, middle float64) float64 { // right for a parabola, which a point is not in curved cells
		d := 1.0
		if zone.Times != 0 {
			d = zone.Times
		}
		if f.Spread != nil {
			d *= f.Spread(middle)
		}
		if n == 0 {
			return (b - a) / 2 / d
		}
		return math.Abs(square-face*face) / (2 * math.Pow(face, n+1)) / d
	}
	c.inner, c.outer = half(a, (3*a+b)/4), half(b, (a+3*b)/4)
	c.start = f.startMean(a, b, zone) / c.volume
	return c
}

// startMean integrates r^n C over a cell of a zone before diffusion, by Simpson's
// rule in a thousand parts.
func (f *few) startMean(a, b float64, zone Zone) float64 {
	const parts = 1000
	sum := 0.0
	for i := range parts + 1 {
		r := a + (b-a)*float64(i)/parts
		weight := float64(2 + 2*(i%2))
		if i == 0 || i == parts {
			weight = 1
		}
		c := zone.Start
		if inside := f.Zones[0]; inside.Edge > 0 {
			outside := f.Zones[1]
			c = inside.Start + (outside.Start-inside.Start)*math.Erfc((inside.Outer-r)/(inside.Edge/4)/math.Sqrt2)/2
		}
		if f.Profile != nil {
			c += f.Profile(r)
		}
		sum += weight * c * math.Pow(r, float64(f.Shape))
	}
	return sum * (b - a) / parts / 3
}

// partition returns K at the faces of a cell, its mean, and the integrals of
// dr/(r^n h K) over its halves, along which ln K goes evenly.
func (f *few) partition(c fewCell, temp float64) (atInner, mean, atOuter, inner, outer float64) {
	if f.LnK == nil {
		return 1, 1, 1, c.inner, c.outer
	}
	var lnK [3]float64
	for i, x := range c.host {
		lnK[i] = f.LnK(x, temp)
	}
	for i, x := range c.inside {
		mean += c.weight[i] * math.Exp(f.LnK(x, temp))
	}
	inverse := func(face float64) float64 {
		if face == lnK[1] {
			return math.Exp(-face)
		}
		return (math.Exp(-lnK[1]) - math.Exp(-face)) / (face - lnK[1])
	}
	return math.Exp(lnK[0]), mean, math.Exp(lnK[2]), c.inner * inverse(lnK[0]), c.outer * inverse(lnK[2])
}

// factor is D's at the element's own value.
func (f *few) factor(c float64) float64 {
	if f.Own == nil {
		return 1
	}
	return f.Own(math.Max(c, 0))
}

// rate fills dst with dc/dt, per s.
func (f *few) rate(dst, c []float64, t, temp float64) {
	d := 0.0
	for i, a := range f.Law.Terms {
		if f.Law.Where == nil || temp > f.Law.Where[i].Above && (temp <= f.Law.Where[i].Below || f.Law.Where[i].Below == 0) {
			d += math.Exp(a.LnA - a.E/temp)
		}
	}
	n := len(f.cells)
	k, inner, outer := make([]float64, n), make([]float64, n), make([]float64, n)
	first, last := make([]float64, n), make([]float64, n) // K at both faces
	for i, cell := range f.cells {
		first[i], k[i], last[i], inner[i], outer[i] = f.partition(cell, temp)
	}
	flux := make([]float64, n+1)
	for i := 1; i < n; i++ {
		a, b := c[i-1]/k[i-1], c[i]/k[i]
		left := (f.factor(c[i-1]) + f.factor(c[i])) / 2
		right := left
		if f.cells[i-1].host[2] != f.cells[i].host[0] {
			left = (f.factor(c[i-1]) + f.factor(last[i-1]*(a+b)/2)) / 2
			right = (f.factor(c[i]) + f.factor(first[i]*(a+b)/2)) / 2
		}
		flux[i] = d * (a - b) / (outer[i-1]/left + inner[i]/right)
	}
	if len(f.Inner) > 0 { // held
		v := f.Inner[0].Value
		flux[0] = d * (f.factor(v) + f.factor(c[0])) / 2 * (v/first[0] - c[0]/k[0]) / inner[0]
	}
	if len(f.Outer) > 0 {
		flux[n] = f.leaves(c[n-1], k[n-1], last[n-1], d/outer[n-1], t, temp)
	}
	for i := range dst {
		dst[i] = (flux[i] - flux[i+1]) / f.cells[i].volume
	}
}

// leaves returns what goes through the outer rim from a cell of c, k being K in it
// and kOut at the rim, and through what the half cell lets through.
func (f *few) leaves(c, k, kOut, through, t, temp float64) float64 {
	rim, beyond := f.Outer[0], f.beyond(t, temp)
	out := func(surface float64) float64 {
		return through * (f.factor(c) + f.factor(surface)) / 2 * (c/k - surface/kOut)
	}
	if rim.Kind != Transfer {
		return out(beyond)
	}
	rate := math.Pow(f.faces[len(f.faces)-1], float64(f.Shape)) * math.Exp(rim.Rate.LnA-rim.Rate.E/temp)
	surface, other := c/k*kOut, beyond // what comes in falls short of what could, then the other way round
	for range 200 {
		middle := (surface + other) / 2
		if middle == surface || middle == other {
			break
		}
		if (rate*(beyond-middle)+out(middle) > 0) == (beyond > c/k*kOut) {
			surface = middle
		} else {
			other = middle
		}
	}
	return out(surface)
}

// start returns the cell means before diffusion.
func (f *few) start() []float64 {
	c := make([]float64, len(f.cells))
	for i := range c {
		c[i] = f.cells[i].start
	}
	return c
}

// byExponential returns the means after a time at a temperature, where the rates are
// linear in them and constant: by the exponential of their matrix.
func (f *few) byExponential(time, temp float64) []float64 {
	n := len(f.cells)
	m := mat.NewDense(n+1, n+1, nil) // of the means and a 1, for the rims
	still, unit, rate := make([]float64, n), make([]float64, n), make([]float64, n)
	f.rate(still, unit, 0, temp)
	for j := range n {
		unit[j] = 1
		f.rate(rate, unit, 0, temp)
		unit[j] = 0
		for i := range n {
			m.Set(i, j, time*(rate[i]-still[i]))
		}
		m.Set(j, n, time*still[j])
	}
	m.Exp(m)
	var out mat.VecDense
	out.MulVec(m, mat.NewVecDense(n+1, append(f.start(), 1)))
	return out.RawVector().Data[:n]
}

// byExtrapolation returns the means after a history: by linearly implicit Euler steps
// in 1, 2, ... parts of a longer one, extrapolated to infinitely many (Deuflhard 1985,
// SIAM Review 27, 505-535; Hairer and Wanner 1996, Solving ordinary differential
// equations II, section IV.9). Breaks are where what is beyond a rim jumps, s.
func (f *few) byExtrapolation(h *thermal.History, breaks []float64) []float64 {
	c, begin := f.start(), 0.0
	for _, leg := range h.Legs() {
		marks := []float64{0, leg.For}
		if leg.Kind == thermal.Table {
			marks = slices.Clone(leg.Rows.Time)
		}
		for _, at := range breaks {
			if at > begin && at < begin+leg.For {
				marks = append(marks, at-begin)
			}
		}
		marks = f.addSwitches(marks, leg)
		for i := 1; i < len(marks); i++ {
			f.piece(c, leg, begin, marks[i-1], marks[i])
		}
		begin += leg.For
	}
	return c
}

// addSwitches adds to the marks of a leg, between which temperature rises or falls,
// the times at which a term of the law begins or ceases to act, by halving. It
// returns them in order.
func (f *few) addSwitches(marks []float64, leg thermal.Leg) []float64 {
	slices.Sort(marks)
	marks = slices.Compact(marks)
	for i, pieces := 1, len(marks); i < pieces; i++ {
		for _, w := range f.Law.Where {
			a, b := marks[i-1], marks[i]
			hot := func(t float64) bool { return legTemperature(leg, marks[i-1], marks[i], t) > w.Above }
			if w.Above == 0 || hot(a) == hot(b) {
				continue
			}
			for range 60 {
				if middle := (a + b) / 2; hot(middle) == hot(a) {
					a = middle
				} else {
					b = middle
				}
			}
			marks = append(marks, b)
		}
	}
	slices.Sort(marks)
	return marks
}

// piece takes c through a part of a leg, from a to b within it, in which everything
// is smooth.
func (f *few) piece(c []float64, leg thermal.Leg, begin, a, b float64) {
	const tolerance, order = 1e-11, 8
	rate := func(dst, c []float64, t float64) {
		t = min(max(t, a+(b-a)*1e-12), b-(b-a)*1e-12) // what jumps at the ends is not asked there
		f.rate(dst, c, begin+t, legTemperature(leg, a, b, t))
	}
	length := (b - a) / 10
	for t := a; t < b; {
		length = min(length, b-t)
		next, miss := extrapolated(rate, c, t, length, order)
		if miss <= tolerance {
			copy(c, next)
			if t += length; b-t < (b-a)*1e-12 {
				break
			}
		}
		length *= min(max(0.8*math.Pow(tolerance/(miss+1e-30), 1.0/order), 0.2), 3)
	}
}

// extrapolated returns the state after one long step and by how much the last two
// extrapolations differ.
func extrapolated(rate func(dst, c []float64, t float64), c []float64, t, length float64, order int) (next []float64, miss float64) {
	n := len(c)
	slopes := jacobian(rate, c, t)
	var before, row [][]float64
	for parts := 1; parts <= order; parts++ {
		dt := length / float64(parts)
		m := mat.NewDense(n, n, nil)
		m.Scale(-dt, slopes)
		for i := range n {
			m.Set(i, i, m.At(i, i)+1)
		}
		var lu mat.LU
		lu.Factorize(m)
		state, r := slices.Clone(c), make([]float64, n)
		for i := range parts {
			rate(r, state, t+float64(i+1)*dt)
			var change mat.VecDense
			if err := lu.SolveVecTo(&change, false, mat.NewVecDense(n, r)); err != nil {
				panic(err)
			}
			for j := range state {
				state[j] += dt * change.AtVec(j)
			}
		}
		row = [][]float64{state}
		for k, rough := range before { // Aitken and Neville
			better := make([]float64, n)
			ratio := float64(parts)/float64(parts-k-1) - 1
			for j := range better {
				better[j] = row[k][j] + (row[k][j]-rough[j])/ratio
			}
			row = append(row, better)
		}
		before = row
	}
	_, miss = farthest(row[order-1], row[order-2])
	return row[order-1], miss
}

// jacobian returns the derivatives of the rates, by differences.
func jacobian(rate func(dst, c []float64, t float64), c []float64, t float64) *mat.Dense {
	const beside = 1e-7
	n := len(c)
	m := mat.NewDense(n, n, nil)
	here, there, moved := make([]float64, n), make([]float64, n), slices.Clone(c)
	rate(here, c, t)
	for j := range n {
		moved[j] += beside
		rate(there, moved, t)
		moved[j] = c[j]
		for i := range n {
			m.Set(i, j, (there[i]-here[i])/beside)
		}
	}
	return m
}

// legTemperature is the temperature at t within a leg, between a and b, K.
func legTemperature(leg thermal.Leg, a, b, t float64) float64 {
	switch leg.Kind {
	case thermal.Hold:
		return leg.T0
	case thermal.Ramp:
		return leg.T0 + (leg.T1-leg.T0)*t/leg.For
	case thermal.Relax:
		return leg.T1 + (leg.T0-leg.T1)*math.Exp(-t/leg.Tau)
	case thermal.Table:
		rows := leg.Rows
		i := 1
		for rows.Time[i] < b { // b lies in the row's stretch, and so does a
			i++
		}
		return rows.Temp[i-1] + (rows.Temp[i]-rows.Temp[i-1])*(t-rows.Time[i-1])/(rows.Time[i]-rows.Time[i-1])
	default:
		s, spread := leg.Sheet, 2*math.Sqrt(leg.Sheet.Kappa*t)
		near, far := s.Thickness/2-s.Position, s.Thickness/2+s.Position
		return s.Host + (s.Magma-s.Host)/2*(math.Erf(near/spread)+math.Erf(far/spread))
	}
}

// TestMatrixExponential compares the solver, on a dozen uneven cells and along a
// hold, with the exponential of the reference's matrix.
func TestMatrixExponential(t *testing.T) {
	const allowed = 1e-6 // of the range, with the steps below
	hosts := map[string]func(p *Problem){
		"uncoupled": func(*Problem) {},
		"jump": func(p *Problem) {
			p.LnK = func(x, temp float64) float64 { return 2500*x/temp + 3 }
			p.Zones[0].Host, p.Zones[1].Host = 0.2, 0.9
		},
		"slope": func(p *Problem) {
			p.LnK = func(x, temp float64) float64 { return -2000 * x / temp }
			p.Host = func(r float64) float64 { return 0.3 * r * r / (testSize * testSize) }
			p.Zones[0].Host = 0.5
		},
	}
	rims := map[string]func(p *Problem){
		"sealed": func(*Problem) {},
		"held":   func(p *Problem) { p.Outer = heldAt(0.7) },
		"both held": func(p *Problem) {
			p.Inner, p.Outer = heldAt(1.3), heldAt(0.4)
			p.R0 = 0.2 * testSize
		},
	}
	for shape := Slab; shape <= Ball; shape++ {
		for host, layHost := range hosts {
			for rim, layRims := range rims {
				t.Run(fmt.Sprintf("%v/%s/%s", shape, host, rim), func(t *testing.T) {
					p := &Problem{Shape: shape, Zones: []Zone{{Outer: 0.6 * testSize, Start: 1, Times: 0.4}, {Outer: testSize, Start: 0.2}}}
					layHost(p)
					layRims(p)
					h := atHold(t, p, 0.04)
					faces := fewFaces(p)
					plan := newPlan(t, p, Options{Faces: faces, Growth: 0.005})
					want := newFew(p, nil, faces).byExponential(h.Life(), coupledHold)
					got := run(t, plan, h).Cols[0]
					wantClose(t, "profile", got, want, allowed*rangeOf(want))
				})
			}
		}
	}
}

// fewFaces returns the faces of six uneven cells in each of two zones.
func fewFaces(p *Problem) []float64 {
	middle := p.Zones[0].Outer
	var faces []float64
	for _, x := range []float64{0, 0.2, 0.36, 0.5, 0.68, 0.86} {
		faces = append(faces, p.R0+(middle-p.R0)*x)
	}
	for _, x := range []float64{0, 0.12, 0.26, 0.44, 0.6, 0.82} {
		faces = append(faces, middle+(testSize-middle)*x)
	}
	return append(faces, testSize)
}

// TestReference compares the solver with the reference for every pair of shape, rim,
// law, start and path, in the same dozen cells and in steps too fine to matter.
func TestReference(t *testing.T) {
	const cells, steps, allowed = 12, 1280, 1e-6 // of the range
	worst := 0.0
	for _, c := range pairCases() {
		t.Run(c.String(), func(t *testing.T) {
			q := c.problem(t)
			var jumps []float64
			if len(q.Outer) > 0 && q.Outer[0].Given != nil {
				jumps = q.Outer[0].Given.Jumps
			}
			want := newFew(q.Problem, q.beyond, pairFaces(q.Problem, cells)).byExtrapolation(q.h, jumps)
			_, miss := farthest(q.solve(t, cells, steps).c, want)
			miss /= rangeOf(want)
			t.Logf("%.2g of the range", miss)
			if !(miss <= allowed) {
				t.Errorf("differs by %.3g of the range, allowed %g", miss, allowed)
			}
			worst = max(worst, miss)
		})
	}
	t.Logf("at most %.2g of the range", worst)
}
