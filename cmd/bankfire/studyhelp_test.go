package main

import (
	"fmt"
	"os"
	"path/filepath"
	"regexp"
	"slices"
	"strings"
	"testing"
	"unicode/utf8"

	"bankfire/paths/study"
	"bankfire/thermal"
)

// TestTopics holds what help needs of every topic.
func TestTopics(t *testing.T) {
	for _, topic := range topics() {
		t.Run(topic.name, func(t *testing.T) {
			if topic.short == "" || !strings.HasSuffix(topic.text, "\n") {
				t.Errorf("short %q, text ends in %q", topic.short, topic.text[max(0, len(topic.text)-10):])
			}
			for i, line := range strings.Split(topic.text, "\n") {
				if n := utf8.RuneCountInString(line); n > lineWidth || strings.TrimRight(line, " ") != line {
					t.Errorf("line %d has %d letters or ends in blanks: %q", i+1, n, line)
				}
			}
		})
	}
}

// entry is a key on the page about the study file, with its example, "" if it
// has none.
type entry struct{ key, example string }

var (
	tableHead = regexp.MustCompile(`^(top level|history|\[+[a-z.]+\]+|(?:path|family)\.legs[ .][a-z]+|(?:limits|law|family)\.[a-z]+|crystal\.[a-z.]+(?: [a-z]+)?)(?:  |$)`)
	entryLine = regexp.MustCompile(`^  ([A-Za-z0-9_]+)(?: = (.*?))?(?:  .*)?$`)
)

// entries returns the keys that the page has for each table.
func entries(page string) map[string][]entry {
	found := map[string][]entry{}
	table, in := "", false
	for _, line := range strings.Split(page, "\n") {
		if head := tableHead.FindStringSubmatch(line); head != nil {
			table, in = strings.Trim(head[1], "[]"), true
			if table == "top level" {
				table = ""
			}
			found[table] = nil
			continue
		}
		if strings.TrimSpace(line) == "" {
			in = false
		}
		if e := entryLine.FindStringSubmatch(line); in && e != nil {
			found[table] = append(found[table], entry{e[1], e[2]})
		}
	}
	return found
}

// TestStudyHelpHasEveryKey compares the page with what the reader of studies
// knows: each table with its keys, no more and no less.
func TestStudyHelpHasEveryKey(t *testing.T) {
	found := entries(studyHelp)
	for _, table := range study.Tables() {
		t.Run("table "+table.Name, func(t *testing.T) {
			var keys []string
			for _, e := range found[table.Name] {
				keys = append(keys, e.key)
			}
			want := slices.Sorted(slices.Values(table.Keys))
			if slices.Sort(keys); !slices.Equal(keys, want) {
				t.Errorf("the page has the keys %q, the reader knows %q", keys, want)
			}
			delete(found, table.Name)
		})
	}
	for table := range found {
		t.Errorf("the page has a table %q that the reader does not know", table)
	}
}

// TestStudyHelpHasEveryUnit: a unit that a study may use is on the page.
func TestStudyHelpHasEveryUnit(t *testing.T) {
	for _, dim := range []thermal.Dimension{
		thermal.Temperature, thermal.Duration, thermal.Length, thermal.Angle, thermal.MolarEnergy, thermal.Diffusivity, thermal.Velocity, thermal.Pressure, thermal.Concentration,
	} {
		if list := strings.Join(thermal.UnitNames(dim), ", "); !strings.Contains(studyHelp, list) {
			t.Errorf("the page does not list %s", list)
		}
	}
}

// fileBlock is a file shown on a page: its name, which ends a line, and its
// text, indented by four blanks.
var fileBlock = regexp.MustCompile(`(?m)(\S+\.(?:toml|csv)):\n\n((?:    .*\n|\n)+)`)

// shownFiles writes the files that the page shows into a folder and returns
// their names there and their texts.
func shownFiles(t *testing.T) (folder string, files map[string]string) {
	t.Helper()
	folder, files = t.TempDir(), map[string]string{}
	for _, block := range fileBlock.FindAllStringSubmatch(studyHelp, -1) {
		text := strings.ReplaceAll("\n"+block[2], "\n    ", "\n")[1:]
		files[block[1]] = text
		writeFile(t, folder, block[1], text)
	}
	return folder, files
}

func writeFile(t *testing.T, folder, name, text string) {
	t.Helper()
	if err := os.WriteFile(filepath.Join(folder, name), []byte(text), 0o666); err != nil {
		t.Fatal(err)
	}
}

