package main

import (
	"os"
	"syscall"
)

// peakMemory returns the most memory that a process held, in bytes.
func peakMemory(p *os.ProcessState) int64 {
	usage, ok := p.SysUsage().(*syscall.Rusage)
	if !ok {
		return 0
	}
	return int64(usage.Maxrss) * 1024 // getrusage(2): in kilobytes
}
