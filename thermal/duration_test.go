package thermal

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"
)

// TestTimeAboveClosed compares with what can be said without the code.
func TestTimeAboveClosed(t *testing.T) {
	relax := Leg{Kind: Relax, For: 10, T0: 1100, T1: 1000, Tau: 2}
	heat := Leg{Kind: Relax, For: 10, T0: 900, T1: 1000, Tau: 2}
	ramp := Leg{Kind: Ramp, For: 10, T0: 900, T1: 1000}
	table := Leg{Kind: Table, Rows: &Rows{Time: []float64{0, 4, 4, 6, 10}, Temp: []float64{900, 1000, 1100, 1100, 900}}}
	tests := []struct {
		name string
		leg  Leg
		temp float64
		want float64
	}{
		{"hold above", Leg{Kind: Hold, For: 7, T0: 1000}, 999, 7},
		{"hold at the temperature is not above it", Leg{Kind: Hold, For: 7, T0: 1000}, 1000, 0},
		{"hold below", Leg{Kind: Hold, For: 7, T0: 1000}, 1001, 0},
		{"ramp, a quarter", ramp, 975, 2.5},
		{"ramp, all", ramp, 900, 10},
		{"ramp, none", ramp, 1000, 0},
		{"ramp down, a quarter", Leg{Kind: Ramp, For: 10, T0: 1000, T1: 900}, 975, 2.5},
		{"relax, one e-fold", relax, 1000 + 100/math.E, 2},
		{"relax, all", relax, 1000, 10},
		{"relax, none", relax, 1100, 0},
		{"relax upwards, all but one e-fold", heat, 1000 - 100/math.E, 8},
		{"relax upwards, none", heat, 1000, 0},
		{"table, between", table, 1050, 3},
		{"table, at its start", table, 900, 10},
		{"table, low", table, 950, 2 + 2 + 3},
		{"table, none", table, 1100, 0},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			closeTo(t, "time above", test.leg.TimeAbove(test.temp), test.want, 1e-13*10) // rounding of the temperatures
		})
	}
}

// TestTimeAboveAgainstBisection: on random paths the time above any temperature is that found by sampling every leg
// densely and bisecting between samples on opposite sides.
func TestTimeAboveAgainstBisection(t *testing.T) {
	r := rand.New(rand.NewPCG(2, 10))
	for n := range 150 {
		h := randomHistory(t, r)
		temp := between(r, 400, 1500)
		want := 0.0
		for i := range h.legs {
			want += bisected(&h.legs[i], temp)
		}
		// A crossing is where T = temp to an ulp; where the curve is flat that is 1e-16 T/(dT/dt), and the dense samples
		// miss excursions shorter than 1/4000 of a leg.
		closeTo(t, fmt.Sprintf("path %d above %g K", n, temp), h.TimeAbove(temp), want, 1e-9*h.Life())
	}
}

// bisected is the time above temp along a leg, as hotParts finds it.
func bisected(l *Leg, temp float64) float64 {
	sum := 0.0
	for _, part := range hotParts(l, temp) {
		sum += part[1] - part[0]
	}
	return sum
}

// hotParts is the stretches of a leg above temp, start and end, by samples that crowd towards its start, and bisection
// between them. What is above throughout may come in several pieces.
func hotParts(l *Leg, temp float64) [][2]float64 {
	times := []float64{}
	for i := range 4001 {
		x := float64(i) / 4000
		times = append(times, l.For*math.Pow(x, 5))
	}
	if l.Kind == Table { // samples at the rows, since temperature may jump there
		times = l.Rows.Time
	}
	var parts [][2]float64
	add := func(from, to float64) {
		if last := len(parts) - 1; last >= 0 && parts[last][1] == from && l.Kind != Table {
			parts[last][1] = to
			return
		}
		parts = append(parts, [2]float64{from, to})
	}
	for i := range len(times) - 1 {
		a, b := times[i], times[i+1]
		hotA, hotB := l.At(a) > temp, l.before(b) > temp
		switch {
		case hotA && hotB:
			add(a, b)
		case hotA != hotB:
			lo, hi := a, b
			for range 200 {
				if mid := lo + (hi-lo)/2; (l.before(mid) > temp) == hotA {
					lo = mid
				} else {
					hi = mid
				}
			}
			if hotA {
				add(a, lo)
			} else {
				add(lo, b)
			}
		}
	}
	return parts
}

