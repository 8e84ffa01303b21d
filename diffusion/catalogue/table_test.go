package catalogue

import (
	"errors"
	"math"
	"slices"
	"strings"
	"testing"

	"bankfire/thermal"
)

// laws is the number of rows: 90 of the source table less 12 without constants, 13 metals and one melt.
const laws = 64

func TestTable(t *testing.T) {
	rows := All()
	if len(rows) != laws {
		t.Errorf("%d rows, want %d", len(rows), laws)
	}
	keys := map[string]bool{}
	for _, r := range rows {
		t.Run(r.Key, func(t *testing.T) {
			if keys[r.Key] {
				t.Error("key used twice")
			}
			keys[r.Key] = true
			checkWords(t, &r)
			checkNumbers(t, &r)
			checkTerms(t, &r)
		})
	}
	if !slices.IsSortedFunc(rows, func(a, b Row) int { return strings.Compare(a.Key, b.Key) }) {
		t.Error("not sorted by key")
	}
}

func checkWords(t *testing.T, r *Row) {
	t.Helper()
	for name, text := range map[string]string{
		"mineral": r.Mineral, "species": r.Species, "citation": r.Citation, "confidence": r.Confidence, "remark": r.Remark,
	} {
		if strings.TrimSpace(text) == "" {
			t.Errorf("%s is empty", name)
		}
		if text != strings.TrimSpace(text) {
			t.Errorf("%s has space around it: %q", name, text)
		}
	}
	if strings.Trim(r.Key, "abcdefghijklmnopqrstuvwxyz0123456789-") != "" {
		t.Errorf("key %q: want lower-case letters, digits and hyphens", r.Key)
	}
	first := strings.FieldsFunc(r.Confidence, func(c rune) bool { return c == ':' })[0]
	if !slices.Contains([]string{"confirmed", "derived", "memory"}, first) {
		t.Errorf("confidence begins with %q", first)
	}
}

func checkNumbers(t *testing.T, r *Row) {
	t.Helper()
	within := func(name string, x, lo, hi float64) {
		t.Helper()
		if !(x >= lo && x <= hi) {
			t.Errorf("%s is %g, want %g to %g", name, x, lo, hi)
		}
	}
	within("log10 D0", r.Log10D0, -20, 5)
	within("E", r.E, 3e4, 8e5)
	within("sigma of E", r.SigmaE.Value, 0.01*r.E, 0.25*r.E)
	within("sigma in the middle", r.SigmaMid.Value, 0.05, 1)
	within("dV", r.DV, 0, 2e-5)
	if !r.RangeKnown() {
		within("lower end of no range", r.TMin, 0, 0)
		return
	}
	within("lower end of the range", r.TMin, celsius(400), celsius(1500))
	within("upper end of the range", r.TMax, math.Nextafter(r.TMin, 9e9), celsius(1600))
}

func checkTerms(t *testing.T, r *Row) {
	t.Helper()
	_, onHost := r.OnHost()
	if onHost && r.OwnComposition() {
		t.Error("depends on the host and on the element itself")
	}
	if (onHost || r.OwnComposition()) && r.Composition.Form != Linear {
		t.Errorf("a term of the host or the element is %s, want linear: it becomes a factor exp(slope (X - at))", r.Composition.Form)
	}
	if c := r.Composition; (c.Sigma != 0 || c.SlopeOf != "") && !onHost || !(c.Sigma >= 0 && c.Sigma <= math.Abs(c.Slope)/2) {
		t.Errorf("slope %g +- %g of %q", c.Slope, c.Sigma, c.SlopeOf)
	}
	if key := r.Composition.SlopeOf; key != "" {
		if of, err := Find(key); err != nil || of.Composition.Slope != r.Composition.Slope || of.Species == r.Species {
			t.Errorf("its slope %g is not that of another element's law %s", r.Composition.Slope, key)
		}
	}
	for _, term := range r.terms() {
		if term.Slope == 0 {
			t.Errorf("no slope by %s", term.Variable)
		}
		if term.Form == Power && !(term.Reference > 0) {
			t.Errorf("reference of %s is %g", term.Variable, term.Reference)
		}
	}
	if r.DV == 0 && r.PRef != 0 {
		t.Error("reference pressure without activation volume")
	}
}

