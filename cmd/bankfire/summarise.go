package main

import (
	"math"
	"slices"
	"strings"

	"bankfire/diffusion/catalogue"
	"bankfire/paths"
	"bankfire/paths/study"
	"bankfire/thermal"
)

// summarise turns a result into the summary of a run without files, by the
// program.
func summarise(r *paths.Result, made program) *weighing {
	w := &weighing{
		Schema: summarySchema, Program: made, Title: r.Study.Title, Confidence: r.Study.Confidence, Year: thermal.Year,
		Inputs: []input{}, Conditions: conditionsUsed(r.Study), Laws: lawsUsed(r.Study), Partitions: partitionsUsed(r.Study), Solubilities: solubilitiesUsed(r.Study),
		Own: ownBests(r), Paths: []weighedPath{}, History: summariseHistory(r), Edges: edgeOrigins(r), Families: summariseFamilies(r), Seed: drawnSeed(r),
		Notes: filled(r.Study.Notes), Files: []string{},
	}
	for _, in := range r.Study.Inputs {
		w.Inputs = append(w.Inputs, input{in.Name, in.SHA256})
	}
	for i := range r.Paths {
		w.Paths = append(w.Paths, summarisePath(r, &r.Paths[i]))
	}
	return w
}

func summarisePath(r *paths.Result, p *paths.PathResult) weighedPath {
	out := weighedPath{
		Name: p.Path.Name, Verdict: p.Outcome.Verdict.String(), finding: newFinding(&p.Outcome.Finding, p.Notes),
		LifeS: p.Life, Above: []timeAbove{}, Crystals: []judgedCrystal{}, Odds: summariseOdds(p), Profiles: []weighedProfile{},
	}
	if len(p.Profiles) > 0 && p.Outcome.Verdict != paths.Barred {
		out.WithLaws = newWithLaws(&p.Outcome.WithLaws)
	}
	for i, t := range r.Study.Thresholds {
		out.Above = append(out.Above, timeAbove{t.Name, t.Temp, p.Above[i]})
	}
	for k := range p.Outcome.Crystals {
		f := &p.Outcome.Crystals[k]
		notes := f.Notes()
		if f.Verdict == paths.Barred {
			notes = whyBarred(p, r.Crystals[k].Name)
		}
		out.Crystals = append(out.Crystals, judgedCrystal{r.Crystals[k].Name, f.Verdict.String(), newFinding(f, notes), triedStarts(p, k)})
	}
	if s := &p.Outcome.Scatter; s.Degrees > 0 {
		out.Scatter = &scatter{s.Crystals, s.Common, ends(s.Common68), ends(s.Common95), s.ChiSq, s.Degrees, s.Tail}
	}
	if c := &p.Outcome.Chance; c.Judged > 0 {
		out.Chance = &chance{c.Judged, c.Failed, c.Expected, c.Most, c.Worst}
	}
	for i := range p.Profiles {
		q := &p.Profiles[i]
		if !q.Ran() {
			continue
		}
		out.Profiles = append(out.Profiles, weighedProfile{
			elementKey: elementKey{q.Crystal.Name, q.Element.Name}, Verdict: p.Outcome.Profiles[i].Verdict.String(),
			finding: newFinding(&p.Outcome.Profiles[i], q.Notes),
			G:       bounded(math.Exp(q.LnG)), StandIn: positive(q.StandIn), NumErr: q.NumErr,
			FreeValues: freeValues(q.Free),
		})
	}
	return out
}

// triedStarts are the combinations of starts that were tried for crystal k on the path.
func triedStarts(p *paths.PathResult, k int) []triedStart {
	out := []triedStart{}
	if k >= len(p.Starts) {
		return out
	}
	for _, t := range p.Starts[k] {
		tried := triedStart{
			Taken: t.Taken, Verdict: t.Verdict.String(), ShiftFactor: bounded(t.Shift), Tail: bounded(t.Tail),
			Misfit: bounded(t.Misfit), AboveTaken: bounded(t.AboveOne), Degrees: t.Degrees,
		}
		for _, s := range t.Starts {
			tried.Starts = append(tried.Starts, elementStart{s.Element.Name, s.Name})
		}
		out = append(out, tried)
	}
	return out
}

func summariseOdds(p *paths.PathResult) []demand {
	out := []demand{}
	key := func(i int) elementKey { return elementKey{p.Profiles[i].Crystal.Name, p.Profiles[i].Element.Name} }
	for _, d := range p.Outcome.Odds {
		out = append(out, demand{key(d.Of), key(d.To), d.Ratio, ends(d.Ratio68), ends(d.Ratio95), d.ChiSq})
	}
	return out
}

