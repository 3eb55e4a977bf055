package validate

import (
	"math"
	"math/rand/v2"
	"testing"
)

// secondOrder is the unit step response of ωn²/(s² + 2ζωn·s + ωn²) with
// ωn = 1, sampled every dt.
func secondOrder(zeta, dt, end float64) signal {
	n := int(end/dt) + 1
	s := signal{t: make([]float64, n), y: make([]float64, n), u: make([]float64, n), r: make([]float64, n)}
	wd := math.Sqrt(1 - zeta*zeta)
	for i := range n {
		t := float64(i) * dt
		s.t[i], s.r[i] = t, 1
		s.y[i] = 1 - math.Exp(-zeta*t)*(math.Cos(wd*t)+zeta/wd*math.Sin(wd*t))
	}
	return s
}

// Overshoot exp(−πζ/√(1−ζ²)) and the exact 2% settling times ωn·ts of the
// standard second-order form: the values are the project's shared table
// identification.md §6, recomputed there; the overshoots agree with the
// printed textbook values 16% (ζ 0.5), 4.6% (0.7) and 4.3% (1/√2).
func TestSecondOrderStep(t *testing.T) {
	for _, c := range []struct{ zeta, overshoot, settling float64 }{
		{0.1, 72.925, 38.383},
		{0.2, 52.662, 19.602},
		{0.3, 37.233, 11.230},
		{0.4, 25.383, 8.409},
		{0.5, 16.303, 8.076},
		{0.6, 9.478, 5.943},
		{0.7, 4.599, 5.979},
		{1 / math.Sqrt2, 4.321, 5.963},
		{0.8, 1.516, 3.756},
		{0.9, 0.152, 4.700},
	} {
		f := noFigures()
		f.add(secondOrder(c.zeta, 0.001, 80), yardstick{band: 0.02})
		if math.Abs(f.overshoot-c.overshoot) > 6e-4 {
			t.Errorf("ζ %.3g: overshoot %.4f%%, want %.3f%%", c.zeta, f.overshoot, c.overshoot)
		}
		if math.Abs(f.settling-c.settling) > 6e-4 {
			t.Errorf("ζ %.3g: settling %.4f, want %.3f", c.zeta, f.settling, c.settling)
		}
	}
}

// A first-order rise e^(−t/τ): IAE is τ, settling into 2% is τ·ln 50.
func TestFirstOrderRise(t *testing.T) {
	const tau, dt, n = 3.0, 0.01, 4000
	s := signal{}
	for i := range n {
		at := float64(i) * dt
		s.t, s.y = append(s.t, at), append(s.y, 50+10*(1-math.Exp(-at/tau)))
		s.r, s.u = append(s.r, 60), append(s.u, 4)
	}
	s.r0 = 50
	f := noFigures()
	f.add(s, yardstick{band: 0.02})
	if want := tau * math.Log(50); math.Abs(f.settling-want) > 1e-4 {
		t.Errorf("settling %g, want %g", f.settling, want)
	}
	if math.Abs(f.iae-10*tau) > 1e-3 {
		t.Errorf("IAE %g, want %g", f.iae, 10*tau)
	}
	if f.overshoot != 0 || f.travel != 0 || f.peakInput != 4 {
		t.Errorf("overshoot %g, travel %g, peak input %g; want 0, 0, 4", f.overshoot, f.travel, f.peakInput)
	}
}

