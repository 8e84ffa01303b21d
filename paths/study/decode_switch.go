package study

import (
	"math"
	"slices"
	"strings"

	"bankfire/diffusion"
	"bankfire/diffusion/catalogue"
	"bankfire/thermal"
)

// switching is where one law takes over from another: at an oxygen fugacity, Pa, or
// at a temperature, K; the other is 0.
type switching struct {
	fO2, temp float64
	text      string // as the study has it: "fO2 1e-10 Pa"
}

// switches reports whether a law is one of two regimes.
func switches(n *node) bool { return n.get("above") != nil || n.get("below") != nil }

// switched reads a law that is one above, and another at and below, an oxygen
// fugacity or a temperature.
func (d *decoder) switched(n *node, c *Crystal, e *Element) Law {
	d.keys(n, switchTable)
	before := d.faults
	var laws [2]Law
	for i, side := range [...]string{"above", "below"} {
		const example = `write a law for each side, such as above = "olivine-femg-dohmen2007-tamed", below = "olivine-femg-dohmen2007-ped"`
		if v := d.need(n, side, example); d.is(v, textNode, example) {
			laws[i] = d.law(v, c, e)
		}
	}
	at := d.switchAt(d.need(n, "at", atExample))
	switch {
	case d.faults > before:
		return Law{}
	case laws[0].Key == laws[1].Key:
		d.report(n.get("below"), "the same law above and below", "name another, or the law alone")
		return Law{}
	case !d.agree(n, &laws[0], &laws[1]):
		return Law{}
	}
	d.noteSwitch(at, laws, e)
	d.upsideDown(at, laws, e)
	return d.regimes(at, laws)
}

const atExample = `write where one takes over: at = { fO2 = "1e-10 Pa" } or at = { temperature = "800 C" }`

// switchAt reads where the laws change.
func (d *decoder) switchAt(n *node) (at switching) {
	if !d.is(n, tableNode, atExample) {
		return at
	}
	d.keys(n, switchAtTable)
	fO2, temp := n.get("fO2"), n.get("temperature")
	switch {
	case (fO2 != nil) == (temp != nil):
		d.report(n, "want one of fO2 and temperature", atExample)
	case temp != nil:
		at.temp, _ = d.quantity(temp, temperature)
		at.text = temp.text
	default:
		at.fO2, _ = d.quantity(fO2, fugacity)
		at.text = "fO2 " + fO2.text
		d.used[catalogue.FO2] = true
		switch all, some := d.gives(catalogue.FO2); {
		case some && !all:
			d.lacks(catalogue.FO2, "the switch at "+at.text)
		case !all:
			d.report(fO2, "the laws switch at an fO2, not given in this study", `write [conditions] and below it fO2 = "NNO+0.3"; or switch at a temperature`)
		}
	}
	return at
}

// leastKnown takes the errors of a part's slopes if they are larger. They are those of
// the slopes that the parts have in common.
func (l *Law) leastKnown(part *Law) {
	if part.HostSlopeSigma > l.HostSlopeSigma {
		l.HostSlopeSigma, l.SlopeOf = part.HostSlopeSigma, part.slopeKey()
	}
	if math.Abs(part.OwnSlopeSigma) > math.Abs(l.OwnSlopeSigma) {
		l.OwnSlopeSigma = part.OwnSlopeSigma
	}
}

// agree reports laws of which one factor for the composition cannot be taken out.
func (d *decoder) agree(n *node, a, b *Law) bool {
	const remedy = "choose laws of one slope, or name the law along your traverse"
	switch {
	case a.HostSlope != b.HostSlope:
		d.report(n, "its laws depend on the host in different ways", remedy)
	case a.OwnSlope != b.OwnSlope:
		d.report(n, "its laws depend on the element itself in different ways", remedy)
	default:
		return true
	}
	return false
}

// lnAt is ln of the factor that takes D from the composition of one law to that of
// another of the same slopes.
func (l *Law) lnAt(other *Law) float64 {
	return float64(l.HostSlope*(l.HostAt-other.HostAt)) + float64(l.OwnSlope*(l.OwnAt-other.OwnAt))
}

