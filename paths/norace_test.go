//go:build !race

package paths

const underRace = false
