package diffusion

import (
	"fmt"
	"math"
	"testing"
)

// distance is the root mean square of what two columns in the cells of a plan
// differ by.
func distance(p *Plan, a, b []float64) float64 {
	sum, volume := 0.0, 0.0
	for i, v := range p.Volumes() {
		sum += v * (a[i] - b[i]) * (a[i] - b[i])
		volume += v
	}
	return math.Sqrt(sum / volume)
}

// TestOrdersOfPairs: second order for every pair of shape, rim, law, start and path,
// whatever else the case has. With -v it prints a table: for each case, three times the
// first error and all orders:
//
//   - of the steps, halved in the same cells and measured against eight times as many;
//   - of the cells, halved in the same steps and measured by what each halving changes;
//   - of both, halved together, in even steps that are damped after a jump.
//
// The last order of each is judged: the first ones still see that damped steps miss
// more, and rims that have just jumped. Where D vanishes with the element a front, as
// steep as it can be, stands somewhere within a cell, and halving the cells moves that
// place: there the mean of the orders in cells is judged, and is at least one.
func TestOrdersOfPairs(t *testing.T) {
	const order, within, ofFronts = 2, 0.15, 1
	table := fmt.Sprintf("%-50s  %-6s  %-18s  %-23s  both", "", "damped", "steps", "cells")
	for _, c := range pairCases() {
		t.Run(c.String(), func(t *testing.T) {
			q := c.problem(t)
			line := fmt.Sprintf("%-50v  %-6v", c, q.damped)
			all := map[string][]float64{
				"steps": stepErrors(t, q),
				"cells": halvings(20, func(n int) solution { return q.solve(t, n, 400) }),
				"both":  halvings(20, func(n int) solution { return q.evenly(t, n, n/2) }),
			}
			for _, of := range []string{"steps", "cells", "both"} {
				text, last, mean := ordersOf(all[of])
				line += "  " + text
				least, most := order-within, order+within
				switch {
				case c.law == "front" && of != "steps":
					last, least, most = mean, ofFronts, math.Inf(1)
				case q.Own != nil && c.start == "jump" && of == "both":
					least = afterOwnJump
				}
				if !(last >= least && last <= most) {
					t.Errorf("order %.2f in %s, want %.2f to %.2f", last, of, least, most)
				}
			}
			table += "\n" + line
		})
	}
	t.Log(table)
}

// afterOwnJump is the order in even steps where D follows the element and the start
// jumps. The first of them, damped or not, see a layer of width w = sqrt(D dt) as it is
// not. Content and its centre come out right all the same, but how fast its spread
// grows depends on D throughout the layer and is wrong by w for a time dt: order 3/2,
// which is approached from above. Steps that grow from tiny ones, as those of the
// other two measurements and of the program's plan, have the usual order.
const afterOwnJump = 1.5

// stepErrors returns the errors of a few cells in 80 steps between two events, in twice
// and in four times as many. Errors below 1e-8 of the range, as in still more, also show
// that iterations end early where D follows the element.
func stepErrors(t *testing.T, q pairProblem) []float64 {
	const cells, steps, finer = 20, 80, 32
	truth := q.solve(t, cells, finer*steps)
	var errs []float64
	for n := steps; n <= 4*steps; n *= 2 {
		errs = append(errs, distance(truth.plan, q.solve(t, cells, n).c, truth.c))
	}
	return errs
}

// halvings returns by how much a solution of n, and those of twice, four and eight
// times as many, differ from that of twice as many more, as the coarser sees it.
func halvings(n int, solve func(n int) solution) []float64 {
	var all []float64
	coarse := solve(n)
	for range 4 {
		n *= 2
		fine := solve(n)
		all = append(all, distance(coarse.plan, coarse.c, onto(coarse.plan, fine.plan, fine.c)))
		coarse = fine
	}
	return all
}

// ordersOf returns the first error and all orders as a text, their last and their mean.
func ordersOf(errs []float64) (text string, last, mean float64) {
	text = fmt.Sprintf("%.1e:", errs[0])
	for i := 1; i < len(errs); i++ {
		last = math.Log2(errs[i-1] / errs[i])
		mean += last / float64(len(errs)-1)
		text += fmt.Sprintf(" %.2f", last)
	}
	return text, last, mean
}
