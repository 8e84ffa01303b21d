package draw

import (
	"math"
	"slices"
	"testing"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/stat/distmv"
	"gonum.org/v1/gonum/stat/distuv"
	"gonum.org/v1/gonum/stat/samplemv"
)

// unshuffled makes rand's Perm leave all in order: it always draws the largest.
type unshuffled struct{}

func (unshuffled) Uint64() uint64 { return math.MaxUint64 }

// haltonError is round-off of a sum of 53 terms below 1.
const haltonError = 1e-15

func TestUnscrambledHalton(t *testing.T) {
	const n, dims = 2000, 8
	want := mat.NewDense(n, dims, nil)
	samplemv.Halton{Kind: samplemv.Owen, Q: distmv.NewUnitUniform(dims, nil), Src: unshuffled{}}.Sample(want)
	for j := range dims {
		v := vanDerCorputOf(prime(j), func([]int) {})
		for i := range n {
			if got := v.at(uint64(i)); !(math.Abs(got-want.At(i, j)) <= haltonError) {
				t.Fatalf("dimension %d, point %d: %v, gonum %v", j, i, got, want.At(i, j))
			}
		}
	}
}

// The first points in bases 2 and 3, Halton 1960.
func TestHaltonByHand(t *testing.T) {
	for base, want := range map[int][]float64{2: {0, 1. / 2, 1. / 4, 3. / 4, 1. / 8, 5. / 8}, 3: {0, 1. / 3, 2. / 3, 1. / 9, 4. / 9, 7. / 9}} {
		v := vanDerCorputOf(base, func([]int) {})
		for i, w := range want {
			if got := v.at(uint64(i)); !(math.Abs(got-w) <= haltonError) {
				t.Errorf("base %d, point %d: %v, want %v", base, i, got, w)
			}
		}
	}
}

// The outputs that the generator's reference implementation gives for the seed
// 1234567.
func TestSplitMix(t *testing.T) {
	for n, want := range []uint64{6457827717110365317, 3203168211198807973, 9817491932198370423, 4593380528125082431, 16408922859458223821} {
		if got := SplitMix(1234567, uint64(n)); got != want {
			t.Errorf("output %d: %d, want %d", n, got, want)
		}
	}
}

// Chi-square of counts in equal boxes, along every axis and over every pair of
// axes, stays below what it exceeds once in a million times.
func TestUniform(t *testing.T) {
	const n, dims, boxes = 20000, 5, 10
	for method := range Methods() {
		if Method(method) == Grid {
			continue
		}
		p := New(Method(method), 7, "uniform", make([]int, dims), n)
		points := make([][]float64, n)
		for i := range points {
			points[i] = make([]float64, dims)
			p.At(points[i], int64(i))
			for _, u := range points[i] {
				if !(u >= 0 && u < 1) {
					t.Fatalf("%v: %v", Method(method), u)
				}
			}
		}
		for a := range dims {
			for b := range a + 1 { // b = a: along one axis
				counts := make([]float64, boxes*boxes)
				for _, u := range points {
					k := int(u[a] * boxes)
					if b < a {
						k = k*boxes + int(u[b]*boxes)
					}
					counts[k]++
				}
				used := boxes
				if b < a {
					used = boxes * boxes
				}
				chi, want := 0.0, float64(n)/float64(used)
				for _, c := range counts[:used] {
					chi += (c - want) * (c - want) / want
				}
				if most := (distuv.ChiSquared{K: float64(used - 1)}).Quantile(1 - 1e-6); !(chi <= most) {
					t.Errorf("%v, axes %d and %d: chi-square %.4g, want at most %.4g", Method(method), a, b, chi, most)
				}
			}
		}
	}
}