// TestStudyHelpExamples reads and weighs every complete study of the page.
func TestStudyHelpExamples(t *testing.T) {
	folder, files := shownFiles(t)
	studies := 0
	for name := range files {
		if filepath.Ext(name) != ".toml" {
			continue
		}
		studies++
		t.Run(name, func(t *testing.T) {
			if _, err := weighStudy(t.Context(), filepath.Join(folder, name)); err != nil {
				t.Error(err)
			}
		})
	}
	if studies < 2 || len(files) < 3 {
		t.Errorf("%d studies among %d files", studies, len(files))
	}
}

// frame is where the keys of a table go: into the page's first study with
// new for old, which holds the keys on a line each or, inline, as { ... }.
type frame struct {
	table    string
	old, new string   // new has %s for the keys
	inline   bool     // they stand in one line, separated by commas
	keys     []string // needed beside the one that is tried
}

const (
	shownLegs     = `[ { hold = "750 C", for = "6 kyr" } ]`
	shownZones    = `{ name = "core", width = "140 um" }`
	shownMantle   = `{ name = "mantle", width = "60 um" }`
	shownLaw      = `law = "quartz-ti-cherniak2007"`
	shownStart    = `{ zones = ["free", "free"], edge = "0 um" }`
	shownRim      = `{ held = "mantle" }`
	shownTitle    = "title = \"Harrow Fell rhyolite (invented), quartz HF-12\"\n"
	shownPath     = "name = \"kept warm\"\nlegs = " + shownLegs + "\n"
	shownCrystal  = "name = \"HF-12\"\nmineral = \"quartz\"\nshape = \"slab\"\nzones = [ " + shownZones + ", " + shownMantle + " ]\n"
	shownElement  = "name = \"Ti\"\n" + shownLaw + "\nstart = " + shownStart + "\nrim = " + shownRim + "\n"
	shownTraverse = "file = \"ti.csv\"\nposition = \"distance [um]\"\nzero = \"rim\"\nvalue = \"Ti [ppm]\"\nerror = \"3 %\"\nspot = \"0.8 um fwhm\"\n"
)

// drawnFamily is a family of three members.
var drawnFamily = []string{
	`name = "drawn"`,
	`legs = [ { hold = "{store}", for = "{wait}" }, { ramp = "780 C", for = "{wake}" } ]`,
	`vary = { store = { from = "640 C", to = "740 C" }, wait = { from = "1 yr", to = "1 kyr" }, wake = "3 +- 1 yr" }`,
	`draw = { method = "halton", count = 3 }`,
}

func lines(text string) []string { return strings.Split(strings.TrimSpace(text), "\n") }

