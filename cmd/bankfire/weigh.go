package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"path/filepath"
	"time"

	"github.com/spf13/pflag"

	"bankfire/cmd/bankfire/internal/results"
	"bankfire/paths"
	"bankfire/paths/study"
	"bankfire/thermal"
)

// weighCommand is `bankfire weigh`.
func weighCommand() *command { return newWeighCommand(results.OnDisk{}) }

// newWeighCommand is `bankfire weigh` with its results on that disk.
func newWeighCommand(disk results.Disk) *command {
	w := &weigh{output: output{disk: disk}}
	return &command{
		name:  "weigh",
		args:  "STUDY",
		short: "give every path and family of a study its verdict",
		long: "Runs every path of the study against the measured traverse and gives each its verdict:\n" +
			"reproduces, too sharp (the path diffuses too little), too smooth (too much) or wrong shape\n" +
			"(no amount of diffusion would do), with the factor by which D would have to be multiplied\n" +
			"for the path to agree best. Of a family it draws the members, gives each its verdict and says what\n" +
			"those that reproduce have in common. bankfire help verdicts explains these and the columns of\n" +
			"the report.\n\n" +
			"With --out, what is found of the members of families is kept in the folder DIR.parts until all\n" +
			"is done. A run that is broken off goes on with --resume; bankfire gather joins the parts of a\n" +
			"run that was divided with --part, and shows what there is of one that was broken off.",
		examples: []example{
			{"bankfire weigh study.toml", "print the verdicts"},
			{"bankfire weigh study.toml --out results", "and write tables and a figure to a new folder"},
			{"bankfire weigh study.toml --json", "print the summary for another program"},
		},
		least: 1, most: 1,
		flags: w.define,
		words: map[string][]string{"WHICH": {keepSurvivors, keepAll}, "METHOD": {methodTable, methodSteps}},
		run:   w.run,
	}
}

// weigh is one run of the command.
type weigh struct {
	output
	keep, method, part string
	resume             bool
}

func (o *weigh) define(set *pflag.FlagSet) {
	o.output.define(set)
	set.BoolVar(&o.resume, "resume", false, "go on with a run over families that was broken off")
	set.StringVar(&o.part, "part", "", "screen only part `K/N` of the members of families, for gather to join")
	set.StringVar(&o.keep, "keep", keepSurvivors, "write rows of `WHICH` members: survivors, all, or so many of lowest chi-square")
	set.StringVar(&o.method, "method", "", "run members by `METHOD`, table or steps, not by whichever serves")
}

func (o *weigh) run(ctx context.Context, s streams, operands []string) error {
	log := &runLog{made: thisProgram(), started: time.Now(), jobs: o.jobs}
	p, err := o.check()
	if err != nil {
		return err
	}
	var folder *results.Folder
	if !p.divided {
		if folder, err = o.open(); err != nil {
			return err
		}
	}
	st, err := study.Read(operands[0])
	if err != nil {
		return err
	}
	switch {
	case len(st.Families) == 0:
		err = o.withoutFamilies(ctx, s, st, folder, log)
	case !o.flags.Changed("out"):
		err = o.withoutParts(ctx, s, st, p, log)
	default:
		err = o.inParts(ctx, s, st, p, folder, log)
	}
	return interrupted(err)
}

// plan is what the flags ask for, read.
type plan struct {
	options paths.ScreenOptions
	share   share
	divided bool // --part was given
}

// check reads the flags and refuses those that cannot be meant.
func (o *weigh) check() (*plan, error) {
	if err := o.output.check(); err != nil {
		return nil, err
	}
	for _, name := range []string{"part", "resume", "keep"} {
		if o.flags.Changed(name) && !o.flags.Changed("out") {
			return nil, &thermal.InputError{Field: "--" + name, Problem: "there is no folder to write to", Remedy: "add --out DIR"}
		}
	}
	p := &plan{share: share{1, 1}, divided: o.flags.Changed("part")}
	p.options.Jobs = o.jobs
	var err error
	if p.divided {
		if p.share, err = parseShare(o.part); err != nil {
			return nil, err
		}
		for _, name := range []string{"json", "replace"} {
			if o.flags.Changed(name) {
				return nil, &thermal.InputError{Field: "--" + name, Problem: "a part makes no results", Remedy: "give it to bankfire gather"}
			}
		}
	}
	if p.options.Keep, err = parseKeep(o.keep); err != nil {
		return nil, err
	}
	if !o.flags.Changed("method") {
		o.method = methodEither
	} else if o.method == methodEither {
		o.method = ""
	}
	p.options.Method, err = parseMethod(o.method)
	return p, err
}

// withoutFamilies weighs the paths of a study that has no families.
func (o *weigh) withoutFamilies(ctx context.Context, s streams, st *study.Study, folder *results.Folder, log *runLog) error {
	for _, name := range []string{"part", "resume", "keep", "method"} {
		if o.flags.Changed(name) {
			return &thermal.InputError{File: st.File, Field: "--" + name, Problem: "the study has no family", Remedy: "leave it out"}
		}
	}
	r, err := paths.Weigh(ctx, st, o.jobs)
	if err != nil {
		return err
	}
	return o.give(ctx, s.out, folder, r, nil, log)
}

