package tune

import (
	"math"
	"math/rand/v2"
	"testing"

	"lagwright/ident"
)

func controller(t *testing.T, c law, kind string, l Limits, step float64) *Controller {
	t.Helper()
	g := newGains(c, kind)
	g.Limits = l
	k, err := NewController(g, step)
	if err != nil {
		t.Fatal(err)
	}
	return k
}

// Going to automatic makes no bump: held setpoint and temperature keep the
// output, whatever the setpoint weight; only the error integrates.
func TestControllerStartsWithoutBump(t *testing.T) {
	for _, b := range []float64{0, 0.3, 1} {
		c := controller(t, law{kc: -2, ti: 10, td: 3, tf: 0.5, b: b}, "pid", Limits{}, 0.5)
		c.Start(70, 70, 4.2)
		for range 50 {
			near(t, "output", c.Next(70, 70), 4.2, 1e-12)
		}
		c.Start(72, 70, 4.2)
		near(t, "first output with an error", c.Next(72, 70), 4.2-2*0.5/10*2, 1e-12)
	}
}

// The output never leaves its limits or moves faster than its rate, and the
// integral does not wind up: after a long time at the limit the output leaves
// it as soon as the error changes sign.
func TestControllerLimits(t *testing.T) {
	c := controller(t, piLaw(1, 5), "pi", Limits{Min: ptr(0), Max: ptr(10), Rate: ptr(2)}, 0.5)
	c.Start(50, 50, 5)
	last := 5.0
	for range 400 {
		u := c.Next(80, 50)
		if u > 10 || math.Abs(u-last) > 1+1e-12 {
			t.Fatalf("output %g after %g", u, last)
		}
		last = u
	}
	near(t, "output at the limit", last, 10, 0)
	if u := c.Next(80, 80.5); u >= 10 {
		t.Errorf("output %g at the first error of the other sign: the integral has wound up", u)
	}
	rng := rand.New(rand.NewPCG(1, 2))
	for range 2000 {
		u := c.Next(60+20*rng.Float64(), 60+20*rng.Float64())
		if u < 0 || u > 10 || math.Abs(u-last) > 1+1e-12 {
			t.Fatalf("output %g after %g", u, last)
		}
		last = u
	}
}

func TestControllerResolution(t *testing.T) {
	c := controller(t, piLaw(0.4, 20), "pi", Limits{Resolution: ptr(0.1)}, 1)
	c.Start(50, 50, 3)
	u := 0.0
	for range 200 { // an error of 0.03 K moves the output less than a step at a time
		u = c.Next(50.03, 50)
		if r := math.Abs(u/0.1 - math.Round(u/0.1)); r > 1e-9 {
			t.Fatalf("output %g is no multiple of 0.1", u)
		}
	}
	near(t, "output", u, 3+0.4*0.03+0.4/20*0.03*199.5, 0.05+1e-9)
}

// A P controller gives its bias at zero error and leaves the offset of its
// loop: r/(1 + K·Kc).
func TestProportionalOffset(t *testing.T) {
	p := plant(t, "chain2", 3, []float64{20, 5}, 2)
	g := newGains(pLaw(0.5), "p")
	m, err := Evaluate(p, g, Requirement{SetpointStep: ptr(8)}, 4, 60)
	if err != nil {
		t.Fatal(err)
	}
	near(t, "offset", *m.SteadyOffset, 8/(1+3*0.5), 1e-12)
	if m.IAE != nil {
		t.Errorf("load IAE %g of a loop that keeps an offset", *m.IAE)
	}
	c := controller(t, pLaw(0.5), "p", Limits{}, 1)
	c.bias = 4
	c.Start(60, 60, 9)
	near(t, "output", c.Next(60, 58), 5, 1e-12)
}

// The filter is exact for ramps: against the closed form
// yf = t − Tf·(1 − e^(−t/Tf)) for y = t.
func TestMeasurementFilterOfARamp(t *testing.T) {
	c := controller(t, law{kc: 1, ti: math.Inf(1), td: 2, tf: 1.7, b: 1}, "pid", Limits{}, 0.3)
	c.Start(0, 0, 0)
	for i := 1; i < 40; i++ {
		now := float64(i) * 0.3
		yf := now - 1.7*(1-math.Exp(-now/1.7))
		want := -yf - 2*(1-math.Exp(-now/1.7))
		near(t, "output", c.Next(0, now), want, 1e-12)
	}
}

