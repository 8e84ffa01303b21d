package main

import (
	"bytes"
	"fmt"
	"io"
	"math"
	"slices"

	"bankfire/cmd/bankfire/internal/figure"
	"bankfire/paths"
	"bankfire/paths/study"
	"bankfire/thermal"
)

// familyFigureNames are the names of the figures of families, one each: "" for one of
// which no member was run.
func familyFigureNames(r *paths.Result) []string {
	names := make([]string, len(r.Families))
	for i := range names {
		shown := &r.Families[i].Shown
		switch ran := func(row paths.Row) bool { return row.Verdict != paths.Barred }; {
		case !slices.ContainsFunc(shown.Drawn, ran) && len(shown.Reproduces) == 0:
		case len(names) == 1:
			names[i] = "family.png"
		default:
			names[i] = fmt.Sprintf("family-%d.png", i+1)
		}
	}
	return names
}

// writeFamilyFigure writes the figure of family i.
func writeFamilyFigure(w io.Writer, r *paths.Result, i int) error {
	var picture bytes.Buffer
	if err := figure.DrawFamily(&picture, familyShown(r, i)); err != nil {
		return err
	}
	_, err := w.Write(picture.Bytes())
	return err
}

// How much is drawn: members as lines, temperatures of a band, and times of a line beside
// the path's own break points, if it has no more of them.
const (
	mostTraces  = 150
	bandTemps   = 240
	traceTimes  = 300
	traceBreaks = 400
)

// drawnMember is a member that is drawn, not one that is barred.
type drawnMember struct {
	paths.Row
	values  []float64
	history *thermal.History
}

// familyShown is what is drawn of family i.
func familyShown(r *paths.Result, i int) *figure.Family {
	f := &r.Families[i]
	out := &figure.Family{
		Title: r.Study.Title,
		Subject: fmt.Sprintf("Family %s: of %s drawn%s, %d reproduce what was measured.",
			quoted(f.Family.Name), counted(f.Tally.Count(), "path"), drawnText(f.Family), f.Tally.Counts[paths.Reproduces]),
	}
	for _, t := range r.Study.Thresholds {
		out.Thresholds = append(out.Thresholds, figure.Threshold{Name: t.Name, Temp: t.Temp})
	}
	kept, all := sampledMembers(f), drawnMembers(f, f.Shown.Drawn)
	dots := slices.Concat(all, drawnMembers(f, f.Shown.Reproduces))
	out.Temps = familyTemps(kept, all)
	out.Kept, out.All = durationBand(kept, out.Temps), durationBand(all, out.Temps)
	every := 1 + (len(kept)-1)/mostTraces
	for k := 0; k < len(kept); k += every {
		out.Traces = append(out.Traces, drawnTrace(kept[k].history))
	}
	if best := f.Best(); best >= 0 && len(kept) > 0 {
		out.Best = drawnTrace(r.Paths[f.Path].Path.History)
	}
	for _, m := range dots {
		out.Stores = append(out.Stores, figure.Store{Life: m.history.Eruption(), Temp: halfTemp(m.history), Reproduces: m.Verdict == paths.Reproduces})
	}
	out.Equal, out.Said = equalLines(f, kept, out.Temps)
	for k := range f.Family.Values {
		out.Values = append(out.Values, drawnValue(f, k, dots))
	}
	return out
}

// sampledMembers draws the sample of those that reproduce again, of which the report's
// duration curve is too.
func sampledMembers(f *paths.FamilyResult) []drawnMember {
	var rows []paths.Row
	for _, i := range f.Tally.Sample() {
		rows = append(rows, paths.Row{Index: i, Verdict: paths.Reproduces})
	}
	return drawnMembers(f, rows)
}

// drawnMembers draws members again, without those that are barred.
func drawnMembers(f *paths.FamilyResult, rows []paths.Row) []drawnMember {
	var out []drawnMember
	for _, row := range rows {
		if row.Verdict != paths.Barred {
			c := new(study.Candidate) // which owns its history
			f.Family.At(c, row.Index)
			out = append(out, drawnMember{row, c.Values, &c.History})
		}
	}
	return out
}

// familyTemps are temperatures, K, evenly over the range of members and a little beyond: nothing
// is hotter than the hottest of them.
func familyTemps(lists ...[]drawnMember) []float64 {
	lo, hi := math.Inf(1), math.Inf(-1)
	for _, list := range lists {
		for k := range list {
			a, b := list[k].history.Range()
			lo, hi = math.Min(lo, a), math.Max(hi, b)
		}
	}
	if !(lo <= hi) {
		return nil
	}
	beyond := math.Max(0.02*(hi-lo), 2)
	lo, hi = lo-beyond, hi+beyond
	temps := make([]float64, bandTemps+1)
	for k := range temps {
		temps[k] = lo + (hi-lo)*float64(k)/bandTemps
	}
	return temps
}

