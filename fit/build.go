package fit

import (
	"context"
	"fmt"
	"math"
	"os"
	"strconv"
	"time"

	"lagwright/data"
	"lagwright/ident"
)

// Fit fits the structures to the runs, several runs as one joint fit with the
// plant shared and baseline, drift and noise of their own, and returns the
// model card. The error wraps [ErrNoBump], [ErrConstant], [ErrTooShort] or
// [ErrNoAnswer] when the log cannot be fitted, [ErrOption] when an option is wrong.
func Fit(ctx context.Context, runs []*data.Run, o Options) (*Card, error) {
	o, err := o.withDefaults()
	if err != nil {
		return nil, err
	}
	recs, err := prepare(runs, o.Law)
	if err != nil {
		return nil, err
	}
	out, err := find(ctx, recs, o)
	if err != nil {
		return nil, err
	}
	out.sample()
	return out.card(ctx, runs), ctx.Err()
}

// card writes down what was found.
func (out *outcome) card(ctx context.Context, runs []*data.Run) *Card {
	o := out.opt
	c := &Card{
		Schema: CardSchema, Tool: o.Tool, Created: created(runs),
		Units:    CardUnits{Time: "s", Input: runs[0].Units.Input, Temperature: runs[0].Units.Temperature},
		InputLaw: o.Law.String(), Initial: out.initial.String(), NoiseModel: o.Noise,
		Drift: map[bool]string{false: "none", true: "linear"}[out.drift], BumpTime: o.BumpInstant,
		Confidence: o.Confidence,
	}
	c.Range = out.extent()
	c.Conditions.Airflow = condition(runs, func(r *data.Run) []float64 { return r.Airflow })
	c.Conditions.Inlet = condition(runs, func(r *data.Run) []float64 { return r.Inlet })
	for _, run := range runs {
		c.Source = append(c.Source, source(run))
	}
	for _, m := range out.models {
		c.Models = append(c.Models, out.model(m))
	}
	c.Selected = out.models[out.selected].st.String()
	out.writePlants(c)
	c.Profiles = out.profiles()
	c.Derived = out.derived()
	c.Warnings = out.warnings(ctx, runs)
	c.Cautions = c.cautions()
	return c
}

// created is SOURCE_DATE_EPOCH (reproducible-builds.org), else the last time
// of the logs, else the Unix epoch for logs without a clock.
func created(runs []*data.Run) string {
	if s := os.Getenv("SOURCE_DATE_EPOCH"); s != "" {
		if n, err := strconv.ParseInt(s, 10, 64); err == nil {
			return time.Unix(n, 0).UTC().Format(time.RFC3339)
		}
	}
	last := time.Unix(0, 0).UTC()
	for _, r := range runs {
		if r.Start.IsZero() || len(r.T) == 0 {
			continue
		}
		end := r.Start.Add(time.Duration(r.T[len(r.T)-1] * float64(time.Second)))
		if end.After(last) {
			last = end
		}
	}
	return last.Format(time.RFC3339)
}

func source(run *data.Run) CardSource {
	s := run.Source
	out := CardSource{File: s.File, SHA256: s.SHA256, Rows: s.Rows, FromS: s.FromS, ToS: s.ToS,
		Columns: map[string]string{"time": s.Columns.Time, "input": s.Columns.Input, "temperature": s.Columns.Temperature}}
	for name, v := range map[string]string{"setpoint": s.Columns.Setpoint, "mode": s.Columns.Mode, "airflow": s.Columns.Airflow, "inlet": s.Columns.Inlet} {
		if v != "" {
			out.Columns[name] = v
		}
	}
	if !run.Start.IsZero() {
		t := run.Start.Format(time.RFC3339Nano)
		out.Start = &t
	}
	return out
}

// extent is that of all logs.
func (out *outcome) extent() CardRange {
	e := out.recs[0].extent
	for _, r := range out.recs[1:] {
		e.Input = [2]float64{math.Min(e.Input[0], r.extent.Input[0]), math.Max(e.Input[1], r.extent.Input[1])}
		e.Temperature = [2]float64{math.Min(e.Temperature[0], r.extent.Temperature[0]), math.Max(e.Temperature[1], r.extent.Temperature[1])}
	}
	return e
}

