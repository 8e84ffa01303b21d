package main

import (
	"bytes"
	"os"
	"os/exec"
	"path/filepath"
	"regexp"
	"strconv"
	"strings"
	"sync"
	"syscall"
	"testing"
	"time"
	"unsafe"
)

// TestBrokenOff interrupts a run on a terminal, as Ctrl-C does, once it has shown how far
// it is, and lets other runs try to write to its part before.
func TestBrokenOff(t *testing.T) {
	t.Parallel()
	dir := t.TempDir()
	plantStudy(t, filepath.Join(dir, "study.toml"), familyStudy(30_000_000), familyTraverse)
	terminal, shown := openTerminal(t)
	c := inFolder(dir, "weigh", "study.toml", "--out", "r")
	c.Stderr = terminal
	if err := c.Start(); err != nil {
		t.Fatal(err)
	}
	defer c.Process.Kill()
	terminal.Close() // the run has it
	waitFor(t, shown, regexp.MustCompile(`\r\d+ of 30000000 members, \d %, \S+/s, \S+ left\x1b\[K`))
	if !strings.Contains(shown.text(), "of disk will be needed: ") {
		t.Errorf("no word of the disk in %q", shown.text())
	}
	for _, more := range []string{"--quiet", "--resume"} {
		checkSays(t, inFolder(dir, "weigh", "study.toml", "--out", "r", more), wrong,
			`^bankfire: r.parts/part-1-of-1.bankfire: is being written by another run; wait for its end, or name another --out\n$`)
	}
	c.Process.Signal(os.Interrupt)
	if err := c.Wait(); c.ProcessState.ExitCode() != failed {
		t.Errorf("%v, want status %d", err, failed)
	}
	waitFor(t, shown, regexp.MustCompile(`left\x1b\[K\r\x1b\[Kbankfire: interrupted after \d+ of 30000000 members\r\n`+
		`bankfire: hint: the same command with --resume goes on; bankfire gather study\.toml r\.parts --partial --out DIR shows what there is\r\n$`))
	checkSays(t, inFolder(dir, "gather", "study.toml", "r.parts", "--out", "no"), wrong,
		`^bankfire: r.parts/part-1-of-1.bankfire: is not finished: \d+ of its 7325 blocks are there; finish it by the command that made it with --resume, or add --partial\n$`)
	checkSays(t, inFolder(dir, "gather", "study.toml", "r.parts", "--out", "partial", "--partial"), done, `^$`)
	if got := readSummary(t, filepath.Join(dir, "partial")); !regexp.MustCompile(`partial results: \d+ of the 30000000 members of family`).MatchString(got) {
		t.Error("the summary does not say that it is partial")
	}
}

// checkSays runs the command and compares its status, and what it says on the standard
// error.
func checkSays(t *testing.T, c *exec.Cmd, status int, want string) {
	t.Helper()
	var said bytes.Buffer
	c.Stderr = &said
	err := c.Run()
	if c.ProcessState == nil || c.ProcessState.ExitCode() != status || !regexp.MustCompile(want).MatchString(said.String()) {
		t.Errorf("%v: %v, said %q; want status %d and %q", c.Args, err, said.String(), status, want)
	}
}

// screen is what was shown on a terminal.
type screen struct {
	mu   sync.Mutex
	data []byte
}

func (s *screen) text() string {
	s.mu.Lock()
	defer s.mu.Unlock()
	return string(s.data)
}

// patient is how long a test waits for what takes a moment on a machine that is not busy.
const patient = time.Minute

// waitFor waits until the text is shown.
func waitFor(t *testing.T, s *screen, want *regexp.Regexp) {
	t.Helper()
	for began := time.Now(); !want.MatchString(s.text()); time.Sleep(20 * time.Millisecond) {
		if time.Since(began) > patient {
			t.Fatalf("no %s in %q", want, s.text())
		}
	}
}

// openTerminal returns a terminal, and what will be shown on it.
func openTerminal(t *testing.T) (*os.File, *screen) {
	t.Helper()
	front, err := os.OpenFile("/dev/ptmx", os.O_RDWR|syscall.O_NOCTTY, 0)
	if err != nil {
		t.Skip(err)
	}
	t.Cleanup(func() { front.Close() })
	var lock, number int32
	for request, value := range map[uintptr]*int32{syscall.TIOCSPTLCK: &lock, syscall.TIOCGPTN: &number} {
		if _, _, err := syscall.Syscall(syscall.SYS_IOCTL, front.Fd(), request, uintptr(unsafe.Pointer(value))); err != 0 {
			t.Skip(err)
		}
	}
	terminal, err := os.OpenFile("/dev/pts/"+strconv.Itoa(int(number)), os.O_RDWR|syscall.O_NOCTTY, 0)
	if err != nil {
		t.Skip(err)
	}
	s := new(screen)
	go func() {
		for data := make([]byte, 4096); ; {
			n, err := front.Read(data)
			s.mu.Lock()
			s.data = append(s.data, data[:n]...)
			s.mu.Unlock()
			if err != nil { // the last process has closed the terminal
				return
			}
		}
	}()
	return terminal, s
}
