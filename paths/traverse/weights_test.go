package traverse

import (
	"errors"
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"strings"
	"testing"

	"bankfire/thermal"
)

// Tolerances.
const (
	roundOffTol = 1e-13 // sums of some hundred products of numbers near 1
	cutTol      = 1e-7  // a Gaussian cut at 6 sigma has lost 2*6*phi(6) = 7e-8 of its variance
)

// apart reports whether got is not within tol of want; NaN never is.
func apart(got, want, tol float64) bool { return !(math.Abs(got-want) <= tol) }

func TestApartSeesNaN(t *testing.T) {
	for _, got := range []float64{math.NaN(), 1.1, math.Inf(1)} {
		if !apart(got, 1, 0.01) {
			t.Errorf("apart(%g, 1, 0.01) is false", got)
		}
	}
	if apart(1.001, 1, 0.01) {
		t.Error("apart(1.001, 1, 0.01) is true")
	}
}

// randomFaces returns n cells from start on whose widths change by up to the
// ratio that the solver's grids allow.
func randomFaces(rng *rand.Rand, n int, start float64) []float64 {
	faces, h := []float64{start}, 1e-6
	for range n {
		h *= math.Pow(1.2, 2*rng.Float64()-1)
		faces = append(faces, faces[len(faces)-1]+h)
	}
	return faces
}

// means returns the cell means of the profile whose integral is given.
func means(faces []float64, integral func(float64) float64) []float64 {
	c := make([]float64, len(faces)-1)
	for i := range c {
		c[i] = (integral(faces[i+1]) - integral(faces[i])) / (faces[i+1] - faces[i])
	}
	return c
}

// see returns what a spot shows of cells at the positions.
func see(t *testing.T, faces []float64, mirrored bool, s Spot, at, cells []float64) []float64 {
	t.Helper()
	w, err := NewWeights(faces, mirrored, 0, s, at)
	if err != nil {
		t.Fatal(err)
	}
	dst := make([]float64, len(at))
	w.Apply(dst, cells)
	return dst
}

var spots = []struct {
	name string
	spot Spot
}{
	{"point", Spot{}},
	{"narrow gaussian", Spot{Gaussian, 0.1e-6}},
	{"gaussian", Spot{Gaussian, 2e-6}},
	{"wide gaussian", Spot{Gaussian, 300e-6}},
	{"narrow top-hat", Spot{TopHat, 0.3e-6}},
	{"top-hat", Spot{TopHat, 7e-6}},
	{"wide top-hat", Spot{TopHat, 900e-6}},
}

// TestWeightsAddUp holds everywhere, over the rim and at the centre too.
func TestWeightsAddUp(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 1))
	for _, test := range spots {
		for _, mirrored := range []bool{false, true} {
			t.Run(fmt.Sprintf("%s/mirrored=%v", test.name, mirrored), func(t *testing.T) {
				faces := randomFaces(rng, 60, 0)
				at := append(randomPositions(rng, 50, faces, mirrored), faces[0], faces[60], faces[30])
				w, err := NewWeights(faces, mirrored, 0, test.spot, at)
				if err != nil {
					t.Fatal(err)
				}
				for i, row := range w.Row {
					checkRow(t, at[i], row, 60)
				}
			})
		}
	}
}

func randomPositions(rng *rand.Rand, n int, faces []float64, mirrored bool) []float64 {
	first, last := faces[0], faces[len(faces)-1]
	if mirrored {
		first = 2*first - last
	}
	at := make([]float64, n)
	for i := range at {
		at[i] = first + (last-first)*rng.Float64()
	}
	return at
}

func checkRow(t *testing.T, at float64, row Sparse, cells int) {
	t.Helper()
	sum, before := 0.0, -1
	for k, c := range row.Cell {
		if c <= before || c >= cells {
			t.Fatalf("at %g m: cell %d behind cell %d, of %d", at, c, before, cells)
		}
		before = c
		sum += row.Weight[k]
	}
	if apart(sum, 1, roundOffTol) {
		t.Errorf("at %g m: sum %.17g, want 1", at, sum)
	}
}

// TestWeightsKeepParabolas: away from the ends a spot shows a straight line as
// it is, and a parabola c x^2 raised by c times the variance of the spot.
func TestWeightsKeepParabolas(t *testing.T) {
	rng := rand.New(rand.NewPCG(2, 2))
	for _, test := range spots[:6] {
		if test.spot.Sigma() > 10e-6 {
			continue // reaches the ends
		}
		t.Run(test.name, func(t *testing.T) {
			faces := randomFaces(rng, 80, 5e-6)
			size := faces[80]
			line := means(faces, func(x float64) float64 { return x + x*x/2/size })
			bowl := means(faces, func(x float64) float64 { return math.Pow(x/size, 3) * size / 3 })
			var at []float64
			for range 40 {
				at = append(at, size*(0.35+0.3*rng.Float64()))
			}
			gotLine, gotBowl := see(t, faces, false, test.spot, at, line), see(t, faces, false, test.spot, at, bowl)
			for i, x := range at {
				if want := 1 + x/size; apart(gotLine[i], want, 1e-12) {
					t.Errorf("line at %g m: got %.15g, want %.15g", x, gotLine[i], want)
				}
				spread := square(test.spot.Sigma() / size)
				if want := square(x/size) + spread; apart(gotBowl[i], want, cutTol*spread+1e-12) {
					t.Errorf("parabola at %g m: got %.15g, want %.15g", x, gotBowl[i], want)
				}
			}
		})
	}
}