// extent is the range of the finite values of a column over the runs.
func extent(runs []*data.Run, column func(*data.Run) []float64) [2]float64 {
	lo, hi := math.Inf(1), math.Inf(-1)
	for _, r := range runs {
		from, to := rangeOf(column(r))
		lo, hi = math.Min(lo, from), math.Max(hi, to)
	}
	return [2]float64{lo, hi}
}

// rangeOf is the range of the finite values of a column, infinite ends first where there
// are none.
func rangeOf(x []float64) (lo, hi float64) {
	lo, hi = math.Inf(1), math.Inf(-1)
	for _, v := range x {
		if v < lo && !math.IsInf(v, -1) {
			lo = v
		}
		if v > hi && !math.IsInf(v, 1) {
			hi = v
		}
	}
	return lo, hi
}

func condition(runs []*data.Run, column func(*data.Run) []float64) *[2]float64 {
	e := extent(runs, column)
	if e[0] > e[1] {
		return nil
	}
	return &e
}

// gainUnit is the unit of the gain: temperature per input, per input squared
// under the power law, per input and second for the integrator.
func (out *outcome) gainUnit(st ident.Structure) string {
	u := out.recs[0].run.Units
	in := u.Input
	if in == "" {
		in = "input"
	}
	if out.opt.Law == ident.Power {
		in += "²"
	}
	temp := temperatureStep(u.Temperature)
	if st.Integrating() {
		return temp + "/(" + in + "·s)"
	}
	return temp + "/" + in
}

// temperatureStep is the unit of a temperature difference.
func temperatureStep(unit string) string {
	if unit == "degC" || unit == "K" {
		return "K"
	}
	if unit == "" {
		return "temperature unit"
	}
	return unit
}

// numberOrNull is v for JSON: nil for what is not a number.
func numberOrNull(v float64) *float64 {
	if math.IsNaN(v) || math.IsInf(v, 0) {
		return nil
	}
	return &v
}

// profiles are those of the selected model.
func (out *outcome) profiles() []Profile {
	b := out.models[out.selected]
	var list []Profile
	for i, trail := range b.trails {
		if len(trail) < 3 {
			continue
		}
		name := "gain"
		switch {
		case i == len(b.est)-1:
			name = "dead_time"
		case i > 0:
			name = fmt.Sprintf("lag%d", i)
		}
		p := Profile{Parameter: name}
		for _, v := range trail {
			p.Value, p.Root = append(p.Value, v[0]), append(p.Root, v[1])
		}
		list = append(list, p)
	}
	return list
}

func parameter(name, unit string, e estimate) Parameter {
	p := Parameter{Name: name, Unit: unit, Value: e.value, SE: numberOrNull(e.se), Low: numberOrNull(e.low), High: numberOrNull(e.high), Fixed: e.fixed}
	if e.fixed {
		p.SE = nil
	}
	return p
}

// model writes one fitted structure.
func (out *outcome) model(b *bounded) Model {
	if b.written != nil {
		return *b.written
	}
	b.activate()
	m := Model{Structure: b.st.String(), LogLik: b.loglik, AICc: b.aicc, BIC: b.bic}
	unit := out.recs[0].run.Units.Temperature
	m.Parameters = append(m.Parameters, parameter("gain", out.gainUnit(b.st), b.est[0]))
	for i := range b.e.nl {
		m.Parameters = append(m.Parameters, parameter(fmt.Sprintf("lag%d", i+1), "s", b.est[i+1]))
	}
	m.Parameters = append(m.Parameters, parameter("dead_time", "s", out.deadTime(b)))
	for r, lin := range b.lin {
		tag := ""
		if r > 0 {
			tag = fmt.Sprintf("_%d", r+1)
		}
		for j, name := range []string{"baseline", "drift"} {
			if j >= len(lin) {
				break
			}
			u := unit
			if name == "drift" {
				u = temperatureStep(unit) + "/s"
			}
			m.Parameters = append(m.Parameters, parameter(name+tag, u, lin[j]))
		}
	}
	m.Covariance = out.covariance(b)
	out.residuals(b, &m)
	b.written = &m
	return m
}

