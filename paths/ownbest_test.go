package paths

import (
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"bankfire/paths/least"
	"bankfire/paths/study"
	"bankfire/paths/traverse"
	"gonum.org/v1/gonum/mat"
)

// residuals makes a problem whose residuals these are, with points from the
// core to the rim of the invented crystal, and its own best fit with as many
// degrees as points.
func residuals(r []float64, limit []bool, white *mat.TriDense) (*OwnBest, *least.Problem, least.Solution) {
	c := &study.Crystal{Zones: []study.Zone{{Name: "core", Width: boundary}, {Name: "mantle", Width: boundary}}}
	line := &traverse.Traverse{Name: "invented.csv"}
	chiSq := 0.0
	for i := range r {
		line.Position = append(line.Position, 2*boundary*(float64(i)+0.5)/float64(len(r)))
		line.Line = append(line.Line, i+2)
		chiSq += r[i] * r[i]
	}
	o := &OwnBest{Crystal: c, Element: &study.Element{Traverse: line}, Degrees: len(r)}
	return o, &least.Problem{Limit: limit, White: white}, least.Solution{Residuals: r, ChiSq: chiSq}
}

// alternating residuals of one size: as many runs as there can be.
func alternating(n int, size float64) []float64 {
	r := make([]float64, n)
	for i := range r {
		r[i] = size * (1 - 2*float64(i%2))
	}
	return r
}

// with sets residuals from a point on.
func with(r []float64, from int, values ...float64) []float64 {
	copy(r[from:], values)
	return r
}

func TestFindings(t *testing.T) {
	const n = 40
	for _, test := range []struct {
		name  string
		r     []float64
		limit []bool
		want  []string // words of the findings, in order
	}{
		{"nothing", alternating(n, 1), nil, nil},
		{"inflated", alternating(n, 0.4), nil, []string{"errors inflated"}},
		{"too small", alternating(n, 2), nil, []string{"errors too small or model wrong for this profile: not even its own best fit passes (chi-square 160 of 40), and the residuals look random, as if the errors were 2.0 times what is stated"}},
		{"an outlier", with(alternating(n, 1), 20, 6), nil, []string{"line 22 of invented.csv is an outlier, 6.0 sigma"}},
		{"an outlier that chi-square passes with", with(alternating(n, 0.9), 20, 4.5), nil, []string{"line 22 of invented.csv is an outlier, 4.5 sigma"}},
		{"an outlier among errors that are too small", with(alternating(n, 1.5), 20, 9), nil,
			[]string{"line 22 of invented.csv is an outlier, 9.0 sigma", "errors too small or model wrong for this profile: not even its own best fit passes (chi-square 88 of 39, without the outlier), and the residuals look random"}},
		{"no outlier but errors too small", with(alternating(n, 2), 20, 5), nil, []string{"errors too small"}},
		{"no outlier but the peak of a group", with(alternating(n, 1), 18, 1.5, 3, 5, 3, 1.5), nil, []string{"the residuals are largest inside (62 um from the centre), where the data lie above it"}},
		{"the end of a group at the rim", with(alternating(n, 1), n-5, -0.5, -1.5, -2.5, -3.5, -5), nil, []string{"the residuals are largest at the rim (119 um from the centre), where the data lie below it"}},
		{"the last point alone", with(alternating(n, 1), n-1, 6), nil, []string{"line 41 of invented.csv is an outlier, 6.0 sigma from what the other points of this profile say; as the last one before the rim"}},
		{"one side, then the other", append(append(alternating(n, 0)[:0], ones(n/2, 1)...), ones(n/2, -1)...), nil, []string{"not random"}},
		// limits are never above the model: their residuals have one sign for no reason
		{"limits", with(alternating(n, 1), 0, ones(n/2, -0.1)...), firstHalf(n), nil},
		{"limits that the model meets", with(alternating(n, 1), 0, ones(n/2, -1.18)...), firstHalf(n), nil},
	} {
		t.Run(test.name, func(t *testing.T) {
			o, p, at := residuals(test.r, test.limit, nil)
			if test.limit != nil {
				o.Degrees = int(math.Round(at.ChiSq)) // limits count for what they add
			}
			o.examine(p, at, 0.95)
			if len(o.Findings) != len(test.want) {
				t.Fatalf("found %q, want %q", o.Findings, test.want)
			}
			for i, words := range test.want {
				if !strings.Contains(o.Findings[i], words) {
					t.Errorf("found %q, want %q", o.Findings[i], words)
				}
			}
		})
	}
}

