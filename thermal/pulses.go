package thermal

import "math"

// Pulse is one reheat of a spec that has many, see Build.
type Pulse struct {
	At    float64 // s from the start of the leg
	Peak  float64 // K
	Rise  float64 // s; 0 = at once
	Dwell float64 // s
	Efold float64 // s
}

// pulseCourse is what temperature does from the start of a pulse on while no other takes its place.
type pulseCourse [3]Leg

// course is that of a pulse which begins at temp, K, and relaxes towards base, K.
func (p *Pulse) course(temp, base float64) pulseCourse {
	return pulseCourse{
		{Kind: Ramp, For: p.Rise, T0: temp, T1: p.Peak},
		{Kind: Hold, For: p.Dwell, T0: p.Peak},
		{Kind: Relax, For: math.Inf(1), T0: p.Peak, T1: base, Tau: p.Efold},
	}
}

// hottest is the highest temperature from t seconds into the course on, K.
func (c *pulseCourse) hottest(t float64) float64 {
	if t < c[0].For+c[1].For {
		return c[1].T0
	}
	return c[2].At(t - c[0].For - c[1].For)
}

// at is the temperature t seconds into the course, K.
func (c *pulseCourse) at(t float64) float64 {
	for i := range c {
		if t < c[i].For {
			return c[i].At(t)
		}
		t -= c[i].For
	}
	return c[2].T1
}

// pulses unrolls many reheats that rise from base.
func (b *Builder) pulses(s *Spec, base float64) error {
	if s.Temp < base {
		return s.Place.Error(tempText(s.Temp), "peak below "+tempText(base)+", where the reheats begin", "want peaks above it")
	}
	began := 0.0
	now := (&Pulse{Dwell: s.For, Peak: base, Efold: 1}).course(base, base)
	for i := range s.Pulses {
		p := &s.Pulses[i]
		if into := p.At - began; p.Peak > now.hottest(into) {
			temp := now.at(into)
			b.putFirst(&now, into)
			began, now = p.At, p.course(temp, base)
		}
	}
	b.putFirst(&now, s.For-began)
	return nil
}

// putFirst appends the first t seconds of the course.
func (b *Builder) putFirst(c *pulseCourse, t float64) {
	for _, l := range c {
		lasts := min(l.For, t)
		if t -= lasts; !(lasts > 0) {
			continue
		}
		if l.Kind == Ramp {
			l.T1 = l.At(lasts)
		}
		l.For = lasts
		b.put(l)
	}
}

// checkPulses is nil, or the first thing that is wrong with the pulses.
func (s *Spec) checkPulses() *InputError {
	last := 0.0
	for i := range s.Pulses {
		p := &s.Pulses[i]
		if !(p.At >= last && p.At <= s.For) {
			return &InputError{Value: timeText(p.At), Problem: "a reheat before the last or after the end", Remedy: "want them in order, within the leg"}
		}
		last = p.At
		wrong := firstProblem(checkTemperature(p.Peak), checkDuration(p.Rise), checkDuration(p.Dwell), checkEfold(p.Efold))
		if wrong != nil {
			return wrong
		}
	}
	return nil
}
