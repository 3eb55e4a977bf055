package tune

import (
	"context"
	"math"
	"math/rand/v2"
	"os"
	"testing"

	"lagwright/ident"
)

// TestShareIsCalibrated puts the gains on heaters that were not known: a
// centre is scattered about the true heater, the plausible plants about the
// centre in the same way, so that truth and plants are alike. Then the share
// stated must be that of the true heaters on which the requirement holds.
// 8 heaters, 300 with LAGWRIGHT_LONG=1.
func TestShareIsCalibrated(t *testing.T) {
	heaters, plants := uint64(8), 60
	if os.Getenv("LAGWRIGHT_LONG") != "" {
		heaters, plants = 300, 200
	}
	const assurance = 0.95
	met, stated := 0.0, 0.0
	var ratio []float64
	for seed := range heaters {
		rng := rand.New(rand.NewPCG(seed, 77))
		truth := family(t, seed, 1, 0)[0]
		spread := []float64{0.02, 0.05, 0.08}[seed%3]
		scatter := func(p ident.Plant) ident.Plant {
			lags := make([]float64, len(p.Lags))
			for i := range lags {
				lags[i] = p.Lags[i] * math.Exp(spread*rng.NormFloat64())
			}
			return plant(t, p.Structure.String(), p.Gain*math.Exp(spread*rng.NormFloat64()), lags, p.DeadTime*math.Exp(spread*rng.NormFloat64()))
		}
		centre := scatter(truth)
		cloud := make([]ident.Plant, plants)
		for i := range cloud {
			cloud[i] = scatter(centre)
		}
		task := newTask(Requirement{Ms: ptr([]float64{1.4, 1.6, 1.8}[rng.IntN(3)]), Overshoot: ptr([]float64{5, 10, 20}[rng.IntN(3)])}, 0, 0)
		e := newEnsemble(scenarios(cloud, &task), 2)
		d := newSearch(context.Background(), e, centre, assurance).design("pi")
		if !d.found {
			t.Fatalf("heater %d: nothing found", seed)
		}
		stated += e.share(crossFitted(context.Background(), e, d, assurance))
		alone := newEnsemble(scenarios([]ident.Plant{truth}, &task), 1)
		if !task.judge(alone.scenarios[0], d.law, reportStep).met() {
			continue
		}
		met++
		best := newSearch(context.Background(), alone, truth, 1).design("pi")
		ratio = append(ratio, alone.loadIAE(d.law, 1, reportStep)/alone.loadIAE(best.law, 1, reportStep))
	}
	n := float64(heaters)
	met, stated = met/n, stated/n
	t.Logf("%g heaters: stated %.3f, met %.3f; load IAE over the best possible: median %.3f, 90%% %.3f", n, stated, met, quantile(ratio, 0.5), quantile(ratio, 0.9))
	if stated < assurance-0.02 || stated > assurance+0.02 {
		t.Errorf("stated share %.3f, designed for %.2f", stated, assurance)
	}
	// exact binomial tails
	if p := binomialTail(int(heaters), int(math.Round(met*n)), stated); p < 1e-3 {
		t.Errorf("met on %.3f, stated %.3f: a chance of %.2g", met, stated, p)
	}
}

// binomialTail is the chance of an outcome as far out as k of n, on its side,
// where each succeeds with probability p.
func binomialTail(n, k int, p float64) float64 {
	below, above := 0.0, 0.0
	for i := range n + 1 {
		ln, _ := math.Lgamma(float64(n + 1))
		li, _ := math.Lgamma(float64(i + 1))
		lr, _ := math.Lgamma(float64(n - i + 1))
		m := math.Exp(ln - li - lr + float64(i)*math.Log(p) + float64(n-i)*math.Log1p(-p))
		if i <= k {
			below += m
		}
		if i >= k {
			above += m
		}
	}
	return min(below, above)
}
