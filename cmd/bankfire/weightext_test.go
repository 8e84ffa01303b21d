package main

import (
	"testing"

	"bankfire/paths"
	"bankfire/paths/study"
)

func TestLeaningText(t *testing.T) {
	of := func(list ...paths.Leaning) *paths.LawsAllowed {
		return &paths.LawsAllowed{Verdict: paths.Reproduces, Leaning: list}
	}
	for _, test := range []struct {
		name string
		l    *paths.LawsAllowed
		laws int
		want string
	}{
		{"one", of(paths.Leaning{Law: "a", Sigma: 1.84}), 1, "1.8 sigma"},
		{"of several, the furthest", of(paths.Leaning{Law: "a", Sigma: 0.1}, paths.Leaning{Law: "b", Sigma: 2.5}, paths.Leaning{Law: "c", Sigma: 2.4}), 3, "up to 2.5 sigma (b)"},
		{"of a constant", &paths.LawsAllowed{Verdict: paths.Reproduces, Leaning: []paths.Leaning{{Law: "a", Sigma: 0.1}}, Others: []paths.Off{{Deviation: study.Deviation{Of: "b", What: study.HostSlope}, Sigma: -2.5}}}, 2, "up to 2.5 sigma (composition slope of b)"},
		{"none needed", of(paths.Leaning{Law: "a"}, paths.Leaning{Law: "b", Sigma: 0.04}), 2, "0.0 sigma"},
		{"no help", of(), 2, "no error helps"},
		{"none stated", of(), 0, "no error stated"},
	} {
		if got := leaningText(test.l, test.laws); got != test.want {
			t.Errorf("%s: %q, want %q", test.name, got, test.want)
		}
	}
}
