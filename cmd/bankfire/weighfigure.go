package main

import (
	"bytes"
	"fmt"
	"math"
	"slices"
	"strings"

	"bankfire/cmd/bankfire/internal/figure"
	"bankfire/paths"
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

// weighingFigure draws measured element n with every path. Where the points and
// the start are depends on what was fitted: they are those of the best path.
func weighingFigure(r *paths.Result, n int) ([]byte, error) {
	own := &r.Own[n]
	f := figure.Weighing{
		Title:    r.Study.Title,
		Subject:  strings.Join(strings.Fields(own.Element.Name+" in "+own.Crystal.Mineral+" "+own.Crystal.Name), " "),
		Quantity: own.Element.Name, Unit: own.Element.Unit,
	}
	for _, threshold := range r.Study.Thresholds {
		f.Thresholds = append(f.Thresholds, figure.Threshold{Name: threshold.Name, Temp: threshold.Temp})
	}
	if best := bestPath(r); best != nil {
		q, t := &best.Profiles[n], own.Element.Traverse
		f.Start = figure.Line{At: q.Centres, Value: q.Start}
		for i := range t.Value {
			f.Points = append(f.Points, figure.Point{At: q.At[i], Value: t.Value[i], Sigma: q.Sigma[i]})
		}
	}
	for i := range r.Paths {
		f.Paths = append(f.Paths, drawnPath(&r.Paths[i], n))
	}
	var picture bytes.Buffer
	err := figure.Draw(&picture, &f)
	return picture.Bytes(), err
}

// drawnPath is a path as it is drawn for element n; one that was not run has no
// profile.
func drawnPath(p *paths.PathResult, n int) figure.Path {
	h := p.Path.History
	drawn := figure.Path{
		Name: p.Path.Name, Verdict: verdictInWords(p), Reproduces: p.Outcome.Verdict == paths.Reproduces,
		Duration: h.Duration(curveTemps(h)),
	}
	if len(p.Profiles) > 0 {
		q := &p.Profiles[n]
		drawn.Profile, drawn.Model = figure.Line{At: q.Centres, Value: q.Final}, q.Seen
	}
	return drawn
}

// curvePoints is how many temperatures a drawn duration curve has, beside those
// at which the path rests.
const curvePoints = 300

// curveTemps returns the temperatures, K, at which a path's duration curve is
// drawn: evenly over its range, and close to both sides of every hold, where
// the curve jumps.
func curveTemps(h *thermal.History) []float64 {
	lo, hi := h.Range()
	var temps []float64
	for i := range curvePoints + 1 {
		temps = append(temps, lo+(hi-lo)*float64(i)/curvePoints)
	}
	for _, leg := range h.Legs() {
		if leg.Kind == thermal.Hold {
			temps = append(temps, math.Nextafter(leg.T0, 0), leg.T0)
		}
	}
	slices.Sort(temps)
	return slices.Compact(temps)
}

// bestPath returns the path of least misfit; nil if none was run.
func bestPath(r *paths.Result) *paths.PathResult {
	var best *paths.PathResult
	for i := range r.Paths {
		p := &r.Paths[i]
		if len(p.Profiles) > 0 && (best == nil || p.Outcome.Misfit < best.Outcome.Misfit) {
			best = p
		}
	}
	return best
}
