package study

import (
	"errors"
	"fmt"
	"strings"
	"testing"

	"bankfire/thermal"
)

// memory is a loader of files that exist in a test only.
func memory(files map[string]string) loader {
	return func(name string, limit int64) ([]byte, error) {
		text, ok := files[name]
		switch {
		case !ok:
			return nil, &thermal.InputError{Problem: "no such file"}
		case int64(len(text)) > limit:
			return nil, &thermal.InputError{Problem: "larger than allowed"}
		}
		return []byte(text), nil
	}
}

// problems takes an error of Read apart.
func problems(t *testing.T, err error) []*thermal.InputError {
	t.Helper()
	if err == nil {
		return nil
	}
	joined, ok := err.(interface{ Unwrap() []error })
	if !ok {
		joined = oneError{err}
	}
	var list []*thermal.InputError
	for _, e := range joined.Unwrap() {
		var in *thermal.InputError
		if !errors.As(e, &in) {
			t.Fatalf("error of type %T, want *thermal.InputError: %v", e, e)
		}
		list = append(list, in)
	}
	return list
}

type oneError struct{ error }

func (e oneError) Unwrap() []error { return []error{e.error} }

// sound is a study without a fault. The wrong studies are made of it.
const sound = `title = "sound"
confidence = "95 %"

[[threshold]]
name = "lock-up"
temperature = "750 C"

[[law]]
name = "mine"
D0 = "7e-8 m2/s"
E = "273 kJ/mol"

[[path]]
name = "warm"
legs = [
  { name = "store", hold = "750 C", for = "800 yr" },
  { name = "wake", ramp = "780 C", for = "5 yr" },
]

[[crystal]]
name = "Q1"
mineral = "quartz"
shape = "slab"
zones = [
  { name = "core", width = "100 um" },
  { name = "skin", width = "20 um" },
]

[[crystal.element]]
name = "Ti"
law = "quartz-ti-cherniak2007"
start = { zones = ["free", "58 ppm"], edge = "0 um" }
rim = { held = "skin" }
traverse = { file = "q1.csv", position = "x [um]", zero = "rim", value = "Ti [ppm]", error = "4 %", spot = "1 um fwhm" }
`

// soundFiles are the files that the sound study and its faulty sisters name.
func soundFiles() map[string]string {
	return map[string]string{
		"q1.csv":      "x [um],Ti [ppm]\n1,58\n30,70\n",
		"bad.csv":     "x [um],Ti [ppm]\n1,58\n30,seventy\n",
		"wide.csv":    "x [um],Ti [ppm]\n1,58\n300,70\n",
		"percent.cs":  "x [um],Ti [mole fraction]\n1,0.1\n30,0.2\n",
		"rise.csv":    "t [yr],Ti [ppm]\n0,80\n900,90\n",
		"short.csv":   "t [yr],Ti [ppm]\n0,80\n90,90\n",
		"back.csv":    "t [yr],Ti [ppm]\n0,80\n900,90\n800,90\n",
		"less.csv":    "t [yr],Ti [ppm]\n0,80\n900,-90\n",
		"thrice.csv":  "t [yr],Ti [ppm]\n0,80\n9,80\n9,85\n9,90\n900,90\n",
		"warming.csv": "t [yr],T [C]\n0,700\n900,750\n",
		"turn.csv":    "t [yr],T [C]\n0,700\n\n900,750\n800,750\n",
		"one.csv":     "t [yr],T [C]\n0,700\n",
		"bare.csv":    "t [yr],Ti\n0,80\n900,90\n",
		"mole.csv":    "t [yr],Ti [mole fraction]\n0,0.1\n900,0.1\n",
		"hot.csv":     "t [yr],T [C]\n0,700\n900,75000\n",
		"below.csv":   "x [um],Ti [ppm]\n1,58\n30,<5\n",
		"an.csv":      "x [um],from middle [um],XAn [mole fraction],An [mol%],An wt [wt%],bare\n2,118,0.35,35,35,0.35\n10,110,0.36,36,36,0.36\n18,102,0.4,40,40,0.4\n22,98,0.41,41,41,0.41\n40,80,0.54,54,54,0.54\n60,60,0.56,56,56,0.56\n100,20,0.55,55,55,0.55\n",
		"far.csv":     "x [um],XAn [mole fraction]\n1,0.5\n130,0.5\n",
		"much.csv":    "x [um],XAn [mole fraction]\n1,1.2\n30,0.5\n",
		"few.csv":     "x [um],XAn [mole fraction]\n1,0.5\n2,0.5\n",
		"moles.csv":   "x [um],Fo [mol%],An [wt%],BSE\n1,88,50,120\n30,85,40,130\n",
	}
}

// wrong is a fault put into the sound study. The text that replaces old marks
// with @ the place where the problem must be reported; without a mark it is
// expected elsewhere, at the place given.
type wrong struct {
	name, old, new  string
	at              string // "file:line:col" where the text has no mark
	field           string
	problem, remedy string // words of it
}

func TestWrongStudies(t *testing.T) {
	list := wrongStudies()
	if len(list) < 40 {
		t.Fatalf("only %d wrong studies", len(list))
	}
	for _, w := range list {
		t.Run(w.name, func(t *testing.T) { w.check(t) })
	}
}

func (w wrong) check(t *testing.T) {
	if strings.Count(sound, w.old) != 1 {
		t.Fatalf("%q is in the sound study %d times, want once", w.old, strings.Count(sound, w.old))
	}
	marked := strings.Replace(sound, w.old, w.new, 1)
	text := strings.Replace(marked, "@", "", 1)
	at := w.at
	if before, _, ok := strings.Cut(marked, "@"); ok {
		line := before[strings.LastIndexByte(before, '\n')+1:]
		at = fmt.Sprintf("s.toml:%d:%d", 1+strings.Count(before, "\n"), 1+len([]rune(line)))
	}
	s, err := parse("s.toml", []byte(text), memory(soundFiles()))
	got := problems(t, err)
	if len(got) == 0 || s != nil {
		t.Fatalf("read without a problem, want one at %s", at)
	}
	if len(got) > 1 {
		t.Errorf("%d problems, want one fault to give one:\n%v", len(got), err)
	}
	e := got[0]
	if place := fmt.Sprintf("%s:%d:%d", e.File, e.Line, e.Col); place != at {
		t.Errorf("reported at %s, want %s", place, at)
	}
	if e.Field != w.field {
		t.Errorf("field %q, want %q", e.Field, w.field)
	}
	if !strings.Contains(e.Problem, w.problem) || !strings.Contains(e.Remedy, w.remedy) {
		t.Errorf("message %q, want the words %q and %q", e, w.problem, w.remedy)
	}
	t.Log(e)
}

