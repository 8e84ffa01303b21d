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
	profiles := r.Paths[0].Profiles
	if len(profiles) == 1 {
		return []string{"weigh.png"}
	}
	names := make([]string, len(profiles))
	for i := range profiles {
		names[i] = fmt.Sprintf("weigh-%d.png", i+1)
	}
	return names
}

// weighingFigure draws measured element n with every path.
func weighingFigure(r *paths.Result, n int) ([]byte, error) {
	first := &r.Paths[0].Profiles[n]
	e := first.Element
	f := figure.Weighing{
		Title:    r.Study.Title,
		Subject:  strings.Join(strings.Fields(e.Name+" in "+first.Crystal.Mineral+" "+first.Crystal.Name), " "),
		Quantity: e.Name, Unit: e.Unit,
	}
	t := e.Traverse
	for i := range t.Value {
		f.Points = append(f.Points, figure.Point{At: t.Position[i], Value: t.Value[i], Sigma: t.Sigma[i]})
	}
	for _, threshold := range r.Study.Thresholds {
		f.Thresholds = append(f.Thresholds, figure.Threshold{Name: threshold.Name, Temp: threshold.Temp})
	}
	best := bestPath(r)
	for i := range r.Paths {
		p := &r.Paths[i]
		q := &p.Profiles[n]
		if i == best {
			f.Start = figure.Line{At: q.Centres, Value: q.Start}
		}
		f.Paths = append(f.Paths, figure.Path{
			Name: p.Path.Name, Verdict: verdictInWords(&p.Outcome), Reproduces: p.Outcome.Verdict == paths.Reproduces,
			Profile: figure.Line{At: q.Centres, Value: q.Final}, Model: q.Seen, Duration: p.Path.History.Duration(curveTemps(p.Path.History)),
		})
	}
	var picture bytes.Buffer
	err := figure.Draw(&picture, &f)
	return picture.Bytes(), err
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

// bestPath returns the path of least misfit, whose fitted plateaux make the
// start that is drawn.
func bestPath(r *paths.Result) int {
	best := 0
	for i := range r.Paths {
		if r.Paths[i].Outcome.Misfit < r.Paths[best].Outcome.Misfit {
			best = i
		}
	}
	return best
}
