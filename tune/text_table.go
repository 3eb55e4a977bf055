package tune

import (
	"bufio"
	"cmp"
	"fmt"
	"math"
	"slices"
	"strings"
)

// mostRules is how many of the published rules that meet the requirement are
// shown where not everything is.
const mostRules = 4

// writeBest lists the chosen gains beside the best of what else was tried, and
// says why the rest does not do. One row alone would repeat the answer.
func (g *Gains) writeBest(b *bufio.Writer) {
	if len(g.Candidates) < 2 {
		return
	}
	var shown, meet []Candidate
	missed := map[string]int{}
	rules := 0
	for _, c := range g.Candidates {
		if c.Selected || c.Rule == synthesised {
			shown = append(shown, c)
			continue
		}
		rules++
		if c.Meets {
			meet = append(meet, c)
		} else {
			missed[cmp.Or(c.Missed, "several together")]++
		}
	}
	slices.SortStableFunc(meet, func(a, b Candidate) int { return cmp.Compare(loadIAE(a), loadIAE(b)) })
	g.writeTable(b, append(shown, meet[:min(len(meet), mostRules)]...))
	if rules == 0 {
		return
	}
	fmt.Fprintf(b, "\n%d of %d published rules meet the requirement", len(meet), rules)
	if len(meet) > mostRules {
		fmt.Fprintf(b, " (listed: the %d with the smallest load IAE)", mostRules)
	}
	if len(missed) > 0 {
		fmt.Fprintf(b, "; the others miss it, most of all in %s", countedWords(missed))
	}
	fmt.Fprintln(b, ". All of them: --verbose, --json.")
}

// loadIAE orders candidates: those without one come last.
func loadIAE(c Candidate) float64 {
	if c.Nominal == nil || c.Nominal.IAE == nil {
		return 1e300
	}
	return *c.Nominal.IAE
}

// countedWords lists words with their counts, the most frequent first.
func countedWords(count map[string]int) string {
	words := make([]string, 0, len(count))
	for w := range count {
		words = append(words, w)
	}
	slices.SortFunc(words, func(a, b string) int { return cmp.Or(count[b]-count[a], strings.Compare(a, b)) })
	for i, w := range words {
		words[i] = fmt.Sprintf("%s (%d)", w, count[w])
	}
	return strings.Join(words, ", ")
}

// writeAll lists everything that was tried.
func (g *Gains) writeAll(b *bufio.Writer) { g.writeTable(b, g.Candidates) }

// writeTable lists candidates in 80 columns.
func (g *Gains) writeTable(b *bufio.Writer, rows []Candidate) {
	if len(rows) == 0 {
		return
	}
	within := ""
	if slices.ContainsFunc(rows, func(c Candidate) bool { return c.WorstOver > 0 }) {
		within = " (over those that meet where a row meets on fewer, within the sampling error)"
	}
	fmt.Fprintf(b, "\nTried (ideal form, b: setpoint weight). Ms, settling and overshoot are the worst over %s of the plausible plants%s, IAE after a unit load that of the best fit.\n\n", percent(g.Assurance), within)
	const line = "%-2s%-16s %-3s %7s %5s %5s %4s %4s %5s %5s %5s %5s %3s\n"
	gain := unitWords(g.Units.Input) + "/" + unitWords(perKelvin(g.Units.Temperature))
	fmt.Fprintf(b, line, "", "rule", "", "Kc", "Ti", "Td", "b", "Ms", "settl", "over", "IAE", "share", "met")
	fmt.Fprint(b, strings.TrimRight(fmt.Sprintf(line, "", "", "", gain, "s", "s", "", "", "s", "%", "", "", ""), " \n"), "\n")
	for _, c := range rows {
		mark, meets := "", "no"
		if c.Selected {
			mark = "*"
		}
		if c.Meets {
			meets = "yes"
		}
		n, w := orNone(c.Nominal), orNone(c.Worst)
		fmt.Fprintf(b, line, mark, plain(c.Rule), plain(c.Controller), figure(&c.Kc, 3), figure(c.Ti, 3), figure(c.Td, 3), figure(c.SetpointWeight, 2),
			figure(w.Ms, 3), figure(w.Settling, 3), figure(w.Overshoot, 3), figure(n.IAE, 3), percent(c.Share), meets)
	}
	g.writeOffset(b, rows)
}

// writeOffset says why P, listed beside the chosen controller, is no answer
// though it may meet the requirement.
func (g *Gains) writeOffset(b *bufio.Writer, rows []Candidate) {
	i := slices.IndexFunc(rows, func(c Candidate) bool { return c.Rule == synthesised && c.Controller == "p" && !c.Selected })
	if i < 0 {
		return
	}
	rest := ""
	if m := orNone(rows[i].Nominal); m.SteadyOffset != nil && *m.SteadyOffset != 0 && g.Requirement.SetpointStep != nil {
		unit := perKelvin(g.Units.Temperature)
		rest = fmt.Sprintf(": after a step of %s it comes to rest %s away from the setpoint, and its settling and overshoot are counted from there",
			quantity(math.Abs(*g.Requirement.SetpointStep), unit, 3), quantity(math.Abs(*m.SteadyOffset), unit, 3))
	}
	fmt.Fprintf(b, "\nP leaves a permanent offset%s. It is taken only where it is asked for (--controller p).\n", rest)
}
