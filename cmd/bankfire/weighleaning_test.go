package main

import (
	"bytes"
	"testing"

	"bankfire/paths"
	"bankfire/paths/study"
)

func TestLeaningInASentence(t *testing.T) {
	list := []paths.Leaning{{Law: "a", Sigma: 0.5, LnD: 0.5}, {Law: "b", Sigma: 1.3, LnD: -1.2, E: 0.5}}
	for _, test := range []struct {
		name    string
		verdict paths.Verdict
		with    paths.LawsAllowed
		laws    int
		want    string
	}{
		{"several", paths.AtOdds, paths.LawsAllowed{Verdict: paths.Reproduces, Leaning: list}, 2,
			"With the errors of the laws allowed for, \"p\" reproduces what was measured: it asks for b to be off by 1.3 sigma (D smaller by 1.2, E larger by 0.5) and no other by more, in all 1.4 sigma.\n"},
		{"too far", paths.TooSharp, paths.LawsAllowed{Verdict: paths.TooSharp, Leaning: []paths.Leaning{{Law: "a", Sigma: 5, LnD: 5}}}, 1,
			"For \"p\" to pass, laws would have to be off by more than their errors allow: it asks for a to be off by 5.0 sigma (D larger by 5.0).\n"},
		{"a law without a name", paths.TooSharp, paths.LawsAllowed{Verdict: paths.TooSharp, Leaning: []paths.Leaning{{Sigma: 5, E: -5}}}, 1,
			"For \"p\" to pass, laws would have to be off by more than their errors allow: it asks for the law in the study to be off by 5.0 sigma (E smaller by 5.0).\n"},
		{"a constant alone", paths.AtOdds, paths.LawsAllowed{Verdict: paths.Reproduces, Leaning: []paths.Leaning{}, Others: []paths.Off{{Deviation: study.Deviation{Of: "c", What: study.HostSlope}, Sigma: -1.84}}}, 1,
			"With the errors of the laws allowed for, \"p\" reproduces what was measured: it asks for the composition slope of c to be smaller by 1.8 sigma.\n"},
		{"laws and constants", paths.AtOdds, paths.LawsAllowed{Verdict: paths.AtOdds, Leaning: list, Others: []paths.Off{
			{Deviation: study.Deviation{Of: "kx", What: study.PartitionA}, Sigma: 2}, {Deviation: study.Deviation{Of: "kx", What: study.PartitionB}, Sigma: 0.01}}}, 4,
			"For \"p\" to pass, laws would have to be off by more than their errors allow: it asks for A of kx to be larger by 2.0 sigma, b to be off by 1.3 sigma (D smaller by 1.2, E larger by 0.5) and a to be off by 0.5 sigma (D larger by 0.5), in all 2.4 sigma.\n"},
		{"none helps", paths.WrongShape, paths.LawsAllowed{Verdict: paths.WrongShape}, 1, "No error of the laws would make \"p\" pass.\n"},
		{"no error stated", paths.WrongShape, paths.LawsAllowed{Verdict: paths.WrongShape, Leaning: []paths.Leaning{}}, 0, ""},
		{"barred", paths.Barred, paths.LawsAllowed{}, 1, ""},
		{"not judged", paths.Unjudged, paths.LawsAllowed{}, 1, ""},
	} {
		t.Run(test.name, func(t *testing.T) {
			p := &paths.PathResult{Path: &study.Path{Name: "p"}}
			p.Outcome.Verdict, p.Outcome.WithLaws = test.verdict, test.with
			var got bytes.Buffer
			if writeLeaning(&got, p, test.laws); got.String() != test.want {
				t.Errorf("got %q, want %q", got.String(), test.want)
			}
		})
	}
}
