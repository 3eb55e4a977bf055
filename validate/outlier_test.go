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
	for _, n := range []int{8, 12} { // few runs, narrow intervals, the step near an end
		for at := 2; at <= n-2; at++ {
			for seed := range uint64(10) {
				d := judged(tableHistory(seed, n, at, shift{gain: math.Log(0.6)}, shift{}))
				if p := d.Parameters[0]; !p.Alarm || p.Step == nil || *p.Step.Run != at {
					continue
				}
				if got := named(d); len(got) > 0 {
					t.Errorf("%d runs, seed %d, a step from run %d on: %q", n, seed, at, got)
				}
			}
		}
	}
	if got := named(judged(tableHistory(4, 24, 12, shift{}, shift{gain: math.Log(0.2)}))); len(got) > 0 {
		t.Errorf("a steep slope: %q", got)
	}
	// after a step, one bad test is still named among those of its side
	fitted := tableHistory(4, 24, 12, shift{gain: math.Log(0.7)}, shift{})
	p := &fitted[13].parameters[0]
	for _, x := range []**float64{&p.Low, &p.High} {
		v := **x * 1.4
		*x = &v
	}
	p.Value *= 1.4
	if got := named(judged(fitted)); len(got) != 1 || !strings.Contains(got[0], "gain of "+fitted[13].run.File) {
		t.Errorf("the old gain in one run after a step: %q", got)
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
