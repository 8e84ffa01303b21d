package paths

import (
	"context"
	"errors"
	"fmt"
	"math"
	"slices"
	"sync"

	"bankfire/diffusion"
	"bankfire/paths/study"
	"bankfire/paths/traverse"
	"bankfire/thermal"
	"bankfire/thermal/numeric"
)

// Result is a study weighed: what became of every path, in the study's order.
type Result struct {
	Study *study.Study
	Paths []PathResult
}

// PathResult is one path with its verdict.
type PathResult struct {
	Path     *study.Path
	Outcome  Outcome
	Life     float64   // start to eruption, s
	Above    []float64 // time above each of the study's thresholds before eruption, s
	Profiles []ProfileResult
	Notes    []string
}

// ProfileResult is one element on one path as it is, fitted to its traverse.
type ProfileResult struct {
	Crystal *study.Crystal
	Element *study.Element
	Free    []FreeFit
	LnG     float64   // ln of the diffusion integral, m2
	StandIn float64   // the constant temperature that gives the same G over the whole path, K; 0 where nothing diffuses
	NumErr  float64   // largest numerical error at the data points, in sigma, of the path as it is and at its shift factor
	Seen    []float64 // what the instrument would have shown at the points, in the element's unit
	Centres []float64 // of the cells, m from the crystal's centre
	Start   []float64 // what the instrument would have shown there before diffusion
	Final   []float64 // and at the end of the path
	Stats   diffusion.Stats
	Notes   []string
}

// FreeFit is a value that the traverse decided, alone or with a prior.
type FreeFit struct {
	Name         string
	Value, Sigma float64 // in the element's unit; Sigma is +Inf where the data do not see it
	HasPrior     bool
}

// Weigh runs every path of the study against every traverse and judges it.
// Up to jobs paths go at the same time; the result does not depend on jobs. The
// result is nil if there is an error: that of ctx if it is done before the last
// path is weighed, else those of up to 20 paths, each with the path's name,
// joined.
func Weigh(ctx context.Context, s *study.Study, jobs int) (*Result, error) {
	if !measured(s) {
		return nil, thermal.Place{File: s.File, Field: "crystal.element.traverse"}.
			Error("", "no element has a traverse, so there is nothing to weigh against",
				`add traverse = { file = "...", ... } to an element, or use follow`)
	}
	r := &Result{Study: s, Paths: make([]PathResult, len(s.Paths))}
	errs := make([]error, len(s.Paths))
	next := make(chan int)
	var team sync.WaitGroup
	for range max(1, min(jobs, len(s.Paths))) {
		team.Go(func() {
			for i := range next {
				errs[i] = r.Paths[i].weigh(ctx, s, &s.Paths[i])
			}
		})
	}
	for i := range s.Paths {
		select {
		case next <- i:
		case <-ctx.Done():
			errs[i] = ctx.Err()
		}
	}
	close(next)
	team.Wait()
	if done := ctx.Err(); done != nil && slices.ContainsFunc(errs, func(err error) bool { return errors.Is(err, done) }) {
		return nil, done
	}
	if err := firstErrors(errs); err != nil {
		return nil, err
	}
	return r, nil
}

// mostErrors is how many errors are reported at once.
const mostErrors = 20

func firstErrors(errs []error) error {
	errs = slices.DeleteFunc(errs, func(err error) bool { return err == nil })
	return errors.Join(errs[:min(len(errs), mostErrors)]...)
}

func measured(s *study.Study) bool {
	for i := range s.Crystals {
		for j := range s.Crystals[i].Elements {
			if s.Crystals[i].Elements[j].Traverse != nil {
				return true
			}
		}
	}
	return false
}

// weigh runs one path through every measured element and judges it.
func (r *PathResult) weigh(ctx context.Context, s *study.Study, path *study.Path) error {
	r.Path, r.Life = path, path.Eruption
	for _, t := range s.Thresholds {
		r.Above = append(r.Above, path.History.TimeAbove(t.Temp))
	}
	var curves []Curve
	var each []sampler
	for i := range s.Crystals {
		c := &s.Crystals[i]
		for j := range c.Elements {
			e := &c.Elements[j]
			if e.Traverse == nil {
				continue
			}
			p, result, curve, err := weighProfile(ctx, c, e, path)
			if err != nil {
				return fmt.Errorf("path %q, %s in %s: %w", path.Name, e.Name, c.Name, err)
			}
			r.Profiles = append(r.Profiles, *result)
			curves, each = append(curves, curve), append(each, p.sampler(ctx))
		}
	}
	if err := sharpen(curves, each); err != nil {
		return fmt.Errorf("path %q: %w", path.Name, err)
	}
	Judge(&r.Outcome, curves, s.Confidence)
	r.Notes = r.Outcome.notes()
	return nil
}

