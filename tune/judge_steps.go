package tune

import "math"

// A step that a limit holds back says little about the loop: while the output
// sits at its limit nothing is controlled, and a loop at the edge of stability
// may come in without overshoot. The next, smaller step would swing. Where the
// input is limited, overshoot and settling are therefore asked of a small step
// as well, one that no limit touches.

// stepsFound are the setpoint steps of one loop and their worst violation.
type stepsFound struct {
	asked     stepFigures
	small     *stepFigures // nil where it says nothing that asked does not say
	violation float64
	missed    string
}

// stepTerms are the accuracy of a run, the time after which it is given up
// outside the band, and the violation from which no more needs to be known.
type stepTerms struct {
	fine, deadline, enough float64
}

// The small step's names of what it misses.
const (
	smallOvershoot = "overshoot of small steps"
	smallSettling  = "settling of small steps"
)

// smallToo tells whether the requirement is asked of a small step as well.
func (t *task) smallToo() bool {
	return t.limited && !(math.IsInf(t.overshoot, 1) && math.IsInf(t.settling, 1))
}

// steps judges the setpoint step of the task, and the small one where that may
// be another: where a limit was touched, or the input curve bends.
func (t *task) steps(s *scenario, c law, l *openLoop, f quickFigures, terms stepTerms) (stepsFound, error) {
	asked, err := t.setpoint(s, c, l, f, terms.fine, terms.deadline)
	if err != nil {
		return stepsFound{}, err
	}
	j := stepsFound{asked: asked}
	j.violation, j.missed = t.worstOf(asked)
	same := !asked.touched && t.curve.straight()
	if !t.smallToo() || same || j.missed == "input" || j.violation > terms.enough {
		return j, nil
	}
	unlimited := t.smallStep()
	small, err := unlimited.setpoint(s, c, l, f, terms.fine, terms.deadline)
	if err != nil {
		return j, err
	}
	j.small = &small
	if v, what := unlimited.worstOf(small); v > j.violation {
		j.violation, j.missed = v, smallName(what)
	}
	return j, nil
}

// smallStep is the task of a step that is small enough for every limit and for
// the curve of the input. The loop is linear then, so that the size of the
// step does not matter. A small step comes to no high temperature.
func (t *task) smallStep() task {
	small := *t
	small.limits, small.curve, small.peakTemp = Limits{}, curve{}, math.Inf(1)
	return small
}

func smallName(missed string) string {
	if missed == "overshoot" {
		return smallOvershoot
	}
	return smallSettling
}

// setpoint runs the setpoint step of the task; it gives up when the
// temperature is outside the band after deadline.
func (t *task) setpoint(s *scenario, c law, l *openLoop, f quickFigures, fine, deadline float64) (stepFigures, error) {
	plan := l.planAt(f.crossover, fine)
	plan.deadline = deadline
	plan.rest = min(1e-3, t.band/10)
	if fine < searchStep {
		plan.rest /= 20
	}
	sim, err := s.loop(c, plan.step)
	if err != nil {
		return stepFigures{}, err
	}
	return setpointStep(sim.under(c, t.limits).through(t.curve), s.p, c, t.step, t.band, plan), nil
}
