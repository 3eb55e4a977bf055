package fit

import (
	"fmt"
	"math"

	"lagwright/data"
	"lagwright/ident"
)

// Verdict says how well a log fixes one parameter, why, and what would help.
type Verdict struct {
	Parameter string   `json:"parameter"`     // gain, lags, dead_time
	Verdict   string   `json:"verdict"`       // "good", "doubtful", "not from this log"
	Bound     *float64 `json:"bound_percent"` // half-width of the interval, null where it is open
	Reason    string   `json:"reason"`
	Cures     []string `json:"cures"` // each one alone would do
}

// The verdicts.
const (
	good     = "good"
	doubtful = "doubtful"
	not      = "not from this log"
)

// known is the reason of a verdict on a parameter that was given.
const known = "known, not fitted"

// wanted is the half-width, as a share, up to which a parameter is good, and up
// to which it is doubtful: of the gain, of the sum of lags, and for the dead
// time of dead time and lags together, which is the delay that a controller
// meets. Common practice, no source.
var wanted = map[string][2]float64{"gain": {0.10, 0.30}, "lags": {0.10, 0.30}, "dead_time": {0.05, 0.15}}

// judge gives the verdict on gain, lags and dead time from a quick fit.
func judge(c *Card, run *data.Run, loop Loop) ([]Verdict, error) {
	plant, err := c.Plant()
	if err != nil {
		return nil, err
	}
	m, _ := c.Model(c.Selected)
	j := &judgement{card: c, model: m, plant: plant, run: run, loop: loop, bumps: ident.FindBumps(run.T, run.U, run.Y)}
	j.now = j.experiment(0, 1)
	j.reached = j.now.precision(plant, m.Noise, nil)
	j.open = m.unbounded(run)
	var out []Verdict
	for _, q := range m.Parameters {
		switch q.Name {
		case "gain":
			out = append(out, j.verdict("gain", q.Value, q.Low, q.High, q.Fixed, math.Abs(q.Value)))
		case "dead_time":
			low := q.Low
			if low == nil {
				low = new(float64) // a dead time of zero is the end of the interval
			}
			out = append(out, j.verdict("dead_time", q.Value, low, q.High, q.Fixed, j.delay()))
		}
	}
	for _, d := range c.Derived {
		if d.Name == "sum_of_lags" {
			v := j.verdict("lags", d.Value, d.Low, d.High, false, d.Value)
			out = append(out[:1], append([]Verdict{v}, out[1:]...)...)
		}
	}
	j.cap(out)
	return out, nil
}

// judgement is what verdicts rest on.
type judgement struct {
	card    *Card
	model   *Model
	plant   ident.Plant
	run     *data.Run
	loop    Loop
	bumps   []ident.Bump
	open    unbounded
	now     experiment
	reached precision
}

func (j *judgement) verdict(name string, value float64, low, high *float64, fixed bool, whole float64) Verdict {
	v := Verdict{Parameter: name, Verdict: good, Cures: []string{}}
	if fixed {
		v.Reason = known
		return v
	}
	half := math.Inf(1)
	if low != nil && high != nil {
		half = (*high - *low) / 2
		percent := 100 * half / whole
		v.Bound = &percent
	}
	if name != "dead_time" && j.open != closedEnds {
		half, v.Bound = math.Inf(1), nil
	}
	limits := wanted[name]
	of := map[string]string{"gain": "", "lags": " of their sum", "dead_time": " of dead time and lags"}[name]
	if name == "dead_time" && j.open != closedEnds {
		of = " of the time the bump was held"
	}
	switch share := half / whole; {
	case share <= limits[0]:
		v.Reason = fmt.Sprintf("known to %s%s", plusMinus(100*share), of)
		return v
	case share <= limits[1]:
		v.Verdict = doubtful
		v.Reason = fmt.Sprintf("known to %s%s only: %s", plusMinus(100*share), of, j.why(name))
	case math.IsInf(half, 1):
		v.Verdict = not
		v.Reason = "the log sets no bound: " + j.why(name)
	case share > 1:
		v.Verdict = not
		v.Reason = fmt.Sprintf("known no better than to ±100 %%%s: %s", of, j.why(name))
	default:
		v.Verdict = not
		v.Reason = fmt.Sprintf("known to %s%s only: %s", plusMinus(100*share), of, j.why(name))
	}
	v.Cures = j.cures(name, half, limits[0]*whole)
	return v
}

