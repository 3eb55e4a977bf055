package fit

import (
	"fmt"
	"math"
	"strings"

	"lagwright/data"
)

// warnings lists what limits the card: what was seen, what it means, what to do.
func (out *outcome) warnings(runs []*data.Run) []Warning {
	var list []Warning
	add := func(code, parameter, format string, args ...any) {
		list = append(list, Warning{Code: code, Parameter: parameter, Text: fmt.Sprintf(format, args...)})
	}
	b := out.models[out.selected]
	m := out.model(b)
	out.openEnds(b, add)
	out.alike(add)
	if out.opt.Noise == "white" && m.Residuals.Lag1Correlation > 0.2 {
		add("white-intervals", "", "the residuals are correlated (%.2f from row to row) but the fit was told they are white: the bounds are too narrow; fit with --noise auto", m.Residuals.Lag1Correlation)
	}
	if m.Residuals.LjungBoxP < 0.01 {
		add("residual-correlation", "", "what is left after the noise model is still correlated (Ljung-Box p = %.2g): the noise is not a first-order one, or the structure misses something; treat the bounds as too narrow", m.Residuals.LjungBoxP)
	}
	if m.Residuals.InputCorrelationP < 0.01 {
		add("input-correlation", "", "the misfit follows the input (p = %.2g): the structure, the input law or the dead time is not right over the whole log; look at the residuals after each bump", m.Residuals.InputCorrelationP)
	}
	if out.initial == earlier {
		add("not-at-rest", "", "the log does not start at rest: an earlier input was fitted along; start the next test from a steady state")
	}
	if out.drift && out.opt.Drift == "auto" {
		lin := b.lin[0]
		if len(lin) > 1 && lin[1].low*lin[1].high > 0 {
			add("drift", "drift", "the baseline drifts by %.3g %s over the log: it was fitted along and costs width; let the heater settle before the bump", lin[1].value*out.recs[0].span, temperatureStep(out.recs[0].run.Units.Temperature))
		}
	}
	if out.opt.BumpInstant == "unknown" {
		add("bump-instant", "dead_time", "the instant of the bump inside its sampling interval is not known: the dead time is stated %.3g s wider", out.recs[0].step)
	}
	for _, r := range out.recs {
		if q := r.run.Quality.Quantum; q > 0 && q > 2*m.Noise.SD {
			add("coarse-quantum", "", "%s: the temperature is logged in steps of %.3g, coarser than its noise (%.2g): log with more digits", r.run.Source.File, q, m.Noise.SD)
		}
	}
	for _, run := range runs {
		for _, n := range run.Quality.Notes {
			add(n.Code, "", "%s: %s", run.Source.File, n.Text)
		}
	}
	return list
}

// openEnds warns of intervals that the log leaves open.
func (out *outcome) openEnds(b *bounded, add func(code, parameter, format string, args ...any)) {
	names := []string{"gain"}
	for i := range b.e.nl {
		names = append(names, fmt.Sprintf("lag%d", i+1))
	}
	names = append(names, "dead_time")
	for i, e := range b.est {
		low, high := math.IsNaN(e.low), math.IsNaN(e.high)
		if i == 0 && b.p.gain < 0 {
			low, high = high, low
		}
		switch {
		case i == 0 && high:
			add("short-record", names[i], "the record shows no plateau: it sets no upper bound on the gain; hold the next bump at least %.3g s", 4*(total(elements(b.st, b.p.eta))+b.p.eta[len(b.p.eta)-1]))
		case i == 0 && low:
			add("weak-bump", names[i], "the log does not tell the gain from zero: make a larger bump")
		case i == len(b.est)-1 && low:
			add("dead-time-unresolved", names[i], "the dead time cannot be told from zero: its interval is one-sided")
		case high:
			add("short-record", names[i], "the record sets no upper bound on %s: hold the next bump longer", names[i])
		case low:
			add("lag-unresolved", names[i], "%s cannot be told from zero: its interval is one-sided; log at %.2g s or faster to see it, or use a simpler structure", names[i], math.Max(e.high/5, 1e-3))
		}
	}
}

// alike says which structures the log cannot tell from the selected one.
func (out *outcome) alike(add func(code, parameter, format string, args ...any)) {
	sel := out.models[out.selected]
	var names []string
	for i, m := range out.models {
		if i != out.selected && m.aicc < sel.aicc+2 {
			names = append(names, m.st.String())
		}
	}
	if len(names) > 0 {
		add("structures-alike", "", "the log cannot tell %s from %s; %s was taken, and the plausible plants include all of them", sel.st, strings.Join(names, ", "), sel.st)
	}
}
