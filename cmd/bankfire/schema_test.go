package main

import (
	"bytes"
	"encoding/json"
	"maps"
	"math"
	"os"
	"slices"
	"testing"

	"github.com/google/jsonschema-go/jsonschema"

	"bankfire/paths"
	"bankfire/paths/study"
	"bankfire/thermal"
)

// readSchema reads the committed schema.
func readSchema(t *testing.T) *jsonschema.Schema {
	t.Helper()
	text, err := os.ReadFile("summary.schema.json")
	if err != nil {
		t.Fatal(err)
	}
	var s jsonschema.Schema
	if err := json.Unmarshal(text, &s); err != nil {
		t.Fatal(err)
	}
	return &s
}

func resolve(t *testing.T, s *jsonschema.Schema) *jsonschema.Resolved {
	t.Helper()
	resolved, err := s.Resolve(nil)
	if err != nil {
		t.Fatal(err)
	}
	return resolved
}

// asJSON is the summary as another program reads it.
func asJSON(t *testing.T, w *weighing) map[string]any {
	t.Helper()
	var text bytes.Buffer
	if err := writeJSON(&text, w); err != nil {
		t.Fatal(err)
	}
	var out map[string]any
	if err := json.Unmarshal(text.Bytes(), &out); err != nil {
		t.Fatal(err)
	}
	return out
}

// TestSummaryKeepsSchema checks summaries, at the limits of what they may hold, against
// the schema.
func TestSummaryKeepsSchema(t *testing.T) {
	schema := resolve(t, readSchema(t))
	inf := math.Inf(1)
	for _, test := range []struct {
		name   string
		change func(r *paths.Result)
	}{
		{"as it is", func(*paths.Result) {}},
		{"open intervals", func(r *paths.Result) {
			o := &r.Paths[0].Outcome
			o.Shift68, o.Shift95, o.Profiles[0].Shift68 = [2]float64{0, 3}, [2]float64{0.3, inf}, [2]float64{0, inf}
		}},
		{"nothing diffuses", func(r *paths.Result) { r.Paths[0].Profiles[0].LnG, r.Paths[0].Profiles[0].StandIn = -inf, 0 }},
		{"a value unseen", func(r *paths.Result) { r.Paths[0].Profiles[0].Free[0].Sigma = inf }},
		{"nothing free", func(r *paths.Result) { r.Paths[0].Profiles[0].Free = nil }},
		{"notes", func(r *paths.Result) {
			r.Study.Notes, r.Paths[0].Notes, r.Paths[0].Profiles[0].Notes = []string{"a"}, []string{"b"}, []string{"c"}
		}},
		{"thresholds", func(r *paths.Result) {
			r.Study.Thresholds, r.Paths[0].Above = []study.Threshold{{Name: "lock-up", Temp: 1000}}, []float64{0}
		}},
		{"scatter and chance", func(r *paths.Result) {
			o := &r.Paths[0].Outcome
			o.Scatter = paths.Scatter{Crystals: 3, Common: 1.2, Common68: [2]float64{1, 1.4}, Common95: [2]float64{0, 2}, ChiSq: 2.5, Degrees: 2, Tail: 0.3}
			o.Chance = paths.Chance{Judged: 3, Failed: 1, Expected: 0.15, Most: 1, Worst: 0.02}
		}},
		{"leaning on constants", func(r *paths.Result) {
			for _, what := range []study.Constant{study.HostSlope, study.OwnSlope, study.PartitionA, study.PartitionB} {
				l := &r.Paths[0].Outcome.WithLaws
				l.Others = append(l.Others, paths.Off{Deviation: study.Deviation{Of: "kx", What: what}, Sigma: -1.5})
			}
		}},
		{"each its own history", func(r *paths.Result) { r.Study.Sharing.Each = true }},
		{"histories shared from a moment", func(r *paths.Result) {
			p := &r.Paths[0]
			r.Study.Sharing.From = &thermal.Moment{Text: "1 yr after start"}
			r.Groups = []paths.Group{
				{Paths: []*study.Path{p.Path}, Choices: []paths.Choice{{Path: p.Path, Of: 1, Also: []*study.Path{p.Path}}}, Outcome: p.Outcome},
				{Paths: []*study.Path{p.Path}, Choices: []paths.Choice{{}}, Outcome: paths.Outcome{Finding: barredFinding()}},
			}
		}},
		{"barred by one crystal", func(r *paths.Result) {
			p := &r.Paths[0]
			p.Outcome.Finding, p.Barred = barredFinding(), []study.Bar{{Crystal: "HF-1", Why: "it was not there"}}
			p.Outcome.Crystals[0], p.Outcome.Profiles[0] = barredFinding(), barredFinding()
			p.Profiles[0] = paths.ProfileResult{Crystal: p.Profiles[0].Crystal, Element: p.Profiles[0].Element}
		}},
		{"nothing but one path that was not run", notRun},
		{"no degrees left", func(r *paths.Result) {
			o := &r.Paths[0].Outcome
			o.Verdict, o.Tail, o.Points, o.Degrees = paths.Unjudged, math.NaN(), 0, -2
			o.Profiles[0], o.Crystals[0] = o.Finding, o.Finding
			o.WithLaws = paths.LawsAllowed{Verdict: paths.Unjudged, Tail: math.NaN(), Misfit: math.NaN()}
		}},
		{"at odds, with an open end", func(r *paths.Result) {
			o := &r.Paths[0].Outcome
			o.Verdict = paths.AtOdds
			o.Odds = []paths.Demand{{Ratio: 5, Ratio68: [2]float64{2, math.Inf(1)}, Ratio95: [2]float64{0, math.Inf(1)}, ChiSq: 30}}
		}},
		{"every verdict of now", func(r *paths.Result) {
			p := &r.Paths[0]
			for _, v := range []paths.Verdict{paths.TooSharp, paths.TooSmooth, paths.WrongShape} {
				q := *p
				q.Outcome.Verdict = v
				r.Paths = append(r.Paths, q)
			}
		}},
	} {
		t.Run(test.name, func(t *testing.T) {
			r := smallResult(t)
			test.change(r)
			w := summarise(r, thisProgram())
			if err := schema.Validate(asJSON(t, w)); err != nil {
				t.Errorf("without files: %v", err)
			}
			weighingFiles(t.Context(), r, nil, w, &runLog{})
			if err := schema.Validate(asJSON(t, w)); err != nil {
				t.Errorf("with files: %v", err)
			}
		})
	}
}