// regimes joins the laws above and below. It is calibrated from the coldest to the
// hottest of both; see Regimes.
func (d *decoder) regimes(at switching, laws [2]Law) Law {
	above, below := &laws[0], &laws[1]
	law := Law{Key: above.Key + " / " + below.Key + " at " + at.text, Switch: at.text,
		HostSlope: above.HostSlope, HostAt: above.HostAt, OwnSlope: above.OwnSlope, OwnAt: above.OwnAt}
	var citations []string
	for i := range laws {
		part := laws[i]
		law.leastKnown(&part)
		whole := scaled(part.Law, law.lnAt(&part))
		part.Law = d.bySetting(func(setting int, c *Conditions) diffusion.Law {
			return windowed(whole.In(setting), at.windows(c)[i])
		})
		law.Law = plus(law.Law, part.Law)
		law.Parts = append(law.Parts, Part{Share: 1, Law: part})
		if part.Citation != "" && !slices.Contains(citations, part.Citation) {
			citations = append(citations, part.Citation)
		}
	}
	law.Citation = strings.Join(citations, "; ")
	if above.TMax > 0 && below.TMax > 0 {
		law.TMin, law.TMax = min(above.TMin, below.TMin), max(above.TMax, below.TMax)
	}
	return law
}

// windowed returns the law of one setting in a window, nothing if there is none.
func windowed(l diffusion.Law, w *thermal.Window) diffusion.Law {
	switch {
	case w == nil:
		return diffusion.Law{}
	case *w == thermal.Window{}:
		return l
	}
	l.Where = make([]thermal.Window, len(l.Terms))
	for i := range l.Where {
		l.Where[i] = *w
	}
	return l
}

// windows are those in which the law above and the one below hold under conditions;
// nil is at no temperature. Along a buffer
//
//	log10 fO2 = Const + PerT/T
//
// is reached at one temperature, if at all.
func (s switching) windows(c *Conditions) [2]*thermal.Window {
	always := new(thermal.Window)
	temp := s.temp
	rising := true // fO2, with the temperature
	if s.fO2 > 0 {
		f := catalogue.Fugacity{Const: math.Log10(c.Given[catalogue.FO2])}
		if c.Buffer != nil {
			f = c.Fugacity()
		}
		missing := math.Log10(s.fO2) - f.Const
		switch rising = f.PerT < 0; {
		case missing < 0 && f.PerT >= 0:
			return [2]*thermal.Window{always, nil}
		case missing >= 0 && f.PerT <= 0:
			return [2]*thermal.Window{nil, always}
		}
		temp = f.PerT / missing
	}
	hot, cold := &thermal.Window{Above: temp}, &thermal.Window{Below: temp}
	if rising {
		return [2]*thermal.Window{hot, cold}
	}
	return [2]*thermal.Window{cold, hot}
}

// noteSwitch notes at which temperatures the law changes, or which holds at all.
func (d *decoder) noteSwitch(at switching, laws [2]Law, e *Element) {
	if at.fO2 == 0 {
		return
	}
	for _, i := range d.inUse() {
		s := &d.settings[i-1]
		during := ""
		if len(d.inUse()) > 1 {
			during = " during " + s.Of()
		}
		switch w := at.windows(&s.Conditions); {
		case w[0] == nil:
			d.noteOnce("%s: its law is %s at every temperature%s, fO2 never being above %s", e.Name, laws[1].Key, during, at.text[len("fO2 "):])
		case w[1] == nil:
			d.noteOnce("%s: its law is %s at every temperature%s, fO2 always being above %s", e.Name, laws[0].Key, during, at.text[len("fO2 "):])
		default:
			d.noteOnce("%s: its law changes at %.0f C%s, where %s is reached", e.Name, w[0].Above+w[0].Below-thermal.ZeroCelsius, during, at.text)
		}
	}
}

// Regimes are the laws of which one at a time holds: two of a switch, each with its
// own calibrated range, else the law itself.
func (l *Law) Regimes() []*Law {
	if l.Switch == "" {
		return []*Law{l}
	}
	return []*Law{&l.Parts[0].Law, &l.Parts[1].Law}
}
