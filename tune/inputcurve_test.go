package tune

import (
	"context"
	"math"
	"regexp"
	"strings"
	"testing"

	"lagwright/fit"
	"lagwright/ident"
)

func TestInputCurve(t *testing.T) {
	const at = 6.0
	k, line := curveAt(ident.Power, at), curveAt(ident.Linear, at)
	for _, u := range []float64{-6, -5.9, -2, -1e-9, 0, 0.3, 4, 100} {
		near(t, "heat", k.heat(u), ((at+u)*(at+u)-at*at)/(2*at), 1e-12)
		near(t, "input of heat", k.input(k.heat(u)), u, 1e-7)
		for _, b := range []float64{0.01, 1, 30} {
			near(t, "balance", k.balance(u+b*k.heat(u), b), u, 1e-7)
		}
		if line.heat(u) != u || line.input(u) != u || line.balance(u, 3) != u/4 {
			t.Errorf("the straight line bends at %g", u)
		}
	}
	// what no input cools is out of reach by what lacks
	near(t, "input of too little heat", k.input(-3-0.5), -6.5, 1e-12)
	near(t, "asked of P", k.balance(-10, 1), -10+3, 1e-12)
}

// squareHeater is a heater driven by u², in Euler steps far shorter than
// anything in it, under a scanning PI that is written out once more.
type squareHeater struct {
	gain, dead float64 // K/V², s
	lags       []float64
}

func (h squareHeater) step(c law, limits Limits, scan, from, size, band float64) (settling, overshoot float64) {
	const dt = 0.01
	delay := make([]float64, int(math.Round(h.dead/dt))+1)
	x := make([]float64, len(h.lags))
	last, integral, u, every := 0.0, 0.0, from, int(math.Round(scan/dt))
	for k := 0; float64(k)*dt < 1200; k++ {
		y := x[len(x)-1]
		if k%every == 0 {
			e := size - y
			if k > 0 {
				integral += c.kc / c.ti * scan * (e + last) / 2
			} else {
				integral = c.kc / c.ti * scan * e / 2 // as if the setpoint had moved before the scan
			}
			last = e
			u = from + c.kc*e + integral
			if u > *limits.Max || u < *limits.Min {
				panic("the limits are not for this test")
			}
		}
		delay[k%len(delay)] = h.gain * (u*u - from*from)
		in := delay[(k+1)%len(delay)]
		for i, tau := range h.lags {
			x[i] += dt / tau * (in - x[i])
			in = x[i]
		}
		part := x[len(x)-1] / size
		overshoot = max(overshoot, part-1)
		if math.Abs(part-1) > band {
			settling = float64(k+1) * dt
		}
	}
	return settling, overshoot
}

// The step that is judged under the power law is that of the heater driven by
// u², up and down; on the straight line it would be off by far more.
func TestStepThroughTheCurve(t *testing.T) {
	const at, scan = 6.0, 1.0
	limits := Limits{Min: ptr(0), Max: ptr(20)}
	for _, tc := range []struct {
		h    squareHeater
		c    law
		size float64
	}{
		{squareHeater{1.4, 5, []float64{35, 10}}, law{kc: 0.0928, ti: 38, b: 1}, 5},
		{squareHeater{1.4, 5, []float64{35, 10}}, law{kc: 0.0928, ti: 38, b: 1}, -5},
		{squareHeater{0.8, 2, []float64{20, 4, 3}}, law{kc: 0.1, ti: 22, b: 1}, 20},
		{squareHeater{0.8, 2, []float64{20, 4, 3}}, law{kc: 0.1, ti: 22, b: 1}, -15},
	} {
		p := ident.Plant{Structure: structureOf(t, len(tc.h.lags)), Gain: tc.h.gain * 2 * at, Lags: tc.h.lags, DeadTime: tc.h.dead}
		q := Requirement{Overshoot: ptr(10), InputMin: limits.Min, InputMax: limits.Max, SetpointStep: ptr(tc.size), Scan: scan}
		task := newTask(q, at, 70)
		straight := task.metrics(newScenario(p, &task, 0), tc.c, at)
		task.on(ident.Power, at)
		got := task.metrics(newScenario(p, &task, 0), tc.c, at)
		settling, overshoot := tc.h.step(tc.c, limits, scan, at, tc.size, 0.02)
		near(t, "settling", *got.Settling, settling, 0.01*settling)
		near(t, "overshoot", *got.Overshoot, 100*overshoot, 0.1)
		if math.Abs(*straight.Overshoot-100*overshoot) < 0.3 && math.Abs(*straight.Settling-settling) < 0.1*settling {
			t.Errorf("step %g: the straight line does alike: this shows nothing", tc.size)
		}
		if end := math.Sqrt(at*at+tc.size/tc.h.gain) - at; math.Abs(task.curve.input(tc.size/p.Gain)-end) > 1e-9 {
			t.Errorf("comes to rest at %g, want %g", task.curve.input(tc.size/p.Gain), end)
		}
	}
}

