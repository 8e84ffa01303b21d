package diffusion

import (
	"fmt"
	"math"
)

// A trace element in a zoned host follows u = C/K, K its crystal/melt partition
// coefficient in the host at hand:
//
//	dC/dt = r^-n d/dr (r^n D K du/dr).
//
// Between two cells the flux is (u_L - u_R)/R with R the integral of
// dr/(r^n D K) over the two half cells (exponential fitting: Scharfetter and
// Gummel 1969, IEEE Trans. Electron Devices 16, 64-77). So an element in
// equilibrium stays so to round-off across any jump of the host, and with V K in
// the place of V the matrix is the one of sweep.go. C is the conserved variable,
// and K is evaluated anew in every solve, at the step's mean of 1/T.

// operator is what a solve needs of the grid.
type operator struct {
	vol  []float64 // V, or V K
	cond []float64 // conductance of each face at unit D
	k    []float64 // K of each cell; nil without coupling
	kIn  float64   // K at the inner and the outer end
	kOut float64
}

// hostGrid is the host as the cells see it.
type hostGrid struct {
	half    []float64 // of each cell, the integral of dr/(r^n D) over the half at its inner face and the half at its outer
	x       []float64 // composition in the middle of each cell
	atFaces []float64 // of each cell, at its inner and its outer face, inside it
}

func (p *Problem) layHost(g *grid) *hostGrid {
	n := len(g.centres)
	h := &hostGrid{half: make([]float64, 2*n), x: make([]float64, n), atFaces: make([]float64, 2*n)}
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
			h.atFaces[2*i] += p.Host(a)
			h.atFaces[2*i+1] += p.Host(b)
		}
	}
	return h
}

// couple fills the field's operator for a temperature, K.
func (f *Field) couple(p *Plan, temp float64) *operator {
	op, h, n := &f.op, p.host, len(p.host.x)
	op.vol, op.k, op.cond = resized(op.vol, n), resized(op.k, n), resized(op.cond, n+1)
	lnK := p.problem.LnK
	inside := math.Inf(1) // resistance of the half cell inside the face in hand
	for i, x := range h.x {
		here := lnK(x, temp)
		op.k[i] = math.Exp(here)
		op.vol[i] = float64(p.grid.volumes[i] * op.k[i])
		inner, outer := lnK(h.atFaces[2*i], temp), lnK(h.atFaces[2*i+1], temp)
		r := h.half[2*i] * meanInverse(here, inner)
		if i == 0 {
			op.kIn, op.cond[0] = math.Exp(inner), 1/r
		} else {
			op.cond[i] = 1 / (inside + r)
		}
		inside = h.half[2*i+1] * meanInverse(here, outer)
		op.kOut = math.Exp(outer)
	}
	op.cond[n] = 1 / inside
	return op
}

// meanInverse returns the mean of 1/K over a stretch along which ln K goes
// evenly from a to b,
//
//	exp(-(a+b)/2) sinh(h)/h,  h = (b-a)/2.
func meanInverse(a, b float64) float64 {
	h := (b - a) / 2
	mean := math.Exp(-(a + b) / 2)
	if math.Abs(h) < evenK {
		return mean * (1 + h*h/6)
	}
	return mean * math.Sinh(h) / h
}

// evenK is the change of ln K below which sinh(h)/h is its series to round-off.
const evenK = 1e-3

// potential returns C/K.
func (f *Field) potential(op *operator, c []float64) []float64 {
	f.u = resized(f.u, len(c))
	for i, v := range c {
		f.u[i] = v / op.k[i]
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
