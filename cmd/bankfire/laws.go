package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"math"
	"slices"
	"strconv"
	"strings"
	"unicode"
	"unicode/utf8"

	"github.com/spf13/pflag"

	"bankfire/diffusion"
	"bankfire/diffusion/catalogue"
	"bankfire/thermal"
)

// lawsCommand is `bankfire laws`.
func lawsCommand() *command {
	flags := &lawsFlags{}
	return &command{
		name:  "laws",
		args:  "[KEY...]",
		short: "list the published diffusion laws, show one, compare several",
		long: "Without a KEY, lists the laws of the catalogue. With one, shows its citation, calibrated range,\n" +
			"uncertainty and how its constants are known, and D at the temperatures given by --at, or by --from,\n" +
			"--to and --step. With --compare and several, shows them side by side at those temperatures. A law\n" +
			"that depends on pressure, fO2, composition or activity asks for the flag of that name, and prints\n" +
			"the line that stands for it in a study. A study that gives them can name the law itself. An fO2\n" +
			"that follows a buffer is that of each temperature.",
		examples: []example{
			{"bankfire laws --mineral quartz --species Ti", "list the laws of Ti in quartz"},
			{`bankfire laws quartz-ti-jollands2020 --at "700 C, 750 C"`, "show one law and D at two temperatures"},
			{`bankfire laws plagioclase-sr-giletti1994 --at "800 C" --XAn 0.4`, "the same for a law that depends on composition"},
			{`bankfire laws olivine-ca-coogan2005-a --at "1000 C, 1100 C" --fO2 NNO+0.3`, "the same along a buffer of oxygen fugacity"},
			{"bankfire laws plagioclase-sr-giletti1994 --XAn 0.4", "a line for a study: this law at one composition"},
			{`bankfire laws quartz-ti-cherniak2007 --at "750 C" --json`, "print D for another program"},
			{
				`bankfire laws --compare quartz-ti-cherniak2007 quartz-ti-jollands2020 --from "600 C" --to "900 C"`,
				"show two rival laws side by side and their ratio",
			},
		},
		most:  -1,
		flags: flags.define,
		words: lawWords(),
		run: func(_ context.Context, s streams, keys []string) error {
			return runLaws(s.out, s.err, keys, flags)
		},
	}
}

// lawWords returns what completion offers for keys and filters.
func lawWords() map[string][]string {
	keys, minerals := []string{}, []string{}
	for _, r := range catalogue.All() {
		keys, minerals = append(keys, r.Key), append(minerals, r.Mineral)
	}
	slices.Sort(minerals)
	tags := []string{}
	for _, tag := range catalogue.Tags() {
		tags = append(tags, string(tag))
	}
	return map[string][]string{"KEY": keys, "MINERAL": slices.Compact(minerals), "TAG": tags}
}

// define adds the flags to the set.
func (f *lawsFlags) define(set *pflag.FlagSet) {
	set.StringVar(&f.mineral, "mineral", "", "list only laws of `MINERAL`, a whole word of its name")
	set.StringVar(&f.species, "species", "", "list only laws of `SPECIES`, such as Ti or Fe-Mg")
	set.StringVar(&f.tag, "tag", "", "list only laws with `TAG`: "+orList(catalogue.Tags()))
	set.BoolVar(&f.checked, "checked", false, "list only laws whose constants were seen in their source")
	set.StringArrayVar(&f.at, "at", nil, "give D at `TEMPERATURE`, such as \"750 C\"; commas between several, or the flag again")
	set.StringVar(&f.from, "from", "", "give D from `TEMPERATURE` on ...")
	set.StringVar(&f.to, "to", "", "... up to `TEMPERATURE`")
	set.StringVar(&f.step, "step", defaultStep, "... in steps of `DIFFERENCE`")
	set.BoolVar(&f.compare, "compare", false, "show several laws side by side, and each D as a multiple of the first")
	set.StringVar(&f.xAn, catalogue.XAn, "", "mole `FRACTION` of anorthite in plagioclase")
	set.StringVar(&f.xFe, catalogue.XFe, "", "mole `FRACTION` Fe/(Fe+Mg)")
	set.StringVar(&f.aSiO2, catalogue.ASiO2, "", "`ACTIVITY` of SiO2")
	set.StringVar(&f.fO2, catalogue.FO2, "", "oxygen `FUGACITY`: a buffer that it follows, such as \"NNO+0.3\", or a pressure, such as \"1e-7 Pa\"")
	set.StringVar(&f.pressure, catalogue.Pressure, "", "`PRESSURE`, such as \"2 kbar\"")
	set.BoolVar(&f.json, "json", false, "print D of one law as JSON instead of text")
}

