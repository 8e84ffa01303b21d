package study

import (
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"bankfire/diffusion"
)

// FuzzParse holds that no text makes the reader panic, that what it refuses it
// refuses as input errors, and that what it accepts is finite and can be made
// into a problem.
func FuzzParse(f *testing.F) {
	for _, seed := range seeds(f) {
		f.Add([]byte(seed))
	}
	files := seedFiles(f)
	f.Fuzz(func(t *testing.T, data []byte) { holds(t, data, files) })
}

// FuzzEdit holds the same of sound studies in which one stretch of text is
// replaced, which gets past the syntax more often.
func FuzzEdit(f *testing.F) {
	texts := seeds(f)
	for _, w := range wrongStudies() {
		f.Add(uint8(0), uint16(strings.Index(sound, w.old)), uint16(len(w.old)), strings.Replace(w.new, "@", "", 1))
	}
	f.Add(uint8(1), uint16(900), uint16(30), "repeat = 3")
	f.Add(uint8(2), uint16(500), uint16(10), "1e300 Myr")
	for _, text := range []string{
		`[limits]
above = [ { temperature = "1e-300 K", longest = "0 yr", counts = "without a break" } ]`,
		`[limits]
life = { shortest = "1e-9 s", longest = "1e10 yr" }`,
		`tilt = "84.99 deg", origin = "free -1..1 m"`, `scatter = "free", below = "limit"`, `value = "Fo [mol%]"`, `unit = "grey"`,
	} {
		f.Add(uint8(0), uint16(strings.Index(sound, "[[path]]")), uint16(0), text+"\n")
		f.Add(uint8(0), uint16(strings.Index(sound, "spot =")), uint16(0), text+", ")
	}
	for _, leg := range []string{wakesLeg, `{ reheats = "{n} per {life}", from = "1 K", peak = "{n} * 1 K", efold = "{life}", for = "{life}" }`} {
		f.Add(uint8(0), uint16(strings.Index(sound, "[[crystal]]")), uint16(0), "[[family]]\nname = \"wakes\"\nlegs = [ "+leg+" ]\ndraw = { method = \"halton\", count = 9 }\n[family.vary]\nn = { from = 0, to = 1e5 }\nlife = \"2 +- 1 kyr\"\n")
	}
	files := seedFiles(f)
	f.Fuzz(func(t *testing.T, which uint8, at, length uint16, text string) {
		base := texts[int(which)%len(texts)]
		from := min(int(at), len(base))
		to := min(from+int(length), len(base))
		holds(t, []byte(base[:from]+text+base[to:]), files)
	})
}

// seeds returns the sound study, those of testdata and one with open crystals.
func seeds(f *testing.F) []string {
	texts := []string{sound}
	for _, name := range []string{"every-key", "harrow"} {
		data, err := os.ReadFile(filepath.Join("testdata", name, "study.toml"))
		if err != nil {
			f.Fatal(err)
		}
		texts = append(texts, string(data))
	}
	texts = append(texts, openText(5))
	return texts
}

// seedFiles returns the files that the seeds name.
func seedFiles(f *testing.F) map[string]string {
	files := soundFiles()
	for _, name := range []string{"every-key/ti.csv", "every-key/tt.csv", "every-key/rim.csv", "every-key/an.csv", "harrow/hf12-ti.csv"} {
		data, err := os.ReadFile(filepath.Join("testdata", name))
		if err != nil {
			f.Fatal(err)
		}
		files[filepath.Base(name)] = string(data)
	}
	return files
}

func holds(t *testing.T, data []byte, files map[string]string) {
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
	mustBeFinite(t, "limits", s.Limits.Life[0], s.Limits.Life[1], s.Limits.Lowest)
	finiteMembers(t, s)
	for i := range s.Paths {
		finitePath(t, &s.Paths[i])
		if _, err := s.Limits.Barred(s.Paths[i].History); err != nil {
			t.Fatalf("accepted, but a limit cannot be judged: %v", err)
		}
		if _, err := s.Barred(&s.Paths[i]); err != nil || len(s.Paths[i].Barred) > 0 {
			continue
		}
		for j := range s.Crystals {
			for k := range s.Crystals[j].Elements {
				finiteProblem(t, &s.Crystals[j], &s.Crystals[j].Elements[k], &s.Paths[i])
			}
		}
	}
}

// finiteMembers looks at the first members of each family.
func finiteMembers(t *testing.T, s *Study) {
	var c Candidate
	for i := range s.Families {
		f := &s.Families[i]
		for k := range min(f.Count(), 9) {
			f.At(&c, k)
			mustBeFinite(t, "values", c.Values...)
			if c.Barred == "" {
				path := c.Path()
				finitePath(t, &path)
				s.Bar(&c)
				for j := range path.Crystals {
					for e := range path.Crystals[j].Elements {
						if c.Barred == "" && k < 2 {
							finiteProblem(t, &path.Crystals[j], &path.Crystals[j].Elements[e], &path)
						}
					}
				}
			}
			if s.Bar(&c); c.Barred != "" && c.Why == "" {
				t.Fatalf("member %d is barred by %q, but why?", k, c.Barred)
			}
		}
	}
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
	problem, free, err := c.Problem(e, p.History)
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
		if r.Equilibrium != nil {
			mustBeFinite(t, "following rim", r.Equilibrium.LnA, r.Equilibrium.E)
		}
	}
	for _, v := range free {
		mustBeFinite(t, "prior", v.Prior.Value, v.Prior.Sigma)
	}
	for _, leg := range p.History.Legs() {
		mustBeFinite(t, "law", problem.Law.In(leg.Setting).LnD(1000))
	}
	if _, err := diffusion.Compile(problem, diffusion.Options{}); err != nil {
		t.Fatalf("accepted, but the solver refuses it: %v", err)
	}
	if e.Traverse != nil {
		mustBeFinite(t, "traverse", e.Traverse.Position...)
		mustBeFinite(t, "traverse", e.Traverse.Value...)
		mustBeFinite(t, "traverse", e.Traverse.Sigma...)
		for _, n := range append(e.Start.Widths(), e.Tilt, e.Origin) {
			mustBeFinite(t, "nuisance", n.Value, n.Sigma, n.Lo, n.Hi)
		}
		at := make([]float64, len(e.Traverse.Position))
		e.Traverse.Place(at, e.Origin.Middle(), e.Tilt.Middle())
		mustBeFinite(t, "moved traverse", at...)
	}
}
