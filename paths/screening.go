package paths

import (
	"cmp"
	"context"
	"fmt"
	"sync"
	"sync/atomic"

	"bankfire/paths/study"
	"bankfire/thermal"
)

// ScreenOptions say how families are screened. The zero value keeps the rows of members
// that reproduce and does one thing at a time, each family as suits it.
type ScreenOptions struct {
	Keep   Keep
	Jobs   int // how many things are done at the same time; below 1 is 1. No result depends on it.
	Method Method
}

// Screening is a study made ready to be weighed: what is the same for all members of
// its families is found, and they can be screened, in blocks and in as many parts as one
// likes.
type Screening struct {
	weighing *weighing
	options  ScreenOptions
	engines  []*engine // one a family
	done     atomic.Int64
}

// NewScreening makes the study ready. Extra scatter that traverses leave open is found
// along the paths that are written out and the first member of each family that is not
// barred, so that it does not depend on how the rest is divided. The error is that of
// ctx if it is done, an *thermal.InputError if the study has nothing to weigh against or
// asks for a table where none can be, else what went wrong on a path.
func NewScreening(ctx context.Context, s *study.Study, o ScreenOptions) (*Screening, error) {
	w, err := newWeighing(s)
	if err != nil {
		return nil, err
	}
	if len(w.elements) == 0 {
		return nil, thermal.Place{File: s.File, Field: "crystal.element.traverse"}.
			Error("", "no element has a traverse, so there is nothing to weigh against",
				`add traverse = { file = "...", ... } to an element, or use follow`)
	}
	firsts := make([]*study.Path, len(w.study.Families))
	for i := range firsts {
		if firsts[i], err = w.first(ctx, &w.study.Families[i]); err != nil {
			return nil, err
		}
	}
	if err := w.findScatter(ctx, firsts, o.Jobs); err != nil {
		return nil, err
	}
	out := &Screening{weighing: w, options: o}
	for i := range firsts {
		f := &w.study.Families[i]
		e, err := w.engine(ctx, f, firsts[i], o.Method, o.Keep)
		if err != nil {
			return nil, err
		}
		out.engines = append(out.engines, e)
	}
	return out, nil
}

// Blocks is how many blocks all families have together, those of each in turn.
func (s *Screening) Blocks() int64 { return Blocks(s.weighing.study) }

// Done is how many members have been screened so far. Any goroutine may ask.
func (s *Screening) Done() int64 { return s.done.Load() }

// Screen screens blocks from ... to-1 and hands them to sink, in order and from this
// goroutine. A block is the sink's own. It ends early with the error of a member or of
// the sink, or that of ctx if it is done; the blocks before have been handed over then.
// It panics unless 0 <= from <= to <= Blocks.
func (s *Screening) Screen(ctx context.Context, from, to int64, sink func(*Block) error) error {
	if from < 0 || from > to || to > s.Blocks() {
		panic(fmt.Sprintf("paths: no blocks %d to %d of %d", from, to, s.Blocks()))
	}
	ctx, stop := context.WithCancel(ctx)
	jobs := max(1, s.options.Jobs)
	l := newLine(s, jobs)
	defer func() {
		stop()
		l.team.Wait()
	}()
	l.start(ctx, from, to, jobs)
	for w := range l.begun {
		select {
		case <-w.whole:
		case <-ctx.Done():
			return ctx.Err()
		}
		if err := cmp.Or(ctx.Err(), w.err); err != nil {
			return err
		}
		b := w.block
		l.spare <- w
		if err := sink(b); err != nil {
			return err
		}
	}
	return ctx.Err()
}

// Finish makes the result of what was screened: one tally a family, in the order of the
// study, each the sum of its blocks', of all of them or of some. It solves the written paths and
// the best member of each family. The error is that of ctx if it is done before, else
// those of up to 20 paths, joined. It panics if there are more or fewer tallies than
// families; a tally of another family is an error.
func (s *Screening) Finish(ctx context.Context, tallies []Tally) (*Result, error) {
	if len(tallies) != len(s.engines) {
		panic(fmt.Sprintf("paths: %d tallies of %d families", len(tallies), len(s.engines)))
	}
	w := s.weighing
	w.study.Paths = append([]study.Path(nil), w.written...)
	w.families = w.families[:0]
	for i, e := range s.engines {
		f, err := e.result(&tallies[i])
		if err != nil {
			return nil, err
		}
		if f.Shown, err = e.show(ctx, &tallies[i]); err != nil {
			return nil, err
		}
		if f.Best() >= 0 {
			var c study.Candidate
			f.Family.At(&c, f.Best())
			f.Path = len(w.study.Paths)
			w.study.Paths = append(w.study.Paths, c.Path())
		}
		w.families = append(w.families, *f)
	}
	if err := w.all(ctx, s.options.Jobs); err != nil {
		return nil, err
	}
	return w.judge(ctx)
}

