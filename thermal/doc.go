// Package thermal holds what a magma store did: temperature against time, and the units and constants in which it is
// told. It knows nothing of diffusion.
//
// A History is made of legs (hold, ramp, relax, sheet, table); it answers what the temperature was, how long it stood
// above a threshold, and what the integral of an Arrhenius factor over any part of it is. A Moment is a point of it as a
// user writes it. All signatures are in SI; text with units is read here and nowhere else:
//
//	storage, err := thermal.ParseQuantity("690 C", thermal.Temperature)  // 963.15 K
//	wait, err := thermal.ParseQuantity("12 kyr", thermal.Duration)       // 3.786912e11 s
//	rim, err := thermal.ParseUncertain("92 +- 2 ppm", thermal.Concentration)
//
// Whatever a user wrote wrongly comes back as an *InputError, which says what is wrong and what to write instead.
package thermal
