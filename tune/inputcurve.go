package tune

import (
	"math"

	"lagwright/ident"
)

// A curve is how the controller's output acts on the plant about an operating
// input u0. The plants of a task have the gain that holds there; what enters
// them is [phi(u0+u) − phi(u0)]/phi'(u0), u the output as a change from u0:
// u itself on the straight line, u + u²/(2·u0) under the power law. There the
// input is a voltage's RMS value, which is never below zero.
type curve struct {
	bend float64 // 1/(2·u0), 0 on the straight line
}

func curveAt(law ident.Law, input float64) curve {
	if law != ident.Power {
		return curve{}
	}
	return curve{bend: 1 / (2 * input)}
}

func (k curve) straight() bool { return k.bend == 0 }

// heat is what enters the plant at an output.
func (k curve) heat(u float64) float64 { return u + k.bend*u*u }

// least is the lowest output there is.
func (k curve) least() float64 {
	if k.straight() {
		return math.Inf(-1)
	}
	return -1 / (2 * k.bend)
}

// input is the output at which so much heat enters; below what the least
// output gives it goes on with the lacking heat, so that it lies below least.
func (k curve) input(heat float64) float64 {
	if k.straight() {
		return heat
	}
	least := k.least()
	if lacking := heat - k.heat(least); lacking < 0 {
		return least + lacking
	}
	return 2 * heat / (1 + math.Sqrt(1+4*k.bend*heat))
}

// balance solves u = a − b·heat(u), b not negative; where the least output
// heats too much for it, it is the output that is asked for there.
func (k curve) balance(a, b float64) float64 {
	if k.straight() {
		return a / (1 + b)
	}
	least := k.least()
	if asked := a - b*k.heat(least); asked < least {
		return asked
	}
	return 2 * a / (1 + b + math.Sqrt(max(0, (1+b)*(1+b)+4*k.bend*b*a)))
}

// on makes a task that of a plant whose heat follows a law about an operating
// input.
func (t *task) on(law ident.Law, input float64) {
	t.curve = curveAt(law, input)
	if least := t.curve.least(); !t.curve.straight() && (t.limits.Min == nil || *t.limits.Min < least) {
		t.limits.Min = &least
	}
}

// straightened is the task behind a square root of the output: the loop is
// linear, and what limits the output limits the heat.
func (t task) straightened() task {
	through := func(u *float64) *float64 {
		if u == nil {
			return nil
		}
		v := t.curve.heat(*u)
		return &v
	}
	t.limits.Min, t.limits.Max = through(t.limits.Min), through(t.limits.Max)
	t.curve = curve{}
	return t
}
