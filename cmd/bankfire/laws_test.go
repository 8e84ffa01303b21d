package main

import (
	"bytes"
	"encoding/json"
	"errors"
	"math"
	"slices"
	"strings"
	"testing"

	"bankfire/diffusion/catalogue"
	"bankfire/thermal"
)

// laws runs the command with the flags, whose step is the default.
func laws(flags lawsFlags, keys ...string) (out, notes string, err error) {
	if flags.step == "" {
		flags.step = defaultStep
	}
	var o, n bytes.Buffer
	err = runLaws(&o, &n, keys, &flags)
	return o.String(), n.String(), err
}

func TestLawsList(t *testing.T) {
	for _, test := range []struct {
		name       string
		flags      lawsFlags
		count      string
		has, hasNo string
	}{
		{"all", lawsFlags{}, "64 laws.", "quartz-ti-cherniak2007", "iron"},
		{"mineral", lawsFlags{mineral: "quartz"}, "3 laws.", "quartz-ar-thomas2008", "zircon"},
		{"part of a mineral's name", lawsFlags{mineral: "feldspar"}, "5 laws.", "kfeldspar-k-hergemoller2017", "sanidine"},
		{"capitals", lawsFlags{mineral: "Quartz", species: "ti"}, "2 laws.", "quartz-ti-jollands2020", "quartz-ar"},
		{"species in two words", lawsFlags{species: "Fe-Mg", mineral: "olivine"}, "2 laws.", "olivine-femg-dohmen2007-ped", "olivine-ni"},
		{"species is a whole word", lawsFlags{species: "H"}, "2 laws.", "olivine-h-demouchy2006-c", "apatite-oh"},
		{"tag", lawsFlags{tag: "multicomponent"}, "3 laws.", "apatite-oh-li2020", "quartz"},
		{"checked", lawsFlags{checked: true, mineral: "plagioclase", species: ""}, "", "", ""},
		{"with conditions", lawsFlags{mineral: "plagioclase", species: "Sr"}, "1 law.", "T, XAn  ", "*"},
		{"on itself", lawsFlags{mineral: "olivine", species: "Fe-Mg"}, "2 laws.", "T, pressure, XFe  ", "*"},
		{"checked quartz", lawsFlags{checked: true, mineral: "quartz"}, "3 laws.", "quartz-ti-cherniak2007", "memory"},
	} {
		t.Run(test.name, func(t *testing.T) {
			out, notes, err := laws(test.flags)
			if test.count == "" { // every law of plagioclase is from memory
				if err == nil || out != "" {
					t.Errorf("got %q, %v", out, err)
				}
				return
			}
			if err != nil || notes != "" {
				t.Fatalf("%v, notes %q", err, notes)
			}
			if !strings.Contains(out, test.count) || !strings.Contains(out, test.has) || strings.Contains(out, test.hasNo) {
				t.Errorf("want %q, %q and no %q in\n%s", test.count, test.has, test.hasNo, out)
			}
		})
	}
}

func TestLawsShow(t *testing.T) {
	out, _, err := laws(lawsFlags{at: []string{"750 C, 1000 C", "1500 C"}}, "quartz-ti-jollands2020")
	if err != nil {
		t.Fatal(err)
	}
	// log10 D at 750 and 1000 C: from the published constants by another program, see the catalogue's testdata.
	for _, want := range []string{
		"Jollands, Bloch & Muntener 2020, Geology 48, 654-657",
		"900 to 1490 C",
		"log10 D +- 0.25 at 1136 C, the middle of the calibrated 1/T range (default 0.25)\n",
		"12 kJ/mol (source)\n",
		"log10 D0 +- 0.4, strongly correlated",
		"confirmed: abstract",
		"-24.177", "150 K below the calibrated range",
		"-21.059",
		"10 K above the calibrated range",
		"A year is 365.25 d.",
	} {
		if !strings.Contains(out, want) {
			t.Errorf("no %q in\n%s", want, out)
		}
	}
	if strings.Contains(out, catalogue.NotChecked) {
		t.Errorf("%q in\n%s", catalogue.NotChecked, out)
	}
}

// TestLawsDiffusivity recomputes the numbers of a line from the constants of the
// abstract, D = 7e-8 exp(-273000/(R T)) m2/s.
func TestLawsDiffusivity(t *testing.T) {
	out, _, err := laws(lawsFlags{at: []string{"750 C"}}, "quartz-ti-cherniak2007")
	if err != nil {
		t.Fatal(err)
	}
	// By hand: R T = 8506.94 J/mol, 273000/8506.94 = 32.0914, exp(-32) x exp(-0.0914) = 1.26642e-14 x 0.91262,
	// D = 7e-8 x 1.15575e-14 = 8.090e-22 m2/s, which is 8.090e-22 x 1e12 x 31557600 = 0.02553 um2/yr.
	if want := "\n750    8.09e-22  -21.092         0.02553\n"; !strings.Contains(out, want) {
		t.Errorf("no %q in\n%s", want, out)
	}
}

