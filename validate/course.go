package validate

import (
	"cmp"
	"fmt"
	"math"
	"slices"

	"lagwright/data"
	"lagwright/ident"
)

// A course is one unbroken segment of a run made ready for its replay.
//
// Logged and replayed temperature share everything but what the changed input
// does. For a plant G
//
//	y(t) = log(t) + G·[phi(u) − phi(logged u)](t)
//
// which is the disturbance d = log − G·phi(logged u) plus the new response.
// Baseline, drift, the initial state and all that came before the first row
// are in the log and cancel: no assumption about them is needed.
type course struct {
	t, y, u, r []float64               // time s, temperature with short holes bridged, input, setpoint
	before     float64                 // setpoint the controller starts from
	rest       float64                 // level from which the way to the first setpoint is measured
	stepped    float64                 // size of the step made up for a log without setpoint, 0 when none
	final      func(r float64) float64 // quiet courses under a P controller: where it comes to rest; else nil

	scan    float64 // s
	even    bool    // rows and scans share the lattice
	lattice lattice
	log     []float64 // temperature at the lattice's steps, or at the scans when not even
	phi     []float64 // phi(logged u) by row
	scans   []float64 // times of the scans when not even
	scanRow []int     // row at or before each scan when not even
	bound   float64   // |temperature| at which a replay counts as having run away
}

// newCourse prepares a segment for a controller with the given scan time (0:
// continuous). Between its rows the logged temperature is taken to follow the
// best-fit plant's response to the logged input plus a straight line.
func newCourse(run *data.Run, s segment, p *plan) (*course, error) {
	return newCourseAt(run, s, p, false)
}

// newCourseAt is newCourse; a segment that resumes after a hole makes up no step.
func newCourseAt(run *data.Run, s segment, p *plan, resumed bool) (*course, error) {
	c := &course{
		t: run.T[s.lo:s.hi],
		y: slices.Clone(run.Y[s.lo:s.hi]),
		u: run.U[s.lo:s.hi],
	}
	bridge(c.t, c.y)
	var logged []float64
	if run.Setpoint != nil && !(p.setpointGiven() && p.byHand(run)) {
		logged = run.Setpoint[s.lo:s.hi]
	}
	step := cmp.Or(p.options.SetpointStep, p.options.Requirement.SetpointStep)
	if resumed && step != nil {
		step = new(float64) // the step was made where the run began
	}
	if err := c.setSetpoint(logged, p.options.Setpoint, step); err != nil {
		return nil, err
	}
	c.bound = runawayRatio * max(slices.Max(c.y)-slices.Min(c.y), math.Abs(slices.Max(c.y)), math.Abs(slices.Min(c.y)), 1)
	c.phi = make([]float64, len(c.u))
	for i, u := range c.u {
		c.phi[i] = p.law.Apply(u)
	}
	c.scan = p.gains.Scan
	if c.scan == 0 {
		c.scan = continuousScan(c.t, response(p.best))
	}
	if c.lattice, c.even = findLattice(c.t, c.scan); c.even {
		return c, c.layEven(p)
	}
	return c, c.layScans()
}

// runawayRatio is how many times what was logged a replay may reach before it
// counts as having run away.
const runawayRatio = 1e6

// maxSteps bounds the steps of one replay.
const maxSteps = 200_000_000

// layEven finds the logged temperature at the steps of the lattice.
func (c *course) layEven(p *plan) error {
	if c.lattice.row == 1 {
		c.log = c.y
		return nil
	}
	n := (len(c.t)-1)*c.lattice.row + 1
	if n > maxSteps {
		return fmt.Errorf("a scan every %g s makes %d steps of this run: give a longer scan time", c.scan, n)
	}
	at := make([]float64, n)
	for k := range at {
		at[k] = c.t[0] + float64(k)*c.lattice.step
	}
	c.log = c.between(at, p)
	return nil
}

// layScans lists the scans of a run whose rows they do not meet.
func (c *course) layScans() error {
	span := (c.t[len(c.t)-1] - c.t[0]) / c.scan
	if span > maxSteps {
		return fmt.Errorf("a scan every %g s makes %.0f scans of this run: give a longer scan time", c.scan, span)
	}
	c.scans = make([]float64, int(span)+1)
	c.scanRow = make([]int, len(c.scans))
	row := 0
	for k := range c.scans {
		c.scans[k] = c.t[0] + float64(k)*c.scan
		for row+1 < len(c.t) && c.t[row+1] <= c.scans[k]+1e-9*c.scan {
			row++
		}
		c.scanRow[k] = row
	}
	return nil
}

// between returns the logged temperature at the ascending times at, all
// within the segment.
func (c *course) between(at []float64, p *plan) []float64 {
	in := ident.HeldInput(c.t, c.u, p.law)
	g := p.best
	rows := ident.NewSimulator(c.t, in).Response(nil, g.Structure, g.Lags, g.DeadTime)
	left := make([]float64, len(rows))
	for i := range left {
		left[i] = c.y[i] - g.Gain*rows[i]
	}
	out := ident.NewSimulator(at, in).Response(nil, g.Structure, g.Lags, g.DeadTime)
	interpolate(at, c.t, left, func(k int, v float64) { out[k] = v + g.Gain*out[k] })
	return out
}

// interpolate calls f with the value at each time at[k] of the polygon (t, y).
func interpolate(at, t, y []float64, f func(k int, v float64)) {
	i := 0
	for k, s := range at {
		for i+2 < len(t) && t[i+1] <= s {
			i++
		}
		f(k, y[i]+(y[i+1]-y[i])*(s-t[i])/(t[i+1]-t[i]))
	}
}

// signal returns the course with another temperature and input as a signal to
// be measured.
func (c *course) signal(y, u []float64) signal {
	return signal{t: c.t, y: y, u: u, r: c.r, r0: c.rest, midway: c.stepped == 0, final: c.final}
}
