package tune

import (
	"math"

	"lagwright/ident"
)

// The closed loop in time. Plant and controller start at rest; everything is
// a change from there. A scanning controller is run as it is: the plant moves
// exactly between scans. A continuous controller is run with a short step h
// by the midpoint rule: the output computed from the temperature at
// (k+½)·h is held from k·h to (k+1)·h. What that changes at frequency w is
// of the order (w·h)²/24, and h is small against the loop; the plant itself
// stays exact, and so does its dead time, however short.

// loopSim runs one plant under one controller.
type loopSim struct {
	plant     *PlantStepper
	control   Controller
	curve     curve   // between the output and the plant
	step      float64 // of the plant, s
	every     int     // plant steps per scan
	lead      float64 // time of the first sample, s
	immediate bool    // the sample sees the output computed from it
}

// newLoopSim prepares a plant for runs with steps of about step seconds,
// under a controller that scans every scan seconds (0: continuous).
func newLoopSim(p ident.Plant, scan, step float64) (*loopSim, error) {
	s := &loopSim{step: step, every: 1}
	if scan > 0 {
		s.every = max(1, int(math.Ceil(scan/step-1e-9)))
		s.step = scan / float64(s.every)
	} else {
		s.lead = step / 2
		s.immediate = p.DeadTime < s.lead*(1-1e-9)
	}
	var err error
	s.plant, err = newPlantStepper(p, s.step, s.lead)
	return s, err
}

// under puts a controller in charge, its limits counted from rest.
func (s *loopSim) under(c law, l Limits) *loopSim {
	s.control = newController(c, s.step*float64(s.every))
	s.control.limit(l)
	s.curve = curve{}
	return s
}

// through puts a curve between the controller and the plant.
func (s *loopSim) through(k curve) *loopSim {
	s.curve = k
	return s
}

// A sample is one instant of a run.
type sample struct {
	t, y, u float64
}

// run steps setpoint r and load d (added to the input) at t = 0 and hands
// every sample to seen until that returns false.
func (s *loopSim) run(r, d float64, seen func(sample) bool) {
	s.plant.Reset()
	s.control.Start(0, 0, 0)
	held, u := 0.0, 0.0 // what enters the plant, and the output alone
	bend := s.curve.bend
	for k := 0; ; k++ {
		var y float64
		if s.immediate {
			y, u = s.together(r, d, held)
			held = s.curve.heat(u) + d
		} else {
			y = s.plant.Output()
			if k%s.every == 0 {
				u = s.control.Next(r, y)
			}
			in := u + d
			if bend != 0 {
				in += bend * u * u
			}
			s.plant.Step(in)
		}
		if !seen(sample{t: float64(k)*s.step + s.lead, y: y, u: u}) {
			return
		}
	}
}

// together moves the plant to the next sample where the output acts on the
// sample it is computed from: y = free + g·heat(u) and u = a − b·y.
func (s *loopSim) together(r, d, held float64) (y, u float64) {
	p, c := s.plant, &s.control
	n := p.n
	free := p.old[n-1]*held + p.new[n-1]*d
	for j, f := range p.phi[(n-1)*n:] {
		free += f * p.x[j]
	}
	free *= p.gain
	g := p.gain * p.new[n-1]
	a, b := c.affine(r)
	y = free + g*s.curve.heat(c.limited(s.curve.balance(a-b*free, b*g)))
	u = c.Next(r, y)
	p.move(held, s.curve.heat(u)+d)
	return y, u
}