// lawsFlags are the flags of `bankfire laws` as typed.
type lawsFlags struct {
	mineral, species, tag          string
	checked                        bool
	at                             []string
	from, to, step                 string
	compare, json                  bool
	pressure, fO2, xAn, xFe, aSiO2 string
}

// lawsOptions is what they mean.
type lawsOptions struct {
	filter     lawsFilter
	rows       []*catalogue.Row // the keys
	temps      []float64        // K, of --at, then of the range
	conditions lawConditions
	compare    bool
	json       bool
}

// lawsFilter chooses rows of the catalogue. The zero value chooses all.
type lawsFilter struct {
	mineral, species string // whole words, in any case
	tag              catalogue.Tag
	checked          bool
}

// runLaws is `bankfire laws KEY...` with the flags: the list of laws, one law, or
// several side by side. Results go to out, and with --json the cautions to notes.
func runLaws(out, notes io.Writer, keys []string, flags *lawsFlags) error {
	opt, err := flags.options(keys)
	if err != nil {
		return err
	}
	if len(opt.rows) == 0 {
		return listLaws(out, opt.filter)
	}
	curves, err := opt.curves()
	switch {
	case err != nil:
		return err
	case opt.json:
		return writeLawJSON(out, notes, curves[0], opt.temps)
	case opt.compare:
		return compareLaws(out, curves, opt)
	}
	return showLaw(out, curves[0], opt)
}

// options reads the flags and keys. The error joins an *thermal.InputError for
// everything that is wrong.
func (f *lawsFlags) options(keys []string) (*lawsOptions, error) {
	opt := &lawsOptions{compare: f.compare, json: f.json}
	var errs [5]error
	opt.filter, errs[0] = f.filter()
	opt.rows, errs[1] = findLaws(keys)
	opt.temps, errs[2] = f.temperatures()
	opt.conditions, errs[3] = f.conditions()
	errs[4] = f.together(len(keys))
	return opt, errors.Join(errs[:]...)
}

// together checks that the flags go with each other and with the number of keys.
func (f *lawsFlags) together(keys int) error {
	timed := len(f.at) > 0 || f.from != "" || f.to != ""
	conditioned := f.pressure+f.fO2+f.xAn+f.xFe+f.aSiO2 != ""
	filtered := f.mineral != "" || f.species != "" || f.tag != "" || f.checked
	for _, rule := range []struct {
		broken                 bool
		field, problem, remedy string
	}{
		{f.compare && keys < 2, "--compare", "needs at least two KEYs", `write --compare KEY KEY --from "600 C" --to "900 C"`},
		{f.compare && !timed, "--compare", "no temperatures given", `add --from "600 C" --to "900 C", or --at "750 C"`},
		{f.compare && f.json, "--json", "gives one law", "leave out --compare and name one KEY"},
		{!f.compare && keys > 1, "KEY", "more than one given", "add --compare to see them side by side"},
		{keys == 0 && timed, "--at", "no law given", `write bankfire laws KEY --at "750 C"`},
		{keys == 0 && f.json, "--json", "no law given", `write bankfire laws KEY --at "750 C" --json`},
		{keys == 0 && conditioned, "conditions", "no law given", `write bankfire laws KEY --at "750 C"`},
		{keys == 1 && f.json && !timed, "--json", "no temperatures given", `add --at "750 C"`},
		{keys > 0 && filtered, "KEY", "given together with a filter of the list", "leave out the one or the other"},
	} {
		if rule.broken {
			return &thermal.InputError{Field: rule.field, Problem: rule.problem, Remedy: rule.remedy}
		}
	}
	return nil
}

