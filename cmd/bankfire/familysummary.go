package main

import (
	"bankfire/paths"
	"bankfire/paths/study"
	"bankfire/thermal"
)

// weighedFamily is a family in the summary. Quantiles are those that 5, 50 and 95 %
// of the members lie below, null where there are none.
type weighedFamily struct {
	Name     string          `json:"name"`
	Method   string          `json:"method"` // how members are drawn
	Seed     uint64          `json:"seed"`
	Count    int64           `json:"count"`
	Screened int64           `json:"screened"` // fewer where results are partial
	Values   []familyValue   `json:"values"`
	Verdicts []verdictCount  `json:"verdicts"`
	Barred   []familyBar     `json:"barred"` // the commonest first
	Trade    []familyTrade   `json:"trade_offs"`
	Life     quantiles       `json:"life_s"` // of the members that reproduce, as the next three
	Above    []familyAbove   `json:"time_above"`
	StandIn  []familyStandIn `json:"stand_in_temperature"`
	Sharp    quantiles       `json:"shift_factor_too_sharp"`
	Smooth   quantiles       `json:"shift_factor_too_smooth"`
	Duration []familyHot     `json:"duration_curve"` // of the sample, as the next and the trade-offs
	Shares   []familyShare   `json:"diffusion_shares"`
	Sampled  int64           `json:"sampled"`
	Engines  []familyEngine  `json:"engines"`
	Audit    *familyAudit    `json:"audit"`
	Best     *int64          `json:"best_member"` // the one with the lowest chi-square
	Path     *string         `json:"best_path"`   // as which it is among the paths
}

type quantiles [3]*float64

// familyValue is an open value, in SI.
type familyValue struct {
	Name       string      `json:"name"`
	Unit       string      `json:"unit"` // "" of a plain number
	Spread     string      `json:"spread"`
	Drawn      [2]float64  `json:"drawn"`
	Kept       [2]*float64 `json:"reproducing"`
	Quantiles  quantiles   `json:"reproducing_quantiles"`
	NotBounded [2]bool     `json:"not_bounded"`
}

type verdictCount struct {
	Verdict string `json:"verdict"`
	Count   int64  `json:"count"`
}

type familyBar struct {
	Reason string `json:"reason"`
	Count  int64  `json:"count"`
	First  int64  `json:"first_member"`
	Why    string `json:"first_why"`
}

type familyTrade struct {
	A     string  `json:"a"`
	B     string  `json:"b"`
	Rank  float64 `json:"rank_correlation"`
	Drawn float64 `json:"rank_correlation_drawn"`
}

type familyAbove struct {
	Threshold   string    `json:"threshold"`
	Temperature float64   `json:"temperature_K"`
	Time        quantiles `json:"time_s"`
}

type familyStandIn struct {
	elementKey
	Temperature quantiles `json:"temperature_K"`
}

type familyHot struct {
	Temperature float64   `json:"temperature_K"`
	Time        quantiles `json:"time_s"`
}

// familyShare is what a leg does of the diffusion of an element. Legs without a name
// stand together by their kind.
type familyShare struct {
	elementKey
	Leg   *string   `json:"leg"`
	Kind  *string   `json:"kind"`
	Share quantiles `json:"share"`
}

// familyAudit is the largest numerical error of a member that was audited.
type familyAudit struct {
	Member int64   `json:"member"`
	Error  float64 `json:"numerical_error_sigma"`
}

// familyEngine says how members were run for an element.
type familyEngine struct {
	elementKey
	Method string   `json:"method"` // "table" or "steps"
	Why    string   `json:"why"`
	Error  *float64 `json:"numerical_error_sigma"` // of a table
}

// summariseFamilies summarises the families of the result.
func summariseFamilies(r *paths.Result) []weighedFamily {
	out := []weighedFamily{}
	for i := range r.Families {
		out = append(out, summariseFamily(r, &r.Families[i]))
	}
	return out
}