// deadTime is the dead time as stated. With an unknown bump instant the change
// a row shows was made somewhere since the row before, so that the true dead
// time is the fitted one plus anything from nothing to one sampling interval.
func (out *outcome) deadTime(b *bounded) estimate {
	e := b.est[len(b.est)-1]
	if out.opt.BumpInstant != "unknown" || e.fixed {
		return e
	}
	h := out.longestStep()
	e.value += h / 2
	e.high += h
	e.se = math.Sqrt(e.se*e.se + h*h/12)
	return e
}

// longestStep is the longest sampling interval of the logs, s.
func (out *outcome) longestStep() float64 {
	h := 0.0
	for _, r := range out.recs {
		h = math.Max(h, r.step)
	}
	return h
}

// covariance is the Wald covariance of the free parameters among gain, lags
// and dead time, then the variances of the linear columns.
func (out *outcome) covariance(b *bounded) [][]float64 {
	var idx []int
	for i, e := range b.est {
		if !e.fixed {
			idx = append(idx, i)
		}
	}
	n := len(idx)
	for _, lin := range b.lin {
		n += len(lin)
	}
	cov := columns(n, n)
	for i, a := range idx {
		for j, c := range idx {
			cov[i][j] = b.cov[a][c]
		}
		if a == len(b.est)-1 {
			d := out.deadTime(b)
			cov[i][i] = d.se * d.se
		}
	}
	k := len(idx)
	for _, lin := range b.lin {
		for _, e := range lin {
			cov[k][k] = e.se * e.se
			k++
		}
	}
	for i := range cov {
		for j := range cov[i] {
			if math.IsNaN(cov[i][j]) || math.IsInf(cov[i][j], 0) {
				cov[i][j] = 0
			}
		}
	}
	return cov
}

// finite replaces what is not a number.
func finite(v, other float64) float64 {
	if math.IsNaN(v) || math.IsInf(v, 0) {
		return other
	}
	return v
}

// noise pools the records' noise: variances by their mean, the correlation
// time by its logarithm.
func (out *outcome) noise(b *bounded) Noise {
	var total, white, walk, logTC, weight float64
	for i, s := range b.shapes {
		v := b.sigma2[i]
		total += v
		walk += v * s.walk * b.e.recs[i].span
		white += v * s.white
		if s.white < 1 {
			logTC += (1 - s.white) * math.Log(s.tc)
			weight += 1 - s.white
		}
	}
	n := float64(len(b.e.recs))
	out2 := Noise{SD: math.Sqrt(total / n), WhiteSD: math.Sqrt(white / n), WanderSD: math.Sqrt(walk / n)}
	if weight > 0 {
		out2.CorrelationTime = math.Exp(logTC / weight)
	}
	return out2
}

// writePlants puts the plausible plants into the card. Every plant is written
// as a chain: gain, as many lags as the longest has (0 for an element that it
// lacks), dead time.
func (out *outcome) writePlants(c *Card) {
	c.Plants.Structure = c.Selected
	c.Plants.Rand = out.opt.Rand
	most := 0
	for _, d := range out.draws {
		if d.st.String() != c.Selected {
			c.Plants.Structure = "mixed"
		}
		most = max(most, d.st.Order())
	}
	if c.Plants.Structure != "mixed" {
		if st, err := ident.ParseStructure(c.Selected); err == nil {
			most = st.NumLags()
		}
	}
	c.Plants.Parameters = []string{"gain"}
	for i := range most {
		c.Plants.Parameters = append(c.Plants.Parameters, fmt.Sprintf("lag%d", i+1))
	}
	c.Plants.Parameters = append(c.Plants.Parameters, "dead_time")
	c.Plants.Values = [][]float64{}
	r := rng(out.opt.Rand, "instant", 0)
	for _, d := range out.draws {
		row := make([]float64, most+2)
		row[0] = d.gain
		n := len(d.eta) - 1
		for i := range most {
			switch {
			case c.Plants.Structure != "mixed" || !d.st.Equal():
				if i < n {
					row[i+1] = d.eta[i]
				}
			case i < d.st.Order():
				row[i+1] = d.eta[0]
			}
		}
		row[most+1] = d.eta[n]
		if out.opt.BumpInstant == "unknown" {
			row[most+1] += r.Float64() * out.longestStep()
		}
		c.Plants.Values = append(c.Plants.Values, row)
	}
}
