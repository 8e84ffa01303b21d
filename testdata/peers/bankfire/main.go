// Command bankfire runs the problems P1, P2 and P3 of testdata/peers/README.md
// through the diffusion package:
//
//	bankfire tune                           the steps that each problem, variant and error asks for
//	bankfire time PROBLEM VARIANT LONGEST   microseconds of processor time per path
//	bankfire profile PROBLEM CELLS          the profile at the end, integrated to 1e-9
//
// It is run by testdata/peers/run and no part of the program.
package main

import (
	"fmt"
	"math"
	"os"
	"strconv"
	"syscall"

	"bankfire/diffusion"
	"bankfire/thermal"
)

const (
	cells     = 200
	reference = 5e-4 // growth of the steps of the reference
	allowed   = 1e-9 // error of the reference, as a part of the range of the start
)

// variants are the ways in which a path is run.
var variants = []string{"few-steps", "few-steps-next", "own-steps"}

func main() {
	err := fmt.Errorf("usage: bankfire tune | time PROBLEM VARIANT LONGEST | profile PROBLEM CELLS")
	switch args := os.Args[1:]; {
	case len(args) == 1 && args[0] == "tune":
		err = tune()
	case len(args) == 4 && args[0] == "time":
		err = clock(args[1], args[2], args[3])
	case len(args) == 3 && args[0] == "profile":
		err = profile(args[1], args[2])
	}
	if err != nil {
		fmt.Fprintln(os.Stderr, "bankfire:", err)
		os.Exit(1)
	}
}

// steps are the options of a variant whose longest step is a part of the path's G.
// The few steps double from an eighth of that, after two damped ones; where the
// rim moves they shrink again towards the end.
func (p *problem) steps(variant string, longest float64) diffusion.Options {
	o := diffusion.Options{Faces: p.faces(cells)}
	if variant == "own-steps" {
		return o
	}
	o.Damp = 2
	at, df := 0.0, longest/8
	for {
		take := min(df, longest)
		if p.moving {
			take = min(take, longest/1000+2*longest*(1-at))
		}
		if take >= (1-at)*(1-1e-9) {
			break
		}
		at += take
		df *= 2
		o.Fractions = append(o.Fractions, at)
	}
	o.Fractions = append(o.Fractions, 1)
	return o
}

// runner takes a problem's start along its path, time after time.
type runner struct {
	problem *problem
	options diffusion.Options
	plan    *diffusion.Plan
	history thermal.History
	course  diffusion.Course
	fields  []diffusion.Field
}

// path is all that a path takes: with set-up from the problem on, else with the
// plan that is there.
func (r *runner) path(setup bool) error {
	if setup {
		p := *r.problem
		*r = runner{problem: r.problem, options: r.options, fields: make([]diffusion.Field, 1)}
		var err error
		if r.plan, err = diffusion.Compile(&p.element, r.options); err != nil {
			return err
		}
	}
	if err := r.history.Set(r.problem.legs); err != nil {
		return err
	}
	if err := r.plan.Course(&r.course, &r.history, r.history.Life()); err != nil {
		return err
	}
	return r.plan.Run(r.fields, []diffusion.Job{{Course: &r.course}})
}

func solve(p *problem, o diffusion.Options) ([]float64, error) {
	r := runner{problem: p, options: o}
	if err := r.path(true); err != nil {
		return nil, err
	}
	return r.fields[0].Cols[0], nil
}

// refer is the profile on the same grid integrated to 1e-9.
func (p *problem) refer(n int) ([]float64, error) {
	truth, err := solve(p, diffusion.Options{Faces: p.faces(n), Growth: reference})
	if err != nil {
		return nil, err
	}
	longer, err := solve(p, diffusion.Options{Faces: p.faces(n), Growth: 2 * reference})
	if err != nil {
		return nil, err
	}
	// with twice the steps a method of second order misses by a quarter: by a third of the difference
	if e := p.worst(longer, truth) / 3; !(e <= allowed) {
		return nil, fmt.Errorf("the reference of %s is only good to %.2g", p.name, e)
	}
	return truth, nil
}

// worst is the largest difference of two profiles, as a part of the range of the start.
func (p *problem) worst(a, b []float64) float64 {
	most := 0.0
	for i := range a {
		most = math.Max(most, math.Abs(a[i]-b[i]))
	}
	return most / p.span
}

func tune() error {
	for _, name := range []string{"P1", "P2", "P3"} {
		p, err := problemOf(name)
		if err != nil {
			return err
		}
		truth, err := p.refer(cells)
		if err != nil {
			return err
		}
		for _, variant := range variants {
			if err := p.tune(variant, truth); err != nil {
				return err
			}
		}
	}
	return nil
}

// tune prints the longest step with which an error is first reached, and the one
// from which on it is kept.
func (p *problem) tune(variant string, truth []float64) error {
	var longest, errors []float64
	for k := 8; k <= 48; k++ {
		l := math.Exp2(-float64(k) / 8)
		c, err := solve(p, p.steps(variant, l))
		if err != nil {
			return err
		}
		longest, errors = append(longest, l), append(errors, p.worst(c, truth))
	}
	for _, wanted := range []float64{1e-3, 1e-4} {
		first, safe := len(errors), 0
		for k, e := range errors {
			if e <= wanted {
				first = min(first, k)
			} else {
				safe = k + 1
			}
		}
		if safe == len(errors) {
			return fmt.Errorf("%s, %s: no steps have an error of %g", p.name, variant, wanted)
		}
		fmt.Printf("%s %s %g %.4g %.2g first\n", p.name, variant, wanted, longest[first], errors[first])
		fmt.Printf("%s %s %g %.4g %.2g safe\n", p.name, variant, wanted, longest[safe], errors[safe])
	}
	return nil
}

func clock(name, variant, length string) error {
	p, err := problemOf(name)
	if err != nil {
		return err
	}
	longest, err := strconv.ParseFloat(length, 64)
	if err != nil {
		return err
	}
	r := runner{problem: p, options: p.steps(variant, longest)}
	if err := r.path(true); err != nil {
		return err
	}
	begin, spent, paths := seconds(), 0.0, 0
	for spent < 0.3 {
		for range 100 {
			if err := r.path(variant != "few-steps-next"); err != nil {
				return err
			}
		}
		paths += 100
		spent = seconds() - begin
	}
	fmt.Printf("%.2f\n", 1e6*spent/float64(paths))
	return nil
}

// seconds is the processor time of this process, the collector's included.
func seconds() float64 {
	var u syscall.Rusage
	if err := syscall.Getrusage(syscall.RUSAGE_SELF, &u); err != nil {
		return math.NaN()
	}
	return float64(u.Utime.Nano()+u.Stime.Nano()) * 1e-9
}

func profile(name, number string) error {
	p, err := problemOf(name)
	if err != nil {
		return err
	}
	n, err := strconv.Atoi(number)
	if err != nil {
		return err
	}
	c, err := p.refer(n)
	if err != nil {
		return err
	}
	for _, v := range c {
		fmt.Printf("%.17g\n", v)
	}
	return nil
}
