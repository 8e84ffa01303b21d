// Package diffusion solves how an element diffuses in a crystal along a thermal history: laws, crystal shapes and grids,
// starts, rims, and a Crank-Nicolson solver whose steps are fractions of the diffusion integral G of the path. All is in SI.
//
// A Problem is one element in one crystal. Compile lays grid and steps for it; a Course is what the plan needs of one
// history; Run takes the start through it, and Audit states the error too:
//
//	plan, err := diffusion.Compile(&problem, diffusion.Options{})
//	var course diffusion.Course
//	err = plan.Course(&course, history, history.Life())
//	var field diffusion.Field
//	err = plan.Audit(&field, diffusion.Job{Course: &course})
//
// Reading order: problem.go, plan.go, course.go, run.go, sweep.go; jumps.go and book.go for errors and accounts.
package diffusion
