package paths

import (
	"math"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"bankfire/paths/study"
	"bankfire/thermal"
)

// closedFormError is round-off in integrals along a path.
const closedFormError = 1e-9

// TestSampleSummary reads all that reproduce again in closed form: a hold, then a ramp
// of 100 K in a year, a dwell, and a relaxation with an e-folding time of three years
// that ends a kelvin above where it began.
func TestSampleSummary(t *testing.T) {
	r, rows := screened(t, familyStudy(t, 1000, heldRim, ""), 2)
	f := &r.Families[0]
	s := &f.Summary
	law := r.Study.Crystals[0].Elements[0].Law.Law
	var stores []float64 // shares of the first leg
	hot := make([][]float64, len(s.Duration))
	var c study.Candidate
	for i := range rows {
		if rows[i].Verdict != Reproduces {
			continue
		}
		f.Family.At(&c, rows[i].Index)
		store, wait, dwell := c.Values[0], c.Values[1], c.Values[2]
		life := wait + thermal.Year + dwell + 3*thermal.Year*math.Log(100)
		stores = append(stores, math.Exp(law.LnD(store)+math.Log(wait)-law.LnD(rows[i].StandIn[0])-math.Log(life)))
		for k, d := range s.Duration {
			above := 0.0
			switch over := d.Temp - store; {
			case over < 0:
				above = life
			case over < 1:
				above = thermal.Year*(1-over/100) + dwell + 3*thermal.Year*math.Log(100)
			case over < 100:
				above = thermal.Year*(1-over/100) + dwell + 3*thermal.Year*math.Log(100/over)
			}
			hot[k] = append(hot[k], above)
		}
	}
	if s.Sampled != f.Tally.Counts[Reproduces] || len(stores) < 50 || int64(len(stores)) != s.Sampled {
		t.Fatalf("a sample of %d", s.Sampled)
	}
	for k, d := range s.Duration {
		for j, p := range quantileParts {
			if want := exactly(hot[k], p); !(math.Abs(d.Time[j]-want) <= closedFormError*want) {
				t.Errorf("above %v K: %v, want %v of quantile %v", d.Temp, d.Time[j], want, p)
			}
		}
	}
	if n := len(s.Duration); n < 10 || n > mostTemps || s.Duration[n-1].Time != (Quantiles{}) || s.Duration[0].Time[1] != exactly(hot[0], 0.5) {
		t.Errorf("%d temperatures from %v to %v", n, s.Duration[0], s.Duration[n-1])
	}
	k := slices.IndexFunc(s.Shares[0], func(d DiffusionShare) bool { return d.Name == "store" })
	if k < 0 || len(s.Shares[0]) != 2 || s.Shares[0][1-k].Name != "wake" || s.Shares[0][0].Share[1] < s.Shares[0][1].Share[1] {
		t.Fatalf("shares %v", s.Shares)
	}
	for j, p := range quantileParts { // stand-in temperatures are good to 1e-6 K
		if got, want := s.Shares[0][k].Share[j], exactly(stores, p); !(math.Abs(got-want) <= 1e-6) {
			t.Errorf("the store does %v of the diffusion, want %v", got, want)
		}
	}
}

// TestSharesByName: what a repeat makes of one leg counts together, and so do legs of
// one kind that are part of nothing with a name; the innermost name counts.
func TestSharesByName(t *testing.T) {
	dir := t.TempDir()
	text := `[[family]]
name = "drawn"
legs = [
  { hold = "700 C", for = "{wait}" },
  { name = "episode", repeat = 2, legs = [ { name = "wake", reheat = "800 C", dwell = "1 yr", efold = "3 yr" }, { hold = "700 C", for = "{wait}" } ] },
  { name = "late 2", hold = "750 C", for = "{wait}" },
  { hold = "700 C", for = "2 * {wait}" },
]
draw = { method = "random", count = 7 }
[family.vary]
wait = { from = "1 yr", to = "20 yr" }
` + strings.Replace(familyCrystal, "RIM", heldRim, 1)
	for name, text := range map[string]string{"study.toml": text, "ti.csv": "x [um],Ti [ppm]\n30,99\n36,92\n38,86\n41,69\n44,57\n54,48\n"} {
		if err := os.WriteFile(filepath.Join(dir, name), []byte(text), 0o666); err != nil {
			t.Fatal(err)
		}
	}
	st, err := study.Read(filepath.Join(dir, "study.toml"))
	if err != nil {
		t.Fatal(err)
	}
	e := engineOf(t, st)
	got := e.readSample([]int64{3}).legShares()[0]
	var c study.Candidate
	e.family.At(&c, 3)
	wait, d := c.Values[0], func(celsius float64) float64 {
		return math.Exp(e.elements[0].element.Law.Law.LnD(celsius + thermal.ZeroCelsius))
	}
	parts := map[DiffusionShare]float64{{Kind: thermal.Hold}: 3 * wait * d(700), {Name: "episode"}: 2 * wait * d(700), {Name: "late 2"}: wait * d(750)}
	all := math.Exp(e.lnG(0, &study.Path{History: &c.History}))
	parts[DiffusionShare{Name: "wake"}] = all - 5*wait*d(700) - wait*d(750)
	if len(got) != len(parts) {
		t.Fatalf("shares %v, want of %v", got, parts)
	}
	for k, of := range got {
		share := of.Share[1]
		of.Share = Quantiles{}
		if want := parts[of] / all; !(math.Abs(share-want) <= closedFormError) || k > 0 && share > got[k-1].Share[1] {
			t.Errorf("%v does %v, want %v", of, share, want)
		}
	}
}

func TestRoundTemps(t *testing.T) {
	const zero = thermal.ZeroCelsius
	for _, test := range []struct {
		between    [2]float64
		first, far float64
		count      int
	}{
		{[2]float64{700 + zero, 700 + zero}, 699, 700, 2},
		{[2]float64{650.5 + zero, 689.5 + zero}, 650, 690, 21},
		{[2]float64{600 + zero, 1000 + zero}, 580, 1000, 22},
		{[2]float64{0.5, 1600}, -250, 1350, 33},
	} {
		temps := roundTemps(test.between)
		if len(temps) != test.count || math.Abs(temps[0]-zero-test.first) > 1e-9 || math.Abs(temps[len(temps)-1]-zero-test.far) > 1e-9 {
			t.Errorf("from %v to %v: %d from %v to %v", test.between[0]-zero, test.between[1]-zero, len(temps), temps[0]-zero, temps[len(temps)-1]-zero)
		}
	}
}
