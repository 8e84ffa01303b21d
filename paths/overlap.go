package paths

import (
	"fmt"
	"math"

	"bankfire/paths/study"
	"bankfire/paths/traverse"
	"gonum.org/v1/gonum/mat"
)

// ownPart is the part of a point's variance that it never shares with its
// neighbours, however much their spots overlap: its counting error.
const ownPart = 0.1

// overlapWhite returns the inverse of the Cholesky factor of the correlation
// that overlapping spots give the errors of neighbouring points,
//
//	corr = (1 - ownPart) integral of K_i K_j / integral of K^2,
//
// which is exp(-d^2/(4 s^2)) for Gaussian spots of standard deviation s at
// distance d, and 1 - d/w for top-hats of width w: what a sample that is uneven
// on a scale finer than the spot does. It is nil where the full width of the
// spot is no larger than the least spacing, and where the study says that the
// errors are independent. Values below detection have no correlation.
// More than mostOverlapping points are refused: the work grows with their cube.
func overlapWhite(e *study.Element) (*mat.TriDense, error) {
	t := e.Traverse
	if t.Independent || !overlapping(t) {
		return nil, nil
	}
	n := len(t.Position)
	if n > mostOverlapping {
		return nil, e.Place.Error(fmt.Sprint(n), fmt.Sprintf("more than %d points whose spots overlap", mostOverlapping),
			`choose a window, or write overlap = "independent" in the traverse`)
	}
	corr := mat.NewSymDense(n, nil)
	for i := range n {
		corr.SetSym(i, i, 1)
		for j := range i {
			if t.Limit == nil || !t.Limit[i] && !t.Limit[j] {
				corr.SetSym(i, j, (1-ownPart)*overlap(t.Spot, math.Abs(t.Position[i]-t.Position[j])))
			}
		}
	}
	var factor mat.Cholesky
	if !factor.Factorize(corr) {
		panic("paths: a correlation with independent parts is not positive definite") // cannot happen
	}
	white := mat.NewTriDense(n, mat.Lower, nil)
	var lower mat.TriDense
	factor.LTo(&lower)
	if err := white.InverseTri(&lower); err != nil {
		panic("paths: " + err.Error()) // ownPart bounds the condition number
	}
	return white, nil
}

const mostOverlapping = 1000

// overlapping reports whether neighbouring spots cover the same ground. Spots that
// touch do not, though the last bits of positions may say that they do.
func overlapping(t *traverse.Traverse) bool {
	return t.Spot.Kind != traverse.Point && len(t.Position) > 1 && fullWidth(t.Spot) > leastSpacingOf(t.Position)*(1+touching)
}

// touching is how much wider than their spacing spots are taken to be no wider,
// relative: far more than the round-off of positions and far less than a position
// is known to.
const touching = 1e-6

func fullWidth(s traverse.Spot) float64 {
	if s.Kind == traverse.Gaussian {
		return s.Width * traverse.WidthPerSigma
	}
	return s.Width
}

func overlap(s traverse.Spot, distance float64) float64 {
	if s.Kind == traverse.TopHat {
		return math.Max(0, 1-distance/s.Width)
	}
	z := distance / (2 * s.Width)
	return math.Exp(-z * z)
}

func leastSpacingOf(position []float64) float64 {
	least := math.Inf(1)
	for i := 1; i < len(position); i++ {
		least = math.Min(least, math.Abs(position[i]-position[i-1]))
	}
	return least
}
