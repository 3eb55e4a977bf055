package tune

import (
	"math"
	"testing"

	"lagwright/ident"
)

// plant is a test plant; it fails the test when there is no such plant.
func plant(t testing.TB, structure string, gain float64, lags []float64, deadTime float64) ident.Plant {
	t.Helper()
	s, err := ident.ParseStructure(structure)
	if err != nil {
		t.Fatal(err)
	}
	p, err := ident.NewPlant(s, gain, lags, deadTime)
	if err != nil {
		t.Fatal(err)
	}
	return p
}

func near(t *testing.T, what string, got, want, tolerance float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tolerance) {
		t.Errorf("%s = %.12g, want %.12g ± %.2g", what, got, want, tolerance)
	}
}

// The figures of the published SIMC loops with exact dead time, as recomputed
// in the reference tables of this project.
func TestSIMCLoopFigures(t *testing.T) {
	f := (&openLoop{k: 0.5, integrators: 1, delay: 1}).figures()
	near(t, "Ms", f.Ms, 1.5905, 5e-5)
	near(t, "GM", f.GainMargin, math.Pi, 1e-9)
	near(t, "PM", f.PhaseMargin, 61.352, 5e-4)
	near(t, "delay margin", f.DelayMargin, 2.142, 5e-4)
	f = (&openLoop{k: 0.0625, q1: 8, integrators: 2, delay: 1}).figures()
	near(t, "Ms", f.Ms, 1.7035, 5e-5)
	near(t, "GM", f.GainMargin, 2.9634, 5e-5)
	near(t, "PM", f.PhaseMargin, 46.864, 5e-4)
	near(t, "Mt", f.Mt, 1.2994, 5e-5)
	near(t, "delay margin", f.DelayMargin, 1.590, 5e-4)
}

// Exact closed-loop step figures of the reference tables of this project.
func TestExactStepFigures(t *testing.T) {
	p := plant(t, "fopdt", 1, []float64{4}, 1)
	c := law{kc: 2, ti: 4, b: 1}
	l := newOpenLoop(p, c, 0)
	plan := l.plan(0.02)
	s, err := newLoopSim(p, 0, plan.step)
	if err != nil {
		t.Fatal(err)
	}
	f := setpointStep(s.under(c, Limits{}), p, c, 1, 0.02, plan)
	near(t, "overshoot", f.overshoot, 0.0405, 5e-5)
	near(t, "peak time", f.peakTime, 4.74, 0.005)
	near(t, "settling", f.settling, 6.06, 0.005)
	near(t, "IAE", f.iae, 2.169, 0.001)

	p = plant(t, "ipdt", 1, nil, 1)
	c = law{kc: 0.5, ti: 8, b: 1}
	l = newOpenLoop(p, c, 0)
	plan = l.plan(0.02)
	if s, err = newLoopSim(p, 0, plan.step); err != nil {
		t.Fatal(err)
	}
	f = loadStep(s.under(c, Limits{}), p, c, 1, plan)
	near(t, "load peak", f.peak, 1.961, 0.0005)
	near(t, "load peak time", f.peakTime, 4.03, 0.005)
	near(t, "load IAE", f.iae, 16, 0.016)
}
