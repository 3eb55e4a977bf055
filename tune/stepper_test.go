package tune

import (
	"math"
	"math/rand/v2"
	"testing"

	"lagwright/ident"
)

// The stepper against ident's exact simulation: any dead time, lags equal,
// nearly equal and decades apart.
func TestPlantStepperIsExact(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 1))
	for _, c := range []struct {
		structure string
		lags      []float64
		deadTime  float64
		step      float64
	}{
		{"fopdt", []float64{5}, 0, 0.5},
		{"fopdt", []float64{5}, 1.7, 0.5},
		{"fopdt", []float64{5}, 1.5, 0.5},
		{"chain2", []float64{5, 5}, 0.1234, 0.5},
		{"chain2", []float64{5, 5 - 1e-9}, 2.2, 0.3},
		{"chain3", []float64{40, 1, 0.004}, 3.3, 0.25},
		{"chain4", []float64{100, 10, 1, 0.01}, 0.05, 0.1},
		{"equal8", []float64{1.5}, 2.71, 0.7},
		{"ipdt", nil, 1.3, 0.5},
		{"chain2", []float64{5, 0}, 1, 0.5},
		{"fopdt", []float64{0}, 1.2, 0.5},
	} {
		p := plant(t, c.structure, -2.5, c.lags, c.deadTime)
		s, err := NewPlantStepper(p, c.step)
		if err != nil {
			t.Fatal(err)
		}
		const n = 200
		u := make([]float64, n)
		clock := make([]float64, n+1)
		for i := range n {
			clock[i+1] = float64(i+1) * c.step
			u[i] = math.Round(rng.NormFloat64())
		}
		u[0] = 0 // at rest before the first change
		in := ident.HeldInput(clock[:n], u, ident.Linear)
		want := make([]float64, n+1)
		ident.NewSimulator(clock, in).Response(want, p.Structure, p.Lags, p.DeadTime)
		worst, span := 0.0, 0.0
		for i := range n {
			y := s.Step(u[i])
			span = max(span, math.Abs(want[i+1]*p.Gain))
			// where a jump of the output falls on a sample, rounding says on
			// which side
			if c.lags != nil && c.lags[0] == 0 && math.Abs(u[i]-u[max(0, i-1)]) > 0 {
				continue
			}
			worst = max(worst, math.Abs(y-p.Gain*want[i+1]))
		}
		if worst > 1e-11*span {
			t.Errorf("%s %v dead time %g: off by %.2g of a span of %.3g", c.structure, c.lags, c.deadTime, worst, span)
		}
	}
}

func TestPlantStepperRefuses(t *testing.T) {
	p := plant(t, "fopdt", 1, []float64{5}, 1)
	for _, step := range []float64{0, -1, math.Inf(1), math.NaN(), 1e-9} {
		if _, err := NewPlantStepper(p, step); err == nil {
			t.Errorf("step %g: no error", step)
		}
	}
}

func BenchmarkLoopStep(b *testing.B) {
	p := plant(b, "chain3", 2, []float64{30, 8, 1}, 3.03)
	s, err := NewPlantStepper(p, 0.1)
	if err != nil {
		b.Fatal(err)
	}
	high, low := 10.0, 0.0
	g := newGains(piLaw(0.3, 30), "pi")
	g.Limits = Limits{Min: &low, Max: &high}
	c, err := NewController(g, 0.1)
	if err != nil {
		b.Fatal(err)
	}
	c.Start(0, 0, 2)
	b.ReportAllocs()
	for b.Loop() {
		s.Step(c.Next(10, s.Output()) - 2)
	}
}
