package paths

import (
	"fmt"
	"math"
	"math/rand/v2"
	"strings"

	"bankfire/diffusion"
	"bankfire/diffusion/catalogue"
	"bankfire/paths/study"
	"bankfire/paths/traverse"
	"bankfire/thermal"
)

// simulation is one measurement of a truth, and what the judge should say of it.
type simulation struct {
	study *study.Study
	right func(*Result) bool
}

// How often the judge must be right.
type promise int

const (
	nominal promise = iota // as often as the study's confidence says, no less and no more
	atLeast                // no less
	mostly                 // at least nine times of ten
)

func (p promise) String() string {
	return [...]string{"as often as its confidence says", "at least as often as its confidence says", "at least nine times of ten"}[p]
}

// truthCase is a kind of measurement that is simulated again and again.
// Simulation i depends on seed and i alone.
type truthCase struct {
	name    string
	what    string // truth, errors and fault in numbers
	promise promise
	seed    uint64
	draw    func(rng *rand.Rand) simulation
}

// The usual truth and the usual probe: a step of 50 ppm seen by 41 points.
func usualSlab() *slab {
	return &slab{values: []float64{40, 90}, bounds: []float64{boundary}, reach: 3 * um}
}

func usualProbe() probe {
	return probe{from: boundary - 12*um, to: boundary + 12*um, points: 41, spot: gaussian(0.2 * um), sigma: 2}
}

const usual = "40 and 90 ppm, sqrt(2 G) 3 um; 41 points over 24 um, spot sigma 0.2 um, errors 2 ppm"

func reproduces(r *Result) bool { return r.Paths[0].Outcome.Verdict == Reproduces }

// truthCases are the judge against truth: a true path is called reproduces, and
// the limits it gives hold the truth, as often as is said.
func truthCases() []truthCase {
	return []truthCase{
		{"plain errors", usual + "; plateaux given", nominal, 101, func(rng *rand.Rand) simulation {
			s := usualSlab()
			return simulation{s.study(usualProbe().measure(rng, s.seen), given(40), given(90)), reproduces}
		}},
		{"plain errors at 68 per cent", usual + "; plateaux given; confidence 68 %", nominal, 102, func(rng *rand.Rand) simulation {
			s := usualSlab()
			st := s.study(usualProbe().measure(rng, s.seen), given(40), given(90))
			st.Confidence = 0.68
			return simulation{st, reproduces}
		}},
		{"Gaussian priors", usual + "; plateaux drawn from their priors, +- 3 ppm", nominal, 103, func(rng *rand.Rand) simulation {
			s := usualSlab()
			s.values = []float64{40 + 3*rng.NormFloat64(), 90 + 3*rng.NormFloat64()}
			return simulation{s.study(usualProbe().measure(rng, s.seen), known(40, 3), known(90, 3)), reproduces}
		}},
		{"free plateaux", usual + "; plateaux free", nominal, 104, drawFree(usualProbe())},
		{"overlapping spots", usual + ", but spot sigma 0.8 um; errors correlated by the overlap; plateaux free", nominal, 105, drawFree(overlapProbe(gaussian(0.8 * um)))},
		{"overlapping top-hats", usual + ", but a top-hat of 2 um; errors correlated by the overlap; plateaux free", nominal, 106,
			drawFree(overlapProbe(traverse.Spot{Kind: traverse.TopHat, Width: 2 * um}))},
		{"overlapping spots with counting errors", usual + ", but spot sigma 0.8 um; errors and study independent; plateaux free", nominal, 107, func(rng *rand.Rand) simulation {
			p := overlapProbe(gaussian(0.8 * um))
			p.shared = false
			return drawFree(p)(rng)
		}},
		{"two profiles", "twice: " + usual + "; plateaux free", nominal, 108, func(rng *rand.Rand) simulation {
			s := usualSlab()
			st := s.study(usualProbe().measure(rng, s.seen), unknown, unknown)
			addElement(st, usualProbe().measure(rng, s.seen))
			return simulation{st, reproduces}
		}},
		{"uncertain law", "twice, under one law whose ln D and E are drawn from their errors, 0.25 in log10 D and 5 % in E, 150 C below mid-range: " + usual + "; plateaux free; reproduces with law errors", atLeast, 109, drawUncertainLaw},
		{"tilt range", usual + "; tilt drawn from 0..30 deg, boundary 60 um from the zero; plateaux free", atLeast, 110, drawTilt(0)},
		{"tilt and origin ranges", usual + "; tilt drawn from 0..30 deg, origin from -5..5 um; plateaux free", atLeast, 111, drawTilt(5 * um)},
		{"free edges", usual + ", but sqrt(2 G) 1 um and points over 6 um; edge drawn from 0..2 um; plateaux free", atLeast, 112, drawEdge},
		{"below detection", usual + ", but core drawn from 0..6 ppm; limit 6 ppm, values below it known as such; plateaux free", atLeast, 113, drawBelow(func(rng *rand.Rand) float64 { return 6 * rng.Float64() })},
		{"core at the limit of detection", usual + ", but core 7 ppm; limit 6 ppm, values below it known as such; plateaux free", atLeast, 114, drawBelow(func(*rand.Rand) float64 { return 7 })},
		{"finer than the spot", usual + ", but sqrt(2 G) 0.1 um, spot sigma 0.8 um, counting errors; plateaux free", atLeast, 115, drawFine(reproduces)},
		{"upper limit", "as finer than the spot; the upper limit is above the truth", atLeast, 116, drawFine(func(r *Result) bool {
			o := &r.Paths[0].Outcome
			return 1 <= o.Shift95[1]
		})},
		{"homogenised", "40 and 90 ppm halves of a sealed slab of 120 um, plateaux given, 1 ppm of 32 left; 41 points over all of it, errors 3 ppm", atLeast, 117, drawHomogenised(reproduces)},
		{"lower limit", "as homogenised; the lower limit is below the truth", atLeast, 118, drawHomogenised(func(r *Result) bool {
			o := &r.Paths[0].Outcome
			return o.Shift95[0] <= 1
		})},
	}
}

