package fit

import (
	"fmt"
	"math"

	"lagwright/data"
	"lagwright/ident"
)

// modelOutput computes what a plant says about one log. What enters linearly,
// baseline, drift and the state at the first row, is estimated anew for every
// plant by generalised least squares under the card's noise, so that plants
// are compared by the shape of their answer and not by an offset that the log
// would have corrected.
type modelOutput struct {
	t, y     []float64 // rows; y NaN where missing
	measured []int     // rows with a temperature
	filter   filter    // of the measured rows
	initial  initial
	sim      *ident.Simulator
	start    *ident.Simulator // unit change at the first row, for an earlier rest
	linear   [][]float64      // 1, and time when the baseline drifts
}

// newModelOutput is for the rows at t with the temperatures y, driven by in.
func newModelOutput(t, y []float64, in ident.Input, start initial, drift bool, s shape) *modelOutput {
	m := &modelOutput{t: t, y: y, initial: start, sim: ident.NewSimulator(t, in)}
	var rows []ident.Row
	for k, v := range y {
		if !math.IsNaN(v) {
			m.measured = append(m.measured, k)
			rows = append(rows, ident.Row{T: t[k], M: 1})
		}
	}
	m.filter.set(rows, s)
	one := make([]float64, len(t))
	for k := range one {
		one[k] = 1
	}
	m.linear = [][]float64{one}
	if drift {
		m.linear = append(m.linear, t)
	}
	if start == earlier {
		m.start = ident.NewSimulator(t, ident.Input{At: t[:1], Value: []float64{1}})
	}
	return m
}

// of returns the output of the plant at every row.
func (m *modelOutput) of(p ident.Plant) []float64 {
	out := m.sim.Response(nil, p.Structure, p.Lags, p.DeadTime)
	for k := range out {
		out[k] *= p.Gain
	}
	linear := m.linearOf(p)
	seen := make([][]float64, len(linear))
	for j, c := range linear {
		seen[j] = m.pick(c)
	}
	left := m.pick(m.y)
	for i, k := range m.measured {
		left[i] -= out[k]
	}
	for j, b := range new(linearMemory).solve(&m.filter, seen, left) {
		for k, v := range linear[j] {
			out[k] += b * v
		}
	}
	return out
}

// linearOf are the columns that enter linearly beside the gain, at every row.
func (m *modelOutput) linearOf(p ident.Plant) [][]float64 {
	linear := append([][]float64(nil), m.linear...)
	switch m.initial {
	case earlier:
		linear = append(linear, m.start.Response(nil, p.Structure, p.Lags, p.DeadTime))
	case free:
		states := columns(max(p.Structure.Order(), 1), len(m.t))
		m.sim.FreeStates(states, p.Structure, p.Lags, p.DeadTime)
		linear = append(linear, states...)
	}
	return linear
}

// pick returns the measured rows of a column.
func (m *modelOutput) pick(c []float64) []float64 {
	out := make([]float64, len(m.measured))
	for i, k := range m.measured {
		out[i] = c[k]
	}
	return out
}

// output prepares the card's model for a run.
func (c *Card) output(run *data.Run, t, y []float64) (*modelOutput, *Model, error) {
	m, ok := c.Model(c.Selected)
	if !ok {
		return nil, nil, fmt.Errorf("card: selected structure %q is not among its models", c.Selected)
	}
	start := rest
	if c.Initial != "" {
		var err error
		if start, err = parseInitial(c.Initial); err != nil {
			return nil, nil, fmt.Errorf("card: %w", err)
		}
	}
	in := ident.HeldInput(run.T, run.U, c.Law())
	return newModelOutput(t, y, in, start, c.Drift == "linear", m.Noise.shape(spanOf(t))), m, nil
}

// spanOf is the time from the first row to the last, s.
func spanOf(t []float64) float64 {
	if len(t) == 0 {
		return 0
	}
	return t[len(t)-1] - t[0]
}

// shape is the shape of the card's noise, for a log of the given span in s.
func (n Noise) shape(span float64) shape {
	s := whiteShape
	if n.SD <= 0 {
		return s
	}
	if n.CorrelationTime > 0 {
		w := n.WhiteSD / n.SD
		s = shape{tc: n.CorrelationTime, white: math.Min(w*w, 1)}
	}
	if span > 0 {
		s.walk = n.WanderSD * n.WanderSD / (n.SD * n.SD * span)
	}
	return s
}
