package paths

import (
	"context"
	"fmt"
	"math"

	"bankfire/diffusion"
	"bankfire/paths/least"
	"bankfire/paths/study"
)

// A host that was measured has errors, and so has what follows it. The host is
// redrawn from its errors n times, alike for every path (see study.Crystal.Redrawn),
// and each draw is run like the host as it was measured. With d_k by how much the
// fitted profile differs in draw k, the profile may be off by
//
//	sum of z_k d_k/sqrt(n),  each z_k normal with standard deviation 1,
//
// whose covariance is the mean of d_k d_k': the z_k are values of the fit with
// priors, so that chi-square, its tail and what is read off its curve allow for the
// host. Each profile has its own.

// hostRounds is how often the free values are fitted again with the draws' profiles
// that they make: d_k is proportional to them.
const hostRounds = 2

// layRedrawn compiles the element for each host that was drawn, with the edges of
// the middle one of the runs, whose cells it has.
func (p *profile) layRedrawn(hosts []*study.Crystal, options *diffusion.Options) error {
	if len(hosts) == 0 {
		return nil
	}
	widths := p.lens.edges.middles()
	main := p.runs
	defer func() { p.runs = main }()
	p.runs = nil
	for _, c := range hosts {
		problem, _, err := c.Problem(p.element, p.path.History)
		if err != nil {
			return err
		}
		if err := p.addRun(problem, widths, options); err != nil {
			return err
		}
	}
	p.redrawn = p.runs
	return nil
}

// middle is the run whose edges the redrawn hosts have.
func (p *profile) middle() int { return p.lens.edges.middleRun() }

// spreads returns d_k/sqrt(n) in the cells, for the columns of the runs and of the
// draws.
func (p *profile) spreads(cols, drawn [][][]float64, a amounts) [][]float64 {
	main := a.of(cols[p.middle()])
	out := make([][]float64, len(drawn))
	for k := range drawn {
		out[k] = a.of(drawn[k])
		for i, v := range main {
			out[k][i] = (out[k][i] - v) / math.Sqrt(float64(len(drawn)))
		}
	}
	return out
}

// fitRun fits the values that are open to the data, for what the runs left in their
// fields number field. To relative data the free values are counted from those of
// about, in the element's unit.
func (p *profile) fitRun(field int, about []float64) least.Solution {
	cols := p.columns(field)
	return p.fitHosts(cols, cols, columnsOf(p.redrawn, field), about)
}

// fitStart is fitRun for the columns before diffusion, which depend on the host where
// the start does.
func (p *profile) fitStart() least.Solution {
	cols := p.starts()
	return p.fitHosts(cols, cols, p.startsOf(p.redrawn), nil)
}

// fitHosts fits the values that are open to the data, for columns and what those of the
// draws differ by from others, the host as it was measured.
func (p *profile) fitHosts(cols, measured, drawn [][][]float64, about []float64) least.Solution {
	at := p.fitAbout(cols, nil, about)
	if len(drawn) == 0 {
		return at
	}
	for range hostRounds {
		a := p.amounts(at)
		if p.grey {
			for j, x := range about {
				a.values[j] += a.scale * x
			}
		}
		at = p.fitAbout(cols, p.spreads(measured, drawn, a), about)
	}
	return at
}

// addHost adds to a profile in the cells what the fit makes of the host's error.
func (p *profile) addHost(dst []float64, field int, at least.Solution) {
	z := at.Linear[len(p.fit.Linear):]
	for k, spread := range p.spreads(p.columns(field), columnsOf(p.redrawn, field), p.amounts(at)) {
		for i, v := range spread {
			dst[i] += z[k] * v
		}
	}
}

// betweenText prints an interval of a factor of which a side may be open.
func betweenText(x [2]float64) string {
	lo, hi := x[0] > 0, !math.IsInf(x[1], 1)
	switch {
	case lo && hi:
		return fmt.Sprintf("from %.3g to %.3g", x[0], x[1])
	case lo:
		return fmt.Sprintf("above %.3g", x[0])
	case hi:
		return fmt.Sprintf("below %.3g", x[1])
	}
	return "not bounded"
}

// host says how much the error of the host widens the shift factor of the path of
// the own best fit, whose curve is given.
func (o *OwnBest) host(ctx context.Context, p *profile, c *Curve, confidence float64) error {
	if len(p.redrawn) == 0 {
		return nil
	}
	exact := *p
	exact.redrawn = nil
	without, err := exact.curve(ctx)
	if err != nil {
		return err
	}
	with, alone := find(c, confidence).Shift95, find(&without, confidence).Shift95
	o.say("its host was redrawn %d times from its errors: with them the shift factor of %q is %s, with the host taken as exact %s",
		len(p.redrawn), p.path.Name, betweenText(with), betweenText(alone))
	return nil
}
