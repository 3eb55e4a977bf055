package fit

import (
	"math"
	"testing"
)

// within fails where got is further from want than tolerance, a share of want.
func within(t *testing.T, what string, got, want, tolerance float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tolerance*math.Abs(want)) {
		t.Errorf("%s = %.15g, want %.15g within %g of it", what, got, want, tolerance)
	}
}

// The figures of the quantile tests come from testdata/quantiles.py (40-digit
// arithmetic).

func TestTQuantile(t *testing.T) {
	for _, c := range []struct{ p, nu, want, tolerance float64 }{
		{0.975, 1, 12.706204736174693, 1e-13},
		{0.975, 2, 4.3026527297494618, 1e-13},
		{0.975, 4, 2.7764451051977935, 1e-13},
		{0.975, 10, 2.2281388519862742, 1e-13},
		{0.995, 16, 2.9207816224250996, 1e-13},
		{0.975, 12.5, 2.1691859427125406, 1e-13},
		{0.6, 1000, 0.25341451583949871, 1e-12},
		{0.975, 10000, 1.9602012398906259, 1e-12},
		{0.975, 10001, 1.9602012161646407, 1e-14},
		{0.9999, 20000, 3.7197060628848968, 1e-14},
		{0.975, 1e6, 1.9599663568141067, 1e-14},
		{0.975, 1e9, 1.9599639869123251, 1e-14},
		{0.025, 1e9, -1.9599639869123254, 1e-14},
	} {
		within(t, "t", tQuantile(c.p, c.nu), c.want, c.tolerance)
	}
	// JCGM 100:2008, table G.2, 95.45 %, as printed to three digits.
	for nu, want := range map[float64]float64{1: 13.97, 2: 4.53, 3: 3.31, 5: 2.65, 10: 2.28, 20: 2.13, 50: 2.05} {
		if got := tQuantile((1+0.9545)/2, nu); math.Abs(got-want) > 0.005 {
			t.Errorf("table G.2: t(%g) = %.4f, printed %g", nu, got, want)
		}
	}
}

func TestChi2(t *testing.T) {
	for _, c := range []struct{ x, k, want float64 }{
		{7.8147279, 3, 0.050000000072855336},
		{22.673185, 5, 0.00038974480427087788},
		{200, 5, 2.8406228986415317e-41},
		{50, 2, 1.3887943864964021e-11},
		{-1, 2, 1},
	} {
		within(t, "chi2 tail", chi2Tail(c.x, c.k), c.want, 1e-12)
	}
}

func TestQuantilesOutside(t *testing.T) {
	for name, got := range map[string]float64{
		"t without freedom":     tQuantile(0.975, 0),
		"t of negative freedom": tQuantile(0.975, -1),
		"t of NaN":              tQuantile(0.975, math.NaN()),
		"t of p above 1":        tQuantile(1.5, 3),
		"normal of p below 0":   normalQuantile(-0.1),
		"normal of NaN":         normalQuantile(math.NaN()),
		"chi2 tail of NaN":      chi2Tail(math.NaN(), 2),
		"chi2 tail without k":   chi2Tail(1, 0),
	} {
		if !math.IsNaN(got) {
			t.Errorf("%s: %g, want NaN", name, got)
		}
	}
	for name, got := range map[string]float64{
		"t": tQuantile(1, 3), "normal": normalQuantile(1),
	} {
		if !math.IsInf(got, 1) {
			t.Errorf("%s at p = 1: %g, want +Inf", name, got)
		}
	}
	within(t, "t of infinite freedom", tQuantile(0.975, math.Inf(1)), normalQuantile(0.975), 0)
}

func TestExpandedTMeetsTheInversion(t *testing.T) {
	for _, p := range []float64{0.0001, 0.025, 0.4, 0.9, 0.9999} {
		z := normalQuantile(p)
		within(t, "expansion", expandedT(z, expandedFreedom), tQuantile(p, expandedFreedom), 1e-11)
	}
}
