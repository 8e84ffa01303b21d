package numeric

import (
	"encoding/csv"
	"math"
	"math/rand/v2"
	"os"
	"strconv"
	"testing"
)

// referenceTol is some twenty ulps: the closed forms lose up to ten by cancellation, a library function one or two.
const referenceTol = 4e-15

var functions = map[string]func(float64) float64{
	"E1Scaled": E1Scaled, "ErfcScaled": ErfcScaled, "Ierfc": Ierfc,
}

// TestReference compares with testdata/reference.csv: 20 digits by mpmath 1.3 at 60 to 1200 digits, at arguments on both
// sides of every change of method, and from 1e-300 to 1e300.
func TestReference(t *testing.T) {
	for _, row := range readReference(t) {
		t.Run(row.function+"("+row.text+")", func(t *testing.T) {
			got := functions[row.function](row.x)
			if got == row.want { // infinities
				return
			}
			if diff := math.Abs(got - row.want); !(diff <= referenceTol*math.Abs(row.want)) {
				t.Errorf("got %.17g, want %.17g, difference %.2g, allowed %g of it", got, row.want, diff, referenceTol)
			}
		})
	}
}

type reference struct {
	function, text string
	x, want        float64
}

func readReference(t *testing.T) []reference {
	t.Helper()
	file, err := os.Open("testdata/reference.csv")
	if err != nil {
		t.Fatal(err)
	}
	defer file.Close()
	rows, err := csv.NewReader(file).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	var refs []reference
	for _, row := range rows[1:] {
		refs = append(refs, reference{row[0], row[1], parse(t, row[1]), parse(t, row[2])})
	}
	if len(refs) < 100 {
		t.Fatalf("testdata/reference.csv has %d rows, want at least 100", len(refs))
	}
	return refs
}

// parse reads a number; values beyond the range of float64 read as infinities.
func parse(t *testing.T, text string) float64 {
	t.Helper()
	x, err := strconv.ParseFloat(text, 64)
	if err != nil && !math.IsInf(x, 0) {
		t.Fatal(err)
	}
	return x
}

func TestEdges(t *testing.T) {
	inf, nan := math.Inf(1), math.NaN()
	tests := []struct {
		name      string
		got, want float64
	}{
		{"E1Scaled(0)", E1Scaled(0), inf}, {"E1Scaled(Inf)", E1Scaled(inf), 0}, {"E1Scaled(-1)", E1Scaled(-1), nan},
		{"E1Scaled(NaN)", E1Scaled(nan), nan},
		{"ErfcScaled(Inf)", ErfcScaled(inf), 0}, {"ErfcScaled(-Inf)", ErfcScaled(-inf), inf}, {"ErfcScaled(NaN)", ErfcScaled(nan), nan},
		{"Ierfc(Inf)", Ierfc(inf), 0}, {"Ierfc(-Inf)", Ierfc(-inf), inf}, {"Ierfc(NaN)", Ierfc(nan), nan},
		{"Ierfc(1e300)", Ierfc(1e300), 0},
		{"LnAdd of nothing", LnAdd(-inf, -inf), -inf}, {"LnAdd to nothing", LnAdd(-inf, 3), 3}, {"LnAdd Inf", LnAdd(inf, 3), inf},
		{"LnAdd two Inf", LnAdd(inf, inf), inf}, {"LnAdd both ends", LnAdd(-inf, inf), inf}, {"LnAdd NaN", LnAdd(nan, 0), nan},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			if test.got != test.want && !(math.IsNaN(test.got) && math.IsNaN(test.want)) {
				t.Errorf("got %g, want %g", test.got, test.want)
			}
		})
	}
}

// TestLnAdd adds at sizes where the exponentials themselves would overflow.
func TestLnAdd(t *testing.T) {
	const tol = 1e-14 // of the sum; a few ulps of numbers of size 1, since the large shift is exact
	random := rand.New(rand.NewPCG(2, 7))
	for range 1000 {
		a, b := 4*random.Float64(), 4*random.Float64()
		want := math.Log(math.Exp(a) + math.Exp(b))
		for _, shift := range []float64{0, 1024, -1024} {
			allowed := tol + math.Abs(shift)*0x1p-51 // adding the shift rounds a and b
			if diff := math.Abs(LnAdd(a+shift, b+shift) - shift - want); !(diff <= allowed) {
				t.Errorf("LnAdd(%g, %g) off by %g, allowed %g", a+shift, b+shift, diff, allowed)
			}
		}
	}
}

func BenchmarkE1Scaled(b *testing.B) {
	for _, x := range []float64{0.5, 5, 30, 60} {
		b.Run("x="+strconv.FormatFloat(x, 'g', -1, 64), func(b *testing.B) {
			b.ReportAllocs()
			for b.Loop() {
				E1Scaled(x)
			}
		})
	}
}