// TestWeightsOfFineCells: a spot a hundred thousand times wider than the
// smallest cells shows a straight line as it is.
func TestWeightsOfFineCells(t *testing.T) {
	faces := []float64{0}
	for h := 1e-10; faces[len(faces)-1] < 300e-6; h *= 1.2 {
		faces = append(faces, faces[len(faces)-1]+h)
	}
	cells := make([]float64, len(faces)-1)
	for i := range cells {
		cells[i] = (faces[i] + faces[i+1]) / 2 * 1e6
	}
	x := 80e-6
	got := see(t, faces, false, Spot{Gaussian, 10e-6}, []float64{x}, cells)[0]
	if apart(got, x*1e6, 1e-11) {
		t.Errorf("got %.15g um, want %g um", got, x*1e6)
	}
}

// TestWeightsMirrored: half a crystal with a mirror shows what the whole
// crystal shows, on both sides of the centre.
func TestWeightsMirrored(t *testing.T) {
	rng := rand.New(rand.NewPCG(3, 3))
	for _, test := range spots {
		t.Run(test.name, func(t *testing.T) {
			half := randomFaces(rng, 40, 0)
			whole, cells, both := []float64{}, make([]float64, 40), make([]float64, 80)
			for i := range 40 {
				whole = append(whole, -half[40-i])
				cells[i] = rng.Float64()
				both[39-i], both[40+i] = cells[i], cells[i]
			}
			whole = append(whole, half...)
			at := append(randomPositions(rng, 60, half, true), 0, half[40], -half[40])
			got, want := see(t, half, true, test.spot, at, cells), see(t, whole, false, test.spot, at, both)
			for i, x := range at {
				if apart(got[i], want[i], roundOffTol) {
					t.Errorf("at %g m: half %.15g, whole %.15g", x, got[i], want[i])
				}
			}
		})
	}
}

// TestWeightsOverRim: of a straight line, a spot with its middle on the rim
// shows the mean of its inner half: for a Gaussian sigma sqrt(2/pi) inside (the
// mean of a half-normal distribution), for a top-hat a quarter of its width.
func TestWeightsOverRim(t *testing.T) {
	faces := randomFaces(rand.New(rand.NewPCG(4, 4)), 100, 0)
	rim := faces[100]
	depth := means(faces, func(x float64) float64 { return 1e6 * (rim*x - x*x/2) }) // in um
	for _, test := range []struct {
		name string
		spot Spot
		want float64
	}{
		{"gaussian", Spot{Gaussian, 3e-6}, 3 * math.Sqrt(2/math.Pi)},
		{"top-hat", Spot{TopHat, 8e-6}, 2},
		{"point", Spot{}, 0},
	} {
		t.Run(test.name, func(t *testing.T) {
			got := see(t, faces, false, test.spot, []float64{rim}, depth)[0]
			if apart(got, test.want, cutTol*10) {
				t.Errorf("got a depth of %.10g um, want %.10g um", got, test.want)
			}
		})
	}
}

// TestWeightsOrder: the error of a smooth profile falls with the third power of
// the cells, also for spots that are narrower than the cells.
func TestWeightsOrder(t *testing.T) {
	const width = 10e-6 // standard deviation of the profile, so that sqrt(2 D t) is 10 um
	profile := func(sigma, x float64) float64 { return math.Erfc((x-50e-6)/math.Hypot(width, sigma)/math.Sqrt2) / 2 }
	for _, s := range []Spot{{}, {Gaussian, 0.01e-6}, {TopHat, 0.01e-6}} {
		t.Run(fmt.Sprintf("kind=%d", s.Kind), func(t *testing.T) {
			var worst []float64
			for n := 20; n <= 160; n *= 2 {
				worst = append(worst, worstOf(t, s, gradedFaces(n), profile))
			}
			for i := 1; i < len(worst); i++ {
				order := math.Log2(worst[i-1] / worst[i])
				t.Logf("%4d cells: largest error %.2e, order %.2f", 20<<i, worst[i], order)
				if !(order > 2.6) {
					t.Errorf("order %.2f with %d cells, want about 3", order, 20<<i)
				}
			}
		})
	}
}

