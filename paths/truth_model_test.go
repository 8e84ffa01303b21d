package paths

import (
	"math"
	"math/rand/v2"

	"bankfire/diffusion"
	"bankfire/paths/study"
	"bankfire/paths/traverse"
	"bankfire/thermal"
)

// slab is the truth behind a simulated traverse, in closed form: zones with
// edges of error functions and a rim, in a slab so large that nothing reaches
// its far side. No solver of ours has a part in it.
type slab struct {
	values []float64 // of the zones, from the core outwards, ppm
	bounds []float64 // between them, m from the centre
	edge   float64   // width of the edges, m
	reach  float64   // sqrt(2 G), m
	rim    float64   // by how much the rim is held above the outermost zone, ppm; only points may look at it
}

// radius of the simulated crystals, m.
const radius = 2 * boundary

// seen is what the spot shows at r: a sum of
//
//	dc/2 (1 + erf((r - b)/sqrt(2 V))),  V = 2 G + edge^2/16 + spot^2,
//
// the diffusion couple of Crank (1975), The Mathematics of Diffusion, eq. 2.14,
// whose convolution with a Gaussian adds to the variance; and of
//
//	rim erfc((radius - r)/(2 sqrt(G))),
//
// eq. 3.13. A top-hat of width w shows the mean over it; the integral of erf is
// x erf(x) + exp(-x^2)/sqrt(pi).
func (s *slab) seen(r float64, spot traverse.Spot) float64 {
	v := square(s.reach) + square(s.edge)/16
	if spot.Kind == traverse.Gaussian {
		v += square(spot.Width)
	}
	length := math.Sqrt(2 * v)
	sum := s.values[0] + s.rim*math.Erfc((radius-r)/(math.Sqrt2*s.reach))
	for k, b := range s.bounds {
		step := math.Erf((r - b) / length)
		if spot.Kind == traverse.TopHat {
			half := spot.Width / 2 / length
			step = (integralOfErf((r-b)/length+half) - integralOfErf((r-b)/length-half)) / (2 * half)
		}
		sum += (s.values[k+1] - s.values[k]) / 2 * (1 + step)
	}
	return sum
}

func integralOfErf(x float64) float64 {
	return x*math.Erf(x) + math.Exp(-x*x)/math.Sqrt(math.Pi)
}

// probe says where and how a simulated traverse was measured.
type probe struct {
	from, to float64 // true positions of its ends, m from the centre
	points   int
	spot     traverse.Spot
	sigma    float64 // of the values, ppm
	tilt     float64 // of the line, rad
	origin   float64 // true positions less typed ones, along the line, m
	shared   bool    // errors of overlapping spots are correlated
}

func gaussian(sigma float64) traverse.Spot {
	return traverse.Spot{Kind: traverse.Gaussian, Width: sigma}
}

// measure is one traverse of the truth with noise.
func (p probe) measure(rng *rand.Rand, truth func(r float64, spot traverse.Spot) float64) *traverse.Traverse {
	t := &traverse.Traverse{Name: "invented.csv", Unit: "ppm", Size: radius, Spot: p.spot, Independent: !p.shared}
	shrink := math.Cos(p.tilt)
	seenBy := p.spot
	seenBy.Width *= shrink
	noise := p.noise(rng)
	for i := range p.points {
		r := p.from + (p.to-p.from)*float64(i)/float64(p.points-1)
		t.Position = append(t.Position, r/shrink-p.origin)
		t.Value = append(t.Value, truth(r, seenBy)+p.sigma*noise[i])
		t.Sigma = append(t.Sigma, p.sigma)
		t.Line = append(t.Line, i+2)
	}
	return t
}

// The grain of a sample that is uneven on a scale finer than the spot, as parts
// of the spot's width, and how far beyond it grains are drawn.
const (
	grain    = 0.1
	grainFar = 4
	counting = 0.1 // part of the variance that is counting error
)

// noise returns errors of standard deviation 1: independent ones or, where spots
// overlap, what an uneven sample does. Its grains are random and seen through the
// spot, and a counting error is added.
func (p probe) noise(rng *rand.Rand) []float64 {
	out := make([]float64, p.points)
	if !p.shared {
		for i := range out {
			out[i] = rng.NormFloat64()
		}
		return out
	}
	size := grain * p.spot.Width
	first := p.from - grainFar*p.spot.Width
	grains := make([]float64, int((p.to+grainFar*p.spot.Width-first)/size)+1)
	for k := range grains {
		grains[k] = rng.NormFloat64()
	}
	for i := range out {
		x := p.from + (p.to-p.from)*float64(i)/float64(p.points-1)
		sum, sumSq := 0.0, 0.0
		for k, g := range grains {
			w := p.weight(first + (float64(k)+0.5)*size - x)
			sum, sumSq = sum+w*g, sumSq+w*w
		}
		out[i] = math.Sqrt(1-counting)*sum/math.Sqrt(sumSq) + math.Sqrt(counting)*rng.NormFloat64()
	}
	return out
}

// weight is that of a grain at a distance from the middle of the spot.
func (p probe) weight(distance float64) float64 {
	if p.spot.Kind == traverse.TopHat {
		if math.Abs(distance) <= p.spot.Width/2 {
			return 1
		}
		return 0
	}
	return math.Exp(-square(distance/p.spot.Width) / 2)
}

// hold is a path of 750 C along which sqrt(2 G) is reach under the invented law.
func hold(reach float64) study.Path {
	life := reach * reach / 2 / math.Exp(law().LnD(hot))
	h := new(thermal.History)
	if err := h.Set([]thermal.Leg{{Kind: thermal.Hold, For: life, T0: hot}}); err != nil {
		panic(err)
	}
	return study.Path{Name: "as it was", History: h, Eruption: life}
}

// Plateaux before the traverse has been looked at.
func given(v float64) study.Plateau        { return study.Plateau{Value: v} }
func known(v, sigma float64) study.Plateau { return study.Plateau{Value: v, Sigma: sigma} }

var unknown = study.Plateau{Free: true}

// study is what a petrologist would write who knows the path, and of the start
// that two zones met at the first boundary.
func (s *slab) study(line *traverse.Traverse, core, mantle study.Plateau) *study.Study {
	b := s.bounds[0]
	return &study.Study{
		Title: "invented", File: "study.toml", Confidence: 0.95, Paths: []study.Path{hold(s.reach)},
		Crystals: []study.Crystal{{
			Name: "Q1", Mineral: "quartz", Shape: diffusion.Slab,
			Zones: []study.Zone{{Name: "core", Width: b, Times: 1}, {Name: "mantle", Width: radius - b, Times: 1}},
			Elements: []study.Element{{
				Name: "Ti", Unit: "ppm", Law: study.Law{Law: law()}, Start: study.Start{Zones: []study.Plateau{core, mantle}},
				Rims: []study.Rim{{Kind: diffusion.Held, Zone: 1}}, Traverse: line,
			}},
		}},
	}
}
