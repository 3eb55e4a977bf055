package tune

import (
	"context"
	"math"
	"math/cmplx"
	"math/rand/v2"
	"os"
	"testing"

	"lagwright/data"
	"lagwright/fit"
	"lagwright/ident"
)

// A modal heater is outside every structure that is fitted: a sum of
// first-order modes behind a dead time and one more lag,
//
//	G(s) = gain·e^(−dead·s)/(lag·s + 1)·Σ share/(tau·s + 1).
type modalHeater struct {
	gain, dead, lag float64
	share, tau      []float64
	c               law // in the loop with it
}

// wallHeater is fast air beside a slow wall that takes 10 to 35 % of the heat,
// which makes a zero between the two lags.
func wallHeater(r *rand.Rand, sum float64) modalHeater {
	slow := 0.1 + 0.25*r.Float64()
	return modalHeater{share: []float64{1 - slow, slow}, tau: []float64{sum, sum * (4 + 8*r.Float64())}}
}

// ductHeater is a duct that heats up along its length,
// 1/cosh(√(s·T)) = Σ (−1)^k·4/(π·n)/(1 + s·4T/(π·n)²), n = 2k+1 (partial
// fractions, worked out by hand), the sum cut off after 12 modes.
func ductHeater(_ *rand.Rand, sum float64) modalHeater {
	var h modalHeater
	total := 0.0
	for k := range 12 {
		n := float64(2*k + 1)
		h.share = append(h.share, math.Pow(-1, float64(k))*4/(math.Pi*n))
		h.tau = append(h.tau, 8*sum/(math.Pi*math.Pi*n*n))
		total += h.share[k]
	}
	for k := range h.share {
		h.share[k] /= total
	}
	return h
}

func (h *modalHeater) at(s complex128) complex128 {
	var g complex128
	for i := range h.share {
		g += complex(h.share[i], 0) / (1 + s*complex(h.tau[i], 0))
	}
	g *= complex(h.gain, 0) * cmplx.Exp(-s*complex(h.dead, 0)) / (1 + s*complex(h.lag, 0))
	return g * complex(h.c.kc, 0) * (1 + 1/(s*complex(h.c.ti, 0)))
}

// parts are plants in parallel that make the heater.
func (h *modalHeater) parts(t *testing.T) []ident.Plant {
	var out []ident.Plant
	for i := range h.share {
		out = append(out, plant(t, "chain2", h.gain*h.share[i], []float64{h.tau[i], h.lag}, h.dead))
	}
	return out
}

// bump invents the log of a bump test, noise as in inventHeater.
func (h *modalHeater) bump(t *testing.T, r *rand.Rand, hold float64) *data.Run {
	rows := 300 + r.IntN(900)
	run := &data.Run{Source: data.Source{File: "modal.csv"}, Units: data.Units{Time: "s", Input: "V", Temperature: "degC"}}
	for k := range rows {
		run.T = append(run.T, hold*float64(k)/float64(rows))
		u := 4.0
		if k >= rows/8 {
			u = 5.5
		}
		run.U = append(run.U, u)
	}
	sd, rho := h.gain*1.5*0.005*math.Exp(r.Float64()*math.Log(20)), 0.95*r.Float64()
	run.Y = make([]float64, rows)
	for _, p := range h.parts(t) {
		y := ident.NewSimulator(run.T, ident.HeldInput(run.T, run.U, ident.Linear)).Response(nil, p.Structure, p.Lags, p.DeadTime)
		for k := range y {
			run.Y[k] += p.Gain * y[k]
		}
	}
	noise := r.NormFloat64()
	for k := range run.Y {
		noise = rho*noise + math.Sqrt(1-rho*rho)*r.NormFloat64()
		run.Y[k] += 60 + sd*noise
	}
	return run
}