// drawFree measures the usual truth; nothing is known of its plateaux.
func drawFree(p probe) func(*rand.Rand) simulation {
	return func(rng *rand.Rand) simulation {
		s := usualSlab()
		return simulation{s.study(p.measure(rng, s.seen), unknown, unknown), reproduces}
	}
}

func overlapProbe(spot traverse.Spot) probe {
	p := usualProbe()
	p.spot, p.shared = spot, true
	return p
}

// addElement adds a second element, under the same law, to the crystal.
func addElement(st *study.Study, line *traverse.Traverse) {
	c := &st.Crystals[0]
	second := c.Elements[0]
	second.Name, second.Traverse = "Al", line
	c.Elements = append(c.Elements, second)
}

// drawUncertainLaw lets the truth diffuse by what the law would give if it were
// off by a draw from its errors.
func drawUncertainLaw(rng *rand.Rand) simulation {
	const middle, sigmaD, sigmaE = hot + 150, 0.25, 0.05 * 273e3
	lnG := sigmaD*math.Ln10*rng.NormFloat64() - sigmaE*rng.NormFloat64()/thermal.GasConstant*(1/hot-1/middle)
	s := usualSlab()
	path := hold(s.reach)
	s.reach *= math.Exp(lnG / 2)
	st := s.study(usualProbe().measure(rng, s.seen), unknown, unknown)
	st.Paths[0] = path
	addElement(st, usualProbe().measure(rng, s.seen))
	row := &catalogue.Row{Key: "invented", SigmaMid: catalogue.Sigma{Value: sigmaD}, SigmaE: catalogue.Sigma{Value: sigmaE}}
	for i := range st.Crystals[0].Elements {
		l := &st.Crystals[0].Elements[i].Law
		l.Key, l.Row = row.Key, row
		l.TMin, l.TMax = middle, middle
	}
	return simulation{st, func(r *Result) bool { return r.Paths[0].Outcome.WithLaws.Verdict == Reproduces }}
}

