package tune

import (
	"errors"
	"fmt"
	"math"
)

// law is the control law in the ideal form, the one every computation uses:
//
//	u = Kc·[(b·r − yf) + 1/Ti·∫(r − yf)dt − Td·dyf/dt] + bias
//	Tf·dyf/dt + yf = y
//
// The filter of lag Tf stands in front of the whole controller, so that the
// loop sees C(s) = Kc·(1 + 1/(Ti·s) + Td·s)/(Tf·s + 1) and the three forms
// convert into one another exactly, filter or no filter. Ti is +Inf where
// there is no integral action, Td is 0 where there is no derivative.
type law struct {
	kc, ti, td, tf float64
	b              float64
}

func (c law) integral() bool { return !math.IsInf(c.ti, 1) }

// ki is the integral gain Kc/Ti, 0 without integral action.
func (c law) ki() float64 {
	if !c.integral() {
		return 0
	}
	return c.kc / c.ti
}

// law returns the control law of g whatever form it is written in.
func (g *Gains) law() (law, error) {
	c := law{kc: g.Kc, ti: math.Inf(1), tf: g.Filter, b: g.SetpointWeight}
	if g.Ti != nil {
		c.ti = *g.Ti
	}
	if g.Td != nil {
		c.td = *g.Td
	}
	switch {
	case !isFinite(c.kc) || c.kc == 0:
		return law{}, fmt.Errorf("kc is %g: give a gain other than 0", c.kc)
	case g.Ti != nil && !(isFinite(c.ti) && c.ti > 0):
		return law{}, fmt.Errorf("ti_s is %g: give a positive time, or null for no integral action", c.ti)
	case !(isFinite(c.td) && c.td >= 0):
		return law{}, fmt.Errorf("td_s is %g: give a time of 0 or more", c.td)
	case !(isFinite(c.tf) && c.tf >= 0):
		return law{}, fmt.Errorf("filter_s is %g: give a time of 0 or more", c.tf)
	case !isFinite(c.b):
		return law{}, errors.New("setpoint_weight is not a number")
	}
	return toIdeal(c, g.Form)
}

func isFinite(x float64) bool { return !math.IsNaN(x) && !math.IsInf(x, 0) }

// newGains writes a control law down as gains. The numbers are taken as they
// are, in whatever form the caller says they are.
func newGains(c law, controller string) *Gains {
	g := &Gains{Schema: GainsSchema, Controller: controller, Form: Ideal, Kc: c.kc, Filter: c.tf, SetpointWeight: c.b, Action: "reverse"}
	if c.kc < 0 {
		g.Action = "direct"
	}
	if c.integral() {
		g.Ti = &c.ti
	}
	if controller == "pid" {
		g.Td = &c.td
	}
	return g
}
