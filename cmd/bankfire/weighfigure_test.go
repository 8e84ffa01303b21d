package main

import (
	"context"
	"math"
	"math/rand/v2"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"bankfire/paths"
	"bankfire/paths/study"
	"bankfire/paths/traverse"
	"bankfire/thermal"
)

// Positions as measured are where Place finds the true ones.
func TestAsMeasured(t *testing.T) {
	random := rand.New(rand.NewPCG(17, 4))
	for range 100 {
		line := traverse.Traverse{Zero: traverse.Zero(random.IntN(2)), Size: 200e-6}
		for range 5 {
			line.Position = append(line.Position, 200e-6*random.Float64())
		}
		origin, tilt := 20e-6*(random.Float64()-0.5), 1.4*random.Float64()
		places := make([]float64, len(line.Position))
		line.Place(places, origin, tilt)
		for i, got := range asMeasured(&line, places, origin, tilt) {
			const rounding = 1e-17 // m: 1/cos of 80 degrees times a few last bits of 2e-4 m
			if want := line.Position[i]; !(math.Abs(got-want) <= rounding) {
				t.Errorf("origin %g m, tilt %g, zero %d: %g m is drawn at %g m", origin, tilt, line.Zero, want, got)
			}
		}
	}
}

// Curves move with the origin, points and residuals stay as they are.
func TestDrawnWeighing(t *testing.T) {
	r := smallResult(t)
	q, line := &r.Paths[0].Profiles[0], r.Own[0].Element.Traverse
	q.Origin = 3e-6
	f := drawnWeighing(r, 0)
	for i, p := range f.Points {
		if p.At != line.Position[i] || p.Value != line.Value[i] || p.Sigma != q.Sigma[i] || p.Limit {
			t.Errorf("point %d is %+v", i, p)
		}
	}
	if got := f.Paths[0].Residuals; !slices.Equal(got, q.Residuals) {
		t.Errorf("residuals %v, want %v", got, q.Residuals)
	}
	const rounding = 1e-18 // m, of positions below 1e-4 m
	for i, at := range f.Paths[0].Profile.At {
		if want := q.Centres[i] - 3e-6; !(math.Abs(at-want) <= rounding) {
			t.Fatalf("cell %d is drawn at %g m, want %g m", i, at, want)
		}
	}
	if f.Cut || f.StartOf != 0 {
		t.Errorf("half a crystal with one path: Cut %v, StartOf %d", f.Cut, f.StartOf)
	}
}

// The drawn curve goes through what the fit saw at each point, as measured from
// either end along a slanted line with its zero off.
func TestCurvesPassWhereThePointsSaw(t *testing.T) {
	for _, test := range []struct{ name, old, new string }{
		{"centre", `zero = "centre"`, `zero = "centre", origin = "1 um", tilt = "25 deg"`},
		{"rim", `zero = "centre"`, `zero = "rim", origin = "-2 um", tilt = "10 deg"`},
	} {
		t.Run(test.name, func(t *testing.T) {
			dir := t.TempDir()
			name := filepath.Join(dir, "study.toml")
			write(t, name, strings.Replace(smallStudy, test.old, test.new, 1))
			write(t, filepath.Join(dir, "ti.csv"), smallTraverse)
			r, err := weighStudy(context.Background(), name)
			if err != nil {
				t.Fatal(err)
			}
			f, seen := drawnWeighing(r, 0), r.Paths[0].Profiles[0].Seen
			curve := &f.Paths[0].Profile
			for i, p := range f.Points {
				const chord = 0.05 // ppm, of 34: a chord between cells is that close to the curve
				if got := interpolated(curve.At, curve.Value, p.At); !(math.Abs(got-seen[i]) <= chord) {
					t.Errorf("at point %d the curve is drawn at %g ppm, the model is %g ppm", i, got, seen[i])
				}
			}
		})
	}
}

func write(t *testing.T, name, text string) {
	t.Helper()
	if err := os.WriteFile(name, []byte(text), 0o666); err != nil {
		t.Fatal(err)
	}
}

// interpolated is the value of a polyline at x.
func interpolated(at, value []float64, x float64) float64 {
	k, _ := slices.BinarySearch(at, x)
	k = min(max(k, 1), len(at)-1)
	return value[k-1] + (value[k]-value[k-1])*(x-at[k-1])/(at[k]-at[k-1])
}

