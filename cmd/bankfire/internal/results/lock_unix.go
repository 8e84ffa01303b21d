//go:build darwin || dragonfly || freebsd || linux || netbsd || openbsd

package results

import (
	"errors"
	"os"
	"syscall"
)

// lock locks the file until it is closed or the process ends, however it ends.
func lock(f *os.File) error {
	for {
		err := syscall.Flock(int(f.Fd()), syscall.LOCK_EX|syscall.LOCK_NB)
		switch {
		case err == nil, errors.Is(err, syscall.ENOTSUP), errors.Is(err, syscall.ENOSYS), errors.Is(err, syscall.ENOLCK):
			return nil // some file systems have no locks
		case errors.Is(err, syscall.EWOULDBLOCK):
			return ErrClaimed
		case !errors.Is(err, syscall.EINTR):
			return &os.PathError{Op: "lock", Path: f.Name(), Err: err}
		}
	}
}