// Moves, loads, ramps and a temperature that does not settle.
func TestMeasureMoves(t *testing.T) {
	const n = 2000 // 0.1 s
	record := func(setpoint, temperature func(t float64) float64) signal {
		s := signal{r0: setpoint(0)}
		for i := range n {
			at := float64(i) * 0.1
			s.t, s.u = append(s.t, at), append(s.u, 1)
			s.r, s.y = append(s.r, setpoint(at)), append(s.y, temperature(at))
		}
		return s
	}
	step := func(at, from, size float64) func(float64) float64 {
		return func(t float64) float64 {
			if t < at {
				return from
			}
			return from + size
		}
	}
	follow := func(at, from, size, tau float64) func(float64) float64 {
		return func(t float64) float64 { return from + size*(1-math.Exp(-max(0, t-at)/tau)) }
	}
	m := yardstick{band: 0.02, response: 2}
	for _, c := range []struct {
		name      string
		s         signal
		settling  float64
		deviation float64
		moves     int
	}{
		{"a step down at 20 s", record(step(20, 80, -10), follow(20, 80, -10, 2)), 2 * math.Log(50), 10 * math.Exp(-(2*math.Log(50)+10)/2), 1},
		{"no move", record(step(0, 80, 0), follow(0, 80, 0, 1)), math.NaN(), 0, 0},
		{"a load of 3 K long after settling", record(step(20, 80, 10), func(t float64) float64 {
			y := follow(20, 80, 10, 2)(t)
			if t >= 100 {
				y -= 3 * math.Exp(-(t-100)/2)
			}
			return y
		}), 2 * math.Log(50), 3, 1},
		{"a load of 3 K soon after settling", record(step(20, 80, 10), func(t float64) float64 {
			y := follow(20, 80, 10, 2)(t)
			if t >= 33 {
				y -= 3 * math.Exp(-(t-33)/2)
			}
			return y
		}), 2 * math.Log(50), 3 + 10*math.Exp(-13./2), 1},
		{"never inside the band", record(step(20, 80, 10), follow(20, 80, 9, 2)), math.Inf(1), 0, 1},
		{"a ramp is one move", record(func(t float64) float64 { return 80 + min(10, max(0, t-20)) }, follow(20, 80, 10, 2)), 2*math.Log(50) - 0.1, 10 * math.Exp(-(2*math.Log(50)+10)/2), 1},
	} {
		f := noFigures()
		f.add(c.s, m)
		if !(math.Abs(f.settling-c.settling) < 0.02 || f.settling == c.settling || math.IsNaN(f.settling) && math.IsNaN(c.settling)) || f.moves != c.moves {
			t.Errorf("%s: settling %g over %d moves, want %g over %d", c.name, f.settling, f.moves, c.settling, c.moves)
		}
		if math.Abs(f.deviation-c.deviation) > 0.01 {
			t.Errorf("%s: largest deviation %g, want %g", c.name, f.deviation, c.deviation)
		}
	}
}

// A segment that a hole in the log starts far from its setpoint is not judged
// on its way back, nor is that way a deviation.
func TestResumedSegment(t *testing.T) {
	s := signal{r0: 50, midway: true}
	for i := range 1000 {
		at := float64(i) * 0.1
		s.t, s.u, s.r = append(s.t, at), append(s.u, 1), append(s.r, 60)
		s.y = append(s.y, 60-10*math.Exp(-at/3))
	}
	f := noFigures()
	f.add(s, yardstick{band: 0.02, response: 3})
	if f.moves != 0 || !math.IsNaN(f.settling) || f.deviation > 0.2 {
		t.Errorf("%d moves, settling %g, deviation %g; want none, none and nearly nothing", f.moves, f.settling, f.deviation)
	}
}

// Settling of a noisy record is told no later than, and within a third of,
// that of the record without noise, in nearly all of 200 records; overshoot
// of a rise that has none stays at none.
func TestNoiseIsNotTakenForTheLoop(t *testing.T) {
	late, tooEarly, invented := 0, 0, 0
	m := yardstick{band: 0.02, noise: 0.05, apart: 0.1, response: 3}
	for seed := range uint64(200) {
		rng := rand.New(rand.NewPCG(seed, 1))
		s := signal{r0: 50}
		for i := range 600 {
			at := float64(i) * 0.1
			s.t, s.u = append(s.t, at), append(s.u, 1)
			s.r, s.y = append(s.r, 60), append(s.y, 60-10*math.Exp(-at/3)+0.05*rng.NormFloat64())
		}
		f := noFigures()
		f.add(s, m)
		clean := 3 * math.Log(50)
		if f.settling > clean {
			late++
		}
		if f.settling < clean*2/3 {
			tooEarly++
		}
		if f.overshoot > 0 {
			invented++
		}
	}
	t.Logf("late %d, too early %d, overshoot invented %d of 200", late, tooEarly, invented)
	if late > 20 || tooEarly > 10 || invented > 20 { // 5% each by design
		t.Errorf("late %d, too early %d, overshoot invented %d of 200 records", late, tooEarly, invented)
	}
}

// Two quantiles at whole positions (n+1)·p hold a further value drawn alike
// with the stated probability: 79 values, the second from either end.
func TestQuantileHoldsTheNextValue(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 2))
	const trials = 20000
	inside := 0
	values := make([]float64, 79)
	for range trials {
		for i := range values {
			values[i] = rng.NormFloat64()
		}
		s := spreadOf(values, 0.95)
		if x := rng.NormFloat64(); x >= s.low && x <= s.high {
			inside++
		}
	}
	if p := float64(inside) / trials; math.Abs(p-0.95) > 0.006 { // 4 binomial sd
		t.Errorf("the 95%% band of 79 values held the next in %.2f%%", 100*p)
	}
}
