package fit

import (
	"errors"
	"math"
	"testing"

	"gonum.org/v1/gonum/floats"
)

// Intervals at 95 % recomputed from the printed data with another engine; BOD
// by Bates and Watts' profile t in R's regression tests, Puromycin's rounded
// values (197.3, 229.3, 0.0469, 0.0862) are widely printed.
func TestProfileInterval(t *testing.T) {
	for _, c := range []struct {
		name      string
		problem   func() (Problem, []float64)
		i         int
		low, high float64
		tolerance float64
	}{
		{"BOD A", oxygenDemand, 0, 14.0494, 38.4562, 4e-6},
		{"BOD lrc", oxygenDemand, 1, -2.0295, 0.5923, 1e-4},
		{"Puromycin Vm", puromycin, 0, 197.302, 229.289, 3e-6},
		{"Puromycin K", puromycin, 1, 0.046920, 0.086157, 1.1e-5},
		{"DNase Asym", assay, 0, 2.19350, 2.53879, 3e-6},
		{"DNase xmid", assay, 1, 1.32143, 1.67875, 4e-6},
		{"DNase scal", assay, 2, 0.97431, 1.11493, 6e-6},
	} {
		t.Run(c.name, func(t *testing.T) {
			pr, start := c.problem()
			in, err := profileInterval(pr, solve(t, pr, start), c.i, 0.95)
			if err != nil {
				t.Fatal(err)
			}
			within(t, "low", in.Low, c.low, c.tolerance)
			within(t, "high", in.High, c.high, c.tolerance)
			if !in.HasLow || !in.HasHigh {
				t.Errorf("open: %+v", in)
			}
		})
	}
}

// The profile of the BOD fit as R's regression tests print it (see
// references: Bates and Watts 1988, chapter 6).
func TestProfileTable(t *testing.T) {
	pr, start := oxygenDemand()
	best := solve(t, pr, start)
	for _, c := range []struct {
		i          int
		fixed, tau float64
		other      float64
	}{
		{0, 13.59751, -3.0873, 0.14033}, {0, 16.49088, -1.2634, -0.26877},
		{0, 23.98253, 1.3780, -1.17103}, {0, 41.42542, 2.9028, -2.12176},
		{1, -2.184153, -2.9550, 42.395076}, {1, -1.063030, -1.0653, 22.245847},
		{1, 0.234850, 2.1335, 16.086803}, {1, 0.779458, 3.0276, 15.265409},
	} {
		h, err := profile{pr: pr, best: best, i: c.i}.at(c.fixed, held{p: best.P})
		if err != nil {
			t.Fatal(err)
		}
		within(t, "tau", h.tau, math.Abs(c.tau), 6e-5)
		within(t, "other parameter", h.p[1-c.i], c.other, 5e-5) // the fixed values are rounded, too
	}
}

// A linear model has the interval p ± t·sd exactly.
func TestProfileOfStraightLine(t *testing.T) {
	x := []float64{1, 2, 3, 4, 5, 6}
	y := []float64{1.2, 1.9, 3.2, 3.8, 5.3, 5.9}
	pr := curve(2, x, y, func(p []float64, x float64) float64 { return p[0] + p[1]*x })
	best := solve(t, pr, []float64{0, 0})
	for i := range best.P {
		in, err := profileInterval(pr, best, i, 0.9)
		if err != nil {
			t.Fatal(err)
		}
		half := tQuantile(0.95, 4) * best.StdDev[i]
		within(t, "low", in.Low, best.P[i]-half, 1e-8)
		within(t, "high", in.High, best.P[i]+half, 1e-8)
	}
}

// At 99 % the BOD record sets no upper end to the plateau: τ levels off below
// its limit, as the rise becomes a straight line.
func TestProfileOpenEnds(t *testing.T) {
	pr, start := oxygenDemand()
	best := solve(t, pr, start)
	in, err := profileInterval(pr, best, 0, 0.99)
	if err != nil {
		t.Fatal(err)
	}
	if in.HasHigh || !math.IsInf(in.High, 1) || !in.HasLow {
		t.Errorf("99 %% interval of A: %+v", in)
	}

	pr.Lower, pr.Upper = []float64{15, math.Inf(-1)}, []float64{30, math.Inf(1)}
	if in, err = profileInterval(pr, best, 0, 0.95); err != nil {
		t.Fatal(err)
	}
	if in.HasLow || in.HasHigh || in.Low != 15 || in.High != 30 {
		t.Errorf("95 %% interval of A between bounds: %+v", in)
	}
}

func TestProfileEndOfModel(t *testing.T) {
	pr, start := oxygenDemand()
	inside := pr.Residuals
	pr.Residuals = func(r, p []float64) {
		inside(r, p)
		if p[0] > 25 {
			r[0] = math.NaN()
		}
	}
	in, err := profileInterval(pr, solve(t, pr, start), 0, 0.95)
	if err != nil {
		t.Fatal(err)
	}
	within(t, "high", in.High, 25, 1e-6) // the model has no value beyond
	within(t, "low", in.Low, 14.0494, 4e-6)
}

func TestProfileFindsBetterMinimum(t *testing.T) {
	pr, start := puromycin()
	best := solve(t, pr, start)
	lowest := best.SSE
	best.P[0] -= 2 * best.StdDev[0] // as if the fit had ended here
	r := make([]float64, pr.M)
	pr.Residuals(r, best.P)
	best.SSE = floats.Dot(r, r)
	_, err := profileInterval(pr, best, 0, 0.95)
	var better *betterMinimum
	if !errors.As(err, &better) {
		t.Fatalf("error %v", err)
	}
	pr.Residuals(r, better.P)
	if better.SSE >= best.SSE || better.SSE < lowest || floats.Dot(r, r) != better.SSE {
		t.Errorf("from %g found %g", best.SSE, better.SSE)
	}
}

func TestProfileWithoutVariance(t *testing.T) {
	pr, start := oxygenDemand()
	pr.M = 2
	best, err := LeastSquares(pr, start, Settings{})
	if err != nil {
		t.Fatal(err)
	}
	if _, err := profileInterval(pr, best, 0, 0.95); err == nil {
		t.Error("an interval from as many residuals as parameters")
	}
}