// drawTilt measures along a slanted line whose zero is off by up to origin.
func drawTilt(origin float64) func(*rand.Rand) simulation {
	return func(rng *rand.Rand) simulation {
		const most = 30 * math.Pi / 180
		s, p := usualSlab(), usualProbe()
		p.tilt, p.origin = most*rng.Float64(), origin*(2*rng.Float64()-1)
		st := s.study(p.measure(rng, s.seen), unknown, unknown)
		e := &st.Crystals[0].Elements[0]
		e.Tilt = study.Nuisance{Lo: 0, Hi: most}
		if origin > 0 {
			e.Origin = study.Nuisance{Lo: -origin, Hi: origin}
		}
		return simulation{st, reproduces}
	}
}

func drawEdge(rng *rand.Rand) simulation {
	const widest = 2 * um
	s, p := usualSlab(), usualProbe()
	s.reach, s.edge = 1*um, widest*rng.Float64()
	p.from, p.to, p.points = boundary-3*um, boundary+3*um, 21
	p.spot = gaussian(0.1 * um)
	st := s.study(p.measure(rng, s.seen), unknown, unknown)
	st.Crystals[0].Elements[0].Start.Edge = study.Nuisance{Lo: 0, Hi: widest}
	return simulation{st, reproduces}
}

// drawBelow measures a core about a limit of detection of three errors. What
// comes out below it is reported as such.
func drawBelow(core func(*rand.Rand) float64) func(*rand.Rand) simulation {
	return func(rng *rand.Rand) simulation {
		s, p := usualSlab(), usualProbe()
		s.values[0] = core(rng)
		limit := 3 * p.sigma
		line := p.measure(rng, s.seen)
		line.Limit = make([]bool, p.points)
		for i, v := range line.Value {
			if v < limit {
				line.Limit[i], line.Value[i] = true, limit
			}
		}
		return simulation{s.study(line, unknown, unknown), reproduces}
	}
}

func drawFine(right func(*Result) bool) func(*rand.Rand) simulation {
	return func(rng *rand.Rand) simulation {
		s, p := usualSlab(), usualProbe()
		s.reach, p.spot = 0.1*um, gaussian(0.8*um)
		return simulation{s.study(p.measure(rng, s.seen), unknown, unknown), right}
	}
}

// drawHomogenised measures, by points, two halves of a sealed slab of which
// little is left:
//
//	c = (c1 + c2)/2 + sum of 2 (c1 - c2)/(n pi) sin(n pi/2) cos(n pi r/radius) exp(-n^2 pi^2 G/radius^2),
//
// Crank (1975), eq. 2.17; the second term that is not 0, n = 3, is below 1e-13
// of the first.
func drawHomogenised(right func(*Result) bool) func(*rand.Rand) simulation {
	return func(rng *rand.Rand) simulation {
		const left = 1.0 // ppm
		s, p := usualSlab(), usualProbe()
		amplitude := 2 * (s.values[1] - s.values[0]) / math.Pi
		s.reach = radius / math.Pi * math.Sqrt(2*math.Log(amplitude/left))
		p.from, p.to, p.spot, p.sigma = 0, radius, traverse.Spot{}, 3
		line := p.measure(rng, func(r float64, _ traverse.Spot) float64 {
			return (s.values[0]+s.values[1])/2 - left*math.Cos(math.Pi*r/radius)
		})
		st := s.study(line, given(40), given(90))
		st.Crystals[0].Elements[0].Rims[0] = study.Rim{Kind: diffusion.Sealed, Zone: -1}
		return simulation{st, right}
	}
}

