package tune

import (
	"fmt"
	"math"

	"lagwright/ident"
)

// PlantStepper moves one plant forward in equal steps, exactly for an input
// that is held over each step. A dead time that is no multiple of the step is
// split inside the step, so nothing is rounded to the grid. Everything is a
// change from rest: Step takes the change of phi(input) from the value at
// which the plant rests and returns the change of temperature.
//
// A stepper serves one goroutine.
type PlantStepper struct {
	n    int
	gain float64
	phi  []float64 // n×n, lower triangular, by rows
	old  []float64 // effect of the input held before the change inside the step
	new  []float64 // effect of the input held after it
	x    []float64
	past []float64 // inputs not yet through the dead time, a ring
	head int
}

// maxDelaySteps bounds the memory of the dead time.
const maxDelaySteps = 10_000_000

// NewPlantStepper returns a stepper at rest for steps of length step, in s.
func NewPlantStepper(p ident.Plant, step float64) (*PlantStepper, error) {
	if !(step > 0) || math.IsInf(step, 0) {
		return nil, fmt.Errorf("step %g s: give a positive time", step)
	}
	return newPlantStepper(p, step, 0)
}

// newPlantStepper shortens the dead time by early (s, at most step). Where
// that leaves less than none, the input reaches the plant within the step in
// which it is chosen; see free.
func newPlantStepper(p ident.Plant, step, early float64) (*PlantStepper, error) {
	delay := (p.DeadTime - early) / step
	if !(delay >= -1) || delay > maxDelaySteps {
		return nil, fmt.Errorf("dead time %g s is %g steps of %g s: choose a longer step", p.DeadTime, delay, step)
	}
	whole := math.Floor(delay)
	part := delay - whole
	if part > 1-1e-9 { // a whole number of steps but for rounding
		whole, part = whole+1, 0
	}
	lags := felt(p.Elements(), step)
	integrating := p.Structure.Integrating()
	all := newTransition(lags, integrating, step)
	rest := newTransition(lags, integrating, (1-part)*step)
	first := newTransition(lags, integrating, part*step)
	s := &PlantStepper{
		n:    all.n,
		gain: p.Gain,
		phi:  all.phi,
		old:  rest.apply(first.gamma),
		new:  rest.gamma,
		x:    make([]float64, all.n),
		past: make([]float64, int(whole)+2),
	}
	return s, nil
}

// felt leaves out the lags that pass their input through within a ten
// millionth of the step; what is left is never empty, so that the plant has a
// state.
func felt(lags []float64, step float64) []float64 {
	kept := make([]float64, 0, len(lags))
	for _, tau := range lags {
		if tau > 1e-7*step {
			kept = append(kept, tau)
		}
	}
	if len(kept) == 0 {
		kept = append(kept, 1e-13*step)
	}
	return kept
}

// Reset brings the plant back to rest.
func (s *PlantStepper) Reset() {
	clear(s.x)
	clear(s.past)
	s.head = 0
}

// Output is the temperature now, as a change from rest.
func (s *PlantStepper) Output() float64 { return s.gain * s.x[s.n-1] }

// Step holds u over one step and returns the temperature at its end.
func (s *PlantStepper) Step(u float64) float64 {
	size := len(s.past)
	s.past[s.head] = u
	older := s.head + 1
	if older >= size {
		older -= size
	}
	newer := older + 1
	if newer >= size {
		newer -= size
	}
	s.head = older
	return s.move(s.past[older], s.past[newer])
}

// move advances the state by one step in which the delayed input is a before
// and b after the change inside the step. Short chains are written out, which
// halves the time of a step.
func (s *PlantStepper) move(a, b float64) float64 {
	x, f, old, now := s.x, s.phi, s.old, s.new
	switch s.n {
	case 1:
		_, _, _ = x[0], f[0], old[0]
		x[0] = f[0]*x[0] + old[0]*a + now[0]*b
		return s.gain * x[0]
	case 2:
		_, _, _, _ = x[1], f[3], old[1], now[1]
		x[1] = f[2]*x[0] + f[3]*x[1] + old[1]*a + now[1]*b
		x[0] = f[0]*x[0] + old[0]*a + now[0]*b
		return s.gain * x[1]
	case 3:
		_, _, _, _ = x[2], f[8], old[2], now[2]
		x[2] = f[6]*x[0] + f[7]*x[1] + f[8]*x[2] + old[2]*a + now[2]*b
		x[1] = f[3]*x[0] + f[4]*x[1] + old[1]*a + now[1]*b
		x[0] = f[0]*x[0] + old[0]*a + now[0]*b
		return s.gain * x[2]
	}
	n := s.n
	for i := n - 1; i >= 0; i-- {
		row := f[i*n : i*n+i+1]
		sum := old[i]*a + now[i]*b
		for j, v := range row {
			sum += v * x[j]
		}
		x[i] = sum
	}
	return s.gain * x[n-1]
}
