package study

import (
	"slices"

	"bankfire/thermal"
)

// Table is one kind of table of a study file.
type Table struct {
	// Name is the dotted key under which it stands, "crystal.element.traverse";
	// where tables of several kinds may stand, the key that tells them apart
	// follows: "path.legs hold". The top level is "".
	Name string
	Keys []string // all that it may have, in the order in which messages list them
}

// Tables returns every kind of table that a study may have, those inside others
// after them.
func Tables() []Table {
	var all []Table
	for _, t := range tables {
		all = append(all, Table{t.Name, slices.Clone(t.Keys)})
		if t.Name == tables[pathTable].Name {
			for _, kind := range legKinds() {
				of := "path.legs "
				if kind.kind == thermal.SpecPulses {
					of = "family.legs "
				}
				all = append(all, Table{of + kind.needs[0], kind.keys()})
			}
		}
	}
	return all
}

// tableKind tells the kinds of table apart, but for legs; see legKinds.
type tableKind int

const (
	topTable tableKind = iota
	thresholdTable
	limitsTable
	lifeTable
	aboveTable
	betweenTable
	historyTable
	conditionsTable
	ownLawTable
	ownLawHostTable
	ownLawOwnTable
	partitionTable
	pathTable
	duringTable
	familyTable
	drawTable
	varyTable
	crystalTable
	zoneTable
	hostTable
	hostErrorTable
	dissolvesTable
	growsTable
	innerTable
	elementTable
	lawTable
	lawHostTable
	lawOwnTable
	directionTable
	switchTable
	switchAtTable
	likeTable
	startTable
	heldTable
	givenTable
	sealedTable
	followingTable
	transferTable
	rateTable
	traverseTable
	errorTable
)

// tables are the kinds of table with the keys that the decoder knows. It is
// never changed.
var tables = [...]Table{
	topTable:        {"", []string{"title", "confidence", "eruption", "conditions", "threshold", "limits", "history", "law", "partition", "path", "family", "seed", "crystal"}},
	thresholdTable:  {"threshold", []string{"name", "temperature"}},
	limitsTable:     {"limits", []string{"life", "lowest", "highest", "above", "between"}},
	lifeTable:       {"limits.life", []string{"shortest", "longest"}},
	aboveTable:      {"limits.above", []string{"threshold", "temperature", "shortest", "longest", "counts"}},
	betweenTable:    {"limits.between", []string{"from", "to", "shortest", "longest"}},
	historyTable:    {"history", []string{"shared_from"}},
	conditionsTable: {"conditions", []string{"pressure", "fO2", "aTiO2", "aSiO2"}},
	ownLawTable:     {"law", []string{"name", "D0", "E", "host", "own", "sigma", "range", "citation", "caution"}},
	ownLawHostTable: {"law.host", []string{"ln_slope", "slope_of", "at"}},
	ownLawOwnTable:  {"law.own", []string{"ln_slope", "at"}},
	partitionTable:  {"partition", []string{"name", "A", "B", "at"}},
	pathTable:       {"path", []string{"name", "legs", "eruption"}},
	duringTable:     {"path.legs.conditions", []string{"pressure", "fO2", "aTiO2", "aSiO2"}},
	familyTable:     {"family", []string{"name", "legs", "eruption", "draw", "seed", "vary"}},
	drawTable:       {"family.draw", []string{"method", "count"}},
	varyTable:       {"family.vary", []string{"from", "to", "spread", "choices"}},
	crystalTable:    {"crystal", []string{"name", "mineral", "shape", "inner", "zones", "host", "host_law", "exists_from", "dissolves", "grows", "element"}},
	zoneTable:       {"crystal.zones", []string{"name", "width", "host", "times", "added"}},
	hostTable:       {"crystal.host", []string{"file", "position", "zero", "value", "unit", "smooth", "width", "error"}},
	hostErrorTable:  {"crystal.host.error", errorKeys()},
	dissolvesTable:  {"crystal.dissolves", []string{"above", "longer"}},
	growsTable:      {"crystal.grows", []string{"rate", "from", "until"}},
	innerTable:      {"crystal.inner", []string{"radius", "rim"}},
	elementTable:    {"crystal.element", []string{"name", "law", "partition", "start", "rim", "traverse"}},
	lawTable:        {"crystal.element.law", []string{"D0", "E", "host", "own", "times", "sigma", "range", "citation", "caution"}},
	lawHostTable:    {"crystal.element.law.host", []string{"ln_slope", "slope_of", "at"}},
	lawOwnTable:     {"crystal.element.law.own", []string{"ln_slope", "at"}},
	directionTable:  {"crystal.element.law a", []string{"a", "b", "c", "ratio", "normal", "times"}},
	switchTable:     {"crystal.element.law above", []string{"above", "below", "at", "times"}},
	switchAtTable:   {"crystal.element.law.at", []string{"fO2", "temperature"}},
	likeTable:       {"crystal.element.law like", []string{"like", "times", "slope_sigma", "at"}},
	startTable:      {"crystal.element.start", []string{"name", "zones", "melt", "solubility", "temperature", "scaled", "lowest", "highest", "smooth", "width", "edge", "unit"}},
	heldTable:       {"crystal.element.rim held", []string{"held", "unit", "from"}},
	givenTable:      {"crystal.element.rim given", []string{"given", "time", "temperature", "value", "counts", "k", "unit", "from"}},
	sealedTable:     {"crystal.element.rim sealed", []string{"sealed", "from"}},
	followingTable:  {"crystal.element.rim following", []string{"following", "melt", "temperature", "value", "k", "unit", "from"}},
	transferTable:   {"crystal.element.rim transfer", []string{"transfer", "k", "unit", "from"}},
	rateTable:       {"crystal.element.rim.k", []string{"k0", "E"}},
	traverseTable: {"crystal.element.traverse", []string{"file", "position", "zero", "origin", "tilt", "value", "unit", "error",
		"scatter", "overlap", "below", "spot", "window", "skip"}},
	errorTable: {"crystal.element.traverse.error", errorKeys()},
}

func errorKeys() []string { return []string{"column", "sigmas", "analyses", "size", "floor"} }
