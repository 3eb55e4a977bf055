package fit

import (
	"fmt"
	"io"
	"maps"
	"math"
	"slices"

	"lagwright/data"
)

// WriteText writes the report for a terminal, at most 80 columns wide: the
// verdict first, then what was seen.
func (r *CheckReport) WriteText(w io.Writer) error {
	p := &page{}
	name := printable(r.File)
	if r.Run != "" {
		name += ", run " + printable(r.Run)
	}
	p.heading(name)
	r.writeVerdicts(p)
	r.writeRecording(p)
	r.writeWarnings(p)
	r.writeMended(p)
	r.writeBumps(p)
	if len(r.Caution) > 0 {
		p.heading("Cautions")
	}
	for _, c := range r.Caution {
		p.paragraph("  - ", printable(c))
	}
	return p.writeTo(w)
}

func (r *CheckReport) writeVerdicts(p *page) {
	if len(r.Verdict) == 0 {
		p.paragraph("  ", "Nothing can be fitted to this log.")
		return
	}
	for _, v := range r.Verdict {
		p.paragraph(fmt.Sprintf("  %-12s", parameterWords(v.Parameter)), v.Verdict+": "+v.Reason)
		for i, c := range v.Cures {
			word := "-> "
			if i > 0 {
				word = "or "
			}
			p.paragraph("              "+word, c)
		}
	}
	if q := r.Quick; q != nil {
		p.heading("Quick fit: " + q.Structure + ", " + structureWords(q.Structure))
		rows := [][]string{{"", "value", "", "unit", "interval"}}
		for _, x := range q.Parameters {
			rows = append(rows, estimateRow(parameterWords(x.Name), x.Unit, write(x.Value, x.Low, x.High, x.Fixed)))
		}
		p.table("  ", alignedRows(rows))
	}
}

func (r *CheckReport) writeRecording(p *page) {
	p.heading("Recording")
	line := func(name, format string, a ...any) {
		p.paragraph(fmt.Sprintf("  %-12s", name), fmt.Sprintf(format, a...))
	}
	start := ""
	if r.Start != nil {
		start = ", from " + printable(*r.Start)
	}
	line("rows", "%d over %s%s", r.Rows, duration(r.Span), start)
	s := r.Sampling
	gaps := "no gaps"
	if s.Gaps > 0 {
		gaps = fmt.Sprintf("%s, the longest %s", counted(s.Gaps, "gap", "gaps"), duration(s.LongestGap))
	}
	even := "even"
	if s.Jitter > 1e-6*s.Median {
		even = "jitter " + duration(s.Jitter)
	}
	line("sampling", "every %s, %s, %s", duration(s.Median), even, gaps)
	temp := shownUnit(r.Units.Temperature)
	step := temperatureStep(r.Units.Temperature)
	line("input", "%s, %s to %s; %s loop: %s", printable(r.Columns["input"]), figure(r.Range.Input[0], 4), quantity(r.Range.Input[1], r.Units.Input, 4), r.Loop.State, r.Loop.Reason)
	resolution := "no steps visible"
	if r.Quantum != nil {
		resolution = "steps of " + quantity(*r.Quantum, step, 3)
	}
	line("temperature", "%s, %s to %s %s, %s", printable(r.Columns["temperature"]), figure(r.Range.Temperature[0], 4), figure(r.Range.Temperature[1], 4), temp, resolution)
	if r.Noise != nil {
		line("noise", "%s", noiseWords(*r.Noise, step))
	}
	if d := r.Drift; d != nil {
		word := "no clear drift"
		if d.Clear {
			word = "drifts"
		}
		line("before", "%s: %s over the %s before the first bump", word, quantity(d.Moved, step, 2), duration(d.Over))
	}
	if n := len(r.Modes); n > 1 {
		line("mode", "%s between automatic and manual, the first at %s", counted(n-1, "change", "changes"), duration(r.Modes[1].Time))
	} else if n == 1 {
		line("mode", "%s throughout", map[bool]string{true: "automatic", false: "manual"}[r.Modes[0].Auto])
	}
	condition := func(name, unit string, c *CheckedRange) {
		if c != nil {
			line(name, "%s to %s: %s", figure(c.Low, 4), quantity(c.High, unit, 4), map[bool]string{true: "it moved, so the parameters may have moved with it", false: "steady"}[c.Moved])
		}
	}
	condition("airflow", "", r.Airflow)
	condition("inlet", r.Units.Temperature, r.Inlet)
	if r.Judged != nil {
		line("judged", "by the %s from %s on, where the input moves most", duration(r.Judged.To-r.Judged.From), duration(r.Judged.From))
	}
}

