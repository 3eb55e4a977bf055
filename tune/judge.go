package tune

import (
	"math"
	"slices"
)

// task is a requirement made ready to be judged: what is not asked is +Inf
// (damping: 0). Temperatures and inputs are changes from the operating point.
type task struct {
	ms        float64
	overshoot float64 // fraction
	settling  float64 // s
	band      float64 // fraction of the step
	damping   float64
	peakTemp  float64 // highest temperature allowed above the operating point
	step      float64 // of the setpoint
	limits    Limits
	limited   bool // whether the requirement limits the input, see smallToo
	curve     curve
	scan      float64
}

// newTask compiles a requirement for an operating input and temperature.
func newTask(q Requirement, input, temperature float64) task {
	t := task{ms: math.Inf(1), overshoot: math.Inf(1), settling: math.Inf(1), band: q.Band, peakTemp: math.Inf(1), step: 1, scan: q.Scan}
	if t.band == 0 {
		t.band = 0.02
	}
	set := func(to *float64, from *float64, factor, less float64) {
		if from != nil {
			*to = (*from - less) * factor
		}
	}
	set(&t.ms, q.Ms, 1, 0)
	set(&t.overshoot, q.Overshoot, 0.01, 0)
	set(&t.settling, q.Settling, 1, 0)
	set(&t.damping, q.Damping, 1, 0)
	set(&t.peakTemp, q.TempMax, 1, temperature)
	set(&t.step, q.SetpointStep, 1, 0)
	shifted := func(v *float64) *float64 {
		if v == nil {
			return nil
		}
		x := *v - input
		return &x
	}
	t.limits = Limits{Min: shifted(q.InputMin), Max: shifted(q.InputMax), Rate: q.InputRate}
	t.limited = t.limits != Limits{}
	return t
}

// simulates tells whether judging needs a setpoint step.
func (t *task) simulates() bool {
	return !math.IsInf(t.overshoot, 1) || !math.IsInf(t.settling, 1) || !math.IsInf(t.peakTemp, 1)
}

// outcome is what one controller does on one plant.
type outcome struct {
	stable      bool
	quick       quickFigures
	step        stepFigures
	small       *stepFigures // of a step that no limit touches, nil where it was not judged apart, see steps
	violation   float64      // of the requirement that is missed most, in parts of its limit; ≤ 0 when all hold
	missed      string       // its name
	dampingHeld bool
}

// The accuracy of a run while searching and when a result is reported: the
// step times the highest frequency.
const (
	searchStep = 0.15
	reportStep = 0.05
)

// patience is the multiple of the settling time asked after which a loop that
// is still outside the band counts as not settled.
const patience = 20

// hair is what a figure may pass its limit by, in parts of the limit: the
// accuracy of the simulation, no more.
const hair = 2e-4

// meets tells whether the requirement holds, giving up at the first failure.
func (t *task) meets(s *scenario, c law) bool {
	f := s.quick(c)
	if !f.stable || f.ms > t.ms*(1+hair) {
		return false
	}
	l := newOpenLoop(s.p, c, s.scan)
	if t.damping > 0 && !s.damped(c, &l, t.damping, s.phaseCross(&l)) {
		return false
	}
	if !t.simulates() {
		return true
	}
	j, err := t.steps(s, c, &l, f, stepTerms{searchStep, t.settling, hair})
	return err == nil && j.violation <= hair
}

// worstOf is the worst violation seen in a setpoint step.
func (t *task) worstOf(f stepFigures) (violation float64, name string) {
	violation = math.Inf(-1)
	note := func(v float64, what string) {
		if v > violation {
			violation, name = v, what
		}
	}
	if t.simulates() && f.short > 1e-9 {
		return f.short, "input"
	}
	if !math.IsInf(t.overshoot, 1) {
		note((f.overshoot-t.overshoot)/max(t.overshoot, 0.02), "overshoot")
	}
	if !math.IsInf(t.settling, 1) {
		if math.IsNaN(f.settling) {
			note(patience, "settling")
		} else {
			note(f.settling/t.settling-1, "settling")
		}
	}
	if !math.IsInf(t.peakTemp, 1) {
		top := f.peak
		if t.step < 0 {
			top = 0
		}
		note((top-t.peakTemp)/max(math.Abs(t.peakTemp), 1e-9), "temperature")
	}
	return violation, name
}

// load runs a unit load step, limits aside. Its figures are per unit of a small
// load, so it runs on the straight line under the power law, too; integral
// action takes a load at the input back unit for unit whatever the law.
func (t *task) load(s *scenario, c law, f quickFigures, fine float64) (stepFigures, error) {
	l := newOpenLoop(s.p, c, s.scan)
	plan := l.planAt(f.crossover, fine)
	plan.rest = 1e-4
	sim, err := s.loop(c, plan.step)
	if err != nil {
		return stepFigures{}, err
	}
	return loadStep(sim.under(c, Limits{}), s.p, c, 1, plan), nil
}

