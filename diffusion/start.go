package diffusion

import (
	"math"
	"slices"

	"gonum.org/v1/gonum/integrate/quad"
)

// edgesPerWidth is the ratio of an edge's width to the standard deviation of
// its error function.
const edgesPerWidth = 4

// reach is the distance from an edge, in standard deviations, beyond which the
// normal distribution function is 0 or 1 to double precision.
const reach = 9

// cellMeans fills dst with the exact volume means, over the grid's cells, of
// the zones' plateaux joined by their edges,
//
//	C(r) = C_0 + sum over boundaries of (C_{i+1} - C_i) Phi((r - r_i)/s_i),
//
// and of what their forms add to them. values holds one plateau a zone that is there,
// and there may be fewer cells than those of the grid.
func (p *Problem) cellMeans(dst []float64, g *grid, values []float64) {
	for j := range dst {
		dst[j] = values[0]
	}
	for i := 1; i < len(values); i++ {
		jump, at, s := values[i]-values[i-1], p.Zones[i-1].Outer, p.Zones[i-1].Edge/edgesPerWidth
		if jump == 0 {
			continue
		}
		for j := range dst {
			a, b := g.faces[j], g.faces[j+1]
			switch {
			case a-at >= reach*s:
				dst[j] += jump
			case b-at > -reach*s:
				dst[j] += jump * edgeMean(p.Shape, a, b, at, s)
			}
		}
	}
	if slices.ContainsFunc(p.Zones, func(z Zone) bool { return z.Form != nil }) {
		addProfile(dst, p.Shape, g, func(r float64) float64 { return p.formed(r, values) })
	}
}

// formed returns what the zones' forms add at r to the plateaux. With Phi_i the part
// that lies outside boundary i, zone i has the part Phi_{i-1} - Phi_i of C(r).
func (p *Problem) formed(r float64, values []float64) float64 {
	sum, outside := 0.0, 1.0
	for i, z := range p.Zones[:len(values)] {
		beyond := 0.0
		if i < len(values)-1 {
			beyond = outsideOf(r-z.Outer, z.Edge/edgesPerWidth)
		}
		if z.Form != nil && outside != beyond && values[i] != 0 {
			sum += values[i] * (outside - beyond) * (z.Form(r) - 1)
		}
		outside = beyond
	}
	return sum
}

// outsideOf returns Phi(x/s), for s = 0 a step.
func outsideOf(x, s float64) float64 {
	switch {
	case x >= reach*s:
		return 1
	case x <= -reach*s:
		return 0
	}
	return math.Erfc(-x/(s*math.Sqrt2)) / 2
}

// edgeMean returns the volume mean over [a, b] of Phi((r - at)/s), from the
// antiderivatives of Phi, z Phi and z^2 Phi; s > 0. (Where s is 0 the boundary
// lies on a face, and no cell straddles it.)
func edgeMean(shape Shape, a, b, at, s float64) float64 {
	za, zb := (a-at)/s, (b-at)/s
	a0, a1, a2 := edgeIntegrals(za)
	b0, b1, b2 := edgeIntegrals(zb)
	m0, m1, m2 := b0-a0, b1-a1, b2-a2
	var whole float64
	switch shape {
	case Slab:
		whole = s * m0
	case Cylinder:
		whole = s * (at*m0 + s*m1)
	default:
		whole = s * (at*at*m0 + 2*at*s*m1 + s*s*m2)
	}
	return whole / volume(shape, a, b)
}

// edgeIntegrals returns the antiderivatives at z of Phi, z Phi and z^2 Phi.
func edgeIntegrals(z float64) (i0, i1, i2 float64) {
	cdf := math.Erfc(-z/math.Sqrt2) / 2
	pdf := math.Exp(-z*z/2) / math.Sqrt(2*math.Pi)
	return z*cdf + pdf, ((z*z-1)*cdf + z*pdf) / 2, (z*z*z*cdf + (z*z+2)*pdf) / 3
}

// profilePoints is the number of Gauss-Legendre points a cell over which a
// given start profile is averaged.
const profilePoints = 8

// addProfile adds the volume means of f over the cells to dst.
func addProfile(dst []float64, shape Shape, g *grid, f func(r float64) float64) {
	for j := range dst {
		a, b := g.faces[j], g.faces[j+1]
		weighted := func(r float64) float64 { return f(r) * math.Pow(r, float64(shape)) }
		dst[j] += quad.Fixed(weighted, a, b, profilePoints, nil, 0) / volume(shape, a, b)
	}
}