// under returns Ms and overshoot of a PI controller on the heater, both +Inf
// where the loop is not stable.
func (h *modalHeater) under(t *testing.T, c law, reach float64) (ms, overshoot float64) {
	h.c = c
	w := startWinding(h, 1e-4/reach, math.Pi/2)
	for x := 1e-4 / reach; x < 300/h.dead; x = min(x*1.02, x+0.1/h.dead) {
		value := 1 + h.at(complex(0, x))
		w.by(complex(0, x), value)
		ms = max(ms, 1/cmplx.Abs(value))
	}
	if math.Round(w.angle/math.Pi) != 0 {
		return math.Inf(1), math.Inf(1)
	}
	step := reach / 500
	var parts []*PlantStepper
	for _, p := range h.parts(t) {
		s, err := NewPlantStepper(p, step)
		if err != nil {
			t.Fatal(err)
		}
		parts = append(parts, s)
	}
	k := newController(c, step)
	k.Start(0, 0, 0)
	y := 0.0
	for range 30_000 {
		u := k.Next(1, y)
		y = 0
		for _, s := range parts {
			y += s.Step(u)
		}
		overshoot = max(overshoot, 100*(y-1))
	}
	return ms, overshoot
}

// TestOtherHeaters puts gains on heaters outside every structure that is
// fitted, with LAGWRIGHT_LONG=1: the share that meets is less than the 95 %
// asked, because no plausible plant is like the heater, but not by much.
func TestOtherHeaters(t *testing.T) {
	if os.Getenv("LAGWRIGHT_LONG") == "" {
		t.Skip("LAGWRIGHT_LONG is not set")
	}
	const heaters, least = 80, 0.85
	for name, invent := range map[string]func(*rand.Rand, float64) modalHeater{"wall": wallHeater, "duct": ductHeater} {
		t.Run(name, func(t *testing.T) {
			met, msHeld, overHeld := 0, 0, 0
			for i := range heaters {
				r := rand.New(rand.NewPCG(uint64(i), 777))
				sum := 2 * math.Exp(r.Float64()*math.Log(100))
				h := invent(r, sum)
				h.gain, h.dead, h.lag = 2+18*r.Float64(), sum*math.Exp(math.Log(0.04)+r.Float64()*math.Log(10)), sum*(0.02+0.15*r.Float64())
				reach, slow := sum+h.dead+h.lag, 0.0
				for _, tau := range h.tau {
					slow = max(slow, tau)
				}
				card, err := fit.Fit(context.Background(), []*data.Run{h.bump(t, r, max(7*reach, 4*slow))}, fit.Options{Workers: 1})
				if err != nil {
					t.Fatal(err)
				}
				ms, over := []float64{1.4, 1.6, 1.8}[i%3], []float64{5, 10, 20}[i/3%3]
				row := designed(t, card, Requirement{Ms: &ms, Overshoot: &over}, Options{Controller: "pi"})
				gotMs, gotOver := h.under(t, row.law, reach)
				// 0.5 % of Ms and 0.3 % of the step are the accuracy of this check
				okMs, okOver := gotMs <= ms*1.005, gotOver <= over+0.3
				msHeld, overHeld, met = msHeld+count(okMs), overHeld+count(okOver), met+count(okMs && okOver)
			}
			t.Logf("%d heaters: %.1f %% meet (Ms %d, overshoot %d)", heaters, 100*float64(met)/heaters, msHeld, overHeld)
			if float64(met) < least*heaters {
				t.Errorf("%d of %d meet", met, heaters)
			}
		})
	}
}

func count(b bool) int {
	if b {
		return 1
	}
	return 0
}

// designed is the row that Tune would recommend.
func designed(t *testing.T, card *fit.Card, q Requirement, o Options) row {
	t.Helper()
	o.Workers = 1
	tu, err := newTuning([]*fit.Card{card}, q, o)
	if err != nil {
		t.Fatal(err)
	}
	rows, err := tu.designRows(context.Background())
	if err != nil {
		t.Fatal(err)
	}
	return rows[tu.choose(rows)]
}