// withoutParts weighs a study of which nothing is written.
func (o *weigh) withoutParts(ctx context.Context, s streams, st *study.Study, p *plan, log *runLog) error {
	screening, err := paths.NewScreening(ctx, st, p.options)
	if err != nil {
		return err
	}
	tallies := make([]paths.Tally, len(st.Families))
	shown := o.show(s.err, paths.MembersIn(st, 0, screening.Blocks()), screening.Done)
	err = screening.Screen(ctx, 0, screening.Blocks(), func(b *paths.Block) error {
		tallies[b.Family].Add(&b.Tally)
		return nil
	})
	shown.end()
	if err != nil {
		return err
	}
	r, err := screening.Finish(ctx, tallies)
	if err != nil {
		return err
	}
	return o.give(ctx, s.out, nil, r, nil, log)
}

// show shows the progress of a screening.
func (o *weigh) show(w io.Writer, members int64, done func() int64) *progress {
	if o.quiet {
		w = io.Discard
	}
	return startProgress(w, "members", members, done)
}

// inParts weighs a study, or a part of it, by way of a journal.
func (o *weigh) inParts(ctx context.Context, s streams, st *study.Study, p *plan, folder *results.Folder, log *runLog) error {
	dir := filepath.Clean(o.out) + partsSuffix
	part, err := openPart(o.disk, dir, newHeader(st, log.made.Build, o.keep, o.method, p.share), o.resume)
	if err != nil {
		return err
	}
	screening, err := o.screen(ctx, s, st, p, part)
	if err == nil && !p.divided {
		err = o.finish(ctx, s.out, screening, folder, &parts{disk: o.disk, study: st, keep: p.options.Keep, files: []string{part.name}}, log)
	}
	switch {
	case err != nil:
		return errors.Join(o.goOn(err, st, part), part.close())
	case p.divided:
		return errors.Join(o.saySo(s.out, st, part), part.close())
	}
	if err := part.remove(); err != nil {
		return fmt.Errorf("results written, but the parts that they were made of not removed: %w", err)
	}
	return nil
}

// screen screens the blocks that the part does not have yet, and says so if it has some.
func (o *weigh) screen(ctx context.Context, s streams, st *study.Study, p *plan, part *part) (*paths.Screening, error) {
	h, next := part.journal.Header(), part.journal.Next()
	all, there := paths.MembersIn(st, h.From, h.To), paths.MembersIn(st, h.From, next)
	if part.begun {
		o.say(s.err, "%s: %d of %s are there already%s", part.name, there, counted(all, "member"), lostText(part.lost))
	}
	if p.divided && next == h.To {
		return nil, nil
	}
	screening, err := paths.NewScreening(ctx, st, p.options)
	if err != nil {
		return nil, err
	}
	need, err := expectDisk(ctx, st, screening, next, h.To)
	if err != nil {
		return nil, err
	}
	if text := need.text(part.dir, p.divided); text != "" {
		o.say(s.err, "%s", text)
	}
	looked := screening.Done()
	shown := o.show(s.err, all-there, func() int64 { return screening.Done() - looked })
	defer shown.end()
	return screening, part.screen(ctx, screening)
}

// finish makes the result of the one part, and gives it out.
func (o *weigh) finish(ctx context.Context, w io.Writer, s *paths.Screening, folder *results.Folder, from *parts, log *runLog) error {
	tallies, err := from.tallies(ctx)
	if err != nil {
		return err
	}
	r, err := s.Finish(ctx, tallies)
	if err != nil {
		return err
	}
	return o.give(ctx, w, folder, r, from, log)
}

// lostText says that the end of a part was cut.
func lostText(bytes int64) string {
	if bytes == 0 {
		return ""
	}
	return fmt.Sprintf(", and the end of it, %d bytes, was not whole and is made again", bytes)
}

// goOn is the error that ended a run, with what can be done with the part that is there.
func (o *weigh) goOn(err error, st *study.Study, part *part) error {
	h, next := part.journal.Header(), part.journal.Next()
	in := (*thermal.InputError)(nil)
	if next == h.From || errors.As(err, &in) {
		return err
	}
	if errors.Is(err, context.Canceled) {
		err = fmt.Errorf("interrupted after %d of %s", paths.MembersIn(st, h.From, next), counted(paths.MembersIn(st, h.From, h.To), "member"))
	}
	return hinted{err, fmt.Sprintf("the same command with --resume goes on; bankfire gather %s --partial --out DIR shows what there is",
		commandLine([]string{st.File, part.dir}))}
}

// saySo says that a part is written.
func (o *weigh) saySo(w io.Writer, st *study.Study, part *part) error {
	if o.quiet {
		return nil
	}
	h := part.journal.Header()
	_, err := fmt.Fprintf(w, "part %d of %d, %s, is written to %s; when all parts are: bankfire gather %s\n", h.Part, h.Parts,
		counted(paths.MembersIn(st, h.From, h.To), "member"), part.name, commandLine([]string{st.File, part.dir, "--out", o.out}))
	return err
}

// interrupted says in our words that the user ended a run.
func interrupted(err error) error {
	if errors.Is(err, context.Canceled) {
		return errors.New("interrupted")
	}
	return err
}