// why is the likeliest reason for a wide interval.
func (j *judgement) why(name string) string {
	last, strongest := -1, 0.0
	for i, b := range j.bumps {
		if r := b.RiseOverNoise(); !math.IsNaN(r) {
			strongest = math.Max(strongest, r)
		}
		last = i
	}
	lags := j.plant.Elements()
	step := medianInterval(j.run.T)
	switch {
	case j.open == atLimit && last >= 0:
		return fmt.Sprintf("the last bump was held %s, and the temperature had not begun to level off", duration(j.bumps[last].Hold))
	case j.open == atLimit:
		return "the temperature never levelled off"
	case len(j.bumps) > 0 && strongest < 10:
		return fmt.Sprintf("the largest rise is %s times the noise", figure(strongest, 2))
	case name != "dead_time" && last >= 0 && !j.bumps[last].SettledAfter && j.bumps[last].Hold < 4*total(lags)+j.plant.DeadTime:
		return fmt.Sprintf("the last bump was held %s, %s lags, and the temperature had not settled", duration(j.bumps[last].Hold), figure((j.bumps[last].Hold-j.plant.DeadTime)/total(lags), 2))
	case name != "gain" && len(lags) > 0 && lags[0] < 5*step:
		return fmt.Sprintf("rows every %s are coarse beside a lag of %s", duration(step), duration(lags[0]))
	case j.model.Noise.CorrelationTime > 0.5*total(lags):
		return fmt.Sprintf("noise that wanders over %s looks like the answer to a bump", duration(j.model.Noise.CorrelationTime))
	}
	return "too little bump for this noise"
}

// of is the standard error of a parameter.
func (p precision) of(name string) float64 {
	switch name {
	case "gain":
		return p.gain
	case "lags":
		return p.lags
	}
	return p.deadTime
}

// cures lists what would each bring the half-width down to the target, as far
// as the Fisher information of the changed test foretells. What would have to
// be overdone is left out.
func (j *judgement) cures(name string, half, target float64) []string {
	// The intervals of this log are wider than its information by some factor
	// that a better test shares.
	factor := 2.0
	if now := j.reached.of(name); !math.IsInf(half, 1) && now > 0 {
		factor = math.Max(half/now, 2)
	}
	would := func(e experiment) bool {
		return factor*e.precision(j.plant, j.model.Noise, nil).of(name) <= target
	}
	out := []string{}
	if j.loop.State == "closed" {
		return append(out, j.bumpInManual(name, target))
	}
	if j.open == atLimit { // its lags are no ground to foretell another test on
		return append(out, j.holdUntilLevel())
	}
	if x, ok := j.longerHold(would); ok {
		out = append(out, fmt.Sprintf("hold the last bump %s longer", duration(roundUp(x))))
	}
	need := factor * j.reached.of(name) / target
	if s := j.biggerBump(need); s != "" {
		out = append(out, s)
	}
	step := medianInterval(j.run.T)
	for _, k := range []int{2, 5, 10, 20} {
		if step/float64(k) < 0.1*j.model.Noise.CorrelationTime {
			break // such rows repeat one another; common practice, no source
		}
		if would(j.experiment(0, k)) {
			out = append(out, fmt.Sprintf("log every %s or faster", duration(roundDown(step/float64(k)))))
			break
		}
	}
	if n := math.Ceil(need * need); need > 1 && n <= 6 {
		out = append(out, fmt.Sprintf("make the whole test %.0f times and fit the logs together", n))
	}
	if len(out) == 0 {
		out = append(out, fmt.Sprintf("a new test: a bump at least 3 times as large, held %s", duration(roundUp(5*total(j.plant.Elements())+j.plant.DeadTime))))
	}
	return out
}

// bumpInManual words the bump that would do in place of a controller's record:
// a step of the input, held for five lags.
func (j *judgement) bumpInManual(name string, target float64) string {
	step := medianInterval(j.run.T)
	lags := total(j.plant.Elements())
	before, hold := 2*lags+5*step, 5*lags+j.plant.DeadTime
	every := math.Max(step, (before+hold)/experimentRows)
	e := experiment{in: ident.Input{At: []float64{before}, Value: []float64{1}}, drift: j.card.Drift == "linear"}
	for x := 0.0; x <= before+hold; x += every {
		e.t = append(e.t, x)
	}
	// Standard errors fall as the step of the heat, here 1, grows.
	heat := 2 * e.precision(j.plant, j.model.Noise, nil).of(name) / target
	law, u := j.card.Law(), j.run.U[len(j.run.U)-1]
	// Nor is a plant that reacts within a row, or a move that noise would hide.
	rise := math.Abs(j.plant.Gain * heat)
	if rise > mostRise*j.largestRise() || lags < step || rise < 3*j.model.Noise.SD {
		return "the loop was closed: make a bump in manual, and see that the temperature follows it; no size can be foretold from a log whose temperature hardly answers the input (are these the right columns?)"
	}
	size := heat
	if law == ident.Power {
		size = math.Sqrt(u*u+heat) - math.Abs(u)
	}
	return fmt.Sprintf("the loop was closed: bump in manual, at least %s, held %s (the temperature would move by about %s)",
		quantity(roundUp(size), j.card.Units.Input, 3), duration(roundUp(hold)), quantity(math.Abs(j.plant.Gain)*heat, temperatureStep(j.card.Units.Temperature), 2))
}

