package paths

import (
	"fmt"
	"math"
	"math/rand/v2"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"bankfire/paths/study"
	"bankfire/paths/traverse"
)

// scaledCopy is a crystal in which K starts as a scaled copy of P, which does not move:
// both are written to files and read as a study.
type scaledCopy struct {
	shape           func(r float64) float64 // of P, 0 to 1
	seen            func(r float64) float64 // the part of the way from lowest to highest that K has in the end
	lowest, highest float64                 // of K, ppm
	smooth          string
	noise           float64 // of P, of which the range is 80 ppm
	sigma           float64 // of K, ppm
	rim, start      string  // of K; "" is a scaled start that is free
	swapped         bool    // K comes before P
	g               float64 // diffusion integral of K, m2
}

const copySize = 120 * um // of the crystal, m

// wideErf is a grown boundary at 60 um with a standard deviation of 4 um, after K has
// diffused by sqrt(2 G) = 5 um: squares of standard deviations add up (Crank 1975, The
// Mathematics of Diffusion, eq. 2.14).
func wideErf() scaledCopy {
	phi := func(s float64) func(r float64) float64 {
		return func(r float64) float64 { return math.Erfc((60*um-r)/s/math.Sqrt2) / 2 }
	}
	return scaledCopy{shape: phi(4 * um), seen: phi(math.Hypot(4*um, 5*um)), lowest: 8, highest: 30, noise: 0.2, sigma: 0.3,
		smooth: `smooth = "spline", width = "3 um"`, rim: `{ held = "mantle" }`, g: square(5*um) / 2}
}

// read puts the study and its data into a folder and reads it.
func (c scaledCopy) read(t *testing.T, rng *rand.Rand) *study.Study {
	t.Helper()
	dir := t.TempDir()
	normal := func() float64 {
		if rng == nil {
			return 0
		}
		return rng.NormFloat64()
	}
	var p, k strings.Builder
	p.WriteString("x [um],P [ppm]\n")
	k.WriteString("x [um],K [ppm]\n")
	for i := range 240 {
		r := (float64(i) + 0.5) / 2
		fmt.Fprintf(&p, "%g,%.12g\n", r, 20+80*c.shape(r*um)+c.noise*normal())
		if i%4 == 0 {
			fmt.Fprintf(&k, "%g,%.12g\n", r, c.lowest+(c.highest-c.lowest)*c.seen(r*um)+c.sigma*normal())
		}
	}
	d := math.Exp(law().LnD(hot))
	start := c.start
	if start == "" {
		start = `{ scaled = "P", ` + c.smooth + ` }`
	}
	of := func(name, law, start, rim string, sigma float64) string {
		return fmt.Sprintf("[[crystal.element]]\nname = %q\nlaw = %s\nstart = %s\nrim = %s\ntraverse = { file = \"%s.csv\", position = \"x [um]\", zero = \"centre\", value = \"%s [ppm]\", error = \"%g ppm\", spot = \"point\" }\n",
			name, law, start, rim, strings.ToLower(name), name, sigma)
	}
	elements := []string{
		of("P", `{ D0 = "1e-20 m2/s", E = "273 kJ/mol" }`, `{ zones = ["free", "free"], edge = "16 um" }`, `"sealed"`, math.Max(c.noise, 0.01)),
		of("K", `{ D0 = "7e-8 m2/s", E = "273 kJ/mol" }`, start, c.rim, c.sigma),
	}
	if c.swapped {
		slices.Reverse(elements)
	}
	text := fmt.Sprintf("[[path]]\nname = \"as it was\"\nlegs = [ { hold = \"%.17g K\", for = \"%.17g s\" } ]\n"+
		"[[crystal]]\nname = \"F1\"\nmineral = \"feldspar\"\nshape = \"slab\"\nzones = [ { name = \"core\", width = \"60 um\" }, { name = \"mantle\", width = \"60 um\" } ]\n%s",
		hot, c.g/d, strings.Join(elements, ""))
	for name, text := range map[string]string{"study.toml": text, "p.csv": p.String(), "k.csv": k.String()} {
		if err := os.WriteFile(filepath.Join(dir, name), []byte(text), 0o600); err != nil {
			t.Fatal(err)
		}
	}
	s, err := study.Read(filepath.Join(dir, "study.toml"))
	if err != nil {
		t.Fatal(err)
	}
	return s
}

