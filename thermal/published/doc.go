// Package published lets tests of every package compare themselves with the published values of testdata/checks.csv.
//
// A test function TestPublished holds one subtest a check, named by its id. Every row of the check must be judged, either
// with a value of the program's own code or with a formula that lives in the test alone, which is counted apart:
//
//	func TestPublished(t *testing.T) {
//		published.Run(t, "A01", func(t *testing.T, c *published.Check) {
//			c.Program(t, "A01.01", math.Erf(0.1), c.Exact("A01.01"))
//		})
//	}
//
// Each judged row logs "row A01.01 program" or "row A01.01 formula", so `go test -v -run TestPublished ./...` counts them.
package published
