package published_test

import (
	"math"
	"testing"

	"bankfire/thermal/published"
)

// A test in any package of the module. The rows that it does not judge are named as failures.
func ExampleRun() {
	test := func(t *testing.T) {
		published.Run(t, "A01", func(t *testing.T, c *published.Check) {
			c.Program(t, "A01.01", math.Erf(0.1), c.Exact("A01.01"))
		})
	}
	_ = test
}
