package study

import (
	"strings"

	"bankfire/thermal"
)

// nearest returns the known word that is closest to a mistyped one, or "" if
// none is close: within a third of its letters, one in short words. Of two as
// close the one as long as the word is taken, a swap being likelier than a loss.
func nearest(word string, known []string) string {
	best, least := "", 0
	lower := strings.ToLower(word)
	for _, k := range known {
		n := thermal.Slips(lower, strings.ToLower(k))
		if n <= max(1, (len(k)+1)/3) && (best == "" || n < least || n == least && len(k) == len(word) && len(best) != len(word)) {
			best, least = k, n
		}
	}
	return best
}

// later reports whether a dotted key belongs to the grammar of study files but
// to none that this version reads, so that the message can say which it is.
func later(field string) bool {
	for strings.Contains(field, ".legs.legs.") {
		field = strings.ReplaceAll(field, ".legs.legs.", ".legs.")
	}
	switch field {
	case "law.times",
		"crystal.element.rivals":
		return true
	}
	return false
}
