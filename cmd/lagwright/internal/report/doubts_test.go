package report

import (
	"strings"
	"testing"

	"lagwright/fit"
)

// TestDoubts: what speaks against trusting an answer stands beside it, with a
// way down, and nothing stands there that the bundle does not hold.
func TestDoubts(t *testing.T) {
	for _, c := range []struct {
		name     string
		edit     func(*Bundle)
		headline string
		doubts   []string // in order; each begins so
	}{
		{"nothing", func(b *Bundle) {}, "Enter these gains", nil},
		{"one doubtful", func(b *Bundle) { b.Checks[0].Verdict[2].Verdict = "doubtful" }, "Enter these gains with care", []string{"The log leaves the dead time doubtful."}},
		{"all doubtful", func(b *Bundle) {
			for i := range b.Checks[0].Verdict {
				b.Checks[0].Verdict[i].Verdict = "doubtful"
			}
		}, "Enter these gains with care", []string{"The log leaves the gain, lags and dead time doubtful."}},
		{"one missing", func(b *Bundle) {
			b.Checks[0].Verdict[0].Verdict, b.Checks[0].Verdict[1].Verdict = "not from this log", "doubtful"
		}, "Enter these gains with care", []string{"The log does not give the gain and leaves the lags doubtful."}},
		{"several logs", func(b *Bundle) {
			b.Checks[0].Verdict[0].Verdict = "doubtful"
			b.Checks = append(b.Checks, sampleCheck())
		}, "Enter these gains", nil},
		{"small margins", func(b *Bundle) { *b.Gains.Worst.Ms = 2.07 }, "Enter these gains with care", []string{"Small margins: Ms is 2.07"}},
		{"Ms of 2", func(b *Bundle) { *b.Gains.Worst.Ms = 2 }, "Enter these gains", nil},
		{"narrow range", func(b *Bundle) { b.Gains.HoldsOver = &[2]float64{3.2, 4.5} }, "Enter these gains", []string{"They hold for inputs from 3.2 to 4.5 V; the log has 3 to 4.5 V."}},
		{"a warning", func(b *Bundle) { b.Card.Warnings = []fit.Warning{{Code: "gap", Text: "a gap"}} }, "Enter these gains", []string{"1 warning came with the fit."}},
		{"a misfit", func(b *Bundle) { b.Card.Warnings = []fit.Warning{{Code: "input-correlation", Text: "follows"}} }, "Enter these gains with care",
			[]string{"The model does not follow the log well.", "1 warning came with the fit."}},
		{"unstable", func(b *Bundle) { b.Gains.Meets, b.Gains.Worst.Stable = false, false }, "Do not enter these gains", nil},
		{"°F is none", func(b *Bundle) { b.Card.Warnings = []fit.Warning{{Code: "fahrenheit", Text: "°F"}} }, "Enter these gains", nil},
		{"a no stays a no", func(b *Bundle) { b.Gains.Meets, *b.Gains.Worst.Ms = false, 3 }, "No gains meet the requirement; these come nearest", []string{"Small margins"}},
		{"never judged", func(b *Bundle) { b.Gains.Nominal, b.Gains.Worst, b.Gains.Meets = nil, nil, false }, "Gains as they were written down", nil},
	} {
		b := sampleBundle()
		b.Replay, b.Gains.HoldsOver, b.Card.Warnings = nil, nil, nil
		b.Checks[0].Verdict[2].Verdict = "good"
		c.edit(&b)
		a := answerOf(&b)
		if a.Headline != c.headline || len(a.Doubts) != len(c.doubts) {
			t.Errorf("%s: %q with %+v, want %q with %q", c.name, a.Headline, a.Doubts, c.headline, c.doubts)
			continue
		}
		page := pageOf(t, b)
		for i, d := range a.Doubts {
			if !strings.HasPrefix(d.Text, c.doubts[i]) {
				t.Errorf("%s: %q, want %q", c.name, d.Text, c.doubts[i])
			}
			if !strings.Contains(outline(page[:strings.Index(page, "<section")]), together(d.Text)+" "+d.Title) {
				t.Errorf("%s: %q is not beside the answer", c.name, d.Text)
			}
			if !strings.Contains(page, `<section id="`+d.Section+`"`) || !strings.Contains(page, ">"+d.Title+"</h2>") {
				t.Errorf("%s: no section %q %q to go to", c.name, d.Section, d.Title)
			}
		}
	}
}