// TestDurationFalls: the duration curve falls from the life of the path to 0 and never rises.
func TestDurationFalls(t *testing.T) {
	r := rand.New(rand.NewPCG(2, 11))
	for n := range 100 {
		h := randomHistory(t, r)
		lo, hi := h.Range()
		temps := make([]float64, 200)
		for i := range temps {
			temps[i] = lo - 1 + (hi-lo+2)*float64(i)/199
		}
		curve := h.Duration(temps)
		closeTo(t, fmt.Sprintf("path %d: time above less than its lowest temperature", n), curve[0].Time, h.Life(), 1e-12*h.Life())
		if last := curve[199].Time; last != 0 {
			t.Errorf("path %d: %g s above more than its highest temperature", n, last)
		}
		for i := 1; i < len(curve); i++ {
			if !(curve[i].Time <= curve[i-1].Time*(1+1e-12)) || curve[i].Temp != temps[i] {
				t.Fatalf("path %d: rises from %v to %v", n, curve[i-1], curve[i])
			}
		}
	}
}

// TestRangeIsReached: no temperature of a path lies outside its range, and both ends are reached.
func TestRangeIsReached(t *testing.T) {
	const slack = 1e-9 // K; samples come that near to a flat maximum
	r := rand.New(rand.NewPCG(2, 12))
	for n := range 150 {
		l := randomLeg(r)
		lo, hi := l.Range()
		least, most := math.Inf(1), math.Inf(-1)
		for i := range 20001 {
			at := l.length() * math.Pow(float64(i)/20000, 5)
			for _, temp := range []float64{l.before(at), l.At(at)} {
				least, most = math.Min(least, temp), math.Max(most, temp)
			}
		}
		if l.Kind == Table {
			for _, temp := range l.Rows.Temp {
				least, most = math.Min(least, temp), math.Max(most, temp)
			}
		}
		if !(least >= lo-slack && most <= hi+slack) {
			t.Errorf("leg %d %v: temperatures %g to %g outside the range %g to %g", n, l, least, most, lo, hi)
		}
		if !(lo >= least-1e-4 && hi <= most+1e-4) { // 20000 samples are that near to the peak of a sheet
			t.Errorf("leg %d %v: range %g to %g, reached %g to %g", n, l, lo, hi, least, most)
		}
	}
}

// TestEruptionStopsTime: what comes after the eruption is not counted above a threshold, whatever leg it falls into.
func TestEruptionStopsTime(t *testing.T) {
	r := rand.New(rand.NewPCG(2, 13))
	for n := range 100 {
		h := randomHistory(t, r)
		eruption, temp := between(r, 0.01, 1)*h.Life(), between(r, 600, 1400)
		if err := h.SetEruption(eruption); err != nil {
			t.Fatal(err)
		}
		want := 0.0
		for i := range h.legs {
			l := h.legs[i]
			if left := eruption - h.starts[i]; left <= 0 {
				continue
			} else if left < l.For && (l.Kind == Hold || l.Kind == Relax || l.Kind == SheetCooling || l.Kind == Table) {
				l.For = left
			} else if left < l.For { // a ramp cut short ends elsewhere
				l.T1, l.For = l.At(left), left
			}
			want += l.TimeAbove(temp)
		}
		closeTo(t, fmt.Sprintf("path %d", n), h.TimeAbove(temp), want, 1e-11*h.Life())
	}
}
