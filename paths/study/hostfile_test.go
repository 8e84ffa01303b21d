package study

import (
	"fmt"
	"math"
	"slices"
	"strings"
	"testing"

	"bankfire/thermal"
)

// The host of EK-3 in steps: two points in the core and three in the skin, errors
// of two sigma of four analyses; the error of a median of three is sqrt(pi/2) times
// that of their mean.
func TestEveryKeyHostSteps(t *testing.T) {
	c := everyKey(t).Crystals[2]
	if !c.Hosted || c.Host != nil {
		t.Fatalf("hosted %v by %v", c.Hosted, c.Host)
	}
	core, skin := c.Zones[0], c.Zones[1]
	near(t, "core", core.Host, 0.55)
	near(t, "skin", skin.Host, 0.35)
	near(t, "error of the core", core.HostSigma, math.Sqrt(2)*0.0025/2)
	near(t, "error of the skin", skin.HostSigma, math.Sqrt(math.Pi/2)*math.Sqrt(2*0.0025*0.0025+0.005*0.005)/3)
}

// The host of EK-4 by a spline goes into the problem as it is, with the law's
// dependence on it, and into the rim.
func TestEveryKeyHostSpline(t *testing.T) {
	s := everyKey(t)
	c := &s.Crystals[3]
	if !c.Hosted || c.Host == nil {
		t.Fatalf("hosted %v by %+v", c.Hosted, c.Host)
	}
	near(t, "width", c.Host.Width, 30*um)
	if c.HostLaw == nil || c.HostLaw.Key != "mine" {
		t.Errorf("the host moves by %+v", c.HostLaw)
	}
	for i, want := range []struct{ r, x, sigma float64 }{
		{50 * um, 0.54, 0.0108}, {70 * um, 0.56, 0.0112}, {95 * um, 0.34, 0.01}, {110 * um, 0.35, 0.01}, {125 * um, 0.36, 0.01},
	} {
		near(t, "position", c.Host.Position[i], want.r)
		near(t, "value", c.Host.Value[i], want.x)
		near(t, "error", c.Host.Sigma[i], want.sigma)
	}
	e := &c.Elements[0]
	p, _, err := c.Problem(e, s.Paths[0].History)
	if err != nil {
		t.Fatal(err)
	}
	for i, times := range []float64{1, 0.5} {
		if z := p.Zones[i]; z.Host != 0 || z.Times != times {
			t.Errorf("zone %d has host %g and D times %g: the spline has all of both", i, z.Host, z.Times)
		}
	}
	for r := 0.0; r <= 130*um; r += 7 * um {
		x := c.HostAt(r)
		near(t, "host", p.Host(r), x)
		near(t, "D beside that of the law at An0", p.Spread(r), math.Pow(10, -4.1*x)) // Giletti & Casserly 1994
	}
	for name, at := range map[string][2]float64{"inside": {0, 50 * um}, "outside": {130 * um, 125 * um}} {
		near(t, "beyond the points, "+name, c.HostAt(at[0]), c.HostAt(at[1]))
	}
	const temp = 1000.0
	near(t, "rim", math.Exp(p.Outer[0].Equilibrium.LnA-p.Outer[0].Equilibrium.E/temp), 100*math.Exp((-26.8e3*c.HostAt(130*um)+26.7e3)/(thermal.GasConstant*temp)))
	lo, hi := c.HostRange(0)
	least, most := c.Factors(e)
	if !(lo < c.HostAt(85*um) && hi > 0.54 && lo > c.HostAt(95*um)) {
		t.Errorf("the host of the core is from %g to %g", lo, hi)
	}
	skinLo, skinHi := c.HostRange(1)
	near(t, "largest factor", most, max(math.Pow(10, -4.1*lo), 0.5*math.Pow(10, -4.1*skinLo)))
	near(t, "least factor", least, min(math.Pow(10, -4.1*hi), 0.5*math.Pow(10, -4.1*skinHi)))
}