func TestSoundStudy(t *testing.T) {
	s, err := parse("s.toml", []byte(sound), memory(soundFiles()))
	if err != nil {
		t.Fatal(err)
	}
	if len(s.Paths) != 1 || len(s.Crystals) != 1 || s.Crystals[0].Elements[0].Traverse == nil {
		t.Errorf("read %+v", s)
	}
}

func wrongStudies() []wrong {
	return append(wrongLimits(), append(append(wrongText(), wrongPaths()...), append(wrongCrystals(), wrongElements()...)...)...)
}

func wrongText() []wrong {
	const title = `title = "sound"`
	return []wrong{
		{"unknown key", title, `@titel = "sound"`, "", "titel", "unknown key", `did you mean "title"?`},
		{"unknown key, none near", title, `@colour = 3`, "", "colour", "unknown key", "known here: title, confidence"},
		{"unknown table", "[[threshold]]", "[[@treshold]]", "", "treshold", "unknown key", `did you mean "threshold"?`},
		{"braces in a path", `hold = "750 C"`, `hold = @"{store}"`, "", "path.legs.hold", "nothing fills them here", "[[family]]"},
		{"braces in a threshold", `temperature = "750 C"`, `temperature = @"{hot} + 3 K"`, "", "threshold.temperature", "nothing fills them here", "[[family]]"},
		{"one family", title, "family = @{ name = \"cooler\" }", "", "family", "a table, not a list", `begin each family with "[[family]]"`},
		{"quoted key", title, `@"two words" = 1`, "", `"two words"`, "unknown key", "known here"},
		{"title not a text", title, "title = @12", "", "title", "a number, not a text", "one line"},
		{"title of two lines", title, `title = @"one\ntwo"`, "", "title", "one line of plain text", ""},
		{"title without end", title, "title = @'" + strings.Repeat("long ", 50) + "more'", "", "title", "more than 200 characters", "shorter"},
		{"title with space around", title, `title = @" sound"`, "", "title", "spaces around", ""},
		{"title empty", title, `title = @" "`, "", "title", "empty", "title"},
		{"key without value", title, "title = @\n", "", "", "not TOML", ""},
		{"quantity without quotes", `temperature = "750 C"`, "temperature = 750 @C", "", "", "not TOML", `in quotes: "800 yr"`},
		{"text not closed", title, `title = "sound@`, "", "", "not TOML", ""},
		{"key twice", title, title + "\n@title = \"again\"", "", "title", "given twice, first on line 1", "keep one"},
		{"table twice", "[[threshold]]", "[other]\n[@other]\n[[threshold]]", "", "other", "given twice, first on line 4", "keep one"},
		{"list closed", title, "law = []\n" + title, "s.toml:9:3", "law", "given twice, first on line 1", "keep one"},
		{"dotted into closed", title, "law = {}\n@law.name = 1", "", "law", "given twice", "keep one"},
		{"not a number", `"4 %"`, `{ column = "2se [ppm]", sigmas = @nan }`, "", "crystal.element.traverse.error.sigmas", "not finite", "sigmas = 1"},
		{"confidence bare", `"95 %"`, "@95", "", "confidence", "without a unit", `"95 %"`},
		{"confidence of all", `"95 %"`, `@"100 %"`, "", "confidence", "not a confidence", "below 100"},
		{"confidence in wt%", `"95 %"`, `@"95 wt%"`, "", "confidence", "not a confidence", "below 100"},
		{"threshold without temperature", `temperature = "750 C"`, "", "s.toml:4:3", "threshold.temperature", "missing", `"750 C"`},
		{"single brackets", "[[threshold]]", "[@threshold]", "", "threshold", "a table, not a list", `"[[threshold]]"`},
	}
}

// wrongLimits are faults in a table of limits that is put before the paths.
func wrongLimits() []wrong {
	const old = "[[path]]\n"
	with := func(name, text, at, field, problem, remedy string) wrong {
		return wrong{name, old, "[limits]\n" + text + "\n" + old, at, field, problem, remedy}
	}
	return []wrong{
		with("limits of nothing", "", "s.toml:13:2", "limits", "no limit", "life, lowest"),
		{"limits twice", old, "[[@limits]]\nlowest = \"1 C\"\n" + old, "", "limits", "a list, not a table", "[limits]"},
		with("limit unknown", `@highst = "900 C"`, "", "limits.highst", "unknown key", `did you mean "highest"?`),
		with("life bare", `life = @"1 kyr"`, "", "limits.life", "a text, not a table", "longest"),
		with("life of no limit", `life = @{}`, "", "limits.life", "neither shortest nor longest", "longest"),
		with("life inside out", `life = { shortest = "2 kyr", longest = @"1 kyr" }`, "", "limits.life.longest", "less than the shortest, 2 kyr", "exchange"),
		with("life of nothing", `life = { longest = @"0 yr" }`, "", "limits.life.longest", "zero", "12 kyr"),
		with("lowest bare", `lowest = @600`, "", "limits.lowest", "without a unit", "750 C"),
		with("highest a time", `highest = @"3 yr"`, "", "limits.highest", "is a duration", "C, F or K"),
		with("above nothing", `above = [ @{ longest = "3 yr" } ]`, "", "limits.above", "neither threshold nor temperature", "820 C"),
		with("above twice", `above = [ { threshold = "lock-up", temperature = @"3 C", longest = "3 yr" } ]`, "", "limits.above.temperature", "a threshold is given as well", "keep one"),
		with("above an unknown threshold", `above = [ { threshold = @"lockup", longest = "3 yr" } ]`, "", "limits.above.threshold", "no threshold has this name", `did you mean "lock-up"?`),
		with("above without a time", `above = [ @{ threshold = "lock-up" } ]`, "", "limits.above", "neither shortest nor longest", "longest"),
		with("above, counting oddly", `above = [ { threshold = "lock-up", longest = "3 yr", counts = @"without break" } ]`, "", "limits.above.counts", "no way to count", `did you mean "without a break"?`),
		with("limits without end", "between = @["+strings.Repeat("{},", maxZones+1)+"]", "", "limits.between", "more than 500 limits", "fewer"),
		with("between one moment", `between = [ @{ from = "start", longest = "3 yr" } ]`, "", "limits.between.to", "missing", "start of wake 2"),
		with("between a duration", `between = [ { from = "start", to = @"3 yr", longest = "3 yr" } ]`, "", "limits.between.to", "a duration, not a moment", "after start"),
		with("between an added zone", `between = [ { from = "start", to = @"skin added", longest = "3 yr" } ]`, "", "limits.between.to", "counts from a zone", "another moment"),
		with("between legs of different paths", `between = [ @{ from = "end of store", to = "end of rest", longest = "3 yr" } ]`+"\n[[path]]\nname = \"cold\"\nlegs = [ { name = \"rest\", hold = \"600 C\", for = \"9 yr\" } ]",
			"", "limits.between", `no path has the legs of both "end of store" and "end of rest"`, "names of the legs"),
		with("between, of no path", `between = [ @{ from = "start", to = "end of wake 9", longest = "3 yr" } ]`, "", "limits.between", `no leg "wake 9" (path "warm")`, "nearest"),
	}
}

