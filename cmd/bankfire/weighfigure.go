package main

import (
	"bytes"
	"cmp"
	"fmt"
	"maps"
	"math"
	"slices"
	"strings"

	"bankfire/cmd/bankfire/internal/figure"
	"bankfire/paths"
	"bankfire/paths/study"
	"bankfire/paths/traverse"
	"bankfire/thermal"
)

// figureNames returns the names of the figures of a weighing, one for each
// measured element.
func figureNames(r *paths.Result) []string {
	if len(r.Own) == 1 {
		return []string{"weigh.png"}
	}
	names := make([]string, len(r.Own))
	for i := range names {
		names[i] = fmt.Sprintf("weigh-%d.png", i+1)
	}
	return names
}

// weighingFigure draws measured element n with every path.
func weighingFigure(r *paths.Result, n int) ([]byte, error) {
	var picture bytes.Buffer
	err := figure.Draw(&picture, drawnWeighing(r, n))
	return picture.Bytes(), err
}

// drawnWeighing is what is drawn of measured element n. Everything lies at the
// positions that were measured: the origin and the tilt that a path was fitted
// with move its curves. The start is that of the best path. Verdicts are those of
// the crystal by itself where crystals need not share a path.
func drawnWeighing(r *paths.Result, n int) *figure.Weighing {
	own := &r.Own[n]
	t := own.Element.Traverse
	f := &figure.Weighing{
		Title:    r.Study.Title,
		Subject:  strings.Join(strings.Fields(own.Element.Name+" in "+own.Crystal.Mineral+" "+own.Crystal.Name), " "),
		Quantity: own.Element.Name, Unit: t.Unit,
		Cut: !own.Crystal.Mirrored(own.Element), Inner: own.Crystal.R0,
	}
	for _, threshold := range r.Study.Thresholds {
		f.Thresholds = append(f.Thresholds, figure.Threshold{Name: threshold.Name, Temp: threshold.Temp})
	}
	sigma := t.Sigma
	judged := judgedFor(r, own.Crystal)
	if best := bestPath(judged); best >= 0 {
		q := &r.Paths[best].Profiles[n]
		f.Start, sigma = drawnLine(q, q.Start), q.Sigma
		if len(q.Free) > 0 && ran(r) > 1 {
			f.StartOf = best + 1
		}
	}
	for i, at := range t.Position {
		f.Points = append(f.Points, figure.Point{At: at, Value: t.Value[i], Sigma: sigma[i], Limit: t.Limit != nil && t.Limit[i]})
	}
	for i := range r.Paths {
		f.Paths = append(f.Paths, drawnPath(&r.Paths[i], n, judged[i]))
	}
	return f
}

// drawnPath is a path, as far as the crystal sees it, as it is drawn for element n;
// one that was not run has no profile. Its verdict is that of judged.
func drawnPath(p *paths.PathResult, n int, judged *paths.PathResult) figure.Path {
	h := p.Path.History
	if len(p.Profiles) > 0 {
		if seen, err := p.Profiles[n].Crystal.Sees(h); err == nil {
			h = seen
		}
	}
	drawn := figure.Path{
		Name: p.Path.Name, Verdict: verdictInWords(judged),
		Reproduces: judged.Outcome.Verdict == paths.Reproduces, Barred: judged.Outcome.Verdict == paths.Barred,
		Duration: h.Duration(curveTemps(h)),
	}
	if len(p.Profiles) > 0 && p.Profiles[n].Ran() {
		q := &p.Profiles[n]
		drawn.Profile, drawn.Residuals = drawnLine(q, q.Final), q.Residuals
	}
	return drawn
}

// drawnLine is a profile of cell values where the traverse measured it. It goes
// on beyond a centre of symmetry if the traverse does.
func drawnLine(q *paths.ProfileResult, values []float64) figure.Line {
	at, t := q.Centres, q.Element.Traverse
	if q.Crystal.Mirrored(q.Element) && slices.Min(q.At) < at[0] {
		at, values = mirrored(at, -1), mirrored(values, 1)
	}
	return figure.Line{At: asMeasured(t, at, q.Origin, q.Tilt), Value: values}
}