// TestOtherRequirements is the field trial with other requirements, controllers
// and scan times, with LAGWRIGHT_LONG=1: where gains are found, the share of
// true heaters on which they hold is the assurance.
func TestOtherRequirements(t *testing.T) {
	if os.Getenv("LAGWRIGHT_LONG") == "" {
		t.Skip("LAGWRIGHT_LONG is not set")
	}
	const heaters = 100
	type asked func(h trialHeater, reach float64, i int) Requirement
	usual := func(h trialHeater) Requirement { return Requirement{Ms: &h.ms, Overshoot: &h.over} }
	cases := []struct {
		name string
		o    Options
		q    asked
	}{
		{"Ms", Options{Controller: "pi"}, func(h trialHeater, _ float64, _ int) Requirement { return Requirement{Ms: &h.ms} }},
		{"overshoot", Options{Controller: "pi"}, func(h trialHeater, _ float64, _ int) Requirement { return Requirement{Overshoot: &h.over} }},
		{"settling", Options{Controller: "pi"}, func(_ trialHeater, reach float64, i int) Requirement {
			return Requirement{Settling: ptr(reach * []float64{3, 4, 6}[i%3])}
		}},
		{"settling and overshoot", Options{Controller: "pi"}, func(h trialHeater, reach float64, i int) Requirement {
			return Requirement{Settling: ptr(reach * []float64{3, 4, 6}[i%3]), Overshoot: &h.over}
		}},
		{"damping", Options{Controller: "pi"}, func(_ trialHeater, _ float64, i int) Requirement {
			return Requirement{Damping: ptr([]float64{0.4, 0.5, 0.7}[i%3])}
		}},
		{"pid", Options{Controller: "pid"}, func(h trialHeater, _ float64, _ int) Requirement { return usual(h) }},
		{"pid, scan of reach/30", Options{Controller: "pid"}, func(h trialHeater, reach float64, _ int) Requirement {
			q := usual(h)
			q.Scan = reach / 30
			return q
		}},
		{"scan of reach/8", Options{Controller: "pi"}, func(h trialHeater, reach float64, _ int) Requirement {
			q := usual(h)
			q.Scan = reach / 8
			return q
		}},
		{"input limits", Options{Controller: "pi"}, func(h trialHeater, reach float64, _ int) Requirement {
			q := usual(h)
			q.InputMin, q.InputMax, q.InputRate, q.SetpointStep = ptr(3), ptr(6.5), ptr(3/reach), ptr(h.plant.Gain)
			return q
		}},
		{"assurance 80 %", Options{Controller: "pi", Assurance: 0.8}, func(h trialHeater, _ float64, _ int) Requirement { return usual(h) }},
	}
	cards := make([]*fit.Card, heaters)
	for i := range cards {
		card, err := fit.Fit(context.Background(), []*data.Run{inventHeater(uint64(i)).run}, fit.Options{Workers: 1})
		if err != nil {
			t.Fatal(err)
		}
		cards[i] = card
	}
	for _, c := range cases {
		t.Run(c.name, func(t *testing.T) {
			found, met := 0, 0
			for i, card := range cards {
				h := inventHeater(uint64(i))
				reach := h.plant.DeadTime
				for _, tau := range h.plant.Elements() {
					reach += tau
				}
				q := c.q(h, reach, i)
				r := designed(t, card, q, c.o)
				if !r.designed.found {
					continue
				}
				found++
				op, err := operate(card, nil)
				if err != nil {
					t.Fatal(err)
				}
				if q, err = complete(q, op); err != nil {
					t.Fatal(err)
				}
				task := newTask(q, op.input, op.temperature)
				met += count(task.meets(newScenario(h.plant, &task, 0), r.law))
			}
			a := c.o.Assurance
			if a == 0 {
				a = usualShare
			}
			t.Logf("found for %d of %d heaters, held on %.1f %% of those", found, heaters, 100*float64(met)/float64(found))
			if p := binomialTail(found, met, a); float64(met) < a*float64(found) && p < 1e-3 {
				t.Errorf("held on %d of %d, a chance of %.2g at an assurance of %g", met, found, p, a)
			}
		})
	}
}