// followedK is what K did along the path.
func followedK(t *testing.T, s *study.Study) *ElementCourse {
	t.Helper()
	course, err := Follow(t.Context(), s, &s.Paths[0], nil)
	if err != nil {
		t.Fatal(err)
	}
	i := slices.IndexFunc(course.Elements, func(e ElementCourse) bool { return e.Element.Name == "K" })
	return &course.Elements[i]
}

// A wave with sealed ends keeps its shape: cos(2 pi r/L) falls by exp(-(2 pi/L)^2 G)
// (Crank 1975, The Mathematics of Diffusion, eq. 2.16). P measured without noise has it,
// K starts with its shape, and its profile is known by G alone.
func TestScaledStartOfAWave(t *testing.T) {
	const width = 1.5 * um // of the spline
	wave := 2 * math.Pi / copySize
	spline := square(wave*width/traverse.SmoothingWidth) / 2 // of the range: h^2 times the curvature, which it does not have at its ends
	decay := 0.5
	g := -math.Log(decay) / square(wave)
	for name, ends := range map[string][2]float64{"lowest below highest": {5, 25}, "the other way round": {25, 5}} {
		t.Run(name, func(t *testing.T) {
			c := scaledCopy{
				shape: func(r float64) float64 { return (1 + math.Cos(wave*r)) / 2 }, seen: func(r float64) float64 { return (1 + decay*math.Cos(wave*r)) / 2 },
				lowest: ends[0], highest: ends[1], sigma: 0.1, rim: `"sealed"`, g: g,
			}
			c.start = fmt.Sprintf(`{ scaled = "P", lowest = "%g ppm", highest = "%g ppm", smooth = "spline", width = "1.5 um" }`, ends[0], ends[1])
			e := followedK(t, c.read(t, nil))
			if !e.GEnough {
				t.Errorf("G is not enough: %s", e.WhyG)
			}
			size := math.Abs(ends[1] - ends[0])
			for i, r := range e.Centres {
				near(t, "start", e.Start[i], ends[0]+(ends[1]-ends[0])*c.shape(r), spline*size+cellMean(e.Centres, i, wave)*size)
				near(t, "end", e.Final[i], ends[0]+(ends[1]-ends[0])*c.seen(r), spline*size+cellMean(e.Centres, i, wave)*size+e.NumErr)
			}
		})
	}
}

// cellMean is by how much the mean of half a wave over cell i is off its middle at most:
// (width wave)^2/48, for the wider of the distances to the neighbours.
func cellMean(centres []float64, i int, wave float64) float64 {
	width := 0.0
	for _, k := range []int{max(i-1, 0), min(i+1, len(centres)-1)} {
		width = math.Max(width, math.Abs(centres[k]-centres[i]))
	}
	if i == 0 || i == len(centres)-1 {
		width *= 1.2 // to the next as the spacing may grow
	}
	return square(width*wave) / 48
}

