package catalogue

import (
	"errors"
	"math"
	"slices"
	"strings"
	"testing"

	"bankfire/thermal"
)

// printed is half a unit of the last digit of a table printed to three decimals.
const printed = 0.00051

// The coefficients and the table of K are those of the project's notes on
// plagioclase, which evaluate R T ln K = A XAn + B by a script of their own.
func TestPartitionTable(t *testing.T) {
	for _, test := range []struct {
		key string
		k   [4]float64 // 850 C An30, 850 C An50, 1000 C An50, 1200 C An60
	}{
		{"sr-blundy1991", [4]float64{7.376, 4.155, 3.513, 2.380}},
		{"ba-blundy1991", [4]float64{0.874, 0.386, 0.431, 0.354}},
		{"sr-bindeman1998", [4]float64{7.967, 4.155, 3.513, 2.311}},
		{"ba-bindeman1998", [4]float64{1.321, 0.407, 0.452, 0.321}},
		{"mg-bindeman1998", [4]float64{0.028, 0.016, 0.026, 0.034}},
		{"k-bindeman1998", [4]float64{0.148, 0.086, 0.114, 0.125}},
	} {
		t.Run(test.key, func(t *testing.T) {
			p, err := FindPartition(test.key)
			if err != nil {
				t.Fatal(err)
			}
			for i, at := range [4][2]float64{{0.3, 850}, {0.5, 850}, {0.5, 1000}, {0.6, 1200}} {
				got := math.Exp(p.LnK(at[0], celsius(at[1])))
				if diff := got - test.k[i]; !(math.Abs(diff) <= printed) {
					t.Errorf("K is %g in An%g at %g C, want %g", got, 100*at[0], at[1], test.k[i])
				}
			}
		})
	}
}

func TestPartitionWords(t *testing.T) {
	all := Partitions()
	if len(all) != 6 || !slices.IsSortedFunc(all, func(a, b Partition) int { return strings.Compare(a.Key, b.Key) }) {
		t.Errorf("%d relations, want 6 sorted by key", len(all))
	}
	for _, p := range all {
		if !strings.HasPrefix(p.Key, strings.ToLower(p.Element)+"-") || p.Citation == "" || !strings.HasPrefix(p.Confidence, "memory") {
			t.Errorf("relation %+v", p)
		}
		if !slices.Equal(p.Cautions(), []string{NotChecked}) {
			t.Errorf("%s: cautions %q: no coefficient was seen in its paper", p.Key, p.Cautions())
		}
	}
	if p, _ := FindPartition("sr-bindeman1998"); p == nil || !p.RangeKnown() || p.XMin != 0.4 || p.XMax != 0.8 {
		t.Errorf("calibrated hosts of %+v, want 0.4 to 0.8", p)
	}
	if p, _ := FindPartition("sr-blundy1991"); p == nil || p.RangeKnown() {
		t.Errorf("calibrated hosts of %+v, want none known", p)
	}
}

func TestPartitionNotFound(t *testing.T) {
	for key, want := range map[string]string{"sr-blundy1992": "sr-blundy1991", "mg": "mg-bindeman1998"} {
		_, err := FindPartition(key)
		var in *thermal.InputError
		if !errors.As(err, &in) || in.Value != key || !strings.Contains(in.Remedy, want) {
			t.Errorf("%s: error %v, want one that names %s", key, err, want)
		}
	}
}