func frames() []frame {
	const limit = "[limits]\n%s = %s\n\n[[threshold]]"
	law := []string{`D0 = "7e-8 m2/s"`, `E = "273 kJ/mol"`}
	host := []string{`file = "an.csv"`, `position = "distance [um]"`, `zero = "rim"`, `value = "XAn [mole fraction]"`, `smooth = "steps"`}
	leg := func(kind string, keys ...string) frame {
		return frame{"path.legs " + kind, shownLegs, `[ { hold = "690 C", for = "800 yr" }, %s ]`, true, keys}
	}
	rim := func(kind string, keys ...string) frame {
		return frame{"crystal.element.rim " + kind, shownRim, `[ "sealed", %s ]`, true, append(keys, `from = "1 yr after start"`)}
	}
	inLimits := func(name, before, after string, keys ...string) frame {
		return frame{"limits." + name, "[[threshold]]", fmt.Sprintf(limit, name, before+"%s"+after), true, keys}
	}
	return []frame{
		{"", shownTitle, "%s\n", false, nil},
		{"threshold", "name = \"lock-up\"\ntemperature = \"730 C\"\n", "%s\n", false, []string{`name = "lock-up"`, `temperature = "730 C"`}},
		{"conditions", "[[threshold]]", "[conditions]\n%s\n\n[[threshold]]", false, nil},
		{"limits", "[[threshold]]", "[limits]\n%s\n\n[[threshold]]", false, nil},
		{"history", "[[threshold]]", "history = %s\n\n[[threshold]]", true, []string{`shared_from = "1 yr after start"`}},
		inLimits("life", "", ""),
		inLimits("above", "[ ", " ]", `threshold = "lock-up"`, `longest = "3 yr"`),
		inLimits("between", "[ ", " ]", `from = "start"`, `to = "eruption"`, `longest = "1 Myr"`),
		{"law", "[[threshold]]", "[[law]]\n%s\n\n[[threshold]]", false, append(law, `name = "mine"`)},
		{"law.host", "[[threshold]]", "[[law]]\nname = \"mine\"\n" + strings.Join(law, "\n") + "\nhost = %s\n\n[[threshold]]", true, []string{`ln_slope = 1`}},
		{"law.own", "[[threshold]]", "[[law]]\nname = \"mine\"\n" + strings.Join(law, "\n") + "\nown = %s\n\n[[threshold]]", true, []string{`ln_slope = 1`}},
		{"partition", "[[threshold]]", "[[partition]]\n%s\n\n[[threshold]]", false, []string{`name = "kx"`, `A = "1 kJ/mol"`, `B = "1 kJ/mol"`}},
		{"path", shownPath, "%s\n", false, lines(shownPath)},
		leg("hold", `hold = "750 C"`, `for = "1 yr"`),
		leg("ramp", `ramp = "750 C"`, `for = "1 yr"`),
		leg("relax", `relax = "650 C"`, `efold = "1 yr"`, `for = "1 yr"`),
		leg("reheat", `reheat = "770 C"`, `efold = "1 yr"`),
		leg("sheet", `sheet = "900 C"`, `host = "600 C"`, `thickness = "9 m"`, `position = "0 m"`, `kappa = "1e-6 m2/s"`, `for = "1 yr"`),
		leg("table", `table = "tt.csv"`, `time = "t [yr]"`, `temperature = "T [C]"`, `counts = "before eruption"`),
		{"path.legs.conditions", shownLegs, `[ { hold = "750 C", for = "6 kyr", conditions = %s } ]`, true, nil},
		leg("repeat", `repeat = 2`, `legs = [ { hold = "700 C", for = "1 yr" } ]`),
		{"family", "[[threshold]]", "[[family]]\n%s\n\n[[threshold]]", false, drawnFamily},
		{"family.legs reheats", "[[threshold]]", "[[family]]\n" + drawnFamily[0] + "\n" + drawnFamily[3] + "\nlegs = [ { hold = \"690 C\", for = \"9 yr\" }, %s ]\n\n[[threshold]]", true, []string{`reheats = "5 per kyr"`, `peak = "780 C"`, `efold = "1 yr"`, `for = "1 kyr"`}},
		{"family.draw", "[[threshold]]", "[[family]]\n" + strings.Join(drawnFamily[:3], "\n") + "\ndraw = %s\n\n[[threshold]]", true, []string{`method = "halton"`, `count = 3`}},
		{"family.vary", "[[threshold]]", "[[family]]\n" + strings.Join(drawnFamily[:2], "\n") + "\n" + drawnFamily[3] + "\n[family.vary]\nstore = { from = \"640 C\", to = \"740 C\" }\nwake = \"3 +- 1 yr\"\nwait = %s\n\n[[threshold]]", true, []string{`from = "1 yr"`, `to = "1 kyr"`}},
		{"crystal", shownCrystal, "%s\n", false, lines(shownCrystal)},
		{"crystal.zones", shownZones + ", " + shownMantle, shownMantle + ", %s", true, []string{`name = "core"`, `width = "140 um"`}}, // outside
		{"crystal.host", "shape = \"slab\"\n", "shape = \"slab\"\nhost = %s\n", true, host},
		{"crystal.host.error", "shape = \"slab\"\n", "shape = \"slab\"\nhost = { " + strings.Join(host, ", ") + ", error = %s }\n", true,
			[]string{`column = "1s [mole fraction]"`, `sigmas = 1`}},
		{"crystal.dissolves", "shape = \"slab\"\n", "shape = \"slab\"\ndissolves = %s\n", true, []string{`above = "790 C"`, `longer = "2 yr"`}},
		{"crystal.grows", "shape = \"slab\"\n", "shape = \"slab\"\ngrows = [ %s ]\n", true, []string{`rate = "1 um/yr"`, `from = "2 yr after start"`, `until = "12 yr after start"`}},
		{"crystal.inner", "shape = \"slab\"\n", "shape = \"slab\"\ninner = %s\n", true, nil},
		{"crystal.element", shownElement, "%s\n", false, lines(shownElement)},
		{"crystal.element.law", shownLaw, "law = %s", true, law},
		{"crystal.element.law.host", shownLaw, "law = { " + strings.Join(law, ", ") + ", host = %s }", true, []string{`ln_slope = 1`}},
		{"crystal.element.law.own", shownLaw, "law = { " + strings.Join(law, ", ") + ", own = %s }", true, []string{`ln_slope = 0.1`}},
		{"crystal.element.law a", "[[threshold]]", "[conditions]\nfO2 = \"NNO\"\n\n[[threshold]]", true, nil},
		{"crystal.element.law above", "[[threshold]]", "[conditions]\nfO2 = \"NNO\"\n\n[[threshold]]", true, nil}, // see TestSwitch of the study
		{"crystal.element.law.at", "[[threshold]]", "[conditions]\nfO2 = \"NNO\"\n\n[[threshold]]", true, nil},
		{"crystal.element.law like", shownLaw, "law = %s", true, []string{`like = "quartz-ti-cherniak2007"`, "times = 2"}},
		{"crystal.element.start", shownStart, "%s", true, nil},
		rim("held", `held = "90 ppm"`),
		rim("given", `given = "rim.csv"`, `time = "t [yr]"`, `value = "Ti [ppm]"`),
		rim("sealed", `sealed = true`),
		rim("following", `following = "sr-blundy1991"`, `melt = "90 ppm"`),
		rim("transfer", `transfer = "60 ppm"`, `k = { k0 = "1 um/yr" }`),
		{"crystal.element.rim.k", shownRim, `{ transfer = "60 ppm", k = %s }`, true, []string{`k0 = "1 um/yr"`}},
		{"crystal.element.traverse", shownTraverse, "%s\n", false, lines(shownTraverse)},
		{"crystal.element.traverse.error", `"3 %"`, "%s", true, []string{`column = "2se [ppm]"`, "sigmas = 2"}},
	}
}