// mirrored returns the values with their mirror image, times sign, before them.
func mirrored(values []float64, sign float64) []float64 {
	both := make([]float64, 0, 2*len(values))
	for _, v := range slices.Backward(values) {
		both = append(both, sign*v)
	}
	return append(both, values...)
}

// asMeasured returns the positions, m, at which the traverse has what is truly at
// the given ones if its zero is off by origin, m, and its line slanted by tilt,
// rad: the inverse of [traverse.Traverse.Place].
func asMeasured(t *traverse.Traverse, at []float64, origin, tilt float64) []float64 {
	out := make([]float64, len(at))
	for i, x := range at {
		if t.Zero == traverse.Rim {
			out[i] = t.Size - ((t.Size-x)/math.Cos(tilt) - origin)
		} else {
			out[i] = x/math.Cos(tilt) - origin
		}
	}
	return out
}

// A drawn duration curve has curvePoints + 1 temperatures over its range and two
// at each of up to curveJumps holds. Each asks every leg how long it is hotter.
const (
	curvePoints = 300
	curveJumps  = 150
)

// curveTemps returns the temperatures, K, at which a path's duration curve is
// drawn: evenly over its range, and close to both sides of the temperatures at
// which it rests longest, where the curve jumps.
func curveTemps(h *thermal.History) []float64 {
	lo, hi := h.Range()
	var temps []float64
	for i := range curvePoints + 1 {
		temps = append(temps, lo+(hi-lo)*float64(i)/curvePoints)
	}
	for _, temp := range restTemps(h, curveJumps) {
		temps = append(temps, math.Nextafter(temp, 0), temp)
	}
	slices.Sort(temps)
	return slices.Compact(temps)
}

// restTemps returns up to n temperatures, K, at which the path is held, those of
// the longest time in all first.
func restTemps(h *thermal.History, n int) []float64 {
	rests := map[float64]float64{} // s, by K
	for _, leg := range h.Legs() {
		if leg.Kind == thermal.Hold {
			rests[leg.T0] += leg.For
		}
	}
	temps := slices.SortedFunc(maps.Keys(rests), func(a, b float64) int {
		return cmp.Or(cmp.Compare(rests[b], rests[a]), cmp.Compare(a, b))
	})
	return temps[:min(n, len(temps))]
}

// bestPath returns the number of the path of least misfit; -1 if none was run.
func bestPath(judged []*paths.PathResult) int {
	best := -1
	for i, p := range judged {
		if misfit := p.Outcome.Misfit; len(p.Profiles) > 0 && !math.IsNaN(misfit) && (best < 0 || misfit < judged[best].Outcome.Misfit) {
			best = i
		}
	}
	return best
}

// judgedFor returns the paths with what the crystals say jointly or, where they need
// not share a path, the crystal by itself.
func judgedFor(r *paths.Result, c *study.Crystal) []*paths.PathResult {
	k := slices.Index(r.Crystals, c)
	var out []*paths.PathResult
	for i := range r.Paths {
		p := &r.Paths[i]
		if !r.Study.Sharing.Whole() && k < len(p.Outcome.Crystals) {
			p = ofCrystal(p, c, k)
		}
		out = append(out, p)
	}
	return out
}

// ofCrystal is a path that was run with what crystal c, the k-th, says of it.
func ofCrystal(p *paths.PathResult, c *study.Crystal, k int) *paths.PathResult {
	out := *p
	out.Outcome.Finding = p.Outcome.Crystals[k]
	out.Outcome.Profiles, out.Profiles = nil, nil
	for j := range p.Profiles {
		if p.Profiles[j].Crystal.Name == c.Name {
			out.Profiles = append(out.Profiles, p.Profiles[j])
			out.Outcome.Profiles = append(out.Outcome.Profiles, p.Outcome.Profiles[j])
		}
	}
	out.Barred = slices.DeleteFunc(slices.Clone(p.Barred), func(b study.Bar) bool { return b.Crystal != "" && b.Crystal != c.Name })
	return &out
}

// ran counts the paths that were run.
func ran(r *paths.Result) int {
	n := 0
	for i := range r.Paths {
		if len(r.Paths[i].Profiles) > 0 {
			n++
		}
	}
	return n
}
