package figure

import (
	"fmt"
	"math"
	"math/rand/v2"

	"bankfire/thermal"
)

const year = thermal.Year

// invented makes a study that looks real: a step at 150 um, blurred by erfc over the
// diffusion length of each path, measured every 3 um, and duration curves of stores that
// are woken now and then.
func invented(paths int) *Weighing {
	f := &Weighing{
		Title:    "Harrow Fell rhyolite, quartz HF-12",
		Subject:  "Ti in quartz HF-12",
		Quantity: "Ti",
		Unit:     "ppm",
		Start:    Line{At: []float64{0, 150e-6, 150e-6, 200e-6}, Value: []float64{94, 94, 58, 58}},
		Thresholds: []Threshold{
			{"solidus", 670 + thermal.ZeroCelsius}, {"lock-up", 750 + thermal.ZeroCelsius},
		},
	}
	noise := rand.New(rand.NewPCG(7, 11))
	for um := 90.0; um <= 197; um += 2.5 {
		v := blurred(um*1e-6, 7e-6)
		f.Points = append(f.Points, Point{At: um * 1e-6, Value: v + 1.6*noise.NormFloat64(), Sigma: 1.6})
	}
	names := []string{"kept warm", "kept cold", "cold, woken ten times", "cold, for ten times longer"}
	words := []string{"too smooth: needs 0.083 x the diffusion", "too sharp: needs 3.2 x more diffusion", "reproduces",
		"wrong shape: no amount of diffusion gives this profile"}
	length := []float64{24e-6, 3.9e-6, 6.8e-6, 12e-6}
	for i := range paths {
		k := i % 4
		p := Path{Name: names[k], Verdict: words[k], Reproduces: k == 2 || i == 7}
		if i >= 4 {
			p.Name = fmt.Sprintf("%s, variant %d", p.Name, i/4+1)
		}
		p.fill(f, length[k]*(1+0.13*float64(i/4)))
		p.Duration = store(i)
		f.Paths = append(f.Paths, p)
	}
	return f
}

func blurred(at, length float64) float64 {
	return 58 + 18*math.Erfc((at-150e-6)/(2*length))
}

func (p *Path) fill(f *Weighing, length float64) {
	for um := 0.0; um <= 200; um += 0.5 {
		p.Profile.At = append(p.Profile.At, um*1e-6)
		p.Profile.Value = append(p.Profile.Value, blurred(um*1e-6, length))
	}
	for _, q := range f.Points {
		p.Residuals = append(p.Residuals, (q.Value-blurred(q.At, length))/q.Sigma)
	}
}

// store gives the duration curve of path i.
func store(i int) []thermal.DurationPoint {
	life := []float64{800, 9000, 9100, 90e3}[i%4] * (1 + 0.3*float64(i/4))
	cold := []float64{750, 690, 690, 690}[i%4] + 7*float64(i/4)
	hot := []float64{750, 705, 780, 742}[i%4] + 5*float64(i/4)
	wake := []float64{0, 20, 300, 60}[i%4]
	var curve []thermal.DurationPoint
	for c := 640.0; c <= 820; c += 0.5 {
		t := 0.0
		switch {
		case c < cold:
			t = life
		case c < hot:
			t = wake * (1 - math.Sqrt((c-cold)/(hot-cold)))
		}
		curve = append(curve, thermal.DurationPoint{Temp: c + thermal.ZeroCelsius, Time: t * year})
	}
	return curve
}
