package thermal

import "math"

// mostLetters is the length of a name, in bytes, beyond which nobody looks for what was meant by it.
const mostLetters = 64

// Slips is how many slips of the hand make b of a: bytes to insert, delete, replace or swap with their neighbour (the
// optimal string alignment). Names of more than 64 bytes are infinitely far from every other.
// Source: Damerau (1964), Communications of the ACM 7, 171-176.
func Slips(a, b string) int {
	if a == b {
		return 0
	}
	if len(a) > mostLetters || len(b) > mostLetters {
		return math.MaxInt
	}
	var before, last, row [mostLetters + 1]int
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
		before, last = last, row
	}
	return last[len(b)]
}