// weighProfile scans the multipliers on D with a plan that is fine enough both
// for the path as it is and at the best of them: a path that hardly diffuses
// says nothing of the error there.
func weighProfile(ctx context.Context, c *study.Crystal, e *study.Element, path *study.Path) (
	*profile, *ProfileResult, Curve, error) {
	for refined := 0; ; {
		p, result, err := audited(c, e, path, refined)
		if err != nil {
			return nil, nil, Curve{}, err
		}
		curve, err := scan(len(p.fit.obs), p.spent, p.sampler(ctx))
		if err != nil {
			return nil, nil, Curve{}, err
		}
		best, err := p.errorAtBest(&curve)
		if err != nil {
			return nil, nil, Curve{}, err
		}
		if refined = p.finer(best); refined > p.refined {
			continue
		}
		result.NumErr = math.Max(result.NumErr, best)
		result.Notes = result.notes(path)
		return p, result, curve, nil
	}
}

// audited compiles the element for the path, with a plan at least so often
// refined and fine enough for the path as it is, and runs that.
func audited(c *study.Crystal, e *study.Element, path *study.Path, refined int) (*profile, *ProfileResult, error) {
	for {
		p, err := newProfile(c, e, path, refined)
		if err != nil {
			return nil, nil, err
		}
		result, err := p.asItIs()
		if err != nil {
			return nil, nil, err
		}
		if refined = p.finer(result.NumErr); refined == p.refined {
			return p, result, nil
		}
	}
}

// finer returns how often the plan should be refined, each time to a quarter of
// its error numErr, to reach errorAim.
func (p *profile) finer(numErr float64) int {
	if !(numErr > errorAim) {
		return p.refined
	}
	more := math.Ceil(math.Log(numErr/errorAim) / math.Log(4))
	return int(math.Min(float64(p.refined)+more, mostRefined))
}

// errorAtBest returns the numerical error at the multiplier that agrees best.
func (p *profile) errorAtBest(c *Curve) (float64, error) {
	lnM, _ := c.Lowest()
	f := &p.fields[0]
	if err := p.plan.Audit(f, diffusion.Job{Course: &p.course, LnM: lnM}); err != nil {
		return 0, err
	}
	return p.numErr(f, p.fitTo(f.Cols).values), nil
}

// asItIs runs the path with D unchanged, measures the numerical error and
// keeps what is to be shown.
func (p *profile) asItIs() (*ProfileResult, error) {
	f := &p.fields[0]
	if err := p.plan.Audit(f, diffusion.Job{Course: &p.course}); err != nil {
		return nil, err
	}
	fitted := p.fitTo(f.Cols)
	r := &ProfileResult{
		Crystal: p.crystal, Element: p.element,
		LnG:     p.course.LnG(),
		NumErr:  p.numErr(f, fitted.values),
		Seen:    combined(p.seen, fitted.values),
		Centres: p.plan.Centres(),
		Stats:   f.Stats,
	}
	p.spent = fitted.spent
	everywhere, err := traverse.NewWeights(p.plan.Faces(), p.crystal.Mirrored(p.element), p.element.Traverse.Spot, r.Centres)
	if err != nil {
		return nil, err
	}
	r.Start, r.Final = make([]float64, len(r.Centres)), make([]float64, len(r.Centres))
	everywhere.Apply(r.Start, combined(p.starts(), fitted.values))
	everywhere.Apply(r.Final, combined(f.Cols, fitted.values))
	for j, v := range p.free {
		value := fitted.values[j]
		if v.HasPrior {
			value += v.Prior.Value
		}
		r.Free = append(r.Free, FreeFit{Name: v.Name, Value: value, Sigma: fitted.sigmas[j], HasPrior: v.HasPrior})
	}
	r.StandIn = standIn(p.element.Law.Law, r.LnG, p.path.History.Life())
	return r, nil
}

// starts returns the start columns of the plan.
func (p *profile) starts() [][]float64 {
	cols := make([][]float64, 1+len(p.free))
	for j := range cols {
		cols[j] = p.plan.Start(j)
	}
	return cols
}

// standIn returns the one constant temperature, in K, at which the law gives
// the diffusion integral exp(lnG) over the time life; 0 if there is none
// between standInLow and standInHigh.
func standIn(law diffusion.Law, lnG, life float64) float64 {
	miss := func(temp float64) float64 { return law.LnD(temp) + math.Log(life) - lnG }
	t, err := numeric.Root(miss, standInLow, standInHigh, standInResolution)
	if err != nil {
		return 0
	}
	return t
}

// Where a stand-in temperature is looked for, and how finely, K.
const (
	standInLow        = 10
	standInHigh       = 1e4
	standInResolution = 1e-6
)