func wrongPaths() []wrong {
	const store, wake = `{ name = "store", hold = "750 C", for = "800 yr" }`, `{ name = "wake", ramp = "780 C", for = "5 yr" }`
	const legs = "[\n  " + store + ",\n  " + wake + ",\n]"
	return []wrong{
		{"no path", "[[path]]\nname = \"warm\"\nlegs = " + legs, "", "s.toml:1:1", "path", "missing", "[[path]]"},
		{"no legs", "legs = " + legs, "", "s.toml:13:3", "path.legs", "missing", "legs = ["},
		{"empty legs", legs, "@[]", "", "path.legs", "an empty list", "legs = ["},
		{"leg not a table", store, `@"750 C"`, "", "path.legs", "a text, not a table", "legs = ["},
		{"path without name", "name = \"warm\"\n", "", "s.toml:13:3", "path.name", "missing", "kept warm"},
		{"two paths of one name", "[[crystal]]", "[[path]]\nname = @\"warm\"\nlegs = [" + store + "]\n[[crystal]]", "", "path.name", "used twice, first on line 14", "its own"},
		{"temperature bare", `hold = "750 C"`, `hold = @750`, "", "path.legs.hold", "without a unit", `in quotes with its unit, such as "750 C"`},
		{"temperature without unit", `hold = "750 C"`, `hold = @"750"`, "", "path.legs.hold", "has no unit", "750 C"},
		{"unknown unit", `hold = "750 C"`, `hold = @"750 Q"`, "", "path.legs.hold", "unknown unit", "C, F or K"},
		{"unit of something else", `for = "800 yr"`, `for = @"800 um"`, "", "path.legs.for", "is a length", "kyr"},
		{"below absolute zero", `hold = "750 C"`, `hold = @"-300 C"`, "", "path.legs.hold", "not above absolute zero", "-273.15"},
		{"absolute zero", `hold = "750 C"`, `hold = @"0 K"`, "", "path.legs.hold", "absolute zero", ""},
		{"hotter than any rock", `hold = "750 C"`, `hold = @"75000 C"`, "", "path.legs.hold", "more than", "check the unit"},
		{"negative time", `for = "800 yr"`, `for = @"-800 yr"`, "", "path.legs.for", "below zero", "12 kyr"},
		{"no time", `for = "800 yr"`, `for = @"0 yr"`, "", "path.legs.for", "zero", "12 kyr"},
		{"longer than the universe", `for = "800 yr"`, `for = @"1e9 Myr"`, "", "path.legs.for", "more than", "check the unit"},
		{"infinite time", `for = "800 yr"`, `for = @"inf yr"`, "", "path.legs.for", "not a finite number", "12 yr"},
		{"time of NaN", `for = "800 yr"`, `for = @"nan yr"`, "", "path.legs.for", "not a finite number", "12 yr"},
		{"bare infinity", `for = "800 yr"`, `for = @inf`, "", "path.legs.for", "not finite", ""},
		{"a date", `for = "800 yr"`, `for = @2020-01-01`, "", "path.legs.for", "a date, not a text", "12 kyr"},
		{"leg of two kinds", store, `@{ hold = "750 C", ramp = "780 C", for = "1 yr" }`, "", "path.legs", "hold and ramp in one leg", "two legs"},
		{"leg of no kind", store, `@{ name = "store", for = "1 yr" }`, "", "path.legs", "a leg of no kind", "hold, ramp, relax"},
		{"mistyped kind", store, `{ @hodl = "750 C", for = "1 yr" }`, "", "path.legs.hodl", "unknown key", `did you mean "hold"?`},
		{"key of another kind", store, `{ hold = "750 C", @efold = "1 yr", for = "1 yr" }`, "", "path.legs.efold", "unknown key", "known here: hold, for, name"},
		{"hold without time", store, `@{ hold = "750 C" }`, "", "path.legs.for", "missing", "a hold leg needs hold, for"},
		{"reheat that ends before it relaxes", wake, `{ reheat = "780 C", rise = "2 yr", dwell = "20 yr", efold = "3 yr", for = @"15 yr" }`, "", "path.legs.for", "shorter than rise and dwell together, 22 yr", "for counts the whole reheat"},
		{"leg named path", wake, `{ name = @"path", ramp = "780 C", for = "5 yr" }`, "", "path.legs.name", "is that of the whole path", "wake 1"},
		{"key of no repeat", store, `{ repeat = 3, @times = 3, legs = [` + store + `] }`, "", "path.legs.times", "unknown key", "known here: repeat, legs, name"},
		{"relax without e-fold time", store, `@{ from = "700 C", relax = "750 C", for = "1 yr" }`, "", "path.legs.efold", "missing", "a relax leg needs"},
		{"first ramp without from", store, `@{ ramp = "750 C", for = "1 yr" }`, "", "path.legs", "nothing before this ramp says where it begins", "write from ="},
		{"repeat a fraction", store, `{ repeat = @1.5, legs = [` + store + `] }`, "", "path.legs.repeat", "whole number", "repeat = 3"},
		{"repeat never", store, `{ repeat = @0, legs = [` + store + `] }`, "", "path.legs.repeat", "at least 1", "repeat = 3"},
		{"a thousand million repeats", store, `{ repeat = @1_000_000_000, legs = [` + store + `] }`, "", "path.legs.repeat", "at most 100000 legs", "fewer"},
		{"repeats of repeats", store, `@{ repeat = 90000, legs = [ { repeat = 90000, legs = [` + store + `] } ] }`, "", "path.legs", "path of 8.1e+09 legs", "at most 100000"},
		{"repeat without legs", store, `@{ repeat = 3 }`, "", "path.legs.legs", "missing", "a repeat leg needs"},
		{"two legs of one name", wake, `{ name = "store", ramp = "780 C", for = "5 yr" }`, "s.toml:17:3", "path.legs", "second leg of this name", "differ"},
		{"table that is missing", store, `{ table = @"none.csv", time = "t [yr]", temperature = "T [C]" }`, "", "path.legs.table", "no such file", ""},
		{"table without column", store, `{ table = "warming.csv", time = "time [yr]", temperature = "T [C]" }`, "warming.csv:1:1", "column", "not in the header", "t [yr]"},
		{"table too hot", store, `{ table = "hot.csv", time = "t [yr]", temperature = "T [C]" }`, "hot.csv:3:0", "T [C]", "no temperature of a rock", "check the unit"},
		{"table that turns back", store, `{ table = "turn.csv", time = "t [yr]", temperature = "T [C]" }`, "turn.csv:5:0", "t [yr]", "earlier than", "ascend"},
		{"table of one row", store, `{ table = "one.csv", time = "t [yr]", temperature = "T [C]" }`, "one.csv:0:0", "t [yr]", "1 rows in a table", "at least 2"},
		{"table that counts oddly", store, `{ table = "warming.csv", time = "t [yr]", temperature = "T [C]", counts = @"before eruptoin" }`, "", "path.legs.counts", "no way to count", `did you mean "before eruption"?`},
		{"eruption a duration", "legs = " + legs, "eruption = @\"3 yr\"\nlegs = " + legs, "", "path.eruption", "moment", "after start"},
		{"eruption a duration, not counted from itself", "legs = " + legs, "eruption = @\"1200 yr\"\nlegs = " + legs, "", "path.eruption", "is a duration, not a moment", `write "1200 yr after start"`},
		{"eruption of no leg", "legs = " + legs, "eruption = @\"end of wake 9\"\nlegs = " + legs, "", "path.eruption", "no leg \"wake 9\"", "nearest"},
		{"eruption before eruption", "legs = " + legs, "eruption = @\"3 yr before eruption\"\nlegs = " + legs, "", "path.eruption", "counts from the eruption itself", "after start"},
		{"eruption after the end", "legs = " + legs, "eruption = @\"3 Myr after start\"\nlegs = " + legs, "", "path.eruption", "after the end of the path", "within"},
		{"name not a text", `name = "warm"`, "name = @true", "", "path.name", "true or false, not a text", "kept warm"},
	}
}

