package paths

import (
	"math"
	"strings"
	"testing"

	"bankfire/diffusion"
	"bankfire/diffusion/catalogue"
	"bankfire/paths/study"
)

// A face that the model does not have matters to a slab and to the ends of a
// cylinder, once diffusion has gone a fifth of the modelled size; a ball is all
// there is.
func TestReachNotes(t *testing.T) {
	crystal := func(shape diffusion.Shape) *study.Crystal {
		return &study.Crystal{Shape: shape, Zones: []study.Zone{{Width: 140 * um}, {Width: 60 * um}}}
	}
	core := crystal(diffusion.Slab)
	core.R0 = 100 * um
	for _, test := range []struct {
		name    string
		crystal *study.Crystal
		gone    float64 // um
		want    string
	}{
		{"a slab", crystal(diffusion.Slab), 76,
			"diffusion has gone 76 um, 38 % of the 200 um that are modelled; if another face of the crystal is nearer to the traverse than 380 um, one dimension is not enough"},
		{"a cylinder", crystal(diffusion.Cylinder), 400,
			"diffusion has gone 400 um, 200 % of the 200 um that are modelled; if an end of the cylinder is nearer to the traverse than 2.0 mm, one dimension is not enough"},
		{"a ball", crystal(diffusion.Ball), 400, ""},
		{"a piece of a slab", core, 44,
			"diffusion has gone 44 um, 22 % of the 200 um that are modelled; if another face of the crystal is nearer to the traverse than 220 um, one dimension is not enough"},
		{"not so far", crystal(diffusion.Slab), 39.9, ""},
	} {
		t.Run(test.name, func(t *testing.T) {
			if got := strings.Join(reachNotes(test.crystal, math.Log(square(test.gone*um)/2)), "; "); got != test.want {
				t.Errorf("got %q, want %q", got, test.want)
			}
		})
	}
}

// Every caution of a law of the catalogue stands beside the verdict, and what the data do
// not see or see as negative is said.
func TestNotesOfAProfile(t *testing.T) {
	row := &catalogue.Row{Tag: catalogue.Multicomponent} // and not checked against its paper
	if n := len(row.Cautions()); n != 2 {
		t.Fatalf("%d cautions, want 2: %q", n, row.Cautions())
	}
	p := sharp()
	path := p.path(t, "as it was", 1)
	r := weighed(t, p.study(nil, path)).Paths[0].Profiles[0]
	element := *r.Element
	element.Law.Row = row
	r.Element = &element
	r.NumErr = 0.4
	r.Free = []FreeFit{{Name: "core", Value: 40, Sigma: math.Inf(1)}, {Name: "mantle", AtEnd: true, Unit: element.Unit}}
	r.LnG = math.Log(square(r.Crystal.Size()))
	notes := strings.Join(r.notes(&path), "\n")
	for _, want := range append(row.Cautions(), "the data do not see core", "the fit would have mantle below zero",
		"numerical error reaches 0.4 sigma", "diffusion has gone 170 um, 141 % of the 120 um") {
		if !strings.Contains(notes, want) {
			t.Errorf("notes\n%s\nlack %q", notes, want)
		}
	}
}

// Two minima that agree about equally well are told apart from one, and why
// nothing is judged is said.
func TestNotesOfAnOutcome(t *testing.T) {
	c, _ := scanned(t, func(x float64) float64 { return 10 + well(500, -3)(x) + well(501, 4)(x) })
	var o Outcome
	Judge(&o, []Curve{c}, nil, 0.95)
	if notes := strings.Join(o.Notes(), "\n"); o.Ranges != 2 || !strings.Contains(notes, "2 separate amounts of diffusion") {
		t.Errorf("%d ranges, notes %q", o.Ranges, notes)
	}
	Judge(&o, []Curve{bowl(19, 0, 1, 22, 2)}, nil, 0.95)
	if notes := o.Notes(); len(notes) > 0 {
		t.Errorf("one range, notes %q", notes)
	}
	Judge(&o, []Curve{bowl(0, 0, 1, 2, 2)}, nil, 0.95)
	if notes := strings.Join(o.Notes(), "\n"); !strings.Contains(notes, "no degrees of freedom are left") {
		t.Errorf("no degrees, notes %q", notes)
	}
}
