package least_test

import (
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"strings"
	"testing"

	"bankfire/paths/least"
	"gonum.org/v1/gonum/mat"
)

// bent is a value between lo and hi of which nothing is known.
func bent(lo, hi float64, starts ...float64) least.Bent {
	return least.Bent{Prior: least.None, Lo: lo, Hi: hi, Starts: starts}
}

// plane is a model that is linear in bent values.
func plane(columns ...[]float64) least.Model {
	return func(dst [][]float64, bent []float64) {
		clear(dst[0])
		for j, c := range columns {
			for i, v := range c {
				dst[0][i] += bent[j] * v
			}
		}
	}
}

// A mean that may not pass an end is the end, and the fit is worse by what the
// weighted mean wants: 4 data, 5 against 3.
func TestEndsOfTheRange(t *testing.T) {
	tests := []struct {
		name             string
		lo, hi, start    float64
		prior            least.Prior
		value, chiSquare float64
	}{
		{"inside", -10, 10, -10, least.None, 5, 4},
		{"from the best", -10, 10, 5, least.None, 5, 4},
		{"at the upper end", -10, 3, 0, least.None, 3, 4 + 4*4},
		{"begins at the upper end", -10, 3, 3, least.None, 3, 4 + 4*4},
		{"at the lower end", 6, 10, 8, least.None, 6, 4 + 4},
		{"nowhere to go", 3, 3, 3, least.None, 3, 4 + 4*4},
		{"a range without ends", math.Inf(-1), math.Inf(1), 0, least.Prior{Mean: 5, Sigma: 7}, 5, 4},
		{"half way to a prior", -100, 100, 50, least.Prior{Mean: 7, Sigma: 0.5}, 6, 4 + 4 + 4},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			p := least.Problem{
				Obs: []float64{4, 6, 4, 6}, Sigma: ones(4),
				Bent: []least.Bent{{Prior: test.prior, Lo: test.lo, Hi: test.hi, Starts: []float64{test.start}}},
			}
			got := p.Solve(plane(ones(4)))
			near(t, "value", got.Bent[0], test.value, roundOff)
			near(t, "chi-square", got.ChiSq, test.chiSquare, roundOff)
			if !got.Settled {
				t.Error("not settled")
			}
		})
	}
}

// Two values, u + v = 1 and 0.1 v = -0.3, which 4 and -3 fit. With v kept above
// 0 it is 0, u is 1, and chi-square is 0.3^2.
func TestOneOfTwoAtItsEnd(t *testing.T) {
	for _, start := range [][2]float64{{0, 0}, {5, 5}, {-9, 9}, {9, 0}} {
		t.Run(fmt.Sprint(start), func(t *testing.T) {
			p := least.Problem{
				Obs: []float64{1, -0.3}, Sigma: ones(2), Bent: []least.Bent{bent(-10, 10, start[0]), bent(0, 10, start[1])},
			}
			got := p.Solve(plane([]float64{1, 0}, []float64{1, 0.1}))
			nearAll(t, "value", got.Bent, []float64{1, 0}, roundOff)
			near(t, "chi-square", got.ChiSq, 0.09, roundOff)
		})
	}
}

// leastInBox tries every choice of ends: the best of those whose free values
// stay inside.
func leastInBox(a *mat.Dense, obs []float64) (chi float64) {
	n, k := a.Dims()
	chi = math.Inf(1)
	for code := range int(math.Pow(3, float64(k))) {
		x, free := make([]float64, k), []int{}
		for j := range k {
			if x[j] = float64(code % 3); x[j] == 2 {
				free = append(free, j)
				x[j] = 0
			}
			code /= 3
		}
		rest := func() *mat.VecDense {
			r := mat.NewVecDense(n, nil)
			r.MulVec(a, mat.NewVecDense(k, x))
			r.SubVec(mat.NewVecDense(n, obs), r)
			return r
		}
		if len(free) > 0 {
			sub, best := mat.NewDense(n, len(free), nil), mat.VecDense{}
			for c, j := range free {
				sub.SetCol(c, mat.Col(nil, j, a))
			}
			if best.SolveVec(sub, rest()) != nil {
				continue
			}
			inside := true
			for c, j := range free {
				x[j] = best.AtVec(c)
				inside = inside && x[j] >= 0 && x[j] <= 1
			}
			if !inside {
				continue
			}
		}
		r := rest()
		chi = math.Min(chi, mat.Dot(r, r))
	}
	return chi
}

