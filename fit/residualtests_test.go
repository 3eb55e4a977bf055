package fit

import (
	"math"
	"math/rand/v2"
	"testing"
)

// luteinisingHormone is the series of 48 values of R's data set lh (Diggle 1990).
var luteinisingHormone = []float64{
	2.4, 2.4, 2.4, 2.2, 2.1, 1.5, 2.3, 2.3, 2.5, 2.0, 1.9, 1.7, 2.2, 1.8, 3.2, 3.2,
	2.7, 2.2, 2.2, 1.9, 1.9, 1.8, 2.7, 3.0, 2.3, 2.0, 2.0, 2.9, 2.9, 2.7, 2.7, 2.3,
	2.6, 2.4, 1.8, 1.7, 1.5, 1.4, 2.1, 3.3, 3.5, 3.5, 3.1, 2.6, 2.1, 3.4, 3.0, 2.9,
}

// investmentResiduals are the residuals of real investment regressed on real
// GNP and the real interest rate, 1964–1982: Greene, Econometric Analysis
// (1993), table 15.1.
func investmentResiduals(t *testing.T) []float64 {
	t.Helper()
	rows := [][4]float64{ // GNP, investment, price, interest
		{596.7, 90.9, 0.7167, 3.23}, {637.7, 97.4, 0.7277, 3.55}, {691.1, 113.5, 0.7436, 4.04},
		{756.0, 125.7, 0.7676, 4.50}, {799.6, 122.8, 0.7906, 4.19}, {873.4, 133.3, 0.8254, 5.16},
		{944.0, 149.3, 0.8679, 5.87}, {992.7, 144.2, 0.9145, 5.95}, {1077.6, 166.4, 0.9601, 4.88},
		{1185.9, 195.0, 1.0000, 4.50}, {1326.4, 229.8, 1.0575, 6.44}, {1434.2, 228.7, 1.1508, 7.83},
		{1549.2, 206.1, 1.2579, 6.25}, {1718.0, 257.9, 1.3234, 5.50}, {1918.3, 324.1, 1.4005, 5.46},
		{2163.9, 386.6, 1.5042, 7.46}, {2417.8, 423.0, 1.6342, 10.28}, {2631.7, 401.9, 1.7842, 11.77},
		{2954.1, 474.9, 1.9514, 13.42}, {3073.0, 414.5, 2.0688, 11.02},
	}
	pr := Problem{M: len(rows) - 1, N: 3, Residuals: func(r, p []float64) {
		for k := range r {
			before, now := rows[k], rows[k+1]
			interest := now[3] - 100*(now[2]-before[2])/before[2]
			r[k] = now[1]/now[2] - p[0] - p[1]*now[0]/now[2] - p[2]*interest
		}
	}}
	fit := solve(t, pr, []float64{0, 0, 0})
	// R package sandwich prints −12.53360 (24.91527), 0.16914 (0.02057), −1.00144 (2.36875).
	for i, want := range []struct{ p, sd float64 }{{-12.53360, 24.91527}, {0.16914, 0.02057}, {-1.00144, 2.36875}} {
		within(t, "regression", fit.P[i], want.p, 3e-5)
		within(t, "regression sd", fit.StdDev[i], want.sd, 3e-4)
	}
	r := make([]float64, pr.M)
	pr.Residuals(r, fit.P)
	return r
}

func TestAutocorrelation(t *testing.T) {
	// Figures of R's acf, recomputed with numpy.
	check := func(name string, r, want []float64, tolerance float64) {
		got := autocorrelation(r, len(want))
		for k := range want {
			within(t, name, got[k+1], want[k], tolerance)
		}
		if got[0] != 1 {
			t.Errorf("%s: r0 = %g", name, got[0])
		}
	}
	check("luteinising hormone", luteinisingHormone, []float64{0.575524, 0.181818, -0.144755, -0.174825, -0.149650}, 4e-6)
	check("investment", investmentResiduals(t), []float64{0.222000, -0.238900, -0.557647, -0.290535}, 3e-6)

	for name, acf := range map[string][]float64{
		"constant": autocorrelation([]float64{3, 3, 3, 3}, 2)[1:],
		"short":    autocorrelation([]float64{1, 2}, 4)[2:],
	} {
		for _, x := range acf {
			if x != 0 {
				t.Errorf("%s: %v", name, acf)
			}
		}
	}
}

func TestLjungBox(t *testing.T) {
	// Figures of R's Box.test, recomputed with numpy.
	q, p := ljungBox(luteinisingHormone, 5, 0)
	within(t, "Q(5)", q, 22.673185, 3e-8)
	within(t, "p", p, 3.89745e-4, 2e-6)
	q, p = ljungBox(investmentResiduals(t), 4, 0)
	within(t, "Q(4)", q, 12.43214, 1e-6)
	within(t, "p", p, 0.014411, 3e-5)
	if _, fitted := ljungBox(luteinisingHormone, 5, 2); fitted != chi2Tail(22.673185, 3) {
		within(t, "p less two fitted", fitted, chi2Tail(22.673185, 3), 1e-6)
	}
	if _, p := ljungBox(luteinisingHormone, 2, 2); !math.IsNaN(p) {
		t.Errorf("p without a degree of freedom: %g", p)
	}
	if _, p := ljungBox([]float64{1, 2, 3}, 3, 0); !math.IsNaN(p) {
		t.Errorf("p of a series no longer than its lags: %g", p)
	}
}

