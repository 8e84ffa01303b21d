package study

import "strings"

// nearest returns the known word that is closest to a mistyped one, or "" if
// none is close: within a third of its letters, one in short words. Of two as
// close the one as long as the word is taken, a swap being likelier than a loss.
func nearest(word string, known []string) string {
	best, least := "", 0
	for _, k := range known {
		if len(k) > 4*len(word)+4 || len(word) > 4*len(k)+4 {
			continue
		}
		n := distance(strings.ToLower(word), strings.ToLower(k))
		if n <= max(1, (len(k)+1)/3) && (best == "" || n < least || n == least && len(k) == len(word) && len(best) != len(word)) {
			best, least = k, n
		}
	}
	return best
}

// distance counts the letters to insert, delete, replace or swap with their
// neighbour to turn a into b (optimal string alignment; Damerau 1964, Commun.
// ACM 7, 171-176).
func distance(a, b string) int {
	before, last, row := make([]int, len(b)+1), make([]int, len(b)+1), make([]int, len(b)+1)
	for j := range last {
		last[j] = j
	}
	for i := 1; i <= len(a); i++ {
		row[0] = i
		for j := 1; j <= len(b); j++ {
			cost := 1
			if a[i-1] == b[j-1] {
				cost = 0
			}
			row[j] = min(last[j]+1, row[j-1]+1, last[j-1]+cost)
			if i > 1 && j > 1 && a[i-1] == b[j-2] && a[i-2] == b[j-1] {
				row[j] = min(row[j], before[j-2]+1)
			}
		}
		before, last, row = last, row, before
	}
	return last[len(b)]
}

// later reports whether a dotted key belongs to the grammar of study files but
// to none that this version reads, so that the message can say which it is.
func later(field string) bool {
	for strings.Contains(field, ".legs.legs.") {
		field = strings.ReplaceAll(field, ".legs.legs.", ".legs.")
	}
	switch field {
	case "conditions", "partition", "family", "law.own", "law.host", "law.times", "path.legs.conditions",
		"crystal.host", "crystal.zones.host", "crystal.zones.added",
		"crystal.element.rivals", "crystal.element.partition",
		"crystal.element.start.melt", "crystal.element.start.temperature", "crystal.element.start.scaled":
		return true
	}
	return false
}
