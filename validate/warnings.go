package validate

import (
	"fmt"
	"math"
	"strings"

	"lagwright/data"
)

// warnings says what limits the replay of a run.
func (p *plan) warnings(run *data.Run, courses []*course, e *ensemble, handOver *HandOver) []string {
	var out []string
	warn := func(format string, args ...any) { out = append(out, fmt.Sprintf(format, args...)) }

	out = append(out, p.outside(run)...)
	f := p.typical(e.figures)
	if f.moves+f.small == 0 && p.options.Requirement.Settling != nil {
		warn("no setpoint move in this run: settling and overshoot are not judged")
	}
	if handOver != nil {
		out = append(out, handOver.words(p.units.difference))
	}
	if f.small > 0 {
		warn("%s too small against the noise (%s): settling and overshoot of it are not judged", counted(f.small, "setpoint move"), quantity(f.allowance, p.units.difference))
	} else if f.moves > 0 && f.allowance > 0 {
		warn("settling and overshoot are judged on the setpoint moves alone; those with noise, and those logged, are measured past %s granted to noise and resolution, and so told rather too small", quantity(f.allowance, p.units.difference))
	}
	if offset := median(valuesOf(e.figures, func(f figures) float64 { return f.offset })); offset > 0 {
		warn("P control stands %s off the setpoint after a move: settling and overshoot are told from there", quantity(offset, p.units.difference))
	}
	if f.cut > 0 {
		warn("the record of %s ends before it shows whether the temperature settles in the time asked: that is not judged", counted(f.cut, "setpoint move"))
	}
	if step := courses[0].stepped; step != 0 {
		warn("the log has no setpoint in force: a step of %s at its start is replayed", quantity(step, p.units.difference))
	}
	if away := p.runaways(e.figures); away > 0 {
		warn("the loop runs away on %d of %d plausible plants", away, len(e.figures))
	}
	if need := 2 / (1 - p.options.Confidence); float64(len(p.plants)+1) < need {
		warn("%d plausible plants are too few for a %g%% band; it is their whole range: fit with --plants %.0f or more", len(p.plants), 100*p.options.Confidence, math.Ceil(need))
	}
	if m := manualShare(run); m > 0 {
		warn("the controller was in manual on %.0f%% of the rows; the replay keeps it in automatic", 100*m)
	}
	if low := least(valuesOf(e.figures, finiteLowInput)); lowest(courses) >= 0 && low < 0 {
		warn("the replayed input goes down to %s: a heater cannot cool; give --input-min 0", quantity(low, p.units.input))
	}
	return out
}

// finiteLowInput passes over plants on which the loop runs away.
func finiteLowInput(f figures) float64 {
	if f.moves == runaway {
		return math.NaN()
	}
	return f.lowInput
}

// outside names what the run left the card's range in.
func (p *plan) outside(run *data.Run) []string {
	var out []string
	check := func(what, unit string, x []float64, limits [2]float64) {
		lo, hi := least(x), greatest(x)
		margin := 0.05 * (limits[1] - limits[0])
		if limits[0] == limits[1] || !(lo < limits[0]-margin || hi > limits[1]+margin) {
			return
		}
		out = append(out, fmt.Sprintf("%s %s to %s is outside the card's %s to %s: another operating range, where gain, lags and dead time may differ",
			what, bare(lo, unit), quantity(hi, unit), bare(limits[0], unit), quantity(limits[1], unit)))
	}
	check("input", p.units.input, run.U, p.card.Range.Input)
	check("temperature", p.units.temperature, run.Y, p.card.Range.Temperature)
	if c := p.card.Conditions.Airflow; c != nil && run.Airflow != nil {
		check("airflow", "", run.Airflow, *c)
	}
	if c := p.card.Conditions.Inlet; c != nil && run.Inlet != nil {
		check("inlet temperature", p.units.temperature, run.Inlet, *c)
	}
	return out
}

// typical returns the figures of the first plant that did not run away.
func (p *plan) typical(all []figures) figures {
	for _, f := range all {
		if f.moves != runaway {
			return f
		}
	}
	return all[0]
}

func (p *plan) runaways(all []figures) int {
	n := 0
	for _, f := range all {
		if f.moves == runaway {
			n++
		}
	}
	return n
}

func manualShare(run *data.Run) float64 {
	if len(run.Auto) == 0 {
		return 0
	}
	manual := 0
	for _, auto := range run.Auto {
		if !auto {
			manual++
		}
	}
	return float64(manual) / float64(len(run.Auto))
}

// lowest is the least logged input.
func lowest(courses []*course) float64 {
	low := math.Inf(1)
	for _, c := range courses {
		low = min(low, least(c.u))
	}
	return low
}

// list joins words as a sentence does.
func list(words []string) string {
	if len(words) < 2 {
		return strings.Join(words, "")
	}
	return strings.Join(words[:len(words)-1], ", ") + " and " + words[len(words)-1]
}