// beside are keys that change, or go, beside the one that is tried.
var beside = map[string][]string{
	"limits.above temperature":                  {"threshold"},
	"limits.above shortest":                     {"longest"},
	"limits.between shortest":                   {"longest"},
	"crystal.element.traverse unit":             {"value", `value = "Ti"`},
	"crystal.element.rim given unit":            {"value", `value = "Ti"`},
	"crystal.element.start melt":                {"temperature", `temperature = ["760 C", "790 C"]`},
	"crystal.element.start solubility":          {"temperature", `temperature = ["760 C", "790 C"]`},
	"crystal.element.start temperature":         {"solubility", `solubility = "ti-quartz-wark2006"`},
	"crystal.element.start lowest":              {"scaled", `scaled = "P"`, "smooth", `smooth = "steps"`},
	"crystal.element.start highest":             {"scaled", `scaled = "P"`, "smooth", `smooth = "steps"`},
	"crystal.element.start smooth":              {"scaled", `scaled = "P"`},
	"crystal.element.start scaled":              {"smooth", `smooth = "steps"`},
	"crystal.element.start width":               {"scaled", `scaled = "P"`, "smooth", `smooth = "spline"`},
	"crystal.element.rim given temperature":     {"time", ""},
	"crystal.element.rim following temperature": {"melt", `melt = "sr-melt.csv"`, "value", `value = "Sr [ppm]"`},
	"crystal.element.rim following value":       {"melt", `melt = "sr-melt.csv"`, "temperature", `temperature = "T [C]"`},
	"crystal.host unit":                         {"value", `value = "bare"`},
	"crystal.element.traverse.error size":       {"column", "", "sigmas", ""},
	"law.host slope_of":                         {"ln_slope", ""},
	"crystal.element.law.host slope_of":         {"ln_slope", ""},
	"crystal.element.law like slope_sigma":      {"like", `like = "plagioclase-sr-giletti1994"`},
	"crystal.element.law like at":               {"like", `like = "plagioclase-sr-giletti1994"`, "slope_sigma", "slope_sigma = 0.9"},
	"family.vary choices":                       {"from", "", "to", ""},
	"crystal.host width":                        {"smooth", `smooth = "spline"`},
	"crystal.host.error size":                   {"column", "", "sigmas", ""},
}

// onHost are keys for which the crystal needs a host in every zone.
var onHost = []string{"crystal.zones host", "crystal host_law", "crystal.element partition", "crystal.element.law host",
	"crystal.element.rim following following", "crystal.element.rim following melt",
	"crystal.element.rim following temperature", "crystal.element.rim following value", "crystal.element.rim following k",
	"crystal.element.rim following unit", "crystal.element.rim following from", "crystal.element.law.host ln_slope", "crystal.element.law.host slope_of", "crystal.element.law.host at",
	"crystal.element.law like slope_sigma", "crystal.element.law like at"}

// hosts gives a host to the zones that have none.
var hosts = strings.NewReplacer(`"140 um" }`, `"140 um", host = 0.5 }`, `"60 um" }`, `"60 um", host = 0.4 }`)

// stated are keys for which every value of the element must be known, and exact
// states them.
var (
	stated = []string{"crystal.element.law own", "crystal.element.law.own ln_slope", "crystal.element.law.own at"}
	exact  = strings.NewReplacer(`["free", "free"]`, `["90 ppm", "60 ppm"]`)
)

