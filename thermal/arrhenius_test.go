package thermal

import (
	"encoding/csv"
	"fmt"
	"math"
	"os"
	"strconv"
	"testing"
)

// integralTol is the difference allowed in ln of an integral against testdata/arrhenius.csv: the relative error that
// the doc comment of LnArrhenius promises. roundOff is added for the rounding of e/T itself, which no method can avoid.
const (
	integralTol = 2e-14
	sheetTolRef = 1e-11
	roundOff    = 4e-16
)

// TestReference compares with testdata/arrhenius.csv, computed by mpmath 1.3 at 40 to 80 digits: ramps by the difference
// of exponential integrals, relaxations and sheets by tanh-sinh quadrature in pieces.
func TestReference(t *testing.T) {
	for _, r := range readReference(t) {
		t.Run(r.name, func(t *testing.T) {
			leg, t0, t1 := r.leg()
			got := leg.LnArrhenius(r.e, r.k, t0, t1)
			lo, hi := leg.Range()
			tol := integralTol + roundOff*math.Max(math.Abs(r.e/lo), math.Abs(r.e/hi))
			if r.kind == "sheet" {
				tol += sheetTolRef
			}
			if diff := math.Abs(got - r.want); !(diff <= tol) {
				t.Errorf("ln = %.17g, want %.17g, difference %.3g, allowed %.3g", got, r.want, diff, tol)
			}
		})
	}
}

// reference is a row of testdata/arrhenius.csv.
type reference struct {
	name, kind string
	e          float64
	k          int
	arg        [7]float64
	want       float64
}

// leg is the leg of the row and the part of it that counts.
func (r reference) leg() (l Leg, t0, t1 float64) {
	a := r.arg
	switch r.kind {
	case "ramp":
		return Leg{Kind: Ramp, T0: a[0], T1: a[1], For: a[2]}, 0, a[2]
	case "relax":
		return Leg{Kind: Relax, T0: a[0], T1: a[1], Tau: a[2], For: a[4]}, a[3], a[4]
	}
	s := &Sheet{Magma: a[0], Host: a[1], Thickness: a[2], Position: a[3], Kappa: a[4]}
	return Leg{Kind: SheetCooling, Sheet: s, For: a[6]}, a[5], a[6]
}

func readReference(t *testing.T) []reference {
	t.Helper()
	file, err := os.Open("testdata/arrhenius.csv")
	if err != nil {
		t.Fatal(err)
	}
	defer file.Close()
	lines, err := csv.NewReader(file).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	var refs []reference
	for i, line := range lines[1:] {
		number := func(col int) float64 {
			if line[col] == "" {
				return 0
			}
			x, err := strconv.ParseFloat(line[col], 64)
			if err != nil {
				t.Fatal(err)
			}
			return x
		}
		r := reference{name: fmt.Sprintf("line %d %s", i+2, line[0]), kind: line[0], e: number(1), k: int(number(2)), want: number(10)}
		for c := range r.arg {
			r.arg[c] = number(3 + c)
		}
		refs = append(refs, r)
	}
	if len(refs) < 150 {
		t.Fatalf("testdata/arrhenius.csv has %d rows, want at least 150", len(refs))
	}
	return refs
}
