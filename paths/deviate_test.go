package paths

import (
	"fmt"
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"bankfire/paths/study"
	"bankfire/thermal"
)

// How near deviations and chi-squares come to those of closed forms: the solver's grid
// moves a profile by 2e-4 of its range, some hundredth of an error, and what By leaves
// out of two constants that are off together is some part of z z'.
const (
	devZ     = 0.02
	devChiSq = 0.5
)

// offPlagioclase is a study of Sr across a jump of the host from An55 to An35, whose
// slope and partition coefficient are known with errors.
const offPlagioclase = `
[[partition]]
name = "kx"
A = "-26.8 kJ/mol%s"
B = "26.7 kJ/mol"

[[law]]
name = "mine"
D0 = "8.317637711e-5 m2/s"
E = "276 kJ/mol"
host = { ln_slope = %s, at = 0 }

[[path]]
name = "as made"
legs = [ { hold = "750 C", for = "20 yr" } ]

[[crystal]]
name = "P1"
mineral = "plagioclase"
shape = "slab"
zones = [ { name = "core", width = "100 um", host = 0.55 }, { name = "skin", width = "100 um", host = 0.35 } ]

[[crystal.element]]
name = "Sr"
law = "mine"
partition = "kx"
start = { zones = ["500 ppm", "700 ppm"], edge = "0 um" }
rim = { held = "skin" }
traverse = { file = "sr.csv", position = "distance [um]", zero = "centre", value = "Sr [ppm]", error = "2 ppm", spot = "point" }
`

const (
	coupleAge = 20 * thermal.Year
	srError   = 2.0       // ppm
	lnSlope   = -9.440599 // of Giletti & Casserly 1994, -4.1 ln 10
)

// offCouple is srCoupleBy with constants that are off: the slope of ln D by so much, and
// A by so many J/mol.
func offCouple(r, slope, a float64) float64 {
	ratio := math.Exp((ofBlundyWood1991 + a) * (xCore - xSkin) / (thermal.GasConstant * storedAt))
	d := func(x float64) float64 { return srD(x) * math.Exp(slope*x) }
	rootCore, rootSkin := math.Sqrt(d(xCore)), math.Sqrt(d(xSkin))
	skin := (srCore*rootCore + srSkin*rootSkin) / (ratio*rootCore + rootSkin)
	x := r - coreSr
	if x < 0 {
		core := ratio * skin
		return core + (srCore-core)*math.Erf(-x/(2*rootCore*math.Sqrt(coupleAge)))
	}
	return skin + (srSkin-skin)*math.Erf(x/(2*rootSkin*math.Sqrt(coupleAge)))
}

// offData is offCouple every micrometre with noise.
func offData(slope, a float64) (at, value []float64, csv string) {
	rng := rand.New(rand.NewPCG(77, 1))
	var data strings.Builder
	data.WriteString("distance [um],Sr [ppm]\n")
	for um2 := 80.5; um2 < 120; um2++ {
		v := offCouple(um2*um, slope, a) + srError*rng.NormFloat64()
		at, value = append(at, um2*um), append(value, v)
		fmt.Fprintf(&data, "%g,%.9g\n", um2, v)
	}
	return at, value, data.String()
}

// lowest looks for the least of f over two deviations on a lattice, then on a finer one
// about the best; one that is not open stays at 0.
func lowest(f func(x, y float64) float64, openX, openY bool) (x, y float64) {
	const most, coarse, fine = 3, 0.05, 0.002
	along := func(open bool, at, half, step float64) []float64 {
		if !open {
			return []float64{0}
		}
		return lattice(at-half, at+half, step)
	}
	search := func(cx, cy, half, step float64) {
		least := math.Inf(1)
		for _, a := range along(openX, cx, half, step) {
			for _, b := range along(openY, cy, half, step) {
				if v := f(a, b); v < least && math.Abs(a) <= most && math.Abs(b) <= most {
					x, y, least = a, b, v
				}
			}
		}
	}
	search(0, 0, most, coarse)
	search(x, y, 1.2*coarse, fine)
	return x, y
}

// wantDeviations compares a verdict with what the closed form of chi-square against two deviations
// says, of which each may be open.
func (o *Outcome) wantDeviations(t *testing.T, chiSq func(x, y float64) float64, points int, openX, openY bool) {
	t.Helper()
	if o.Verdict == Reproduces || o.WithLaws.Verdict != Reproduces {
		t.Errorf("%s, with errors %s", o.Verdict, o.WithLaws.Verdict)
	}
	pass := Critical(0.95, points)
	priced := func(x, y float64) float64 { return chiSq(x, y) + x*x + y*y }
	least := priced(lowest(priced, openX, openY))
	x, y := lowest(func(x, y float64) float64 {
		if chiSq(x, y) > pass {
			return math.Inf(1)
		}
		return math.Hypot(x, y)
	}, openX, openY)
	near(t, "chi-square", o.WithLaws.Misfit, least, devChiSq)
	size := 0.0
	for _, off := range o.WithLaws.Others {
		size = math.Hypot(size, off.Sigma)
	}
	near(t, "leaning", size, math.Hypot(x, y), devZ)
	t.Logf("%s with %.1f; with errors %.2f, in closed form %.2f; leans by %.3f, in closed form %.3f: %v", o.Verdict, o.Misfit, o.WithLaws.Misfit, least, size, math.Hypot(x, y), o.WithLaws.Others)
}

// A profile that was made with constants off by known amounts is not reproduced, and is
// with their errors allowed for, which it leans on by as much as the closed form does.
func TestDeviationsInAZonedHost(t *testing.T) {
	const slopeSigma, aSigma = 1.0, 1.5e3
	for _, test := range []struct {
		name             string
		slope, a         float64 // true deviations, in standard deviations
		withSlope, withA bool
	}{
		{"slope", 1.5, 0, true, false},
		{"slope the other way", -1.5, 0, true, false},
		{"A", 0, 1.5, false, true},
		{"both", 1.2, -0.9, true, true},
	} {
		t.Run(test.name, func(t *testing.T) {
			at, value, csv := offData(test.slope*slopeSigma, test.a*aSigma)
			a, slope := "", fmt.Sprint(lnSlope)
			var want []study.Deviation
			if test.withSlope {
				slope = fmt.Sprintf(`"%g +- %g"`, lnSlope, slopeSigma)
				want = append(want, study.Deviation{Of: "mine", What: study.HostSlope})
			}
			if test.withA {
				a = " +- 1.5 kJ/mol"
				want = append(want, study.Deviation{Of: "kx", What: study.PartitionA})
			}
			o := &weighed(t, readStudy(t, fmt.Sprintf(offPlagioclase, a, slope), "sr.csv", csv)).Paths[0].Outcome
			o.wantDeviations(t, func(zSlope, zA float64) float64 {
				sum := 0.0
				for i, r := range at {
					sum += square((value[i] - offCouple(r, zSlope*slopeSigma, zA*aSigma)) / srError)
				}
				return sum
			}, len(at), test.withSlope, test.withA)
			var got []study.Deviation
			for _, off := range o.WithLaws.Others {
				got = append(got, off.Deviation)
			}
			if fmt.Sprint(got) != fmt.Sprint(want) {
				t.Errorf("leans on %v, want %v", got, want)
			}
		})
	}
}
