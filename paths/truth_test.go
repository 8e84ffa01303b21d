package paths

import (
	"context"
	"fmt"
	"math/rand/v2"
	"os"
	"slices"
	"strconv"
	"testing"
	"time"
)

func TestScratch(t *testing.T) {
	n, _ := strconv.Atoi(os.Getenv("N"))
	for _, c := range slices.Concat(truthCases(), faultCases()) {
		t.Run(c.name, func(t *testing.T) {
			start := time.Now()
			ok := 0
			sum := 0.0
			others := map[string]int{}
			for i := range n {
				sim := c.draw(rand.New(rand.NewPCG(c.seed, uint64(i))))
				r, err := Weigh(context.Background(), sim.study, 2)
				if err != nil {
					t.Fatal(err)
				}
				sum += r.Paths[0].Outcome.Misfit
				if sim.right(r) {
					ok++
				} else {
					others[fmt.Sprint(r.Paths[0].Outcome.Verdict, r.Own[0].Findings)]++
				}
			}
			t.Logf("%s: %d of %d, misfit %.4g, %v each", c.name, ok, n, sum/float64(n), time.Since(start)/time.Duration(n))
			if os.Getenv("V") != "" {
				for k, v := range others {
					t.Log(v, k)
				}
			}
		})
	}
}