// Of a boundary that grew wide in P, K started with a copy and then diffused. Over 20
// simulations with noise in both, its two values come out within their errors, and the
// path as it was reproduces.
func TestScaledStartIsRecovered(t *testing.T) {
	if underRace {
		t.Skip("other tests see what runs side by side")
	}
	const (
		draws  = 20
		lo, hi = 5.92, 45.3 // chi-square of 20 degrees: 0.1 % on either side
		least  = 16         // of 20 at 95 %: fewer by chance in 0.3 %
	)
	c := wideErf()
	var sums [2]float64
	passed, covered := 0, 0
	for k := range draws {
		r := weighed(t, c.read(t, rand.New(rand.NewPCG(3, uint64(k)))))
		q, f := &r.Paths[0].Profiles[1], &r.Paths[0].Outcome.Profiles[1]
		if q.Free[0].Name != "at lowest P" || q.Free[1].Name != "at highest P" {
			t.Fatalf("free values %+v", q.Free)
		}
		for j, want := range []float64{c.lowest, c.highest} {
			sums[j] += square((q.Free[j].Value - want) / q.Free[j].Sigma)
		}
		if f.Verdict == Reproduces {
			passed++
		}
		if f.Shift95[0] <= 1 && f.Shift95[1] >= 1 {
			covered++
		}
	}
	for j, sum := range sums {
		if !(sum >= lo && sum <= hi) {
			t.Errorf("value %d: squares of what it is off in sigma add up to %g of %d", j, sum, draws)
		}
	}
	if passed < least || covered < least {
		t.Errorf("%d of %d reproduce, of %d the interval holds 1: want %d", passed, draws, covered, least)
	}
	t.Logf("squares %v, %d reproduce, %d cover", sums, passed, covered)
}

// P before K or after it: the same to the bit. The start may be one of several, of
// which the true one is taken.
func TestScaledStartsAndTheOthers(t *testing.T) {
	c := wideErf()
	weigh := func(c scaledCopy) (*Result, int) {
		r := weighed(t, c.read(t, rand.New(rand.NewPCG(3, 50))))
		return r, slices.IndexFunc(r.Paths[0].Profiles, func(q ProfileResult) bool { return q.Element.Name == "K" })
	}
	r, k := weigh(c)
	c.swapped = true
	swapped, j := weigh(c)
	a, b := r.Paths[0].Outcome.Profiles[k], swapped.Paths[0].Outcome.Profiles[j]
	if k != 1 || j != 0 || a.Misfit != b.Misfit || a.Shift != b.Shift || a.Shift95 != b.Shift95 || !slices.Equal(r.Paths[0].Profiles[k].Start, swapped.Paths[0].Profiles[j].Start) {
		t.Errorf("P first %+v, K first %+v", a, b)
	}
	c.start = `[ { name = "sharp", zones = ["free", "free"], edge = "0 um" }, { name = "as P", scaled = "P", smooth = "spline", width = "3 um" } ]`
	r, _ = weigh(c)
	tried := r.Paths[0].Starts[0]
	if len(tried) != 2 || !tried[1].Taken || tried[1].Starts[0].Name != "as P" || tried[0].Verdict == Reproduces {
		t.Errorf("tried %+v", tried)
	}
}

// Smoothed into one step a zone, with edges of their own, the scaled start is that of
// free zones to the bit of its two values.
func TestScaledStepsAreZones(t *testing.T) {
	const solves = 1e-9 // of values near 10: sums in another order
	c := wideErf()
	c.smooth = `smooth = "steps", edge = "16 um"`
	rng := func() *rand.Rand { return rand.New(rand.NewPCG(3, 60)) }
	steps := weighed(t, c.read(t, rng()))
	c.start = `{ zones = ["free", "free"], edge = "16 um" }`
	zones := weighed(t, c.read(t, rng()))
	for i, want := range zones.Paths[0].Profiles[1].Free {
		near(t, want.Name, steps.Paths[0].Profiles[1].Free[i].Value, want.Value, solves)
		near(t, want.Name+", its error", steps.Paths[0].Profiles[1].Free[i].Sigma, want.Sigma, solves)
	}
}

// Where P would have moved itself, the path says so.
func TestTheCopiedShapeMoved(t *testing.T) {
	c := wideErf()
	s := c.read(t, nil)
	moved := func() bool {
		return strings.Contains(strings.Join(weighed(t, s).Paths[0].Profiles[1].Notes, "\n"), "K starts with the shape that P has now, but that would have moved 5.0 um: more than a fifth of 3.0 um, the width of its spline")
	}
	if moved() {
		t.Error("a P that stays is said to have moved")
	}
	s.Crystals[0].Elements[0].Law = s.Crystals[0].Elements[1].Law
	if !moved() {
		t.Error("a P with the D of K is not said to have moved")
	}
}