// faultCases are faults planted in measurement or study, which the judge should
// call by name.
func faultCases() []truthCase {
	return []truthCase{
		{"no fault", usual + "; plateaux free; nothing is found", mostly, 201, func(rng *rand.Rand) simulation {
			s := usualSlab()
			return simulation{s.study(usualProbe().measure(rng, s.seen), unknown, unknown), func(r *Result) bool { return len(r.Own[0].Findings) == 0 }}
		}},
		{"errors halved", usual + ", stated as 1 ppm; plateaux free", mostly, 202, drawErrors(0.5, "errors too small or model wrong")},
		{"errors doubled", usual + ", stated as 4 ppm; plateaux free", mostly, 203, drawErrors(2, "errors inflated")},
		{"one outlier", usual + ", one value anywhere 12 ppm (6 errors) too high or too low; plateaux free; its line is named", mostly, 204, drawOutlier(usualProbe())},
		{"one outlier among overlapping spots", usual + ", but spot sigma 0.8 um and errors correlated by the overlap; one value anywhere 12 ppm (6 errors) too high or too low; plateaux free; its line is named", mostly, 205,
			drawOutlier(overlapProbe(gaussian(0.8 * um)))},
		{"hidden zone", usual + "; a zone 5 um wide and 20 ppm higher, 6 um out from the boundary, is not in the study; plateaux free", mostly, 206, func(rng *rand.Rand) simulation {
			s := usualSlab()
			truth := *s
			truth.values = []float64{40, 90, 110, 90}
			truth.bounds = []float64{boundary, boundary + 6*um, boundary + 11*um}
			return simulation{s.study(usualProbe().measure(rng, truth.seen), unknown, unknown), wrongShape("inside")}
		}},
		{"wrong plateau", usual + "; core given as 44 ppm, mantle free", mostly, 207, func(rng *rand.Rand) simulation {
			s := usualSlab()
			return simulation{s.study(usualProbe().measure(rng, s.seen), given(44), unknown), wrongShape("inside")}
		}},
		{"wrong rim", "40 and 90 ppm, the boundary 20 um from the rim, sqrt(2 G) 3 um; 41 points over 32 um as far as the rim, errors 2 ppm; the rim is held 10 ppm lower than the mantle that the study ties it to; plateaux free", mostly, 208, func(rng *rand.Rand) simulation {
			s, p := usualSlab(), usualProbe()
			s.bounds, s.rim = []float64{radius - 20*um}, -10
			p.from, p.to, p.spot = radius-32*um, radius, traverse.Spot{}
			return simulation{s.study(p.measure(rng, s.seen), unknown, unknown), wrongShape("at the rim")}
		}},
	}
}

// drawErrors states the errors as so many times what they are.
func drawErrors(times float64, name string) func(*rand.Rand) simulation {
	return func(rng *rand.Rand) simulation {
		s := usualSlab()
		line := usualProbe().measure(rng, s.seen)
		for i := range line.Sigma {
			line.Sigma[i] *= times
		}
		return simulation{s.study(line, unknown, unknown), func(r *Result) bool { return finding(r, name) != "" }}
	}
}

// drawOutlier puts one value off by six errors.
func drawOutlier(p probe) func(*rand.Rand) simulation {
	return func(rng *rand.Rand) simulation {
		s := usualSlab()
		line := p.measure(rng, s.seen)
		i := rng.IntN(p.points)
		line.Value[i] += math.Copysign(6*p.sigma, rng.Float64()-0.5)
		row := fmt.Sprintf("line %d of invented.csv is an outlier", line.Line[i])
		return simulation{s.study(line, unknown, unknown), func(r *Result) bool { return finding(r, row) != "" }}
	}
}

// wrongShape looks for the verdict, and for the place among the findings.
func wrongShape(place string) func(*Result) bool {
	return func(r *Result) bool {
		return r.Paths[0].Outcome.Verdict == WrongShape && strings.Contains(finding(r, "residuals"), place)
	}
}

// finding returns the first finding that holds the words; "" if none does.
func finding(r *Result, words string) string {
	for _, f := range r.Own[0].Findings {
		if strings.Contains(f, words) {
			return f
		}
	}
	return ""
}
