package paths

import (
	"fmt"
	"math"
	"math/rand/v2"
	"strconv"
	"strings"
	"testing"

	"bankfire/diffusion"
	"bankfire/paths/study"
	"bankfire/paths/traverse"
	"bankfire/thermal"
)

// hostedTruth is a true host and what it makes of Sr, in closed form, and the host
// as a petrologist measures it.
type hostedTruth struct {
	name     string
	draws    int // simulations without -long
	rim      study.Rim
	life     float64
	from, to float64
	seen     func(r float64) float64
	measured func(c *study.Crystal, rng *rand.Rand)
}

const (
	hostSigma  = 0.015 // of one analysis, or one zone
	srNoise    = 0.01  // of the value
	srPoints   = 40
	heldAt     = 650.0 // ppm
	waveLength = 2 * coreSr
)

// wave is a host that goes up and down once over the crystal: a spline of a tenth of
// its length takes (2 pi h/L)^4, 0.2 %, off its height.
func wave(r float64) float64 { return 0.45 + 0.08*math.Cos(2*math.Pi*r/waveLength) }

// ramp is a host that falls towards the rim within some 60 um, so that a spline of a
// tenth of the crystal moves it by at most h^4 times its fourth derivative, 4e-4.
func ramp(r float64) float64 { return 0.45 - 0.1*math.Tanh((r-coreSr)/(30*um)) }

// atRest is a crystal that has come to rest under a held rim, in a true host that is
// measured every 2 um.
func atRest(name string, draws int, host func(r float64) float64) hostedTruth {
	return hostedTruth{name, draws, study.Rim{Kind: diffusion.Held, Zone: -1, Value: given(heldAt)}, 1e8 * thermal.Year, 5 * um, waveLength - 5*um,
		func(r float64) float64 {
			return heldAt * math.Exp(ofBlundyWood1991*(host(r)-host(waveLength))/(thermal.GasConstant*storedAt))
		},
		func(c *study.Crystal, rng *rand.Rand) {
			const spacing, width = 2 * um, waveLength / 10
			var at, value, sigma []float64
			for i := range int(waveLength/spacing) + 1 {
				at = append(at, float64(i)*spacing)
				value, sigma = append(value, host(at[i])+hostSigma*rng.NormFloat64()), append(sigma, hostSigma)
			}
			c.Host = study.NewHost(at, value, sigma, width)
		}}
}

func hostedTruths() []hostedTruth {
	const age = 20 * thermal.Year
	return []hostedTruth{
		{"steps", 30, study.Rim{Kind: diffusion.Held, Zone: 1}, age, coreSr - 20*um, coreSr + 20*um,
			func(r float64) float64 { return srCouple(r, age) },
			func(c *study.Crystal, rng *rand.Rand) {
				for i, x := range []float64{xCore, xSkin} {
					c.Zones[i].Host, c.Zones[i].HostSigma = x+hostSigma*rng.NormFloat64(), hostSigma
				}
			}},
		atRest("spline", 6, wave),
		atRest("ramp", 4, ramp),
	}
}

