package draw

import (
	"hash/fnv"
	"math"
	"math/bits"
)

// Method says how points are spread.
type Method int

// The methods.
const (
	Halton Method = iota // fills the cube evenly and without a lattice, however many points are taken
	Grid                 // the middles of equal boxes
	Random               // independent and uniform
	Latin                // one point in each of count slices along every axis, else at random
)

// Methods are the words for the methods, in their order.
func Methods() []string { return []string{"halton", "grid", "random", "latin"} }

func (m Method) String() string { return Methods()[m] }

// MostLatin is the largest Latin hypercube.
const MostLatin = 1_000_000

// Points is a set of points in the unit cube. It is read-only.
type Points struct {
	method Method
	count  int64
	key    uint64
	levels []int          // of a grid, by axis
	digits []vanDerCorput // of Halton, by axis
}

// New returns count points in as many dimensions as levels has entries, drawn with
// the seed for what has the name. An entry of levels is how many steps a grid takes
// along the axis, or 0 to let it choose; other methods do not look at them. A grid
// has at most count points: as many steps along each axis of its choice as there is
// room for, the same along all.
//
// New panics if count is below 1, or above MostLatin for a Latin hypercube.
func New(method Method, seed uint64, name string, levels []int, count int64) *Points {
	if count < 1 || method == Latin && count > MostLatin {
		panic("draw: no set has so many points")
	}
	p := &Points{method: method, count: count, key: keyOf(seed, name)}
	switch method {
	case Grid:
		p.levels, p.count = gridLevels(levels, count)
	case Halton:
		for j := range levels {
			p.digits = append(p.digits, newVanDerCorput(prime(j), p.key+uint64(j)))
		}
	}
	return p
}

// Count is how many points there are.
func (p *Points) Count() int64 { return p.count }

// Method is how they are spread.
func (p *Points) Method() Method { return p.method }

// Levels are the steps of a grid along each axis, nil for other methods. Not to be
// changed.
func (p *Points) Levels() []int { return p.levels }

// At writes point i, counted from 0, to dst, one coordinate a dimension, each at
// least 0 and below 1.
func (p *Points) At(dst []float64, i int64) {
	switch p.method {
	case Halton:
		for j := range dst {
			dst[j] = p.digits[j].at(uint64(i))
		}
	case Grid:
		for j, n := range p.levels { // mixed radix, the first axis fastest
			dst[j] = (float64(i%int64(n)) + 0.5) / float64(n)
			i /= int64(n)
		}
	case Random:
		for j := range dst {
			dst[j] = unit(SplitMix(p.key, uint64(i)*uint64(len(dst))+uint64(j)))
		}
	case Latin:
		for j := range dst {
			slice := shuffled(uint64(i), uint64(p.count), mixed(p.key+uint64(j)))
			within := unit(SplitMix(p.key, uint64(i)*uint64(len(dst))+uint64(j)))
			dst[j] = math.Min((float64(slice)+within)/float64(p.count), belowOne)
		}
	}
}

// Stream is random numbers that belong to a point: number k is a function of the
// seed, the name, the point, the stream and k alone.
type Stream struct{ key uint64 }

// Stream returns stream n of point i. It has nothing to do with the point's
// coordinates, and streams have nothing to do with each other.
func (p *Points) Stream(i int64, n int) Stream {
	return Stream{mixed(mixed(mixed(p.key)^uint64(i)) ^ uint64(n))}
}

// Unit is number k of the stream, at least 0 and below 1.
func (s Stream) Unit(k uint64) float64 { return unit(SplitMix(s.key, k)) }

const belowOne = 1 - 0x1p-53

// gridLevels chooses the steps that are left open and counts the points.
func gridLevels(levels []int, count int64) ([]int, int64) {
	given, open := int64(1), 0
	for _, n := range levels {
		if n > 0 {
			given = product(given, int64(n))
		} else {
			open++
		}
	}
	steps := int64(1)
	for open > 0 && power(steps+1, open, given) <= count {
		steps++
	}
	out := make([]int, len(levels))
	for j, n := range levels {
		if out[j] = n; n <= 0 {
			out[j] = int(steps)
		}
	}
	return out, power(steps, open, given)
}

// power is times n to the k, at most math.MaxInt64.
func power(n int64, k int, times int64) int64 {
	for range k {
		times = product(times, n)
	}
	return times
}

func product(a, b int64) int64 {
	if hi, lo := bits.Mul64(uint64(a), uint64(b)); hi == 0 && lo <= math.MaxInt64 {
		return int64(lo)
	}
	return math.MaxInt64
}

// keyOf is what tells the draws of one seed and name from all others.
func keyOf(seed uint64, name string) uint64 {
	h := fnv.New64a()
	h.Write([]byte(name))
	return mixed(mixed(seed) ^ h.Sum64())
}

// SplitMix is output n, counted from 0, of the generator SplitMix64 with the seed.
// Source: Steele, Lea and Flood 2014, Proc. OOPSLA, 453-472.
func SplitMix(seed, n uint64) uint64 { return mixed(seed + (n+1)*0x9e3779b97f4a7c15) }

// mixed is that generator's finaliser.
func mixed(z uint64) uint64 {
	z = (z ^ z>>30) * 0xbf58476d1ce4e5b9
	z = (z ^ z>>27) * 0x94d049bb133111eb
	return z ^ z>>31
}

// unit is a number from 0 to below 1 with the 53 highest bits of z.
func unit(z uint64) float64 { return float64(z>>11) * 0x1p-53 }

// shuffled is where a permutation of 0 ... n-1, chosen by the key, puts i. It is a
// Feistel network over the next power of 4, walked until it is back below n.
func shuffled(i, n, key uint64) uint64 {
	half := (bits.Len64(n-1) + 1) / 2
	mask := uint64(1)<<half - 1
	for {
		left, right := i>>half, i&mask
		for round := range uint64(4) {
			left, right = right, left^mixed(key+round*0x9e3779b97f4a7c15^right)&mask
		}
		if i = left<<half | right; i < n {
			return i
		}
	}
}
