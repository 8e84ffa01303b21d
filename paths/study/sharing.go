package study

import "bankfire/thermal"

// Sharing says how much of a history the crystals of a study have in common. The
// zero value is all of it.
type Sharing struct {
	Each  bool            // nothing: each crystal has a history of its own
	From  *thermal.Moment // all that comes after this moment of a path, unless Each; nil is all
	Place thermal.Place   // of From
}

// Whole reports whether all crystals see one path.
func (s *Sharing) Whole() bool { return !s.Each && s.From == nil }

// Start is the time, s from the start of a path, from which the crystals share it.
// The error is an *thermal.InputError about a moment that the path does not have,
// or that is its end.
func (s *Sharing) Start(h *thermal.History) (float64, error) {
	t, err := h.Moment(*s.From)
	if err == nil {
		_, err = h.From(t)
	}
	if in := inputError(err, s.Place); in != nil {
		in.Value = s.From.Text
		return 0, in
	}
	return t, err
}

// sharing reads how much of a history the crystals have in common.
func (d *decoder) sharing(n *node) Sharing {
	const example = `write history = "shared" (the default), "each" or { shared_from = "start of wake" }`
	switch {
	case n == nil:
		return Sharing{}
	case n.kind == tableNode:
		d.keys(n, historyTable)
		v := d.need(n, "shared_from", example)
		m, _ := d.pathMoment(v)
		if v == nil {
			return Sharing{}
		}
		return Sharing{From: m, Place: d.place(v)}
	}
	text, ok := d.text(n, example)
	switch {
	case !ok || text == "shared":
	case text == "each":
		return Sharing{Each: true}
	default:
		d.reportWord(n, "no way to share a history", []string{"shared", "each"}, example)
	}
	return Sharing{}
}

// shares notes which paths cannot be shared from the moment from which crystals
// share theirs. If none can it is a problem.
func (d *decoder) shares(s *Study) {
	if len(s.Crystals) == 1 && !s.Sharing.Whole() {
		d.note("history: there is one crystal, so that there is nothing to share")
	}
	if len(s.Families) > 0 && !s.Sharing.Whole() {
		d.note("history: each member of a family is judged as the one path of all crystals")
	}
	if s.Sharing.From == nil || len(s.Paths) == 0 {
		return
	}
	lack := d.lacking(s.Paths, func(p *Path) *thermal.InputError {
		_, err := s.Sharing.Start(p.History)
		return inputError(err, s.Sharing.Place)
	})
	for i := range s.Paths {
		if why := lack[&s.Paths[i]]; why != nil {
			d.note("history: path %q can only be that of all crystals, since nothing of it comes after %q: %s", s.Paths[i].Name, s.Sharing.From.Text, why.Problem)
		}
	}
}

// Barred returns why the path is ruled out: every limit that it breaks, without a
// crystal, and what its crystals cannot have seen. That rules it out for all if they
// share it whole, and else for the crystal that is named. The error is that of
// Limits.Barred.
func (s *Study) Barred(p *Path) ([]Bar, error) {
	var why []Bar
	for _, b := range p.Barred {
		if s.Sharing.Whole() {
			b.Crystal = ""
		}
		why = append(why, b)
	}
	broken, err := s.Limits.Barred(p.History)
	for _, b := range broken {
		why = append(why, Bar{Why: b})
	}
	return why, err
}

// Whys are the reasons in words.
func Whys(bars []Bar) []string {
	var out []string
	for _, b := range bars {
		out = append(out, b.Why)
	}
	return out
}
