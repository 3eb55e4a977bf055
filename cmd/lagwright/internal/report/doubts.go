package report

import (
	"fmt"
	"slices"
	"strings"

	"lagwright/cmd/lagwright/internal/format"
	"lagwright/fit"
	"lagwright/tune"
)

// doubt is a short word beside the answer on what speaks against trusting it,
// and the section that says more.
type doubt struct{ Text, Section, Title string }

// soundMs is the peak sensitivity above which the margins are small, that of
// tune's caution.
const soundMs = 2.0

// grave doubts change the headline: what the log does not give, and margins
// that leave no room.
func grave(b *Bundle) []doubt {
	var out []doubt
	if words := logDoubt(b); words != "" {
		out = append(out, doubt{words, "log", "Can I trust this log?"})
	}
	if warnedOf(b.Card, "little-explained", "input-correlation") {
		out = append(out, doubt{"The model does not follow the log well.", "watch", "What to watch for"})
	}
	if w := b.Gains.Worst; w != nil && w.Ms != nil && *w.Ms > soundMs {
		out = append(out, doubt{fmt.Sprintf("Small margins: Ms is %s at its worst, up to %s is usual.", format.Number(*w.Ms, 3), format.Short(soundMs, 2)), "gains", "Why these gains?"})
	}
	return out
}

// warnedOf reports whether the card has a warning of one of the codes.
func warnedOf(c *fit.Card, codes ...string) bool {
	return c != nil && slices.ContainsFunc(c.Warnings, func(w fit.Warning) bool { return slices.Contains(codes, w.Code) })
}

// GraveDoubts are the words of the doubts that change the headline, for a bundle
// with gains that were judged.
func GraveDoubts(b Bundle) []string {
	var words []string
	for _, d := range grave(&b) {
		words = append(words, d.Text)
	}
	return words
}

// light doubts are said as well.
func light(b *Bundle) []doubt {
	var out []doubt
	if words := narrowRange(b); words != "" {
		out = append(out, doubt{words, "gains", "Why these gains?"})
	}
	if n := warningsOf(b); n > 0 {
		out = append(out, doubt{format.Count(n, "warning", "warnings") + " came with the fit.", "watch", "What to watch for"})
	}
	return out
}

// logDoubt names what a single log leaves in doubt or does not give at all.
// Of several logs none has to give everything: they are fitted together.
func logDoubt(b *Bundle) string {
	if len(b.Checks) != 1 || b.Checks[0] == nil || len(b.Runs) == 0 {
		return ""
	}
	var doubtful, missing []string
	for _, v := range b.Checks[0].Verdict {
		name := strings.ToLower(parameterName(v.Parameter))
		switch v.Verdict {
		case "good":
		case "not from this log":
			missing = append(missing, name)
		default:
			doubtful = append(doubtful, name)
		}
	}
	switch {
	case len(missing) == 0 && len(doubtful) == 0:
		return ""
	case len(doubtful) == 0:
		return "The log does not give the " + enumerated(missing) + "."
	case len(missing) == 0:
		return "The log leaves the " + enumerated(doubtful) + " doubtful."
	}
	return "The log does not give the " + enumerated(missing) + " and leaves the " + enumerated(doubtful) + " doubtful."
}

// narrowRange says that the requirement holds over a part only of the inputs
// that were logged.
func narrowRange(b *Bundle) string {
	h := b.Gains.HoldsOver
	if h == nil || b.Card == nil || h[0] <= b.Card.Range.Input[0] && h[1] >= b.Card.Range.Input[1] {
		return ""
	}
	unit := b.Gains.Units.Input
	return fmt.Sprintf("They hold for inputs from %s to %s; the log has %s to %s.", format.Short(h[0], 3), format.Amount(h[1], unit, 3),
		format.Short(b.Card.Range.Input[0], 3), format.Amount(b.Card.Range.Input[1], unit, 3))
}

// warningsOf counts the card's warnings, without that of °F: the gain for a
// controller in °F stands in the box.
func warningsOf(b *Bundle) int {
	if b.Card == nil {
		return 0
	}
	n := 0
	for _, w := range b.Card.Warnings {
		if w.Code != noteFahrenheit {
			n++
		}
	}
	return n
}

// enumerated writes "gain, lags and dead time".
func enumerated(names []string) string {
	if len(names) < 2 {
		return strings.Join(names, "")
	}
	last := len(names) - 1
	return strings.Join(names[:last], ", ") + " and " + names[last]
}

// withDoubts puts the doubts beside an answer that gains are judged by.
func (a *answer) withDoubts(b *Bundle, g *tune.Gains) {
	if !g.Judged() {
		return
	}
	serious := grave(b)
	if len(serious) > 0 && a.Headline == enterThese {
		a.Headline += " with care"
	}
	a.Doubts = append(serious, light(b)...)
}