func wrongCrystals() []wrong {
	const core, skin = `{ name = "core", width = "100 um" }`, `{ name = "skin", width = "20 um" }`
	const element = "[[crystal.element]]"
	return []wrong{
		{"no shape", "shape = \"slab\"\n", "", "s.toml:20:3", "crystal.shape", "missing", `"cylinder"`},
		{"unknown shape", `"slab"`, `@"slap"`, "", "crystal.shape", "no shape", `did you mean "slab"?`},
		{"sphere", `"slab"`, `@"sphere"`, "", "crystal.shape", "no shape", `"ball"`},
		{"no mineral", "mineral = \"quartz\"\n", "", "s.toml:20:3", "crystal.mineral", "missing", "quartz"},
		{"no element", sound[strings.Index(sound, element):], "", "s.toml:20:3", "crystal.element", "missing", "[[crystal.element]]"},
		{"two crystals of one name", "[[crystal]]", "[[crystal]]\nname = \"Q1\"\nmineral = \"quartz\"\nshape = \"slab\"\nzones = [" + core + "]\n[[crystal.element]]\nname = \"Ti\"\nlaw = \"mine\"\nstart = { zones = [\"1 ppm\"] }\n[[crystal]]", "s.toml:30:8", "crystal.name", "used twice, first on line 21", "its own"},
		{"zone without width", core, `@{ name = "core" }`, "", "crystal.zones.width", "missing", "140 um"},
		{"zone of negative width", `"100 um"`, `@"-1 m"`, "", "crystal.zones.width", "below zero", "140 um"},
		{"zone of no width", `"100 um"`, `@"0 um"`, "", "crystal.zones.width", "zero", "140 um"},
		{"zone thinner than an atom", `"100 um"`, `@"1e-6 um"`, "", "crystal.zones.width", "thinner than an atom", "check the unit"},
		{"zone of a kilometre", `"100 um"`, `@"1000 m"`, "", "crystal.zones.width", "more than 1 m", "check the unit"},
		{"zones without end", "[\n  " + core, "@[\n  " + strings.Repeat("{},", maxZones) + core, "", "crystal.zones", "more than 500 zones", "fewer"},
		{"zone like a number", `"skin", width`, `@"2nd", width`, "", "crystal.zones.name", "begin like a number", "zone 2nd"},
		{"zone named free", `{ name = "core"`, `{ name = @"free"`, "", "crystal.zones.name", "meaning of its own", "core"},
		{"two zones of one name", `{ name = "core"`, `{ name = "skin"`, "s.toml:26:12", "crystal.zones.name", "used twice, first on line 25", "its own"},
		{"zone after the path", skin, `{ name = "skin", width = "20 um", added = @"1 kyr after start" }`, "", "crystal.zones.added", "the path ends before zone skin", "moment earlier"},
		{"zone after a leg that is none", skin, `{ name = "skin", width = "20 um", added = @"end of wake 9" }`, "", "crystal.zones.added", "has no leg", "nearest"},
		{"zone after another that is none", skin, `{ name = "skin", width = "20 um", added = @"cor added" }`, "", "crystal.zones.added", "no zone", `"core added"`},
		{"zone that was there", core, `{ name = "core", width = "140 um", added = @"1 yr after start" }`, "", "crystal.zones.added", "the first zone", "exists_from"},
		{"zone that does not diffuse", core, `{ name = "core", width = "100 um", times = @0 }`, "", "crystal.zones.times", "above zero", "times = 0.1"},
		{"zones not a list", "zones = [\n  " + core + ",\n  " + skin + ",\n]", "zones = @\"core\"", "", "crystal.zones", "a text, not a list", "zones = ["},
		{"inner value at the centre", `shape = "slab"`, "shape = \"ball\"\ninner = { rim = @{ held = \"core\" } }", "", "crystal.inner.rim", "sealed by symmetry", "inner radius"},
		{"inner key", `shape = "slab"`, "shape = \"ball\"\ninner = { @radus = \"1 um\" }", "", "crystal.inner.radus", "unknown key", `did you mean "radius"?`},
	}
}

