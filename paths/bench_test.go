package paths

import (
	"context"
	"fmt"
	"testing"
)

// BenchmarkWeigh is a study of one traverse of 41 points with two free plateaux.
func BenchmarkWeigh(b *testing.B) {
	for _, n := range []int{1, 4, 16} {
		for _, jobs := range []int{1, 2} {
			b.Run(fmt.Sprintf("paths=%d/jobs=%d", n, jobs), func(b *testing.B) {
				s := several(b, n)
				b.ReportAllocs()
				for b.Loop() {
					if _, err := Weigh(context.Background(), s, jobs); err != nil {
						b.Fatal(err)
					}
				}
				b.ReportMetric(float64(b.Elapsed().Milliseconds())/float64(b.N*n), "ms/path")
			})
		}
	}
}

// BenchmarkCurve scans what costs nothing to evaluate, so that all its time is
// the curve's own.
func BenchmarkCurve(b *testing.B) {
	for _, height := range []float64{10, 100, 1000} {
		b.Run(fmt.Sprintf("height=%g", height), func(b *testing.B) {
			f := well(height, 1.2)
			asked := 0
			b.ReportAllocs()
			for b.Loop() {
				if _, err := scan(41, 2, func(lnM []float64) ([]float64, error) {
					out := make([]float64, len(lnM))
					for i, x := range lnM {
						out[i] = f(x)
					}
					asked += len(lnM)
					return out, nil
				}); err != nil {
					b.Fatal(err)
				}
			}
			b.ReportMetric(float64(asked)/float64(b.N), "solves/op")
		})
	}
}

// BenchmarkJudge reads a scanned curve.
func BenchmarkJudge(b *testing.B) {
	for _, n := range []int{1, 4} {
		b.Run(fmt.Sprintf("profiles=%d", n), func(b *testing.B) {
			cs := make([]Curve, n)
			for i := range cs {
				cs[i] = bowl(19, 0.1*float64(i), 0.3, 22, 2)
			}
			var o Outcome
			b.ReportAllocs()
			for b.Loop() {
				Judge(&o, cs, nil, 0.95)
			}
		})
	}
}
