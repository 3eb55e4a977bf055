package tune

import (
	"context"
	"math"
	"testing"

	"lagwright/ident"
)

// Plants at the edges of what a fit can hand over: the synthesis must come
// back with gains that hold, or say that none do.
func TestSynthesisOfAwkwardPlants(t *testing.T) {
	for _, c := range []struct {
		name      string
		structure string
		gain      float64
		lags      []float64
		deadTime  float64
		scan      float64
	}{
		{"one lag, no dead time", "fopdt", 2, []float64{10}, 0, 0},
		{"one lag, hardly any dead time", "fopdt", 2, []float64{10}, 1e-6, 0},
		{"two lags, no dead time", "chain2", 2, []float64{10, 1}, 0, 0},
		{"three lags, no dead time", "chain3", 2, []float64{10, 4, 1}, 0, 0},
		{"lags decades apart", "chain3", 2, []float64{1000, 1, 0.001}, 0.5, 0},
		{"dead time alone, nearly", "fopdt", 2, []float64{0.01}, 10, 0},
		{"negative gain", "chain2", -0.3, []float64{50, 20}, 6, 0},
		{"integrator", "ipdt", 0.02, nil, 5, 0},
		{"eight equal lags", "equal8", 1, []float64{4}, 1, 0},
		{"slow scan", "chain2", 1, []float64{20, 5}, 2, 3},
		{"scan slower than the plant", "fopdt", 1, []float64{5}, 1, 12},
		{"fast scan", "chain2", 1, []float64{20, 5}, 2, 0.01},
		{"integrator, scanned", "ipdt", 0.02, nil, 5, 2},
		{"a lag of zero, scanned", "chain2", 1, []float64{20, 0}, 2, 0.7},
		{"a lag of zero", "chain2", 1, []float64{20, 0}, 2, 0},
	} {
		p := plant(t, c.structure, c.gain, c.lags, c.deadTime)
		task := newTask(Requirement{Ms: ptr(1.7), Overshoot: ptr(30), Scan: c.scan}, 0, 0)
		e := newEnsemble(scenarios([]ident.Plant{p}, &task), 1)
		for _, kind := range all {
			d := newSearch(context.Background(), e, p, 0.95).design(kind)
			if !d.found {
				t.Errorf("%s, %s: nothing found, missed by %.3g", c.name, kind, d.miss)
				continue
			}
			f := analyse(p, d.law, c.scan)
			if !f.Stable || f.Ms > 1.7*1.002 || !isFinite(d.law.kc) || d.law.kc*c.gain <= 0 {
				t.Errorf("%s, %s: %+v with stable %v, Ms %g", c.name, kind, d.law, f.Stable, f.Ms)
			}
			if kind != "p" && !(d.iae >= 0.99*math.Abs(d.law.ti/d.law.kc)) {
				t.Errorf("%s, %s: load IAE %g, Ti/Kc %g", c.name, kind, d.iae, d.law.ti/d.law.kc)
			}
		}
	}
}