func wrongElements() []wrong {
	const law, start, rim = `"quartz-ti-cherniak2007"`, `{ zones = ["free", "58 ppm"], edge = "0 um" }`, `{ held = "skin" }`
	const traverse = `{ file = "q1.csv", position = "x [um]", zero = "rim", value = "Ti [ppm]", error = "4 %", spot = "1 um fwhm" }`
	return append([]wrong{
		{"elements without end", "[[crystal.element]]", strings.Repeat("[[crystal.element]]\n", 101) + "[[crystal.element]]", "s.toml:20:3", "crystal", "more than 100 crystals or elements", "split"},
		{"edges open in two ways", start, `[ { zones = ["free", "58 ppm"], edge = "free 0..2 um" }, { zones = ["free", "58 ppm"], edge = "1 +- 0.2 um" } ]`,
			"s.toml:29:11", "crystal.element", "Ti and Ti leave the width of the edges open", "state it alike"},
		{"two elements of one name", "[[crystal.element]]", "[[crystal.element]]\nname = \"Ti\"\nlaw = \"mine\"\nstart = { zones = [\"1 ppm\", \"2 ppm\"] }\n[[crystal.element]]", "s.toml:34:8", "crystal.element.name", "used twice, first on line 30", "its own"},
		{"unknown law", law, `@"quartz-ti-cherniak2008"`, "", "crystal.element.law", "not in the catalogue", "quartz-ti-cherniak2007"},
		{"law of the study mistyped", law, `@"mime"`, "", "crystal.element.law", "neither in the catalogue nor", `did you mean "mine"?`},
		{"law that needs conditions", law, `@"olivine-femg-dohmen2007-tamed"`, "", "crystal.element.law", "depends on",
			`run bankfire laws olivine-femg-dohmen2007-tamed --pressure "2 kbar" --fO2 "1e-7 Pa" --XFe 0.1 with your values`},
		{"law without E", law, `@{ D0 = "1e-9 m2/s" }`, "", "crystal.element.law.E", "missing", "273 kJ/mol"},
		{"law in the wrong unit", law, `{ D0 = @"1e-9 m", E = "250 kJ/mol" }`, "", "crystal.element.law.D0", "is a length", "m2/s"},
		{"law named like a published one", `name = "mine"`, `name = @` + law, "", "law.name", "of the catalogue", "another name"},
		{"law with half a range", `E = "273 kJ/mol"`, `E = "273 kJ/mol"` + "\nrange = @\"900 C\"", "", "law.range", "is no range", `"700..1000 C"`},
		{"law with an empty range", `E = "273 kJ/mol"`, `E = "273 kJ/mol"` + "\nrange = @\"900..800 C\"", "", "law.range", "does not run upwards", "smaller end first"},
		{"own, its values free", law, `{ D0 = "1e-9 m2/s", E = "250 kJ/mol", own = { ln_slope = 3, at = 0 } }`, "s.toml:32:9", "crystal.element.start", "must be known exactly: core", `without "free"`},
		{"own, a rim with an error", law + "\nstart = " + start + "\nrim = " + rim, `{ D0 = "1e-9 m2/s", E = "250 kJ/mol", own = { ln_slope = 0.1 } }` +
			"\nstart = { zones = [\"9 ppm\", \"8 ppm\"], edge = \"0 um\" }\nrim = @{ held = \"9 +- 1 ppm\" }", "", "crystal.element.rim", "must be known exactly", `"90 ppm"`},
		{"own without a slope", law, `{ D0 = "1e-9 m2/s", E = "250 kJ/mol", own = @{ at = 0 } }`, "", "crystal.element.law.own.ln_slope", "missing", "ln_slope = 3"},
		{"own a number", law, `{ D0 = "1e-9 m2/s", E = "250 kJ/mol", own = @3 }`, "", "crystal.element.law.own", "a number, not a table", "ln_slope = 3"},
		{"own in quotes", law, `{ D0 = "1e-9 m2/s", E = "250 kJ/mol", own = { ln_slope = @"3 +-" } }`, "", "crystal.element.law.own.ln_slope", "not a plain number", "10 +- 3"},
		{"own at less than nothing", `E = "273 kJ/mol"`, `E = "273 kJ/mol"` + "\nown = { ln_slope = 3, at = @-1 }", "", "law.own.at", "below zero", "zero or more"},
		{"own mistyped", `E = "273 kJ/mol"`, `E = "273 kJ/mol"` + "\nown = { @lnslope = 3, ln_slope = 3 }", "", "law.own.lnslope", "unknown key", `did you mean "ln_slope"?`},
		{"own too steep", law + "\nstart = " + start, `@{ D0 = "1e-9 m2/s", E = "250 kJ/mol", own = { ln_slope = -3 } }` +
			"\nstart = { zones = [\"9 ppm\", \"58 ppm\"], edge = \"0 um\" }", "", "crystal.element.law", "from 9 to 58 ppm, changes D by a factor of e^174", "C is in ppm"},
		{"too few values", start, `{ zones = @["58 ppm"], edge = "0 um" }`, "", "crystal.element.start.zones", "1 value for 2 zones", "core, skin"},
		{"value without a unit", `"58 ppm"]`, "@58]", "", "crystal.element.start.zones", "without a unit", `"58 ppm"`},
		{"value of no kind", `"58 ppm"]`, `@"plenty"]`, "", "crystal.element.start.zones", "neither a value nor free", `"58 +- 1.5 ppm" or "free"`},
		{"free mistyped", `"58 ppm"]`, `@"fre"]`, "", "crystal.element.start.zones", "neither a value nor free", `did you mean "free"?`},
		{"value below zero", `"58 ppm"]`, `@"-58 ppm"]`, "", "crystal.element.start.zones", "below zero", "zero or more"},
		{"value of more than all", `"58 ppm"]`, `@"580 wt%"]`, "", "crystal.element.start.zones", "more than all there is", "check the unit"},
		{"units that do not agree", `"58 ppm"]`, `@"0.3 mole fraction"]`, "", "crystal.element.start.zones", "in mole fraction, but line 34 has ppm", "one unit"},
		{"one alternative", start, `@[ ` + start + ` ]`, "", "crystal.element.start", "one start is no choice", "without the brackets"},
		{"no alternative", start, `@[ ]`, "", "crystal.element.start", "an empty list", `name = "melt A"`},
		{"alternatives of one name", start, `[ { name = "a", zones = ["free", "58 ppm"] }, { name = @"a", zones = ["free", "60 ppm"] } ]`, "", "crystal.element.start.name", "used twice", ""},
		{"too many alternatives", start, `@[ ` + strings.Repeat(start+", ", 21) + ` ]`, "", "crystal.element.start", "more than 20 alternatives", "fewer"},
		{"start in melt, no temperature", start, `@{ melt = ["90 ppm", "80 ppm"], edge = "0 um" }`, "", "crystal.element.start.temperature", "missing", "790 +- 10 C"},
		{"start in melt without a relation", start, `{ melt = @["90 ppm", "80 ppm"], temperature = ["760 C", "790 C"], edge = "0 um" }`, "", "crystal.element.start.melt", "needs the partition relation", "sr-blundy1991"},
		{"start in one melt", start, `{ melt = @["90 ppm"], temperature = ["760 C", "790 C"] }`, "", "crystal.element.start.melt", "1 value for 2 zones", "core, skin"},
		{"start in two ways", start, `{ zones = ["90 ppm", "80 ppm"], melt = @["90 ppm", "80 ppm"], temperature = ["760 C", "790 C"] }`, "", "crystal.element.start.melt", "in another way as well", "keep one of zones, melt, solubility"},
		{"zones at a temperature", start, `{ zones = ["90 ppm", "80 ppm"], temperature = @["760 C", "790 C"] }`, "", "crystal.element.start.temperature", "goes with a melt or a solubility", "leave it out"},
		{"edge free, not said where", `edge = "0 um"`, `edge = @"free"`, "", "crystal.element.start.edge", "not between which ends", "free 0..2 um"},
		{"edge free from below zero", `edge = "0 um"`, `edge = @"free -1..2 um"`, "", "crystal.element.start.edge", "below zero", "free 0..2 um"},
		{"negative edge", `edge = "0 um"`, `edge = @"-1 um"`, "", "crystal.element.start.edge", "below zero", ""},
		{"rim at no zone", rim, `{ held = @"skim" }`, "", "crystal.element.rim.held", "no zone has this name", `did you mean "skin"?`},
		{"rim of no kind", rim, `@{ unit = "ppm" }`, "", "crystal.element.rim", "neither what it is held at, nor that it is given, sealed, follows a relation or exchanges by transfer", `{ held = "skin" }`},
		{"rim mistyped", rim, `{ @hled = "skin" }`, "", "crystal.element.rim.hled", "unknown key", `did you mean "held"?`},
		{"rim not sealed", rim, `{ sealed = @false }`, "", "crystal.element.rim.sealed", "held or given", "rim ="},
		{"rim from before", rim, `[{ held = "skin", from = @"1 yr after start" }]`, "", "crystal.element.rim.from", "from the start", "leave from out"},
		{"second rim without from", rim, `[{ held = "skin" }, @{ held = "90 ppm" }]`, "", "crystal.element.rim.from", "missing", "3 yr before eruption"},
		{"rim from a duration", rim, `[{ held = "skin" }, { sealed = true, from = @"3 yr" }]`, "", "crystal.element.rim.from", "a duration, not a moment", "after start"},
		{"rim from a leg that is not there", rim, `[{ held = "skin" }, { sealed = true, from = @"end of wake 7" }]`, "", "crystal.element.rim.from", "wake 7", "nearest"},
		{"rims out of order", rim, `["sealed", { held = "9 ppm", from = "9 yr after start" }, { sealed = true, from = @"2 yr after start" }]`, "", "crystal.element.rim.from", "does not come after", "order of time"},
		{"rim from an added zone", rim, `[{ held = "skin" }, { sealed = true, from = @"skin added" }]`, "", "crystal.element.rim.from", "does not come after", "order of time"},
		{"rim in another unit", rim, `{ held = @"0.2 mole fraction" }`, "", "crystal.element.rim.held", "in mole fraction, but line 34 has ppm", "one unit"},
		{"transfer without k", rim, `@{ transfer = "60 ppm" }`, "", "crystal.element.rim.k", "missing", `{ k0 = "1e-3 m/s"`},
		{"transfer with a bare k", rim, `{ transfer = "60 ppm", k = @"1 um/yr" }`, "", "crystal.element.rim.k", "a text, not a table", `{ k0 = "1e-3 m/s"`},
		{"transfer without k0", rim, `{ transfer = "60 ppm", k = @{ E = "200 kJ/mol" } }`, "", "crystal.element.rim.k.k0", "missing", `{ k0 = "1e-3 m/s"`},
		{"transfer at no rate", rim, `{ transfer = "60 ppm", k = { k0 = @"0 m/s" } }`, "", "crystal.element.rim.k.k0", "zero", "1e-3 m/s"},
		{"transfer at a diffusivity", rim, `{ transfer = "60 ppm", k = { k0 = @"1e-9 m2/s" } }`, "", "crystal.element.rim.k.k0", "is a diffusivity", "m/s"},
		{"transfer, key of its rate", rim, `{ transfer = "60 ppm", k = { k0 = "1 um/yr", @Ea = "1 kJ/mol" } }`, "", "crystal.element.rim.k.Ea", "unknown key", `did you mean "E"?`},
		{"transfer of a value with no error", rim, `{ transfer = @"60 +- ppm", k = { k0 = "1 um/yr" } }`, "", "crystal.element.rim.transfer", "lacks a number", "both sides"},
		{"own, a transfer of a free value", law + "\nstart = " + start + "\nrim = " + rim, `{ D0 = "1e-9 m2/s", E = "250 kJ/mol", own = { ln_slope = 0.1 } }` +
			"\nstart = { zones = [\"9 ppm\", \"8 ppm\"], edge = \"0 um\" }\nrim = @{ transfer = \"free\", k = { k0 = \"1 um/yr\" } }", "", "crystal.element.rim", "must be known exactly", `"90 ppm"`},
		{"transfer with a zone", rim, `{ transfer = @"skin", k = { k0 = "1 um/yr" } }`, "", "crystal.element.rim.transfer", "neither a value nor free", ""},
		{"rim that follows nothing known", rim, `{ following = @"sr-blundy1990", melt = "90 ppm" }`, "", "crystal.element.rim.following", "no partition relation", "sr-blundy1991"},
		{"rim that follows no melt", rim, `@{ following = "sr-blundy1991" }`, "", "crystal.element.rim.melt", "missing", `melt = "90 ppm"`},
		{"rim that follows without a host", rim, `@{ following = "sr-blundy1991", melt = "90 ppm" }`, "", "crystal.element.rim", "needs the host's composition", "host = 0.55"},
		{"rims of none", rim, "@[]", "", "crystal.element.rim", "an empty list", "rim ="},
		{"rim a number", rim, "@90", "", "crystal.element.rim", "a number, not a table", "rim ="},
		{"sealed later", rim, `[{ held = "skin" }, @"sealed"]`, "", "crystal.element.rim", "from when it holds", "sealed = true, from"},
		{"rims without end", rim, "@[" + strings.Repeat(`"sealed",`, maxZones+1) + "]", "", "crystal.element.rim", "more than 500 rims", "fewer"},
		{"given value without unit", rim, `{ given = "bare.csv", time = "t [yr]", value = "Ti" }`, "bare.csv:1:8", "column", "no unit", "Ti [ppm]"},
		{"given in another unit", rim, `{ given = @"mole.csv", time = "t [yr]", value = "Ti [mole fraction]" }`, "", "crystal.element.rim.given", "in mole fraction, but line 34 has ppm", "one unit"},
		{"law by direction, no axis b", law, `@{ a = "mine", c = "mine", normal = ["90 deg", "90 deg", "0 deg"] }`, "", "crystal.element.law.b", "missing", "along each axis"},
		{"law by direction, no normal", law, `@{ a = "mine", b = "mine", c = "mine" }`, "", "crystal.element.law.normal", "missing", `["90 deg", "90 deg", "0 deg"]`},
		{"law by direction, two angles", law, `{ a = "mine", b = "mine", c = "mine", normal = @["90 deg", "0 deg"] }`, "", "crystal.element.law.normal", "2 angles, not 3", `["90 deg", "90 deg", "0 deg"]`},
		{"law by direction, bare angles", law, `{ a = "mine", b = "mine", c = "mine", normal = [@90, 90, 0] }`, "", "crystal.element.law.normal", "without a unit", "90 deg"},
		{"law by direction, squares", law, `{ a = "mine", b = "mine", c = "mine", normal = @["45 deg", "45 deg", "80 deg"] }`, "", "crystal.element.law.normal", "add up to 1.03, not 1", `["90 deg", "90 deg", "0 deg"]`},
		{"law by direction, unknown", law, `{ a = @"mime", b = "mine", c = "mine", normal = ["90 deg", "90 deg", "0 deg"] }`, "", "crystal.element.law.a", "neither in the catalogue nor", `did you mean "mine"?`},
		{"law by direction, constants", law, `{ a = @{ D0 = "1e-9 m2/s" }, b = "mine", c = "mine", normal = ["90 deg", "90 deg", "0 deg"] }`, "", "crystal.element.law.a", "a table, not a text", "name of a [[law]]"},
		{"law by direction with a constant", law, `{ a = "mine", b = "mine", c = "mine", normal = ["90 deg", "90 deg", "0 deg"], @D0 = "1e-9 m2/s" }`, "", "crystal.element.law.D0", "unknown key", "known here: a, b, c, ratio, normal"},
		{"law by direction, ratio and two axes", law, `{ a = "mine", c = "mine", ratio = @6, normal = ["90 deg", "90 deg", "0 deg"] }`, "", "crystal.element.law.ratio", "laws along 2 axes, and a ratio", "the law along one axis"},
		{"law by direction, ratio and no axis", law, `{ ratio = @6, normal = ["90 deg", "90 deg", "0 deg"] }`, "", "crystal.element.law.ratio", "a ratio, and no law along any axis", "the law along one axis"},
		{"law by direction, ratio of nothing", law, `{ c = "mine", ratio = @0, normal = ["90 deg", "90 deg", "0 deg"] }`, "", "crystal.element.law.ratio", "not a usable number above zero", "ratio = 6"},
		{"law by direction, ratio a text", law, `{ c = "mine", ratio = @"6", normal = ["90 deg", "90 deg", "0 deg"] }`, "", "crystal.element.law.ratio", "a text, not a number", "ratio = 6"},
		{"law by direction, ratio and no normal", law, `@{ c = "mine", ratio = 6 }`, "", "crystal.element.law.normal", "missing", "normal ="},
		{"factor of nothing", law, `{ like = "mine", times = @0 }`, "", "crystal.element.law.times", "not a usable factor above zero", `times = "10 +- 3"`},
		{"factor of nothing, a text", law, `{ like = "mine", times = @"0" }`, "", "crystal.element.law.times", "not a usable factor above zero", `times = "10 +- 3"`},
		{"factor below zero", law, `{ D0 = "1e-9 m2/s", E = "250 kJ/mol", times = @"-3 +- 1" }`, "", "crystal.element.law.times", "not a usable factor above zero", `times = "10 +- 3"`},
		{"factor with a unit", law, `{ like = "mine", times = @"10 +- 3 ppm" }`, "", "crystal.element.law.times", `has a unit or more, "ppm"`, "plain numbers"},
		{"factor in words", law, `{ like = "mine", times = @"ten" }`, "", "crystal.element.law.times", "is not a plain number", `"10 +- 3"`},
		{"factor of a wild error", law, `{ like = "mine", times = @"10 +- 6" }`, "", "crystal.element.law.times", "more than half of it", "sigma"},
		{"factor a list", law, `{ like = "mine", times = @[10] }`, "", "crystal.element.law.times", "a list, not a text", `times = "10 +- 3"`},
		{"factor missing", law, `@{ like = "mine" }`, "", "crystal.element.law.times", "missing", `times = "10 +- 3"`},
		{"factor on an unknown law", law, `{ like = @"mime", times = 3 }`, "", "crystal.element.law.like", "neither in the catalogue nor", `did you mean "mine"?`},
		{"factor on constants", law, `{ like = @{ D0 = "1e-9 m2/s" }, times = 3 }`, "", "crystal.element.law.like", "a table, not a text", "name of a [[law]]"},
		{"law of its own without a name", `name = "mine"` + "\nD0", "D0", "s.toml:8:3", "law.name", "missing", "mine"},
		{"error of more than all", `"58 ppm"]`, `@"58 +- 1e9 ppm"]`, "", "crystal.element.start.zones", "its error is more than all", "check the unit"},
		{"start a text", start, `@"flat"`, "", "crystal.element.start", "a text, not a table", "start = {"},
		{"values not a list", `["free", "58 ppm"]`, `@"58 ppm"`, "", "crystal.element.start.zones", "a text, not a list", "one value a zone"},
		{"given without time", rim, `@{ given = "rise.csv", value = "Ti [ppm]" }`, "", "crystal.element.rim.time", "missing", "t [yr]"},
		{"given too short", rim, `{ given = @"short.csv", time = "t [yr]", value = "Ti [ppm]" }`, "", "crystal.element.rim.given", "holds times from 0 yr to 90 yr only", "add rows"},
		{"given backwards", rim, `{ given = "back.csv", time = "t [yr]", value = "Ti [ppm]" }`, "back.csv:4:0", "time", "before the row above", "order of time"},
		{"given below zero", rim, `{ given = "less.csv", time = "t [yr]", value = "Ti [ppm]" }`, "less.csv:3:0", "value", "below zero", "zero or more"},
		{"given jumps twice", rim, `{ given = "thrice.csv", time = "t [yr]", value = "Ti [ppm]" }`, "thrice.csv:5:0", "time", "third time", "keep two"},
		{"nothing to fit a start to", "start = " + start + "\nrim = " + rim + "\ntraverse = " + traverse, `rim = { held = "5 ppm" }`, "s.toml:29:11", "crystal.element", "all plateaux are free", "start = {"},
		{"nothing to fit a plateau to", "traverse = " + traverse, "", "s.toml:32:20", "crystal.element.start.zones", "no traverse to fit it to", "give a traverse"},
	}, wrongTraverses()...)
}

