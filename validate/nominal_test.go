package validate

import (
	"strings"
	"testing"

	"lagwright/tune"
)

// What the gains are known to miss on the step they were tuned for fails a run
// that does not show it.
func TestNominalMissFails(t *testing.T) {
	f := func(v float64) *float64 { return &v }
	for _, c := range []struct {
		name           string
		settles, asked float64
		fails          bool
	}{
		{"kept", 40, 50, false},
		{"missed", 73, 50, true},
	} {
		p := &plan{gains: &tune.Gains{Nominal: &tune.Metrics{Stable: true, Settling: f(c.settles)}}}
		p.options.Requirement = tune.Requirement{Settling: f(c.asked)}
		l := loopCheck{misses: make([]bool, 3)}
		p.checkNominal(&l)
		if l.fails != c.fails {
			t.Errorf("%s: fails %v", c.name, l.fails)
		}
		if c.fails && !strings.Contains(strings.Join(l.reasons, " "), "73") {
			t.Errorf("%s: reasons %q do not give the figure", c.name, l.reasons)
		}
	}
}
