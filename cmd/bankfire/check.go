package main

import (
	"bytes"
	"context"
	"fmt"
	"io"
	"math"
	"path/filepath"
	"slices"
	"strings"

	"bankfire/paths/study"
	"bankfire/paths/traverse"
	"bankfire/thermal"
)

// checkCommand is `bankfire check`.
func checkCommand() *command {
	return &command{
		name:  "check",
		args:  "STUDY",
		short: "read a study and its data and say what is wrong with them",
		long: "Reads the study and every file that it names and computes nothing. What is wrong is reported\n" +
			"with file, line, what was typed and what to write instead, up to 20 problems at a time; if\n" +
			"nothing is, says in a few lines what was understood. bankfire help study explains every key.",
		examples: []example{{"bankfire check study.toml", "find mistakes before a long run"}},
		least:    1, most: 1,
		run: func(_ context.Context, s streams, operands []string) error {
			read, err := study.Read(operands[0])
			if err != nil {
				return err
			}
			text, err := checkText(read)
			if err != nil {
				return err
			}
			_, err = s.out.Write(text.Bytes())
			return err
		},
	}
}

// checkText says what was understood of a study.
func checkText(s *study.Study) (*bytes.Buffer, error) {
	text := new(bytes.Buffer)
	fmt.Fprintf(text, "%s\n\nNothing is wrong with %s", s.Title, filepath.Base(s.File))
	var names []string
	for _, in := range s.Inputs[1:] {
		names = append(names, in.Name)
	}
	if len(names) > 0 {
		fmt.Fprintf(text, " and %s", list(names))
	}
	fmt.Fprint(text, ".\n\n")
	if err := writePathsRead(text, s); err != nil {
		return nil, err
	}
	writeConditions(text, s)
	switch {
	case s.Sharing.Each:
		fmt.Fprint(text, "history: each crystal has its own\n\n")
	case s.Sharing.From != nil:
		fmt.Fprintf(text, "history: the crystals share what comes from %s on\n\n", quoted(s.Sharing.From.Text))
	}
	for i := range s.Crystals {
		writeCrystal(text, &s.Crystals[i], filepath.Dir(s.File))
	}
	for _, n := range s.Notes {
		fmt.Fprintf(text, "note: %s\n", n)
	}
	return text, nil
}

// writeConditions writes the conditions of the study and of legs.
func writeConditions(w io.Writer, s *study.Study) {
	var lines []string
	if at := s.Conditions.Typed; len(at) > 0 {
		lines = append(lines, "conditions: "+strings.Join(at, ", "))
	}
	for i := range s.Settings {
		lines = append(lines, "conditions of "+s.Settings[i].Of()+": "+strings.Join(s.Settings[i].Conditions.Typed, ", "))
	}
	if len(lines) > 0 {
		fmt.Fprintf(w, "%s\n\n", strings.Join(lines, "\n"))
	}
}

// writePathsRead writes the paths with what the study's limits say of them.
func writePathsRead(w io.Writer, s *study.Study) error {
	writeFamiliesRead(w, s)
	if len(s.Paths) == 0 {
		return nil
	}
	table := newTable()
	table.row("path", "life", "lowest", "highest", "")
	for i := range s.Paths {
		p := &s.Paths[i]
		lo, hi := p.History.Range()
		bars, err := s.Barred(p)
		if err != nil {
			return err
		}
		barred := ""
		if reasons := study.Whys(bars); len(reasons) > 0 {
			barred = "barred: " + strings.Join(reasons, "; ")
		}
		table.row(p.Name, thermal.DurationText(p.Eruption), celsius(lo), celsius(hi), barred)
	}
	table.writeTo(w)
	fmt.Fprintln(w)
	return nil
}

// writeFamiliesRead writes the families with their open values.
func writeFamiliesRead(w io.Writer, s *study.Study) {
	for i := range s.Families {
		f := &s.Families[i]
		fmt.Fprintf(w, "family %s, %s to be drawn%s:\n\n", quoted(f.Name), counted(f.Count(), "path"), drawnText(f))
		table := newTable()
		table.row("value", "drawn", "spread")
		for k := range f.Values {
			table.row(f.Values[k].Name, askedText(&f.Values[k]), f.Values[k].Spread())
		}
		table.writeTo(w)
		fmt.Fprintln(w)
	}
}

// askedText is from where a value is drawn.
func askedText(v *study.Value) string {
	switch v.Kind {
	case study.Normal:
		if v.Level() {
			return fmt.Sprintf("%s +- %s", valueText(v, v.Mean), celsius(thermal.ZeroCelsius+v.Sigma))
		}
		return valueText(v, v.Mean) + " +- " + valueText(v, v.Sigma)
	case study.Counted:
		return v.Rate()
	case study.Chosen:
		var words []string
		for _, x := range v.Choices {
			words = append(words, valueText(v, x))
		}
		return list(words)
	}
	lo, hi, ok := v.Ends()
	if !ok {
		return ""
	}
	return valueRange(v, [2]float64{lo, hi})
}

