package validate

import (
	"math"
	"math/rand/v2"
	"testing"

	"lagwright/data"
	"lagwright/fit"
	"lagwright/ident"
	"lagwright/tune"
)

func ptr(x float64) *float64 { return &x }

func mustPlant(t testing.TB, structure string, gain float64, lags []float64, dead float64) ident.Plant {
	t.Helper()
	st, err := ident.ParseStructure(structure)
	if err != nil {
		t.Fatal(err)
	}
	p, err := ident.NewPlant(st, gain, lags, dead)
	if err != nil {
		t.Fatal(err)
	}
	return p
}

// cardOf makes a card of a best-fit plant and plausible plants.
func cardOf(t testing.TB, law string, noise fit.Noise, best ident.Plant, plausible ...ident.Plant) *fit.Card {
	t.Helper()
	if len(plausible) == 0 {
		plausible = []ident.Plant{best}
	}
	names := []string{"gain"}
	for i := range best.Lags {
		names = append(names, []string{"lag1", "lag2", "lag3", "lag4"}[i])
	}
	names = append(names, "dead_time")
	row := func(p ident.Plant) []float64 {
		return append(append([]float64{p.Gain}, p.Lags...), p.DeadTime)
	}
	var parameters []fit.Parameter
	for i, v := range row(best) {
		parameters = append(parameters, fit.Parameter{Name: names[i], Unit: "s", Value: v})
	}
	c := &fit.Card{
		Schema: fit.CardSchema, Units: fit.CardUnits{Time: "s", Input: "V", Temperature: "degC"},
		InputLaw: law, Confidence: 0.95, Selected: best.Structure.String(),
		Range:  fit.CardRange{Input: [2]float64{0, 10}, Temperature: [2]float64{0, 200}},
		Models: []fit.Model{{Structure: best.Structure.String(), Parameters: parameters, Noise: noise}},
		Plants: fit.Plants{Structure: best.Structure.String(), Parameters: names},
	}
	for _, p := range plausible {
		c.Plants.Values = append(c.Plants.Values, row(p))
	}
	return c
}

func piGains(kc, ti, scan float64) *tune.Gains {
	return &tune.Gains{
		Schema: tune.GainsSchema, Controller: "pi", Form: "ideal", Kc: kc, Ti: &ti, SetpointWeight: 1,
		Action: "reverse", Scan: scan, Units: tune.GainUnits{Input: "V", Temperature: "degC"},
		Limits: tune.Limits{Min: ptr(0), Max: ptr(10)},
	}
}

// noisy returns n values of first-order correlated noise plus white noise.
func noisy(rng *rand.Rand, n int, dt float64, noise fit.Noise) []float64 {
	out := make([]float64, n)
	slow := math.Sqrt(max(0, noise.SD*noise.SD-noise.WhiteSD*noise.WhiteSD))
	rho := 0.0
	if noise.CorrelationTime > 0 {
		rho = math.Exp(-dt / noise.CorrelationTime)
	}
	x := slow * rng.NormFloat64()
	for i := range out {
		out[i] = x + noise.WhiteSD*rng.NormFloat64()
		x = rho*x + math.Sqrt(1-rho*rho)*slow*rng.NormFloat64()
	}
	return out
}

// loggedLoop is a log of plant p under the gains, one row a scan: the
// temperature is 20 + gain·response + disturbance, found for each row anew by
// ident's simulator from all inputs before it. That shares nothing with the
// stepper that the replay uses.
func loggedLoop(t testing.TB, p ident.Plant, law ident.Law, g *tune.Gains, setpoint, disturbance []float64, u0 float64) *data.Run {
	t.Helper()
	n := len(setpoint)
	run := &data.Run{
		Source: data.Source{File: "loop.csv", Rows: n, SHA256: "00"},
		Units:  data.Units{Time: "s", Input: "V", Temperature: "degC"},
		T:      make([]float64, n), U: make([]float64, n), Y: make([]float64, n), Setpoint: setpoint,
	}
	control, err := tune.NewController(g, g.Scan)
	if err != nil {
		t.Fatal(err)
	}
	run.Quality.MedianInterval = g.Scan
	base := disturbance[0] + setpoint[0] - disturbance[0]
	for i := range n {
		run.T[i] = float64(i) * g.Scan
		rise := 0.0
		if i > 0 {
			in := ident.HeldInput(run.T[:i], run.U[:i], law)
			rise = p.Gain * ident.NewSimulator(run.T[i:i+1], in).Response(nil, p.Structure, p.Lags, p.DeadTime)[0]
		}
		run.Y[i] = base + rise + disturbance[i]
		if i == 0 {
			control.Start(setpoint[0], run.Y[0], u0)
			run.U[0] = u0
		} else {
			run.U[i] = control.Next(setpoint[i], run.Y[i])
		}
	}
	return run
}

// steps returns a setpoint that changes by the sizes at the rows.
func stepsAt(n int, start float64, changes map[int]float64) []float64 {
	out := make([]float64, n)
	for i := range out {
		start += changes[i]
		out[i] = start
	}
	return out
}
