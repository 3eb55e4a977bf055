package fit

import (
	"math"
	"sort"

	"gonum.org/v1/gonum/floats"

	"lagwright/ident"
)

// derived returns quantities computed from the selected model, with bounds
// from the plausible plants of its structure: their quantiles keep the ties
// between the parameters that separate intervals lose.
func (out *outcome) derived() []Derived {
	b := out.models[out.selected]
	st := b.st
	unit := out.gainUnit(st)
	var list []Derived
	eta := b.eta()
	dead := out.deadTime(b).value
	instant, within := rng(out.opt.Rand, "instant", 1), 0.0 // of a bump, before its row
	if out.opt.BumpInstant == "unknown" && !b.est[len(b.est)-1].fixed {
		within = out.longestStep()
	}
	add := func(name, unit string, f func(gain float64, elements []float64, dead float64) float64) {
		best := f(b.est[0].value, elements(st, eta), dead)
		d := Derived{Name: name, Unit: unit, Value: best}
		var v []float64
		for _, p := range out.draws {
			if p.st.Integrating() == st.Integrating() {
				v = append(v, f(p.gain, elements(p.st, p.eta), p.eta[len(p.eta)-1]+within*instant.Float64()))
			}
		}
		if len(v) >= 40 {
			sort.Float64s(v)
			// Plants of other structures may lie all on one side of the best fit.
			d.Low = numberOrNull(math.Min(quantileOf(v, (1-out.opt.Confidence)/2), best))
			d.High = numberOrNull(math.Max(quantileOf(v, (1+out.opt.Confidence)/2), best))
		}
		if !math.IsNaN(best) && !math.IsInf(best, 0) {
			list = append(list, d)
		}
	}
	if !st.Integrating() {
		add("sum_of_lags", "s", func(_ float64, l []float64, _ float64) float64 { return total(l) })
		add("total_delay", "s", func(_ float64, l []float64, d float64) float64 { return halfRuleDelay(l, d) })
		// Steepest rise of the single-lag plant of the half rule: K/(lag1 + lag2/2).
		add("initial_slope", unit+"/s", func(g float64, l []float64, _ float64) float64 {
			t := l[0]
			if len(l) > 1 {
				t += l[1] / 2
			}
			return g / t
		})
	}
	if out.opt.Law == ident.Power {
		u := 0.0
		n := 0
		for _, v := range out.recs[0].run.U {
			u += v
			n++
		}
		u /= float64(n)
		add("local_gain", temperatureStep(out.recs[0].run.Units.Temperature)+"/"+out.recs[0].run.Units.Input,
			func(g float64, _ []float64, _ float64) float64 { return g * ident.Power.Slope(u) })
	}
	return list
}

// halfRuleDelay is the dead time of the single-lag plant that stands for a
// chain by the half rule (Skogestad 2003): half the second lag and every later
// one count as dead time. lags are longest first, in s.
func halfRuleDelay(lags []float64, deadTime float64) float64 {
	for i, v := range lags {
		switch {
		case i == 1:
			deadTime += v / 2
		case i > 1:
			deadTime += v
		}
	}
	return deadTime
}

func total(x []float64) float64 { return floats.Sum(x) }

// elements lists every first-order element's lag, longest first.
func elements(st ident.Structure, eta []float64) []float64 {
	if !st.Equal() {
		return eta[:len(eta)-1]
	}
	out := make([]float64, st.Order())
	for i := range out {
		out[i] = eta[0]
	}
	return out
}

// quantileOf interpolates the quantile of sorted values (type 7 of Hyndman
// and Fan 1996, from memory).
func quantileOf(v []float64, p float64) float64 {
	h := p * float64(len(v)-1)
	i := int(math.Floor(h))
	if i+1 >= len(v) {
		return v[len(v)-1]
	}
	return v[i] + (h-float64(i))*(v[i+1]-v[i])
}