// TestTags holds the rule of the tags: only what species or remark says in so
// many words counts. A law called tracer that is there to be combined is an
// ingredient of a multicomponent flux; "Self-diffusion (tracer)" is self; what is
// between two species is told by the species alone, because remarks also say
// "combine for interdiffusion".
func TestTags(t *testing.T) {
	for _, r := range All() {
		text := strings.ToLower(r.Species + " " + r.Remark)
		want := Unstated
		switch {
		case strings.Contains(text, "multicomponent"):
			want = Multicomponent
		case strings.Contains(r.Species, "interdiffusion"):
			want = Inter
		case strings.Contains(text, "self-diffusion"):
			want = Self
		case strings.Contains(text, "tracer"):
			want = Tracer
		}
		if r.Tag != want {
			t.Errorf("%s: tag %s, want %s from species %q and remark %q", r.Key, r.Tag, want, r.Species, r.Remark)
		}
	}
}

// TestChecked holds the rule of the column checked: no if the confidence begins
// with memory, or if it says that a constant that enters D is from memory, which
// is so for the fO2 exponent of Ca in olivine. The memory in the confidence of Sr
// in albite is of the host and of sigma E, which do not enter D.
func TestChecked(t *testing.T) {
	for _, r := range All() {
		memory := strings.HasPrefix(r.Confidence, "memory")
		exponent := strings.Contains(r.Confidence, "exponent, its 1e-7 Pa reference and sigma_E are memory")
		if got, want := r.Checked(), !memory && !exponent; got != want {
			t.Errorf("%s: checked %v, want %v from %q", r.Key, got, want, r.Confidence)
		}
		if strings.Contains(r.Confidence, "memory") && r.Checked() && r.Key != "albite-sr-cherniak1996" {
			t.Errorf("%s: checked, but confidence is %q", r.Key, r.Confidence)
		}
		if slices.Contains(r.Cautions(), NotChecked) == r.Checked() {
			t.Errorf("%s: checked is %v, cautions are %q", r.Key, r.Checked(), r.Cautions())
		}
	}
}

// TestUncertainties holds where the uncertainties come from. One paper says how
// far its D may be off (a factor of 2); none prints a covariance; the printed
// errors of log10 D0 and E are no way to the error in the middle.
func TestUncertainties(t *testing.T) {
	for _, r := range All() {
		switch r.SigmaE.Origin {
		case DefaultE:
			// written to four digits
			if !(math.Abs(r.SigmaE.Value/(0.05*r.E)-1) <= 1e-3) {
				t.Errorf("%s: sigma of E %g is not 5 %% of %g", r.Key, r.SigmaE.Value, r.E)
			}
		case FromSource:
		default:
			t.Errorf("%s: origin of sigma E is %q", r.Key, r.SigmaE.Origin)
		}
		factor2 := strings.Contains(r.Remark, "factor-2 uncertainty")
		want := Sigma{0.25, DefaultMid}
		if factor2 {
			want = Sigma{0.301, FromSource} // log10 2
		}
		if r.SigmaMid != want {
			t.Errorf("%s: sigma in the middle %v, want %v", r.Key, r.SigmaMid, want)
		}
	}
}

func TestReferencePressure(t *testing.T) {
	for _, r := range All() {
		want := 0.0
		switch {
		case strings.Contains(r.Remark, "(P-2e9)*dV"):
			want = 2e9
		case strings.Contains(r.Remark, "E+P*dV"):
			want = 0
		case r.DV != 0:
			want = thermal.Bar
		}
		if r.PRef != want {
			t.Errorf("%s: reference pressure %g Pa, want %g from %q", r.Key, r.PRef, want, r.Remark)
		}
	}
}