// writeCrystal writes a crystal with its elements. Their files are named from
// the folder of the study.
func writeCrystal(w io.Writer, c *study.Crystal, folder string) {
	var zones []string
	for i, z := range c.Zones {
		zone := z.Name + " " + micrometres(z.Width)
		if c.Hosted {
			zone += " in host " + c.HostText(i)
		}
		if z.Added != nil {
			zone += " added " + quoted(z.Added.Text)
		}
		zones = append(zones, zone)
	}
	fmt.Fprintf(w, "%s, %s, %s from %s to %s: %s\n", c.Name, c.Mineral, c.Shape, micrometres(c.R0), micrometres(c.Size()), list(zones))
	if c.Exists != nil {
		fmt.Fprintf(w, "  it exists from %s\n", quoted(c.Exists.Text))
	}
	for _, m := range c.Moves {
		fmt.Fprintf(w, "  its rim moves at %.4g um/yr from %s until %s\n", m.Rate*1e6*thermal.Year, quoted(m.From.Text), quoted(m.Until.Text))
	}
	if d := c.Dissolves; d != nil {
		fmt.Fprintf(w, "  it dissolves above %s within %s\n", thermal.TemperatureText(d.Temp), thermal.DurationText(d.Most))
	}
	for i := range c.Elements {
		e := &c.Elements[i]
		fmt.Fprintf(w, "  %s by %s\n", e.Name, lawText(&e.Law))
		if p := e.Partition; p != nil {
			fmt.Fprintf(w, "  %s follows the host by partition %s\n", e.Name, partitionText(p))
		}
		for _, r := range slices.Concat(e.Inner, e.Rims) {
			if f := r.Following; f != nil {
				fmt.Fprintf(w, "  %s at the rim follows %s\n", e.Name, followingText(f, e))
			}
		}
		if t := e.Traverse; t != nil {
			if text := deviationsText(c.Deviations(e)); text != "" {
				fmt.Fprintf(w, "  %s is judged with and without errors of %s\n", e.Name, text)
			}
			name, err := filepath.Rel(folder, t.Name)
			if err != nil {
				name = t.Name
			}
			fmt.Fprintf(w, "  %s: %s\n", filepath.ToSlash(name), traverseText(t))
		}
	}
	fmt.Fprintln(w)
}

// deviationsText names constants with errors.
func deviationsText(all []study.Deviation) string {
	var names []string
	for _, d := range all {
		names = append(names, constantName(d))
	}
	return list(names)
}

// lawText names a law with how far its constants can be trusted.
func lawText(l *study.Law) string {
	text := "a law of this study"
	switch {
	case l.Switch != "":
		text = switchText(l)
	case l.Parts != nil:
		text = directionText(l)
	case l.Row != nil:
		text = l.Key + ", " + l.Row.Citation
		if l.Row.Checked() {
			known, _, _ := strings.Cut(l.Row.Confidence, ":")
			text += "; constants known: " + known
		}
	case l.Key != "":
		text = l.Key + ", " + text
	}
	if l.HostSlope != 0 {
		text += "; D depends on the host"
	}
	if l.OwnSlope != 0 {
		text += "; D depends on the element itself"
	}
	for _, caution := range l.Cautions() {
		text += "; " + caution
	}
	return text
}

// switchText names the two laws of which one holds at a time.
func switchText(l *study.Law) string {
	var parts []string
	for i, side := range [...]string{"above ", "at and below "} {
		part := l.Parts[i].Law.Key
		if row := l.Parts[i].Law.Row; row != nil {
			part += ", " + row.Citation
		}
		parts = append(parts, part+", "+side+l.Switch)
	}
	return strings.Join(parts, "; ")
}

// directionText names the laws of a law by direction with their shares.
func directionText(l *study.Law) string {
	var parts []string
	for _, p := range l.Parts {
		part := fmt.Sprintf("%s of that along %s, %s", plain(math.Round(1e4*p.Share)/1e4), p.Axes, p.Law.Key)
		if p.Law.Row != nil {
			part += ", " + p.Law.Row.Citation
		}
		parts = append(parts, part)
	}
	return strings.Join(parts, " + ")
}

// partitionText names a partition relation with how far it can be trusted.
func partitionText(p *study.Partition) string {
	text := fmt.Sprintf("%s, R T ln K = %s X + %s kJ/mol", p.Key, plain(p.A/1e3), plain(p.B/1e3))
	if p.Row == nil {
		return text + ", a relation of this study"
	}
	text += ", " + p.Row.Citation
	for _, caution := range p.Cautions() {
		text += "; " + caution
	}
	return text
}

// followingText says what a rim follows.
func followingText(f *study.Following, e *study.Element) string {
	switch {
	case f.Solubility != nil:
		return solubilityText(f.Solubility)
	case f.Partition == nil:
		return tableText(f.Table)
	case f.Table != nil:
		return fmt.Sprintf("the melt in %s by partition %s", tableText(f.Table), partitionText(f.Partition))
	}
	return fmt.Sprintf("%s %s in the melt by partition %s", plain(f.Melt), e.Unit, partitionText(f.Partition))
}

func tableText(t *study.ByTemperature) string {
	return fmt.Sprintf("a table from %s to %s", celsius(t.Temp[0]), celsius(t.Temp[len(t.Temp)-1]))
}

// solubilityText names a solubility relation with how far it can be trusted.
func solubilityText(s *study.Solubility) string {
	text := "solubility " + s.Row.Key + ", " + s.Row.Citation
	for _, caution := range s.Row.Cautions() {
		text += "; " + caution
	}
	return text
}

// traverseText says what there is of a traverse.
func traverseText(t *traverse.Traverse) string {
	lowest, highest := slices.Min(t.Position), slices.Max(t.Position)
	text := fmt.Sprintf("%d points in %s, from %s to %s from the centre", len(t.Value), t.Unit, micrometres(lowest), micrometres(highest))
	if len(t.Value) == 1 {
		text = fmt.Sprintf("1 point in %s, %s from the centre", t.Unit, micrometres(lowest))
	}
	limits := 0
	for _, is := range t.Limit {
		if is {
			limits++
		}
	}
	if limits > 0 {
		text += fmt.Sprintf(", %d of them below detection", limits)
	}
	return text
}

func micrometres(x float64) string { return plain(x*1e6) + " um" }
