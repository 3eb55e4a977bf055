package fit

import (
	"context"
	"fmt"
	"math"
	"strings"

	"lagwright/data"
)

// warn adds a warning: its code, the parameter it concerns ("" for the whole),
// and in words what was seen, what it means, what to do.
type warn func(code, parameter, format string, args ...any)

// gather returns a warn that appends to the list.
func gather(list *[]Warning) warn {
	return func(code, parameter, format string, args ...any) {
		*list = append(*list, Warning{Code: code, Parameter: parameter, Text: fmt.Sprintf(format, args...)})
	}
}

// warnings lists what limits the card.
func (out *outcome) warnings(ctx context.Context, runs []*data.Run) []Warning {
	list := []Warning{}
	add := gather(&list)
	b := out.models[out.selected]
	m := out.model(b)
	out.openEnds(b, add)
	out.alike(add)
	out.warnNoise(&m, add)
	out.warnMisfit(ctx, runs, b, &m, add)
	out.warnTest(runs, b, &m, add)
	if m.FitPercent < littleExplained {
		add("little-explained", "", "the plant alone explains little of the temperature (fit %s %%), the rest is taken for drift and noise: the model may be far from the heater; look at the figure before anything else", figure(m.FitPercent, 3))
	}
	for _, run := range runs {
		if switched(run) {
			add("switched-input", "", "%s: the input is switched on and off and was not averaged: a model of every switching is easily wrong by whole cycles; read the log with --cycle and the length of the cycle", run.Source.File)
		}
	}
	for _, run := range runs {
		for _, n := range run.Quality.Notes {
			add(n.Code, "", "%s: %s", run.Source.File, n.Text)
		}
	}
	return list
}

// littleExplained is the fit, in percent, below which a plant that is said to be
// known to a few percent deserves doubt (common practice, no source).
const littleExplained = 40

// warnNoise warns of noise that the noise model does not describe.
func (out *outcome) warnNoise(m *Model, add warn) {
	if out.opt.Noise == "white" && m.Residuals.Lag1Correlation > 0.2 {
		add("white-intervals", "", "the residuals are correlated (%s from row to row) but the fit was told they are white: the bounds are too narrow; fit with --noise auto", figure(m.Residuals.Lag1Correlation, 2))
	}
	if m.Residuals.LjungBoxP < 0.01 {
		add("residual-correlation", "", "what is left after the noise model is still correlated (Ljung-Box p %s): the noise is not a first-order one, or the structure misses something; treat the bounds as too narrow", probability(m.Residuals.LjungBoxP))
	}
	for _, r := range out.recs {
		if q := r.run.Quality.Quantum; q > 0 && q > 2*m.Noise.SD {
			add("coarse-quantum", "", "%s: the temperature is logged in steps of %s, coarser than its noise (%s): small answers are lost between the steps; log with more digits",
				r.run.Source.File, figure(q, 3), figure(m.Noise.SD, 2))
		}
	}
}

// warnMisfit warns of what a linear plant shared by all logs cannot follow.
func (out *outcome) warnMisfit(ctx context.Context, runs []*data.Run, b *bounded, m *Model, add warn) {
	if !out.warnNonlinear(runs, b, m, add) {
		return
	}
	if n := len(runs); n > 1 && n <= mostApart {
		c := &Card{Initial: out.initial.String(), Drift: map[bool]string{false: "none", true: "linear"}[out.drift]}
		if a := compareApart(ctx, runs, out.opt, c, m); a != nil {
			a.warnDiffer(out.opt.Confidence, add)
		}
	}
}

// warnNonlinear warns of what a linear plant cannot follow in any log; ok is false
// where there is no plant.
func (out *outcome) warnNonlinear(runs []*data.Run, b *bounded, m *Model, add warn) (ok bool) {
	plant, err := m.Plant()
	if err != nil {
		return false
	}
	plant.DeadTime = b.est[len(b.est)-1].value // on the clock of the rows
	fit := misfit{plant: plant, noise: m.Noise, start: out.initial, drift: out.drift, law: out.opt.Law}
	for _, e := range b.est {
		fit.held = append(fit.held, e.fixed)
	}
	scenes := fit.scenes(out.recs)
	if p := m.Residuals.InputCorrelationP; p < 0.01 {
		looks := fit.looks(scenes, temperatureStep(runs[0].Units.Temperature))
		if looks != "" {
			looks = ", " + looks
		}
		add("input-correlation", "", "the misfit follows the input (p %s)%s: the structure, the input law or the dead time is not right over the whole log; look at the residuals after each bump", probability(p), looks)
	}
	if out.opt.BumpInstant != "unknown" { // each bump then has an instant of its own
		fit.upDown(scenes, add)
	}
	fit.curved(scenes, out.extent().Input, CardUnits{Input: runs[0].Units.Input, Temperature: runs[0].Units.Temperature}, add)
	return true
}

