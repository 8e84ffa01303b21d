// Package paths weighs temperature-time paths against measured traverses:
// which reproduce them, which cannot, in which direction these miss and by how
// much. [Weigh] runs every path of a study and judges it, [Follow] tells one
// path in detail, [Judge] alone turns curves of chi-square against a multiplier
// on D into verdicts and never solves.
//
//	s, err := study.Read("study.toml")
//	r, err := paths.Weigh(ctx, s, runtime.NumCPU())
//	fmt.Println(r.Paths[0].Outcome.Verdict, r.Paths[0].Outcome.Shift)
//
// weigh.go takes a path through every element; profile.go is one element on one
// path, solved, audited and fitted; lens.go is how its traverse sees it; curve.go
// scans and reads chi-square; judge.go gives verdicts, lean.go what the errors of
// laws and, by deviate.go, of other constants would change of them, and ownbest.go
// what no path can be blamed for; notes.go says what goes with them. Sub-packages read studies and traverses, and
// fit by least squares.
package paths