// A point depends on nothing drawn before, and on seed and name.
func TestPure(t *testing.T) {
	for method := range Methods() {
		p, q := New(Method(method), 1, "a", make([]int, 3), 1000), New(Method(method), 1, "a", make([]int, 3), 1000)
		a, b := make([]float64, 3), make([]float64, 3)
		for i := range p.Count() {
			p.At(a, i)
			q.At(b, q.Count()-1-i)
			q.At(b, i)
			if !slices.Equal(a, b) {
				t.Fatalf("%v: point %d is %v and %v", Method(method), i, a, b)
			}
		}
		for _, other := range []*Points{New(Method(method), 2, "a", make([]int, 3), 1000), New(Method(method), 1, "b", make([]int, 3), 1000)} {
			p.At(a, 5)
			if other.At(b, 5); slices.Equal(a, b) != (Method(method) == Grid) {
				t.Errorf("%v: with another seed or name %v and %v", Method(method), a, b)
			}
		}
	}
}

func TestLatinHasOnePointASlice(t *testing.T) {
	for _, n := range []int64{1, 2, 3, 4, 5, 17, 1000, 4096, 4097} {
		p := New(Latin, 3, "latin", make([]int, 4), n)
		u := make([]float64, 4)
		seen := make([][]bool, 4)
		for j := range seen {
			seen[j] = make([]bool, n)
		}
		for i := range n {
			p.At(u, i)
			for j := range u {
				k := int64(u[j] * float64(n))
				if seen[j][k] {
					t.Fatalf("%d points: two in slice %d of axis %d", n, k, j)
				}
				seen[j][k] = true
			}
		}
	}
}

func TestGrid(t *testing.T) {
	p := New(Grid, 1, "grid", []int{0, 4, 0}, 100)
	if p.Count() != 100 || !slices.Equal(p.Levels(), []int{5, 4, 5}) { // 4 x 5 x 5
		t.Fatalf("%d points of %v", p.Count(), p.Levels())
	}
	u := make([]float64, 3)
	seen := map[[3]float64]bool{}
	for i := range p.Count() {
		p.At(u, i)
		seen[[3]float64(u)] = true
	}
	if len(seen) != 100 || !seen[[3]float64{0.1, 0.125, 0.9}] {
		t.Errorf("%d different points", len(seen))
	}
}

func BenchmarkHalton(b *testing.B) {
	p := New(Halton, 1, "bench", make([]int, 4), 1<<40)
	u := make([]float64, 4)
	for i := 0; b.Loop(); i++ {
		p.At(u, int64(i))
	}
}

// TestStreams: numbers of one place over all points and streams are uniform and
// independent of those of the next point and stream, by the same chi-square.
func TestStreams(t *testing.T) {
	const n, boxes = 20000, 10
	p := New(Halton, 7, "streams", make([]int, 2), n)
	for what, pair := range map[string]func(i int64) (a, b float64){
		"points":  func(i int64) (a, b float64) { return p.Stream(i, 0).Unit(3), p.Stream(i+1, 0).Unit(3) },
		"streams": func(i int64) (a, b float64) { return p.Stream(i, 0).Unit(3), p.Stream(i, 1).Unit(3) },
		"numbers": func(i int64) (a, b float64) { return p.Stream(i, 0).Unit(0), p.Stream(i, 0).Unit(1) },
		"crossed": func(i int64) (a, b float64) { return p.Stream(i, 1).Unit(0), p.Stream(i+1, 0).Unit(0) },
	} {
		counts := make([]float64, boxes*boxes)
		for i := range int64(n) {
			a, b := pair(i)
			counts[int(a*boxes)*boxes+int(b*boxes)]++
		}
		chi, want := 0.0, float64(n)/boxes/boxes
		for _, c := range counts {
			chi += (c - want) * (c - want) / want
		}
		if most := (distuv.ChiSquared{K: boxes*boxes - 1}).Quantile(1 - 1e-6); !(chi <= most) {
			t.Errorf("%s: chi-square %.4g, want at most %.4g", what, chi, most)
		}
	}
	if New(Halton, 8, "streams", nil, n).Stream(0, 0) == p.Stream(0, 0) || New(Halton, 7, "other", nil, n).Stream(0, 0) == p.Stream(0, 0) {
		t.Error("the same with another seed or name")
	}
}
