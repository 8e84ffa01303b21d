package paths

import (
	"context"
	"fmt"
	"math"
	"slices"
	"sync"
	"sync/atomic"

	"bankfire/paths/study"
)

// FamilyResult is a family weighed.
type FamilyResult struct {
	Family   *study.Family
	Methods  []FamilyMethod // one a measured element
	Members  []Member       // in the order of their index
	Barred   []FamilyBar    // why members are ruled out, the commonest first
	Counts   [Barred + 1]int64
	Best     int64 // the member with the lowest chi-square; -1 if all are barred
	Path     int   // its place among the paths of the result
	Elements []FamilyElement
}

// Written are the paths that the study writes out, without the members of families.
func (r *Result) Written() []PathResult {
	n := len(r.Paths)
	for i := range r.Families {
		if r.Families[i].Best >= 0 {
			n--
		}
	}
	return r.Paths[:n]
}

// FamilyElement is a measured element, as the families have it.
type FamilyElement struct {
	Crystal *study.Crystal
	Element *study.Element
}

// FamilyMethod says how the members were run for an element, and why.
type FamilyMethod struct {
	Table bool
	Why   string
}

// FamilyBar is one reason for which members are ruled out.
type FamilyBar struct {
	Words string // the same for all
	Count int64
	First int64  // the first of them
	Why   string // what is wrong with that
}

// Member is what is kept of one member.
type Member struct {
	Values  []float64 // SI, in the order of the family's
	Verdict Verdict
	Shift   float64 // NaN, as the rest, if it is barred
	Shift95 [2]float64
	Tail    float64
	Misfit  float64
	Life    float64   // start to eruption, s
	Above   []float64 // time above each of the study's thresholds before eruption, s
	StandIn []float64 // of each measured element, K, if the member reproduces; 0 where nothing diffuses
}

// How many members are a unit of work: those that are only looked up, and those that
// are run.
const (
	tableBlock = 4096
	stepBlock  = 8
)

// screening is a family in the course of being weighed.
type screening struct {
	*weighing
	family *study.Family
	tables []*gTable // one an element; nil if its members are run
	kept   []Member
}

// screen gives every member of a family its verdict, up to jobs at the same time.
func (w *weighing) screen(ctx context.Context, f *study.Family, jobs int) (*FamilyResult, error) {
	s := &screening{weighing: w, family: f, kept: make([]Member, f.Count())}
	out := &FamilyResult{Family: f, Best: -1}
	for _, e := range w.elements {
		out.Elements = append(out.Elements, FamilyElement{e.crystal, e.element})
	}
	first, err := s.first(ctx)
	if err != nil {
		return nil, err
	}
	if first != nil {
		if out.Methods, err = s.prepare(ctx, first); err != nil {
			return nil, err
		}
	}
	if out.Barred, err = s.all(ctx, jobs); err != nil {
		return nil, err
	}
	out.Members = s.kept
	for i := range out.Members {
		m := &out.Members[i]
		out.Counts[m.Verdict]++
		if m.Verdict != Barred && (out.Best < 0 || m.Misfit < out.Members[out.Best].Misfit) {
			out.Best = int64(i)
		}
	}
	return out, nil
}

// first is the first member that is not barred; nil if all are.
func (s *screening) first(ctx context.Context) (*study.Path, error) {
	var c study.Candidate
	for i := range s.family.Count() {
		if err := ctx.Err(); err != nil {
			return nil, err
		}
		s.family.At(&c, i)
		if s.study.Bar(&c); c.Barred == "" {
			path := c.Path()
			return &path, nil
		}
	}
	return nil, nil
}

// prepare makes the tables.
func (s *screening) prepare(ctx context.Context, first *study.Path) ([]FamilyMethod, error) {
	if why := s.linked(); why != "" {
		s.tables = make([]*gTable, len(s.elements))
		return slices.Repeat([]FamilyMethod{{Why: why}}, len(s.elements)), nil
	}
	var methods []FamilyMethod
	for n := range s.elements {
		e := &s.elements[n]
		t, why, err := newTable(ctx, e, first, s.study.Confidence)
		if err != nil {
			return nil, fmt.Errorf("%s, %s in %s: %w", first.Name, e.element.Name, e.crystal.Name, err)
		}
		s.tables = append(s.tables, t)
		methods = append(methods, FamilyMethod{t != nil, why})
	}
	return methods, nil
}

// linked says what elements of a crystal decide together on each path, "" if nothing:
// then no table of one by itself holds it.
func (s *screening) linked() string {
	for place, c := range s.crystals {
		if len(c.Choices()) > 1 {
			return "the start is one of several, from which each path takes one"
		}
		open := 0
		for _, n := range s.members(place) {
			if !s.elements[n].element.Start.Edge.Fixed() {
				open++
			}
		}
		if open > 1 {
			return "the elements of a crystal have the width of their edges in common"
		}
	}
	return ""
}