// edgeOrigins are how edges came to be, as far as the data tell.
func edgeOrigins(r *paths.Result) []edgeOrigin {
	out := []edgeOrigin{}
	for i := range r.Edges {
		e := &r.Edges[i]
		o := edgeOrigin{Crystal: e.Crystal.Name, WidthM: e.Width, Growth: e.Growth, Diffusion: e.Diffusion, Degrees: e.Degrees}
		for _, of := range e.Elements {
			o.Elements = append(o.Elements, of.Name)
		}
		if text := e.BoundaryText(); text != "" {
			o.Boundary = &text
		}
		if e.Prefers != paths.UnknownOrigin {
			word := e.Prefers.String()
			o.Prefers = &word
		}
		out = append(out, o)
	}
	return out
}

// whyBarred are the reasons for which a crystal bars the path.
func whyBarred(p *paths.PathResult, crystal string) []string {
	var why []string
	for _, b := range p.Barred {
		if b.Crystal == "" || b.Crystal == crystal {
			why = append(why, b.Why)
		}
	}
	return why
}

// summariseHistory is what the crystals share and what follows from it.
func summariseHistory(r *paths.Result) history {
	of := &r.Study.Sharing
	out := history{Sharing: "shared", Crystals: []reproduced{}, Groups: []group{}}
	switch {
	case of.Each:
		out.Sharing = "each"
	case of.From != nil:
		out.Sharing, out.From = "shared from", &of.From.Text
	}
	for k, c := range r.Crystals {
		out.Crystals = append(out.Crystals, reproduced{c.Name, pathNames(r.ReproducedBy(k))})
	}
	for i := range r.Groups {
		out.Groups = append(out.Groups, summariseGroup(r, &r.Groups[i]))
	}
	return out
}

func summariseGroup(r *paths.Result, g *paths.Group) group {
	out := group{
		Paths: pathNames(g.Paths), Combinations: g.Combinations(), Verdict: g.Outcome.Verdict.String(),
		finding: newFinding(&g.Outcome.Finding, g.Outcome.Notes()), Choices: []choice{},
	}
	for k, c := range g.Choices {
		chosen := choice{Crystal: r.Crystals[k].Name, Also: pathNames(c.Also)}
		if c.Path != nil {
			chosen.Path = &c.Path.Name
		}
		out.Choices = append(out.Choices, chosen)
	}
	return out
}

func pathNames(list []*study.Path) []string {
	names := []string{}
	for _, p := range list {
		names = append(names, p.Name)
	}
	return names
}

func newFinding(f *paths.Finding, notes []string) finding {
	return finding{
		ShiftFactor: bounded(f.Shift), Shift68: ends(f.Shift68), Shift95: ends(f.Shift95),
		Tail: bounded(f.Tail), Misfit: bounded(f.Misfit), AboveBest: bounded(math.Max(f.Above, 0)), Points: f.Points, Degrees: f.Degrees, Notes: filled(notes),
	}
}

func freeValues(free []paths.FreeFit) []fittedFree {
	out := []fittedFree{}
	for _, f := range free {
		out = append(out, fittedFree{f.Name, f.Value, known(f.Sigma), f.Unit, f.HasPrior, f.AtEnd})
	}
	return out
}

// known returns a standard deviation; nil where there is none.
func known(sigma float64) *float64 {
	if sigma == 0 {
		return nil
	}
	return bounded(sigma)
}

func ownBests(r *paths.Result) []ownBest {
	out := []ownBest{}
	for i := range r.Own {
		o := &r.Own[i]
		own := ownBest{
			elementKey: elementKey{o.Crystal.Name, o.Element.Name}, ShiftFactor: positive(o.Shift),
			Degrees: o.Degrees, Scatter: o.Scatter, Findings: filled(o.Findings),
		}
		if o.Path != nil {
			own.Path = o.Path.Name
			own.Misfit, own.Tail, own.Runs = bounded(o.ChiSq), bounded(o.Tail), bounded(o.Runs)
		}
		if o.Outlier >= 0 {
			own.OutlierLine = &o.Element.Traverse.Line[o.Outlier]
		}
		out = append(out, own)
	}
	return out
}

