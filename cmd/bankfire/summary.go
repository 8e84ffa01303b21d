package main

// summarySchema numbers the form of the summaries. It grows by one when a
// field that others rely on changes its meaning or goes.
const summarySchema = 1

// weighing is the summary of `bankfire weigh`, which summary.schema.json
// describes. Names of numbers end in their unit, SI but for what is in the
// element's own unit; an open end of an interval, and what does not exist, is
// null. Runs of one build on equal inputs have equal summaries.
type weighing struct {
	Schema       int             `json:"schema"`
	Program      program         `json:"program"`
	Title        string          `json:"title"`
	Confidence   float64         `json:"confidence"` // of the verdicts, 0 to 1
	Year         float64         `json:"year_s"`     // what a year is taken for
	Seed         *uint64         `json:"seed"`       // of all families; null if there are none or each has its own
	Inputs       []input         `json:"inputs"`     // the study, then the files it names
	Conditions   []string        `json:"conditions"` // as the study has them, buffers with their sources
	Laws         []lawUsed       `json:"laws"`
	Partitions   []lawUsed       `json:"partitions"`
	Solubilities []lawUsed       `json:"solubilities"`
	Own          []ownBest       `json:"own_best"` // one a measured element
	Paths        []weighedPath   `json:"paths"`
	History      history         `json:"history"`
	Edges        []edgeOrigin    `json:"edges"` // of crystals of which elements share an open width of their edges
	Families     []weighedFamily `json:"families"`
	Notes        []string        `json:"notes"`
	Files        []string        `json:"files"` // of the folder, written by the same run, this one included; none if there is no folder
}

// program says what computed a summary.
type program struct {
	Name    string `json:"name"`
	Version string `json:"version"`
	Build   string `json:"build"` // SHA-256 of the executable, hexadecimal, or "unknown"
}

type input struct {
	Name   string `json:"name"` // as the study writes it
	SHA256 string `json:"sha256"`
}

// lawUsed is a law that a measured element diffused by, the partition relation by
// which it followed its host, or its rim a melt, or the solubility relation of its rim.
type lawUsed struct {
	Key        string       `json:"key"` // of the catalogue, a [[law]] or a [[partition]]; "" if the law stands with its element
	Citation   string       `json:"citation"`
	Confidence string       `json:"confidence"` // in its constants
	Elements   []elementKey `json:"elements"`
}

type elementKey struct {
	Crystal string `json:"crystal"`
	Element string `json:"element"`
}

// finding holds the fields that paths and their profiles share. The numbers of
// a path that was not run are null, as is the tail where nothing was judged.
type finding struct {
	ShiftFactor *float64    `json:"shift_factor"`
	Shift68     [2]*float64 `json:"shift_68"`
	Shift95     [2]*float64 `json:"shift_95"`
	Tail        *float64    `json:"tail"`
	Misfit      *float64    `json:"misfit"`            // chi-square
	AboveBest   *float64    `json:"misfit_above_best"` // above that of the own best fits
	Points      int         `json:"points"`
	Degrees     int         `json:"degrees_of_freedom"`
	Notes       []string    `json:"notes"`
}

type weighedPath struct {
	Name    string `json:"name"`
	Verdict string `json:"verdict"`
	finding
	WithLaws *withLaws        `json:"with_law_errors"` // null if the path is barred
	LifeS    float64          `json:"life_s"`
	Above    []timeAbove      `json:"time_above"`
	Crystals []judgedCrystal  `json:"crystals"`
	Scatter  *scatter         `json:"scatter"` // null with fewer than three crystals that have a say
	Chance   *chance          `json:"chance"`  // null with fewer than two crystals
	Odds     []demand         `json:"at_odds"` // pairs that disagree, most first
	Profiles []weighedProfile `json:"profiles"`
}

// demand is by how much two profiles disagree that pass alone.
type demand struct {
	Of         elementKey  `json:"of"`
	RelativeTo elementKey  `json:"relative_to"`
	Ratio      float64     `json:"ratio"` // of what D has to be multiplied by
	Ratio68    [2]*float64 `json:"ratio_68"`
	Ratio95    [2]*float64 `json:"ratio_95"`
	ChiSq      float64     `json:"chi_square"` // with one multiplier, above that with one each
}

// ownBest is the best fit of one profile by itself; its numbers are null if no
// path was run.
type ownBest struct {
	elementKey
	Path        string   `json:"path"` // along which it was found, "" if no path was run
	ShiftFactor *float64 `json:"shift_factor"`
	Misfit      *float64 `json:"misfit"`
	Degrees     int      `json:"degrees_of_freedom"`
	Tail        *float64 `json:"tail"`
	Runs        *float64 `json:"runs_probability"`
	Scatter     float64  `json:"extra_scatter"` // in the element's unit
	OutlierLine *int     `json:"outlier_line"`
	Findings    []string `json:"findings"`
}