func (f *lawsFlags) filter() (lawsFilter, error) {
	filter := lawsFilter{f.mineral, f.species, catalogue.Tag(f.tag), f.checked}
	if f.tag != "" && !slices.Contains(catalogue.Tags(), filter.tag) {
		return filter, &thermal.InputError{
			Field: "--tag", Value: f.tag, Problem: "no such tag", Remedy: "want " + orList(catalogue.Tags()),
		}
	}
	return filter, nil
}

// orList is "a, b or c".
func orList[S ~string](words []S) string {
	var text strings.Builder
	for i, w := range words {
		switch {
		case i > 0 && i == len(words)-1:
			text.WriteString(" or ")
		case i > 0:
			text.WriteString(", ")
		}
		text.WriteString(string(w))
	}
	return text.String()
}

func findLaws(keys []string) ([]*catalogue.Row, error) {
	var rows []*catalogue.Row
	var errs []error
	for _, key := range keys {
		row, err := catalogue.Find(key)
		rows, errs = append(rows, row), append(errs, err)
	}
	return rows, errors.Join(errs...)
}

// temperatures returns those of --at and of the range, K.
func (f *lawsFlags) temperatures() ([]float64, error) {
	var temps []float64
	var errs []error
	for _, list := range f.at {
		for text := range strings.SplitSeq(list, ",") {
			temp, err := parseTemperature("--at", strings.TrimSpace(text))
			temps, errs = append(temps, temp), append(errs, err)
		}
	}
	if f.from != "" || f.to != "" {
		steps, err := f.span()
		temps, errs = append(temps, steps...), append(errs, err)
	}
	return temps, errors.Join(errs...)
}

// lowestTemperature keeps D from vanishing: at 1 K the slowest law still has a
// logarithm, and below it nobody asks.
const lowestTemperature = 1 // K

func parseTemperature(flag, text string) (float64, error) {
	temp, err := thermal.ParseQuantity(text, thermal.Temperature)
	if err == nil && temp < lowestTemperature {
		err = &thermal.InputError{Problem: "too close to absolute zero", Remedy: "want at least 1 K"}
	}
	return temp, ofFlag(err, flag, text)
}

// ofFlag returns err with the flag and what was typed there.
func ofFlag(err error, flag, typed string) error {
	var in *thermal.InputError
	if !errors.As(err, &in) {
		return err
	}
	there := *in
	there.Field, there.Value = flag, typed
	return &there
}

// defaultStep is the step of a range if none is given.
const defaultStep = "50 K"

// maxRange is the number of temperatures beyond which a range is a slip.
const maxRange = 10_000

// span returns the temperatures from --from to --to, both included, --step apart.
func (f *lawsFlags) span() ([]float64, error) {
	from, errFrom := parseTemperature("--from", f.from)
	to, errTo := parseTemperature("--to", f.to)
	step, errStep := parseStep(f.step)
	if err := errors.Join(errFrom, errTo, errStep); err != nil {
		return nil, err
	}
	if to < from {
		return nil, &thermal.InputError{Field: "--to", Value: f.to, Problem: "below --from", Remedy: "exchange the two"}
	}
	// a range that is a whole number of steps but for round-off keeps its last step
	const roundOff = 1e-9
	count := math.Floor((to-from)/step+roundOff) + 1
	if count > maxRange {
		return nil, &thermal.InputError{
			Field: "--step", Value: f.step, Problem: fmt.Sprintf("makes more than %d temperatures", maxRange), Remedy: "want a larger one",
		}
	}
	temps := make([]float64, int(count))
	for i := range temps {
		temps[i] = from + float64(i)*step
	}
	return temps, nil
}

