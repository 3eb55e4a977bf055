package fit

import (
	"fmt"
	"io"
	"math"
	"strings"

	"lagwright/ident"
)

// WriteText writes the card for a terminal, at most 80 columns wide: the log,
// the selected model with its bounds, the noise, every structure tried,
// warnings and cautions.
func (c *Card) WriteText(w io.Writer) error {
	m, ok := c.Model(c.Selected)
	if !ok {
		return fmt.Errorf("card: selected structure %q is not among its models", c.Selected)
	}
	p := &page{}
	c.writeSource(p)
	c.writeModel(p, m)
	c.writeDerived(p)
	c.writeFit(p, m)
	c.writeStructures(p)
	c.writeWarnings(p)
	c.writeCautions(p)
	return p.writeTo(w)
}

func (c *Card) writeSource(p *page) {
	title := "Model card"
	if c.Dated() {
		title += " of " + printable(c.Created)
	}
	if c.Tool != "" {
		title += ", made by " + printable(c.Tool)
	}
	p.heading(title)
	for _, s := range c.Source {
		text := fmt.Sprintf("%s: %s over %s", printable(s.File), counted(s.Rows, "row", "rows"), duration(s.ToS-s.FromS))
		if s.Start != nil {
			text += ", from " + printable(*s.Start)
		}
		p.paragraph("  log    ", text)
		p.paragraph("         ", fmt.Sprintf("input %s, temperature %s", printable(s.Columns["input"]), printable(s.Columns["temperature"])))
	}
	p.paragraph("  range  ", fmt.Sprintf("input %s to %s, temperature %s to %s",
		figure(c.Range.Input[0], 4), quantity(c.Range.Input[1], c.Units.Input, 4),
		figure(c.Range.Temperature[0], 4), quantity(c.Range.Temperature[1], c.Units.Temperature, 4)))
	if a := c.Conditions.Airflow; a != nil {
		p.paragraph("         ", fmt.Sprintf("airflow %s to %s", figure(a[0], 4), figure(a[1], 4)))
	}
	if in := c.Conditions.Inlet; in != nil {
		p.paragraph("         ", fmt.Sprintf("inlet temperature %s to %s", figure(in[0], 4), quantity(in[1], c.Units.Temperature, 4)))
	}
}

// structureWords says what a structure is.
func structureWords(name string) string {
	st, err := ident.ParseStructure(name)
	switch {
	case err != nil:
		return name
	case st.Integrating():
		return "a slope and a dead time; the log shows no plateau"
	case st.Equal():
		return fmt.Sprintf("a gain, %d equal lags in a row and a dead time", st.Order())
	case st.Order() == 1:
		return "a gain, one lag and a dead time"
	}
	return fmt.Sprintf("a gain, %d lags in a row and a dead time", st.Order())
}

func (c *Card) writeModel(p *page, m *Model) {
	p.heading(fmt.Sprintf("Model: %s, %s", m.Structure, structureWords(m.Structure)))
	rows := [][]string{{"", "value", "", "unit", fmt.Sprintf("%s %% interval", figure(100*c.Confidence, 4))}}
	for _, q := range m.Parameters {
		rows = append(rows, estimateRow(parameterWords(q.Name), q.Unit, write(q.Value, q.Low, q.High, q.Fixed)))
	}
	p.table("  ", alignedRows(rows))
	var notes []string
	if c.InputLaw == ident.Power.String() {
		notes = append(notes, "the rise follows the input squared")
	}
	switch c.Initial {
	case "earlier":
		notes = append(notes, "the log starts on the way from an earlier input, which was fitted along")
	case "free":
		notes = append(notes, "the state at the first row was fitted along")
	}
	if c.BumpTime == "unknown" {
		notes = append(notes, "the dead time carries the unknown instant of the bump inside a sampling interval")
	}
	if len(notes) > 0 {
		p.paragraph("  ", sentence(strings.Join(notes, "; ")))
	}
}

// estimateRow is a row of a table of estimates.
func estimateRow(name, unit string, w written) []string {
	return []string{name, w.value, w.half, shownUnit(unit), w.interval}
}

// alignedRows lines up the decimal points of the values of estimate rows.
func alignedRows(rows [][]string) [][]string {
	var v []string
	for _, r := range rows[1:] {
		v = append(v, r[1])
	}
	alignPoints(v)
	for i, r := range rows[1:] {
		r[1] = v[i]
	}
	return rows
}

// parameterWords is a parameter's or quantity's name as people say it:
// dead_time is "dead time", baseline_2 "baseline, log 2".
func parameterWords(name string) string {
	if i := lagIndex(name); i >= 0 {
		return fmt.Sprintf("lag %d", i+1)
	}
	for _, own := range []string{"baseline_", "drift_"} {
		if n, ok := strings.CutPrefix(name, own); ok {
			return strings.TrimSuffix(own, "_") + ", log " + n
		}
	}
	return strings.ReplaceAll(printable(name), "_", " ")
}