// Correlated values in a box, many at their ends, from every corner and from
// inside, against the best of all choices of ends.
func TestBoxes(t *testing.T) {
	rng := rand.New(rand.NewPCG(8, 8))
	for _, k := range []int{2, 3} {
		for trial := range 100 {
			const n = 6
			common := fill(n, func(int) float64 { return rng.NormFloat64() })
			a := mat.NewDense(n, k, nil)
			a.Apply(func(i, _ int, _ float64) float64 { return common[i] + 0.1*rng.NormFloat64() }, a)
			obs := fill(n, func(i int) float64 { return common[i]*(4*rng.Float64()-1) + 0.3*rng.NormFloat64() })
			columns := make([][]float64, k)
			p := least.Problem{Obs: obs, Sigma: ones(n)}
			for j := range k {
				columns[j] = mat.Col(nil, j, a)
				p.Bent = append(p.Bent, bent(0, 1, float64(rng.IntN(3))/2))
			}
			got := p.Solve(plane(columns...))
			if want := leastInBox(a, obs); !(math.Abs(got.ChiSq-want) <= 1e-9*(1+want)) || !got.Settled {
				t.Errorf("k %d, trial %d: chi-square %.12g at %g, settled %v, want %.12g", k, trial, got.ChiSq, got.Bent, got.Settled, want)
			}
		}
	}
}

// A value that does nothing stays where it begins, and of two that only enter
// as their product the product is found.
func TestFlatDirections(t *testing.T) {
	x := fill(8, func(i int) float64 { return float64(i) / 2 })
	decay := func(scale, rate float64) []float64 {
		return fill(8, func(i int) float64 { return scale * math.Exp(-rate*x[i]) })
	}
	rng := rand.New(rand.NewPCG(3, 1))
	obs := fill(8, func(i int) float64 { return decay(2, 0.7)[i] + 0.01*rng.NormFloat64() })
	p := least.Problem{Obs: obs, Sigma: fill(8, func(int) float64 { return 0.01 }), Linear: none(1)}
	fit := func(rate func(b []float64) float64, values ...least.Bent) least.Solution {
		q := p
		q.Bent = values
		return q.Solve(func(dst [][]float64, b []float64) {
			clear(dst[0])
			copy(dst[1], decay(1, rate(b)))
		})
	}
	want := fit(func(b []float64) float64 { return b[0] }, bent(0.1, 5, 1))
	tests := []struct {
		name string
		rate func(b []float64) float64
	}{
		{"of no effect", func(b []float64) float64 { return b[0] }},
		{"of the effect of round-off", func(b []float64) float64 { return b[0] + math.Copysign(2e-16, b[1]-1.3) }},
		{"product", func(b []float64) float64 { return b[0] * b[1] }},
		{"sum", func(b []float64) float64 { return b[0] + b[1] - 1.3 }},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			got := fit(test.rate, bent(0.1, 5, 1), bent(0.1, 5, 1.3))
			near(t, "rate", test.rate(got.Bent), want.Bent[0], 1e-6)
			near(t, "chi-square", got.ChiSq, want.ChiSq, 1e-9)
			if strings.HasPrefix(test.name, "of") && got.Bent[1] != 1.3 {
				t.Errorf("moved to %g, want 1.3", got.Bent[1])
			}
			if !got.Settled {
				t.Error("not settled")
			}
		})
	}
}

