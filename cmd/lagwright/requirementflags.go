package main

import (
	"cmp"
	"errors"

	"github.com/spf13/cobra"

	"lagwright/tune"
)

// requirementFlags say what the loop must do, and within which limits.
type requirementFlags struct {
	requirement tune.Requirement
}

func (r *requirementFlags) add(cmd *cobra.Command) {
	fs, q := cmd.Flags(), &r.requirement
	optionalFlag(fs, &q.Settling, "settling", "DURATION", "settled after a setpoint step within this time", positiveSeconds)
	valueFlag(fs, &q.Band, "settling-band", "PERCENT", "2%", "settled means: within this share of the step, and staying", share)
	optionalFlag(fs, &q.Overshoot, "overshoot", "PERCENT", "largest overshoot of a setpoint step", percent)
	optionalFlag(fs, &q.Damping, "damping", "RATIO", "least damping ratio of the dominant poles", dampingRatio)
	optionalFlag(fs, &q.Ms, "ms", "NUMBER", "largest peak sensitivity Ms (1.6 where nothing is required)", peakSensitivity)
	optionalFlag(fs, &q.InputMin, "input-min", "NUMBER", "lowest input the controller may give", number)
	optionalFlag(fs, &q.InputMax, "input-max", "NUMBER", "highest input the controller may give", number)
	optionalFlag(fs, &q.InputRate, "input-rate", "NUMBER", "fastest change of the input, per second", positiveNumber)
	optionalFlag(fs, &q.TempMax, "temp-max", "TEMP", "temperature that must never be passed, °C (or 203F)", temperature)
	optionalFlag(fs, &q.SetpointStep, "setpoint-step", "DEGREES", "size of the setpoint step judged, K (or 9F)", difference)
	valueFlag(fs, &q.Scan, "scan", "DURATION", "", "the controller's scan time (continuous where not given)", positiveSeconds)
}

// check finds faults between flags.
func (r *requirementFlags) check() error {
	q := &r.requirement
	if q.InputMin != nil && q.InputMax != nil && *q.InputMin >= *q.InputMax {
		return usageErrorf("--input-min %g is not below --input-max %g", *q.InputMin, *q.InputMax)
	}
	if q.SetpointStep != nil && *q.SetpointStep == 0 {
		return usageErrorf("--setpoint-step 0 is no step")
	}
	return nil
}

// over is the requirement with what the command line leaves open taken from base.
func (r *requirementFlags) over(base tune.Requirement) tune.Requirement {
	q := r.requirement
	q.Band = cmp.Or(q.Band, base.Band)
	q.Scan = cmp.Or(q.Scan, base.Scan)
	for _, f := range []struct{ mine, base **float64 }{
		{&q.Settling, &base.Settling}, {&q.Overshoot, &base.Overshoot},
		{&q.Damping, &base.Damping}, {&q.Ms, &base.Ms},
		{&q.InputMin, &base.InputMin}, {&q.InputMax, &base.InputMax},
		{&q.InputRate, &base.InputRate}, {&q.TempMax, &base.TempMax},
		{&q.SetpointStep, &base.SetpointStep},
	} {
		*f.mine = cmp.Or(*f.mine, *f.base)
	}
	return q
}

// dampingRatio reads a ratio above 0 and up to 1.
func dampingRatio(s string) (float64, error) {
	v, err := number(s)
	if err != nil || v <= 0 || v > 1 {
		return 0, errors.New("want a ratio above 0 and at most 1, such as 0.7")
	}
	return v, nil
}

// peakSensitivity reads an Ms; no loop with dead time reaches 1.
func peakSensitivity(s string) (float64, error) {
	v, err := number(s)
	if err != nil || v <= 1 {
		return 0, errors.New("want a number above 1, such as 1.6")
	}
	return v, nil
}