func wrongTraverses() []wrong {
	const traverse = `{ file = "q1.csv", position = "x [um]", zero = "rim", value = "Ti [ppm]", error = "4 %", spot = "1 um fwhm" }`
	const head = `file = "q1.csv", position = "x [um]", zero = "rim", value = "Ti [ppm]"`
	return []wrong{
		{"no such traverse", `"q1.csv"`, `@"no.csv"`, "", "crystal.element.traverse.file", "no such file", ""},
		{"traverse without file", `file = "q1.csv", `, "", "s.toml:34:12", "crystal.element.traverse.file", "missing", "ti.csv"},
		{"traverse a text", traverse, `@"q1.csv"`, "", "crystal.element.traverse", "a text, not a table", "traverse = {"},
		{"no such column", `"x [um]"`, `"y [um]"`, "q1.csv:1:1", "column", "not in the header", "x [um]"},
		{"a cell that is no number", `"q1.csv"`, `"bad.csv"`, "bad.csv:3:4", "Ti [ppm]", "not a number", ""},
		{"beyond the centre", `"q1.csv"`, `"wide.csv"`, "wide.csv:3:1", "x [um]", "beyond the rim", "window"},
		{"zero nowhere", `"rim"`, `@"edge"`, "", "crystal.element.traverse.zero", "no place to count from", `"rim" or "centre"`},
		{"error bare", `"4 %"`, "@4", "", "crystal.element.traverse.error", "without a unit", `"4 %"`},
		{"error of nothing", `"4 %"`, `@"0 %"`, "", "crystal.element.traverse.error", "above zero", `"4 %"`},
		{"three sigmas", `"4 %"`, `{ column = "2se [ppm]", sigmas = @3 }`, "", "crystal.element.traverse.error.sigmas", "neither 1 nor 2", "sigmas = 1"},
		{"column without sigmas", `"4 %"`, `@{ column = "2se [ppm]" }`, "", "crystal.element.traverse.error.sigmas", "missing", "sigmas = 2"},
		{"only a floor", `"4 %"`, `@{ floor = "1 ppm" }`, "", "crystal.element.traverse.error", "no errors given", "error ="},
		{"two errors", `"4 %"`, `{ column = "2se [ppm]", sigmas = 1, size = @"4 %" }`, "", "crystal.element.traverse.error.size", "a column of errors is given as well", "keep one"},
		{"spot of no kind", `"1 um fwhm"`, `@"1 um"`, "", "crystal.element.traverse.spot", "does not say what the width measures", "fwhm"},
		{"error neither", `"4 %"`, "@[4]", "", "crystal.element.traverse.error", "a list, not a text", "error ="},
		{"floor in per cent of nothing", `"4 %"`, `{ size = "4 %", floor = @"0 ppm" }`, "", "crystal.element.traverse.error.floor", "above zero", "1.5 ppm"},
		{"size with sigmas", `"4 %"`, `{ size = "4 %", sigmas = @2 }`, "", "crystal.element.traverse.error.sigmas", "goes with a column", "leave it out"},
		{"spot narrower than an atom", `"1 um fwhm"`, `@"1e-9 um fwhm"`, "", "crystal.element.traverse.spot", "narrower than an atom", "point"},
		{"spot of a kilometre", `"1 um fwhm"`, `@"2000 m fwhm"`, "", "crystal.element.traverse.spot", "wider than 1 m", "check the unit"},
		{"center", `"rim"`, `@"center"`, "", "crystal.element.traverse.zero", "spelt centre", "centre"},
		{"window backwards", `spot =`, `window = @"60..20 um", spot =`, "", "crystal.element.traverse.window", "does not run upwards", "smaller end first"},
		{"tilt backwards", `spot =`, `tilt = @"30..0 deg", spot =`, "", "crystal.element.traverse.tilt", "does not run upwards", "smaller end first"},
		{"tilt below zero", `spot =`, `tilt = @"-30 deg", spot =`, "", "crystal.element.traverse.tilt", "below zero", "0..30 deg"},
		{"tilt along the boundary", `spot =`, `tilt = @"0..90 deg", spot =`, "", "crystal.element.traverse.tilt", "more than 85 deg", "check the unit"},
		{"tilt bare", `spot =`, `tilt = @30, spot =`, "", "crystal.element.traverse.tilt", "without a unit", "20 +- 5 deg"},
		{"tilt a length", `spot =`, `tilt = @"3 um", spot =`, "", "crystal.element.traverse.tilt", "is a length", "deg"},
		{"tilt of a wild error", `spot =`, `tilt = @"20 +- 100 deg", spot =`, "", "crystal.element.traverse.tilt", "its error is more than", "check the unit"},
		{"origin free, not said where", `spot =`, `origin = @"free", spot =`, "", "crystal.element.traverse.origin", "not between which ends", "free -2..2 um"},
		{"origin out of the crystal", `spot =`, `origin = "-5 um", spot =`, "q1.csv:2:0", "position", "beyond the rim at 120 um", "sign of the origin"},
		{"origin with no room", `file = "q1.csv"`, `origin = "free -9..-5 um", file = @"q1.csv"`, "", "crystal.element.traverse.file", "no origin in its range", "sign of the range"},
		{"overlap unknown", `spot =`, `overlap = @"none", spot =`, "", "crystal.element.traverse.overlap", "no way in which errors overlap", `"independent"`},
		{"scatter stated", `spot =`, `scatter = @"2 ppm", spot =`, "", "crystal.element.traverse.scatter", "no scatter that can be stated", `"free"`},
		{"below detection undeclared", `"q1.csv"`, `"below.csv"`, "below.csv:3:4", "Ti [ppm]", "below detection, and the study does not say", `below = "skip"`},
		{"below detection, mistyped", `spot =`, `below = @"limits", spot =`, "", "crystal.element.traverse.below", "no way to take values below", `did you mean "limit"?`},
		{"half an analysis", `"4 %"`, `{ column = "2se [ppm]", analyses = @0.5 }`, "", "crystal.element.traverse.error.analyses", "not a number of analyses", "analyses = 5"},
		{"analyses of a size", `"4 %"`, `{ size = "4 %", analyses = @5 }`, "", "crystal.element.traverse.error.analyses", "goes with a column", "leave it out"},
		{"forsterite of titanium", head, `file = "moles.csv", position = "x [um]", zero = "rim", value = @"Fo", unit = "mol%"`, "", "crystal.element.traverse.value", "Fo says nothing of Ti", "named Fe or Mg"},
		{"anorthite by mass", head, `file = "moles.csv", position = "x [um]", zero = "rim", value = @"An [wt%]"`, "", "crystal.element.traverse.value", "An in wt%, but it counts moles", "[mol%]"},
		{"plateau in forsterite of titanium", `"58 ppm"]`, `@"88 Fo"]`, "", "crystal.element.start.zones", "in Fo, which says nothing of Ti", "named Fe or Mg"},
		{"grey with one value", head, `file = "moles.csv", position = "x [um]", zero = "rim", value = "BSE", unit = "grey"`, "s.toml:34:12", "crystal.element.traverse", "one stated value does not tell", "leave all free"},
		{"unit twice", `value = "Ti [ppm]"`, `value = @"Ti [ppm]", unit = "ppm"`, "", "crystal.element.traverse.value", "given here and under unit", "once"},
		{"unknown unit beside", `value = "Ti [ppm]"`, `value = "Ti", unit = @"pmp"`, "", "crystal.element.traverse.unit", "no unit of a concentration", `did you mean "ppm"?`},
	}
}