// all screens the members in blocks and returns the reasons of those that are barred.
func (s *screening) all(ctx context.Context, jobs int) ([]FamilyBar, error) {
	size := int64(tableBlock)
	if slices.Contains(s.tables, nil) {
		size = stepBlock
	}
	count := s.family.Count()
	blocks := (count + size - 1) / size
	bars, errs := make([]map[string]FamilyBar, blocks), make([]error, blocks)
	var next atomic.Int64
	var failed atomic.Bool
	var team sync.WaitGroup
	for range max(1, min(int64(jobs), blocks)) {
		team.Go(func() {
			var c study.Candidate
			for !failed.Load() {
				k := next.Add(1) - 1
				if k >= blocks {
					return
				}
				if bars[k], errs[k] = s.block(ctx, &c, k*size, min((k+1)*size, count)); errs[k] != nil {
					failed.Store(true)
				}
			}
		})
	}
	team.Wait()
	if err := ctx.Err(); err != nil {
		return nil, err
	}
	for _, err := range errs {
		if err != nil {
			return nil, err
		}
	}
	return joinBars(bars), nil
}

// joinBars adds the reasons of all blocks, the commonest first.
func joinBars(blocks []map[string]FamilyBar) []FamilyBar {
	place := map[string]int{}
	var all []FamilyBar
	for _, block := range blocks {
		for words, b := range block {
			k, known := place[words]
			if !known {
				place[words] = len(all)
				all = append(all, b)
				continue
			}
			all[k].Count += b.Count
		}
	}
	slices.SortFunc(all, func(a, b FamilyBar) int {
		if a.Count != b.Count {
			return int(b.Count - a.Count)
		}
		return int(a.First - b.First)
	})
	return all
}

// block screens the members from ... to-1.
func (s *screening) block(ctx context.Context, c *study.Candidate, from, to int64) (map[string]FamilyBar, error) {
	bars := map[string]FamilyBar{}
	numbers := make([]float64, 0, int(to-from)*(len(s.family.Values)+len(s.study.Thresholds)))
	lnG := make([]float64, len(s.elements))
	for i := from; i < to; i++ {
		if err := ctx.Err(); err != nil {
			return nil, err
		}
		s.family.At(c, i)
		s.study.Bar(c)
		m := &s.kept[i]
		at := len(numbers)
		numbers = append(numbers, c.Values...)
		m.Values = numbers[at:len(numbers):len(numbers)]
		if c.Barred != "" {
			b, known := bars[c.Barred]
			if !known {
				b = FamilyBar{Words: c.Barred, First: i, Why: c.Why}
			}
			b.Count++
			bars[c.Barred] = b
			m.bar()
			continue
		}
		at = len(numbers)
		for _, t := range s.study.Thresholds {
			numbers = append(numbers, c.History.TimeAbove(t.Temp))
		}
		m.Above, m.Life = numbers[at:len(numbers):len(numbers)], c.History.Eruption()
		if err := s.member(ctx, c, m, lnG); err != nil {
			return nil, err
		}
	}
	return bars, nil
}

// bar is what is kept of a member that is barred.
func (m *Member) bar() {
	nan := math.NaN()
	m.Verdict, m.Shift, m.Shift95, m.Tail, m.Misfit, m.Life = Barred, nan, [2]float64{nan, nan}, nan, nan, nan
}

// member judges one member. lnG is scratch.
func (s *screening) member(ctx context.Context, c *study.Candidate, m *Member, lnG []float64) error {
	for n := range s.elements {
		lnG[n] = s.elements[n].element.Law.Law.LnIntegral(&c.History, 0, c.History.Life())
	}
	var f Finding
	if t := s.tables[0]; len(s.tables) == 1 && t != nil {
		f = t.find(lnG[0], s.study.Confidence)
	} else {
		path := c.Path()
		cs, err := s.curves(ctx, &path, lnG)
		if err != nil {
			return err
		}
		f = jointly(cs, alone(cs, s.study.Confidence), s.study.Confidence)
	}
	m.Verdict, m.Shift, m.Shift95, m.Tail, m.Misfit = f.Verdict, f.Shift, f.Shift95, f.Tail, f.Misfit
	if m.Verdict == Reproduces {
		for n := range s.elements {
			m.StandIn = append(m.StandIn, standIn(s.elements[n].element.Law.Law, &c.History, lnG[n]))
		}
	}
	return nil
}

// curves are those of a member's profiles, from the tables or by running it.
func (s *screening) curves(ctx context.Context, path *study.Path, lnG []float64) ([]Curve, error) {
	var p weighedPath
	if !slices.ContainsFunc(s.tables, func(t *gTable) bool { return t != nil }) {
		if err := s.solve(ctx, &p, path); err != nil {
			return nil, fmt.Errorf("%q%w", path.Name, err)
		}
		cs, _ := s.judged(&p)
		return cs, nil
	}
	var cs []Curve
	var each []sampler
	for n, e := range s.elements {
		if t := s.tables[n]; t != nil {
			cs, each = append(cs, t.on(lnG[n])), append(each, t.sampler(lnG[n]))
			continue
		}
		if err := p.add(ctx, e, path, s.laws); err != nil {
			return nil, fmt.Errorf("%q, %s in %s: %w", path.Name, e.element.Name, e.crystal.Name, err)
		}
		last := len(p.profiles) - 1
		cs, each = append(cs, p.curves[last]), append(each, p.profiles[last].sampler(ctx))
	}
	if len(p.profiles) == 0 {
		return cs, nil
	}
	if err := sharpen(cs, each); err != nil {
		return nil, fmt.Errorf("%q: %w", path.Name, err)
	}
	return cs, nil
}
