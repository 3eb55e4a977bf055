package tune

import (
	"bufio"
	"fmt"
	"io"
	"math"
	"strings"
	"text/tabwriter"
	"unicode"
)

// WriteText writes the gains for people, the answer first: what to enter,
// whether it meets the requirement, what fails; then the best of what else was
// tried, and the cautions.
func (g *Gains) WriteText(w io.Writer) error { return g.write(w, g.writeBest) }

// WriteWholeText is WriteText with everything that was tried.
func (g *Gains) WriteWholeText(w io.Writer) error { return g.write(w, g.writeAll) }

func (g *Gains) write(w io.Writer, table func(*bufio.Writer)) error {
	b := bufio.NewWriter(w)
	g.writeEntries(b)
	g.writeJudgement(b)
	g.writeMore(b)
	table(b)
	if len(g.Cautions) > 0 {
		fmt.Fprintln(b, "\nCautions")
		for _, c := range g.Cautions {
			fmt.Fprintln(b, "  -", plain(c))
		}
	}
	if err := b.Flush(); err != nil {
		return fmt.Errorf("write gains: %w", err)
	}
	return nil
}

// percent writes a share; it never rounds one that is short of everything up
// to 100 %.
func percent(share float64) string {
	p := 100 * share
	if p > 99.5 && p < 100 {
		return ">99 %"
	}
	return fmt.Sprintf("%.0f %%", p)
}

func orNone(m *Metrics) Metrics {
	if m == nil {
		return Metrics{}
	}
	return *m
}

// figure prints a number with so many significant digits and no exponent
// between a thousandth and a million, a dash where there is none.
func figure(v *float64, digits int) string {
	if v == nil {
		return "-"
	}
	a := math.Abs(*v)
	switch {
	case a < 1e-9: // rounding, in any unit people use
		return "0"
	case a < 1e-3 || a >= 1e6:
		return fmt.Sprintf("%.*g", digits, *v)
	}
	decimals := max(0, digits-1-int(math.Floor(math.Log10(a))))
	s := fmt.Sprintf("%.*f", decimals, *v)
	if decimals > 0 {
		s = strings.TrimRight(strings.TrimRight(s, "0"), ".")
	}
	return s
}

// duration writes seconds in minutes from ten on, in hours from one on.
func duration(seconds float64, digits int) string {
	switch {
	case seconds >= 3600:
		return quantity(seconds/3600, "h", digits)
	case seconds >= 600:
		return quantity(seconds/60, "min", digits)
	}
	return quantity(seconds, "s", digits)
}

// quantity is a number with its unit.
func quantity(v float64, unit string, digits int) string {
	return strings.TrimSpace(figure(&v, digits) + " " + unitWords(unit))
}

// unitWords writes a unit as people do.
func unitWords(unit string) string {
	return strings.NewReplacer("degC", "°C", "degF", "°F").Replace(plain(unit))
}

func (g *Gains) writeEntries(b *bufio.Writer) {
	fmt.Fprintf(b, "%s: %s, %s form, %s acting", g.heading(), kindWords(g.Controller), plain(g.Form), plain(g.Action))
	if g.offset(g.Nominal) > 0 {
		fmt.Fprint(b, "; leaves a permanent offset")
	}
	fmt.Fprintln(b)
	t := tabwriter.NewWriter(b, 0, 0, 2, ' ', 0)
	entries := g.Entry
	if len(entries) == 0 {
		entries, _ = g.spell(Spelling{})
	}
	for _, e := range entries {
		fmt.Fprintf(t, "  %s\t%s\n", plain(e.Name), quantity(e.Value, e.Unit, 4))
	}
	if g.Scan > 0 {
		fmt.Fprintf(t, "  scan time\t%s\n", quantity(g.Scan, "s", 4))
	}
	limit := func(name string, v *float64, per string) {
		if v != nil {
			fmt.Fprintf(t, "  %s\t%s%s\n", name, quantity(*v, g.Units.Input, 4), per)
		}
	}
	limit("output from", g.Limits.Min, "")
	limit("output to", g.Limits.Max, "")
	limit("output rate", g.Limits.Rate, "/s")
	t.Flush()
	if g.Filter > 0 {
		fmt.Fprintln(b, "  The filter stands before the whole controller; without it the figures differ.")
		if c, err := g.law(); err == nil {
			if d, ok := derivativeOnly(c); ok {
				fmt.Fprintf(b, "  A controller that filters its derivative alone gets, in the ideal form: Kc %.4g, Ti %.4g s, Td %.4g s, derivative filter %.4g s, setpoint weight %.4g.\n", d.kc, d.ti, d.td, d.tf, d.b)
			}
		}
	}
}