// draw is simulation i: the host and Sr measured with their errors.
func (h *hostedTruth) draw(t *testing.T, i int) *study.Study {
	rng := rand.New(rand.NewPCG(301, uint64(i)))
	line := &traverse.Traverse{Name: "invented.csv", Unit: "ppm", Size: 2 * coreSr}
	for k := range srPoints {
		r := h.from + (h.to-h.from)*(float64(k)+0.5)/srPoints
		v := h.seen(r)
		line.Position = append(line.Position, r)
		line.Value = append(line.Value, v*(1+srNoise*rng.NormFloat64()))
		line.Sigma = append(line.Sigma, v*srNoise)
		line.Line = append(line.Line, k+2)
	}
	history := new(thermal.History)
	if err := history.Set([]thermal.Leg{{Kind: thermal.Hold, For: h.life, T0: storedAt}}); err != nil {
		t.Fatal(err)
	}
	c := study.Crystal{Name: strconv.Itoa(i), Mineral: "plagioclase", Shape: diffusion.Slab, Hosted: true,
		Zones: []study.Zone{{Name: "core", Width: coreSr, Times: 1}, {Name: "skin", Width: coreSr, Times: 1}},
		Elements: []study.Element{{
			Name: "Sr", Unit: "ppm", Law: study.Law{Law: diffusion.NewLaw(math.Pow(10, -4.08), 276e3), HostSlope: -4.1 * math.Ln10},
			Partition: &study.Partition{A: ofBlundyWood1991}, Start: study.Start{Zones: []study.Plateau{given(srCore), given(srSkin)}},
			Rims: []study.Rim{h.rim}, Traverse: line,
		}}}
	h.measured(&c, rng)
	return &study.Study{Title: "invented", File: "study.toml", Confidence: 0.95, Crystals: []study.Crystal{c},
		Paths: []study.Path{{Name: "as it was", History: history, Eruption: h.life}}}
}

// takenAsExact leaves the crystal its host as measured without errors.
func takenAsExact(c *study.Crystal) {
	for i := range c.Zones {
		c.Zones[i].HostSigma = 0
	}
	if c.Host != nil {
		c.Host.Sigma = nil
	}
}

// A true path is called reproduces as often as is said, and the 95 % interval of
// its shift factor holds 1 as often, although the host that the study has is off by
// its errors. With the host taken as exact it is not.
func TestHostErrorsKeepThePromise(t *testing.T) {
	if underRace {
		t.Skip("many simulations")
	}
	const deviations, confidence = 3.3, 0.95
	for _, h := range hostedTruths() {
		t.Run(h.name, func(t *testing.T) {
			n := h.draws
			if *long {
				n = 1000
			}
			slack := deviations * math.Sqrt(confidence*(1-confidence)/float64(n))
			least, most := confidence-slack, min(1, confidence+slack)
			passed, held, exactly, misfit := 0, 0, 0, 0.0
			for i := range n {
				s := h.draw(t, i)
				o := weighed(t, s).Paths[0].Outcome
				misfit += o.Misfit / float64(n)
				passed += oneIf(o.Verdict == Reproduces)
				held += oneIf(o.Shift95[0] <= 1 && 1 <= o.Shift95[1])
				takenAsExact(&s.Crystals[0])
				exactly += oneIf(reproduces(weighed(t, s)))
			}
			t.Logf("of %d: %d pass, %d intervals hold 1, mean chi-square %.1f of %d; with the host as exact %d pass", n, passed, held, misfit, srPoints, exactly)
			pass, hold := float64(passed)/float64(n), float64(held)/float64(n)
			if !(pass >= least && pass <= most && hold >= least) {
				t.Errorf("of %d, %d pass and %d intervals hold 1, want %.1f to %.1f %%", n, passed, held, 100*least, 100*most)
			}
			if off := deviations * math.Sqrt(2*srPoints/float64(n)); !(math.Abs(misfit-srPoints) <= off) {
				t.Errorf("mean chi-square %g, want %d +- %g", misfit, srPoints, off)
			}
			if !(float64(exactly) < 0.8*float64(n)) {
				t.Errorf("with the host as exact %d of %d pass, want fewer than 80 %%", exactly, n)
			}
		})
	}
}

func oneIf(is bool) int {
	if is {
		return 1
	}
	return 0
}

// The host's error widens what is known of the amount of diffusion, and the report
// says by how much; an element that does not depend on the host, and a host without
// an error, are as before.
func TestHostErrorWidensTheShiftFactor(t *testing.T) {
	h := hostedTruths()[0]
	s := h.draw(t, 0)
	r := weighed(t, s)
	takenAsExact(&s.Crystals[0])
	without := weighed(t, s)
	a, b := r.Paths[0].Outcome.Shift95, without.Paths[0].Outcome.Shift95
	if !(a[1]/a[0] > 1.2*b[1]/b[0]) {
		t.Errorf("the interval is %g with the host's error and %g without", a, b)
	}
	if got := strings.Join(r.Own[0].Findings, "\n"); !strings.Contains(got, `its host was redrawn 2 times from its errors: with them the shift factor of "as it was" is from`) {
		t.Errorf("findings %q", got)
	}
	if got := strings.Join(without.Own[0].Findings, "\n"); strings.Contains(got, "redrawn") {
		t.Errorf("findings %q about a host that is exact", got)
	}
}

