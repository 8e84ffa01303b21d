package main

import (
	"testing"
	"time"
)

func TestProgressText(t *testing.T) {
	for _, test := range []struct {
		name        string
		done, total int64
		lasted      time.Duration
		want        string
	}{
		{"nothing yet", 0, 1000, time.Second, "0 of 1000 members"},
		{"no time yet", 5, 1000, 0, "5 of 1000 members"},
		{"a quarter", 250, 1000, 2 * time.Second, "250 of 1000 members, 25 %, 125/s, 6s left"},
		{"long", 4_000_000, 100_000_000, 20 * time.Second, "4000000 of 100000000 members, 4 %, 200000/s, 8m0s left"},
		{"too long", 1, 1 << 60, time.Hour, "1 of 1152921504606846976 members, 0 %, 2.78e-04/s, years left"},
		{"done", 1000, 1000, time.Second, "1000 of 1000 members, 100 %, 1000/s, 0s left"},
	} {
		t.Run(test.name, func(t *testing.T) {
			if got := progressText("members", test.done, test.total, test.lasted); got != test.want {
				t.Errorf("got %q, want %q", got, test.want)
			}
		})
	}
}