// The best of several starts wins: sin(b x) has many minima.
func TestStarts(t *testing.T) {
	x := fill(30, func(i int) float64 { return float64(i) / 10 })
	p := least.Problem{Obs: fill(30, func(i int) float64 { return 2 * math.Sin(5*x[i]) }), Sigma: ones(30), Linear: none(1)}
	wave := func(dst [][]float64, b []float64) {
		clear(dst[0])
		copy(dst[1], fill(30, func(i int) float64 { return math.Sin(b[0] * x[i]) }))
	}
	for _, starts := range [][]float64{{5.5}, {12, 5.5}, {5.5, 12}, {12, 9, 4.8}} {
		t.Run(fmt.Sprint(starts), func(t *testing.T) {
			p.Bent = []least.Bent{bent(1, 20, starts...), bent(0, 1, 0.5)}
			got := p.Solve(wave)
			near(t, "rate", got.Bent[0], 5, 1e-7)
			near(t, "chi-square", got.ChiSq, 0, 1e-9)
		})
	}
	p.Bent = []least.Bent{bent(1, 20, 12)}
	if got := p.Solve(wave); !(got.ChiSq > 1) {
		t.Errorf("from 12 alone: chi-square %g, want a worse minimum", got.ChiSq)
	}
}

// How far the range reaches must not change what is found in it.
func TestWideRange(t *testing.T) {
	x := fill(10, func(i int) float64 { return float64(i) })
	rng := rand.New(rand.NewPCG(1, 6))
	p := least.Problem{Obs: fill(10, func(i int) float64 { return 50*(1-math.Exp(-0.5*x[i])) + rng.NormFloat64() }), Sigma: ones(10), Linear: none(1)}
	grow := func(dst [][]float64, b []float64) {
		clear(dst[0])
		copy(dst[1], fill(10, func(i int) float64 { return -math.Expm1(-b[0] * x[i]) }))
	}
	p.Bent = []least.Bent{bent(0.1, 2, 1)}
	want := p.Solve(grow)
	for _, hi := range []float64{10, 1e3, 1e5} {
		t.Run(fmt.Sprint(hi), func(t *testing.T) {
			p.Bent = []least.Bent{bent(1e-6, hi, 1)}
			got := p.Solve(grow)
			near(t, "rate", got.Bent[0], want.Bent[0], 1e-6)
			near(t, "chi-square", got.ChiSq, want.ChiSq, 1e-10)
		})
	}
}

// A linear value that the data see on the way, and no more at the best fit, is
// left at its mean all the same.
func TestUnseenAtTheBestFit(t *testing.T) {
	p := least.Problem{
		Obs: []float64{2, 2}, Sigma: ones(2), Linear: []least.Prior{{Mean: 7, Sigma: math.Inf(1)}},
		Bent: []least.Bent{bent(0, 5, 0)},
	}
	got := p.Solve(func(dst [][]float64, b []float64) {
		dst[0][0], dst[0][1] = b[0], b[0]
		dst[1][0], dst[1][1] = math.Max(0, 1-b[0]), 0
	})
	near(t, "bent value", got.Bent[0], 2, 1e-6)
	nearAll(t, "linear value", got.Linear, []float64{7}, 0)
	nearAll(t, "sigma", got.Sigma, []float64{math.Inf(1)}, 0)
	if got.Rank != 0 {
		t.Errorf("rank %d, want 0", got.Rank)
	}
}

// A bent value with correlated data and a prior, against the least of the same
// sum by simplex.
func TestBentWithCorrelatedData(t *testing.T) {
	const n, simplex = 12, 1e-5
	rng := rand.New(rand.NewPCG(6, 2))
	c, white := correlated(n)
	x := fill(n, func(i int) float64 { return float64(i) })
	obs := fill(n, func(i int) float64 { return 5 + 30*math.Exp(-0.4*x[i]) + rng.NormFloat64() })
	p := least.Problem{
		Obs: obs, Sigma: ones(n), White: white, Linear: []least.Prior{{Mean: 4, Sigma: 0.5}, least.None},
		Bent: []least.Bent{{Prior: least.Prior{Mean: 0.5, Sigma: 0.1}, Lo: 0, Hi: 5, Starts: []float64{1}}},
	}
	got := p.Solve(func(dst [][]float64, b []float64) {
		clear(dst[0])
		copy(dst[1], ones(n))
		copy(dst[2], fill(n, func(i int) float64 { return math.Exp(-b[0] * x[i]) }))
	})
	var inverse mat.Dense
	must(t, inverse.Inverse(c))
	direct := func(v []float64) float64 {
		r := mat.NewVecDense(n, fill(n, func(i int) float64 { return obs[i] - v[0] - v[1]*math.Exp(-v[2]*x[i]) }))
		return mat.Inner(r, &inverse, r) + square((v[0]-4)/0.5) + square((v[2]-0.5)/0.1)
	}
	want := brute(t, direct, []float64{5, 30, 0.4})
	nearAll(t, "value", append(got.Linear, got.Bent...), want, simplex)
	near(t, "chi-square", got.ChiSq, direct(want), roundOff)
}