func TestLawsShowWithoutTemperature(t *testing.T) {
	for _, r := range catalogue.All() {
		out, _, err := laws(lawsFlags{}, r.Key)
		if err != nil {
			t.Errorf("%s: %v", r.Key, err)
		}
		flat := strings.Join(strings.Fields(out), " ")
		for _, want := range []string{r.Citation, r.Remark, r.Direction} {
			if !strings.Contains(flat, want) {
				t.Errorf("%s: no %q in\n%s", r.Key, want, out)
			}
		}
		if r.Checked() && !strings.Contains(flat, strings.ReplaceAll(r.Confidence, "are memory", "were not checked")) {
			t.Errorf("%s: no %q in\n%s", r.Key, r.Confidence, out)
		}
		if strings.Contains(flat, catalogue.NotChecked) == r.Checked() {
			t.Errorf("%s: checked is %v, but\n%s", r.Key, r.Checked(), out)
		}
		for line := range strings.Lines(out) {
			if len(line) > lineWidth+1 {
				t.Errorf("%s: line of %d: %q", r.Key, len(line), line)
			}
		}
	}
}

func TestLawsConditions(t *testing.T) {
	flags := lawsFlags{at: []string{"1100 C"}, pressure: "3 kbar", fO2: "1e-7 Pa", xFe: "0.1"}
	out, _, err := laws(flags, "olivine-femg-dohmen2007-tamed")
	if err != nil {
		t.Fatal(err)
	}
	for _, want := range []string{"At pressure 3 kbar, fO2 1e-7 Pa, XFe 0.1.", "Caution: " + catalogue.NotChecked} {
		if !strings.Contains(out, want) {
			t.Errorf("no %q in\n%s", want, out)
		}
	}
	// At 1 bar log10 D is -16.856; 2999 bar with 7 cm3/mol are 2099.3 J/mol, less by 2099.3/(2.302585 x 8.314463 x 1373.15)
	// = 0.0799.
	if !strings.Contains(out, "-16.936") {
		t.Errorf("no -16.936 in\n%s", out)
	}
}

func TestLawsJSON(t *testing.T) {
	out, notes, err := laws(lawsFlags{at: []string{"750 C", "1000 K"}, json: true}, "quartz-ti-cherniak2007")
	if err != nil || notes != "" {
		t.Fatalf("%v, notes %q", err, notes)
	}
	var got map[string]any
	if err := json.Unmarshal([]byte(out), &got); err != nil {
		t.Fatal(err)
	}
	values, _ := got["values"].([]any)
	if len(got) != 2 || got["key"] != "quartz-ti-cherniak2007" || len(values) != 2 {
		t.Fatalf("got %s", out)
	}
	const abstractR = 8.314462618 // J/(mol K), ten digits
	for i, temp := range []float64{1023.15, 1000} {
		v, _ := values[i].(map[string]any)
		d, _ := v["D_m2_per_s"].(float64)
		want := 7e-8 * math.Exp(-273000/(abstractR*temp))
		if len(v) != 2 || v["temperature_K"] != temp || !(math.Abs(d/want-1) <= 1e-8) {
			t.Errorf("at %g K: got %v, want D %g", temp, v, want)
		}
	}
}

func TestLawsJSONNotes(t *testing.T) {
	flags := lawsFlags{at: []string{"600 C"}, json: true, aSiO2: "1"}
	out, notes, err := laws(flags, "plagioclase-mg-faak2013")
	if err != nil || !json.Valid([]byte(out)) {
		t.Fatalf("%v: %q", err, out)
	}
	for _, want := range []string{catalogue.NotChecked, "used down to 500 K below its calibrated range"} {
		if !strings.Contains(notes, want) || strings.Contains(out, want) {
			t.Errorf("want %q in notes alone: %q and %q", want, notes, out)
		}
	}
}

func TestLawsCompare(t *testing.T) {
	flags := lawsFlags{compare: true, from: "700 C", to: "900 C", step: "50 C"}
	out, _, err := laws(flags, "quartz-ti-cherniak2007", "quartz-ti-jollands2020")
	if err != nil {
		t.Fatal(err)
	}
	// Common practice: the second law is about 1200 times slower at 750 C; values by another program as above.
	for _, want := range []string{
		"T [C]  log10 D1  log10 D2   D2/D1",
		"750    -21.092   (-24.177)  0.000822",
		"900    -19.310   -22.147    ",
		"2: used down to 200 K below its calibrated range.",
	} {
		if !strings.Contains(out, want) {
			t.Errorf("no %q in\n%s", want, out)
		}
	}
	if rows := strings.Count(out, "\n"+"7") + strings.Count(out, "\n"+"8") + strings.Count(out, "\n"+"9"); rows != 5 {
		t.Errorf("%d temperatures, want 5 in\n%s", rows, out)
	}
}

