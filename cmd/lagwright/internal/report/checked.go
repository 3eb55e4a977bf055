package report

import (
	"fmt"
	"strings"

	"lagwright/fit"
)

// checked lists the verdicts of a check, each with its reason and what would
// mend it.
func checked(c *fit.CheckReport) []item {
	var out []item
	for _, v := range c.Verdict {
		sign := "warn"
		switch v.Verdict {
		case "good":
			sign = "good"
		case "not from this log":
			sign = "bad"
		}
		text := parameterName(v.Parameter) + ": " + v.Verdict
		if words := knownWords(v); words != "" {
			text += "; " + words
		}
		text += "."
		if len(v.Cures) > 0 {
			text += " Any one of these would do: " + strings.Join(v.Cures, "; ") + "."
		}
		out = append(out, item{sign, text})
	}
	if c.Loop.State != "" && c.Loop.State != "open" {
		out = append(out, item{"warn", fmt.Sprintf("The loop was %s while this was logged: %s.", c.Loop.State, strings.TrimSuffix(c.Loop.Reason, "."))})
	}
	return out
}

// knownWords are the reason of a verdict. A bound beyond the value itself is told
// in words: its percentage says nothing.
func knownWords(v fit.Verdict) string {
	reason := strings.TrimSuffix(v.Reason, ".")
	if v.Bound == nil || *v.Bound <= 100 || !strings.HasPrefix(reason, "known to ±") {
		return reason
	}
	words := "not known, the bound is wider than the value"
	if _, why, ok := strings.Cut(reason, ": "); ok {
		words += ": " + why
	}
	return words
}

// verdictWords answers for the log of a single check: the worst verdict.
func verdictWords(checks []*fit.CheckReport) string {
	if len(checks) != 1 || checks[0] == nil || len(checks[0].Verdict) == 0 {
		return ""
	}
	answer := "Yes. "
	for _, v := range checks[0].Verdict {
		switch {
		case v.Verdict == "not from this log":
			return "Not for everything. "
		case v.Verdict != "good":
			answer = "With care. "
		}
	}
	return answer
}
