// Command feldspar-and-quartz makes the invented measurements of this example: what
// the path "cold, woken five times" leaves in the three crystals of study.toml, seen
// through the instruments' spots, with random errors from a fixed seed. It shares
// nothing with bankfire: it steps through time by an explicit scheme, with the laws
// and the partition relation as they are printed.
//
//	go run ./examples/feldspar-and-quartz Ti > examples/feldspar-and-quartz/ti.csv
//	go run ./examples/feldspar-and-quartz An > examples/feldspar-and-quartz/an.csv
//	go run ./examples/feldspar-and-quartz Sr > examples/feldspar-and-quartz/sr.csv
//	go run ./examples/feldspar-and-quartz Ba > examples/feldspar-and-quartz/ba.csv
package main

import (
	"bufio"
	"fmt"
	"io"
	"log"
	"math"
	"math/rand/v2"
	"os"
)

const (
	um, yr = 1e-6, 365.25 * 86400
	zeroC  = 273.15
	gas    = 8.314462618 // J/(mol K)

	store, hot         = 690 + zeroC, 790 + zeroC
	inStore            = 2300 * yr // before each of the five reheatings
	rise, dwell, efold = 2 * yr, 50 * yr, 10 * yr
	round              = inStore + 100*yr
	rounds             = 5

	coreAn, rimAn, errorAn = 0.45, 0.60, 0.010

	seed = 20262
)

// element is what was measured of one: the crystal, its plateaux before diffusion,
// and how it was looked at. Depths count from the rim.
type element struct {
	header          string
	rimWidth, size  float64 // m
	spacing         float64 // of the cells, m
	core, rim       float64
	sigma           float64 // of one measurement
	first, last, by float64 // um
	row             string
	spot            func(distance float64) float64 // weight, from the middle of the spot
	diffusivity     func(temp, an float64) float64 // m2/s
	partition       func(temp, an float64) float64 // crystal/melt, up to a factor
}

var elements = map[string]element{
	"Ti": {"distance [um],Ti [ppm],1s [ppm]", 60 * um, 200 * um, 0.25 * um, 95, 55, 1.6, 22, 98, 2,
		"%g,%.1f,%g\n", gaussian(0.8 * um), titanium, none},
	"Sr": {"distance [um],Sr [ppm],1s [ppm]", 130 * um, 400 * um, 1 * um, 600, 680, 15, 20, 276, 8,
		"%g,%.0f,%g\n", topHat(8 * um), strontium, blundyWood},
	"Ba": {"distance [um],BSE [grey],1s [grey]", 20 * um, 80 * um, 0.02 * um, 110, 152, 1.5, 16.8, 23.2, 0.2,
		"%.4g,%.1f,%g\n", gaussian(0.2 * um), barium, none},
}

func main() {
	if len(os.Args) != 2 || os.Args[1] != "An" && elements[os.Args[1]].header == "" {
		log.Fatal("usage: feldspar-and-quartz Ti|An|Sr|Ba")
	}
	out := bufio.NewWriter(os.Stdout)
	random := rand.New(rand.NewPCG(seed, uint64(os.Args[1][0])))
	if os.Args[1] == "An" {
		writeHost(out, random)
	} else {
		write(out, elements[os.Args[1]], random)
	}
	if err := out.Flush(); err != nil {
		log.Fatal(err)
	}
}

// write writes the traverse as CSV.
func write(w io.Writer, e element, random *rand.Rand) {
	profile := diffused(e)
	fmt.Fprintln(w, e.header)
	for i := 0; e.first+float64(i)*e.by <= e.last+e.by/2; i++ {
		x := e.first + float64(i)*e.by
		fmt.Fprintf(w, e.row, x, seen(profile, e, x*um)+e.sigma*random.NormFloat64(), e.sigma)
	}
}

// writeHost writes the An that was measured across the plagioclase.
func writeHost(w io.Writer, random *rand.Rand) {
	fmt.Fprintln(w, "distance [um],XAn [mole fraction],1s [mole fraction]")
	for x := 15.0; x <= 285; x += 10 {
		fmt.Fprintf(w, "%g,%.3f,%g\n", x, host(elements["Sr"], x*um)+errorAn*random.NormFloat64(), errorAn)
	}
}

