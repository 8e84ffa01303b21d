package main

import (
	"fmt"
	"math"

	"bankfire/diffusion"
	"bankfire/thermal"
)

// problem is one of those of README.md, without its grid.
type problem struct {
	name    string
	size    float64 // m
	span    float64 // range of the start
	moving  bool    // whether the rim moves
	element diffusion.Problem
	legs    []thermal.Leg
}

func celsius(t float64) float64 { return t + thermal.ZeroCelsius }

// problemOf is the problem called name.
func problemOf(name string) (*problem, error) {
	switch name {
	case "P1":
		return pulses(), nil
	case "P2":
		return zoned(), nil
	case "P3":
		return own(), nil
	}
	return nil, fmt.Errorf("no problem %q", name)
}

// pulses is P1: a trace in a slab with three zones and a held rim, through ten pulses of heat.
func pulses() *problem {
	p := &problem{name: "P1", size: 200e-6, span: 60, element: diffusion.Problem{
		Zones: []diffusion.Zone{{Outer: 80e-6, Start: 100}, {Outer: 160e-6, Start: 40}, {Outer: 200e-6, Start: 70}},
		Law:   diffusion.NewLaw(7.01e-8, 273e3),
		Outer: []diffusion.Rim{{Kind: diffusion.Held, Value: 70}},
	}}
	const year = thermal.Year
	store, hot := celsius(690), celsius(780)
	p.legs = append(p.legs, thermal.Leg{Kind: thermal.Hold, For: 100 * year, T0: store})
	for i := range 10 {
		rest := 175 * year
		if i == 9 {
			rest = 75 * year
		}
		p.legs = append(p.legs, thermal.Leg{Kind: thermal.Ramp, For: 5 * year, T0: store, T1: hot},
			thermal.Leg{Kind: thermal.Hold, For: 20 * year, T0: hot},
			thermal.Leg{Kind: thermal.Relax, For: rest, T0: hot, T1: store, Tau: 15 * year})
	}
	return p
}

// zoned is P2: P1 coupled to a zoned host, with a rim that follows temperature.
func zoned() *problem {
	const coupling = -26700 // J/mol
	host := func(r float64) float64 {
		x := r * 1e6
		return 0.25 + 0.10*(1+math.Tanh((x-80)/3)) - 0.075*(1+math.Tanh((x-160)/3))
	}
	p := pulses()
	p.name, p.moving = "P2", true
	p.element.Law = diffusion.NewLaw(2.92*math.Pow(10, -4.08), 276e3)
	p.element.Host = host
	p.element.LnK = func(x, temp float64) float64 { return coupling * x / (thermal.GasConstant * temp) }
	p.element.Spread = func(r float64) float64 { return math.Pow(10, -4.1*host(r)) }
	const e = -coupling / thermal.GasConstant * 0.30
	p.element.Outer = []diffusion.Rim{{Kind: diffusion.Following, Equilibrium: &diffusion.Arrhenius{LnA: math.Log(100) + e/1023.15, E: e}}}
	return p
}

// own is P3: a ball in which D depends on the element itself.
func own() *problem {
	const week = 7 * thermal.Day
	half := thermal.Year / 2
	return &problem{name: "P3", size: 300e-6, span: 0.1,
		element: diffusion.Problem{
			Shape: diffusion.Ball,
			Zones: []diffusion.Zone{{Outer: 150e-6, Start: 0.1}, {Outer: 300e-6, Start: 0.2}},
			Law:   diffusion.NewLaw(math.Pow(10, -9.21), 201e3),
			Own:   func(x float64) float64 { return math.Exp(3 * math.Ln10 * (x - 0.1)) },
			Outer: []diffusion.Rim{{Kind: diffusion.Held, Value: 0.25}},
		},
		legs: []thermal.Leg{
			{Kind: thermal.Ramp, For: half, T0: celsius(1150), T1: celsius(1100)},
			{Kind: thermal.Hold, For: week, T0: celsius(1200)},
			{Kind: thermal.Ramp, For: half - week, T0: celsius(1100 - 100*week/thermal.Year), T1: celsius(1050)},
		},
	}
}

// faces are those of n equal cells.
func (p *problem) faces(n int) []float64 {
	faces := make([]float64, n+1)
	for i := range faces {
		faces[i] = p.size * float64(i) / float64(n)
	}
	for _, z := range p.element.Zones { // to the bit
		faces[int(math.Round(z.Outer/p.size*float64(n)))] = z.Outer
	}
	return faces
}