// Relative values, on a scale of their own, allow for the host as ppm do.
func TestHostErrorInGrey(t *testing.T) {
	const roundOff, likely = 1e-6, 15 // of chi-square, which falls by that of two degrees of freedom
	h := hostedTruths()[0]
	h.seen = func(r float64) float64 { return srCoupleBy(1, r, h.life) } // relative values have no zero, so no partition
	grey := func(grey bool) *Result {
		s := h.draw(t, 1)
		e := &s.Crystals[0].Elements[0]
		e.Partition = nil
		if grey {
			e.Traverse.Grey, e.Traverse.Unit = true, "grey"
			for i := range e.Traverse.Value {
				e.Traverse.Value[i] = 10 + 0.5*e.Traverse.Value[i]
				e.Traverse.Sigma[i] *= 0.5
			}
		}
		return weighed(t, s)
	}
	plain, relative := grey(false).Paths[0].Outcome, grey(true).Paths[0].Outcome
	if fall := plain.Misfit - relative.Misfit; !(fall > -roundOff && fall < likely) {
		t.Errorf("chi-square %g in ppm, %g in grey levels with two more free values", plain.Misfit, relative.Misfit)
	}
}

// A start in equilibrium with a melt in the host is off with it, also before any
// diffusion: chi-square without any is what it comes to with next to none.
func TestHostErrorBeforeDiffusion(t *testing.T) {
	const same = 1e-3 // of chi-square, which the diffusion of a microsecond hardly changes
	text := strings.Replace(fmt.Sprintf(plagioclase, "1 s", "1 s", `"sealed"`),
		`zones = ["500 ppm", "700 ppm"], edge`, `melt = ["90 ppm", "90 ppm"], temperature = ["750 C", "750 C"], edge`, 1)
	k := func(x float64) float64 {
		return 90 * math.Exp((ofBlundyWood1991*x+26.7e3)/(thermal.GasConstant*storedAt))
	}
	var data strings.Builder
	data.WriteString("distance [um],Sr [ppm]\n")
	for um2 := 60.5; um2 < 140; um2 += 2 {
		x := xCore + 0.02
		if um2 > 100 {
			x = xSkin - 0.02
		}
		fmt.Fprintf(&data, "%g,%.9g\n", um2, k(x))
	}
	s := readStudy(t, text, "sr.csv", data.String())
	still := func() (still, next float64) {
		w, err := newWeighing(s)
		if err != nil {
			t.Fatal(err)
		}
		if err := w.all(t.Context(), 1); err != nil {
			t.Fatal(err)
		}
		c := &w.paths[0].curves[0]
		return c.Still, c.ChiSq[0]
	}
	exactly, _ := still()
	for i := range s.Crystals[0].Zones {
		s.Crystals[0].Zones[i].HostSigma = 0.02
	}
	if got, next := still(); !(math.Abs(got-next) <= same*next && got < exactly/10) {
		t.Errorf("chi-square without diffusion %g, with next to none %g, with the host as exact %g", got, next, exactly)
	}
}

func TestBetweenText(t *testing.T) {
	for want, x := range map[string][2]float64{
		"from 0.5 to 2": {0.5, 2}, "above 0.5": {0.5, math.Inf(1)}, "below 2": {0, 2}, "not bounded": {0, math.Inf(1)},
	} {
		if got := betweenText(x); got != want {
			t.Errorf("%g is %q, want %q", x, got, want)
		}
	}
}
