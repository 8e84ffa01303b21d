// Package study reads study files: what was measured, in which crystal, which
// temperature-time paths are worth considering. [Read] returns plain data in SI,
// or every problem of the file with its place and what to write instead. Nothing
// in a file is skipped over in silence: an unknown key is a problem.
//
//	s, err := study.Read("study.toml")
//	c := &s.Crystals[0]
//	problem, free, err := c.Problem(&c.Elements[0], s.Paths[0].History)
//
// document.go turns the text into a tree of nodes that know their line and
// column; each decode file reads one table of that tree; problem.go turns the
// result into what the solver takes. To add a key, add it to the list of known
// keys where its table is read, and to testdata/every-key/study.toml.
package study
