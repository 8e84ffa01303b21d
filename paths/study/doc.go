// Package study reads study files: what was measured, in which crystal, which
// temperature-time paths are worth considering. [Read] returns plain data in SI,
// or every problem of the file with its place and what to write instead. Nothing
// in a file is skipped over in silence: an unknown key is a problem.
//
//	s, err := study.Read("study.toml")
//	c := &s.Crystals[0]
//	problem, free, err := c.Problem(&c.Elements[0], s.Paths[0].History)
//
// What the user rules out stands in one table, of which every part may be left
// out; times stop at eruption, and each limit may have shortest, longest or both:
//
//	[limits]
//	life = { shortest = "1 kyr", longest = "300 kyr" }
//	lowest = "600 C"                                       # never colder
//	highest = "900 C"                                      # never hotter
//	above = [ { threshold = "lock-up", longest = "1 kyr" },  # in all
//	  { temperature = "820 C", longest = "2 yr", counts = "without a break" } ]
//	between = [ { from = "end of wake 1", to = "start of wake 2", shortest = "1 kyr" } ]
//
// A value of no interest by itself is known, known with an error, or free in a
// range: edge = "0.5 um", "0.8 +- 0.2 um", "free 0..2 um"; so are the tilt and the
// origin of a traverse.
//
// Where spots overlap, the errors of neighbouring points are taken to be those of
// an uneven sample and so to be correlated, unless the traverse says overlap =
// "independent", as counting errors are.
//
// document.go turns the text into a tree of nodes that know their line and
// column; each decode file reads one table of that tree; problem.go turns the
// result into what the solver takes. To add a key, add it to its table in keys.go
// or decode_path.go, to testdata/every-key/study.toml, and to the page that
// bankfire help study prints, which a test compares with [Tables].
package study