// longerHold is the least time that the end of the log must be held longer, in
// s; ok is false where ten times the lags or the log would not do.
func (j *judgement) longerHold(would func(experiment) bool) (x float64, ok bool) {
	span := j.run.T[len(j.run.T)-1] - j.run.T[0]
	most := 3 * math.Max(span, 5*total(j.plant.Elements()))
	if !would(j.experiment(most, 1)) {
		return 0, false
	}
	low, high := 0.0, most
	for range 12 {
		middle := (low + high) / 2
		if would(j.experiment(middle, 1)) {
			high = middle
		} else {
			low = middle
		}
	}
	return high, true
}

// mostRise is how many times the swing of this log's temperature a cure may
// ask for.
const mostRise = 4

// biggerBump words a bump that is larger by a factor; nothing where the factor
// is none, or would take the temperature far from where this log has been.
func (j *judgement) biggerBump(need float64) string {
	if len(j.bumps) == 0 || !(need > 1) {
		return ""
	}
	b := j.bumps[0]
	for _, c := range j.bumps {
		if math.Abs(c.To-c.From) > math.Abs(b.To-b.From) {
			b = c
		}
	}
	law, unit := j.card.Law(), j.card.Units.Input
	heat := need * (law.Apply(b.To) - law.Apply(b.From))
	to := b.From + need*(b.To-b.From)
	if law == ident.Power {
		to = math.Copysign(math.Sqrt(math.Max(law.Apply(b.From)+heat, 0)), b.To)
	}
	if e := extent([]*data.Run{j.run}, func(r *data.Run) []float64 { return r.Y }); math.Abs(j.plant.Gain*heat) > mostRise*(e[1]-e[0]) {
		return ""
	}
	s := fmt.Sprintf("bump at least %s instead of %s", quantity(roundUp(math.Abs(to-b.From)), unit, 3), quantity(math.Abs(b.To-b.From), unit, 3))
	if !math.IsNaN(b.Before) {
		s += fmt.Sprintf(" (the temperature would go to about %s)", quantity(b.Before+j.plant.Gain*heat, j.card.Units.Temperature, 3))
	}
	return s
}

// Rows of the changed tests: enough to tell, few enough to be quick.
const experimentRows = 1500

// experiment is the log as it is, its last input held longer by so many s and
// with so many rows in place of one.
func (j *judgement) experiment(longer float64, faster int) experiment {
	run := j.run
	step := medianInterval(run.T)
	e := experiment{in: ident.HeldInput(run.T, run.U, j.card.Law()), drift: j.card.Drift == "linear"}
	last := math.Inf(-1)
	for _, k := range closeRows(run, j.bumps, experimentRows) {
		if math.IsNaN(run.Y[k]) {
			continue
		}
		if gap := run.T[k] - last; faster > 1 && gap < 1.5*step {
			for i := 1; i < faster; i++ {
				e.t = append(e.t, last+gap*float64(i)/float64(faster))
			}
		}
		last = run.T[k]
		e.t = append(e.t, last)
	}
	if longer > 0 {
		every := math.Max(step, longer/experimentRows)
		for x := every; x <= longer; x += every {
			e.t = append(e.t, last+x)
		}
	}
	return e
}

// roundUp rounds a positive number up to two digits.
func roundUp(v float64) float64 { return roundTo2(v, math.Ceil, 1-1e-9) }

// roundDown rounds a positive number down to two digits.
func roundDown(v float64) float64 { return roundTo2(v, math.Floor, 1+1e-9) }

// roundTo2 rounds in units of the second digit; slack keeps what is already
// round but for its last bit.
func roundTo2(v float64, round func(float64) float64, slack float64) float64 {
	if !(v > 0) || math.IsInf(v, 0) {
		return v
	}
	unit := math.Pow(10, float64(magnitude(v, 2)-1))
	return round(v/unit*slack) * unit
}