func (c *Card) writeDerived(p *page) {
	if len(c.Derived) == 0 {
		return
	}
	p.heading("What follows from it")
	rows := [][]string{{"", "value", "", "unit", fmt.Sprintf("%s %% interval", figure(100*c.Confidence, 4))}}
	for _, d := range c.Derived {
		rows = append(rows, estimateRow(parameterWords(d.Name), d.Unit, write(d.Value, d.Low, d.High, false)))
	}
	p.table("  ", alignedRows(rows))
}

func (c *Card) writeFit(p *page, m *Model) {
	unit := temperatureStep(c.Units.Temperature)
	p.heading("What it leaves")
	p.table("  ", [][]string{
		{"misfit", fmt.Sprintf("%s rms over %s, fit %s %%", quantity(m.RMSE, unit, 2), counted(m.Samples, "temperature", "temperatures"), figure(m.FitPercent, 4))},
		{"noise", noiseWords(m.Noise, unit)},
		{"pattern", fmt.Sprintf("correlation from row to row %s; after the noise model", figure(m.Residuals.Lag1Correlation, 2))},
		{"", fmt.Sprintf("Ljung-Box p %s, tie to the input p %s", probability(m.Residuals.LjungBoxP), probability(m.Residuals.InputCorrelationP))},
	})
}

func noiseWords(n Noise, unit string) string {
	s := "sd " + quantity(n.SD, unit, 2)
	switch {
	case n.CorrelationTime <= 0:
		s += ", white"
	case n.WhiteSD < 0.01*n.SD:
		s += ", correlated over " + duration(n.CorrelationTime)
	default:
		s += ", correlated over " + duration(n.CorrelationTime) + ", its white part sd " + quantity(n.WhiteSD, unit, 2)
	}
	if n.WanderSD > 0 {
		s += "; wanders by sd " + quantity(n.WanderSD, unit, 2) + " over the log"
	}
	return s
}

func (c *Card) writeStructures(p *page) {
	p.heading("Structures tried (AICc over the least; within 2 the log cannot tell them apart)")
	unit := temperatureStep(c.Units.Temperature)
	least := math.Inf(1)
	for _, m := range c.Models {
		least = math.Min(least, m.AICc)
	}
	gainUnit := ""
	if m, ok := c.Model(c.Selected); ok {
		gainUnit = m.Parameters[0].Unit
	}
	rows := [][]string{{"", "structure", "AICc", "rms " + shownUnit(unit), "fit %", "gain " + shownUnit(gainUnit), "total delay s"}}
	for _, m := range c.Models {
		mark := ""
		if m.Structure == c.Selected {
			mark = "*"
		}
		gain, delay := "-", "-"
		if plant, err := m.Plant(); err == nil {
			gain, delay = exactFigure(plant.Gain, 3), exactFigure(halfRuleDelay(plant.Elements(), plant.DeadTime), 3)
			if plant.Structure.Integrating() && m.Parameters[0].Unit != gainUnit {
				gain += "/s"
			}
		}
		rows = append(rows, []string{mark, m.Structure, fmt.Sprintf("%.1f", m.AICc-least), exactFigure(m.RMSE, 3), fmt.Sprintf("%.2f", m.FitPercent), gain, delay})
	}
	p.table(" ", rows, 2, 3, 4, 5, 6)
	for _, w := range c.Warnings {
		if w.Code == "structures-alike" {
			p.paragraph("  ", sentence(printable(w.Text)))
		}
	}
}

func (c *Card) writeWarnings(p *page) {
	heading := false
	for _, w := range c.Warnings {
		if w.Code == "structures-alike" {
			continue // said under the table of structures
		}
		if !heading {
			p.heading("Warnings")
			heading = true
		}
		w.write(p)
	}
}

func (w Warning) write(p *page) {
	p.paragraph("  - ", sentence(printable(w.Text))+" ["+printable(w.Code)+"]")
}

func (c *Card) writeCautions(p *page) {
	if len(c.Cautions) == 0 {
		return
	}
	p.heading("Cautions")
	for _, s := range c.Cautions {
		p.paragraph("  - ", printable(s))
	}
}

// sentence gives words a capital letter, unless they begin with the name of a
// file, and a full stop.
func sentence(s string) string {
	s = strings.TrimSpace(s)
	if s == "" {
		return s
	}
	s = sentenceStart(s)
	if !strings.HasSuffix(s, ".") {
		s += "."
	}
	return s
}

func sentenceStart(s string) string {
	if first, _, _ := strings.Cut(s, " "); strings.ContainsAny(first, ".:_") {
		return s
	}
	r := []rune(s)
	return strings.ToUpper(string(r[:1])) + string(r[1:])
}
