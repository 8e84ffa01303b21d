// Package least fits a model to measured data by least squares, where most of
// the unknown values enter the model linearly and a few do not.
//
// A [Problem] holds the data, with correlated errors and one-sided limits if
// need be, and says what is known of the values beforehand. Its Solve takes the
// model as a function of the bent values, those that do not enter linearly:
//
//	line := least.Problem{Obs: y, Sigma: s, Linear: []least.Prior{least.None, least.None}}
//	best := line.Solve(func(dst [][]float64, _ []float64) { fill(dst, one, x) })
//
// It knows nothing of crystals.
package least
