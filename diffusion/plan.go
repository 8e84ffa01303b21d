package diffusion

import (
	"fmt"
	"math"
	"slices"
	"sync"
)

// Options choose the plan. The zero value is the program's own.
type Options struct {
	Cells     int       // about how many cells; 0 is 200
	Finest    float64   // smallest length that matters (spot, spacing), m; 0 is a fiftieth of the crystal
	Growth    float64   // growth of a step over the one before, and of the longest step in proportion; 0 is 0.1
	Refined   int       // how many times Cells are doubled and Growth is halved; below 0 halved and doubled
	Faces     []float64 // the cells themselves, m; every zone boundary must be one of them
	Fractions []float64 // the steps themselves, cumulative fractions of G rising to 1
	Damp      int       // steps after an event done as two backward-Euler half steps; 0 is 8, -1 none
}

// defaultFinest is the part of the crystal taken as the smallest length that
// matters when none is stated.
const defaultFinest = 1.0 / 50

// Plan is a problem made ready to run: grid, start and steps. It never changes
// and may be shared by goroutines.
type Plan struct {
	problem *Problem
	grid    *grid
	stages  []stage     // at least one
	outside []int       // of each zone, the number of cells up to its outer boundary
	host    *hostGrid   // nil without coupling
	starts  [][]float64 // cell means as they would be without diffusion: the answer, then one column per free value
	fresh   [][]float64 // the same, of each cell when it is added
	opened  book        // of the answer, before any step
	own     *ownTable   // nil where D does not follow the element
	steps   schedule    // between two events
	events  []float64   // s, ascending: times after 0 at which the solution is damped anew
	halved  halving     // nil in a halved plan itself, and where the faces do not pair up
	rough   schedule    // half the steps
}

// halving lays the plan on half the cells when it is first asked for: only what measures
// errors does.
type halving func() (*Plan, error)

// Compile checks the problem and lays its plan.
func Compile(p *Problem, o Options) (*Plan, error) {
	if err := p.check(); err != nil {
		return nil, err
	}
	faces, err := o.faces(p)
	if err != nil {
		return nil, err
	}
	steps, err := o.schedule(p)
	if err != nil {
		return nil, err
	}
	plan, err := compile(p, faces, steps)
	if err != nil {
		return nil, err
	}
	if half := everySecond(p, faces); half != nil {
		thick := *p
		thick.thick = true
		plan.halved = sync.OnceValues(func() (*Plan, error) { return compile(&thick, half, steps) })
	}
	return plan, nil
}

func compile(p *Problem, faces []float64, steps schedule) (*Plan, error) {
	plan := &Plan{problem: p, grid: newGrid(p.Shape, faces), steps: steps, rough: steps.merged(), events: p.events()}
	if err := plan.layStages(); err != nil {
		return nil, err
	}
	for _, s := range plan.stages[1:] {
		plan.events = append(plan.events, s.from)
	}
	slices.Sort(plan.events)
	plan.events = slices.Compact(plan.events)
	if p.LnK != nil {
		plan.host = p.layHost(plan.grid)
	}
	values := make([]float64, len(p.Zones))
	for i, z := range p.Zones {
		values[i] = z.Start
	}
	if err := plan.addColumn(values, p.Profile); err != nil {
		return nil, err
	}
	for _, b := range p.Free {
		if err := plan.addColumn(b.Start, b.Profile); err != nil {
			return nil, err
		}
	}
	plan.opened = plan.openBook()
	if p.Own != nil {
		plan.own = p.layOwn(plan.starts[0])
	}
	return plan, nil
}

func (o Options) faces(p *Problem) ([]float64, error) {
	if o.Faces == nil {
		cells, finest := o.Cells, o.Finest
		if cells == 0 {
			cells = defaultCells
		}
		cells = int(math.Ldexp(float64(cells), o.Refined))
		if finest == 0 {
			finest = (p.size() - p.R0) * defaultFinest
		}
		if cells < 0 || !(finest > 0) {
			return nil, fmt.Errorf("diffusion: %d cells down to %g m make no grid", cells, finest)
		}
		return layFaces(p, cells, finest), nil
	}
	for i := 1; i < len(o.Faces); i++ {
		if !(o.Faces[i] > o.Faces[i-1]) {
			return nil, fmt.Errorf("diffusion: face %d at %g m is not outside the one before", i, o.Faces[i])
		}
	}
	for _, mark := range segments(p) {
		if !slices.Contains(o.Faces, mark) {
			return nil, fmt.Errorf("diffusion: the boundary at %g m is no face", mark)
		}
	}
	if first, last := o.Faces[0], o.Faces[len(o.Faces)-1]; first != p.R0 || last != p.far() {
		return nil, fmt.Errorf("diffusion: the faces reach from %g to %g m, the crystal from %g to %g m", first, last, p.R0, p.far())
	}
	return o.Faces, nil
}

