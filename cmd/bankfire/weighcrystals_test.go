package main

import (
	"bytes"
	"math"
	"strings"
	"testing"

	"bankfire/paths"
	"bankfire/paths/study"
	"bankfire/thermal"
)

// twoPaths is the small result with its path under two names.
func twoPaths(t *testing.T) *paths.Result {
	r := smallResult(t)
	second, path := r.Paths[0], *r.Paths[0].Path
	path.Name = "cool"
	second.Path = &path
	r.Paths = append(r.Paths, second)
	return r
}

// TestScatterSentence: along which paths the amounts scatter, along which not, and
// nothing where there are too few.
func TestScatterSentence(t *testing.T) {
	scatter := func(tail float64) paths.Scatter {
		if tail == 0 {
			return paths.Scatter{Crystals: 2, Tail: math.NaN()}
		}
		return paths.Scatter{Crystals: 4, Degrees: 3, Tail: tail}
	}
	for _, test := range []struct {
		first, second float64
		want          string
	}{
		{0, 0, ""},
		{0.003, 0.0004, `The four crystals' amounts of diffusion scatter more than their errors along "warm" (tail 0.003) and "cool" (tail < 0.001).` + "\n"},
		{0.003, 0.4, `The four crystals' amounts of diffusion scatter more than their errors along "warm" (tail 0.003), not along "cool" (tail 0.4).` + "\n"},
		{0.2, 0, `The four crystals' amounts of diffusion agree within their errors along "warm" (tail 0.2).` + "\n"},
	} {
		r := twoPaths(t)
		r.Paths[0].Outcome.Scatter, r.Paths[1].Outcome.Scatter = scatter(test.first), scatter(test.second)
		var text bytes.Buffer
		if writeScatter(&text, r); text.String() != test.want {
			t.Errorf("tails %g and %g: got %q, want %q", test.first, test.second, text.String(), test.want)
		}
	}
	r := twoPaths(t)
	other := *r.Own[0].Element
	other.Law.Key = "another"
	r.Own = append(r.Own, paths.OwnBest{Element: &other})
	r.Paths[0].Outcome.Scatter = scatter(0.003)
	var text bytes.Buffer
	if writeScatter(&text, r); !strings.HasSuffix(text.String(), "; the errors of their laws are not counted.\n") {
		t.Errorf("of two laws: %q", text.String())
	}
}

// TestChanceSentence: one failure among twenty is not read into, unless it is a bad
// one.
func TestChanceSentence(t *testing.T) {
	const all = "Along a path that is true, 1 of 20 crystals fails by chance on average, at 95 % confidence, and no more than 3 in 95 of 100 studies.\n"
	for _, test := range []struct {
		failed int
		worst  float64
		want   string
	}{
		{0, 0.9, all},
		{1, 0.5, all + "Along \"warm\" 1 of 20 crystals fails, which chance may have done.\n"},
		{3, 0.06, all + "Along \"warm\" 3 of 20 crystals fail, which chance may have done.\n"},
		{1, 1e-6, all}, {4, 0.5, all},
	} {
		r := smallResult(t)
		r.Paths[0].Outcome.Chance = paths.Chance{Judged: 20, Failed: test.failed, Expected: 1, Most: 3, Worst: test.worst}
		var text bytes.Buffer
		if writeChance(&text, r); text.String() != test.want {
			t.Errorf("%d failed, worst %g: got %q, want %q", test.failed, test.worst, text.String(), test.want)
		}
	}
	var text bytes.Buffer
	if writeChance(&text, smallResult(t)); text.Len() > 0 {
		t.Errorf("of one crystal: %q", text.String())
	}
}

// TestGroupSentences: what else would do, what is barred, and that nothing fits.
func TestGroupSentences(t *testing.T) {
	r := twoPaths(t)
	r.Study.Sharing.From = &thermal.Moment{Text: "start of wake"}
	warm, cool := r.Paths[0].Path, r.Paths[1].Path
	good := paths.Outcome{Finding: paths.Finding{Verdict: paths.Reproduces, Misfit: 10, Degrees: 12, Tail: 0.6}}
	bad := paths.Outcome{Finding: paths.Finding{Verdict: paths.TooSharp, Misfit: 50, Degrees: 12, Tail: 1e-6}}
	both := []*study.Path{warm, cool}
	for _, test := range []struct {
		name  string
		group paths.Group
		want  string
	}{
		{"another would do", paths.Group{Paths: both, Choices: []paths.Choice{{Path: warm, Of: 2, Also: []*study.Path{cool}}}, Outcome: good},
			`"warm" and "cool" are the same from "start of wake" on. The best of 2 combinations, "warm" for HF-1, reproduces what was measured (chi-square 10/12, tail 0.6).` + "\n" +
				`Instead of these it may be, one at a time, "cool" for HF-1.` + "\n"},
		{"none does", paths.Group{Paths: both, Choices: []paths.Choice{{Path: cool, Of: 2}}, Outcome: bad},
			`"warm" and "cool" are the same from "start of wake" on. The best of 2 combinations, "cool" for HF-1, is too sharp (chi-square 50/12, tail < 0.001).` + "\n" +
				"No paths that end alike reproduce all crystals.\n"},
		{"all are barred", paths.Group{Paths: both, Choices: []paths.Choice{{}}, Outcome: paths.Outcome{Finding: barredFinding()}},
			`"warm" and "cool" are the same from "start of wake" on. HF-1 bars all of them.` + "\n" + "No paths that end alike reproduce all crystals.\n"},
		{"one alone", paths.Group{Paths: both[:1], Choices: []paths.Choice{{Path: warm, Of: 1}}, Outcome: good},
			`"warm" ends like no other path. For all crystals, it reproduces what was measured (chi-square 10/12, tail 0.6).` + "\n"},
	} {
		t.Run(test.name, func(t *testing.T) {
			r.Groups = []paths.Group{test.group}
			var text bytes.Buffer
			if writeGroups(&text, r); text.String() != test.want {
				t.Errorf("got\n%swant\n%s", text.String(), test.want)
			}
		})
	}
}