func TestEffectiveSampleSize(t *testing.T) {
	for _, c := range []struct {
		n         int
		rho, want float64
	}{
		{100, 0.25, 60.322}, {100, 0.5, 33.784}, {800, 0.8, 89.385}, {100, 0.9, 5.814}, // from the formula with numpy
		{50, 0, 50}, {50, 1, 1}, {1, 0.5, 1},
	} {
		within(t, "n_eff", effectiveSampleSize(c.n, c.rho), c.want, 1e-4)
	}
	if n := effectiveSampleSize(1000, -0.5); !(n > 2900 && n < 3000) {
		t.Errorf("n_eff under rho = −0.5: %g, near 3000 by the limit", n)
	}
}

// bumps is an input that changes at two rows.
func bumps(n int) []float64 {
	du := make([]float64, n)
	du[n/5], du[3*n/5] = 2, -2
	return du
}

// TestCrossCorrelationSize draws residuals that do not depend on the input:
// p-values must be uniform, whatever the shape of the noise.
func TestCrossCorrelationSize(t *testing.T) {
	for name, draw := range map[string]func(*rand.Rand) float64{
		"normal":    func(r *rand.Rand) float64 { return r.NormFloat64() },
		"heavy":     func(r *rand.Rand) float64 { return math.Tan(math.Pi * (r.Float64() - 0.5)) },
		"quantised": func(r *rand.Rand) float64 { return math.Round(r.NormFloat64()) },
	} {
		const runs = 1500
		random := rand.New(rand.NewPCG(11, 5))
		below := map[float64]int{0.01: 0, 0.05: 0, 0.5: 0}
		for range runs {
			r := make([]float64, 250)
			for k := range r {
				r[k] = draw(random)
			}
			p := crossCorrelationP(r, changeBasis(bumps(len(r)), 6))
			for limit := range below {
				if p < limit {
					below[limit]++
				}
			}
		}
		for limit, count := range below {
			sd := math.Sqrt(limit * (1 - limit) / runs)
			if share := float64(count) / runs; math.Abs(share-limit) > 4*sd+0.1*limit {
				t.Errorf("%s: %.4f of the p-values lie below %g", name, share, limit)
			}
		}
	}
}

// TestCrossCorrelationPower leaves a slow misfit after each bump that no single
// residual shows. The noncentral χ² with the six windows' share of the misfit
// finds it in 0.79 of the logs at p < 0.01 (scipy); single lags would in 0.27.
func TestCrossCorrelationPower(t *testing.T) {
	random := rand.New(rand.NewPCG(3, 8))
	found := 0
	for range 200 {
		du := bumps(250)
		r := make([]float64, len(du))
		misfit := 0.0
		for k := range r {
			misfit = 0.95*misfit + du[k]/2
			r[k] = misfit + random.NormFloat64()
		}
		if crossCorrelationP(r, changeBasis(du, 6)) < 0.01 {
			found++
		}
	}
	if found < 135 { // four standard deviations of a share of 0.79
		t.Errorf("a misfit of one standard deviation that lasts 20 rows was found in %d of 200 logs", found)
	}
}

func TestCrossCorrelationWithout(t *testing.T) {
	r := luteinisingHormone
	if p := crossCorrelationP(r, changeBasis(make([]float64, len(r)), 4)); !math.IsNaN(p) {
		t.Errorf("an input that never changes: p = %g", p)
	}
	steady := make([]float64, len(r))
	if p := crossCorrelationP(steady, changeBasis(bumps(len(r)), 4)); p != 1 {
		t.Errorf("residuals that are all 0: p = %g", p)
	}
	if p := crossCorrelationP(nil, changeBasis(nil, 2)); !math.IsNaN(p) {
		t.Errorf("no rows: p = %g", p)
	}
}

// TestOrdered sorts what leaves many values in one class, none in most, or is not finite.
func TestOrdered(t *testing.T) {
	rng := rand.New(rand.NewPCG(3, 9))
	normal, cubed, tied := make([]float64, 501), make([]float64, 501), make([]float64, 501)
	for i := range normal {
		normal[i] = rng.NormFloat64()
		cubed[i] = math.Pow(normal[i], 9)
		tied[i] = math.Round(normal[i])
	}
	for name, r := range map[string][]float64{
		"none": nil, "one": {4}, "all the same": {2, 2, 2}, "normal": normal, "far out": cubed, "tied": tied,
		"infinite": {3, math.Inf(1), 1, math.Inf(-1), 2},
	} {
		got := ordered(r)
		if len(got) != len(r) {
			t.Fatalf("%s: %d of %d values", name, len(got), len(r))
		}
		seen := make([]bool, len(r))
		for i, p := range got {
			if seen[p.at] || p.value != r[p.at] {
				t.Errorf("%s: value %g of place %d", name, p.value, p.at)
			}
			seen[p.at] = true
			if i > 0 && got[i-1].value > p.value {
				t.Errorf("%s: %g before %g", name, got[i-1].value, p.value)
			}
		}
	}
}
