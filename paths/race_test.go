//go:build race

package paths

// underRace says that the race detector slows everything down twentyfold:
// long simulations, in which nothing new runs side by side, are left out.
const underRace = true
