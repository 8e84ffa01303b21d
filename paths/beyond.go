package paths

import (
	"fmt"
	"math"
	"strings"

	"bankfire/paths/study"
	"bankfire/thermal"
	"bankfire/thermal/numeric"
)

// extrapolationMatters is the part of the diffusion integral G that may be done
// outside a law's calibrated temperatures without a word. A thousandth of G is
// half a thousandth of every width, and D out there would have to be a hundred
// times what the law says to make it a tenth of G.
const extrapolationMatters = 1e-3

// inRange is how far a temperature may be outside the calibrated ones and count
// as inside, K: reports print whole degrees.
const inRange = 0.5

// outOfRange says which part of the diffusion along the history is done outside
// the temperatures for which the element's law was calibrated, and how far
// outside, if it matters; of each law that holds in a regime of its own. Time counts
// by the diffusion done in it, none by itself.
func outOfRange(e *study.Element, h *thermal.History) []string {
	regimes := e.Law.Regimes()
	all := math.Inf(-1)
	for _, law := range regimes {
		all = numeric.LnAdd(all, law.Law.LnIntegral(h, 0, h.Life()))
	}
	if math.IsInf(all, -1) {
		return nil
	}
	var notes []string
	for _, law := range regimes {
		name := law.Key
		if len(regimes) == 1 {
			name = lawName(e)
		}
		if how := lawBeyond(law, h, all); how != "" {
			notes = append(notes, name+": "+how)
		}
	}
	return notes
}

// lawBeyond says it of a law that does part of the diffusion, exp(all) in m2.
func lawBeyond(law *study.Law, h *thermal.History, all float64) string {
	lo, hi := h.Range()
	known := law.TMin != 0 || law.TMax != 0
	if !known || lo >= law.TMin-inRange && hi <= law.TMax+inRange {
		return ""
	}
	whole := math.Exp(law.Law.LnIntegral(h, 0, h.Life()) - all)
	above := func(temp float64) float64 { return math.Exp(law.Law.LnIntegralAbove(h, temp) - all) }
	below := func(temp float64) float64 { return whole - above(temp) }
	verb, of := " of the diffusion is done", fmt.Sprintf("its calibrated range of %.0f to %.0f C", law.TMin-thermal.ZeroCelsius, law.TMax-thermal.ZeroCelsius)
	var how []string
	say := func(where, upTo string, share func(float64) float64, edge, end float64) {
		if done := share(edge); done > extrapolationMatters {
			how = append(how, fmt.Sprintf("%s%s %s %s, %s %.0f C",
				percentText(done), verb, where, of, upTo, outermost(share, edge, end)-thermal.ZeroCelsius))
			verb, of = "", "it"
		}
	}
	say("below", "down to", below, law.TMin-inRange, lo-1) // at lo itself a hold is not above it
	say("above", "up to", above, law.TMax+inRange, hi)
	return strings.Join(how, ", and ")
}

// outermost returns the temperature between edge and end, K, beyond which so
// little of G is done that it does not matter. share falls from edge to end.
func outermost(share func(temp float64) float64, edge, end float64) float64 {
	const resolution = 0.1 // K
	temp, err := numeric.Root(func(temp float64) float64 { return share(temp) - extrapolationMatters }, edge, end, resolution)
	if err != nil { // the history does not reach beyond the edge but for rounding
		return edge
	}
	return temp
}

// percentText prints a share of at least a thousandth.
func percentText(share float64) string {
	if share < 0.0995 {
		return fmt.Sprintf("%.1f %%", 100*share)
	}
	return fmt.Sprintf("%.0f %%", 100*share)
}

// lawName is what notes call the law of the element.
func lawName(e *study.Element) string {
	if e.Law.Key == "" {
		return "the law of " + e.Name
	}
	return e.Law.Key
}
