package tune

import (
	"math"

	"lagwright/ident"
)

// Evaluate returns the metrics of the gains on a plant for a requirement,
// judged about an operating input and temperature (see Requirement): the
// figures of Analyse, a setpoint step and a unit load step. An unstable loop
// has nothing but Stable false.
func Evaluate(p ident.Plant, g *Gains, q Requirement, input, temperature float64) (*Metrics, error) {
	c, err := g.law()
	if err != nil {
		return nil, err
	}
	q.Scan = g.Scan
	t := newTask(q, input, temperature)
	return t.metrics(newScenario(p, &t, 0), c, input), nil
}

// metrics evaluates one scenario with the full sweep.
func (t *task) metrics(s *scenario, c law, input float64) *Metrics {
	l := newOpenLoop(s.p, c, s.scan)
	f := analyse(s.p, c, s.scan)
	if !f.Stable {
		return &Metrics{}
	}
	m := &Metrics{Stable: true, Ms: finite(f.Ms), GainMargin: finite(f.GainMargin), PhaseMargin: finite(f.PhaseMargin), DelayMargin: finite(f.DelayMargin)}
	if s.sampled != nil {
		cross := s.phaseCross(&l)
		m.Damping = finite(dampingBelow(1, 14, math.Inf(1), 0, func(zeta float64) bool { return s.damped(c, &l, zeta, cross) }))
	} else if poles := l.poles(); poles != nil {
		m.Damping = finite(dominantDamping(poles, f.PhaseCross))
	}
	q := quickFigures{stable: true, crossover: f.Crossover}
	step, err := t.setpoint(s, c, &l, q, reportStep, math.Inf(1))
	if err != nil {
		return m
	}
	m.setpoint(step, input, s.p.Gain*t.step > 0)
	if load, err := t.load(s, c, q, reportStep); err == nil && c.integral() {
		m.IAE = finite(load.iae)
	}
	return m
}

func (m *Metrics) setpoint(f stepFigures, input float64, upward bool) {
	m.Settling, m.Overshoot = finite(f.settling), finite(100*f.overshoot)
	peak := f.inputLow
	if upward {
		peak = f.inputHigh
	}
	m.PeakInput, m.SteadyOffset = finite(input+peak), finite(f.offset)
}

// finite is a pointer to x, nil where x is not a number to be written down.
func finite(x float64) *float64 {
	if !isFinite(x) {
		return nil
	}
	return &x
}

// worst gathers the share quantile of every figure over the scenarios of each
// card, each figure for itself: the high side of what should be small, the low
// side of what should be large; of several cards the worst. inputs are the
// operating inputs by card.
func (e *ensemble) worst(c law, out []outcome, share float64, inputs []float64) *Metrics {
	high := func(f func(i int) float64) *float64 {
		v, _ := e.quantile(onStable(out, f), share)
		return finite(v)
	}
	low := func(f func(i int) float64) *float64 {
		if q := high(func(i int) float64 { return -f(i) }); q != nil {
			return finite(-*q)
		}
		return nil
	}
	iae := e.loadAreas(c, out)
	m := &Metrics{Stable: e.mostly(func(i int) bool { return out[i].stable }, share)}
	m.Ms = high(func(i int) float64 { return out[i].quick.ms })
	m.GainMargin = low(func(i int) float64 { return out[i].quick.gainMargin })
	m.PhaseMargin = low(func(i int) float64 { return out[i].quick.phaseMargin })
	m.DelayMargin = low(func(i int) float64 { return out[i].quick.delayMargin })
	m.Settling = high(func(i int) float64 { return out[i].step.settling })
	m.Overshoot = high(func(i int) float64 { return 100 * out[i].step.overshoot })
	m.SteadyOffset = high(func(i int) float64 { return math.Abs(out[i].step.offset) })
	m.IAE = high(func(i int) float64 { return iae[i] })
	if s := e.scenarios[0]; s.p.Gain*s.task.step > 0 {
		m.PeakInput = high(func(i int) float64 { return inputs[e.scenarios[i].card] + out[i].step.inputHigh })
	} else {
		m.PeakInput = low(func(i int) float64 { return inputs[e.scenarios[i].card] + out[i].step.inputLow })
	}
	return m
}

// onStable is a figure that does not exist, NaN, on plants whose loop is not
// stable.
func onStable(out []outcome, f func(i int) float64) func(i int) float64 {
	return func(i int) float64 {
		if !out[i].stable {
			return math.NaN()
		}
		return f(i)
	}
}

// loadAreas returns the load IAE on every scenario, NaN where there is none.
func (e *ensemble) loadAreas(c law, out []outcome) []float64 {
	iae := make([]float64, len(out))
	e.each(func(i int, s *scenario) {
		iae[i] = math.NaN()
		if out[i].stable && c.integral() {
			if f, err := s.task.load(s, c, out[i].quick, searchStep); err == nil {
				iae[i] = f.iae
			}
		}
	})
	return iae
}

// mostly tells whether a share of the scenarios of every card has a property.
func (e *ensemble) mostly(has func(i int) bool, share float64) bool {
	_, least := e.leastShare(has)
	return least >= share-1e-9
}