// parseStep reads a difference of temperatures, K, in which 50 C are 50 K.
func parseStep(text string) (float64, error) {
	q, err := thermal.ReadQuantity(text, thermal.Temperature)
	if err != nil {
		return 0, ofFlag(err, "--step", text)
	}
	_, zero, _ := thermal.Unit(q.Unit, thermal.Temperature)
	step := q.Value - zero
	if !(step > 0) {
		return 0, &thermal.InputError{Field: "--step", Value: text, Problem: "not above zero", Remedy: `want a step such as "50 K"`}
	}
	return step, nil
}

// lawConditions are those that were given: values, and a buffer that fO2 follows.
type lawConditions struct {
	values catalogue.Conditions
	buffer *catalogue.Buffer // nil is none
	offset float64           // from it, log10 units
	along  string            // both as typed
}

// law is that of a row under the conditions, along the buffer at 1 bar if no
// pressure is given.
func (c *lawConditions) law(r *catalogue.Row) (diffusion.Law, error) {
	if c.buffer == nil {
		return r.Law(c.values)
	}
	pressure, given := c.values[catalogue.Pressure]
	if !given {
		pressure = thermal.Bar
	}
	return r.LawAlong(c.values, c.buffer.Fugacity(c.offset, pressure))
}

// cautions are those of the buffer, if the law of a row depends on it.
func (c *lawConditions) cautions(r *catalogue.Row) []string {
	if c.buffer == nil || !slices.Contains(r.Needs(), catalogue.FO2) {
		return nil
	}
	cautions := c.buffer.Cautions()
	if _, given := c.values[catalogue.Pressure]; !given {
		cautions = append(cautions, "the "+c.buffer.Names[0]+" buffer is taken at 1 bar")
	}
	return cautions
}

// conditions returns those that were given.
func (f *lawsFlags) conditions() (lawConditions, error) {
	all := lawConditions{values: catalogue.Conditions{}}
	given := all.values
	var errs []error
	typedFO2 := f.fO2
	if first, _ := utf8.DecodeRuneInString(strings.TrimSpace(typedFO2)); unicode.IsLetter(first) {
		errs = append(errs, ofFlag(all.follow(typedFO2), "--"+catalogue.FO2, typedFO2))
		typedFO2 = ""
	}
	for _, c := range []struct {
		name, typed string
		parse       func(string) (float64, error)
	}{
		{catalogue.Pressure, f.pressure, parsePressure},
		{catalogue.FO2, typedFO2, parseFugacity},
		{catalogue.XAn, f.xAn, parseNumber},
		{catalogue.XFe, f.xFe, parseNumber},
		{catalogue.ASiO2, f.aSiO2, parseNumber},
	} {
		if c.typed == "" {
			continue
		}
		x, err := c.parse(c.typed)
		if err == nil {
			err = catalogue.Conditions{c.name: x}.Check()
		}
		given[c.name] = x
		errs = append(errs, ofFlag(err, "--"+c.name, c.typed))
	}
	return all, errors.Join(errs...)
}

// follow makes fO2 follow a buffer, such as "NNO+0.3".
func (c *lawConditions) follow(text string) error {
	name, offset, ok := catalogue.CutOffset(text)
	buffer, known := catalogue.FindBuffer(name)
	switch {
	case !known:
		var names []string
		for _, b := range catalogue.Buffers() {
			names = append(names, b.Names...)
		}
		return &thermal.InputError{Problem: "no known buffer of oxygen fugacity", Remedy: "want " + orList(names) + ` with an offset, or a pressure such as "1e-7 Pa"`}
	case !ok || !(math.Abs(offset) <= catalogue.MaxOffset):
		return &thermal.InputError{Problem: fmt.Sprintf("its offset is no number of log10 units from -%d to %d", catalogue.MaxOffset, catalogue.MaxOffset), Remedy: `want a buffer such as "NNO+0.3"`}
	}
	c.buffer, c.offset, c.along = buffer, offset, strings.TrimSpace(text)
	return nil
}

func parsePressure(text string) (float64, error) {
	return thermal.ParseQuantity(text, thermal.Pressure)
}

// parseFugacity reads an oxygen fugacity, Pa.
func parseFugacity(text string) (float64, error) {
	x, err := parsePressure(text)
	var in *thermal.InputError
	if !errors.As(err, &in) {
		return x, err
	}
	there := *in
	there.Remedy = `want a buffer such as "NNO+0.3", or a pressure such as "1e-7 Pa"`
	return 0, &there
}