// barredFinding is that of a path that was not run.
func barredFinding() paths.Finding {
	nan := math.NaN()
	return paths.Finding{Verdict: paths.Barred, Shift: nan, Shift68: [2]float64{nan, nan}, Shift95: [2]float64{nan, nan}, Tail: nan, Misfit: nan, Above: nan}
}

// TestSchemaRefuses sees that the schema finds what is wrong.
func TestSchemaRefuses(t *testing.T) {
	schema := resolve(t, readSchema(t))
	for _, test := range []struct {
		name   string
		change func(summary, path, profile map[string]any)
	}{
		{"field too many", func(s, _, _ map[string]any) { s["host"] = "x" }},
		{"field too many in a path", func(_, p, _ map[string]any) { p["colour"] = "red" }},
		{"field too many in a profile", func(_, _, q map[string]any) { q["colour"] = "red" }},
		{"field missing", func(s, _, _ map[string]any) { delete(s, "families") }},
		{"field missing in a path", func(_, p, _ map[string]any) { delete(p, "tail") }},
		{"field missing in a profile", func(_, _, q map[string]any) { delete(q, "unit"); delete(q, "crystal") }},
		{"number as text", func(_, p, _ map[string]any) { p["misfit"] = "3" }},
		{"number null though the path was run", func(_, p, _ map[string]any) { p["shift_factor"] = nil }},
		{"tail null though the path was judged", func(_, p, _ map[string]any) { p["tail"] = nil }},
		{"tail null though the crystal was judged", func(_, p, _ map[string]any) { p["crystals"].([]any)[0].(map[string]any)["tail"] = nil }},
		{"field too many in a crystal", func(_, p, _ map[string]any) { p["crystals"].([]any)[0].(map[string]any)["mineral"] = "quartz" }},
		{"field missing in a path: crystals", func(_, p, _ map[string]any) { delete(p, "crystals") }},
		{"tail null though the profile was judged", func(_, _, q map[string]any) { q["tail"] = nil }},
		{"own best null though a path was run", func(s, _, _ map[string]any) { s["own_best"].([]any)[0].(map[string]any)["tail"] = nil }},
		{"unknown verdict", func(_, p, _ map[string]any) { p["verdict"] = "fine" }},
		{"interval with one end", func(_, p, _ map[string]any) { p["shift_68"] = []any{1.0} }},
		{"interval with three", func(_, p, _ map[string]any) { p["shift_68"] = []any{1.0, 2.0, 3.0} }},
		{"open end as zero", func(_, p, _ map[string]any) { p["shift_95"] = []any{0.0, 2.0} }},
		{"other schema", func(s, _, _ map[string]any) { s["schema"] = 2.0 }},
		{"no list of notes", func(s, _, _ map[string]any) { s["notes"] = nil }},
		{"tail above 1", func(_, p, _ map[string]any) { p["tail"] = 1.1 }},
		{"build by half", func(s, _, _ map[string]any) { s["program"].(map[string]any)["build"] = "12ab" }},
	} {
		t.Run(test.name, func(t *testing.T) {
			s := asJSON(t, summarise(smallResult(t), thisProgram()))
			path := s["paths"].([]any)[0].(map[string]any)
			test.change(s, path, path["profiles"].([]any)[0].(map[string]any))
			if err := schema.Validate(s); err == nil {
				t.Error("passed")
			}
		})
	}
}

// TestSchemaIsStrict checks that no object of the schema takes a field it does not name
// or does without one that it names. With TestSummaryKeepsSchema it holds that schema
// and Go type have the same fields.
func TestSchemaIsStrict(t *testing.T) {
	root := readSchema(t)
	objects := 0
	var walk func(at string, s *jsonschema.Schema)
	walk = func(at string, s *jsonschema.Schema) {
		if s == nil {
			return
		}
		if s.Type == "object" {
			objects++
			names := slices.Sorted(maps.Keys(s.Properties))
			if extra := s.AdditionalProperties; extra == nil || extra.Not == nil {
				t.Errorf("%s takes other fields", at)
			}
			if required := slices.Sorted(slices.Values(s.Required)); !slices.Equal(required, names) {
				t.Errorf("%s requires %q, names %q", at, required, names)
			}
		}
		walk(at+"[]", s.Items)
		for name, p := range s.Properties {
			walk(at+"."+name, p)
		}
		for name, p := range s.Defs {
			walk(name, p)
		}
	}
	walk("summary", root)
	if objects < 8 {
		t.Errorf("only %d objects found", objects)
	}
}