func TestDrawnWeighingOf(t *testing.T) {
	t.Run("several paths", func(t *testing.T) {
		r := smallResult(t)
		better := r.Paths[0]
		better.Outcome.Misfit /= 2
		r.Paths = append(r.Paths, better)
		if f := drawnWeighing(r, 0); f.StartOf != 2 {
			t.Errorf("StartOf %d, want the best path, 2", f.StartOf)
		}
	})
	t.Run("limits", func(t *testing.T) {
		r := smallResult(t)
		element := *r.Own[0].Element
		line := *element.Traverse
		line.Limit = make([]bool, len(line.Value))
		line.Limit[4] = true
		element.Traverse, r.Own[0].Element = &line, &element
		for i, p := range drawnWeighing(r, 0).Points {
			if p.Limit != (i == 4) {
				t.Errorf("point %d is %+v", i, p)
			}
		}
	})
	t.Run("all barred", func(t *testing.T) {
		r := smallResult(t)
		p := &r.Paths[0]
		p.Profiles, p.Outcome.Verdict, p.Barred = nil, paths.Barred, []study.Bar{{Why: "its life is short"}}
		f := drawnWeighing(r, 0)
		if drawn := &f.Paths[0]; !drawn.Barred || drawn.Residuals != nil || drawn.Verdict != "barred: its life is short" {
			t.Errorf("the barred path is drawn as %+v", drawn)
		}
		if len(f.Points) != len(r.Own[0].Element.Traverse.Value) || len(f.Start.At) != 0 {
			t.Errorf("%d points, start %v", len(f.Points), f.Start)
		}
	})
	t.Run("inner end", func(t *testing.T) {
		r := smallResult(t)
		crystal, element := *r.Own[0].Crystal, *r.Own[0].Element
		element.Inner = []study.Rim{{}}
		r.Own[0].Crystal, r.Own[0].Element = &crystal, &element
		if f := drawnWeighing(r, 0); !f.Cut || f.Inner != 0 {
			t.Errorf("a piece from 0 um on: Cut %v, Inner %g m", f.Cut, f.Inner)
		}
		crystal.R0 = 30e-6
		if f := drawnWeighing(r, 0); !f.Cut || f.Inner != 30e-6 {
			t.Errorf("a piece from 30 um on: Cut %v, Inner %g m", f.Cut, f.Inner)
		}
	})
	t.Run("across the centre", func(t *testing.T) {
		r := smallResult(t)
		q := &r.Paths[0].Profiles[0]
		q.At = []float64{-5e-6, 10e-6}
		got, n := drawnWeighing(r, 0).Paths[0].Profile, len(q.Final)
		if len(got.At) != 2*n || !slices.IsSorted(got.At) || got.At[0] != -got.At[2*n-1] ||
			got.Value[0] != q.Final[n-1] || got.Value[n-1] != q.Final[0] || got.Value[n] != q.Final[0] {
			t.Errorf("%d cells become %d from %g m on", n, len(got.At), got.At[0])
		}
	})
}

// A duration curve jumps at a hold: its temperature and the one below are among
// those drawn.
func TestCurveTemps(t *testing.T) {
	var h thermal.History
	if err := h.Set([]thermal.Leg{
		{Kind: thermal.Hold, For: 9 * thermal.Year, T0: 1000, T1: 1000},
		{Kind: thermal.Ramp, For: thermal.Year, T0: 1000, T1: 1100},
	}); err != nil {
		t.Fatal(err)
	}
	temps := curveTemps(&h)
	for _, want := range []float64{math.Nextafter(1000, 0), 1000, 1100} {
		if !slices.Contains(temps, want) {
			t.Errorf("no point at %v K", want)
		}
	}
	if !slices.IsSorted(temps) {
		t.Error("the temperatures do not rise")
	}
}

// However many legs a path has, its curve has few temperatures, those of the
// longest rests among them: holds at one temperature are one rest.
func TestCurveTempsOfManyHolds(t *testing.T) {
	const holds, most = 20_000, 601
	for _, test := range []struct {
		name  string
		temps int
		most  int
	}{
		{"all different", holds, most},
		{"three and the longest", 3, curvePoints + 1 + 2*4},
	} {
		t.Run(test.name, func(t *testing.T) {
			legs := make([]thermal.Leg, holds)
			for i := range legs {
				temp := 900 + 200*float64(i%test.temps)/float64(test.temps)
				legs[i] = thermal.Leg{Kind: thermal.Hold, For: thermal.Year, T0: temp, T1: temp}
			}
			const rest = 1033.3 // K, none of the others
			for _, i := range []int{holds / 3, holds / 2} {
				legs[i] = thermal.Leg{Kind: thermal.Hold, For: thermal.Year, T0: rest, T1: rest}
			}
			var h thermal.History
			if err := h.Set(legs); err != nil {
				t.Fatal(err)
			}
			temps := curveTemps(&h)
			if len(temps) > test.most {
				t.Errorf("%d temperatures, want at most %d", len(temps), test.most)
			}
			if !slices.Contains(temps, rest) || !slices.Contains(temps, math.Nextafter(rest, 0)) {
				t.Errorf("the longest rest is not drawn")
			}
		})
	}
}
