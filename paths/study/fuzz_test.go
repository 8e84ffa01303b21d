package study

import (
	"math"
	"os"
	"path/filepath"
	"testing"
)

// FuzzParse holds that no text makes the reader panic, that what it refuses it
// refuses as input errors, and that what it accepts is finite and can be made
// into a problem.
func FuzzParse(f *testing.F) {
	seeds, err := filepath.Glob("testdata/*/study.toml")
	if err != nil || len(seeds) < 2 {
		f.Fatalf("seeds %q, error %v", seeds, err)
	}
	for _, name := range seeds {
		data, err := os.ReadFile(name)
		if err != nil {
			f.Fatal(err)
		}
		f.Add(data)
	}
	f.Add([]byte(sound))
	files := soundFiles()
	for _, name := range []string{"every-key/ti.csv", "every-key/tt.csv", "every-key/rim.csv", "harrow/hf12-ti.csv"} {
		data, err := os.ReadFile(filepath.Join("testdata", name))
		if err != nil {
			f.Fatal(err)
		}
		files[filepath.Base(name)] = string(data)
	}
	f.Fuzz(func(t *testing.T, data []byte) {
		s, err := parse("s.toml", data, memory(files))
		if err != nil {
			if s != nil {
				t.Fatal("a study beside an error")
			}
			for _, e := range problems(t, err) {
				if e.File == "" || e.Problem == "" || e.Line < 0 || e.Col < 0 {
					t.Fatalf("error without place or problem: %#v", e)
				}
			}
			return
		}
		for i := range s.Paths {
			finitePath(t, &s.Paths[i])
			for j := range s.Crystals {
				for k := range s.Crystals[j].Elements {
					finiteProblem(t, &s.Crystals[j], &s.Crystals[j].Elements[k], &s.Paths[i])
				}
			}
		}
	})
}

func mustBeFinite(t *testing.T, what string, values ...float64) {
	t.Helper()
	for _, x := range values {
		if math.IsNaN(x) || math.IsInf(x, 0) {
			t.Fatalf("%s is %g", what, x)
		}
	}
}

func finitePath(t *testing.T, p *Path) {
	lo, hi := p.History.Range()
	mustBeFinite(t, "path", p.History.Life(), p.Eruption, lo, hi)
	if !(lo > 0) || !(p.History.Life() > 0) || !(p.Eruption >= 0) {
		t.Fatalf("path %q: %g to %g K, life %g s, eruption %g s", p.Name, lo, hi, p.History.Life(), p.Eruption)
	}
}

func finiteProblem(t *testing.T, c *Crystal, e *Element, p *Path) {
	problem, free, err := c.Problem(e, p)
	if err != nil {
		t.Fatalf("accepted, but no problem: %v", err)
	}
	for _, z := range problem.Zones {
		mustBeFinite(t, "zone", z.Outer, z.Start, z.Edge, z.Times)
	}
	for _, r := range problem.Outer {
		mustBeFinite(t, "rim", r.From, r.Value)
		if r.Given != nil {
			mustBeFinite(t, "given rim", r.Given.At(0), r.Given.At(p.History.Life()/2))
		}
	}
	for _, v := range free {
		mustBeFinite(t, "prior", v.Prior.Value, v.Prior.Sigma)
	}
	mustBeFinite(t, "law", problem.Law.LnD(1000))
	if e.Traverse != nil {
		mustBeFinite(t, "traverse", e.Traverse.Position...)
		mustBeFinite(t, "traverse", e.Traverse.Value...)
		mustBeFinite(t, "traverse", e.Traverse.Sigma...)
	}
}
