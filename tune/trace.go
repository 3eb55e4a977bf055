package tune

import (
	"errors"

	"lagwright/ident"
)

// StepTrace is a simulated run for a figure; the slices share one length. The
// step is at T = 0.
type StepTrace struct {
	T           []float64 // s
	Setpoint    []float64 // temperature units
	Temperature []float64
	Input       []float64
}

// ErrUnstable says that a loop was not simulated because it is not stable.
var ErrUnstable = errors.New("the loop is not stable")

// tracePoints is about the length of a trace.
const tracePoints = 1500

// SetpointTrace returns the setpoint step that Evaluate judges, from an
// operating input and temperature on. The step is q.SetpointStep, or 1.
func SetpointTrace(p ident.Plant, g *Gains, q Requirement, input, temperature float64) (*StepTrace, error) {
	step := 1.0
	if q.SetpointStep != nil {
		step = *q.SetpointStep
	}
	return trace(p, g, q, input, temperature, step, 0)
}

// LoadTrace returns the response to a step of load, in input units, at the
// plant's input.
func LoadTrace(p ident.Plant, g *Gains, q Requirement, input, temperature, load float64) (*StepTrace, error) {
	return trace(p, g, q, input, temperature, 0, load)
}

func trace(p ident.Plant, g *Gains, q Requirement, input, temperature, r, d float64) (*StepTrace, error) {
	c, err := g.law()
	if err != nil {
		return nil, err
	}
	l := newOpenLoop(p, c, g.Scan)
	f := l.figures()
	if !f.Stable {
		return nil, ErrUnstable
	}
	plan := l.planAt(f.Crossover, reportStep)
	sim, err := newLoopSim(p, g.Scan, plan.step)
	if err != nil {
		return nil, err
	}
	sim.under(c, newTask(q, input, temperature).limits)
	target, end := steadyState(p, c, r, d)
	w := newWatch(p, r, target, end, plan)
	w.rest = 2e-3
	var all []sample
	sim.run(r, d, func(s sample) bool {
		all = append(all, s)
		return w.see(s)
	})
	stride := len(all)/tracePoints + 1
	t := &StepTrace{}
	for i, s := range all {
		if i%stride != 0 && i != len(all)-1 {
			continue
		}
		t.T = append(t.T, s.t)
		t.Setpoint = append(t.Setpoint, temperature+r)
		t.Temperature = append(t.Temperature, temperature+s.y)
		t.Input = append(t.Input, input+s.u)
	}
	return t, nil
}