func ones(n int, v float64) []float64 {
	r := make([]float64, n)
	for i := range r {
		r[i] = v
	}
	return r
}

func firstHalf(n int) []bool {
	b := make([]bool, n)
	for i := range n / 2 {
		b[i] = true
	}
	return b
}

// The square of a score is by how much chi-square falls if the points may be off
// together: r'Pr less its least over a common offset, here found by trying.
func TestScoresOfCorrelatedResiduals(t *testing.T) {
	line := &traverse.Traverse{Spot: gaussian(1 * um)}
	r := []float64{0.3, -0.5, 4, 0.2, 1.1, -0.4, -0.9}
	for i := range r {
		line.Position = append(line.Position, float64(i)*um)
	}
	white, err := overlapWhite(&study.Element{Traverse: line})
	if err != nil {
		t.Fatal(err)
	}
	p := &least.Problem{White: white}
	s := newScores(p, least.Solution{Residuals: r})
	chiSq := func(r []float64) float64 {
		sum := 0.0
		for _, v := range newScores(p, least.Solution{Residuals: r}).independent {
			sum += v * v
		}
		return sum
	}
	for _, points := range [][]int{{2}, {0}, {6}, {1, 2, 3}, {3, 4, 5, 6}} {
		lowest := math.Inf(1)
		best := 0.0
		for off := -10.0; off <= 10; off += 1e-3 {
			moved := append([]float64{}, r...)
			for _, i := range points {
				moved[i] -= off
			}
			if chi := chiSq(moved); chi < lowest {
				lowest, best = chi, off
			}
		}
		// the steps of the trial miss the least by 1e-6 of its curvature, which is below 100
		near(t, "fall of chi-square", square(s.of(points)), chiSq(r)-lowest, 1e-4)
		if s.of(points)*best < 0 {
			t.Errorf("score %g of points that are best moved by %g", s.of(points), best)
		}
	}
}

// The runs test is right at its level for independent errors, and as rarely
// wrong for errors that overlapping spots have correlated and where limits, whose
// residuals have one sign, stand among the data.
func TestRunsOfRandomResiduals(t *testing.T) {
	const repeats, points = 2000, 60
	line := &traverse.Traverse{Spot: traverse.Spot{Kind: traverse.Gaussian, Width: 1 * um}}
	for i := range points {
		line.Position = append(line.Position, float64(i)*0.7*um)
	}
	white, err := overlapWhite(&study.Element{Traverse: line})
	if err != nil || white == nil {
		t.Fatalf("white %v, %v", white, err)
	}
	var root mat.TriDense
	if err := root.InverseTri(white); err != nil {
		t.Fatal(err)
	}
	limits := make([]bool, points)
	for i := range points / 3 {
		limits[i] = true
	}
	for _, test := range []struct {
		name  string
		white *mat.TriDense
		limit []bool
	}{{"independent", nil, nil}, {"overlapping", white, nil}, {"limits", nil, limits}} {
		t.Run(test.name, func(t *testing.T) {
			rng := rand.New(rand.NewPCG(31, 7))
			few := 0
			for range repeats {
				r := mat.NewVecDense(points, nil)
				for i := range points {
					r.SetVec(i, rng.NormFloat64())
				}
				if test.white != nil {
					r.MulVec(&root, mat.VecDenseCopyOf(r))
				}
				at := least.Solution{Residuals: r.RawVector().Data}
				for i, limit := range test.limit {
					if limit {
						at.Residuals[i] = -math.Abs(at.Residuals[i])
					}
				}
				if runsProbability(independent(&least.Problem{White: test.white, Limit: test.limit}, at)) < fewRuns {
					few++
				}
			}
			// binomial: the level, or less since runs are whole numbers, and three
			// standard deviations
			if most := repeats*fewRuns + 3*math.Sqrt(repeats*fewRuns); !(float64(few) <= most) {
				t.Errorf("%d of %d random residuals are called not random, want at most %.0f", few, repeats, most)
			}
		})
	}
}