// A scanning loop is exact: its outputs, put through ident's simulation of the
// plant, give its temperatures.
func TestScanningLoopIsExact(t *testing.T) {
	p := plant(t, "chain3", 2.5, []float64{30, 8, 1}, 3.37)
	const scan = 0.8
	s, err := newLoopSim(p, scan, 0.2)
	if err != nil {
		t.Fatal(err)
	}
	s.under(law{kc: 0.7, ti: 25, td: 5, tf: 1, b: 0.6}, Limits{Max: ptr(2.5), Rate: ptr(1)})
	var clock, u, y []float64
	s.run(4, 0, func(x sample) bool {
		clock, u, y = append(clock, x.t), append(u, x.u), append(y, x.y)
		return len(clock) < 800
	})
	// before t = 0 the input was 0
	times := append([]float64{-1}, clock...)
	in := ident.HeldInput(times, append([]float64{0}, u...), ident.Linear)
	want := make([]float64, len(times))
	ident.NewSimulator(times, in).Response(want, p.Structure, p.Lags, p.DeadTime)
	for i := range y {
		near(t, "temperature", y[i], p.Gain*want[i+1], 1e-10)
	}
	for i := 1; i < len(u); i++ {
		if u[i] != u[i-1] && i%4 != 0 {
			t.Fatalf("the output moved between scans, at sample %d", i)
		}
	}
}

// The faster the scan, the nearer to the continuous loop, whose figures come
// from another way of stepping.
func TestScanTendsToContinuous(t *testing.T) {
	p := plant(t, "fopdt", 2, []float64{10}, 2)
	c := law{kc: 1.4, ti: 8, td: 0.8, tf: 0.2, b: 1}
	figures := func(scan float64) stepFigures {
		task := newTask(Requirement{Scan: scan}, 0, 0)
		s := newScenario(p, &task, 0)
		l := newOpenLoop(p, c, scan)
		f, err := task.setpoint(s, c, &l, s.quick(c), reportStep, math.Inf(1))
		if err != nil {
			t.Fatal(err)
		}
		return f
	}
	exact := figures(0)
	last := math.Inf(1)
	for _, scan := range []float64{0.4, 0.1, 0.025} {
		off := math.Abs(figures(scan).overshoot - exact.overshoot)
		if off > last/2 {
			t.Errorf("scan %g: overshoot off by %.4g, by %.4g at the slower scan", scan, off, last)
		}
		last = off
	}
	if last > 0.01 {
		t.Errorf("overshoot still off by %.4g at a scan of 0.025 s", last)
	}
}

// Limits are judged from the operating input; a target out of reach never
// settles.
func TestLimitsInTheStep(t *testing.T) {
	p := plant(t, "fopdt", 2, []float64{10}, 2)
	g := newGains(piLaw(1.25, 10), "pi")
	q := Requirement{SetpointStep: ptr(10), InputMax: ptr(8)}
	m, err := Evaluate(p, g, q, 2, 50) // needs 7 V
	if err != nil {
		t.Fatal(err)
	}
	free, err := Evaluate(p, g, Requirement{SetpointStep: ptr(10)}, 2, 50)
	if err != nil {
		t.Fatal(err)
	}
	near(t, "peak input, limited", *m.PeakInput, 8, 1e-12)
	near(t, "peak input, free", *free.PeakInput, 2+12.5+1.25*10/10*2, 0.2) // rises until the dead time is over
	if *m.Settling <= *free.Settling {
		t.Errorf("settling %g with the limit, %g without", *m.Settling, *free.Settling)
	}
	q.InputMax = ptr(6)
	if m, err = Evaluate(p, g, q, 2, 50); err != nil {
		t.Fatal(err)
	}
	if m.Settling != nil {
		t.Errorf("settled in %g s at a target the supply cannot hold", *m.Settling)
	}
}

func TestUnstableIsNotSimulated(t *testing.T) {
	p := plant(t, "fopdt", 2, []float64{10}, 2)
	g := newGains(piLaw(5, 10), "pi")
	m, err := Evaluate(p, g, Requirement{}, 0, 0)
	if err != nil {
		t.Fatal(err)
	}
	if *m != (Metrics{}) {
		t.Errorf("an unstable loop has figures: %+v", *m)
	}
}
