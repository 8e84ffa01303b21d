package paths

import (
	"math"
	"testing"

	"bankfire/diffusion"
	"bankfire/paths/study"
)

// greyStudy is three zones of 40, 90 and 60 ppm, of which the middle one is to
// be found, measured on their plateaux alone as 20 + 1.5 ppm in grey levels.
func greyStudy(t *testing.T) *study.Study {
	t.Helper()
	p := couple{reach: um, sigma: 1.5}
	s := p.study(nil, p.path(t, "as it was", 1))
	c := &s.Crystals[0]
	c.Zones = []study.Zone{{Name: "core", Width: 60 * um, Times: 1}, {Name: "mantle", Width: 40 * um, Times: 1}, {Name: "skin", Width: 40 * um, Times: 1}}
	e := &c.Elements[0]
	e.Start.Zones = []study.Plateau{{Value: 40}, {Free: true}, {Value: 60}}
	e.Rims = []study.Rim{{Kind: diffusion.Held, Zone: 2}}
	line := e.Traverse
	line.Unit, line.Grey = "grey", true
	for zone, middle := range []float64{40 * um, 80 * um, 120 * um} {
		for i := range 5 + 5*zone {
			line.Position = append(line.Position, middle+float64(i)*um)
			line.Value = append(line.Value, 20+1.5*[]float64{40, 90, 60}[zone])
			line.Sigma = append(line.Sigma, p.sigma)
			line.Line = append(line.Line, len(line.Line)+2)
		}
	}
	return s
}

// A plateau found from relative values is one in the element's unit, and its
// error holds those of scale and offset. With means y1, y2, y3 of the plateaux
//
//	v = 40 + 20 (y2 - y1)/(y3 - y1),
//
// whose derivatives at 40, 90 and 60 ppm are 1.5, 1 and -2.5, over the scale.
func TestWeighOfGreyLevels(t *testing.T) {
	s := greyStudy(t)
	q := &weighed(t, s).Paths[0].Profiles[0]
	const scale, sigma = 1.5, 1.5
	want := sigma / scale * math.Sqrt(1.5*1.5/5+1.0/10+2.5*2.5/15)
	f := q.Free[0]
	near(t, f.Name, f.Value, 90, 1e-3*want)
	near(t, "its error", f.Sigma, want, 1e-3*want)
	if f.Unit != "ppm" || len(q.Free) != 3 {
		t.Errorf("%+v, want the mantle in ppm, a scale and an offset", q.Free)
	}
	near(t, q.Free[1].Name, q.Free[1].Value, scale, 1e-4)
	near(t, q.Free[2].Name, q.Free[2].Value, 20, 1e-2)
	near(t, "what was seen of the mantle", q.Seen[7], 20+scale*90, 1e-2)
}

// What is told of a path measured in grey levels is told in the element's unit.
func TestFollowOfGreyLevels(t *testing.T) {
	s := greyStudy(t)
	c, err := Follow(t.Context(), s, &s.Paths[0], []float64{0})
	if err != nil {
		t.Fatal(err)
	}
	e := &c.Elements[0]
	for i, r := range e.Centres {
		if math.Abs(r-80*um) < 5*um {
			near(t, "start", e.Start[i], 90, 1e-2)
			near(t, "end", e.Final[i], 90, 1e-2)
			near(t, "snapshot", e.Snapshots[0].Value[i], 90, 1e-2)
		}
	}
	near(t, "fitted mantle", e.Free[0].Value, 90, 1e-2)
}
