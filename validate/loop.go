package validate

import (
	"math"

	"lagwright/ident"
	"lagwright/tune"
)

// A runner closes loops for one goroutine: it keeps the controller and one
// stepper for every plant, since most runs of a site share their interval.
type runner struct {
	law      ident.Law
	gains    *tune.Gains
	plants   []ident.Plant
	step     float64 // of the steppers
	steppers []*tune.PlantStepper
	scan     float64 // of the controller
	control  *tune.Controller
	begin    *beginning // of the controller; nil: at rest
	y, u     []float64  // buffers
}

func newRunner(law ident.Law, gains *tune.Gains, plants []ident.Plant) *runner {
	return &runner{law: law, gains: gains, plants: plants}
}

// buffers returns space for n rows of temperature and input.
func (r *runner) buffers(n int) (y, u []float64) {
	if cap(r.y) < n {
		r.y, r.u = make([]float64, n), make([]float64, n)
	}
	return r.y[:n], r.u[:n]
}

// ready sets controller and stepper up for plant k.
func (r *runner) ready(c *course, k int) (*tune.PlantStepper, *tune.Controller, error) {
	step := c.scan
	if c.even {
		step = c.lattice.step
	}
	if r.step != step || r.steppers == nil {
		r.step = step
		r.steppers = make([]*tune.PlantStepper, len(r.plants))
	}
	if r.scan != c.scan || r.control == nil {
		control, err := tune.NewController(r.gains, c.scan)
		if err != nil {
			return nil, nil, err
		}
		r.scan, r.control = c.scan, control
	}
	if r.steppers[k] == nil {
		stepper, err := tune.NewPlantStepper(r.plants[k], step)
		if err != nil {
			return nil, nil, err
		}
		r.steppers[k] = stepper
	}
	r.steppers[k].Reset()
	return r.steppers[k], r.control, nil
}

// replay closes the loop on plant k along the course and fills y and u with
// temperature and input at its rows. A loop that runs away fills the rest
// with +Inf.
//
// The controller starts without a bump at the first row: there it holds the
// logged input, and its next scan is one scan time later. A setpoint that
// steps at the first row acts at once. With a beginning set it starts in the
// middle of its work.
func (r *runner) replay(c *course, k int, y, u []float64) error {
	plant, control, err := r.ready(c, k)
	if err != nil {
		return err
	}
	r.begin.start(control, c)
	held := c.u[0]
	if c.r[0] != c.before {
		held = control.Next(c.r[0], c.y[0])
	}
	if c.even {
		r.closeEven(c, plant, control, held, y, u)
		return nil
	}
	r.closeScans(c, k, plant, control, held, y, u)
	return nil
}

// closeEven closes the loop on the lattice, where one pass does it: the plant
// is moved by the difference of new and logged input.
func (r *runner) closeEven(c *course, plant *tune.PlantStepper, control *tune.Controller, held float64, y, u []float64) {
	if c.lattice.row == 1 && c.lattice.scan == 1 {
		r.closeRows(c, plant, control, held, y, u)
		return
	}
	bound := c.bound
	moved := 0.0             // G·[phi(u) − phi(logged u)]
	scanIn := c.lattice.scan // steps to the next scan
	k := 0
	for i, logged := range c.phi {
		for row := range c.lattice.row {
			now := c.log[k] + moved
			if scanIn == 0 {
				held = control.Next(c.r[i], now)
				scanIn = c.lattice.scan
			}
			if row == 0 {
				y[i], u[i] = now, held
				if !(math.Abs(now) < bound) {
					runAway(y[i:], u[i:])
					return
				}
			}
			moved = plant.Step(r.law.Apply(held) - logged)
			scanIn--
			if k++; k == len(c.log) {
				return
			}
		}
	}
}

// closeRows is closeEven for one scan a row, the commonest case by far:
// written out it takes a quarter less time.
func (r *runner) closeRows(c *course, plant *tune.PlantStepper, control *tune.Controller, held float64, y, u []float64) {
	n := len(c.phi)
	log, phi, setpoint, bound := c.log[:n], c.phi[:n], c.r[:n], c.bound
	y, u = y[:n], u[:n]
	power := r.law == ident.Power
	moved := 0.0
	for i := range n {
		now := log[i] + moved
		if i > 0 {
			held = control.Next(setpoint[i], now)
		}
		y[i], u[i] = now, held
		if !(math.Abs(now) < bound) {
			runAway(y[i:], u[i:])
			return
		}
		drive := held
		if power {
			drive *= held
		}
		moved = plant.Step(drive - phi[i])
	}
}

// closeScans closes the loop scan by scan for rows that the scans do not
// meet: the disturbance is found at the rows and taken to move in straight
// lines between them, and the rows of the result are simulated exactly for
// the input that the scans chose.
func (r *runner) closeScans(c *course, k int, plant *tune.PlantStepper, control *tune.Controller, held float64, y, u []float64) {
	g := r.plants[k]
	logged := ident.HeldInput(c.t, c.u, r.law)
	disturbance := ident.NewSimulator(c.t, logged).Response(nil, g.Structure, g.Lags, g.DeadTime)
	for i := range disturbance {
		disturbance[i] = c.y[i] - g.Gain*disturbance[i]
	}
	inputs := make([]float64, len(c.scans))
	rest, bound, moved := c.phi[0], c.bound, 0.0
	away := len(inputs)
	interpolate(c.scans, c.t, disturbance, func(j int, d float64) {
		now := d + moved
		if away < len(inputs) || !(math.Abs(now) < bound) {
			away = min(away, j)
			return
		}
		if j > 0 {
			held = control.Next(c.r[c.scanRow[j]], now)
		}
		inputs[j] = held
		moved = plant.Step(r.law.Apply(held) - rest)
	})
	in := ident.HeldInput(c.scans[:away], inputs[:away], r.law)
	in = from(in, rest, c.scans[0])
	ident.NewSimulator(c.t, in).Response(y, g.Structure, g.Lags, g.DeadTime)
	scan := 0
	for i := range y {
		for scan+1 < away && c.scans[scan+1] <= c.t[i]+1e-9*c.scan {
			scan++
		}
		y[i], u[i] = disturbance[i]+g.Gain*y[i], inputs[scan]
		if away < len(inputs) && c.t[i] >= c.scans[away] {
			runAway(y[i:], u[i:])
			return
		}
	}
}

// from makes an input rest at phi before the time at. The held input knows
// only its own first value.
func from(in ident.Input, phi, at float64) ident.Input {
	if in.Before == phi {
		return in
	}
	return ident.Input{
		Before: phi,
		At:     append([]float64{at}, in.At...),
		Value:  append([]float64{in.Before}, in.Value...),
	}
}

func runAway(y, u []float64) {
	fill(y, math.Inf(1))
	fill(u, math.Inf(1))
}