// A model that is no number makes no fit, unless it is one elsewhere.
func TestNotANumber(t *testing.T) {
	nan := math.NaN()
	in := func(lo, hi float64, bad float64) func(b float64) float64 {
		return func(b float64) float64 {
			if b >= lo && b <= hi {
				return bad
			}
			return 0
		}
	}
	tests := []struct {
		name      string
		added     func(b float64) float64 // to the model
		starts    []float64
		chiSquare float64
	}{
		{"everywhere", in(-9, 9, nan), []float64{0, 1}, nan},
		{"infinite everywhere", in(-9, 9, math.Inf(1)), []float64{0, 1}, nan},
		{"at the first start", in(0, 0.5, nan), []float64{0, 1}, 0},
		{"at the second start", in(0, 0.5, nan), []float64{1, 0}, 0},
		{"on the way", in(2.5, 9, nan), []float64{0}, 0},
		{"beside the start", in(1e-9, 1, nan), []float64{0}, nan},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			p := least.Problem{Obs: []float64{2, 4}, Sigma: ones(2), Linear: none(1), Bent: []least.Bent{bent(-5, 5, test.starts...)}}
			got := p.Solve(func(dst [][]float64, b []float64) {
				if math.IsNaN(b[0]) {
					t.Error("the model is asked for NaN")
				}
				dst[0][0], dst[0][1] = b[0]*b[0]*b[0]/4+test.added(b[0]), 2*b[0]
				dst[1][0], dst[1][1] = 0, 0
			})
			if math.IsNaN(test.chiSquare) {
				if !math.IsNaN(got.ChiSq) {
					t.Errorf("chi-square %g, want NaN", got.ChiSq)
				}
				return
			}
			near(t, "chi-square", got.ChiSq, test.chiSquare, 1e-9)
		})
	}
}

// One number that is none is enough, wherever it is.
func TestNotANumberInAColumn(t *testing.T) {
	for _, limit := range [][]bool{nil, {false, true, true}} {
		for place := range 9 {
			for _, bad := range []float64{math.NaN(), math.Inf(1), math.Inf(-1)} {
				t.Run(fmt.Sprint(limit, place, bad), func(t *testing.T) {
					p := least.Problem{Obs: []float64{1, 2, 3}, Sigma: ones(3), Limit: limit, Linear: none(2)}
					got := p.Solve(func(dst [][]float64, _ []float64) {
						copy(dst[1], []float64{1, 1, 1})
						copy(dst[2], []float64{0, 1, 2})
						dst[place/3][place%3] = bad
					})
					if got.ChiSq >= 0 && !math.IsInf(got.ChiSq, 1) {
						t.Errorf("chi-square %g", got.ChiSq)
					}
				})
			}
		}
	}
}

// A fit that cannot go where the slopes promise to says so: here the model jumps
// away on the way to the data.
func TestNotSettled(t *testing.T) {
	p := least.Problem{Obs: []float64{3}, Sigma: ones(1), Bent: []least.Bent{bent(-5, 5, 0)}}
	got := p.Solve(func(dst [][]float64, b []float64) {
		dst[0][0] = b[0]
		if b[0] >= 1 {
			dst[0][0] += 100
		}
	})
	if got.Settled || !(got.ChiSq >= 4) || !(got.Bent[0] < 1) {
		t.Errorf("settled %v at %g, chi-square %g", got.Settled, got.Bent, got.ChiSq)
	}
}

