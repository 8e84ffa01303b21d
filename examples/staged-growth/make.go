// Command staged-growth makes the invented traverse of this example: what the path
// "a wake in every stage" leaves in the crystal of study.toml, seen through the
// instrument's spot, with random errors from a fixed seed. It shares nothing with
// bankfire: it steps through time by the simplest explicit scheme, and lays a zone's
// cells down when the zone grows.
//
//	go run ./examples/staged-growth > examples/staged-growth/ti.csv
package main

import (
	"bufio"
	"fmt"
	"log"
	"math"
	"math/rand/v2"
	"os"
)

const (
	um, yr = 1e-6, 365.25 * 86400
	zeroC  = 273.15
	gas    = 8.314462618 // J/(mol K)

	spacing = 0.5 * um // of the cells
	sigma   = 1.0      // of one analysis, ppm
	fwhm    = 1 * um   // of the spot

	cold, hot   = 700 + zeroC, 780 + zeroC
	rise, efold = 5 * yr, 10 * yr
	relaxing    = 60 * yr

	seed = 20263
)

// zone is what the crystal had added to it, and how long it was stored and how long
// it was hot before the next one, or the eruption, came. The core is there when the
// first begins to count.
type zone struct {
	width         float64 // m
	ti            float64 // ppm
	stored, dwell float64 // s
}

var zones = []zone{
	{120 * um, 62, 0, 0},
	{80 * um, 94, 2000 * yr, 480 * yr},
	{60 * um, 55, 1000 * yr, 280 * yr},
	{60 * um, 82, 500 * yr, 70 * yr},
}

func main() {
	profile := grown()
	random := rand.New(rand.NewPCG(seed, 'T'))
	out := bufio.NewWriter(os.Stdout)
	fmt.Fprintln(out, "distance [um],Ti [ppm],1s [ppm]")
	for x := 72.0; x <= 291; x += 3 {
		fmt.Fprintf(out, "%g,%.1f,%g\n", x, seen(profile, x*um)+sigma*random.NormFloat64(), sigma)
	}
	if err := out.Flush(); err != nil {
		log.Fatal(err)
	}
}

// grown returns the cells from the centre outwards, after all zones were added and
// each lived through its stage.
func grown() []float64 {
	var c []float64
	for _, z := range zones {
		for range int(math.Round(z.width / spacing)) {
			c = append(c, z.ti)
		}
		if z.stored > 0 {
			diffuse(c, z)
		}
	}
	return c
}

// diffuse steps all that has grown through the stage of its outermost zone, at whose
// value the rim is held; the centre lets nothing through.
func diffuse(c []float64, z zone) {
	flux := make([]float64, len(c)+1)
	end := z.stored + rise + z.dwell + relaxing
	for t := 0.0; t < end; {
		dt := min(0.3*spacing*spacing/titanium(hot), yr, end-t)
		d := titanium(along(t+dt/2, z))
		for i := 1; i < len(c); i++ {
			flux[i] = d * (c[i-1] - c[i]) / spacing
		}
		flux[len(c)] = d * (c[len(c)-1] - z.ti) / (spacing / 2)
		for i := range c {
			c[i] += dt / spacing * (flux[i] - flux[i+1])
		}
		t += dt
	}
}

// along is the temperature in a stage: a cold store and a wake, which rises in a
// straight line, dwells and relaxes back.
func along(t float64, z zone) float64 {
	t -= z.stored
	switch {
	case t < 0:
		return cold
	case t < rise:
		return cold + (hot-cold)*t/rise
	case t < rise+z.dwell:
		return hot
	}
	return cold + (hot-cold)*math.Exp(-(t-rise-z.dwell)/efold)
}

// titanium is D of Ti in quartz, Cherniak and others 2007, m2/s.
func titanium(temp float64) float64 { return 7e-8 * math.Exp(-273e3/(gas*temp)) }

// seen is the mean of the cells around a distance from the centre, weighted as the
// spot sees them.
func seen(c []float64, distance float64) float64 {
	sum, weights := 0.0, 0.0
	for i, v := range c {
		x := ((float64(i)+0.5)*spacing - distance) / fwhm
		w := math.Exp(-4 * math.Ln2 * x * x)
		sum, weights = sum+w*v, weights+w
	}
	return sum / weights
}
