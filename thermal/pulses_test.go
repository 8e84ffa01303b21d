package thermal

import (
	"math"
	"math/rand/v2"
	"slices"
	"strings"
	"testing"
)

// reheats is a leg at 900 K for 100 s with the pulses.
func reheats(pulses ...Pulse) Spec {
	return Spec{Kind: SpecPulses, Name: "wakes", Temp: 900, From: 900, For: 100, Pulses: pulses, Setting: 2}
}

// TestPulsesAreLegs: what pulses become, worked out by hand.
func TestPulsesAreLegs(t *testing.T) {
	e := math.Exp(-1)
	for _, test := range []struct {
		name   string
		pulses []Pulse
		want   []Leg
	}{
		{"none", nil, []Leg{{For: 100, T0: 900}}},
		{"one", []Pulse{{At: 10, Peak: 1000, Rise: 5, Dwell: 20, Efold: 7}},
			[]Leg{{For: 10, T0: 900}, {Kind: Ramp, For: 5, T0: 900, T1: 1000}, {For: 20, T0: 1000}, {Kind: Relax, For: 65, T0: 1000, T1: 900, Tau: 7}}},
		{"at once, without dwell, cut by the end", []Pulse{{At: 97, Peak: 1000, Efold: 7}},
			[]Leg{{For: 97, T0: 900}, {Kind: Relax, For: 3, T0: 1000, T1: 900, Tau: 7}}},
		{"cut while it rises", []Pulse{{At: 96, Peak: 1000, Rise: 8, Efold: 7}},
			[]Leg{{For: 96, T0: 900}, {Kind: Ramp, For: 4, T0: 900, T1: 950}}},
		{"from the temperature reached", []Pulse{{At: 10, Peak: 1000, Efold: 20}, {At: 30, Peak: 960, Rise: 2, Dwell: 3, Efold: 20}},
			[]Leg{{For: 10, T0: 900}, {Kind: Relax, For: 20, T0: 1000, T1: 900, Tau: 20}, {Kind: Ramp, For: 2, T0: 900 + 100*e, T1: 960},
				{For: 3, T0: 960}, {Kind: Relax, For: 65, T0: 960, T1: 900, Tau: 20}}},
		{"not felt while the last is as hot", []Pulse{{At: 10, Peak: 1000, Dwell: 5, Efold: 20}, {At: 12, Peak: 1000, Efold: 20}, {At: 20, Peak: 960, Efold: 20}},
			[]Leg{{For: 10, T0: 900}, {For: 5, T0: 1000}, {Kind: Relax, For: 85, T0: 1000, T1: 900, Tau: 20}}},
		{"not felt while the last rises to more", []Pulse{{At: 10, Peak: 1000, Rise: 10, Efold: 20}, {At: 12, Peak: 980, Efold: 20}},
			[]Leg{{For: 10, T0: 900}, {Kind: Ramp, For: 10, T0: 900, T1: 1000}, {Kind: Relax, For: 80, T0: 1000, T1: 900, Tau: 20}}},
		{"hotter while the last rises", []Pulse{{At: 10, Peak: 1000, Rise: 10, Efold: 20}, {At: 15, Peak: 1050, Rise: 1, Efold: 20}},
			[]Leg{{For: 10, T0: 900}, {Kind: Ramp, For: 5, T0: 900, T1: 950}, {Kind: Ramp, For: 1, T0: 950, T1: 1050}, {Kind: Relax, For: 84, T0: 1050, T1: 900, Tau: 20}}},
	} {
		t.Run(test.name, func(t *testing.T) {
			var h History
			if err := Build(&h, []Spec{reheats(test.pulses...)}); err != nil {
				t.Fatal(err)
			}
			for i := range test.want {
				test.want[i].Setting = 2
			}
			const units = 1e-12 // round-off of one exponential at 1000 K
			same := func(a, b Leg) bool {
				close := math.Abs(a.T0-b.T0) <= units*1000
				a.T0 = b.T0
				return close && a == b
			}
			if got := h.Legs(); !slices.EqualFunc(got, test.want, same) {
				t.Errorf("legs %v\nwant %v", got, test.want)
			}
			if h.Life() != 100 || h.Names()[0] != (Named{"wakes", 0, 100}) {
				t.Errorf("life %v, names %v", h.Life(), h.Names())
			}
		})
	}
}