// Weigh runs every path of the study against every traverse and judges it, and screens
// its families. Up to jobs paths go at the same time; the result does not depend on jobs. The
// result is nil if there is an error: that of ctx if it is done before the last
// profile is judged, else those of up to 20 paths, each with the path's name,
// joined.
func Weigh(ctx context.Context, s *study.Study, jobs int) (*Result, error) {
	screening, err := NewScreening(ctx, s, ScreenOptions{Jobs: jobs})
	if err != nil {
		return nil, err
	}
	tallies := make([]Tally, len(s.Families))
	err = screening.Screen(ctx, 0, screening.Blocks(), func(b *Block) error {
		tallies[b.Family].Add(&b.Tally)
		return nil
	})
	if err != nil {
		return nil, err
	}
	return screening.Finish(ctx, tallies)
}

// line is where blocks are screened: chunks of members go to the workers in order, and
// whole blocks come out in order.
type line struct {
	*Screening
	chunks chan chunk
	begun  chan *work // blocks in order, whole or not
	spare  chan *work // memory of blocks that were handed over
	team   sync.WaitGroup
}

// chunk is some members of a block.
type chunk struct {
	of       *work
	from, to int // among those of the block
}

// newLine has room for a block more than there are workers, so that none waits.
func newLine(s *Screening, jobs int) *line {
	room := jobs + 1
	l := &line{Screening: s, chunks: make(chan chunk), begun: make(chan *work, room), spare: make(chan *work, room)}
	for range room {
		l.spare <- new(work)
	}
	return l
}

// start starts the workers and what gives them chunks. All end when ctx is done or the
// last block is whole.
func (l *line) start(ctx context.Context, from, to int64, jobs int) {
	l.team.Go(func() {
		defer close(l.begun)
		defer close(l.chunks)
		for k := from; k < to; k++ {
			var w *work
			select {
			case w = <-l.spare:
			case <-ctx.Done():
				return
			}
			l.open(w, k)
			l.begun <- w
			size := int(w.engine.chunk())
			for at := 0; at < len(w.members); at += size {
				select {
				case l.chunks <- chunk{w, at, min(at+size, len(w.members))}:
				case <-ctx.Done():
					return
				}
			}
		}
	})
	for range jobs {
		l.team.Go(func() {
			var d desk
			for c := range l.chunks {
				err := c.of.engine.judge(ctx, &d, c.of.members[c.from:c.to])
				if err == nil {
					l.done.Add(int64(c.to - c.from))
				}
				c.of.end(&c, err, l.options.Keep)
			}
		})
	}
}

// open makes w block k.
func (l *line) open(w *work, k int64) {
	family, from, to := MembersOf(l.weighing.study, k)
	w.begin(l.engines[family], &Block{Number: k, Family: family, From: from}, int(to-from))
}

// work is a block in the course of being screened, in memory that is used again.
type work struct {
	engine  *engine
	members []member
	numbers []float64 // of the members
	counter counter
	block   *Block        // what comes of it
	whole   chan struct{} // closed when it has
	err     error         // that of the first chunk that failed
	mu      sync.Mutex
	left    int // members not yet judged
	failed  int // the place of that chunk
}

// begin begins a block of n members.
func (w *work) begin(e *engine, b *Block, n int) {
	if cap(w.members) < n {
		w.members = make([]member, n)
	}
	values, above, elements := len(e.family.Values), len(e.study.Thresholds), len(e.elements)
	if size := n * (values + above + elements); len(w.numbers) < size {
		w.numbers = make([]float64, size)
	}
	w.engine, w.block, w.whole, w.err, w.left = e, b, make(chan struct{}), nil, n
	w.members = w.members[:n]
	free := w.numbers
	take := func(n int) []float64 {
		out := free[:n:n]
		free = free[n:]
		return out
	}
	for i := range w.members {
		m := &w.members[i]
		*m = member{Row: Row{Index: b.From + int64(i), StandIn: take(elements)}, values: take(values), above: take(above)}
	}
}

// end notes the end of a chunk. The last makes the block whole.
func (w *work) end(c *chunk, err error, keep Keep) {
	w.mu.Lock()
	defer w.mu.Unlock()
	if err != nil && (w.err == nil || c.from < w.failed) {
		w.err, w.failed = err, c.from
	}
	if w.left -= c.to - c.from; w.left > 0 {
		return
	}
	if w.err == nil {
		w.block.Rows = rowsOf(keep.of(nil, w.members))
		w.block.Tally = w.engine.tally()
		w.counter.count(&w.block.Tally, w.members)
	}
	close(w.whole)
}
