// Package traverse holds what was measured and how the instrument saw it.
//
// [Read] turns a text table into a [Traverse]: positions, values and one
// standard deviation a point, each number checked, and a note for everything
// that was not taken exactly as typed. Where the zero or the slant of the line
// is uncertain, [Traverse.Place] says where the points are for given ones.
// [NewWeights] turns the instrument's [Spot] into sparse weights, so that what a
// model crystal would have shown is one weighted sum of its cells a point.
// [ReadColumns] is the plain table reader under it, for other two-column data
// such as temperature against time.
//
//	t, err := traverse.Read("ti.csv", file, options)
//	w := t.WeightsAt(plan.Faces(), true, 0, 0, 0)
//	w.Apply(seen, cells) // one value a measured point
package traverse