// judge is meets with everything that was found.
func (t *task) judge(s *scenario, c law, fine float64) outcome {
	o := outcome{quick: s.quick(c), violation: math.Inf(-1)}
	o.stable = o.quick.stable
	if !o.stable {
		o.violation, o.missed = 1000, "stability"
		return o
	}
	note := func(v float64, what string) {
		if v > o.violation {
			o.violation, o.missed = v, what
		}
	}
	if !math.IsInf(t.ms, 1) {
		note(t.msViolation(o.quick.ms), "ms")
	}
	l := newOpenLoop(s.p, c, s.scan)
	if o.dampingHeld = true; t.damping > 0 {
		cross := s.phaseCross(&l)
		held := func(zeta float64) bool { return s.damped(c, &l, zeta, cross) }
		if o.dampingHeld = held(t.damping); !o.dampingHeld {
			note(1-dampingBelow(t.damping, dampingSteps, math.Inf(1), 0, held)/t.damping, "damping")
		} else {
			note(0, "damping")
		}
	}
	j, err := t.steps(s, c, &l, o.quick, stepTerms{fine, patience * t.settling, math.Inf(1)})
	o.step, o.small = j.asked, j.small
	if err != nil {
		o.violation, o.missed = 1000, "simulation"
		return o
	}
	if j.violation > hair || j.violation > o.violation {
		note(j.violation, j.missed)
	}
	return o
}

// msViolation is by how much Ms is passed; none within a hair.
func (t *task) msViolation(ms float64) float64 {
	v := (ms - t.ms) / max(t.ms-1, 0.05)
	if ms <= t.ms*(1+hair) {
		v = min(v, 0)
	}
	return v
}

// dampingSteps is how often the damping ratio of a loop that misses it is halved in on.
const dampingSteps = 8

// violation is that of judge for a search that asks only for values below
// bound: where it is not below, any value that is not either. What cannot
// change the answer any more is left out, the costly last.
func (t *task) violation(s *scenario, c law, bound float64) float64 {
	f := s.quick(c)
	if !f.stable {
		return 1000
	}
	worst := math.Inf(-1)
	if !math.IsInf(t.ms, 1) {
		worst = t.msViolation(f.ms)
	}
	if worst >= bound {
		return worst
	}
	l := newOpenLoop(s.p, c, s.scan)
	if t.simulates() {
		deadline := t.settling
		if !math.IsInf(deadline, 1) {
			deadline *= min(patience, 1+bound)
		}
		j, err := t.steps(s, c, &l, f, stepTerms{searchStep, deadline, bound})
		if err != nil {
			return 1000
		}
		if v := j.violation; v > hair || v > worst {
			worst = max(worst, v)
		}
	}
	if t.damping == 0 || worst >= min(bound, 1) { // damping is never missed by more than 1
		return worst
	}
	return max(worst, t.dampingViolation(s, c, &l, worst, bound))
}

// dampingViolation is by how much the damping ratio is missed, 0 where it is
// held; known between worst and bound, where it makes a difference.
func (t *task) dampingViolation(s *scenario, c law, l *openLoop, worst, bound float64) float64 {
	cross := s.phaseCross(l)
	held := func(zeta float64) bool { return s.damped(c, l, zeta, cross) }
	if held(t.damping) {
		return 0
	}
	return 1 - dampingBelow(t.damping, dampingSteps, t.damping*(1-worst), t.damping*(1-bound), held)/t.damping
}

// met tells whether the requirement held.
func (o outcome) met() bool { return o.stable && o.violation <= hair }

// phaseCross returns about the lowest frequency at which the loop's phase
// passes −180° on the scenario's grid, +Inf when it never does.
func (s *scenario) phaseCross(l *openLoop) float64 {
	before := l.phase(s.w[0]) + math.Pi
	for i, w := range s.w[1:] {
		now := l.phase(w) + math.Pi
		if before > 0 && now <= 0 {
			return s.w[i] + (w-s.w[i])*before/(before-now)
		}
		before = now
	}
	return math.Inf(1)
}

// quantile is the smallest value that a share of the values does not exceed;
// NaN counts as larger than everything.
func quantile(v []float64, share float64) float64 {
	if len(v) == 0 {
		return math.NaN()
	}
	sorted := slices.Clone(v)
	for i, x := range sorted {
		if math.IsNaN(x) {
			sorted[i] = math.Inf(1)
		}
	}
	slices.Sort(sorted)
	return sorted[needed(len(sorted), share)-1]
}

// needed is how many of n make up a share, at least 1.
func needed(n int, share float64) int {
	return max(1, min(n, int(math.Ceil(share*float64(n)-1e-9))))
}