func TestAllIsCopy(t *testing.T) {
	rows := All()
	rows[0].Key, rows[0].Composition.Slope = "spoiled", 7
	if again := All()[0]; again.Key == "spoiled" || again.Composition.Slope == 7 {
		t.Error("a change of the copy changed the table")
	}
	row, err := Find("quartz-ti-cherniak2007")
	if err != nil {
		t.Fatal(err)
	}
	row.E = 0
	if again, _ := Find("quartz-ti-cherniak2007"); again.E == 0 {
		t.Error("a change of the row found changed the table")
	}
}

func TestFind(t *testing.T) {
	for _, r := range All() {
		if row, err := Find(r.Key); err != nil || *row != r {
			t.Errorf("%s: found %v, %v", r.Key, row, err)
		}
	}
	for _, test := range []struct{ name, key, nearest string }{
		{"one letter", "quartz-ti-cherniak2006", "quartz-ti-cherniak2007"},
		{"letter left out", "olivine-ni-pety2004", "olivine-ni-petry2004"},
		{"capitals", "Quartz-Ti-Jollands2020", "quartz-ti-jollands2020"},
		{"long end left out", "quartz-ti", "quartz-ti-cherniak2007"},
		{"end left out", "plagioclase-sr-giletti", "plagioclase-sr-giletti1994"},
	} {
		t.Run(test.name, func(t *testing.T) {
			row, err := Find(test.key)
			var in *thermal.InputError
			if row != nil || !errors.As(err, &in) {
				t.Fatalf("got %v, %v", row, err)
			}
			if in.Value != test.key || !strings.Contains(in.Remedy, `"`+test.nearest+`"`) {
				t.Errorf("got %v, want the nearest key %s", in, test.nearest)
			}
		})
	}
	var in *thermal.InputError
	if _, err := Find("mine"); !errors.As(err, &in) || in.Remedy != "bankfire laws lists all keys" {
		t.Errorf("got %v, which is near no key", err)
	}
	if _, err := Find(""); err == nil {
		t.Error("an empty key is found")
	}
}

func TestParseErrors(t *testing.T) {
	lines := strings.Split(source, "\n")
	head := slices.IndexFunc(lines, func(s string) bool { return strings.HasPrefix(s, "key,") })
	row := lines[slices.IndexFunc(lines, func(s string) bool { return strings.HasPrefix(s, "quartz-ti-cherniak2007,") })]
	for _, test := range []struct{ name, from, to, want string }{
		{"number", ",273,", ",27x3,", `laws.csv:2: E_kJ_per_mol "27x3": not a finite number`},
		{"NaN", ",273,", ",NaN,", `laws.csv:2: E_kJ_per_mol "NaN": not a finite number`},
		{"fraction", ",273,", ",273/0,", `laws.csv:2: E_kJ_per_mol "273/0": not a finite number`},
		{"fraction of words", ",273,", ",273/x,", `laws.csv:2: E_kJ_per_mol "273/x": not a finite number`},
		{"tag", ",unstated,", ",guessed,", `laws.csv:2: tag "guessed": want one of tracer, self`},
		{"no D0", ",7e-08,,", ",,,", `laws.csv:2: D0_m2_per_s: want either this or log10_D0`},
		{"both D0", ",7e-08,,", ",7e-08,-7.15,", `laws.csv:2: D0_m2_per_s "7e-08": want either`},
		{"no mineral", ",quartz,", ",,", `laws.csv:2: mineral: empty`},
		{"half a range", ",700,1150,", ",700,hot,", `laws.csv:2: T_max_C "hot": not a finite number`},
		{"too few cells", ",273,", ",", `wrong number of fields`},
	} {
		t.Run(test.name, func(t *testing.T) {
			bad := strings.Replace(row, test.from, test.to, 1)
			if bad == row {
				t.Fatalf("%q is not in the row", test.from)
			}
			rows, err := parse(strings.NewReader(lines[head] + "\n" + bad + "\n"))
			if rows != nil || err == nil || !strings.Contains(err.Error(), test.want) {
				t.Errorf("got %v, %v, want %q", rows, err, test.want)
			}
		})
	}
	if _, err := parse(strings.NewReader("")); err == nil {
		t.Error("an empty table is read")
	}
}
