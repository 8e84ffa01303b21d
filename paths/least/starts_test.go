package least

import (
	"math"
	"testing"
)

// narrow is a valley at 7 on a plain that slopes nowhere: only a fit that begins
// near finds it.
func narrow(dst [][]float64, bent []float64) {
	for i := range dst[0] {
		dst[0][i] = math.Exp(-square((bent[0] - 7) * 20))
	}
}

// Of many starts the fit takes those from which chi-square is least, and those
// at which the model is no number do not stand in their way.
func TestManyStarts(t *testing.T) {
	v := Bent{Prior: None, Lo: 0, Hi: 10}
	for x := 0.02; x < 10; x += 0.04 {
		v.Starts = append(v.Starts, x)
	}
	p := Problem{Obs: []float64{1, 1}, Sigma: []float64{0.01, 0.01}, Bent: []Bent{v}}
	for _, test := range []struct {
		name  string
		model Model
	}{
		{"a narrow valley", narrow},
		{"where the model is a number nowhere else", func(dst [][]float64, bent []float64) {
			narrow(dst, bent)
			if bent[0] < 5 {
				dst[0][0] = math.NaN()
			}
		}},
	} {
		t.Run(test.name, func(t *testing.T) {
			tries := 0
			got := p.Solve(func(dst [][]float64, bent []float64) {
				tries++
				test.model(dst, bent)
			})
			if !(math.Abs(got.Bent[0]-7) <= 1e-4) || !(got.ChiSq <= 1e-6) {
				t.Errorf("found %g with chi-square %g, want 7 and 0", got.Bent[0], got.ChiSq)
			}
			if most := len(v.Starts) + mostFits*mostSteps; tries > most {
				t.Errorf("asked the model %d times for %d starts", tries, len(v.Starts))
			}
		})
	}
}