func TestLawsCompareUnderConditions(t *testing.T) {
	flags := lawsFlags{compare: true, at: []string{"1200 C"}, xAn: "0.95"}
	out, _, err := laws(flags, "plagioclase-mg-latourrette1998-c", "plagioclase-mg-costa2003")
	if err != nil {
		t.Fatal(err)
	}
	// The second law has no calibrated range of its own.
	for _, want := range []string{"2: At XAn 0.95.", "2: calibrated temperatures not known.", "1200   -15.778   (-15.961)"} {
		if !strings.Contains(out, want) {
			t.Errorf("no %q in\n%s", want, out)
		}
	}
}

// TestLawsCommand runs the command line as typed.
func TestLawsCommand(t *testing.T) {
	for _, test := range []struct {
		name   string
		args   []string
		status int
		out    string
		err    string
	}{
		{"list", []string{"laws", "--mineral=quartz", "--species", "Ti"}, done, "2 laws.", ""},
		{"show", []string{"laws", "quartz-ti-cherniak2007", "--at", "750 C", "--at", "800 C"}, done, "\n800 ", ""},
		{"compare", []string{"laws", "--compare", "quartz-ti-cherniak2007", "quartz-ti-jollands2020", "--from", "600 C", "--to", "900 C"},
			done, "\n650 ", ""},
		{"conditions", []string{"laws", "plagioclase-sr-giletti1994", "--at", "750 C", "--XAn", "0.5"}, done, "-20.220", ""},
		{"help", []string{"laws", "--help"}, done, "--aSiO2 ACTIVITY", ""},
		{"wrong key", []string{"laws", "quartz-ti"}, wrong, "", `law "quartz-ti": not in the catalogue; nearest key is "quartz-ti`},
		{"wrong flag", []string{"laws", "--mineal", "quartz"}, wrong, "", "--mineral"},
	} {
		t.Run(test.name, func(t *testing.T) {
			var out, errs bytes.Buffer
			status := run(test.args, strings.NewReader(""), &out, &errs)
			if status != test.status || !strings.Contains(out.String(), test.out) || !strings.Contains(errs.String(), test.err) {
				t.Errorf("status %d, want %d; output %q, want %q; error %q, want %q",
					status, test.status, out.String(), test.out, errs.String(), test.err)
			}
			if (status == done) != (errs.Len() == 0) || (status == wrong) != (out.Len() == 0) {
				t.Errorf("status %d with output %q and error %q", status, out.String(), errs.String())
			}
		})
	}
}

