package draw

import "math"

// vanDerCorput is the radical inverse in one base: with the digits d0, d1, ... of
// the index from the lowest on, each permuted by a permutation p of its place,
//
//	sum of pk(dk) base^-(k+1).
//
// Source: Halton 1960, Numer. Math. 2, 84-90; the permutations, drawn at random for
// every place, as in Owen 2017, arXiv:1706.02808.
type vanDerCorput struct {
	base   uint64
	values [][]float64 // by place and digit: what the digit adds
	rest   []float64   // by place: what zeros from there on add
}

// newVanDerCorput draws the permutations with the key.
func newVanDerCorput(base int, key uint64) vanDerCorput {
	place := uint64(0)
	return vanDerCorputOf(base, func(p []int) {
		for i := len(p) - 1; i > 0; i-- {
			j := int(SplitMix(key, place) % uint64(i+1))
			p[i], p[j] = p[j], p[i]
			place++
		}
	})
}

// vanDerCorputOf permutes the digits of each place with shuffle, as many places as
// a float64 can tell.
func vanDerCorputOf(base int, shuffle func([]int)) vanDerCorput {
	v := vanDerCorput{base: uint64(base)}
	digits := make([]int, base)
	for scale := 1 / float64(base); 1-scale < 1; scale /= float64(base) {
		for d := range digits {
			digits[d] = d
		}
		shuffle(digits)
		adds := make([]float64, base)
		for d, to := range digits {
			adds[d] = float64(to) * scale
		}
		v.values = append(v.values, adds)
	}
	v.rest = make([]float64, len(v.values)+1)
	for k := len(v.values) - 1; k >= 0; k-- {
		v.rest[k] = v.rest[k+1] + v.values[k][0]
	}
	return v
}

// at returns the value for index i, at least 0 and below 1.
func (v *vanDerCorput) at(i uint64) float64 {
	sum, k := 0.0, 0
	for ; i > 0 && k < len(v.values); k++ {
		next := i / v.base
		sum += v.values[k][i-next*v.base]
		i = next
	}
	return math.Min(sum+v.rest[k], belowOne)
}

// prime is the prime number of the given place, 2 being that of 0.
func prime(place int) int {
	var found []int
	for n := 2; ; n++ {
		isPrime := true
		for _, p := range found {
			if p*p > n {
				break
			}
			if n%p == 0 {
				isPrime = false
				break
			}
		}
		if isPrime {
			if found = append(found, n); len(found) > place {
				return n
			}
		}
	}
}