func structureOf(t *testing.T, lags int) ident.Structure {
	t.Helper()
	s, err := ident.ParseStructure(map[int]string{2: "chain2", 3: "chain3"}[lags])
	if err != nil {
		t.Fatal(err)
	}
	return s
}

// squareCase is a card under the power law and a requirement with a step that
// is so many times what one volt more gives at the operating input.
func squareCase(t *testing.T, seed uint64, part float64) (*fit.Card, Requirement) {
	t.Helper()
	c := cardOf(t, seed, 24, 0.04)
	c.InputLaw = "power"
	p, err := c.Plant()
	if err != nil {
		t.Fatal(err)
	}
	sum := p.DeadTime
	for _, tau := range p.Elements() {
		sum += tau
	}
	return c, Requirement{Settling: ptr(4 * sum), Overshoot: ptr(15), SetpointStep: ptr(part * 12 * p.Gain), InputMin: ptr(0), InputMax: ptr(12), Scan: 1}
}

// What is promised of a card under the power law holds on heaters driven by
// u²: the settling and overshoot from the operating input, and the steps that
// start anywhere in the range said, up and down, on the best fit as well as on
// the wanted share of plausible plants.
func TestPowerLawPromise(t *testing.T) {
	said := 0
	for seed, part := range map[uint64]float64{1: 1.4, 4: 0.3, 7: 0.8} {
		c, q := squareCase(t, seed, part)
		g, err := Tune(context.Background(), []*fit.Card{c}, q, Options{Controller: "pi", Workers: 2})
		if err != nil {
			t.Fatal(err)
		}
		if !g.Meets {
			t.Fatalf("seed %d: not met: %v", seed, g.Reasons)
		}
		law, err := g.law()
		if err != nil {
			t.Fatal(err)
		}
		plants, err := c.PlausiblePlants()
		if err != nil {
			t.Fatal(err)
		}
		kept := func(from, step float64) float64 {
			met := 0
			for _, p := range plants {
				settling, overshoot := squareHeater{p.Gain, p.DeadTime, p.Elements()}.step(law, Limits{Min: ptr(0), Max: ptr(12)}, 1, from, step, 0.02)
				met += count(settling <= 1.005**q.Settling && 100*overshoot <= *q.Overshoot+0.2)
			}
			return float64(met) / float64(len(plants))
		}
		least := 0.95 - 2*samplingError(0.95, len(plants))
		if share := kept(*g.OperatingInput, *q.SetpointStep); share < least {
			t.Errorf("seed %d: from the operating input it holds on %.0f %% of the heaters", seed, 100*share)
		}
		if g.HoldsOver == nil {
			continue
		}
		said++
		for _, from := range g.HoldsOver {
			for _, step := range []float64{*q.SetpointStep, -*q.SetpointStep} {
				if share := kept(from, step); share < least {
					t.Errorf("seed %d: a step of %.3g K from %.3g V holds on %.0f %% of the heaters, said to hold over %v", seed, step, from, 100*share, *g.HoldsOver)
				}
			}
		}
	}
	if said == 0 {
		t.Error("no range was ever said: this shows nothing")
	}
}

// Where steps one way hold and steps the other way do not, it is said, and no
// range is given as holding.
func TestRangeOfOneDirection(t *testing.T) {
	c, q := squareCase(t, 7, 3.5)
	g, err := Tune(context.Background(), []*fit.Card{c}, q, Options{Controller: "pi", Workers: 2})
	if err != nil {
		t.Fatal(err)
	}
	if !g.Meets {
		t.Fatalf("not met: %v", g.Reasons)
	}
	words := g.Cautions[0]
	up := regexp.MustCompile(`setpoint steps of [0-9.]+ K up hold the requirement where the heater rests at an input .* before the step; steps down do not`)
	if g.HoldsOver != nil || !up.MatchString(words) {
		t.Errorf("holds over %v, said: %s", g.HoldsOver, words)
	}
}

// The log's range of the input is not left without a word, limit or no limit.
func TestStepBeyondTheLogIsSaid(t *testing.T) {
	for _, c := range []struct {
		q     Requirement
		words string
	}{
		{Requirement{SetpointStep: ptr(20), InputMax: ptr(20)}, "What the heater does beyond is not known"},
		{Requirement{SetpointStep: ptr(-20), InputMin: ptr(-20)}, "What the heater does beyond is not known"},
		{Requirement{SetpointStep: ptr(0.5), InputMax: ptr(20)}, ""},
	} {
		g, err := Tune(context.Background(), []*fit.Card{card(t, 3, 0.04)}, c.q, Options{Controller: "pi", Workers: 2})
		if err != nil {
			t.Fatal(err)
		}
		text := strings.Join(g.Cautions, "\n")
		if said := strings.Contains(text, "the log has it from"); said != (c.words != "") || !strings.Contains(text, c.words) {
			t.Errorf("step %g: cautions\n%s", *c.q.SetpointStep, text)
		}
	}
}