func parseNumber(text string) (float64, error) {
	x, err := strconv.ParseFloat(text, 64)
	if err != nil {
		return 0, &thermal.InputError{Problem: "not a number", Remedy: "want a bare number, for example 0.5"}
	}
	return x, nil
}

// lawCurve is a row with the law that it is under the conditions given.
type lawCurve struct {
	row      *catalogue.Row
	law      diffusion.Law
	cautions []string // of the row and of the buffer that fO2 follows
}

// curves returns the laws of the keys. One that only is to be shown, at no
// temperature and under no conditions, stays empty if it needs some.
func (opt *lawsOptions) curves() ([]lawCurve, error) {
	curves := make([]lawCurve, len(opt.rows))
	var errs []error
	for i, row := range opt.rows {
		curves[i].row, curves[i].cautions = row, append(row.Cautions(), opt.conditions.cautions(row)...)
		if len(opt.temps) > 0 || len(opt.conditions.values) > 0 || opt.conditions.buffer != nil || len(row.Needs()) == 0 {
			law, err := opt.conditions.law(row)
			curves[i].law = law
			errs = append(errs, missingFlag(err))
		}
	}
	return curves, errors.Join(errs...)
}

// missingFlag turns the name of a condition into that of its flag.
func missingFlag(err error) error {
	var in *thermal.InputError
	if errors.As(err, &in) {
		return ofFlag(err, "--"+in.Field, in.Value)
	}
	return err
}

// chosen reports whether the filter lets the row through.
func (f lawsFilter) chosen(r *catalogue.Row) bool {
	return hasWords(r.Mineral, f.mineral) && hasWords(r.Species, f.species) &&
		(f.tag == "" || f.tag == r.Tag) && (!f.checked || r.Checked())
}

// hasWords reports whether the words of sought stand in text one after another,
// capitals aside: "Fe-Mg" is in "Fe-Mg interdiffusion", "H" is not in "OH".
func hasWords(text, sought string) bool {
	words := func(s string) string {
		return " " + strings.Join(strings.FieldsFunc(strings.ToLower(s), notInWord), " ") + " "
	}
	return strings.Contains(words(text), words(sought)) || sought == ""
}

func notInWord(c rune) bool { return !unicode.IsLetter(c) && !unicode.IsDigit(c) }

// lawValues is what `bankfire laws KEY --at ... --json` prints.
type lawValues struct {
	Key    string     `json:"key"`
	Values []lawValue `json:"values"`
}

type lawValue struct {
	Temperature float64 `json:"temperature_K"`
	D           float64 `json:"D_m2_per_s"`
}

func writeLawJSON(out, notes io.Writer, c lawCurve, temps []float64) error {
	for _, note := range lawNotes(c, temps) {
		if _, err := fmt.Fprintf(notes, "bankfire: %s: %s\n", c.row.Key, note); err != nil {
			return err
		}
	}
	values := lawValues{Key: c.row.Key, Values: make([]lawValue, len(temps))}
	for i, temp := range temps {
		values.Values[i] = lawValue{temp, math.Exp(c.law.LnD(temp))}
	}
	return writeJSON(out, values)
}

// lawNotes returns what must stand beside D of the law at the temperatures.
func lawNotes(c lawCurve, temps []float64) []string {
	r, notes := c.row, slices.Clone(c.cautions)
	if len(temps) == 0 {
		return notes
	}
	if !r.RangeKnown() {
		return append(notes, "calibrated temperatures not known")
	}
	below, above := r.Extrapolation(slices.Min(temps), slices.Max(temps))
	for _, beyond := range []struct {
		by    float64
		where string
	}{{below, "down to %.5g K below"}, {above, "up to %.0f K above"}} {
		if beyond.by > 0 {
			notes = append(notes, fmt.Sprintf("used "+beyond.where+" its calibrated range", beyond.by))
		}
	}
	return notes
}