func (o Options) schedule(p *Problem) (schedule, error) {
	damp := o.Damp
	switch {
	case damp == 0:
		damp = defaultDamped
	case damp < 0:
		damp = 0
	}
	if o.Fractions != nil {
		return newSchedule(o.Fractions, damp, 0), checkFractions(o.Fractions)
	}
	growth := o.Growth
	if growth == 0 {
		growth = defaultGrowth
	}
	growth = math.Ldexp(growth, -o.Refined)
	if !(growth > 0) || growth > 1 {
		return nil, fmt.Errorf("diffusion: steps cannot grow by %g", growth)
	}
	end := 0
	if p.endsFinely() {
		end = min(damp, lastDamped)
	}
	return newSchedule(defaultFractions(damp, growth, p.endsFinely()), damp, end), nil
}

// everySecond returns every second face, or nil where a zone boundary or end
// would be lost (faces chosen by the caller).
func everySecond(p *Problem, faces []float64) []float64 {
	half := make([]float64, 0, len(faces)/2+1)
	for i := 0; i < len(faces); i += 2 {
		half = append(half, faces[i])
	}
	for _, mark := range segments(p) {
		if !slices.Contains(half, mark) {
			return nil
		}
	}
	return half
}

// moving reports whether a rim value changes with time other than by jumps.
func (p *Problem) moving() bool {
	if p.LnK != nil {
		return true
	}
	moves := func(r Rim) bool { return r.Given != nil || r.Equilibrium != nil || r.Kind == Transfer }
	return slices.ContainsFunc(p.Inner, moves) || slices.ContainsFunc(p.Outer, moves)
}

// endsFinely reports whether the last steps are to be short and damped: under a rim
// that moves, and where D follows the element itself. There a steep front leaves
// waves between cells that it crosses while the steps are long.
func (p *Problem) endsFinely() bool { return p.Own != nil || p.moving() }

// events returns the times after 0 at which a zone is added or a rim changes its
// kind or jumps, whatever the history.
func (p *Problem) events() []float64 {
	var at []float64
	for _, z := range p.Zones {
		at = append(at, z.Added)
	}
	for _, rims := range [][]Rim{p.Inner, p.Outer} {
		for i, r := range rims {
			at = append(at, r.From)
			until := math.Inf(1)
			if i+1 < len(rims) {
				until = rims[i+1].From
			}
			if r.Given != nil {
				at = append(at, within(r.Given.Jumps, r.From, until)...)
			}
		}
	}
	slices.Sort(at)
	at = slices.Compact(at)
	return slices.DeleteFunc(at, func(t float64) bool { return t <= 0 })
}

// within returns the entries strictly between lo and hi.
func within(times []float64, lo, hi float64) []float64 {
	var in []float64
	for _, t := range times {
		if t > lo && t < hi {
			in = append(in, t)
		}
	}
	return in
}

// Faces returns the cell faces from the inside outwards, m. Not to be changed.
func (p *Plan) Faces() []float64 { return p.grid.faces[:p.cells()+1] }

// Centres returns the middles of the cells, m. Not to be changed.
func (p *Plan) Centres() []float64 { return p.grid.centres[:p.cells()] }

// Volumes returns the integral of r^n dr over each cell. Not to be changed.
func (p *Plan) Volumes() []float64 { return p.grid.volumes[:p.cells()] }

// cells is how many there are at the end of a path with all moves.
func (p *Plan) cells() int { return p.outside[len(p.outside)-1] }

// Start returns the cell means of column j as they would be without diffusion: 0 the
// profile, then the free values. Not to be changed.
func (p *Plan) Start(j int) []float64 { return p.starts[j][:p.cells()] }

// GEnough reports whether the final profile depends on the history through the
// diffusion integral alone, and why or why not. It is decided from the kinds
// of rim, never by trial.
func (p *Plan) GEnough() (why string, ok bool) {
	if p.host != nil {
		return "in a zoned host the element's equilibrium moves with temperature", false
	}
	if len(p.problem.Moves) > 0 {
		return "the outer face moves along the path", false
	}
	if len(p.stages) > 1 {
		return "zones are added along the path, and each boundary knows the diffusion integral since its own addition", false
	}
	if len(p.events) > 0 {
		return "a rim changes along the path", false
	}
	if p.problem.moving() {
		return "a rim follows time or temperature, or exchanges at a rate of its own", false
	}
	if p.problem.Law.Where != nil {
		return "D only scales, with temperature and the conditions of legs, and every end is sealed or held throughout", true
	}
	return "D only scales with temperature and every end is sealed or held throughout", true
}
