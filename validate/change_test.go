package validate

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"
)

// runHistory draws a history of n runs with the standard errors se(i), a
// scatter between runs, and a shift of the runs from `from` on.
func runHistory(rng *rand.Rand, n int, se func(int) float64, between, shift float64, from int) history {
	h := history{make([]float64, n), make([]float64, n), make([]float64, n)}
	for i := range n {
		h.t[i], h.se[i] = float64(i), se(i)
		h.x[i] = math.Hypot(h.se[i], between) * rng.NormFloat64()
		if i >= from {
			h.x[i] += shift
		}
	}
	return h
}

func even(s float64) func(int) float64 { return func(int) float64 { return s } }

// uneven standard errors: every third run was short and says little.
func uneven(i int) float64 {
	if i%3 == 0 {
		return 0.06
	}
	return 0.01
}

// alarmed tests the parameters of one history as track does.
func alarmed(rng *rand.Rand, parameters []history) bool {
	for _, h := range parameters {
		step, slope := h.test(rng)
		if min(step.p, slope.p)*float64(2*len(parameters)) <= 0.05 {
			return true
		}
	}
	return false
}

// A history without change must raise an alarm in at most 7% of 500
// histories: designed for 5%, over all runs and parameters together.
func TestChangeFalseAlarms(t *testing.T) {
	for _, c := range []struct {
		name    string
		n       int
		se      func(int) float64
		between float64
	}{
		{"200 runs", 200, even(0.0255), 0},
		{"200 runs that scatter twice as wide as their intervals say", 200, even(0.0255), 0.045},
		{"24 runs", 24, even(0.0255), 0},
		{"24 uneven runs with scatter", 24, uneven, 0.03},
		{"4 runs", 4, even(0.0255), 0},
	} {
		t.Run(c.name, func(t *testing.T) {
			alarms := 0
			for seed := range uint64(500) {
				rng := rand.New(rand.NewPCG(seed, 1))
				var all []history
				for range 4 { // gain, two lags, dead time
					all = append(all, runHistory(rng, c.n, c.se, c.between, 0, 0))
				}
				if alarmed(rng, all) {
					alarms++
				}
			}
			t.Logf("%d alarms in 500 histories without change", alarms)
			if alarms > 35 {
				t.Errorf("%d alarms in 500 histories without change, want at most 35", alarms)
			}
		})
	}
}

// A loss of 10% of the gain must be found in at least 90% of the histories
// where one run's gain interval is ±5%.
func TestChangeFindsTenPercentLoss(t *testing.T) {
	const z95 = 1.959964
	for _, c := range []struct{ n, from int }{{200, 100}, {200, 195}, {24, 12}, {24, 20}, {12, 6}} {
		t.Run(fmt.Sprintf("%d runs, lost from run %d", c.n, c.from), func(t *testing.T) {
			found := 0
			for seed := range uint64(200) {
				rng := rand.New(rand.NewPCG(seed, 2))
				all := []history{runHistory(rng, c.n, even(0.05/z95), 0, math.Log(0.9), c.from)}
				for range 3 {
					all = append(all, runHistory(rng, c.n, even(0.05/z95), 0, 0, 0))
				}
				step, slope := all[0].test(rng)
				if min(step.p, slope.p)*8 <= 0.05 {
					found++
				}
			}
			t.Logf("found in %d of 200", found)
			if found < 180 {
				t.Errorf("found in %d of 200 histories, want at least 180", found)
			}
		})
	}
}

// The size of a step that is found, and its interval, against the size put in.
func TestChangeStepSize(t *testing.T) {
	inside := 0
	for seed := range uint64(400) {
		rng := rand.New(rand.NewPCG(seed, 3))
		h := runHistory(rng, 30, even(0.02), 0.02, -0.2, 18)
		step, _ := h.test(rng)
		if math.Abs(step.effect+0.2) <= 1.96*step.se {
			inside++
		}
	}
	t.Logf("interval held the step in %d of 400", inside)
	if inside < 366 || inside > 394 { // 95% ± 3 binomial sd
		t.Errorf("the 95%% interval of the step held it in %d of 400 histories", inside)
	}
}

// Two runs only: a step is the plain z-test of their difference.
func TestChangeTwoRuns(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 4))
	h := history{t: []float64{0, 1}, x: []float64{1, 1.3}, se: []float64{0.06, 0.08}}
	step, slope := h.test(rng)
	want := math.Erfc(0.3 / 0.1 / math.Sqrt2) // two-sided normal, 3 standard errors
	if math.Abs(step.p-want) > 0.0016 || step.first != 1 || math.Abs(step.effect-0.3) > 1e-12 {
		t.Errorf("step p %.4f at run %d by %g, want p %.4f at run 1 by 0.3", step.p, step.first, step.effect, want)
	}
	if math.Abs(slope.effect-0.3) > 1e-12 || math.Abs(slope.se-0.1) > 1e-12 {
		t.Errorf("slope %g ± %g, want 0.3 ± 0.1", slope.effect, slope.se)
	}
}
