package report

import (
	"math"
	"slices"
	"testing"

	"lagwright/fit"
	"lagwright/tune"
)

// loopedCard is the sample's card with the plant it was made of, and plants
// around it.
func loopedCard() *fit.Card {
	c := sampleCard()
	c.Plants.Values = nil
	for i := range 20 {
		f := 0.9 + 0.01*float64(i)
		c.Plants.Values = append(c.Plants.Values, []float64{12.41 * f, 38.2, 5.9, 4.6 * f})
	}
	return c
}

// TestLoopAgreesWithTune holds the drawn curves to tune's figures, which come
// from another path: settling and overshoot of the step, the peak of |S|, the
// IAE of the load.
func TestLoopAgreesWithTune(t *testing.T) {
	for _, c := range []struct {
		name string
		edit func(*tune.Gains)
	}{
		{"continuous", func(g *tune.Gains) { g.Scan = 0 }},
		{"scanning", func(g *tune.Gains) { g.Scan = 0.5 }},
		{"derivative", func(g *tune.Gains) { g.Controller, g.Td, g.Filter, g.Scan = "pid", ptr(2), 0.4, 0 }},
		{"parallel", func(g *tune.Gains) { g.Form, g.Scan = tune.Parallel, 0 }},
	} {
		card, g := loopedCard(), sampleGains()
		c.edit(g)
		l, err := LoopOf(card, g)
		if err != nil {
			t.Fatal(err)
		}
		plant, err := card.Plant()
		if err != nil {
			t.Fatal(err)
		}
		want, err := tune.Evaluate(plant, g, g.Requirement, *g.OperatingInput, 70)
		if err != nil {
			t.Fatal(err)
		}
		near := func(what string, got float64, want *float64, tolerance float64) {
			if want == nil || math.Abs(got-*want) > tolerance {
				t.Errorf("%s: %s %g of the curve, %g of the figures", c.name, what, got, deref(want))
			}
		}
		y := l.Step.Temperature.Best
		settled := 0.0
		for i, v := range y {
			if math.Abs(v-10) > 0.2 {
				settled = l.Step.T[min(i+1, len(y)-1)]
			}
		}
		// The tolerance is two points of the curve, and what a point may miss of a peak.
		near("settling", settled, want.Settling, 2*(l.Step.T[1]-l.Step.T[0]))
		near("overshoot", max(0, 100*(slices.Max(y)/10-1)), want.Overshoot, 0.1)
		near("Ms", slices.Max(l.Sensitivity.S.Best), want.Ms, 0.003)
		iae := 0.0
		for i := 1; i < len(l.Load.T); i++ {
			iae += (l.Load.T[i] - l.Load.T[i-1]) * (math.Abs(l.Load.Temperature.Best[i]) + math.Abs(l.Load.Temperature.Best[i-1])) / 2
		}
		near("IAE", iae, want.IAE, 0.02*deref(want.IAE))
		for k := range y {
			if l.Step.Temperature.Low[k] > l.Step.Temperature.High[k] {
				t.Fatalf("%s: the band is upside down", c.name)
			}
		}
	}
}

func deref(v *float64) float64 {
	if v == nil {
		return math.NaN()
	}
	return *v
}

// TestLoopOfP: the locus passes through the poles at the gain in force, and
// the region is that of the requirement.
func TestLoopOfP(t *testing.T) {
	card, g := loopedCard(), sampleGains()
	g.Controller, g.Ti, g.Bias, g.Scan = "p", nil, 3.75, 0
	g.Requirement.Damping = ptr(0.5)
	l, err := LoopOf(card, g)
	if err != nil {
		t.Fatal(err)
	}
	p := l.Poles
	if want := math.Log(50) / 60; math.Abs(p.Decay-want) > 1e-12 || p.Damping != 0.5 {
		t.Errorf("region: decay %g, damping %g", p.Decay, p.Damping)
	}
	nearest := math.Inf(1)
	for _, z := range p.Locus {
		nearest = math.Min(nearest, math.Hypot(real(z-p.Best[0]), imag(z-p.Best[0])))
	}
	if nearest > 0.05*math.Hypot(real(p.Best[0]), imag(p.Best[0])) {
		t.Errorf("the locus passes the pole %v at a distance of %g", p.Best[0], nearest)
	}
	// A P controller leaves an offset: K·Kc/(1 + K·Kc) of the step is reached.
	k := 12.41 * g.Kc
	if got, want := last(l.Step.Temperature.Best), 10*k/(1+k); math.Abs(got-want) > 0.01*want {
		t.Errorf("the step ends at %g, want %g", got, want)
	}
}

func TestLoopOfUnstableGains(t *testing.T) {
	g := sampleGains()
	g.Kc *= 20
	l, err := LoopOf(loopedCard(), g)
	if err != nil {
		t.Fatal(err)
	}
	if l.Step != nil || l.Load != nil || l.Sensitivity != nil {
		t.Error("an unstable loop has no response to draw")
	}
}
