package tune

import (
	"context"
	"math"
	"math/rand/v2"
	"testing"

	"lagwright/ident"
)

// family returns n plants scattered about a heater, as a fit would keep them.
func family(t testing.TB, seed uint64, n int, spread float64) []ident.Plant {
	t.Helper()
	rng := rand.New(rand.NewPCG(seed, 5))
	order := 1 + rng.IntN(4)
	names := []string{"fopdt", "chain2", "chain3", "chain4"}
	lags := make([]float64, order)
	sum := 0.0
	for i := range lags {
		lags[i] = 60 * math.Pow(0.25+0.5*rng.Float64(), float64(i))
		sum += lags[i]
	}
	theta := sum * (0.04 + 0.56*rng.Float64())
	gain := 1 + 8*rng.Float64()
	out := make([]ident.Plant, n)
	for k := range out {
		scattered := make([]float64, order)
		for i := range lags {
			scattered[i] = lags[i] * math.Exp(spread*rng.NormFloat64())
		}
		out[k] = plant(t, names[order-1], gain*math.Exp(spread/2*rng.NormFloat64()), scattered, theta*math.Exp(spread*rng.NormFloat64()))
	}
	return out
}

func scenarios(plants []ident.Plant) []*scenario {
	out := make([]*scenario, len(plants))
	for i, p := range plants {
		out[i] = newScenario(p, 0)
	}
	return out
}

// The quick figures against the full sweep, over loops stable and not.
func TestQuickFigures(t *testing.T) {
	rng := rand.New(rand.NewPCG(3, 3))
	stable := 0
	for seed := range uint64(60) {
		p := family(t, seed, 1, 0)[0]
		s := newScenario(p, 0)
		ku, pu, err := quickUltimate(p)
		if err != nil {
			t.Fatal(err)
		}
		for range 10 {
			c := piLaw(ku*math.Exp(-3*rng.Float64()), pu*math.Exp(3*rng.Float64()-1.5))
			if rng.IntN(2) == 0 {
				c.td = c.ti * 0.2
				c.tf = c.td / 10
			}
			l := newOpenLoop(p, c, 0)
			full, quick := l.figures(), s.quick(c)
			if full.Stable != quick.stable {
				t.Errorf("%v under %+v: stable %v, quick says %v", p, c, full.Stable, quick.stable)
			}
			if !full.Stable {
				continue
			}
			stable++
			if math.Abs(quick.ms-full.Ms) > 2e-4*full.Ms && full.Ms < 3 {
				t.Errorf("%v under %+v: Ms %.6g, quick %.6g", p, c, full.Ms, quick.ms)
			}
			if full.Ms < 3 && math.Abs(quick.phaseMargin-full.PhaseMargin) > 0.5 {
				t.Errorf("%v under %+v: phase margin %.5g, quick %.5g", p, c, full.PhaseMargin, quick.phaseMargin)
			}
			if full.Ms < 3 && full.GainMargin < 50 && math.Abs(quick.gainMargin-full.GainMargin) > 0.02*full.GainMargin {
				t.Errorf("%v under %+v: gain margin %.5g, quick %.5g", p, c, full.GainMargin, quick.gainMargin)
			}
			cross := s.phaseCross(&l)
			damping := dominantDamping(l.poles(), full.PhaseCross)
			for _, z := range []float64{damping * 0.98, damping * 1.02} {
				if z < 0.99 && l.dampedEnough(z, cross) != (damping > z) {
					t.Errorf("%v under %+v: damping %.4g by poles, %v at %.4g by counting", p, c, damping, l.dampedEnough(z, cross), z)
				}
			}
		}
	}
	if stable < 200 {
		t.Errorf("only %d of 600 loops were stable", stable)
	}
}

func BenchmarkSynthesisPI(b *testing.B) {
	plants := family(b, 2, 200, 0.05)
	task := newTask(Requirement{Ms: ptr(1.6), Overshoot: ptr(10)}, 0, 0)
	for b.Loop() {
		e := newEnsemble(&task, scenarios(plants), 2)
		d := newSearch(context.Background(), e, 0.95).design("pi")
		if !d.found {
			b.Fatal("nothing found")
		}
	}
}

func BenchmarkSynthesisPID(b *testing.B) {
	plants := family(b, 2, 200, 0.05)
	task := newTask(Requirement{Ms: ptr(1.6), Overshoot: ptr(10)}, 0, 0)
	for b.Loop() {
		e := newEnsemble(&task, scenarios(plants), 2)
		d := newSearch(context.Background(), e, 0.95).design("pid")
		if !d.found {
			b.Fatal("nothing found")
		}
	}
}
