package paths

import (
	"math"
	"strings"
	"testing"

	"bankfire/diffusion/catalogue"
	"bankfire/paths/study"
	"bankfire/thermal"
)

func TestOutOfRange(t *testing.T) {
	celsius := func(temp float64) float64 { return temp + thermal.ZeroCelsius }
	known := study.Law{Key: "mine", TMin: celsius(700), TMax: celsius(1150)}
	for _, test := range []struct {
		name   string
		law    study.Law
		lo, hi float64 // C
		want   string
	}{
		{"inside", known, 700, 1150, ""},
		{"at its ends but for round-off", known, 699.9999, 1150.0001, ""},
		{"below", known, 650, 760, "mine is used up to 50 C below its calibrated range of 700 to 1150 C"},
		{"above", known, 700, 1200, "mine is used up to 50 C above its calibrated range of 700 to 1150 C"},
		{"on both sides", known, 640, 1151, "mine is used up to 60 C below and 1 C above its calibrated range of 700 to 1150 C"},
		{"without a name", study.Law{TMin: celsius(700), TMax: celsius(1150)}, 600, 800,
			"the law is used up to 100 C below its calibrated range of 700 to 1150 C"},
		{"range not known", study.Law{Key: "mine"}, 20, 3000, ""},
	} {
		t.Run(test.name, func(t *testing.T) {
			got := strings.Join(outOfRange(&test.law, celsius(test.lo), celsius(test.hi)), "; ")
			if got != test.want {
				t.Errorf("got %q, want %q", got, test.want)
			}
		})
	}
}

// Every caution of the catalogue stands beside the verdict, and what the data do
// not see or see as negative is said.
func TestNotesOfAProfile(t *testing.T) {
	row := cautious(t)
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
		"numerical error reaches 0.4 sigma", "diffusion has reached 141 %") {
		if !strings.Contains(notes, want) {
			t.Errorf("notes\n%s\nlack %q", notes, want)
		}
	}
}

// cautious is a law of the catalogue that calls for caution.
func cautious(t *testing.T) *catalogue.Row {
	t.Helper()
	for _, row := range catalogue.All() {
		if len(row.Cautions()) > 1 {
			return &row
		}
	}
	t.Skip("no law of the catalogue has two cautions")
	return nil
}

// Two minima that agree about equally well are told apart from one.
func TestNotesOfAnOutcome(t *testing.T) {
	c, _ := scanned(t, func(x float64) float64 { return 10 + well(500, -3)(x) + well(501, 4)(x) })
	var o Outcome
	Judge(&o, []Curve{c}, nil, 0.95)
	if notes := strings.Join(o.notes(), "\n"); o.Ranges != 2 || !strings.Contains(notes, "2 separate amounts of diffusion") {
		t.Errorf("%d ranges, notes %q", o.Ranges, notes)
	}
	Judge(&o, []Curve{bowl(19, 0, 1, 22, 2)}, nil, 0.95)
	if notes := o.notes(); len(notes) > 0 {
		t.Errorf("one range, notes %q", notes)
	}
}