// TestPulsesOverlap: at random, temperature jumps nowhere if every pulse rises, stays
// between store and peaks, and is at any time at least what the pulse that began last
// and was felt makes of it.
func TestPulsesOverlap(t *testing.T) {
	r := rand.New(rand.NewPCG(1, 2))
	for range 200 {
		var pulses []Pulse
		most := 900.0
		for at := r.Float64() * 10; at < 100; at += r.ExpFloat64() * 8 {
			p := Pulse{At: at, Peak: 900 + 200*r.Float64(), Rise: 0.1 + 3*r.Float64(), Dwell: 5 * r.Float64(), Efold: 1 + 20*r.Float64()}
			pulses, most = append(pulses, p), max(most, p.Peak)
		}
		var h History
		if err := Build(&h, []Spec{reheats(pulses...)}); err != nil {
			t.Fatal(err)
		}
		const slack = 1e-9 // K, round-off of a chain of some ten exponentials
		if lo, hi := h.Range(); lo < 900-slack || hi > most+slack {
			t.Fatalf("%v to %v K, want 900 to %v", lo, hi, most)
		}
		for i := 1; i < len(h.Legs()); i++ {
			if before, after := h.At(h.Start(i)); math.Abs(after-before) > slack {
				t.Fatalf("jumps from %v to %v K", before, after)
			}
		}
		if math.Abs(h.Life()-100) > slack {
			t.Fatalf("lasts %v s", h.Life())
		}
		for i, p := range pulses { // each is felt at its peak, or it is as hot anyway
			next := 100.0
			if i+1 < len(pulses) {
				next = pulses[i+1].At
			}
			if top := p.At + p.Rise; top < next {
				if at, _ := h.At(top); at < p.Peak-slack && !warmer(&h, p, top) {
					t.Fatalf("pulse %d of %v K: %v K at its peak", i, p.Peak, at)
				}
			}
		}
	}
}

// warmer reports whether the pulse had to stand back for one that was as hot, or still
// to be, when it began.
func warmer(h *History, p Pulse, top float64) bool {
	_, hi := h.RangeIn(p.At, 100)
	return hi >= p.Peak-1e-9 || top > 100
}

// TestWrongPulses: what no leg can be.
func TestWrongPulses(t *testing.T) {
	for _, test := range []struct {
		name, problem string
		change        func(s *Spec)
	}{
		{"peaks below the store", "peak below", func(s *Spec) { s.From = 950 }},
		{"no beginning", "nothing before this reheats", func(s *Spec) { s.From = 0 }},
		{"out of order", "before the last", func(s *Spec) { s.Pulses[1].At = 1 }},
		{"after the end", "after the end", func(s *Spec) { s.Pulses[1].At = 101 }},
		{"no time to relax in", "not an e-fold time", func(s *Spec) { s.Pulses[0].Efold = 0 }},
		{"no number", "not a temperature", func(s *Spec) { s.Pulses[0].Peak = math.NaN() }},
		{"too many", "legs or more", func(s *Spec) { s.Pulses = make([]Pulse, MaxLegs) }},
	} {
		t.Run(test.name, func(t *testing.T) {
			s := reheats(Pulse{At: 10, Peak: 1000, Efold: 7}, Pulse{At: 20, Peak: 1000, Efold: 7})
			test.change(&s)
			if test.name == "too many" {
				for i := range s.Pulses {
					s.Pulses[i] = Pulse{At: 10, Peak: 1000, Efold: 7}
				}
			}
			var h History
			if err := Build(&h, []Spec{s}); err == nil || !strings.Contains(err.Error(), test.problem) {
				t.Errorf("%v, want %q", err, test.problem)
			}
		})
	}
}
