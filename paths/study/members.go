package study

import (
	"fmt"
	"strconv"
	"strings"

	"bankfire/thermal"
)

// mostProbes is how many members of a family are looked at while a study is read.
const mostProbes = 16

// probes are the first members of each family that are paths at all. A family
// without any among its first is a problem.
func (d *decoder) probes(families []Family) []Path {
	var out []Path
	for i := range families {
		f := &families[i]
		found := 0
		var why string
		for k := int64(0); k < f.Count() && found < mostProbes && k < mostProbes*mostProbes; k++ {
			c := new(Candidate)
			if f.At(c, k); c.Barred == "" {
				out = append(out, c.Path())
				found++
			} else if why == "" {
				why = c.Why
				if c.Why != c.Barred {
					why = c.Barred + ": " + c.Why
				}
			}
		}
		if found == 0 {
			d.add(f.Place.Error(f.Name, fmt.Sprintf("none of its first %d members is a path; the first: %s", min(f.Count(), mostProbes*mostProbes), why),
				"check the values and what they are tied to"))
		}
	}
	return out
}

// Path is the member as a path, which holds until the next is made.
func (c *Candidate) Path() Path {
	return Path{Name: fmt.Sprintf("%s, member %d", c.family.Name, c.Index), History: &c.History,
		Eruption: c.History.Eruption(), Place: c.family.Place, Crystals: c.Crystals}
}

// Member is the member of a family that goes by its name as a path, such as "cooler
// but longer, member 17"; nil if there is none. A member that is no path is barred and
// has no history.
func (s *Study) Member(name string) *Path {
	for i := range s.Families {
		f := &s.Families[i]
		number, is := strings.CutPrefix(name, f.Name+", member ")
		k, err := strconv.ParseInt(number, 10, 64)
		if !is || err != nil || k < 0 || k >= f.Count() {
			continue
		}
		c := new(Candidate)
		f.At(c, k)
		if c.Barred != "" {
			return &Path{Name: name, Barred: []Bar{{Why: c.Why}}, Place: f.Place}
		}
		path := c.Path()
		if s.Bar(c); c.Barred != "" {
			path.Barred = []Bar{{Why: c.Why}}
		}
		return &path
	}
	return nil
}

// Bar bars the member if it breaks a limit of the study's or if its crystals
// cannot have seen it: what Barred is for the paths that are written out.
func (s *Study) Bar(c *Candidate) {
	if c.Barred != "" {
		return
	}
	if s.Limits.bar(c); c.Barred != "" {
		return
	}
	crystals := s.Crystals
	if c.Crystals != nil {
		crystals = c.Crystals
	}
	for i := range crystals {
		if crystals[i].bar(c); c.Barred != "" {
			return
		}
	}
}

// because bars the member if there is a reason.
func (c *Candidate) because(words string, whys []string) bool {
	if len(whys) > 0 {
		c.Barred, c.Why = words, whys[0]
	}
	return len(whys) > 0
}

// bar bars a member that breaks a limit.
func (l *Limits) bar(c *Candidate) {
	h := &c.History
	if c.because("the limits on its life", l.life(h)) || c.because("the limit on the lowest temperature", l.lowest(h)) {
		return
	}
	for i := range l.Above {
		if c.because("a limit on the time above "+l.Above[i].temperature(), l.Above[i].broken(h)) {
			return
		}
	}
	for i := range l.Between {
		b := &l.Between[i]
		if why, _ := b.broken(h); c.because(fmt.Sprintf("the limit from %q to %q", b.From.Text, b.To.Text), why) {
			return
		}
	}
}

// bar bars a member that the crystal cannot have seen.
func (c *Crystal) bar(m *Candidate) {
	seen := &m.History
	if c.Exists != nil {
		var err error
		if seen, err = c.Sees(&m.History); m.fails(fmt.Sprintf("%s exists from %q", c.Name, c.Exists.Text), inputError(err, c.ExistsPlace)) {
			return
		}
	}
	if c.Staged() || len(c.Moves) > 0 {
		_, err := c.Added(&m.History)
		if err == nil {
			_, err = c.Moved(&m.History)
		}
		if m.fails("the zones of "+c.Name, inputError(err, c.Place)) {
			return
		}
	}
	if c.Dissolves != nil && m.because(c.Name+" dissolves", c.dissolved(seen)) {
		return
	}
	for j := range c.Elements {
		e := &c.Elements[j]
		if !e.timed() && e.Partition == nil {
			continue
		}
		rim := fmt.Sprintf("a rim of %s in %s", e.Name, c.Name)
		for _, rims := range [][]Rim{e.Inner, e.Rims} {
			for i := 1; i < len(rims); i++ {
				if m.fails(rim, after(rims, i, &m.History)) {
					return
				}
			}
		}
		if m.fails(rim, inputError(c.holds(e, &m.History), e.Place)) {
			return
		}
		if m.fails("the partition relation of "+e.Name+" in "+c.Name, c.cold(e, m.Path().Name, seen)) {
			return
		}
	}
}

// fails bars the member if something is wrong with it.
func (c *Candidate) fails(words string, in *thermal.InputError) bool {
	return in != nil && c.because(words, []string{in.Problem})
}

// timed reports whether what holds at a rim depends on the path.
func (e *Element) timed() bool {
	for _, rims := range [][]Rim{e.Inner, e.Rims} {
		for i := range rims {
			if rims[i].From != nil || rims[i].Given != nil || rims[i].Following != nil {
				return true
			}
		}
	}
	return false
}
