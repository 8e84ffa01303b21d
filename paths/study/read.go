package study

import (
	"cmp"
	"errors"
	"fmt"
	"path/filepath"
	"slices"
	"strings"

	"bankfire/thermal"
)

// defaultConfidence is that of a study which does not state one.
const defaultConfidence = 0.95

// Read reads a study file and every file that it names. The error is every
// problem found, 20 at most, as *thermal.InputError joined by errors.Join: those
// of the study in the order of its lines, then those of other files. The study
// is nil then.
func Read(file string) (*Study, error) {
	data, err := load(file, maxStudyBytes)
	var in *thermal.InputError
	if errors.As(err, &in) {
		in.File = file
		return nil, in
	}
	if err != nil {
		return nil, err
	}
	return parse(file, data, load)
}

// parse reads a study from its bytes and its other files through load.
func parse(file string, data []byte, load loader) (*Study, error) {
	root, err := parseDocument(data)
	if err != nil {
		var e *syntaxError
		if errors.As(err, &e) {
			err = thermal.Place{File: file, Line: e.line, Col: e.col, Field: e.field}.Error(e.value, e.problem, e.remedy)
		}
		return nil, err
	}
	d := &decoder{file: file, files: newFiles(file, data, load), used: map[string]bool{}, laws: map[string]Law{}, partitions: map[string]Partition{}, slopeSigmas: map[string]slopeSigma{}, meant: map[string]bool{},
		measured: map[string]string{}}
	s := d.study(root)
	if err := d.err(); err != nil {
		return nil, err
	}
	s.Inputs, s.Notes = d.files.inputs, d.notes
	return s, nil
}

// study reads the top level.
func (d *decoder) study(root *node) *Study {
	d.keys(root, topTable)
	s := &Study{File: d.file, Confidence: defaultConfidence}
	s.Title = strings.TrimSuffix(filepath.Base(d.file), filepath.Ext(d.file))
	if v := root.get("title"); v != nil {
		s.Title, _ = d.name(v, "write a title, one line")
	}
	if v := root.get("confidence"); v != nil {
		s.Confidence = d.confidence(v)
	}
	s.Conditions = d.studyConditions(root.get("conditions"))
	d.ownLaws(root.get("law"))
	d.ownPartitions(root.get("partition"))
	s.Thresholds = d.thresholds(root.get("threshold"))
	s.Limits = d.limits(root.get("limits"), s.Thresholds)
	s.Sharing = d.sharing(root.get("history"))
	seen := map[string]int{}
	s.Paths = d.paths(root, seen)
	s.Families = d.families(root, seen)
	for _, i := range d.inUse() {
		if i > 1 {
			s.Settings = append(s.Settings, d.settings[i-1])
		}
	}
	d.openCrystals(root, s)
	d.shareSlopes(s.Crystals)
	d.noteUnused()
	if d.faults == 0 {
		d.together(s)
	}
	return s
}

// confidence reads a probability in per cent.
func (d *decoder) confidence(n *node) float64 {
	const remedy = `write per cent above 0 and below 100, such as "95 %"`
	if n.kind == numberNode {
		d.report(n, "a number without a unit", fmt.Sprintf("write it in quotes, such as %q", "95 %"))
		return defaultConfidence
	}
	text, ok := d.text(n, remedy)
	if !ok {
		return defaultConfidence
	}
	q, err := thermal.ReadQuantity(text, thermal.Concentration)
	if err != nil || q.Unit != "%" || !(q.Value > 0 && q.Value < 100) {
		d.report(n, "not a confidence", remedy)
		return defaultConfidence
	}
	return q.Value / 100
}

func (d *decoder) thresholds(n *node) []Threshold {
	if n == nil {
		return nil
	}
	var out []Threshold
	seen := map[string]int{}
	for _, t := range d.tables(n, `begin each threshold with "[[threshold]]"`) {
		d.keys(t, thresholdTable)
		var th Threshold
		if v := d.need(t, "name", `write a name, such as name = "lock-up"`); v != nil {
			var ok bool
			if th.Name, ok = d.name(v, `write a name, such as "lock-up"`); ok {
				d.unique(v, th.Name, seen)
			}
		}
		th.Temp, _ = d.quantity(d.need(t, "temperature", `write a temperature, such as temperature = "750 C"`), temperature)
		out = append(out, th)
	}
	return out
}

// err returns the problems found, those of the study first and in the order of
// its lines, then those of each other file in the order of theirs. Beyond
// maxProblems, it only says how many more there are.
func (d *decoder) err() error {
	rank := map[string]int{d.file: 0}
	for _, e := range d.found {
		if _, known := rank[e.File]; !known {
			rank[e.File] = len(rank)
		}
	}
	slices.SortStableFunc(d.found, func(a, b *thermal.InputError) int {
		return cmp.Or(rank[a.File]-rank[b.File], a.Line-b.Line, a.Col-b.Col)
	})
	kept := len(d.found)
	d.found = slices.CompactFunc(d.found, func(a, b *thermal.InputError) bool { return *a == *b })
	all := d.faults - (kept - len(d.found))
	var list []error
	for _, e := range d.found[:min(len(d.found), maxProblems)] {
		list = append(list, e)
	}
	if more := all - maxProblems; more > 0 {
		list = append(list, &thermal.InputError{File: d.file, Problem: "and " + count(more, "more problem"), Remedy: "mend these first"})
	}
	return errors.Join(list...)
}