// heading says what the gains are for.
func (g *Gains) heading() string {
	switch {
	case !g.Judged() || g.Meets:
		return "Enter at the controller"
	case g.Unstable():
		return "DO NOT ENTER, the loop would be unstable on plausible plants; the nearest"
	case g.Rule == synthesised:
		return "Requirement NOT met; the nearest"
	}
	return "Requirement NOT met; the gains of " + plain(g.Rule)
}

// Judged tells gains whose loop was looked at from gains that someone wrote
// down.
func (g *Gains) Judged() bool { return g.Nominal != nil || g.Worst != nil }

// Unstable tells gains with which the loop is not stable on the share of the plausible plants
// that was asked for: nothing to enter.
func (g *Gains) Unstable() bool { return !g.Meets && g.Worst != nil && !g.Worst.Stable }

func (g *Gains) writeJudgement(b *bufio.Writer) {
	if !g.Judged() {
		return
	}
	verdict := "meets"
	if !g.Meets {
		verdict = "does NOT meet"
	}
	fmt.Fprintf(b, "\nThis %s the requirement (%s)%s: it holds on %s; asked %s%s.\n",
		verdict, g.Requirement.Words(g.Units), g.offsetWords(), g.countedOn(), percent(g.Assurance), g.scatter())
	if g.Meets && g.SmallStep {
		fmt.Fprintln(b, "It holds for small setpoint steps too, those that no limit of the input touches.")
	}
	for _, r := range g.Reasons {
		fmt.Fprintln(b, "  -", plain(r))
	}
	g.writeFigures(b, g.worstWords(), g.Worst)
	g.writeFigures(b, "On the best fit", g.Nominal)
	if g.Worst != nil && g.Worst.Stable {
		fmt.Fprintln(b, g.oneSided())
	}
	if len(g.Cures) > 0 {
		fmt.Fprintln(b, "What would let it be met, each by itself unless it says otherwise")
		for _, c := range g.Cures {
			fmt.Fprintln(b, "  -", plain(c))
		}
	}
}

// offset is how far from the setpoint a P controller comes to rest after the
// step that is judged, temperature units; 0 where it leaves none.
func (g *Gains) offset(m *Metrics) float64 {
	if g.Controller != "p" || m == nil || m.SteadyOffset == nil {
		return 0
	}
	return math.Abs(*m.SteadyOffset)
}

// offsetWords says what the settling and the overshoot of P control leave out.
func (g *Gains) offsetWords() string {
	offset, unit := g.offset(g.Nominal), perKelvin(g.Units.Temperature)
	if offset == 0 || g.Requirement.SetpointStep == nil {
		return ""
	}
	return fmt.Sprintf(", counted from where P control comes to rest, which after a step of %s is %s away from the setpoint for good (best fit)",
		quantity(math.Abs(*g.Requirement.SetpointStep), unit, 3), quantity(offset, unit, 3))
}

// worstWords says what the worst figures are the worst of.
func (g *Gains) worstWords() string {
	if g.WorstOver > 0 {
		return "Worst over the " + exactly(g.WorstOver) + " that meet"
	}
	return "Worst over " + percent(g.Assurance) + " of the plausible plants"
}

// oneSided tells the share of the worst figures from that of a band.
func (g *Gains) oneSided() string {
	beyond := "none of those plants"
	if g.WorstOver == 0 {
		beyond = exactly(1-g.Assurance) + " of the plants"
		if g.Assurance == 1 {
			beyond = "no plant"
		}
	}
	return fmt.Sprintf("(Worst is one-sided, each figure by itself: %s lie beyond. A two-ended 95 %% interval or band leaves 2.5 %% beyond each end.)", beyond)
}

// writeFigures writes the figures of the loop on one plant.
func (g *Gains) writeFigures(b *bufio.Writer, where string, m *Metrics) {
	if m == nil {
		return
	}
	if !m.Stable {
		fmt.Fprintf(b, "%s the loop is unstable.\n", where)
		return
	}
	var parts []string
	say := func(format string, v *float64, unit string) {
		if v != nil {
			parts = append(parts, fmt.Sprintf(format, quantity(*v, unit, 3)))
		}
	}
	in, temp := g.Units.Input, perKelvin(g.Units.Temperature)
	say("Ms %s", m.Ms, "")
	if m.Settling != nil {
		parts = append(parts, "settled after "+duration(*m.Settling, 3))
	}
	say("overshoot %s", m.Overshoot, "%")
	say("input up to %s", m.PeakInput, in)
	say("load IAE %s", m.IAE, strings.TrimPrefix(temp+"·s/"+in, "·"))
	if m.SteadyOffset != nil && *m.SteadyOffset != 0 {
		say("offset %s", m.SteadyOffset, temp)
	}
	if len(parts) > 0 {
		fmt.Fprintf(b, "%s: %s.\n", where, strings.Join(parts, ", "))
	}
}

