package tune

import (
	"bufio"
	"fmt"
	"io"
	"strings"
	"text/tabwriter"
	"unicode"
)

// WriteText writes the gains for people: the table of what was tried with the
// recommended row marked, what to enter, what fails, the cautions.
func (g *Gains) WriteText(w io.Writer) error {
	b := bufio.NewWriter(w)
	g.writeTable(b)
	g.writeEntries(b)
	g.writeJudgement(b)
	g.writeMore(b)
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

func (g *Gains) writeTable(b *bufio.Writer) {
	if len(g.Candidates) == 0 {
		return
	}
	percent := fmt.Sprintf("%.4g%%", 100*g.Assurance)
	fmt.Fprintf(b, "Candidates (ideal form; each figure on the best fit, and on the plausible plant at %s)\n\n", percent)
	t := tabwriter.NewWriter(b, 0, 0, 2, ' ', tabwriter.AlignRight)
	fmt.Fprintf(t, "\trule\t\tKc\tTi s\tTd s\tMs\t%s\tGM\tPM °\tsettling s\t%s\tovershoot %%\t%s\tpeak input\tload IAE\tnoise\tshare\tmeets\t\n", percent, percent, percent)
	for _, c := range g.Candidates {
		mark, meets := "", "no"
		if c.Selected {
			mark = "*"
		}
		if c.Meets {
			meets = "yes"
		}
		n, w := orNone(c.Nominal), orNone(c.Worst)
		fmt.Fprintf(t, "%s\t%s\t%s\t%.4g\t%s\t%s\t%s\t%s\t%s\t%s\t%s\t%s\t%s\t%s\t%s\t%s\t%.2g\t%.0f%%\t%s\t\n", mark, plain(c.Rule), plain(c.Controller), c.Kc,
			figure(c.Ti, 4), figure(c.Td, 4), figure(n.Ms, 3), figure(w.Ms, 3), figure(n.GainMargin, 3), figure(n.PhaseMargin, 3),
			figure(n.Settling, 3), figure(w.Settling, 3), figure(n.Overshoot, 3), figure(w.Overshoot, 3), figure(n.PeakInput, 3), figure(n.IAE, 4), c.InputNoise, 100*c.Share, meets)
	}
	t.Flush()
	fmt.Fprintln(b)
}

func orNone(m *Metrics) Metrics {
	if m == nil {
		return Metrics{}
	}
	return *m
}

// figure prints a number with digits significant digits, a dash where there
// is none.
func figure(v *float64, digits int) string {
	if v == nil {
		return "-"
	}
	return fmt.Sprintf("%.*g", digits, *v)
}

func (g *Gains) writeEntries(b *bufio.Writer) {
	name := map[string]string{"p": "P", "pi": "PI", "pid": "PID"}[g.Controller]
	fmt.Fprintf(b, "Enter at the controller: %s, %s form, %s acting\n", name, plain(g.Form), plain(g.Action))
	t := tabwriter.NewWriter(b, 0, 0, 2, ' ', 0)
	entries := g.Entry
	if len(entries) == 0 {
		entries, _ = g.spell(Spelling{})
	}
	for _, e := range entries {
		fmt.Fprintf(t, "  %s\t%s\n", plain(e.Name), strings.TrimSpace(fmt.Sprintf("%.4g %s", e.Value, plain(e.Unit))))
	}
	if g.Scan > 0 {
		fmt.Fprintf(t, "  scan time\t%.4g s\n", g.Scan)
	}
	limit := func(name string, v *float64, per string) {
		if v != nil {
			fmt.Fprintf(t, "  %s\t%.4g %s%s\n", name, *v, plain(g.Units.Input), per)
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

func (g *Gains) writeJudgement(b *bufio.Writer) {
	verdict := "meets"
	if !g.Meets {
		verdict = "does NOT meet"
	}
	fmt.Fprintf(b, "\nThis %s the requirement (%s) on %.4g%% of the plausible plants: it holds on %.1f%% of those it was not chosen on.\n",
		verdict, g.Requirement, 100*g.Assurance, 100*g.ShareMeeting)
	for _, r := range g.Reasons {
		fmt.Fprintln(b, "  -", plain(r))
	}
	if len(g.Cures) > 0 {
		fmt.Fprintln(b, "What would change that")
		for _, c := range g.Cures {
			fmt.Fprintln(b, "  -", plain(c))
		}
	}
}

func (g *Gains) writeMore(b *bufio.Writer) {
	if s := g.SquareRoot; s != nil {
		fmt.Fprintf(b, "\nBehind a square root of the output: gain %.4g %s, the times as above.\n", s.Kc, plain(s.Unit))
	}
	if g.PoleRegion != nil {
		g.PoleRegion.writeText(b)
	}
	if len(g.Schedule) == 0 {
		return
	}
	fmt.Fprintln(b, "\nA set for each card (ideal form)")
	t := tabwriter.NewWriter(b, 0, 0, 2, ' ', 0)
	fmt.Fprintln(t, "  card\tinput\tKc\tTi s\tTd s\tload IAE of the common set")
	for _, e := range g.Schedule {
		cost := "-"
		if e.Cost != nil {
			cost = fmt.Sprintf("%.2f times", *e.Cost)
		}
		fmt.Fprintf(t, "  %s\t%.4g to %.4g\t%.4g\t%s\t%s\t%s\n", plain(e.Card), e.Input[0], e.Input[1], e.Kc, figure(e.Ti, 4), figure(e.Td, 4), cost)
	}
	t.Flush()
}

func (d *RegionDesign) writeText(b *bufio.Writer) {
	fmt.Fprintf(b, "\nP control: poles left of %.3g 1/s and damping ratio of %.3g or more\n", 0-d.Region.sigma(), d.Region.Damping)
	list := func(where string, set []GainInterval) {
		var parts []string
		for _, g := range set {
			parts = append(parts, fmt.Sprintf("%.4g to %.4g", g.Low, g.High))
		}
		if len(parts) == 0 {
			parts = []string{"no gain"}
		}
		fmt.Fprintf(b, "  %s: %s\n", where, strings.Join(parts, ", "))
	}
	list("on the best fit", d.Nominal)
	list(fmt.Sprintf("on %.4g%% of the plausible plants", 100*d.Assurance), d.Plausible)
	if len(d.Nominal) == 0 {
		fmt.Fprintf(b, "  nearest: gain %.4g, which settles in about %.3g s with a damping ratio of %.2g\n", d.Best, d.BestSettling, d.BestDamping)
	}
}

// String says the requirement in a few words.
func (q Requirement) String() string {
	var parts []string
	say := func(format string, v *float64) {
		if v != nil {
			parts = append(parts, fmt.Sprintf(format, *v))
		}
	}
	say("Ms ≤ %.4g", q.Ms)
	say("settling ≤ %.4g s", q.Settling)
	say("overshoot ≤ %.4g%%", q.Overshoot)
	say("damping ≥ %.4g", q.Damping)
	say("temperature ≤ %.4g", q.TempMax)
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
