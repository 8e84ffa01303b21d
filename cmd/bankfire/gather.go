package main

import (
	"context"
	"errors"
	"fmt"
	"io/fs"
	"path/filepath"
	"slices"
	"time"

	"github.com/spf13/pflag"

	"bankfire/cmd/bankfire/internal/journal"
	"bankfire/cmd/bankfire/internal/results"
	"bankfire/paths"
	"bankfire/paths/study"
	"bankfire/thermal"
)

// gatherCommand is `bankfire gather`.
func gatherCommand() *command { return newGatherCommand(results.OnDisk{}) }

// newGatherCommand is `bankfire gather` with its results on that disk.
func newGatherCommand(disk results.Disk) *command {
	g := &gather{output: output{disk: disk}}
	return &command{
		name:  "gather",
		args:  "STUDY DIR",
		short: "join the parts of a study that was weighed in parts",
		long: "Joins the parts that bankfire weigh STUDY --part K/N --out results left in the folder DIR,\n" +
			"results.parts, and writes the results of the whole: the same as those of a run that was not\n" +
			"divided. The parts may have been made on several machines, by the same program, and copied into\n" +
			"one folder, where they stay. All must be there and whole; with --partial results are made of what\n" +
			"there is, also of a run that was broken off.",
		examples: []example{
			{"bankfire gather study.toml results.parts --out results", "join the parts"},
			{"bankfire gather study.toml results.parts --out so-far --partial", "see what there is so far"},
		},
		least: 2, most: 2,
		flags: g.define,
		run:   g.run,
	}
}

// gather is one run of the command.
type gather struct {
	output
	partial bool
}

func (o *gather) define(set *pflag.FlagSet) {
	o.output.define(set)
	set.BoolVar(&o.partial, "partial", false, "make do with the blocks that are there")
}

func (o *gather) run(ctx context.Context, s streams, operands []string) error {
	log := &runLog{made: thisProgram(), started: time.Now(), jobs: o.jobs}
	if err := o.check(); err != nil {
		return err
	}
	if !o.flags.Changed("out") {
		return &thermal.InputError{Field: "--out", Problem: "there is no folder to write to", Remedy: "add --out DIR"}
	}
	folder, err := o.open()
	if err != nil {
		return err
	}
	st, err := study.Read(operands[0])
	if err != nil {
		return err
	}
	if len(st.Families) == 0 {
		return &thermal.InputError{File: st.File, Problem: "the study has no family, so it has no parts", Remedy: "use bankfire weigh"}
	}
	found, err := o.find(st, operands[1], log.made.Build)
	if err != nil {
		return err
	}
	return interrupted(o.join(ctx, s, st, found, folder, log))
}

// join gives out the result of the parts.
func (o *gather) join(ctx context.Context, s streams, st *study.Study, found *found, folder *results.Folder, log *runLog) error {
	from, err := found.parts(o.disk, st, o.partial)
	if err != nil {
		return err
	}
	tallies, err := from.tallies(ctx) // before anything is computed: a part may be unfinished
	if err != nil {
		return err
	}
	noteMissing(st, tallies)
	method, err := parseMethod(found.headers[0].Method)
	if err != nil {
		return err
	}
	screening, err := paths.NewScreening(ctx, st, paths.ScreenOptions{Keep: from.keep, Jobs: o.jobs, Method: method})
	if err != nil {
		return err
	}
	r, err := screening.Finish(ctx, tallies)
	if err != nil {
		return err
	}
	return o.give(ctx, s.out, folder, r, from, log)
}

// noteMissing notes how much of the study was not screened.
func noteMissing(st *study.Study, tallies []paths.Tally) {
	for i := range tallies {
		f := &st.Families[i]
		if n := tallies[i].Count(); n < f.Count() {
			st.Notes = append(st.Notes, fmt.Sprintf("partial results: %d of the %d members of family %s were screened", n, f.Count(), quoted(f.Name)))
		}
	}
}

// found are the files of a folder that are parts of one run.
type found struct {
	dir     string
	files   []string // by their part
	headers []journal.Header
}

// find looks for the parts of a run over the study, by the build, in the folder.
func (o *gather) find(st *study.Study, dir, build string) (*found, error) {
	names, err := partNames(dir)
	if err != nil {
		return nil, &thermal.InputError{File: dir, Problem: "cannot be read: " + lastWords(err), Remedy: "name the folder of the parts"}
	}
	if len(names) == 0 {
		return nil, &thermal.InputError{File: dir, Problem: "holds no parts of a run", Remedy: "name the folder of the parts, results" + partsSuffix}
	}
	f := &found{dir: dir}
	for _, name := range names {
		name = filepath.Join(dir, name)
		h, err := readHeader(o.disk, name)
		if err != nil {
			return nil, err
		}
		if err := f.add(st, build, name, h); err != nil {
			return nil, err
		}
	}
	if err := f.complete(st); err != nil && !o.partial {
		return nil, err
	}
	return f, nil
}

func readHeader(disk results.Disk, name string) (*journal.Header, error) {
	file, err := disk.Open(name)
	if err != nil {
		return nil, err
	}
	defer file.Close() // it was only read
	in, err := journal.Read(file)
	if err != nil {
		return nil, partError(name, err)
	}
	return &in.Header, nil
}

// add adds a part, unless it is of another run than those before.
func (f *found) add(st *study.Study, build, name string, h *journal.Header) error {
	first := *h
	if len(f.headers) > 0 {
		first = f.headers[0]
	}
	want := newHeader(st, build, first.Keep, first.Method, share{h.Part, first.Parts})
	if other := h.Other(&want); other != "" {
		remedy := "gather the parts of one run"
		if len(f.headers) == 0 {
			remedy = "name the study and the program that made it"
		}
		return &thermal.InputError{File: name, Problem: other, Remedy: remedy}
	}
	at, twice := slices.BinarySearchFunc(f.headers, h.Part, func(h journal.Header, part int64) int { return int(h.Part - part) })
	if twice {
		return &thermal.InputError{File: name, Problem: "is the same part as " + f.files[at], Remedy: "move one of the two away"}
	}
	f.headers, f.files = slices.Insert(f.headers, at, *h), slices.Insert(f.files, at, name)
	return nil
}

// complete checks that all parts are there.
func (f *found) complete(st *study.Study) error {
	want := int64(1)
	for _, h := range f.headers {
		if h.Part != want {
			break
		}
		want++
	}
	parts := f.headers[0].Parts
	if want > parts {
		return nil
	}
	return &thermal.InputError{File: f.dir, Problem: fmt.Sprintf("part %d of %d is not there", want, parts),
		Remedy: fmt.Sprintf("make it by bankfire weigh %s --part %d/%d, or add --partial", commandLine([]string{st.File}), want, parts)}
}

// parts are those that were found.
func (f *found) parts(disk results.Disk, st *study.Study, partial bool) (*parts, error) {
	keep, err := parseKeep(f.headers[0].Keep)
	if err != nil {
		return nil, err
	}
	return &parts{disk: disk, study: st, keep: keep, files: f.files, partial: partial}, nil
}

// lastWords is what is wrong, without the name and what was tried.
func lastWords(err error) string {
	if path := (*fs.PathError)(nil); errors.As(err, &path) {
		return path.Err.Error()
	}
	return err.Error()
}
