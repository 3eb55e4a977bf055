package fit

import (
	"context"
	"math"

	"lagwright/data"
	"lagwright/ident"
)

// mostApart is the number of logs up to which a joint fit is compared with fits
// apart.
const mostApart = 20

// agreement compares a joint fit of several logs with fits of each alone.
type agreement struct {
	structure ident.Structure
	runs      []*data.Run
	apart     []*Model
	statistic float64 // twice what the fits apart gain in log likelihood
	dof       int
	p         float64 // of the likelihood-ratio test that one plant made all logs
}

// compareApart fits every log alone, with the structure, the initial state and
// the drift of the joint fit, and tests by the likelihood ratio whether one
// plant made them all: under one plant
//
//	2·(Σ loglik apart - loglik joint) ~ χ², (logs-1)·(free of gain, lags, dead time)
//
// It returns nil where a log cannot be fitted alone.
func compareApart(ctx context.Context, runs []*data.Run, o Options, c *Card, joint *Model) *agreement {
	st, err := ident.ParseStructure(joint.Structure)
	if err != nil {
		return nil
	}
	a := &agreement{structure: st, runs: runs}
	o.Structure, o.Initial, o.Drift = joint.Structure, c.Initial, c.Drift
	o.Plants, o.Progress = -1, nil
	loglik := 0.0
	for _, run := range runs {
		card, err := Fit(ctx, []*data.Run{run}, o)
		if err != nil {
			return nil
		}
		m, _ := card.Model(card.Selected)
		loglik += m.LogLik
		a.apart = append(a.apart, m)
	}
	free := 0
	for _, q := range joint.Parameters {
		if !q.Fixed && (q.Name == "gain" || q.Name == "dead_time" || lagIndex(q.Name) >= 0) {
			free++
		}
	}
	a.statistic = 2 * (loglik - joint.LogLik)
	a.dof = (len(runs) - 1) * free
	a.p = chi2Tail(a.statistic, float64(a.dof))
	return a
}

// oddOne is the log and the quantity that stand out most from the others
// together, by Wald's statistic z; z is 0 where nothing can be compared.
func (a *agreement) oddOne() (log int, q comparison, z float64) {
	values := make([][]comparison, len(a.apart))
	for i, m := range a.apart {
		values[i] = m.compared(a.structure)
	}
	for j := range values[0] {
		for i := range values {
			var sum, weight float64
			for k := range values {
				if w := 1 / (values[k][j].se * values[k][j].se); k != i && !math.IsInf(w, 0) && !math.IsNaN(w) {
					sum += w * values[k][j].value
					weight += w
				}
			}
			v := values[i][j]
			v.others = sum / weight
			if s := math.Abs(v.value-v.others) / math.Sqrt(v.se*v.se+1/weight); s > math.Abs(z) && !math.IsInf(s, 0) {
				log, q, z = i, v, s
			}
		}
	}
	return log, q, z
}

// comparison is a quantity that logs are compared by.
type comparison struct {
	name, unit string
	value, se  float64
	others     float64
}

// compared are gain, sum of lags and dead time with their standard errors.
func (m *Model) compared(st ident.Structure) []comparison {
	times := 1.0
	if st.Equal() {
		times = float64(st.Order())
	}
	var out []comparison
	sum := comparison{name: "the sum of lags", unit: "s"}
	variance, k := 0.0, 0
	var lagRows []int
	for _, q := range m.Parameters {
		row := -1
		if !q.Fixed {
			row = k
			k++
		}
		se := 0.0
		if row >= 0 && row < len(m.Covariance) {
			se = math.Sqrt(m.Covariance[row][row])
		}
		switch {
		case q.Name == "gain":
			out = append(out, comparison{name: "the gain", unit: q.Unit, value: q.Value, se: se})
		case q.Name == "dead_time":
			out = append(out, comparison{name: "the dead time", unit: "s", value: q.Value, se: se})
		case lagIndex(q.Name) >= 0:
			sum.value += times * q.Value
			if row >= 0 {
				lagRows = append(lagRows, row)
			}
		}
	}
	for _, i := range lagRows {
		for _, j := range lagRows {
			variance += m.Covariance[i][j]
		}
	}
	if sum.value > 0 {
		sum.se = times * math.Sqrt(math.Max(variance, 0))
		out = append(out, sum)
	}
	return out
}

// warnDiffer warns of logs that one plant did not make: likelihood ratio and
// Wald's comparison must both say so.
func (a *agreement) warnDiffer(confidence float64, add warn) {
	log, q, z := a.oddOne()
	if !(a.p < misfitLevel) || z < normalQuantile(1-misfitLevel/2) {
		return
	}
	name := a.runs[log].Source.File
	if n := a.runs[log].Source.Name; n != "" {
		name += ", run " + n
	}
	half := normalQuantile((1+confidence)/2) * q.se
	add("logs-differ", "", "the logs do not share one plant (p = %s): %s differs most, in %s: %s ± %s against %s of the others; the joint model describes none of them well: fit them apart and look for what changed, airflow, filter, load or sensor",
		figure(a.p, 2), name, q.name, quantity(q.value, q.unit, 3), figure(half, 2), figure(q.others, 3))
}
