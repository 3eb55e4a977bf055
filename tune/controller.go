package tune

import (
	"fmt"
	"math"
)

// Controller is a controller as a box runs it: called once per scan with
// setpoint and temperature, it returns the input to hold until the next scan.
//
//	u = Kc·(b·r − yf) + I − Kc·Td·dyf/dt      limited in range and in rate
//
// The measurement filter is exact for a temperature that moves in straight
// lines between scans (without filter the derivative is the backward
// difference). The integral I is the trapezoidal sum of Kc/Ti·(r − yf).
// Windup is stopped by clamping: while the output sits at a limit, in range
// or in rate, an increment of I that would push further into it is left out.
// A P controller has its bias in place of I.
//
// All values are in the units of the gains. A Controller serves one goroutine
// and allocates nothing.
type Controller struct {
	law
	step  float64
	half  float64 // Kc/Ti times half a step
	decay float64 // of the measurement filter over a step
	mean  float64 // weight of a ramp in the filter, see filter

	limits          bool    // whether any of these binds
	low, high, slew float64 // slew per step
	quantum         float64 // resolution of the output, 0 when none
	touched         bool    // whether any of these has changed an output

	i, yf, y, slope, e float64 // integral, filtered and raw temperature, dyf/dt, r − yf
	u                  float64 // last output
	bias               float64
}

// NewController returns the controller g called every step seconds; a step
// of 0 means the gains' scan time. Call Start before Next.
func NewController(g *Gains, step float64) (*Controller, error) {
	c, err := g.law()
	if err != nil {
		return nil, err
	}
	if step == 0 {
		step = g.Scan
	}
	if !(step > 0) || math.IsInf(step, 0) {
		return nil, fmt.Errorf("scan time %g s: give a positive time", step)
	}
	k := newController(c, step)
	k.bias = g.Bias
	k.limit(g.Limits)
	return &k, nil
}

func newController(c law, step float64) Controller {
	k := Controller{law: c, step: step, half: c.ki() * step / 2, low: math.Inf(-1), high: math.Inf(1), slew: math.Inf(1)}
	if c.tf > 0 {
		x := step / c.tf
		k.decay = math.Exp(-x)
		k.mean = 1 + math.Expm1(-x)/x
	} else {
		k.mean = 1
	}
	return k
}

func (c *Controller) limit(l Limits) {
	c.limits = l != Limits{}
	if l.Min != nil {
		c.low = *l.Min
	}
	if l.Max != nil {
		c.high = *l.Max
	}
	if l.Rate != nil {
		c.slew = *l.Rate * c.step
	}
	if l.Resolution != nil {
		c.quantum = *l.Resolution
	}
}

// Start puts the controller in automatic without a bump: the integral is set
// so that setpoint r and temperature y, held, give the output u. A P
// controller has no integral to set: it starts from its bias, and u only says
// where its rate limit begins.
func (c *Controller) Start(r, y, u float64) { c.StartAt(r, y, u, u, 0) }

// StartAt starts a controller in the middle of its work, from what a log shows
// of it: the filtered temperature moves by slope per second, the output is u,
// and setpoint and temperature would give want if nothing limited it. Where u
// sits at no limit the two are the same.
func (c *Controller) StartAt(r, y, u, want, slope float64) {
	c.yf, c.y, c.slope, c.u = y-c.tf*slope, y, slope, u
	c.e = r - c.yf
	c.i = c.bias
	if c.integral() {
		c.i = want - c.kc*(c.b*r-c.yf-c.td*slope)
	}
}

// Next runs one scan and returns the output to hold until the next one.
func (c *Controller) Next(r, y float64) float64 {
	if c.tf > 0 || c.td > 0 {
		c.filter(y)
	} else {
		c.yf = y
	}
	e := r - c.yf
	add := c.half * (c.e + e)
	c.e = e
	want := c.kc*(c.b*r-c.yf-c.td*c.slope) + c.i
	u := want + add
	if c.limits {
		u = c.limited(u)
		c.touched = c.touched || u != want+add
	}
	if push := want + add - u; push*add <= 0 || c.quantum > 0 && math.Abs(push) <= c.quantum {
		c.i += add
	} else {
		u = c.limited(want)
	}
	c.u = u
	return u
}

// filter takes in a sample: with the ramp from the last sample to y,
// yf(t+h) = a·yf + (1−a)·y0 + m·(y − y0), a = exp(−h/Tf), m = 1 − (1−a)·Tf/h,
// and dyf/dt = (y − yf)/Tf.
func (c *Controller) filter(y float64) {
	c.yf = c.decay*c.yf + (1-c.decay)*c.y + c.mean*(y-c.y)
	if c.tf > 0 {
		c.slope = (y - c.yf) / c.tf
	} else {
		c.slope = (y - c.y) / c.step
	}
	c.y = y
}

// affine returns a and b of the output a − b·y that Next would want at the
// temperature y, limits aside.
func (c *Controller) affine(r float64) (a, b float64) {
	rest := c.decay*c.yf + (1-c.decay-c.mean)*c.y // yf = rest + mean·y
	var slope0, slope1 float64                    // dyf/dt = slope0 + slope1·y
	if c.tf > 0 {
		slope0, slope1 = -rest/c.tf, (1-c.mean)/c.tf
	} else {
		slope0, slope1 = -c.y/c.step, 1/c.step
	}
	a = c.kc*(c.b*r-rest-c.td*slope0) + c.i + c.half*(c.e+r-rest)
	b = c.kc*(c.mean+c.td*slope1) + c.half*c.mean
	return a, b
}

// limited returns the output nearest to v that range, rate and resolution allow.
func (c *Controller) limited(v float64) float64 {
	v = max(c.u-c.slew, min(c.u+c.slew, v))
	v = max(c.low, min(c.high, v))
	if c.quantum > 0 {
		v = c.quantum * math.Round(v/c.quantum)
		switch { // a limit that is no multiple of the resolution is not rounded past
		case v > c.high:
			v -= c.quantum
		case v < c.low:
			v += c.quantum
		}
	}
	return v
}
