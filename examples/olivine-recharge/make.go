// Command olivine-recharge makes the invented traverses of this example: what the
// path "recharged for six weeks" leaves in the crystal of study.toml, seen through
// the instrument's spot, with random errors from a fixed seed. It shares nothing
// with bankfire: it steps through time by the simplest explicit scheme, with the
// laws and buffers as their papers print them.
//
//	go run ./examples/olivine-recharge Fo > examples/olivine-recharge/fo.csv
//	go run ./examples/olivine-recharge Ni > examples/olivine-recharge/ni.csv
//	go run ./examples/olivine-recharge Ca > examples/olivine-recharge/ca.csv
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
	um, day = 1e-6, 86400.0
	zeroC   = 273.15
	gas     = 8.314462618 // J/(mol K)

	rimWidth, size = 60 * um, 300 * um
	spacing        = 0.5 * um // of the cells

	eruption, end = 42 * day, 142 * day
	hot, around   = 1160 + zeroC, 20 + zeroC
	efold         = 20 * day

	seed = 20261
)

// element is what was measured of one: its plateaux before diffusion, the error of
// an analysis, the spot, how a row is printed, and D along the traverse, m2/s.
type element struct {
	header      string
	core, rim   float64
	sigma       float64
	fwhm        float64 // m
	row         string
	diffusivity func(at state, value float64) float64
}

// state is what the crystal is in: K, Pa, and log10 of fO2 in Pa.
type state struct{ temp, pressure, fO2 float64 }

var elements = map[string]element{
	"Fo": {"distance [um],Fo [mol%],1s [mol%]", 78, 86, 0.15, 1 * um, "%g,%.2f,%g\n", ironMagnesium},
	"Ni": {"distance [um],Ni [ppm],1s [ppm]", 900, 2100, 45, 1.5 * um, "%g,%.0f,%g\n", nickel},
	"Ca": {"distance [um],Ca [ppm],1s [ppm]", 2100, 1500, 25, 1.5 * um, "%g,%.0f,%g\n", calcium},
}

func main() {
	if len(os.Args) != 2 || elements[os.Args[1]].header == "" {
		log.Fatal("usage: olivine-recharge Fo|Ni|Ca")
	}
	out := bufio.NewWriter(os.Stdout)
	write(out, os.Args[1])
	if err := out.Flush(); err != nil {
		log.Fatal(err)
	}
}

// write writes the traverse as CSV, positions from the rim.
func write(w io.Writer, name string) {
	e := elements[name]
	profile := diffused(e)
	random := rand.New(rand.NewPCG(seed, uint64(name[0])))
	fmt.Fprintln(w, e.header)
	for x := 2.0; x <= 140; x += 3 {
		fmt.Fprintf(w, e.row, x, seen(profile, x*um, e.fwhm)+e.sigma*random.NormFloat64(), e.sigma)
	}
}

// along is the true path: six weeks in the fresh magma, at 2 kbar and half a log
// unit above QFM, then a lava flow, at 1 bar and one above NNO.
func along(t float64) state {
	if t < eruption {
		return state{hot, 2e8, -25096.3/hot + 8.735 + 0.110*(2000-1)/hot + 0.5 + 5}
	}
	temp := around + (hot-around)*math.Exp(-(t-eruption)/efold)
	return state{temp, 1e5, -24930/temp + 9.36 + 1 + 5}
}

// cos2 are the squared cosines of the angles between the normal of the boundary and
// the axes a, b and c.
var cos2 = [3]float64{square(62), square(75), square(32)}

func square(degrees float64) float64 { return math.Pow(math.Cos(degrees*math.Pi/180), 2) }

// arrhenius is exp(-(energy + (P - 1 bar) volume)/(R T)), J/mol and m3/mol.
func arrhenius(at state, energy, volume float64) float64 {
	return math.Exp(-(energy + (at.pressure-1e5)*volume) / (gas * at.temp))
}

// sixfold is D along the traverse where it is six times less along a and b.
func sixfold(alongC float64) float64 { return alongC * (cos2[2] + (cos2[0]+cos2[1])/6) }

// ironMagnesium is Dohmen and Chakraborty 2007.
func ironMagnesium(at state, fo float64) float64 {
	xFe := 1 - fo/100
	return sixfold(math.Pow(10, -9.21+(at.fO2+7)/6+3*(xFe-0.1)) * arrhenius(at, 201e3, 7e-6))
}

// nickel is Petry and others 2004.
func nickel(at state, _ float64) float64 {
	return sixfold(3.84e-9 * math.Pow(10, (at.fO2+6)/4.25) * arrhenius(at, 220e3, 7e-6))
}

// calcium is Coogan and others 2005.
func calcium(at state, _ float64) float64 {
	a, b, c := 1.65e-11*arrhenius(at, 193e3, 0), 3.47e-11*arrhenius(at, 201e3, 0), 9.55e-11*arrhenius(at, 207e3, 0)
	return (cos2[0]*a + cos2[1]*b + cos2[2]*c) * math.Pow(10, 0.31*(at.fO2+7))
}

// diffused steps a sharp boundary through the path and returns the cells, from the
// rim inwards. The rim is held until the eruption and sealed in the lava.
func diffused(e element) []float64 {
	c := make([]float64, int(math.Round(size/spacing)))
	for i := range c {
		if c[i] = e.core; (float64(i)+0.5)*spacing < rimWidth {
			c[i] = e.rim
		}
	}
	flux := make([]float64, len(c)+1)
	for t := 0.0; t < end; {
		at := along(t)
		fastest := max(e.diffusivity(at, e.core), e.diffusivity(at, e.rim))
		dt := min(0.3*spacing*spacing/fastest, 0.01*day)
		if t < eruption {
			dt = min(dt, eruption-t)
			flux[0] = e.diffusivity(at, e.rim) * 2 * (e.rim - c[0]) / spacing
		} else {
			flux[0] = 0
		}
		for i := 1; i < len(c); i++ {
			flux[i] = e.diffusivity(at, (c[i-1]+c[i])/2) * (c[i-1] - c[i]) / spacing
		}
		for i := range c {
			c[i] += dt / spacing * (flux[i] - flux[i+1])
		}
		t += dt
	}
	return c
}

// seen is the mean of the cells around a depth, weighted as the spot sees them.
func seen(c []float64, depth, fwhm float64) float64 {
	sigma := fwhm / (2 * math.Sqrt(2*math.Ln2))
	sum, weights := 0.0, 0.0
	for i, v := range c {
		w := math.Exp(-math.Pow(((float64(i)+0.5)*spacing-depth)/sigma, 2) / 2)
		sum, weights = sum+w*v, weights+w
	}
	return sum / weights
}