// What a host that was measured cannot know is noted.
func TestHostFileNotes(t *testing.T) {
	const exact = "Q1: no error of its host is stated, so it is taken to be exact"
	for _, test := range []struct {
		name, smooth, want, not string
	}{
		{"steps without an error", `smooth = "steps"`, exact, "with an error"},
		{"steps with an error", `smooth = "steps", error = "0.02 mole fraction"`, "the median of 4 points from 0.41 to 0.56, with an error of 0.013", exact},
		{"spline without an error", `smooth = "spline", width = "60 um"`, exact, "its host is not measured"},
		{"spline", `smooth = "spline", width = "60 um", error = "2 %"`, "a spline through 7 points that averages over 60 um, also across the boundaries of zones", exact},
		{"narrow spline", `smooth = "spline", width = "25 um", error = "2 %"`, "Q1: the width of its host, 25 um, holds few points 16.3 um apart, so that their noise may show as drift", exact},
		{"far from the centre", `smooth = "spline", width = "30 um", error = "2 %"`, "Q1: its host is not measured over the innermost 20 um, where it is taken to stay as it is at the last point", "outermost"},
	} {
		t.Run(test.name, func(t *testing.T) {
			_, notes := hostedBy(t, test.smooth)
			list := strings.Join(notes, "\n")
			if !strings.Contains(list, test.want) || strings.Contains(list, test.not) {
				t.Errorf("notes %q, want %q and not %q", notes, test.want, test.not)
			}
		})
	}
}

// hostedBy reads the sound study as a plagioclase with the host of an.csv.
func hostedBy(t *testing.T, smooth string) (*Crystal, []string) {
	t.Helper()
	text := strings.NewReplacer(`, host = 0.55`, "", `, host = 0.35`, "", `shape = "slab"`, "shape = \"slab\"\nhost = "+hostFile("", `smooth = "steps"`, smooth)).Replace(hostedStudy())
	s, err := parse("s.toml", []byte(text), memory(soundFiles()))
	if err != nil {
		t.Fatal(err)
	}
	return &s.Crystals[0], s.Notes
}

// Redrawn steps have the stated errors to round-off, and none in common.
func TestRedrawnSteps(t *testing.T) {
	const roundOff = 1e-12
	c, _ := hostedBy(t, `smooth = "steps", error = "0.02 mole fraction"`)
	var square [2][2]float64
	draws := c.Redrawn()
	for _, drawn := range draws {
		for i := range 2 {
			for j := range 2 {
				square[i][j] += (drawn.Zones[i].Host - c.Zones[i].Host) * (drawn.Zones[j].Host - c.Zones[j].Host) / float64(len(draws))
			}
		}
	}
	for i := range 2 {
		for j := range 2 {
			want := 0.0
			if i == j {
				want = c.Zones[i].HostSigma * c.Zones[i].HostSigma
			}
			if !(math.Abs(square[i][j]-want) <= roundOff) {
				t.Errorf("covariance of zones %d and %d is %g, want %g", i, j, square[i][j], want)
			}
		}
	}
}

// evenHost is a level host of 201 points with errors.
func evenHost(spacing, width, sigma float64) *Crystal {
	var at, value, sigmas []float64
	for i := range 201 {
		at, value, sigmas = append(at, float64(i)*spacing), append(value, 0.5), append(sigmas, sigma)
	}
	return &Crystal{Name: "Q1", Zones: []Zone{{Width: 200 * spacing}}, Host: NewHost(at, value, sigmas, width)}
}

// spread is the variance of the draws of a level host at r.
func spread(draws []*Crystal, r float64) float64 {
	sum := 0.0
	for _, drawn := range draws {
		sum += math.Pow(drawn.HostAt(r)-0.5, 2) / float64(len(draws))
	}
	return sum
}

