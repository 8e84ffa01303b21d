package paths

import (
	"fmt"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"bankfire/paths/study"
)

// twoCrystals is familyStudy with a rim that only steps can follow and with a second
// crystal of the same law, whose data want so many times as much diffusion and wave by so
// much, ppm.
func twoCrystals(t *testing.T, count int, times, wave float64) *study.Study {
	t.Helper()
	name := familyStudy(t, count, stepsRim, "").File
	text, err := os.ReadFile(name)
	if err != nil {
		t.Fatal(err)
	}
	second := strings.NewReplacer(`name = "Q"`, `name = "R"`, "ti.csv", "second.csv", "RIM", stepsRim).Replace(familyCrystal)
	data := "x [um],Ti [ppm]\n"
	for k := range 14 {
		x := 20 + 2.6*float64(k)
		data += fmt.Sprintf("%g,%g\n", x, 75-25*math.Erf((x-40)/(7*math.Sqrt(times)))+wave*math.Sin(float64(5*k)))
	}
	for file, text := range map[string]string{"study.toml": string(text) + second, "second.csv": data} {
		if err := os.WriteFile(filepath.Join(filepath.Dir(name), file), []byte(text), 0o666); err != nil {
			t.Fatal(err)
		}
	}
	s, err := study.Read(name)
	if err != nil {
		t.Fatal(err)
	}
	return s
}

// inSteps prepares a family of the study for steps.
func inSteps(t testing.TB, s *study.Study) *runner {
	t.Helper()
	w, err := newWeighing(s)
	if err != nil {
		t.Fatal(err)
	}
	f := &s.Families[0]
	first, err := w.first(t.Context(), f)
	if err != nil {
		t.Fatal(err)
	}
	stepping, err := w.newStepping(t.Context(), f, make([]*gTable, len(w.elements)), first)
	if err != nil {
		t.Fatal(err)
	}
	r, err := stepping.newRunner()
	if err != nil {
		t.Fatal(err)
	}
	return r
}

// shiftsApart is by how much a shift factor of a glance and that of a scan may differ, in
// their logarithms: both stop within shiftError, and a minimum as flat as its interval
// tells is found to a small part of that.
func shiftsApart(f *Finding) float64 {
	return 2*shiftError + 0.02*math.Log(math.Min(f.Shift95[1], 1e3)/math.Max(f.Shift95[0], 1e-3))
}

// TestGlanceGivesTheVerdict of the path written out, by the exact plan and scanned in
// full, wherever it is sure; and it is sure of most.
func TestGlanceGivesTheVerdict(t *testing.T) {
	if underRace {
		t.Skip("other tests see what runs side by side")
	}
	const members = 500
	every := int64(25)
	switch {
	case *long:
		every = 1
	case underRace:
		every = 100
	}
	for name, s := range map[string]*study.Study{
		"one crystal":     familyStudy(t, members, stepsRim, ""),
		"two that agree":  twoCrystals(t, members, 1, 2),
		"two that do not": twoCrystals(t, members, 4, 2),
		"a wrong shape":   twoCrystals(t, members, 1, 6),
	} {
		t.Run(name, func(t *testing.T) {
			r := inSteps(t, s)
			verdicts := map[Verdict]int{}
			doubtful := 0
			var c study.Candidate
			for i := int64(0); i < members; i += every {
				s.Families[0].At(&c, i)
				path := c.Path()
				cs, each, err := r.lay(t.Context(), r.quick, &path, nil)
				if err != nil {
					t.Fatal(err)
				}
				got, sum, sure, err := r.glance(cs, each, r.slack)
				if err != nil {
					t.Fatal(err)
				}
				want, err := r.exactly(t.Context(), &path, nil)
				if err != nil {
					t.Fatal(err)
				}
				if verdicts[want.Verdict]++; !sure {
					doubtful++
					if cs, each, err = r.lay(t.Context(), r.exact, &path, nil); err != nil {
						t.Fatal(err)
					}
					if got, sum, sure, err = r.glance(cs, each, exactSlack); err != nil {
						t.Fatal(err)
					}
					if !sure {
						continue
					}
				}
				if got.Verdict != want.Verdict {
					t.Errorf("member %d: %v at a glance, chi-square %v; %v, %v", i, got.Verdict, got.Misfit, want.Verdict, want.Misfit)
				}
				apart := math.Abs(math.Log(got.Shift / want.Shift))
				if got.Verdict == Reproduces {
					shift, shift95, err := bounds(cs, each, sum)
					if err != nil {
						t.Fatal(err)
					}
					for k := range shift95 {
						if shift95[k] != want.Shift95[k] && !(math.Abs(math.Log(shift95[k]/want.Shift95[k])) <= shiftsApart(&want)) {
							t.Errorf("member %d: shift factor within %v, scanned %v", i, shift95, want.Shift95)
						}
					}
					apart = math.Abs(math.Log(shift / want.Shift))
				}
				if passes := got.Verdict == Reproduces || got.Verdict == TooSharp || got.Verdict == TooSmooth; passes && !(apart <= shiftsApart(&want)) {
					t.Errorf("member %d, %v: shift factor %v at a glance, scanned %v", i, got.Verdict, got.Shift, want.Shift)
				}
			}
			t.Logf("plan %d, slack %.2g, %d of %d in doubt, verdicts %v", r.coarse, r.slack, doubtful, members/every, verdicts)
			if n := members / int(every); doubtful > n/5 {
				t.Errorf("%d of %d in doubt", doubtful, n)
			}
		})
	}
}

// TestStepsForgetNeighbours: what becomes of a member does not depend on those that were
// run before it in the same memory, to the bit.
func TestStepsForgetNeighbours(t *testing.T) {
	s := familyStudy(t, 300, stepsRim, "")
	found := func(members []int64) map[int64]string {
		r := inSteps(t, s)
		out := map[int64]string{}
		for _, i := range members {
			var c study.Candidate
			s.Families[0].At(&c, i)
			path := c.Path()
			f, numErr, err := r.judge(t.Context(), &path, i, nil, Keep{}.verdict)
			if err != nil {
				t.Fatal(err)
			}
			out[i] = fmt.Sprint(f, numErr)
		}
		return out
	}
	forth, back := found([]int64{0, 7, 20, 41, 256, 299}), found([]int64{299, 256, 41, 20, 7, 0})
	for i, want := range forth {
		if back[i] != want {
			t.Errorf("member %d: %s, in another order %s", i, want, back[i])
		}
	}
	if strings.HasSuffix(forth[256], "NaN") || !strings.HasSuffix(forth[7], "NaN") {
		t.Errorf("audited: member 256 %s, member 7 %s", forth[256], forth[7])
	}
}