func newWithLaws(l *paths.LawsAllowed) *withLaws {
	out := &withLaws{Verdict: l.Verdict.String(), Tail: bounded(l.Tail), Misfit: bounded(l.Misfit), Leaning: []lawLeaning{}, Others: []constantLeaning{}}
	for _, on := range l.Leaning {
		out.Leaning = append(out.Leaning, lawLeaning{on.Law, on.Sigma, on.LnD, on.E})
	}
	for _, off := range l.Others {
		out.Others = append(out.Others, constantLeaning{off.Of, off.What.String(), off.Sigma})
	}
	out.Passes = l.Leaning != nil
	return out
}

// lawsUsed lists the laws of the measured elements in their order, those with a
// key once each if they are used alike.
func lawsUsed(s *study.Study) []lawUsed {
	laws := []lawUsed{}
	for _, c := range s.Crystals {
		for _, e := range c.Elements {
			if e.Traverse == nil {
				continue
			}
			used := lawUsed{e.Law.Key, e.Law.Citation, confidence(&e.Law), []elementKey{{c.Name, e.Name}}}
			i := slices.IndexFunc(laws, func(l lawUsed) bool { return l.Key == used.Key && l.Confidence == used.Confidence })
			if i >= 0 && used.Key != "" {
				laws[i].Elements = append(laws[i].Elements, used.Elements...)
			} else {
				laws = append(laws, used)
			}
		}
	}
	return laws
}

// partitionsUsed lists the partition relations of the measured elements in their
// order, once each.
func partitionsUsed(s *study.Study) []lawUsed {
	return relationsUsed(s, func(e *study.Element) []lawUsed {
		var used []lawUsed
		for _, p := range e.Partitions() {
			used = append(used, partitionUsed(p))
		}
		return used
	})
}

// solubilitiesUsed lists the solubility relations in the same way.
func solubilitiesUsed(s *study.Study) []lawUsed {
	return relationsUsed(s, func(e *study.Element) []lawUsed {
		var used []lawUsed
		for _, s := range e.Solubilities() {
			used = append(used, lawUsed{Key: s.Row.Key, Citation: s.Row.Citation, Confidence: s.Row.Confidence})
		}
		return used
	})
}

// relationsUsed joins what the measured elements use, in their order.
func relationsUsed(s *study.Study, of func(e *study.Element) []lawUsed) []lawUsed {
	relations := []lawUsed{}
	known := map[string]int{}
	for _, c := range s.Crystals {
		for _, e := range c.Elements {
			if e.Traverse == nil {
				continue
			}
			for _, used := range of(&e) {
				i, is := known[used.Key]
				if !is {
					i = len(relations)
					known[used.Key] = i
					relations = append(relations, used)
				}
				relations[i].Elements = append(relations[i].Elements, elementKey{c.Name, e.Name})
			}
		}
	}
	return relations
}

// partitionUsed is a relation with its source, of no element yet.
func partitionUsed(p *study.Partition) lawUsed {
	used := lawUsed{Key: p.Key, Confidence: "as given in the study"}
	if p.Row != nil {
		used.Citation, used.Confidence = p.Row.Citation, p.Row.Confidence
	}
	return used
}

// conditionsUsed are the conditions as the study has them, those of legs after
// them, buffers with their sources.
func conditionsUsed(s *study.Study) []string {
	all := filled(slices.Clone(s.Conditions.Typed))
	buffers := []*catalogue.Buffer{s.Conditions.Buffer}
	for i := range s.Settings {
		of := &s.Settings[i]
		for _, typed := range of.Conditions.Typed {
			all = append(all, of.Of()+": "+typed)
		}
		buffers = append(buffers, of.Conditions.Buffer)
	}
	named := map[string]bool{}
	for _, b := range buffers {
		if b != nil && !named[b.Names[0]] {
			named[b.Names[0]] = true
			all = append(all, b.Names[0]+": "+b.Citation+" ("+b.Confidence+")")
		}
	}
	return all
}

// confidence says how sure the constants of a law are, and what the user makes of it.
func confidence(l *study.Law) string {
	var text string
	switch {
	case len(l.Parts) > 1:
		var parts []string
		for i := range l.Parts {
			parts = append(parts, l.Parts[i].Law.Key+": "+confidence(&l.Parts[i].Law))
		}
		text = strings.Join(parts, "; ")
	case len(l.Parts) == 1:
		text = confidence(&l.Parts[0].Law)
	case l.Row == nil && l.Caution != "":
		text = "as given in the study: " + l.Caution
	case l.Row == nil:
		text = "as given in the study"
	default:
		text = l.Row.Confidence
	}
	if times := l.TimesText(); times != "" {
		text += "; " + times
	}
	return text
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

// filled returns texts, never nil, so that JSON shows an empty list.
func filled(texts []string) []string {
	if texts == nil {
		return []string{}
	}
	return texts
}