// inMelt are keys for which the element needs a partition relation too, and saturated
// those for which the study needs conditions.
var (
	inMelt    = []string{"crystal.element.start melt"}
	saturated = []string{"crystal.element.start solubility", "crystal.element.start temperature"}
)

// copied are keys for which the crystal needs another element, whose shape a start has.
var copied = []string{"crystal.element.start scaled", "crystal.element.start lowest", "crystal.element.start highest",
	"crystal.element.start smooth", "crystal.element.start width"}

// copiedElement is that element.
const copiedElement = "[[crystal.element]]\nname = \"P\"\n" + shownLaw + "\nstart = " + shownStart +
	"\ntraverse = { file = \"p.csv\", position = \"distance [um]\", zero = \"rim\", value = \"P [ppm]\", error = \"3 %\", spot = \"point\" }\n\n"

// with returns the keys of the frame with the one that is tried.
func (f *frame) with(e entry) string {
	keys := map[string]string{e.key: e.key + " = " + e.example}
	var order []string
	for _, line := range f.keys {
		key, _, _ := strings.Cut(line, " ")
		order = append(order, key)
		if key != e.key {
			keys[key] = line
		}
	}
	if !slices.Contains(order, e.key) {
		order = append(order, e.key)
	}
	change := beside[f.table+" "+e.key]
	for i := 0; i < len(change); i += 2 {
		if !slices.Contains(order, change[i]) {
			order = append(order, change[i])
		}
		keys[change[i]] = strings.Join(change[i+1:min(i+2, len(change))], "")
	}
	var out []string
	for _, key := range order {
		if keys[key] != "" {
			out = append(out, keys[key])
		}
	}
	if f.inline {
		return "{ " + strings.Join(out, ", ") + " }"
	}
	return strings.Join(out, "\n")
}

// TestStudyHelpEntries reads the page's first study with each example of a key
// in its table.
func TestStudyHelpEntries(t *testing.T) {
	folder, files := shownFiles(t)
	sound := files["study.toml"]
	writeFile(t, folder, "ti.csv", "distance [um],Ti [ppm],2se [ppm],crack\n50,58,4,\n60,75,4,x\n64,91,4,\n")
	writeFile(t, folder, "p.csv", "distance [um],P [ppm]\n40,20\n50,21\n58,24\n70,38\n90,40\n")
	writeFile(t, folder, "tt.csv", "t [yr],T [C]\n90,690\n50,750\n0,700\n")
	writeFile(t, folder, "rim.csv", "t [yr],Ti [ppm],T [C]\n0,60,600\n1e5,70,900\n")
	writeFile(t, folder, "sr-melt.csv", "T [C],Sr [ppm]\n900,60\n600,70\n")
	writeFile(t, folder, "an.csv", "distance [um],XAn [mole fraction],bare,1s [mole fraction]\n40,0.4,0.4,0.01\n50,0.4,0.4,0.01\n70,0.5,0.5,0.01\n90,0.5,0.5,0.01\n")
	found := entries(studyHelp)
	for _, f := range frames() {
		if strings.Count(sound, f.old) != 1 {
			t.Fatalf("%q is in the study %d times", f.old, strings.Count(sound, f.old))
		}
		for _, e := range found[f.table] {
			if e.example == "" || strings.Contains(e.example, "...") {
				continue
			}
			t.Run(f.table+" "+e.key, func(t *testing.T) {
				text := strings.Replace(sound, f.old, strings.Replace(f.new, "%s", f.with(e), 1), 1)
				if slices.Contains(inMelt, f.table+" "+e.key) {
					text = strings.Replace(hosts.Replace(text), shownLaw, shownLaw+"\npartition = \"sr-blundy1991\"", 1)
				}
				if slices.Contains(saturated, f.table+" "+e.key) {
					text = strings.Replace(text, "[[threshold]]", "[conditions]\naTiO2 = 1\n\n[[threshold]]", 1)
				}
				if slices.Contains(onHost, f.table+" "+e.key) {
					text = hosts.Replace(text)
				}
				if slices.Contains(copied, f.table+" "+e.key) {
					text = strings.Replace(text, "[[crystal.element]]", copiedElement+"[[crystal.element]]", 1)
				}
				if slices.Contains(stated, f.table+" "+e.key) {
					text = exact.Replace(text)
				}
				writeFile(t, folder, "tried.toml", text)
				if _, err := study.Read(filepath.Join(folder, "tried.toml")); err != nil {
					t.Errorf("%v\n%s", err, text)
				}
			})
		}
		delete(found, f.table)
	}
	for table := range found {
		t.Errorf("nothing tries the examples of %s", table)
	}
}