func summariseFamily(r *paths.Result, f *paths.FamilyResult) weighedFamily {
	s := &f.Summary
	out := weighedFamily{
		Name: f.Family.Name, Method: f.Family.Method().String(), Seed: f.Family.Seed, Count: f.Family.Count(), Screened: f.Tally.Count(),
		Values: []familyValue{}, Verdicts: []verdictCount{}, Barred: []familyBar{}, Trade: []familyTrade{},
		Life: newQuantiles(s.Life), Above: []familyAbove{}, StandIn: []familyStandIn{},
		Sharp: newQuantiles(s.More), Smooth: newQuantiles(s.Less), Duration: []familyHot{}, Shares: []familyShare{}, Sampled: s.Sampled, Engines: []familyEngine{},
	}
	for k := range s.Values {
		v, of := &f.Family.Values[k], &s.Values[k]
		out.Values = append(out.Values, familyValue{v.Name, siUnit(v), v.Spread(), drawnEnds(v, of),
			[2]*float64{bounded(of.Kept[0]), bounded(of.Kept[1])}, newQuantiles(of.Kept90), of.Open})
	}
	for v := paths.Unjudged; v <= paths.Barred; v++ {
		out.Verdicts = append(out.Verdicts, verdictCount{v.String(), f.Tally.Counts[v]})
	}
	for _, b := range f.Barred {
		out.Barred = append(out.Barred, familyBar{b.Words, b.Count, b.First, b.Why})
	}
	for _, t := range s.TradeOffs {
		out.Trade = append(out.Trade, familyTrade{f.Family.Values[t.A].Name, f.Family.Values[t.B].Name, t.Rank, t.Drawn})
	}
	for k, q := range s.Above {
		t := &r.Study.Thresholds[k]
		out.Above = append(out.Above, familyAbove{t.Name, t.Temp, newQuantiles(q)})
	}
	for k, q := range s.StandIn {
		e := f.Elements[k]
		out.StandIn = append(out.StandIn, familyStandIn{elementKey{e.Crystal.Name, e.Element.Name}, newQuantiles(q)})
	}
	for _, d := range s.Duration {
		out.Duration = append(out.Duration, familyHot{d.Temp, newQuantiles(d.Time)})
	}
	for k, shares := range s.Shares {
		for i := range shares {
			out.Shares = append(out.Shares, newFamilyShare(f.Elements[k], &shares[i]))
		}
	}
	for k, m := range f.Methods {
		e := f.Elements[k]
		out.Engines = append(out.Engines, familyEngine{elementKey{e.Crystal.Name, e.Element.Name}, engineName(m), m.Why, nil})
		if m.Table {
			out.Engines[k].Error = bounded(m.NumErr)
		}
	}
	if f.Tally.NumErrOf >= 0 {
		out.Audit = &familyAudit{f.Tally.NumErrOf, f.Tally.NumErr}
	}
	if best := f.Best(); best >= 0 {
		out.Best, out.Path = &best, &r.Paths[f.Path].Path.Name
	}
	return out
}

func newFamilyShare(e paths.FamilyElement, of *paths.DiffusionShare) familyShare {
	out := familyShare{elementKey: elementKey{e.Crystal.Name, e.Element.Name}, Share: newQuantiles(of.Share)}
	if out.Leg = &of.Name; of.Name == "" {
		kind := of.Kind.String()
		out.Leg, out.Kind = nil, &kind
	}
	return out
}

func engineName(m paths.FamilyMethod) string {
	if m.Table {
		return "table"
	}
	return "steps"
}

func newQuantiles(q paths.Quantiles) quantiles {
	return quantiles{bounded(q[0]), bounded(q[1]), bounded(q[2])}
}

// siUnit is the unit of a value in SI, of a concentration that in which it was written,
// "" of a plain number.
func siUnit(v *study.Value) string {
	if v.Plain() || v.Unit() != "" {
		return v.Unit()
	}
	return map[thermal.Dimension]string{thermal.Temperature: "K", thermal.Duration: "s", thermal.Length: "m", thermal.Diffusivity: "m2/s", thermal.Velocity: "m/s"}[v.Dim()]
}

// drawnSeed is the seed of all families, nil if there are none or they differ.
func drawnSeed(r *paths.Result) *uint64 {
	var seed *uint64
	for i := range r.Families {
		f := r.Families[i].Family
		if seed != nil && *seed != f.Seed {
			return nil
		}
		seed = &f.Seed
	}
	return seed
}