func (out *outcome) warnStart(add warn) {
	add("not-at-rest", "", "the log does not start at rest: an earlier input was fitted along and costs width; start the next test from a steady state")
}

// warnTest warns of how the test was made.
func (out *outcome) warnTest(runs []*data.Run, b *bounded, m *Model, add warn) {
	if out.initial == earlier {
		out.warnStart(add)
	}
	if out.drift && out.opt.Drift == "auto" {
		lin := b.lin[0]
		if len(lin) > 1 && math.Abs(lin[1].value) > 3*lin[1].se { // closed loops make two common
			add("drift", "drift", "the baseline drifts by %s over the log: it was fitted along and costs width; let the heater settle before the bump",
				quantity(lin[1].value*out.recs[0].span, temperatureStep(runs[0].Units.Temperature), 3))
		}
	}
	if out.opt.BumpInstant == "unknown" {
		add("bump-instant", "dead_time", "the instant of the bump inside its sampling interval is not known: the dead time is stated %s wider; log faster, or log the input at the instant it changes", duration(out.longestStep()))
	}
	for _, run := range runs {
		if loop := loopOf(run); loop.State == "closed" {
			out.warnClosed(run, loop, b, add)
		}
	}
}

// warnClosed warns of a log made in closed loop, where the controller moves
// the input against the noise, and little else may move it.
func (out *outcome) warnClosed(run *data.Run, loop Loop, b *bounded, add warn) {
	name := run.Source.File
	if out.opt.Noise == "white" {
		add("closed-loop-white", "gain", "%s: %s: with --noise white the controller's answers to the noise count as the plant's and shift gain and lags; fit with --noise auto", name, loop.Reason)
	}
	g := b.est[0]
	half := (g.high - g.low) / 2
	if g.fixed || half <= wanted["gain"][0]*math.Abs(g.value) {
		return
	}
	known := "the gain has no bound"
	switch {
	case half > math.Abs(g.value):
		known = "the gain is known no better than to ±100 %"
	case !math.IsNaN(half):
		known = fmt.Sprintf("the gain is known to ±%s %% only", figure(100*half/math.Abs(g.value), 2))
	}
	add("closed-loop", "gain", "%s: %s and moved the input too little to tell the plant from the noise: %s; make a bump in manual, or a larger step of the setpoint", name, loop.Reason, known)
}

// openEnds warns of intervals that the log leaves open.
func (out *outcome) openEnds(b *bounded, add warn) {
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
		said := parameterWords(names[i])
		switch {
		case i == 0 && high && b.st.Integrating():
			add("weak-bump", names[i], "the log sets no upper bound on the slope: the answer is lost in the noise; make a larger bump")
		case i == 0 && low:
			add("weak-bump", names[i], "the log does not tell the gain from zero: the answer is lost in the noise; make a larger bump")
		case i == 0 && high:
			hold := 4*total(elements(b.st, b.eta())) + b.est[len(b.est)-1].value
			add("short-record", names[i], "the record shows no plateau: it sets no upper bound on the gain; hold the next bump at least %s", duration(roundUp(hold)))
		case i == len(b.est)-1 && low:
			add("dead-time-unresolved", names[i], "the dead time cannot be told from zero: its interval is one-sided; log faster if it matters")
		case high:
			add("short-record", names[i], "the record sets no upper bound on %s: it ends too early; hold the next bump longer", said)
		case low:
			add("lag-unresolved", names[i], "%s cannot be told from zero: its interval is one-sided; log at %s or faster to see it, or use a simpler structure", said, duration(roundDown(math.Max(e.high/5, 1e-3))))
		}
	}
}

// alike says which structures the log cannot tell from the selected one.
func (out *outcome) alike(add warn) {
	sel := out.models[out.selected]
	var names []string
	for i, m := range out.models {
		if i != out.selected && m.aicc < sel.aicc+2 {
			names = append(names, m.st.String())
		}
	}
	if len(names) == 0 {
		return
	}
	include := "the plausible plants include all of them"
	for i, m := range out.models {
		if i != out.selected && m.aicc < sel.aicc+2 && m.st.Integrating() != sel.st.Integrating() {
			include = "the plausible plants are of those that rest where it does"
		}
	}
	add("structures-alike", "", "the log cannot tell %s from %s; %s was taken, the simplest, and %s; faster rows or a larger bump would tell them apart", sel.st, strings.Join(names, ", "), sel.st, include)
}
