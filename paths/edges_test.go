package paths

import (
	"fmt"
	"math"
	"strings"
	"testing"

	"bankfire/diffusion"
	"bankfire/paths/study"
	"bankfire/paths/traverse"
)

// Between the edge widths that are solved for, the start is foretold to a tenth
// of the errors, whatever the range and the spot: judged against starts of other
// widths, compiled for themselves.
func TestFreeEdgesAreForetold(t *testing.T) {
	for _, test := range []struct{ upTo, spot float64 }{{2 * um, 0.34 * um}, {2 * um, 0}, {6 * um, 0.34 * um}, {12 * um, 0.34 * um}} {
		t.Run(fmt.Sprintf("upTo=%gum/spot=%gum", test.upTo/um, test.spot/um), func(t *testing.T) {
			c := sharp()
			c.spot = test.spot
			s := c.study(nil, c.path(t, "as it was", 1))
			crystal := &s.Crystals[0]
			e := &crystal.Elements[0]
			e.Start.Edge = study.Nuisance{Lo: 0, Hi: test.upTo}
			p, err := newProfile(&element{crystal: crystal, element: e}, &s.Paths[0], 0)
			if err != nil {
				t.Fatal(err)
			}
			problem, _, err := crystal.Problem(e, s.Paths[0].History)
			if err != nil {
				t.Fatal(err)
			}
			for _, part := range []float64{0.03, 0.2, 0.41, 0.77} {
				edge := part * test.upTo
				plan, err := diffusion.Compile(withEdges(problem, []float64{edge}), diffusion.Options{Faces: p.plan().Faces()})
				if err != nil {
					t.Fatal(err)
				}
				mixed := p.mix(p.starts(), []float64{edge})
				for j := 1; j < len(mixed); j++ {
					seen, exact := p.lens.through(mixed[j], 0, 0), p.lens.through(plan.Start(j), 0, 0)
					for i := range seen {
						if miss := (c.mantle - c.core) / c.sigma * math.Abs(seen[i]-exact[i]); !(miss <= 0.15) {
							t.Fatalf("edge of %g um: point %d is missed by %.2g sigma between %d widths", edge/um, i, miss, len(p.runs))
						}
					}
				}
			}
		})
	}
}

// Spots as wide as their spacing touch and share nothing, whatever the last bits of
// the positions say: 16.8 um and 24.8 um differ by a little less than 8 um.
func TestTouchingSpotsDoNotOverlap(t *testing.T) {
	for _, first := range []float64{20, 16.8, 0.3} {
		for width, want := range map[float64]bool{8: false, 8.1: true} {
			line := &traverse.Traverse{Spot: traverse.Spot{Kind: traverse.TopHat, Width: width * um}}
			for i := range 40 {
				line.Position = append(line.Position, (first+8*float64(i))*1e-6)
			}
			if got := overlapping(line); got != want {
				t.Errorf("spots of %g um every 8 um from %g um: overlapping %t, want %t", width, first, got, want)
			}
		}
	}
}

// Too many points with overlapping spots are refused with a way out.
func TestOverlapIsBounded(t *testing.T) {
	c := sharp()
	s := c.study(nil, c.path(t, "as it was", 1))
	e := &s.Crystals[0].Elements[0]
	line := *e.Traverse
	line.Independent, line.Spot = false, traverse.Spot{Kind: traverse.Gaussian, Width: 1 * um}
	line.Position = make([]float64, mostOverlapping+1)
	for i := range line.Position {
		line.Position[i] = float64(i) * 0.01 * um
	}
	e.Traverse = &line
	if _, err := overlapWhite(e); err == nil || !strings.Contains(err.Error(), `overlap = "independent"`) {
		t.Errorf("got %v", err)
	}
}