func TestLawsErrors(t *testing.T) {
	at := []string{"750 C"}
	key := []string{"quartz-ti-cherniak2007"}
	two := []string{"quartz-ti-cherniak2007", "quartz-ti-jollands2020"}
	for _, test := range []struct {
		name         string
		flags        lawsFlags
		keys         []string
		field, value string
	}{
		{"unknown key", lawsFlags{}, []string{"quartz-ti-cherniak"}, "law", "quartz-ti-cherniak"},
		{"temperature without a unit", lawsFlags{at: []string{"750"}}, key, "--at", "750"},
		{"second of two", lawsFlags{at: []string{"750 C,hot"}}, key, "--at", "hot"},
		{"empty", lawsFlags{at: []string{""}}, key, "--at", ""},
		{"below absolute zero", lawsFlags{at: []string{"-300 C"}}, key, "--at", "-300 C"},
		{"absolute zero", lawsFlags{at: []string{"0 K"}}, key, "--at", "0 K"},
		{"NaN", lawsFlags{at: []string{"NaN C"}}, key, "--at", "NaN C"},
		{"no upper end", lawsFlags{from: "600 C"}, key, "--to", ""},
		{"ends exchanged", lawsFlags{from: "600 C", to: "500 C"}, key, "--to", "500 C"},
		{"no step", lawsFlags{from: "600 C", to: "900 C", step: "0 K"}, key, "--step", "0 K"},
		{"step backwards", lawsFlags{from: "600 C", to: "900 C", step: "-5 K"}, key, "--step", "-5 K"},
		{"step backwards in C", lawsFlags{from: "600 C", to: "900 C", step: "-5 C"}, key, "--step", "-5 C"},
		{"step without a unit", lawsFlags{from: "600 C", to: "900 C", step: "50"}, key, "--step", "50"},
		{"too many steps", lawsFlags{from: "600 C", to: "900 C", step: "0.001 K"}, key, "--step", "0.001 K"},
		{"tag", lawsFlags{tag: "tracers"}, nil, "--tag", "tracers"},
		{"mineral", lawsFlags{mineral: "quarz"}, nil, "--mineral", "quarz"},
		{"species", lawsFlags{species: "Unobtainium"}, nil, "--species", "Unobtainium"},
		{"nothing passes", lawsFlags{mineral: "quartz", species: "Sr"}, nil, "bankfire laws", ""},
		{"missing condition", lawsFlags{at: at}, []string{"plagioclase-sr-giletti1994"}, "--XAn", ""},
		{"fraction as per cent", lawsFlags{at: at, xAn: "50"}, []string{"plagioclase-sr-giletti1994"}, "--XAn", "50"},
		{"fraction is no number", lawsFlags{at: at, xFe: "some"}, key, "--XFe", "some"},
		{"activity", lawsFlags{at: at, aSiO2: "0"}, key, "--aSiO2", "0"},
		{"buffer", lawsFlags{at: at, fO2: "IW"}, key, "--fO2", "IW"},
		{"fO2 without a unit", lawsFlags{at: at, fO2: "1e-7"}, key, "--fO2", "1e-7"},
		{"pressure", lawsFlags{at: at, pressure: "-1 bar"}, key, "--pressure", "-1 bar"},
		{"compare one", lawsFlags{compare: true, at: at}, key, "--compare", ""},
		{"compare nowhere", lawsFlags{compare: true}, two, "--compare", ""},
		{"compare as JSON", lawsFlags{compare: true, at: at, json: true}, two, "--json", ""},
		{"two without compare", lawsFlags{at: at}, two, "KEY", ""},
		{"temperature without a law", lawsFlags{at: at}, nil, "--at", ""},
		{"condition without a law", lawsFlags{xAn: "0.5"}, nil, "conditions", ""},
		{"list as JSON", lawsFlags{json: true}, nil, "--json", ""},
		{"JSON nowhere", lawsFlags{json: true}, key, "--json", ""},
		{"filter and law", lawsFlags{mineral: "quartz"}, key, "KEY", ""},
	} {
		t.Run(test.name, func(t *testing.T) {
			out, _, err := laws(test.flags, test.keys...)
			var in *thermal.InputError
			if !errors.As(err, &in) || out != "" {
				t.Fatalf("got %v, output %q", err, out)
			}
			if in.Field != test.field || in.Value != test.value || in.Problem == "" || in.Remedy == "" {
				t.Errorf("got %#v, want field %q, value %q, a problem and a remedy", in, test.field, test.value)
			}
		})
	}
}

func TestLawsErrorsTogether(t *testing.T) {
	_, _, err := laws(lawsFlags{at: []string{"hot", "750"}, xAn: "7"}, "nobody-knows")
	for _, want := range []string{`law "nobody-knows"`, `--at "hot"`, `--at "750"`, `--XAn "7"`} {
		if err == nil || !strings.Contains(err.Error(), want) {
			t.Errorf("no %s in %v", want, err)
		}
	}
}

func TestLawsRange(t *testing.T) {
	for _, test := range []struct {
		name           string
		from, to, step string
		want           []float64 // C
	}{
		{"both ends", "600 C", "700 C", "50 K", []float64{600, 650, 700}},
		{"last step short", "600 C", "690 C", "50 C", []float64{600, 650}},
		{"one", "600 C", "600 C", "50 K", []float64{600}},
		{"round-off", "600 C", "600.3 C", "0.1 K", []float64{600, 600.1, 600.2, 600.3}},
		{"in F", "1112 F", "1292 F", "90 F", []float64{600, 650, 700}},
	} {
		t.Run(test.name, func(t *testing.T) {
			got, err := (&lawsFlags{from: test.from, to: test.to, step: test.step}).temperatures()
			if err != nil {
				t.Fatal(err)
			}
			const roundOff = 1e-9 // K
			same := func(a, b float64) bool { return math.Abs(a-(b+thermal.ZeroCelsius)) <= roundOff }
			if !slices.EqualFunc(got, test.want, same) {
				t.Errorf("got %v K, want %v C", got, test.want)
			}
		})
	}
}

func TestWrap(t *testing.T) {
	text := strings.Repeat("abcd ", 40)
	for i, line := range strings.Split(wrap(text, 10), "\n") {
		if i > 0 {
			if !strings.HasPrefix(line, strings.Repeat(" ", 10)+"abcd") {
				t.Errorf("line %d: %q", i, line)
			}
			line = line[10:]
		}
		if len(line) > lineWidth-10 || len(line) < lineWidth-15 && i == 0 {
			t.Errorf("line %d is %d long: %q", i, len(line), line)
		}
	}
	if got := wrap("", 4); got != "" {
		t.Errorf("of nothing: %q", got)
	}
}