// countedOn says on which share of which plants the requirement holds.
func (g *Gains) countedOn() string {
	words := exactly(g.ShareMeeting) + " of the plausible plants"
	if len(g.Schedule) > 0 {
		words += " of the worst card"
	}
	if g.Rule == synthesised {
		words += ", those it was not chosen on"
	}
	return words
}

// scatter says by how much the share may be wrong where that matters.
func (g *Gains) scatter() string {
	short := g.Assurance - g.ShareMeeting
	switch {
	case g.ShareError == 0 || g.ShareMeeting == 1 || math.Abs(short) > 2*g.ShareError:
		return ""
	case g.Meets && short > 1e-9:
		return fmt.Sprintf(", sampling error %.2g %%: short by less than twice that, which passes", 100*g.ShareError)
	}
	return fmt.Sprintf(", sampling error %.2g %%", 100*g.ShareError)
}

// exactly is percent to a tenth.
func exactly(share float64) string {
	return fmt.Sprintf("%.3g %%", math.Floor(1000*share+1e-9)/10)
}

func (g *Gains) writeMore(b *bufio.Writer) {
	if s := g.SquareRoot; s != nil {
		fmt.Fprintf(b, "\nBehind a square root of the output: gain %s, the times as above.\n", quantity(s.Kc, s.Unit, 4))
	}
	if g.PoleRegion != nil && g.Controller == "p" { // it is about P control alone
		g.PoleRegion.writeText(b, g.Units.Input+"/"+perKelvin(g.Units.Temperature))
	}
	if len(g.Schedule) == 0 {
		return
	}
	fmt.Fprintln(b, "\nA set for each card (ideal form)")
	t := tabwriter.NewWriter(b, 0, 0, 2, ' ', 0)
	in := unitWords(g.Units.Input)
	fmt.Fprintf(t, "  card\tinput %s\tKc %s/%s\tTi s\tTd s\tmet\tload IAE of the common set\n", in, in, unitWords(perKelvin(g.Units.Temperature)))
	for _, e := range g.Schedule {
		cost, met := "-", "no"
		if e.Cost != nil {
			cost = fmt.Sprintf("%.2f times", *e.Cost)
		}
		if e.Meets {
			met = "yes"
		}
		fmt.Fprintf(t, "  %s\t%.4g to %.4g\t%.4g\t%s\t%s\t%s\t%s\n", plain(e.Card), e.Input[0], e.Input[1], e.Kc, figure(e.Ti, 4), figure(e.Td, 4), met, cost)
	}
	t.Flush()
}

func (d *RegionDesign) writeText(b *bufio.Writer, unit string) {
	fmt.Fprintf(b, "\nP control: %s\n", d.Region)
	list := func(where string, set []GainInterval) {
		var parts []string
		for _, g := range set {
			parts = append(parts, figure(&g.Low, 3)+" to "+quantity(g.High, unit, 3))
		}
		if len(parts) == 0 {
			parts = []string{"no gain"}
		}
		fmt.Fprintf(b, "  %s: %s\n", where, strings.Join(parts, ", "))
	}
	list("on the best fit", d.Nominal)
	list("on "+percent(d.Assurance)+" of the plausible plants", d.Plausible)
	if len(d.Nominal) == 0 {
		fmt.Fprintf(b, "  nearest: gain %s, which settles in about %s with a damping ratio of %.2g\n", quantity(d.Best, unit, 3), duration(d.BestSettling, 3), d.BestDamping)
	}
}

// String says where the poles must lie.
func (r PoleRegion) String() string {
	var parts []string
	if sigma := r.sigma(); sigma > 0 {
		parts = append(parts, fmt.Sprintf("poles left of %.3g 1/s, for settling within %s", -sigma, duration(r.Settling, 3)))
	}
	if r.Damping > 0 {
		parts = append(parts, fmt.Sprintf("damping ratio of %.3g or more", r.Damping))
	}
	return strings.Join(parts, ", and ")
}

// Words says the requirement in a few words.
func (q Requirement) Words(u GainUnits) string {
	var parts []string
	say := func(format string, v *float64) {
		if v != nil {
			parts = append(parts, fmt.Sprintf(format, figure(v, 4)))
		}
	}
	say("Ms ≤ %s", q.Ms)
	if q.Settling != nil {
		parts = append(parts, "settling ≤ "+duration(*q.Settling, 4))
	}
	say("overshoot ≤ %s %%", q.Overshoot)
	say("damping ≥ %s", q.Damping)
	say("temperature ≤ %s "+strings.ReplaceAll(unitWords(u.Temperature), "%", "%%"), q.TempMax)
	if len(parts) == 0 {
		return "none"
	}
	return strings.Join(parts, ", ")
}

// plain strips control characters: names and units come from files.
func plain(s string) string {
	return strings.Map(func(r rune) rune {
		if unicode.IsControl(r) {
			return -1
		}
		return r
	}, s)
}
