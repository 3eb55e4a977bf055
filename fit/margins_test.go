package fit

import (
	"math"
	"math/rand/v2"
	"testing"
)

// TestMixtureQuantiles puts the quantiles of random mixtures back into their
// distribution function.
func TestMixtureQuantiles(t *testing.T) {
	r := rand.New(rand.NewPCG(1, 2))
	for range 500 {
		var ms margins
		total := 0.0
		for range 1 + r.IntN(30) {
			m := margin{r.ExpFloat64(), r.NormFloat64() * r.ExpFloat64(), r.ExpFloat64() * r.ExpFloat64(), []float64{5, 40, 990, math.Inf(1)}[r.IntN(4)]}
			total += m.weight
			ms = append(ms, m)
		}
		for i := range ms {
			ms[i].weight /= total
		}
		checkQuantiles(t, ms)
	}
	if got := (margins{{1, 0, 0, 9}}).quantile(0.975); got != 0 {
		t.Errorf("quantile of no width is %g", got)
	}
}

// Few degrees of freedom have tails far out; narrow margins apart leave stretches where
// the distribution function does not rise, and weights that add up to a little over 1.
func TestAwkwardQuantiles(t *testing.T) {
	for _, dof := range []float64{1, 1.5, 2, 3} {
		checkQuantiles(t, margins{{1, 0.3, 2, dof}})
	}
	r := rand.New(rand.NewPCG(3, 2))
	for range 500 {
		var ms margins
		n := 2 + r.IntN(12)
		for k := range n {
			ms = append(ms, margin{1 / float64(n), float64(k) * r.ExpFloat64(), 0.05 + 0.1*r.Float64(), 40})
		}
		ms[0].weight += 3e-16
		checkQuantiles(t, ms)
	}
}

// checkQuantiles puts quantiles into the distribution function.
func checkQuantiles(t *testing.T, ms margins) {
	t.Helper()
	for _, p := range []float64{0.0005, 0.005, 0.025, 0.16, 0.5, 0.975, 0.995, 0.9995} {
		if got := ms.cdf(ms.quantile(p)); math.Abs(got-p) > 1e-6*p*(1-p)+1e-9 {
			t.Errorf("%d margins, the first %v: below the quantile of %g lie %.9g", len(ms), ms[0], p, got)
		}
	}
}

// TestStudentKernel holds the product against the power.
func TestStudentKernel(t *testing.T) {
	for d := 1; d <= 10; d++ {
		for _, r2 := range []float64{0, 1e-9, 0.3, 2, 70, 1e6} {
			want := math.Pow(1+r2/proposalFreedom, -0.5*(proposalFreedom+float64(d)))
			if got := studentKernel(r2, d); math.Abs(got/want-1) > 1e-13 {
				t.Errorf("%d dimensions, squared distance %g: %.16g, want %.16g", d, r2, got, want)
			}
		}
	}
}