// gradedFaces spreads n cells over 100 um, twice as wide at the ends as in the
// middle.
func gradedFaces(n int) []float64 {
	faces := make([]float64, n+1)
	for i := range faces {
		u := 2*float64(i)/float64(n) - 1
		faces[i] = 50e-6 * (1 + (2*u+u*u*u)/3) // slope 2 + 3 u^2
	}
	return faces
}

func worstOf(t *testing.T, s Spot, faces []float64, profile func(sigma, x float64) float64) float64 {
	const width = 10e-6
	integral := func(x float64) float64 { // of erfc(z)/2: z erfc(z) - exp(-z^2)/sqrt(pi), over 2, z = (x-50um)/(width sqrt2)
		z := (x - 50e-6) / width / math.Sqrt2
		return width * math.Sqrt2 * (z*math.Erfc(z) - math.Exp(-z*z)/math.Sqrt(math.Pi)) / 2
	}
	var at []float64
	for i := range 501 {
		at = append(at, float64(i)*0.2e-6)
	}
	worst := 0.0
	for i, got := range see(t, faces, false, s, at, means(faces, integral)) {
		diff := math.Abs(got - profile(s.Sigma(), at[i]))
		if !(diff <= worst) {
			worst = diff
		}
	}
	return worst
}

// TestPointIsContinuous: moving a point by very little changes what it sees by
// very little, across faces and centres too.
func TestPointIsContinuous(t *testing.T) {
	rng := rand.New(rand.NewPCG(5, 5))
	faces := randomFaces(rng, 20, 0)
	cells := make([]float64, 20)
	for i := range cells {
		cells[i] = rng.Float64()
	}
	const little = 1e-15 // m, a billionth of a cell
	for i := 1; i < 20; i++ {
		mid := (faces[i] + faces[i+1]) / 2
		at := []float64{faces[i] - little, faces[i] + little, mid - little, mid + little}
		got := see(t, faces, false, Spot{}, at, cells)
		if apart(got[0], got[1], 1e-7) || apart(got[2], got[3], 1e-7) {
			t.Errorf("cell %d: %v jumps", i, got)
		}
	}
}

// TestMomentsAgainstErf: the content of a cell is a difference of error
// functions.
func TestMomentsAgainstErf(t *testing.T) {
	s := Spot{Gaussian, 2}
	for _, cell := range [][2]float64{{-12, 12}, {0, 0.3}, {-1, 4}, {5, 12}, {-12, -3}} {
		got := s.moments(0, 0, cell[0], cell[1])[0]
		want := math.Sqrt(math.Pi/2) * 2 * (math.Erf(cell[1]/2/math.Sqrt2) - math.Erf(cell[0]/2/math.Sqrt2))
		if apart(got, want, 1e-12*want) {
			t.Errorf("%v: got %.16g, want %.16g", cell, got, want)
		}
	}
}

func TestWeightsRefuse(t *testing.T) {
	faces := []float64{0, 1e-6, 2e-6, 3e-6}
	for _, test := range []struct {
		name     string
		mirrored bool
		at       []float64
		want     string
	}{
		{"beyond the rim", false, []float64{1e-6, 3.1e-6}, `position "3.1 um": outside the crystal, which runs from 0 um to 3 um`},
		{"below the inner end", false, []float64{-0.1e-6}, `position "-0.1 um": outside`},
		{"beyond the far rim", true, []float64{-3.1e-6}, `from -3 um to 3 um`},
		{"not a number", false, []float64{math.NaN()}, `position "NaN um"`},
		{"infinite", true, []float64{math.Inf(-1)}, `position "-Inf um"`},
	} {
		t.Run(test.name, func(t *testing.T) {
			w, err := NewWeights(faces, test.mirrored, 0, Spot{}, test.at)
			var input *thermal.InputError
			if w != nil || !errors.As(err, &input) || !strings.Contains(err.Error(), test.want) {
				t.Errorf("got %v, %v, want %s", w, err, test.want)
			}
		})
	}
	t.Run("no more than 20", func(t *testing.T) {
		_, err := NewWeights(faces, false, 0, Spot{}, slices.Repeat([]float64{-1}, 100))
		if n := strings.Count(err.Error(), "outside"); n != maxProblems {
			t.Errorf("%d problems, want %d", n, maxProblems)
		}
	})
	t.Run("round-off at the ends is no harm", func(t *testing.T) {
		if _, err := NewWeights(faces, false, 0, Spot{}, []float64{-1e-18, math.Nextafter(3e-6, 1)}); err != nil {
			t.Error(err)
		}
	})
}

