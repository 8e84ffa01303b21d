package paths

import (
	"strings"
	"testing"

	"bankfire/diffusion"
	"bankfire/paths/study"
	"bankfire/thermal"
)

// TestBoundaryNotes: along holds of 700 and 800 C the boundary that saw the latter alone
// had 800 C all of its time, and the one that saw both something between.
func TestBoundaryNotes(t *testing.T) {
	h := new(thermal.History)
	if err := thermal.Build(h, []thermal.Spec{
		{Kind: thermal.SpecHold, Temp: 973.15, For: 30 * thermal.Year},
		{Kind: thermal.SpecHold, Temp: 1073.15, For: 10 * thermal.Year},
	}); err != nil {
		t.Fatal(err)
	}
	c := &study.Crystal{Name: "Q", Zones: []study.Zone{
		{Name: "core", Width: 1e-4}, {Name: "mantle", Width: 1e-5},
		{Name: "skin", Width: 1e-5, Added: &thermal.Moment{Offset: 30 * thermal.Year}},
	}}
	e := &study.Element{Law: study.Law{Law: diffusion.NewLaw(7.01e-8, 273e3)}}
	notes := boundaryNotes(c, e, h)
	// D is 23.2 times larger at 800 than at 700 C: its mean over 40 yr is what it is at 757.4 C.
	want := []string{
		"the boundary of core and mantle existed for 40 yr, in which 757 C throughout",
		"the boundary of mantle and skin existed for 10 yr, in which 800 C throughout",
	}
	if len(notes) != len(want) {
		t.Fatalf("notes %q", notes)
	}
	for i := range want {
		if !strings.HasPrefix(notes[i], want[i]) {
			t.Errorf("%q, want %q", notes[i], want[i])
		}
	}
}