// host is the An at a depth; only plagioclase asks for one.
func host(e element, depth float64) float64 {
	if depth < e.rimWidth {
		return rimAn
	}
	return coreAn
}

// along is the temperature of the true path: five times a cold store and a reheating,
// which rises in a straight line, dwells and relaxes back.
func along(t float64) float64 {
	t = math.Mod(t, round) - inStore
	switch {
	case t < 0:
		return store
	case t < rise:
		return store + (hot-store)*t/rise
	case t < rise+dwell:
		return hot
	}
	return store + (hot-store)*math.Exp(-(t-rise-dwell)/efold)
}

// titanium is Cherniak and others 2007.
func titanium(temp, _ float64) float64 { return 7e-8 * math.Exp(-273e3/(gas*temp)) }

// strontium is Giletti and Casserly 1994.
func strontium(temp, an float64) float64 {
	return math.Pow(10, -4.08-4.1*an) * math.Exp(-276e3/(gas*temp))
}

// barium is Cherniak 2002.
func barium(temp, _ float64) float64 { return 0.29 * math.Exp(-455e3/(gas*temp)) }

// blundyWood is the partition coefficient of Sr, Blundy and Wood 1991.
func blundyWood(temp, an float64) float64 { return math.Exp((26.7e3 - 26.8e3*an) / (gas * temp)) }

func none(_, _ float64) float64 { return 1 }

// diffused steps a sharp boundary through the true path and returns the cells, from
// the rim inwards. What drives the element is the melt that each cell would be in
// equilibrium with, C/K: between two cells it has half of each to cross. The rim is
// held at its first value, the middle of the crystal lets nothing through.
func diffused(e element) []float64 {
	c := make([]float64, int(math.Round(e.size/e.spacing)))
	an := make([]float64, len(c))
	for i := range c {
		depth := (float64(i) + 0.5) * e.spacing
		an[i] = host(e, depth)
		if c[i] = e.core; depth < e.rimWidth {
			c[i] = e.rim
		}
	}
	flux := make([]float64, len(c)+1)
	for t := 0.0; t < rounds*round; {
		fastest := max(e.diffusivity(along(t), coreAn), e.diffusivity(along(t+yr), coreAn))
		dt := min(0.2*e.spacing*e.spacing/fastest, yr, rounds*round-t)
		temp := along(t + dt/2)
		inRim, inCore := cell(e, temp, rimAn), cell(e, temp, coreAn)
		at := func(i int) pair {
			if an[i] == rimAn {
				return inRim
			}
			return inCore
		}
		flux[0] = inRim.d * (e.rim - c[0]) / (e.spacing / 2)
		for i := 1; i < len(c); i++ {
			a, b := at(i-1), at(i)
			flux[i] = (c[i-1]/a.k - c[i]/b.k) / (e.spacing / 2 * (1/(a.d*a.k) + 1/(b.d*b.k)))
		}
		for i := range c {
			c[i] += dt / e.spacing * (flux[i] - flux[i+1])
		}
		t += dt
	}
	return c
}

// pair is the diffusivity and the partition coefficient in a cell.
type pair struct{ d, k float64 }

func cell(e element, temp, an float64) pair {
	return pair{e.diffusivity(temp, an), e.partition(temp, an)}
}

// seen is the mean of the cells around a depth, weighted as the spot sees them.
func seen(c []float64, e element, depth float64) float64 {
	sum, weights := 0.0, 0.0
	for i, v := range c {
		w := e.spot((float64(i)+0.5)*e.spacing - depth)
		sum, weights = sum+w*v, weights+w
	}
	return sum / weights
}

// gaussian is a spot of a full width at half maximum, m.
func gaussian(fwhm float64) func(float64) float64 {
	return func(x float64) float64 { return math.Exp(-4 * math.Ln2 * x * x / (fwhm * fwhm)) }
}

// topHat is a spot that sees evenly over a width, m.
func topHat(width float64) func(float64) float64 {
	return func(x float64) float64 {
		if math.Abs(x) > width/2 {
			return 0
		}
		return 1
	}
}