func TestWeightsPanic(t *testing.T) {
	good := []float64{0, 1, 2, 3}
	for _, test := range []struct {
		name string
		call func()
	}{
		{"two cells", func() { NewWeights(good[:3], false, 0, Spot{}, nil) }},
		{"faces that fall", func() { NewWeights([]float64{0, 2, 1, 3}, false, 0, Spot{}, nil) }},
		{"a face that is no number", func() { NewWeights([]float64{0, 1, math.NaN(), 3}, false, 0, Spot{}, nil) }},
		{"no width", func() { NewWeights(good, false, 0, Spot{Kind: Gaussian}, nil) }},
		{"endless width", func() { NewWeights(good, false, 0, Spot{TopHat, math.Inf(1)}, nil) }},
		{"unknown kind", func() { NewWeights(good, false, 0, Spot{7, 1}, nil) }},
		{"unknown curve", func() { NewWeights(good, false, 3, Spot{}, nil) }},
		{"short dst", func() { (&Weights{Row: make([]Sparse, 2)}).Apply(make([]float64, 1), nil) }},
	} {
		t.Run(test.name, func(t *testing.T) {
			defer func() {
				if s, ok := recover().(string); !ok || !strings.HasPrefix(s, "traverse: ") {
					t.Errorf("panic with %v, want traverse: ...", s)
				}
			}()
			test.call()
		})
	}
}

func TestApplyDoesNotAllocate(t *testing.T) {
	faces := gradedFaces(100)
	w, err := NewWeights(faces, true, 0, Spot{Gaussian, 1e-6}, []float64{1e-6, 50e-6, 99e-6})
	if err != nil {
		t.Fatal(err)
	}
	dst, cells := make([]float64, 3), make([]float64, 100)
	if n := testing.AllocsPerRun(10, func() { w.Apply(dst, cells) }); n != 0 {
		t.Errorf("%g allocations, want none", n)
	}
}

// TestWeightsOfCurvedCells: in a cylinder and a ball, whose cells hold means over r dr
// and r^2 dr, a parabola is seen as it is, at the centre, across it and in a piece; and
// a cosine with an error of third order.
func TestWeightsOfCurvedCells(t *testing.T) {
	const size, order, slack = 80e-6, 3.0, 0.3 // of the order, between grids of 40 to 160 cells
	rng := rand.New(rand.NewPCG(11, 2))
	for curve := 1; curve <= 2; curve++ {
		n := float64(curve) + 1
		ball := func(faces []float64, integral func(r float64) float64) []float64 {
			c := means(faces, integral)
			for i := range c {
				c[i] *= n * (faces[i+1] - faces[i]) / (math.Pow(faces[i+1], n) - math.Pow(faces[i], n))
			}
			return c
		}
		for _, mirrored := range []bool{true, false} {
			tilt, inner := 0.0, 0.0
			if !mirrored {
				tilt, inner = 0.7, 20e-6
			}
			faces := randomFaces(rng, 40, inner)
			cells := ball(faces, func(r float64) float64 {
				return math.Pow(r, n) * (1/n + tilt*r/size/(n+1) + square(r/size)/(n+2))
			})
			at := append(randomPositions(rng, 40, faces, mirrored), faces[0], faces[40])
			w, err := NewWeights(faces, mirrored, curve, Spot{}, at)
			if err != nil {
				t.Fatal(err)
			}
			got := make([]float64, len(at))
			w.Apply(got, cells)
			for i, r := range at {
				if want := 1 + tilt*r/size + square(r/size); apart(got[i], want, 1e-11) {
					t.Errorf("curve %d: parabola at %g m: got %.15g, want %.15g", curve, r, got[i], want)
				}
			}
		}
		var worst []float64
		for cells := 40; cells <= 160; cells *= 2 {
			faces := make([]float64, cells+1)
			for i := range faces {
				faces[i] = 2 * float64(i) / float64(cells)
			}
			c := ball(faces, func(r float64) float64 { // of r cos r, of r^2 cos r
				return [3]float64{1: r*math.Sin(r) + math.Cos(r), 2: r*r*math.Sin(r) + 2*r*math.Cos(r) - 2*math.Sin(r)}[curve]
			})
			var at []float64
			for x := range 2001 {
				at = append(at, float64(x)*1e-3)
			}
			w, err := NewWeights(faces, true, curve, Spot{}, at)
			if err != nil {
				t.Fatal(err)
			}
			got, off := make([]float64, len(at)), 0.0
			w.Apply(got, c)
			for i, r := range at {
				off = max(off, math.Abs(got[i]-math.Cos(r)))
			}
			worst = append(worst, off)
		}
		for i := 1; i < len(worst); i++ {
			got := math.Log2(worst[i-1] / worst[i])
			t.Logf("curve %d: error %.3g, order %.2f", curve, worst[i], got)
			if !(got >= order-slack) {
				t.Errorf("curve %d: errors %.3g, order %.2f, want %g", curve, worst, got, order)
			}
		}
	}
}
