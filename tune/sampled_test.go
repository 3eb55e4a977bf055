package tune

import (
	"math"
	"math/cmplx"
	"math/rand/v2"
	"testing"
)

// The pulse transfer function against the sum of the stepper's own answers to
// one pulse, Σ y[k]·z^(−k): equal, nearly equal and very different lags, dead
// times that are a part of a scan.
func TestPulseTransferFunction(t *testing.T) {
	for _, c := range []struct {
		structure string
		lags      []float64
		dead      float64
	}{
		{"fopdt", []float64{20}, 0}, {"fopdt", []float64{20}, 3.7}, {"chain2", []float64{20, 19.999}, 2},
		{"chain3", []float64{30, 4, 0.02}, 0.3}, {"equal4", []float64{6}, 11.5},
	} {
		const h = 2.0
		p := plant(t, c.structure, 3, c.lags, c.dead)
		s, err := NewPlantStepper(p, h)
		if err != nil {
			t.Fatal(err)
		}
		for _, wh := range []float64{0.05, 0.7, 2, math.Pi} {
			at := complex(0, wh/h)
			got := s.pulse(at, h)
			s.Reset()
			var want complex128
			u := 1.0
			for k := 1; k < 4000; k++ {
				want += complex(s.Step(u), 0) * cmplx.Exp(complex(0, -wh*float64(k)))
				u = 0
			}
			if cmplx.Abs(got-want) > 1e-10*(1+cmplx.Abs(want)) {
				t.Errorf("%s %v dead time %g at %g rad a scan: %v, the sum of pulses is %v", c.structure, c.lags, c.dead, wh, got, want)
			}
		}
	}
}

// The controller's transfer function against the controller: a sine of
// temperature, its transient faded, comes out with that size and phase.
func TestControllerPulse(t *testing.T) {
	for _, c := range []law{{kc: 0.4, ti: math.Inf(1), b: 1}, {kc: 0.4, ti: 30, b: 1}, {kc: 0.4, ti: 30, td: 6, tf: 0.6, b: 1}, {kc: 0.4, ti: 30, td: 6, b: 1}} {
		const h, wh = 2.0, 0.3
		k := newController(c, h)
		want := -k.pulse(cmplx.Exp(complex(0, -wh)))
		k.Start(0, 0, 0)
		var sum complex128
		const cycles = 400 // of 2π/0.3 scans: whole only over many
		n := int(math.Round(cycles * 2 * math.Pi / wh))
		last := 0.0
		for i := range 2 * n {
			u := k.Next(0, math.Sin(wh*float64(i)))
			if i == n {
				last = 0
			}
			if i >= n {
				sum += complex(u, 0) * cmplx.Exp(complex(0, -wh*float64(i)))
				last += u
			}
		}
		// the integral keeps a constant: it drops out of the correlation over whole cycles
		got := sum * complex(0, 2/float64(n))
		if cmplx.Abs(got-want) > 0.01*cmplx.Abs(want) {
			t.Errorf("%+v: %v, by its own answers %v", c, want, got)
		}
	}
}

// A first-order plant whose dead time is whole scans has the closed form
// L = K·(1−a)/(z−a)·z^(−d)·[Kc + Kc·h/(2Ti)·(z+1)/(z−1)], a = e^(−h/tau).
func TestSampledFiguresInClosedForm(t *testing.T) {
	const k, tau, h, d = 3.0, 20.0, 2.0, 3
	p := plant(t, "fopdt", k, []float64{tau}, d*h)
	c := piLaw(0.55, 18)
	f, ok := sampledFigures(p, c, h)
	if !ok || !f.Stable {
		t.Fatalf("figures %+v", f)
	}
	a := complex(math.Exp(-h/tau), 0)
	l := func(w float64) complex128 {
		z := cmplx.Exp(complex(0, w*h))
		return k * (1 - a) / (z - a) / cmplx.Pow(z, d) * (complex(c.kc, 0) + complex(c.kc*h/(2*c.ti), 0)*(z+1)/(z-1))
	}
	ms := 0.0
	for i := 1; i <= 400_000; i++ {
		ms = max(ms, 1/cmplx.Abs(1+l(math.Pi/h*float64(i)/400_000)))
	}
	near(t, "Ms", f.Ms, ms, 1e-6*ms)
	near(t, "|L| at the crossover", cmplx.Abs(l(f.Crossover)), 1, 1e-5)
	near(t, "phase margin", f.PhaseMargin, (cmplx.Phase(l(f.Crossover))+math.Pi)*180/math.Pi, 1e-3)
	at := l(f.PhaseCross)
	near(t, "gain margin", f.GainMargin, -1/real(at), 1e-4*f.GainMargin)
	near(t, "imaginary part at the phase crossover", imag(at), 0, 1e-5)
}