// A redrawn spline scatters by what the kernel leaves of the errors, sigma^2 times
// the spacing times 3/(8 sqrt 2)/h (see traverse.TestSmoothNoise), wherever no end is
// near.
func TestRedrawnSpline(t *testing.T) {
	const (
		sigma, spacing, width = 0.02, 1 * um, 15.9 * um
		leaves                = 0.01 // what the modes may leave out
		h                     = width / 2.866557563380696
		want                  = sigma * sigma * spacing * 3 / (8 * math.Sqrt2) / h
	)
	c := evenHost(spacing, width, sigma)
	all := c.Redrawn()
	for r := 60 * um; r < 140*um; r += 0.7 * um {
		if got := spread(all, r); !(math.Abs(got/want-1) <= leaves) {
			t.Errorf("%d draws have a variance of %g at %g um, want %g", len(all), got, r/um, want)
		}
	}
	if _, left := c.modes(); left != 0 {
		t.Errorf("%g of the variance is left out of %d draws", left, len(all))
	}
	if again := c.Redrawn(); !slices.Equal(again[7].Host.Value, all[7].Host.Value) || slices.Equal(all[7].Host.Value, all[8].Host.Value) {
		t.Error("draw 7 is not the same again, or draw 8 is like it")
	}
	c.Host.Sigma = nil
	if got := c.Redrawn(); len(got) != 0 {
		t.Errorf("a host without errors was redrawn %d times", len(got))
	}
}

// Of a spline too narrow for the most that are drawn, what the draws leave out is what
// is said: the whole is the sum over the points of what the error of each makes of it.
func TestRedrawnNarrowSpline(t *testing.T) {
	const sigma, spacing, narrow, roundOff = 0.02, 1 * um, 4 * um, 1e-9
	c := evenHost(spacing, narrow, sigma)
	at := c.Host.Position
	whole := make([]float64, len(at))
	for j := range at {
		spike := make([]float64, len(at))
		spike[j] = sigma
		h := NewHost(at, spike, nil, narrow)
		for i, r := range at {
			whole[i] += h.At(r) * h.At(r)
		}
	}
	_, left := c.modes()
	draws, worst := c.Redrawn(), 0.0
	for i, r := range at {
		worst = max(worst, 1-spread(draws, r)/whole[i])
	}
	if len(draws) != mostRedrawn || !(left > 0.1) || !(math.Abs(left-worst) <= roundOff) {
		t.Errorf("%d draws leave out %g, said to be %g", len(draws), worst, left)
	}
}

// A host given by hand may have an error, which is drawn like that of a file.
func TestHostByHandWithError(t *testing.T) {
	text := strings.Replace(hostedStudy(), "host = 0.55", `host = "0.55 +- 0.02"`, 1)
	s, err := parse("s.toml", []byte(text), memory(soundFiles()))
	if err != nil {
		t.Fatal(err)
	}
	c := &s.Crystals[0]
	near(t, "host", c.Zones[0].Host, 0.55)
	near(t, "its error", c.Zones[0].HostSigma, 0.02)
	if got, want := c.HostText(0)+", "+c.HostText(1), "0.55 +- 0.02, 0.35"; got != want {
		t.Errorf("hosts %q, want %q", got, want)
	}
	if draws := c.Redrawn(); len(draws) != 1 || !(math.Abs(math.Abs(draws[0].Zones[0].Host-0.55)-0.02) <= 1e-12) {
		t.Errorf("%d draws, want one that is off by the error", len(draws))
	}
}

// A spline too narrow to be redrawn as it is says so.
func TestNarrowSplineNoted(t *testing.T) {
	var lines strings.Builder
	lines.WriteString("x [um],XAn [mole fraction]\n")
	for i := range 200 {
		fmt.Fprintf(&lines, "%g,%g\n", 0.3+0.6*float64(i), 0.5)
	}
	files := soundFiles()
	files["an.csv"] = lines.String()
	text := strings.NewReplacer(`, host = 0.55`, "", `, host = 0.35`, "", `shape = "slab"`, "shape = \"slab\"\nhost = "+
		hostFile("", `smooth = "steps"`, `smooth = "spline", width = "2 um", error = "0.02 mole fraction"`)).Replace(hostedStudy())
	s, err := parse("s.toml", []byte(text), memory(files))
	if err != nil {
		t.Fatal(err)
	}
	const want = "Q1: its host is redrawn 64 times, too few for a spline so narrow: up to"
	if !slices.ContainsFunc(s.Notes, func(n string) bool { return strings.HasPrefix(n, want) }) {
		t.Errorf("notes %q", s.Notes)
	}
}
