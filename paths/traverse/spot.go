package traverse

import (
	"fmt"
	"math"
	"strings"

	"bankfire/thermal"
)

// SpotKind is the form of the area that one analysis averages over, as seen
// along the measured line.
type SpotKind int

// The kinds of spot. The zero value is a point.
const (
	Point    SpotKind = iota // no averaging
	Gaussian                 // a bell of standard deviation Width
	TopHat                   // equal weight over the full width Width
)

// WidthPerSigma is the full width at half maximum of a Gaussian of standard
// deviation 1, 2 sqrt(2 ln 2).
const WidthPerSigma = 2.3548200450309493820231386529194

// Spot is the averaging of the instrument along the measured line.
type Spot struct {
	Kind  SpotKind
	Width float64 // Gaussian: standard deviation, m; TopHat: full width, m; Point: not used
}

// ParseSpot reads a spot as a user writes it: a length followed by what it
// measures, or "point".
//
//	0.8 um fwhm      Gaussian, full width at half maximum
//	0.34 um sigma    Gaussian, standard deviation
//	15 um top-hat    equal weight over the full width
//
// The error is a *thermal.InputError without a place.
func ParseSpot(text string) (Spot, error) {
	words := strings.Fields(text)
	if len(words) == 1 && strings.EqualFold(words[0], "point") {
		return Spot{}, nil
	}
	spot, scale, ok := spotForm(words)
	if !ok {
		return Spot{}, spotError(text, "does not say what the width measures")
	}
	width, err := thermal.ParseQuantity(strings.Join(words[:len(words)-1], " "), thermal.Length)
	if err != nil {
		return Spot{}, err
	}
	if !(width > 0) {
		return Spot{}, spotError(text, "a width must be above zero")
	}
	spot.Width = width * scale
	return spot, nil
}

// spotForm reads the last word of a spot: the kind, and what turns the length
// before it into a Width.
func spotForm(words []string) (s Spot, scale float64, ok bool) {
	if len(words) < 2 {
		return s, 0, false
	}
	switch strings.ToLower(words[len(words)-1]) {
	case "fwhm":
		return Spot{Kind: Gaussian}, 1 / WidthPerSigma, true
	case "sigma":
		return Spot{Kind: Gaussian}, 1, true
	case "top-hat":
		return Spot{Kind: TopHat}, 1, true
	}
	return s, 0, false
}

func spotError(text, problem string) error {
	return &thermal.InputError{Value: text, Problem: problem,
		Remedy: `write, for example, "0.8 um fwhm", "0.34 um sigma", "15 um top-hat" or "point"`}
}

// Sigma returns the standard deviation of the spot, m: how much it widens what
// it sees.
func (s Spot) Sigma() float64 {
	switch s.Kind {
	case Gaussian:
		return s.Width
	case TopHat:
		return s.Width / math.Sqrt(12)
	}
	return 0
}

// reach returns how far from its middle the spot is followed, m. Of a Gaussian
// the part beyond six standard deviations, 2e-9 of the whole, is left out.
func (s Spot) reach() float64 {
	const gaussianReach = 6
	switch s.Kind {
	case Gaussian:
		return gaussianReach * s.Width
	case TopHat:
		return s.Width / 2
	}
	return 0
}

// density returns the weight of the spot at distance u from its middle, up to
// a constant factor.
func (s Spot) density(u float64) float64 {
	if s.Kind == Gaussian {
		z := u / s.Width
		return math.Exp(-z * z / 2)
	}
	return 1
}

// check panics on a spot that no reader hands out.
func (s Spot) check() {
	if s.Kind < Point || s.Kind > TopHat {
		panic(fmt.Sprintf("traverse: unknown kind of spot %d", s.Kind))
	}
	if s.Kind != Point && !(s.Width > 0 && s.Width <= math.MaxFloat64) {
		panic(fmt.Sprintf("traverse: spot width %g m", s.Width))
	}
}
