package main

import (
	"fmt"
	"io"
	"os"
	"sync"
	"time"
)

// When progress is first shown, and how often after that.
const (
	progressAfter = time.Second
	progressEvery = 200 * time.Millisecond
)

// progress shows on one line of a terminal how far a run is.
type progress struct {
	terminal io.Writer
	words    string // what is counted
	total    int64
	done     func() int64 // how many so far; any goroutine may call it
	quit     chan struct{}
	team     sync.WaitGroup
}

// startProgress shows on w, if it is a terminal, how many of the total are done. The run
// calls end.
func startProgress(w io.Writer, words string, total int64, done func() int64) *progress {
	p := &progress{terminal: w, words: words, total: total, done: done, quit: make(chan struct{})}
	if isTerminal(w) {
		p.team.Go(func() { p.show(time.Now()) })
	}
	return p
}

// show shows the progress until the run ends, and clears the line.
func (p *progress) show(started time.Time) {
	wait := time.NewTimer(progressAfter)
	defer wait.Stop()
	shown := false
	for {
		select {
		case <-wait.C:
			fmt.Fprintf(p.terminal, "\r%s\x1b[K", progressText(p.words, p.done(), p.total, time.Since(started)))
			shown = true
			wait.Reset(progressEvery)
		case <-p.quit:
			if shown {
				fmt.Fprint(p.terminal, "\r\x1b[K")
			}
			return
		}
	}
}

// end ends the showing. It may be called again.
func (p *progress) end() {
	select {
	case <-p.quit:
	default:
		close(p.quit)
	}
	p.team.Wait()
}

// progressText says how far a run is that has lasted so long.
func progressText(words string, done, total int64, lasted time.Duration) string {
	text := fmt.Sprintf("%d of %d %s", done, total, words)
	if done <= 0 || lasted <= 0 {
		return text
	}
	rate := float64(done) / lasted.Seconds()
	return fmt.Sprintf("%s, %.0f %%, %s/s, %s left", text, 100*float64(done)/float64(total), number(rate), leftText(float64(total-done)/rate))
}

// leftText prints a time in seconds: "3m20s".
func leftText(seconds float64) string {
	if seconds > 1e9 { // more than a time.Duration holds, or anyone has
		return "years"
	}
	return time.Duration(seconds * float64(time.Second)).Round(time.Second).String()
}

// isTerminal reports whether w is a terminal.
func isTerminal(w io.Writer) bool {
	f, ok := w.(*os.File)
	if !ok {
		return false
	}
	info, err := f.Stat()
	if err != nil || info.Mode()&os.ModeCharDevice == 0 {
		return false
	}
	null, err := os.Stat(os.DevNull)
	return err != nil || !os.SameFile(info, null)
}