// durationBand is the time above each temperature, s, that 5, 50 and 95 % of the members
// stay below.
func durationBand(members []drawnMember, temps []float64) (b figure.Band) {
	if len(members) == 0 {
		for k := range b {
			b[k] = make([]float64, len(temps))
		}
		return b
	}
	times := make([]float64, len(members))
	for _, temp := range temps {
		for k := range members {
			times[k] = members[k].history.TimeAbove(temp)
		}
		slices.Sort(times)
		for k, part := range []float64{0.05, 0.5, 0.95} {
			b[k] = append(b[k], times[int(math.Ceil(part*float64(len(times))))-1])
		}
	}
	return b
}

// halfTemp is the temperature, K, above which the path is for half of its life.
func halfTemp(h *thermal.History) float64 {
	lo, hi := h.Range()
	half := h.Eruption() / 2
	for range 60 {
		middle := (lo + hi) / 2
		if h.TimeAbove(middle) >= half {
			lo = middle
		} else {
			hi = middle
		}
	}
	return (lo + hi) / 2
}

// drawnTrace is a path at times that are even in the logarithm before eruption, and on
// both sides of its break points.
func drawnTrace(h *thermal.History) figure.Trace {
	life := h.Eruption()
	var times []float64
	for k := range traceTimes {
		times = append(times, life*(1-math.Pow(10, -6*float64(k)/traceTimes)))
	}
	times = append(times, life)
	if breaks := h.Breaks(nil); len(breaks) <= traceBreaks {
		times = append(times, breaks...)
	}
	slices.Sort(times)
	var t figure.Trace
	for _, at := range slices.Compact(times) {
		if at > life {
			break
		}
		before, after := h.At(at)
		t.Before, t.Temp = append(t.Before, life-at), append(t.Temp, before)
		if after != before && at < life {
			t.Before, t.Temp = append(t.Before, life-at), append(t.Temp, after)
		}
	}
	return t
}

// equalLines are lines along which holds diffuse as much as half of the members that reproduce
// at most, for each element that knows of a path only that; and a sentence that says so.
func equalLines(f *paths.FamilyResult, kept []drawnMember, temps []float64) (lines []figure.Equal, said string) {
	var names []string
	for n, of := range f.Elements {
		if len(kept) == 0 || !f.Methods[n].Table {
			continue
		}
		name := of.Element.Name + " in " + of.Crystal.Name
		names = append(names, name)
		if of.Crystal.Exists != nil { // it does not see the whole life
			continue
		}
		law := of.Element.Law.Law
		var lnG []float64
		for k := range kept {
			lnG = append(lnG, law.LnIntegral(kept[k].history, 0, kept[k].history.Life()))
		}
		slices.Sort(lnG)
		line := func(lnG float64, name string, light bool) {
			e := figure.Equal{Name: name, Light: light, Temp: temps}
			for _, temp := range temps {
				e.Time = append(e.Time, math.Exp(lnG-law.LnD(temp)))
			}
			lines = append(lines, e)
		}
		middle := lnG[len(lnG)/2]
		if len(f.Elements) > 1 {
			line(middle, name, false)
			continue
		}
		line(middle-math.Log(10), "a tenth", true)
		line(middle, "as those that reproduce", false)
		line(middle+math.Log(10), "ten times", true)
	}
	return lines, onlyHowMuch(names)
}

// onlyHowMuch says what elements that know a path by its diffusion integral cannot tell. Several
// of them, each with an integral of its own, can tell hot from long together.
func onlyHowMuch(names []string) string {
	switch len(names) {
	case 0:
		return ""
	case 1:
		return names[0] + " can tell of a path only how much it diffused in all: not the order of its heatings, nor whether it was cooler for longer."
	}
	return list(names) + " can each tell of a path only how much they diffused in all: not the order of its heatings."
}

// drawnValue is value k against the chi-square of members.
func drawnValue(f *paths.FamilyResult, k int, members []drawnMember) figure.Value {
	v := &f.Family.Values[k]
	unit, zero, size := usualUnit(v)
	ends := drawnEnds(v, &f.Summary.Values[k])
	out := figure.Value{Name: v.Name, Lo: (ends[0] - zero) / size, Hi: (ends[1] - zero) / size, Log: v.Log, Years: unit == "yr", Unit: unit}
	if printed, ok := map[string]string{"C": "°C", "um": "µm"}[unit]; ok {
		out.Unit = printed
	}
	for i := range members {
		m := &members[i]
		out.Dots = append(out.Dots, figure.Dot{At: (m.values[k] - zero) / size, Misfit: m.Misfit, Reproduces: m.Verdict == paths.Reproduces})
	}
	return out
}