// The same problem gives the same bits, whatever was solved before, and is left
// as it was.
func TestSameBits(t *testing.T) {
	p, model := edge(60, 2)
	p.Bent[0].Starts, p.Bent[1].Starts = []float64{0, 0.1}, []float64{0.2, 0.4, 0.02}
	p.Limit = make([]bool, 60)
	p.Limit[50] = true
	before := fmt.Sprintf("%v", *p)
	bits := func() string {
		got := p.Solve(model)
		return fmt.Sprintf("%v", got) // shortest digits that give the same bits
	}
	first := bits()
	other, otherModel := edge(20, 0)
	other.Solve(otherModel)
	if second := bits(); second != first {
		t.Errorf("got\n%s\nthen\n%s", first, second)
	}
	if after := fmt.Sprintf("%v", *p); after != before {
		t.Errorf("the problem was\n%s\nand is\n%s", before, after)
	}
}

// A solution is the caller's own.
func TestSolutionsShareNothing(t *testing.T) {
	p, model := edge(12, 2)
	p.Bent[0].Starts = []float64{0, 0.1}
	a, b := p.Solve(model), p.Solve(model)
	kept := slices.Clone(b.Residuals)
	for i := range a.Residuals {
		a.Residuals[i], a.Model[i] = 0, 0
	}
	if !slices.Equal(b.Residuals, kept) {
		t.Error("one solution changes another")
	}
}

// What makes no sense is a mistake of the caller, and is named.
func TestPanics(t *testing.T) {
	upper := mat.NewTriDense(2, mat.Upper, nil)
	tests := []struct {
		name, want string
		change     func(p *least.Problem)
	}{
		{"sigmas", "least: 2 data, 1 sigmas, 0 limits", func(p *least.Problem) { p.Sigma = ones(1) }},
		{"limits", "least: 2 data, 2 sigmas, 3 limits", func(p *least.Problem) { p.Limit = make([]bool, 3) }},
		{"white", "least: 2 data, 3 rows of white", func(p *least.Problem) { p.White = mat.NewTriDense(3, mat.Lower, nil) }},
		{"upper white", "least: 2 data, 2 rows of white, upper true", func(p *least.Problem) { p.White = upper }},
		{"sigma 0", "least: sigma 0 of datum 1", func(p *least.Problem) { p.Sigma = []float64{1, 0} }},
		{"sigma NaN", "least: sigma NaN of datum 1", func(p *least.Problem) { p.Sigma = []float64{1, math.NaN()} }},
		{"prior without sigma", "least: prior 3 +- 0 of linear value 0", func(p *least.Problem) { p.Linear = []least.Prior{{Mean: 3}} }},
		{"prior without mean", "least: prior NaN +- 1 of bent value 0", func(p *least.Problem) { p.Bent[0].Prior = least.Prior{Mean: math.NaN(), Sigma: 1} }},
		{"range", "least: range 2 to 1 of bent value 0", func(p *least.Problem) { p.Bent[0].Lo = 2 }},
		{"no range", "least: range -Inf to 1 of bent value 0", func(p *least.Problem) { p.Bent[0].Lo = math.Inf(-1) }},
		{"no start", "least: bent value 0 has no start", func(p *least.Problem) { p.Bent[0].Starts = nil }},
		{"start", "least: start 4 of bent value 0 outside 0 to 1", func(p *least.Problem) { p.Bent[0].Starts[0] = 4 }},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			defer func() {
				if got := fmt.Sprint(recover()); !strings.HasPrefix(got, test.want) {
					t.Errorf("got %q, want %q", got, test.want)
				}
			}()
			p := least.Problem{Obs: ones(2), Sigma: ones(2), Bent: []least.Bent{bent(0, 1, 0.5)}}
			test.change(&p)
			p.Solve(plane(ones(2)))
		})
	}
}
