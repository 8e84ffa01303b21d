package main

import (
	"math"

	"bankfire/paths"
)

// summarySchema numbers the form of the summaries. It grows by one when a
// field that others rely on changes its meaning or goes.
const summarySchema = 1

// weighing is the summary of `bankfire weigh`. Numbers are in SI; an open end
// of an interval is null.
type weighing struct {
	Schema     int           `json:"schema"`
	Title      string        `json:"title"`
	Confidence float64       `json:"confidence"`
	Inputs     []input       `json:"inputs"`
	Laws       []lawUsed     `json:"laws"`
	Paths      []weighedPath `json:"paths"`
	Families   []struct{}    `json:"families"`
	Notes      []string      `json:"notes"`
}

type input struct {
	Name   string `json:"name"`
	SHA256 string `json:"sha256"`
}

type lawUsed struct {
	Key        string `json:"key"`
	Citation   string `json:"citation"`
	Confidence string `json:"confidence"`
}

// finding holds the fields that paths and their profiles share.
type finding struct {
	ShiftFactor float64     `json:"shift_factor"`
	Shift68     [2]*float64 `json:"shift_68"`
	Shift95     [2]*float64 `json:"shift_95"`
	Tail        float64     `json:"tail"`
	Misfit      float64     `json:"misfit"`
	Points      int         `json:"points"`
	Degrees     int         `json:"degrees_of_freedom"`
	Notes       []string    `json:"notes"`
}

type weighedPath struct {
	Name    string `json:"name"`
	Verdict string `json:"verdict"`
	finding
	LifeS    float64          `json:"life_s"`
	Above    []timeAbove      `json:"time_above"`
	Profiles []weighedProfile `json:"profiles"`
}

type timeAbove struct {
	Threshold   string  `json:"threshold"`
	Temperature float64 `json:"temperature_K"`
	Time        float64 `json:"time_s"`
}

type weighedProfile struct {
	Crystal string `json:"crystal"`
	Element string `json:"element"`
	Verdict string `json:"verdict"`
	finding
	G          *float64     `json:"diffusion_integral_m2"`
	StandIn    *float64     `json:"stand_in_temperature_K"`
	NumErr     float64      `json:"numerical_error_sigma"`
	FreeValues []fittedFree `json:"free_values"`
}

type fittedFree struct {
	Name  string   `json:"name"`
	Value float64  `json:"value"`
	Sigma *float64 `json:"sigma"`
	Unit  string   `json:"unit"`
	Prior bool     `json:"has_prior"`
}

// weighingSummary turns a result into its summary.
func weighingSummary(r *paths.Result) weighing {
	w := weighing{
		Schema: summarySchema, Title: r.Study.Title, Confidence: r.Study.Confidence,
		Inputs: []input{}, Laws: lawsUsed(r), Paths: []weighedPath{}, Families: []struct{}{}, Notes: filled(r.Study.Notes),
	}
	for _, in := range r.Study.Inputs {
		w.Inputs = append(w.Inputs, input{in.Name, in.SHA256})
	}
	for i := range r.Paths {
		w.Paths = append(w.Paths, summariseThe(r, &r.Paths[i]))
	}
	return w
}

func summariseThe(r *paths.Result, p *paths.PathResult) weighedPath {
	out := weighedPath{
		Name: p.Path.Name, Verdict: p.Outcome.Verdict.String(), finding: newFinding(&p.Outcome.Finding, p.Notes),
		LifeS: p.Life, Above: []timeAbove{}, Profiles: []weighedProfile{},
	}
	for i, t := range r.Study.Thresholds {
		out.Above = append(out.Above, timeAbove{t.Name, t.Temp, p.Above[i]})
	}
	for i := range p.Profiles {
		q := &p.Profiles[i]
		out.Profiles = append(out.Profiles, weighedProfile{
			Crystal: q.Crystal.Name, Element: q.Element.Name, Verdict: p.Outcome.Profiles[i].Verdict.String(),
			finding: newFinding(&p.Outcome.Profiles[i], q.Notes),
			G:       bounded(math.Exp(q.LnG)), StandIn: positive(q.StandIn), NumErr: q.NumErr,
			FreeValues: freeValues(q.Free, q.Element.Unit),
		})
	}
	return out
}

func newFinding(f *paths.Finding, notes []string) finding {
	return finding{
		ShiftFactor: f.Shift, Shift68: ends(f.Shift68), Shift95: ends(f.Shift95),
		Tail: f.Tail, Misfit: f.Misfit, Points: f.Points, Degrees: f.Degrees, Notes: filled(notes),
	}
}

func freeValues(free []paths.FreeFit, unit string) []fittedFree {
	out := []fittedFree{}
	for _, f := range free {
		out = append(out, fittedFree{f.Name, f.Value, bounded(f.Sigma), unit, f.HasPrior})
	}
	return out
}

// lawsUsed lists the laws of the measured elements once each, in their order.
func lawsUsed(r *paths.Result) []lawUsed {
	laws := []lawUsed{}
	seen := map[string]bool{}
	for _, c := range r.Study.Crystals {
		for _, e := range c.Elements {
			l := lawUsed{Key: e.Law.Key, Citation: e.Law.Citation, Confidence: "as given in the study"}
			if e.Law.Row != nil {
				l.Confidence = e.Law.Row.Confidence
			}
			if !seen[l.Key] {
				seen[l.Key] = true
				laws = append(laws, l)
			}
		}
	}
	return laws
}

// ends returns an interval with its open ends nil.
func ends(x [2]float64) [2]*float64 {
	return [2]*float64{positive(x[0]), bounded(x[1])}
}

func positive(x float64) *float64 {
	if x > 0 {
		return &x
	}
	return nil
}

func bounded(x float64) *float64 {
	if math.IsInf(x, 0) || math.IsNaN(x) {
		return nil
	}
	return &x
}

// filled returns notes, never nil, so that JSON shows an empty list.
func filled(notes []string) []string {
	if notes == nil {
		return []string{}
	}
	return notes
}