func (r *CheckReport) writeWarnings(p *page) {
	if len(r.Warning) == 0 {
		return
	}
	p.heading("Warnings")
	for _, w := range r.Warning {
		w.write(p)
	}
}

func (r *CheckReport) writeMended(p *page) {
	var said []string
	for _, k := range slices.Sorted(maps.Keys(r.Missing)) {
		said = append(said, fmt.Sprintf("%s set aside: %s", counted(r.Missing[k], "cell", "cells"), k))
	}
	for _, k := range slices.Sorted(maps.Keys(r.Dropped)) {
		said = append(said, fmt.Sprintf("%s dropped: %s", counted(r.Dropped[k], "row", "rows"), k))
	}
	if r.Spikes > 0 {
		said = append(said, counted(r.Spikes, "isolated spike", "isolated spikes")+" of temperature")
	}
	for _, n := range r.Notes {
		text := n.Text
		if n.Row > 0 {
			text += fmt.Sprintf(" (line %d)", n.Row)
		}
		said = append(said, text)
	}
	if len(said) == 0 {
		return
	}
	p.heading("Mended and set aside")
	for _, s := range said {
		p.paragraph("  - ", printable(s))
	}
}

// mostBumps is how many bumps are listed.
const mostBumps = 12

func (r *CheckReport) writeBumps(p *page) {
	if len(r.Bumps) == 0 {
		return
	}
	p.heading(sentenceStart(counted(len(r.Bumps), "bump", "bumps")))
	step := shownUnit(temperatureStep(r.Units.Temperature))
	in := shownUnit(r.Units.Input)
	yes := map[bool]string{true: "yes", false: "no"}
	rows := [][]string{{"at", "from " + in, "to " + in, "held", "rise " + step, "rise/noise", "settled before", "after"}}
	for i, b := range r.Bumps {
		if i == mostBumps {
			break
		}
		rows = append(rows, []string{duration(b.Time), figure(b.From, 4), figure(b.To, 4), duration(b.Hold), figureOrDash(b.Rise, 3), figureOrDash(b.RiseOverNoise, 2), yes[b.SettledBefore], yes[b.SettledAfter]})
	}
	p.table("  ", rows, 1, 2, 4, 5)
	if n := len(r.Bumps) - mostBumps; n > 0 {
		p.paragraph("  ", fmt.Sprintf("and %d more", n))
	}
}

func figureOrDash(v *float64, digits int) string {
	if v == nil {
		return "-"
	}
	return figure(*v, digits)
}

// highestRise is the rise that the end of the gain's interval makes of one made by its
// value; where that end is open there is none to tell, and it is the rise itself.
func highestRise(gain Parameter, rise float64) float64 {
	most := rise
	for _, end := range []*float64{gain.Low, gain.High} {
		if end != nil {
			most = math.Max(most, rise**end/gain.Value)
		}
	}
	return most
}

// checkCautions are the cautions that go with a check, with the numbers of its
// log.
func checkCautions(run *data.Run, r *CheckReport, c *Card) []string {
	out := []string{CautionCutOut, CautionSheath}
	if high := r.Range.Temperature[1]; r.Rows > 0 {
		s := fmt.Sprintf("This log went up to %s", quantity(high, r.Units.Temperature, 4))
		if c != nil {
			m, ok := c.Model(c.Selected)
			if plant, err := c.Plant(); err == nil && ok && !plant.Structure.Integrating() && m.unbounded(run) == closedEnds {
				rise := plant.Gain * (c.Law().Apply(run.U[len(run.U)-1]) - c.Law().Apply(run.U[0]))
				for _, q := range m.Parameters {
					if end := q.Value + rise; q.Name == "baseline" && end > high+0.02*math.Abs(rise) {
						s += fmt.Sprintf("; at the last input it would settle near %s", quantity(end, r.Units.Temperature, 3))
						if most := q.Value + highestRise(m.Parameters[0], rise); most > end {
							s += fmt.Sprintf(", or up to %s by the interval of the gain", quantity(most, r.Units.Temperature, 3))
						}
					}
				}
			}
		}
		out = append(out, s+". Before a larger or longer bump, see that no limit of heater, duct or product lies below what it would reach.")
	}
	return append(out, CautionStay, CautionCodes)
}