// withLaws is the verdict with the laws' own errors allowed for; its numbers are
// null where nothing was judged.
type withLaws struct {
	Verdict string            `json:"verdict"`
	Tail    *float64          `json:"tail"`
	Misfit  *float64          `json:"misfit"`
	Passes  bool              `json:"passes_with_some_error"`
	Leaning []lawLeaning      `json:"leaning"`       // the smallest with which it passes
	Others  []constantLeaning `json:"other_leaning"` // those of other constants, with these
}

type constantLeaning struct {
	Of       string  `json:"of"`
	Constant string  `json:"constant"`
	Sigma    float64 `json:"sigma"`
}

type lawLeaning struct {
	Law   string  `json:"law"`
	Sigma float64 `json:"sigma"` // of the two together
	LnD   float64 `json:"D_sigma"`
	E     float64 `json:"E_sigma"`
}

type timeAbove struct {
	Threshold   string  `json:"threshold"`
	Temperature float64 `json:"temperature_K"`
	Time        float64 `json:"time_s"`
}

// judgedCrystal is one crystal on a path, its measured elements jointly.
type judgedCrystal struct {
	Crystal string `json:"crystal"`
	Verdict string `json:"verdict"`
	finding
	Starts []triedStart `json:"starts_tried"` // none where its elements have no choice of starts
}

// triedStart is one combination of the starts that a crystal's elements may have had.
type triedStart struct {
	Starts      []elementStart `json:"starts"` // of the elements that have a choice
	Taken       bool           `json:"taken"`
	Verdict     string         `json:"verdict"`
	ShiftFactor *float64       `json:"shift_factor"`
	Tail        *float64       `json:"tail"`
	Misfit      *float64       `json:"misfit"`
	AboveTaken  *float64       `json:"misfit_above_taken"`
	Degrees     int            `json:"degrees_of_freedom"`
}

// edgeOrigin compares growth and diffusion as what made the edges of a crystal as wide
// as they are.
type edgeOrigin struct {
	Crystal   string   `json:"crystal"`
	Boundary  *string  `json:"boundary"` // its zones, "core and mantle"; null is all of one width
	Elements  []string `json:"elements"`
	WidthM    float64  `json:"growth_width_m"`
	Growth    float64  `json:"growth_misfit"`
	Diffusion float64  `json:"diffusion_misfit"`
	Degrees   int      `json:"degrees_of_freedom"`
	Prefers   *string  `json:"prefers"` // "growth" or "diffusion"; null where the data do not tell
}

type elementStart struct {
	Element string `json:"element"`
	Start   string `json:"start"`
}

// history says how much of their history the crystals share, and what follows.
type history struct {
	Sharing  string       `json:"sharing"` // "shared", "each" or "shared from"
	From     *string      `json:"from"`    // the moment of "shared from"
	Crystals []reproduced `json:"crystals"`
	Groups   []group      `json:"groups"` // of "shared from"
}

// reproduced is by which paths one crystal is reproduced, by itself.
type reproduced struct {
	Crystal string   `json:"crystal"`
	Paths   []string `json:"reproduced_by"`
}

// group is paths that are the same from the moment on, with their best
// combination, a path for each crystal.
type group struct {
	Paths        []string `json:"paths"`
	Combinations float64  `json:"combinations"`
	Verdict      string   `json:"verdict"` // of the best, as are the numbers
	finding
	Choices []choice `json:"choices"`
}

type choice struct {
	Crystal string   `json:"crystal"`
	Path    *string  `json:"path"` // null if the crystal bars all
	Also    []string `json:"also"` // with which the combination passes as well
}

// scatter is that of the crystals' amounts of diffusion about one for all.
type scatter struct {
	Crystals    int         `json:"crystals"` // that have a say
	ShiftFactor float64     `json:"common_shift_factor"`
	Shift68     [2]*float64 `json:"common_shift_68"`
	Shift95     [2]*float64 `json:"common_shift_95"`
	ChiSq       float64     `json:"chi_square"`
	Degrees     int         `json:"degrees_of_freedom"`
	Tail        float64     `json:"tail"`
}

// chance says how many crystals fail, and would by chance along a true path.
type chance struct {
	Judged   int     `json:"judged"`
	Failed   int     `json:"failed"`
	Expected float64 `json:"expected_by_chance"`
	Most     int     `json:"at_most_by_chance"` // in 95 of 100 studies
	Worst    float64 `json:"smallest_tail_probability"`
}

type weighedProfile struct {
	elementKey
	Verdict string `json:"verdict"`
	finding
	G          *float64     `json:"diffusion_integral_m2"`
	StandIn    *float64     `json:"stand_in_temperature_K"`
	NumErr     float64      `json:"numerical_error_sigma"`
	FreeValues []fittedFree `json:"free_values"`
}

type fittedFree struct {
	Name  string   `json:"name"`
	Value float64  `json:"value"`
	Sigma *float64 `json:"sigma"` // null where the data do not see the value
	Unit  string   `json:"unit"`
	Prior bool     `json:"has_prior"`
	AtEnd bool     `json:"at_end_of_range"`
}
