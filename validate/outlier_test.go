package validate

import (
	"math"
	"strings"
	"testing"
)

// One bad test among good ones is no lasting change, and still named; a
// history without change, or with a step, names no run.
func TestRunsThatStandApart(t *testing.T) {
	named := func(d *Drift) (out []string) {
		for _, w := range d.Warnings {
			if strings.Contains(w, "the runs around it") {
				out = append(out, w)
			}
		}
		return out
	}
	for seed := range uint64(40) {
		if got := named(judged(tableHistory(seed, 24, 12, shift{}, shift{}))); len(got) > 0 {
			t.Errorf("seed %d, nothing changed: %q", seed, got)
		}
	}
	if got := named(judged(tableHistory(4, 24, 12, shift{gain: math.Log(0.85)}, shift{}))); len(got) > 0 {
		t.Errorf("a lasting step: %q", got)
	}
	for _, at := range []int{0, 7, 23} {
		fitted := tableHistory(4, 24, 12, shift{}, shift{})
		p := &fitted[at].parameters[0]
		low, high := -*p.High, -*p.Low
		p.Value, p.Low, p.High = -p.Value, &low, &high
		if got := named(judged(fitted)); len(got) != 1 || !strings.Contains(got[0], "gain of "+fitted[at].run.File) {
			t.Errorf("gain of run %d with the other sign: %q", at, got)
		}
	}
}
