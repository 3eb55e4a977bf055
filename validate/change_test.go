package validate

import (
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

// A history whose runs scatter wider than their intervals say, evenly or
// not, raises no more alarms than one whose runs do not.
func TestChangeFalseAlarms(t *testing.T) {
	for _, c := range []struct {
		name    string
		n       int
		se      func(int) float64
		between float64
	}{
		{"40 runs that scatter twice as wide as their intervals say", 40, even(0.0255), 0.045},
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

// The size of a step that is found, and its interval, against the size put in.
func TestChangeStepSize(t *testing.T) {
	inside := 0
	for seed := range uint64(400) {
		rng := rand.New(rand.NewPCG(seed, 3))
		h := runHistory(rng, 30, even(0.02), 0.02, -0.2, 18)
		w := h.weights()
		if effect, se := h.stepEffect(h.statistics(h.x, w), w); math.Abs(effect+0.2) <= 1.96*se {
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
