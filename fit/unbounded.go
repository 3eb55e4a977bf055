package fit

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"lagwright/data"
)

// unbounded says whether a log bounds gain and lags at all.
type unbounded int

const (
	closedEnds unbounded = iota
	openEnd              // the interval of the gain or of a lag is open
	atLimit              // the longest lag stands at the end of what was searched
)

// searchedSpans is how many spans of the log the search for a lag goes up to,
// see engine.setGroups; a lag within a tenth of it stands there for want of an
// end.
const searchedSpans = 20

// unbounded reports how far a model's gain and lags are bounded by the run.
func (m *Model) unbounded(run *data.Run) unbounded {
	out := closedEnds
	span := run.T[len(run.T)-1] - run.T[0]
	for i := range m.Parameters {
		q := &m.Parameters[i]
		switch {
		case q.Fixed:
		case q.isLag() && q.Value > 0.9*searchedSpans*span:
			return atLimit
		case q.isLag() && q.High == nil, q.Name == "gain" && (q.Low == nil || q.High == nil):
			out = openEnd
		}
	}
	return out
}

func (p *Parameter) isLag() bool { return strings.HasPrefix(p.Name, "lag") }

// withoutFalseBounds takes the ends off gain and lags where a lag stands at
// the limit of the search: they are those of the search, not of the log.
func withoutFalseBounds(parameters []Parameter, derived []Derived) ([]Parameter, []Derived) {
	parameters, derived = append([]Parameter{}, parameters...), append([]Derived{}, derived...)
	for i := range parameters {
		if q := &parameters[i]; !q.Fixed && (q.isLag() || q.Name == "gain") {
			q.Low, q.High = nil, nil
		}
	}
	for i := range derived {
		derived[i].Low, derived[i].High = nil, nil
	}
	return parameters, derived
}

// delay is what the half-width of the dead time is held against: dead time and
// lags, or where the lags are not bounded, no more than the longest hold.
func (j *judgement) delay() float64 {
	residence := j.plant.DeadTime + total(j.plant.Elements())
	if j.open == closedEnds {
		return residence
	}
	longest := 0.0
	for _, b := range j.bumps {
		longest = math.Max(longest, b.Hold)
	}
	if longest == 0 {
		return residence
	}
	return math.Min(residence, longest)
}

// holdUntilLevel is the cure where the log saw no more than the beginning of
// the rise: the lags are longer than the hold, by what factor nobody knows.
// Ten times the hold is common practice, no source.
func (j *judgement) holdUntilLevel() string {
	if len(j.bumps) == 0 {
		return "a new test in manual: one bump, held until the temperature levels off"
	}
	hold := j.bumps[len(j.bumps)-1].Hold
	return fmt.Sprintf("hold the last bump until the temperature levels off, which may take %s or longer", duration(roundUp(10*hold)))
}

// fewSteps is the rise, in steps of the logged resolution, below which no
// parameter is good. Common practice, no source.
const fewSteps = 5

// A limitation keeps a verdict from being better than doubtful.
type limitation struct{ reason, cure string }

// limitations lists what spoils the log for every parameter.
func (j *judgement) limitations() []limitation {
	var out []limitation
	if q := j.run.Quality.Quantum; q > 0 {
		if rise := j.largestRise(); rise < fewSteps*q {
			out = append(out, limitation{fmt.Sprintf("the rise is only %s steps of the logged resolution", figure(rise/q, 2)),
				"log the temperature with more digits, or make a larger bump"})
		}
	}
	if switched(j.run) {
		out = append(out, limitation{"the input is switched on and off, and no model of it at every switching is to be trusted",
			"give the length of the switching cycle with --cycle, and log fifty rows a cycle or more"})
	}
	for _, w := range j.card.Warnings {
		switch w.Code {
		case "curvature":
			out = append(out, limitation{"the gain changes over the range of the input", "bump about the working point only, or see --input-law power"})
		case "up-down-differ":
			out = append(out, limitation{"steps up and down differ", "bump both ways about the working point"})
		}
	}
	for _, n := range j.run.Quality.Notes {
		switch n.Code {
		case "temperature-clipped":
			out = append(out, limitation{"the temperature was cut off at the end of its range", "keep the part before with --to, or widen the range and repeat the test"})
		case "input-change-unseen":
			out = append(out, limitation{"a change of the input was not recorded when it was made", "log the input at every row"})
		}
	}
	return out
}

// manySwitchings is the number of changes of an ON and OFF input from which it is
// taken for a drive that switches all the time, not for a test by hand.
const manySwitchings = 12

// switched reports whether the input is ON and OFF in words, as of a drive that
// switches all the time, and was not averaged over its cycle.
func switched(run *data.Run) bool {
	if !noted(run, "input-switched") || noted(run, "cycle-mean") {
		return false
	}
	changes := 0
	for k := 1; k < len(run.U); k++ {
		if run.U[k] != run.U[k-1] {
			changes++
		}
	}
	return changes >= manySwitchings
}

// noted reports whether reading the log left a note of the code.
func noted(run *data.Run, code string) bool {
	return slices.ContainsFunc(run.Quality.Notes, func(n data.Note) bool { return n.Code == code })
}

// loadMistaken takes back a dead time read from a controller's record that does not give the
// gain: the moment at which a load came then passes for it.
func (j *judgement) loadMistaken(verdicts []Verdict) {
	gainKnown := true
	for i := range verdicts {
		v := &verdicts[i]
		switch {
		case v.Parameter == "gain":
			gainKnown = v.Verdict != not
		case v.Parameter == "dead_time" && v.Verdict != not && v.Reason != known && !gainKnown && j.loop.State == "closed":
			v.Verdict = not
			v.Reason += ", but the log does not give the gain: when a load came may pass for a dead time"
			v.Cures = append(v.Cures, j.cures("dead_time", math.Inf(1), 0)[0])
		}
	}
}

// largestRise is that of the bumps, without bumps the swing of the temperature.
func (j *judgement) largestRise() float64 {
	largest := 0.0
	for _, b := range j.bumps {
		if r := math.Abs(b.Rise()); r > largest {
			largest = r
		}
	}
	if largest == 0 {
		e := extent([]*data.Run{j.run}, func(r *data.Run) []float64 { return r.Y })
		largest = e[1] - e[0]
	}
	return largest
}

// cap lowers what is good to doubtful where something spoils the log, and says so.
func (j *judgement) cap(verdicts []Verdict) {
	spoilt := j.limitations()
	j.loadMistaken(verdicts)
	for i := range verdicts {
		v := &verdicts[i]
		if v.Reason == known {
			continue
		}
		all := spoilt
		if v.Verdict == good && v.Parameter == "dead_time" && j.open != closedEnds {
			all = append([]limitation{{"so short a rise does not tell dead time from lag", j.cures("dead_time", math.Inf(1), 0)[0]}}, all...)
		}
		if v.Parameter == "dead_time" && noted(j.run, "clock-coarse") {
			all = append(all[:len(all):len(all)], limitation{"the clock is coarser than the sampling", "log the time with at least one more digit"})
		}
		for _, l := range all {
			if v.Verdict == good {
				v.Verdict, v.Reason = doubtful, v.Reason+", but "+l.reason
			} else {
				v.Reason += "; " + l.reason
			}
			v.Cures = append(v.Cures, l.cure)
		}
	}
}
