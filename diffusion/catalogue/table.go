package catalogue

import (
	_ "embed"
	"encoding/csv"
	"fmt"
	"io"
	"math"
	"slices"
	"strconv"
	"strings"
	"sync"

	"bankfire/thermal"
)

//go:embed laws.csv
var source string

// table is laws.csv, read once and never changed.
var table = sync.OnceValue(func() []Row {
	rows, err := parse(strings.NewReader(source))
	if err != nil {
		panic("catalogue: " + err.Error())
	}
	slices.SortFunc(rows, func(a, b Row) int { return strings.Compare(a.Key, b.Key) })
	return rows
})

// All returns a copy of every row, sorted by key.
func All() []Row { return slices.Clone(table()) }

// Find returns a copy of the row with the key. If there is none the error is a
// *thermal.InputError that suggests the nearest key.
func Find(key string) (*Row, error) {
	var keys []string
	for _, r := range table() {
		if r.Key == key {
			return &r, nil
		}
		keys = append(keys, r.Key)
	}
	return nil, &thermal.InputError{
		Field:   "law",
		Value:   key,
		Problem: "not in the catalogue",
		Remedy:  suggestion(key, keys, "bankfire laws lists all keys"),
	}
}

// suggestion names the key that is closest to a mistyped one, or, where none is close
// at all, says where all of them stand.
func suggestion(key string, keys []string, all string) string {
	near, slips := nearestKey(key, keys)
	if slips > 1 && slips > len(key)*2/3 {
		return all
	}
	return "nearest key is " + strconv.Quote(near)
}

// nearestKey returns the key that is closest to a mistyped one, and by how many slips.
func nearestKey(key string, keys []string) (string, int) {
	best, least := "", math.MaxInt
	for _, k := range keys {
		d := thermal.Slips(key, k)
		if strings.HasPrefix(k, key) {
			d = min(d, 1) // the end was left out
		}
		if d < least {
			best, least = k, d
		}
	}
	return best, least
}

// record is one line of the table by column name. It keeps its first error.
type record struct {
	line  int
	field map[string]string
	err   error
}

// parse reads the table. Errors are *thermal.InputError with line and column.
func parse(r io.Reader) ([]Row, error) {
	in := csv.NewReader(r)
	in.Comment = '#'
	header, err := in.Read()
	if err != nil {
		return nil, fmt.Errorf("header: %w", err)
	}
	var rows []Row
	for {
		fields, err := in.Read()
		if err == io.EOF {
			return rows, nil
		}
		if err != nil {
			return nil, err
		}
		line, _ := in.FieldPos(0)
		rec := record{line: line, field: make(map[string]string, len(header))}
		for i, name := range header {
			rec.field[name] = fields[i]
		}
		rows = append(rows, rec.row())
		if rec.err != nil {
			return nil, rec.err
		}
	}
}

// row turns a line into a Row; rec.err is set if a cell cannot be read.
func (rec *record) row() Row {
	row := Row{
		Key:          rec.text("key"),
		Mineral:      rec.text("mineral"),
		Species:      rec.text("species"),
		Tag:          Tag(rec.word("tag", tagWords()...)),
		Log10D0:      rec.log10D0(),
		SigmaLog10D0: rec.number("sigma_log10_D0"),
		E:            1e3 * rec.number("E_kJ_per_mol"),
		SigmaE: Sigma{
			Value:  1e3 * rec.number("sigma_E_kJ_per_mol"),
			Origin: rec.word("sigma_E_origin", FromSource, DefaultE),
		},
		SigmaMid: Sigma{
			Value:  rec.number("sigma_log10_D_mid"),
			Origin: rec.word("sigma_D_origin", FromSource, FromCovariance, DefaultMid),
		},
		DV:          1e-6 * rec.number("dV_cm3_per_mol"),
		PRef:        rec.number("P_reference_Pa"),
		Composition: rec.composition(),
		FO2:         rec.fugacity(),
		Direction:   rec.field["direction"],
		PRange:      rec.field["P_range"],
		Citation:    rec.text("citation"),
		Confidence:  rec.text("confidence"),
		Remark:      rec.field["remark"],
		checked:     rec.word("checked", "yes", "no") == "yes",
	}
	row.TMin, row.TMax = rec.calibrated()
	return row
}

func tagWords() []string {
	var words []string
	for _, t := range Tags() {
		words = append(words, string(t))
	}
	return words
}

// log10D0 reads whichever of D0 and its logarithm was published.
func (rec *record) log10D0() float64 {
	d0, log := rec.field["D0_m2_per_s"], rec.field["log10_D0"]
	if (d0 == "") == (log == "") {
		rec.fail("D0_m2_per_s", "want either this or log10_D0")
	}
	if log != "" {
		return rec.number("log10_D0")
	}
	return math.Log10(rec.number("D0_m2_per_s"))
}

func (rec *record) composition() Term {
	form := Form(rec.word("composition_form", "", string(Linear), string(Power)))
	if form == "" {
		return Term{}
	}
	return Term{
		Variable:  rec.word("composition_variable", XAn, XFe, ASiO2),
		Form:      form,
		Slope:     rec.number("composition_slope"),
		Reference: rec.number("composition_reference"),
		Sigma:     rec.number("composition_sigma"),
		SlopeOf:   rec.field["composition_slope_of"],
	}
}

func (rec *record) fugacity() Term {
	if rec.field["fO2_exponent"] == "" {
		return Term{}
	}
	return Term{
		Variable:  FO2,
		Form:      Power,
		Slope:     rec.number("fO2_exponent"),
		Reference: rec.number("fO2_reference_Pa"),
	}
}

// calibrated returns the calibrated range in K, or 0, 0 if both cells are empty.
func (rec *record) calibrated() (lo, hi float64) {
	if rec.field["T_min_C"] == "" && rec.field["T_max_C"] == "" {
		return 0, 0
	}
	return celsius(rec.number("T_min_C")), celsius(rec.number("T_max_C"))
}

// text returns a cell that must not be empty.
func (rec *record) text(col string) string {
	if rec.field[col] == "" {
		rec.fail(col, "empty")
	}
	return rec.field[col]
}

// word returns a cell that must be one of the words.
func (rec *record) word(col string, words ...string) string {
	if !slices.Contains(words, rec.field[col]) {
		rec.fail(col, "want one of "+strings.Join(words, ", "))
	}
	return rec.field[col]
}

// number returns a cell as a finite number or fraction of two, 0 if it is empty.
func (rec *record) number(col string) float64 {
	if rec.field[col] == "" {
		return 0
	}
	above, below, fraction := strings.Cut(rec.field[col], "/")
	x, err := strconv.ParseFloat(above, 64)
	if fraction && err == nil {
		var y float64
		y, err = strconv.ParseFloat(below, 64)
		x /= y
	}
	if err != nil || math.IsNaN(x) || math.IsInf(x, 0) {
		rec.fail(col, "not a finite number")
	}
	return x
}

// fail keeps the first error of the line.
func (rec *record) fail(col, problem string) {
	if rec.err == nil {
		rec.err = &thermal.InputError{
			File: "laws.csv", Line: rec.line, Field: col, Value: rec.field[col], Problem: problem,
		}
	}
}
