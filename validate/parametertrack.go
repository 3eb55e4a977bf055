package validate

import (
	"fmt"
	"math"
	"math/rand/v2"
	"strings"

	"gonum.org/v1/gonum/stat/distuv"

	"lagwright/fit"
)

// newRand returns the generator of one stream of a seed.
func newRand(seed, stream uint64) *rand.Rand { return rand.New(rand.NewPCG(seed, stream)) }

// A track is one parameter over the runs, and the scale it is tested on.
type track struct {
	name, unit string
	points     []DriftPoint
	log        bool    // tested as logarithm, after the sign is taken off
	sign       float64 // of all values, when log
	history    history
	at         []int // history's runs
	found      levels
}

// tracks collects gain, lags and dead time run by run. A parameter that was
// fixed is left out.
func (d *Drift) tracks(fitted []estimate) []*track {
	var out []*track
	for _, p := range fitted[0].parameters {
		if !(p.Name == "gain" || p.Name == "dead_time" || strings.HasPrefix(p.Name, "lag")) || p.Fixed {
			continue
		}
		tr := &track{name: p.Name, unit: p.Unit, log: p.Name != "dead_time"}
		for _, e := range fitted {
			tr.points = append(tr.points, pointOf(e.parameters, p.Name))
		}
		tr.scale()
		tr.collect(d)
		out = append(out, tr)
	}
	return out
}

func pointOf(parameters []fit.Parameter, name string) DriftPoint {
	for _, p := range parameters {
		if p.Name == name {
			v := p.Value
			return DriftPoint{Value: &v, Low: p.Low, High: p.High}
		}
	}
	return DriftPoint{}
}

// scale decides on the logarithm: all intervals on one side of zero. A gain
// whose sign is not sure is tested as it is.
func (tr *track) scale() {
	tr.sign = 1
	if !tr.log {
		return
	}
	negative, positive := 0, 0
	for _, p := range tr.points {
		switch {
		case p.Low == nil || p.High == nil:
		case *p.Low > 0:
			positive++
		case *p.High < 0:
			negative++
		default:
			negative, positive = negative+1, positive+1
		}
	}
	if tr.name != "gain" { // a lag's interval that reaches zero has no logarithm and is left out
		return
	}
	switch {
	case negative > 0 && positive > 0:
		tr.log = false
	case negative > 0:
		tr.sign = -1
	}
}

// to and from are the scale and its inverse.
func (tr *track) to(v float64) float64 {
	if tr.log {
		return math.Log(tr.sign * v)
	}
	return v
}

func (tr *track) from(x float64) float64 {
	if tr.log {
		return tr.sign * math.Exp(x)
	}
	return x
}

// collect takes the runs whose interval has two ends: the standard error on
// the scale is its width over twice the normal quantile.
func (tr *track) collect(d *Drift) {
	z := distuv.UnitNormal.Quantile((1 + d.Confidence) / 2)
	for i, p := range tr.points {
		if p.Value == nil || p.Low == nil || p.High == nil {
			continue
		}
		x, se := tr.to(*p.Value), math.Abs(tr.to(*p.High)-tr.to(*p.Low))/(2*z)
		if bad(x) || bad(se) || se == 0 {
			continue
		}
		tr.history.t = append(tr.history.t, d.Runs[i].Day)
		tr.history.x = append(tr.history.x, x)
		tr.history.se = append(tr.history.se, se)
		tr.at = append(tr.at, i)
	}
}

// tests is the number of tests that the parameter allows.
func (tr *track) tests() int { return min(2, max(0, len(tr.at)-1)) }

