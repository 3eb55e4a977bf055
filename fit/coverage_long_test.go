package fit

import (
	"math"
	"os"
	"sort"
	"testing"
)

// longFamilies are logs of so many rows that their noise is judged on parts of them:
// correlated over less than the lags and over more, with readings rounded, a drift,
// a walk, the structure known or not.
func longFamilies() []family {
	base := family{structure: "chain2", gain: 8, lags: []float64{2.1, 0.65}, dead: 0.42, n: 40000, step: 0.03,
		bumps: []float64{200, 500, 900}, sd: 0.25}
	with := func(name string, tc, white float64, change func(*family)) family {
		f := base
		f.name, f.ar, f.white = name, math.Exp(-f.step/tc), white
		change(&f)
		return f
	}
	return []family{
		with("40,000 rows, over 0.5 s", 0.5, 0.1, func(f *family) {}),
		with("40,000 rows, over 4 s", 4, 0.05, func(f *family) {}),
		with("40,000 rows, over 20 s, quantum", 20, 0.05, func(f *family) { f.quantum = 0.1 }),
		with("40,000 rows, over 4 s, drift", 4, 0.05, func(f *family) { f.drift = 0.002 }),
		with("40,000 rows, over 4 s, auto", 4, 0.05, func(f *family) { f.auto = true }),
		with("40,000 rows, over 1 s, wanders", 1, 0.05, func(f *family) { f.wander = 0.5 }),
	}
}

// TestLongCoverage is TestCoverage for long logs. The gain is held to it, and with the
// structure known lags and dead time; a log that wanders covers less, as it does there.
func TestLongCoverage(t *testing.T) {
	logs, sds := 12, 4.0
	if os.Getenv("LAGWRIGHT_LONG") != "" {
		logs, sds = 400, 2
	}
	for i, f := range longFamilies() {
		if logs < 100 && i != 1 && i != 4 {
			continue
		}
		c := cover(t, f, logs, Options{})
		bound := f.bound(t)
		for j := range c.in {
			sort.Float64s(c.width[j])
			p := float64(c.in[j]) / float64(c.logs)
			ratio := c.width[j][len(c.width[j])/2] / bound[j]
			t.Logf("%s, parameter %d: %.1f %% (%d below, %d above), width %.2f", f.name, j, 100*p, c.below[j], c.above[j], ratio)
			least := 0.93
			if f.wander > 0 {
				least = 0.75
			}
			if p < least-sds*math.Sqrt(0.05*0.95/float64(c.logs)) {
				t.Errorf("%s: the interval of parameter %d held the truth in %d of %d logs", f.name, j, c.in[j], c.logs)
			}
			if j == 0 && f.wander == 0 && ratio > 1.5 {
				t.Errorf("%s: the gain's interval is %.2f times as wide as it had to be", f.name, ratio)
			}
		}
	}
}
