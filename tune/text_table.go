package tune

import (
	"bufio"
	"cmp"
	"fmt"
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
	fmt.Fprintf(b, "\nTried (ideal form, b: setpoint weight). Ms, settling and overshoot are the worst over %s of the plausible plants, IAE after a unit load that of the best fit.\n\n", percent(g.Assurance))
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
}