// Stability against the loop in time: with 3 % less than the ultimate gain it
// comes to rest, with 3 % more it grows, on any plant at any scan time.
func TestSampledStabilityInTime(t *testing.T) {
	rng := rand.New(rand.NewPCG(5, 6))
	for seed := range uint64(40) {
		p := family(t, seed, 1, 0)[0]
		reach := p.DeadTime
		for _, tau := range p.Lags {
			reach += tau
		}
		scan := reach * math.Exp(math.Log(0.01)+rng.Float64()*math.Log(60))
		c := piLaw(0.2/p.Gain, reach*(0.3+rng.Float64()))
		if rng.IntN(2) == 0 {
			c.td, c.tf = 0.2*c.ti, 0.02*c.ti
		}
		f, ok := sampledFigures(p, c, scan)
		if !ok || !f.Stable || math.IsInf(f.GainMargin, 1) {
			t.Logf("%d: %v %+v scan %g: %+v", seed, p, c, scan, f)
			continue
		}
		for _, by := range []float64{0.97, 1.03} {
			near := c
			near.kc *= f.GainMargin * by
			g, _ := sampledFigures(p, near, scan)
			if g.Stable != (by < 1) {
				t.Errorf("%d: at %g of the ultimate gain stable is %v", seed, by, g.Stable)
			}
			sim, err := newLoopSim(p, scan, scan)
			if err != nil {
				t.Fatal(err)
			}
			early, late := 0.0, 0.0
			end := 400 * max(reach, scan)
			sim.under(near, Limits{}).run(1, 0, func(s sample) bool {
				if e := math.Abs(s.y - 1); s.t < end/2 {
					if s.t > end/4 {
						early = max(early, e)
					}
				} else {
					late = max(late, e)
				}
				return s.t < end
			})
			if (late < early) != (by < 1) {
				t.Errorf("%d: at %g of the ultimate gain the error goes from %g to %g", seed, by, early, late)
			}
		}
	}
}

// The quick figures of a scanning controller are those of the dense sweep.
func TestQuickFiguresSampled(t *testing.T) {
	rng := rand.New(rand.NewPCG(8, 8))
	stable := 0
	for seed := range uint64(40) {
		p := family(t, seed, 1, 0)[0]
		ku, pu, err := quickUltimate(p)
		if err != nil {
			t.Fatal(err)
		}
		scan := pu * math.Exp(math.Log(0.003)+rng.Float64()*math.Log(100))
		s := newScenario(p, &task{scan: scan}, 0)
		for range 6 {
			c := piLaw(ku*math.Exp(-3*rng.Float64()), pu*math.Exp(3*rng.Float64()-1.5))
			if rng.IntN(2) == 0 {
				c.td = c.ti * 0.2
				c.tf = c.td / 10
			}
			full, _ := sampledFigures(p, c, scan)
			quick := s.quick(c)
			if full.Stable != quick.stable {
				t.Errorf("%v under %+v scanning every %g s: stable %v, quick says %v", p, c, scan, full.Stable, quick.stable)
			}
			if !full.Stable || full.Ms > 3 {
				continue
			}
			stable++
			if math.Abs(quick.ms-full.Ms) > 1e-3*full.Ms {
				t.Errorf("%v under %+v scanning every %g s: Ms %.6g, quick %.6g", p, c, scan, full.Ms, quick.ms)
			}
		}
	}
	if stable < 60 {
		t.Errorf("only %d loops were stable", stable)
	}
}

// A fast scan is a continuous controller.
func TestFastScanIsContinuous(t *testing.T) {
	p := plant(t, "chain2", 3, []float64{20, 8}, 5)
	for _, c := range []law{piLaw(0.5, 24), {kc: 0.7, ti: 24, td: 5, tf: 0.5, b: 1}} {
		g := newGains(c, "pid")
		want := Analyse(p, g)
		g.Scan = 0.005
		got := Analyse(p, g)
		near(t, "Ms", got.Ms, want.Ms, 2e-3*want.Ms)
		near(t, "Mt", got.Mt, want.Mt, 2e-3*want.Mt)
		near(t, "phase margin", got.PhaseMargin, want.PhaseMargin, 0.1)
		near(t, "gain margin", got.GainMargin, want.GainMargin, 5e-3*want.GainMargin)
		near(t, "bandwidth", got.Bandwidth, want.Bandwidth, 5e-3*want.Bandwidth)
		near(t, "damping", got.Damping, want.Damping, 5e-3)
	}
}

// Short scans run as a continuous controller give the figures of scans run one
// by one.
func TestShortScansInTime(t *testing.T) {
	p := plant(t, "chain2", 3, []float64{20, 8}, 5)
	for _, c := range []law{piLaw(0.5, 24), {kc: 0.7, ti: 24, td: 5, tf: 2, b: 1}} {
		task := newTask(Requirement{Overshoot: ptr(10), Scan: 0.1, InputMax: ptr(1.5), InputRate: ptr(0.2)}, 0, 0)
		s := newScenario(p, &task, 0)
		l := newOpenLoop(p, c, task.scan)
		quick, err := task.setpoint(s, c, &l, s.quick(c), reportStep, math.Inf(1))
		if err != nil {
			t.Fatal(err)
		}
		plan := l.planAt(s.quick(c).crossover, reportStep)
		sim, err := newLoopSim(p, task.scan, task.scan)
		if err != nil {
			t.Fatal(err)
		}
		exact := setpointStep(sim.under(c, task.limits), p, c, task.step, task.band, plan)
		if shortScan*task.scan >= plan.step {
			t.Fatalf("a step of %g s is not long", plan.step)
		}
		near(t, "overshoot", quick.overshoot, exact.overshoot, 2e-3)
		near(t, "settling", quick.settling, exact.settling, 5e-3*exact.settling)
		near(t, "highest input", quick.inputHigh, exact.inputHigh, 1e-2*exact.inputHigh)
	}
}