// judge tests the parameter; tests is the number over all parameters, by
// which each p-value is multiplied (Bonferroni), so that the chance of any
// false alarm stays at the rate asked whatever the parameters share.
func (tr *track) judge(d *Drift, tests int, rng *rand.Rand) DriftParameter {
	p := DriftParameter{Name: tr.name, Unit: tr.unit, Points: tr.points, Tested: len(tr.at), Scatter: 1}
	if tr.tests() == 0 {
		p.Text = fmt.Sprintf("%s: %d of %d runs bound it on both sides: too few to test", wordFor(tr.name), len(tr.at), len(tr.points))
		return p
	}
	step, slope := tr.history.test(rng)
	correct := func(c change) float64 { return min(1, c.p*float64(tests)) }
	first := tr.at[step.first]
	p.Step = tr.change(step, 1, correct(step), d)
	p.Step.Run = &first
	p.Alarm = p.Step.Alarm
	if tr.tests() > 1 {
		per := 1.0
		if d.Clock {
			per = 30
		}
		p.Slope = tr.change(slope, per, correct(slope), d)
		p.Alarm = p.Alarm || p.Slope.Alarm
	} else {
		slope.taken, slope.p = 0, 1
	}
	found := levels{}
	switch {
	case p.Step.Alarm && (p.Slope == nil || !p.Slope.Alarm || step.taken >= slope.taken):
		found.step = &step
	case p.Alarm:
		found.slope = &slope
	}
	tr.found = found
	p.Scatter = tr.chart(p.Points, found)
	p.Text = tr.text(p, found, d, tests)
	return p
}

// change writes one test's outcome in the parameter's unit and in percent.
func (tr *track) change(c change, per, p float64, d *Drift) *Change {
	z := distuv.UnitNormal.Quantile((1 + d.Confidence) / 2)
	out := &Change{P: p, Alarm: p <= d.FalseAlarm}
	e := [3]float64{c.effect * per, (c.effect - z*c.se) * per, (c.effect + z*c.se) * per}
	if bad(e[1]) || bad(e[2]) { // all runs at one time: no slope
		e = [3]float64{}
	}
	out.Size, out.SizeLow, out.SizeHigh = e[0], e[1], e[2]
	if !tr.log {
		return out
	}
	level := tr.levelBefore(c)
	for i, to := range []*float64{&out.Size, &out.SizeLow, &out.SizeHigh} {
		*to = tr.from(level+e[i]) - tr.from(level)
	}
	if out.SizeLow > out.SizeHigh { // a negative gain
		out.SizeLow, out.SizeHigh = out.SizeHigh, out.SizeLow
	}
	percent := func(x float64) *float64 { return finite(100 * math.Expm1(x)) }
	out.Percent, out.PercentLow, out.PercentHigh = percent(e[0]), percent(e[1]), percent(e[2])
	return out
}

// levelBefore is the weighted mean of the runs before a step; for a slope
// (first is 0) of all.
func (tr *track) levelBefore(c change) float64 {
	to := c.first
	if to == 0 {
		to = len(tr.at)
	}
	return weightedMean(tr.history.x[:to], tr.history.weights()[:to])
}

func weightedMean(x, w []float64) float64 {
	var sum, weight float64
	for i := range x {
		sum += w[i] * x[i]
		weight += w[i]
	}
	return sum / weight
}

// levels is the change that the chart draws: at most one is set.
type levels struct{ step, slope *change }

// chart sets each tested run's centre and limits, 3 standard errors of the
// run about the centre, and returns the scatter ratio about the centres.
func (tr *track) chart(points []DriftPoint, found levels) (scatter float64) {
	h, w := tr.history, tr.history.weights()
	mean, centre := weightedMean(h.x, w), weightedMean(h.t, w)
	var left, fewer float64
	for k, i := range tr.at {
		level := mean
		switch {
		case found.step != nil && k < found.step.first:
			level = weightedMean(h.x[:found.step.first], w[:found.step.first])
		case found.step != nil:
			level = weightedMean(h.x[found.step.first:], w[found.step.first:])
		case found.slope != nil:
			level = mean + found.slope.effect*(h.t[k]-centre)
		}
		half := 3 / math.Sqrt(w[k])
		points[i].Centre = finite(tr.from(level))
		least, most := tr.from(level-half), tr.from(level+half)
		points[i].Least, points[i].Most = finite(min(least, most)), finite(max(least, most))
		left += (h.x[k] - level) * (h.x[k] - level) / (h.se[k] * h.se[k])
		fewer = 1
		if found.step != nil || found.slope != nil {
			fewer = 2
		}
	}
	if n := float64(len(tr.at)); n > fewer {
		return max(1, math.Sqrt(left/(n-fewer)))
	}
	return 1
}
