package fit

import (
	"errors"
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"gonum.org/v1/gonum/floats"
)

// curve puts y = f(p, x) as a least-squares problem of n parameters.
func curve(n int, x, y []float64, f func(p []float64, x float64) float64) Problem {
	return Problem{M: len(x), N: n, Residuals: func(r, p []float64) {
		for k := range r {
			r[k] = f(p, x[k]) - y[k]
		}
	}}
}

// puromycin is the reaction rate against concentration of Bates and Watts
// (1988), treated cells, with the model Vm·x/(K+x).
func puromycin() (Problem, []float64) {
	x := []float64{0.02, 0.02, 0.06, 0.06, 0.11, 0.11, 0.22, 0.22, 0.56, 0.56, 1.10, 1.10}
	y := []float64{76, 47, 97, 107, 123, 139, 159, 152, 191, 201, 207, 200}
	return curve(2, x, y, func(p []float64, x float64) float64 { return p[0] * x / (p[1] + x) }), []float64{205, 0.08}
}

// oxygenDemand is the biochemical oxygen demand of Marske (1967, in Bates and
// Watts 1988) with the model A·(1 − exp(−exp(lrc)·x)): a first-order rise that
// the record leaves before its plateau.
func oxygenDemand() (Problem, []float64) {
	x := []float64{1, 2, 3, 4, 5, 7}
	y := []float64{8.3, 10.3, 19.0, 16.0, 15.6, 19.8}
	return curve(2, x, y, func(p []float64, x float64) float64 { return -p[0] * math.Expm1(-math.Exp(p[1])*x) }), []float64{20, -1}
}

// assay is run 1 of the DNase assay of Davidian and Giltinan (1995) with the
// logistic model in log concentration. The data are from memory; that all
// printed digits of estimates and standard errors come out confirms them.
func assay() (Problem, []float64) {
	x := make([]float64, 16)
	for k, concentration := range []float64{0.04882812, 0.1953125, 0.390625, 0.78125, 1.5625, 3.125, 6.25, 12.5} {
		x[2*k], x[2*k+1] = math.Log(concentration), math.Log(concentration)
	}
	y := []float64{0.017, 0.018, 0.121, 0.124, 0.206, 0.215, 0.377, 0.374, 0.614, 0.609, 1.019, 1.001, 1.334, 1.364, 1.730, 1.710}
	return curve(3, x, y, func(p []float64, x float64) float64 { return p[0] / (1 + math.Exp((p[1]-x)/p[2])) }), []float64{3, 0, 1}
}

// solve fits and fails the test where the solver stops early.
func solve(t *testing.T, pr Problem, start []float64) Result {
	t.Helper()
	r, err := LeastSquares(pr, start, Settings{})
	if err != nil {
		t.Fatal(err)
	}
	if r.Stop.Early() {
		t.Fatalf("stopped early: %v", r.Stop)
	}
	return r
}

func TestPublishedFits(t *testing.T) {
	for _, c := range []struct {
		name                string
		problem             func() (Problem, []float64)
		p, sd               []float64
		s                   float64
		correlation         float64 // of the first two parameters, 0 where not printed
		tolerance, standard float64 // of p and of sd, by the digits printed
	}{
		// Montgomery, Peck and Vining p. 402 print 212.7, 0.06412; se 6.947,
		// 0.008281; further digits recomputed with another engine.
		{"Puromycin", puromycin, []float64{212.683743, 0.0641212817}, []float64{6.947155, 0.00828095}, 10.933658, 0.765, 5e-9, 5e-7},
		// R's regression tests print 19.14258, −0.63282, s = 2.549.
		{"BOD", oxygenDemand, []float64{19.14258, -0.63282}, nil, 2.549, 0, 1e-5, 0},
		// R's manual prints these.
		{"DNase run 1", assay, []float64{2.3452, 1.4831, 1.0415}, []float64{0.078154, 0.081353, 0.032271}, 0, 0, 4.8e-5, 1e-5},
	} {
		t.Run(c.name, func(t *testing.T) {
			r := solve(t, first(c.problem()), second(c.problem()))
			for i := range c.p {
				within(t, fmt.Sprintf("parameter %d", i), r.P[i], c.p[i], c.tolerance)
			}
			for i := range c.sd {
				within(t, fmt.Sprintf("sd %d", i), r.StdDev[i], c.sd[i], c.standard)
			}
			if c.s != 0 {
				within(t, "residual sd", math.Sqrt(r.S2), c.s, 2e-4)
			}
			if c.correlation != 0 {
				within(t, "correlation", r.Covariance[0][1]/math.Sqrt(r.Covariance[0][0]*r.Covariance[1][1]), c.correlation, 1e-3)
			}
		})
	}
}

func first(pr Problem, _ []float64) Problem       { return pr }
func second(_ Problem, start []float64) []float64 { return start }

// A straight line has a closed form: the thermometer calibration of JCGM
// 100:2008 H.3, printed y1 = −0.1712 (0.0029), y2 = 0.00218 (0.00067), r = −0.930.
func TestStraightLine(t *testing.T) {
	x := []float64{21.521, 22.012, 22.512, 23.003, 23.507, 23.999, 24.513, 25.002, 25.503, 26.010, 26.511}
	y := []float64{-0.171, -0.169, -0.166, -0.159, -0.164, -0.165, -0.156, -0.157, -0.159, -0.161, -0.160}
	r := solve(t, curve(2, x, y, func(p []float64, x float64) float64 { return p[0] + p[1]*(x-20) }), []float64{0, 0})
	for _, c := range []struct {
		what      string
		got, want float64
	}{
		{"y1", r.P[0], -0.1712}, {"s(y1)", r.StdDev[0], 0.0029},
		{"y2", r.P[1], 0.00218}, {"s(y2)", r.StdDev[1], 0.00067},
		{"r", r.Covariance[0][1] / math.Sqrt(r.Covariance[0][0]*r.Covariance[1][1]), -0.930},
		{"sum of squares", r.SSE, 0.000110096583109},
	} {
		within(t, c.what, c.got, c.want, 0.01)
	}
	within(t, "sum of squares", r.SSE, 0.000110096583109, 1e-9)
}

// TestBounds puts a bound beside the minimum of the Puromycin fit and checks
// the conditions of Karush, Kuhn and Tucker, and the free parameter against its
// closed form: with K held the model is linear in Vm.
func TestBounds(t *testing.T) {
	for _, c := range []struct {
		name         string
		lower, upper []float64
		k            float64 // K that results
		atBound      bool
	}{
		{"inactive", []float64{0, 0}, []float64{500, 1}, 0.0641212817, false},
		{"lower", []float64{0, 0.08}, nil, 0.08, true},
		{"upper", nil, []float64{1e3, 0.05}, 0.05, true},
		{"held", []float64{0, 0.06}, []float64{1e3, 0.06}, 0.06, true},
	} {
		for _, start := range [][]float64{{100, 0.07}, {1, 5}, {205, 0.08}, {300, 0.01}} {
			t.Run(fmt.Sprint(c.name, start), func(t *testing.T) {
				pr := first(puromycin())
				pr.Lower, pr.Upper = c.lower, c.upper
				r := solve(t, pr, start)
				within(t, "K", r.P[1], c.k, 1e-8)
				if r.AtBound[0] || r.AtBound[1] != c.atBound {
					t.Errorf("at bound: %v", r.AtBound)
				}
				within(t, "Vm", r.P[0], puromycinVm(r.P[1]), 1e-8)
				if c.atBound && (!math.IsNaN(r.StdDev[1]) || r.Covariance[1][1] != 0 || r.Covariance[0][1] != 0) {
					t.Errorf("a parameter at its bound has sd %g, covariance %v", r.StdDev[1], r.Covariance)
				}
				if want := r.SSE / float64(12-2); !c.atBound && r.S2 != want {
					t.Errorf("S2 = %g, want %g", r.S2, want)
				}
				if want := r.SSE / float64(12-1); c.atBound && r.S2 != want {
					t.Errorf("S2 = %g, want %g", r.S2, want)
				}
			})
		}
	}
}

// puromycinVm is the least-squares Vm for a given K.
func puromycinVm(k float64) float64 {
	pr := first(puromycin())
	zero, one := make([]float64, pr.M), make([]float64, pr.M)
	pr.Residuals(zero, []float64{0, k})
	pr.Residuals(one, []float64{1, k})
	floats.Sub(one, zero)
	return -floats.Dot(one, zero) / floats.Dot(one, one)
}

// TestBoundsAgainstGrid compares bounded fits of random problems, whose minima
// often lie on one or more bounds, with a search over a grid that narrows.
func TestBoundsAgainstGrid(t *testing.T) {
	random := rand.New(rand.NewPCG(4, 1))
	x := make([]float64, 20)
	for k := range x {
		x[k] = float64(k) / 4
	}
	for trial := range 40 {
		y := make([]float64, len(x))
		for k := range y {
			y[k] = random.Float64()*2 - math.Expm1(-x[k]*random.Float64())
		}
		pr := curve(2, x, y, func(p []float64, x float64) float64 { return p[0] + x*p[1] + math.Sin(p[0]*p[1]) })
		pr.Lower = []float64{random.Float64() * 0.5, random.Float64()*0.4 - 0.2}
		pr.Upper = []float64{pr.Lower[0] + random.Float64(), pr.Lower[1] + 0.3*random.Float64()}
		r := solve(t, pr, []float64{random.Float64(), random.Float64()})
		if best := gridMinimum(pr, 60, 8); r.SSE > best*(1+1e-9) {
			t.Errorf("trial %d: %.12g at %v (bounds %v %v), the grid finds %.12g", trial, r.SSE, r.P, pr.Lower, pr.Upper, best)
		}
	}
}

// gridMinimum returns the lowest sum of squares on a grid of two parameters
// that is laid anew around its best point.
func gridMinimum(pr Problem, steps, rounds int) float64 {
	low, high := slices.Clone(pr.Lower), slices.Clone(pr.Upper)
	best, r := math.Inf(1), make([]float64, pr.M)
	at := []float64{0, 0}
	for range rounds {
		for a := range steps + 1 {
			for b := range steps + 1 {
				p := []float64{low[0] + (high[0]-low[0])*float64(a)/float64(steps), low[1] + (high[1]-low[1])*float64(b)/float64(steps)}
				pr.Residuals(r, p)
				if s := floats.Dot(r, r); s < best {
					best, at = s, p
				}
			}
		}
		for i := range at {
			half := (high[i] - low[i]) / 8
			low[i], high[i] = max(pr.Lower[i], at[i]-half), min(pr.Upper[i], at[i]+half)
		}
	}
	return best
}

// The curved valley of Rosenbrock (1960, from memory) with minimum 0 at (1, 1),
// in a model that has no values but on the valley's floor.
func TestNotFiniteSteps(t *testing.T) {
	refused := 0
	pr := Problem{M: 2, N: 2, Residuals: func(r, p []float64) {
		r[0], r[1] = 10*(p[1]-p[0]*p[0]), 1-p[0]
		if math.Abs(p[1]-p[0]*p[0]) > 0.05 {
			refused++
			r[0] = math.NaN()
		}
	}}
	r := solve(t, pr, []float64{-1.2, 1.44})
	within(t, "p0", r.P[0], 1, 1e-13)
	within(t, "p1", r.P[1], 1, 1e-13)
	if refused == 0 {
		t.Error("the search never left the floor, the test shows nothing")
	}
	if _, err := LeastSquares(pr, []float64{0, 1}, Settings{}); !errors.Is(err, ErrNotFinite) {
		t.Errorf("start without a value: %v", err)
	}
	pr.Jacobian = func(columns [][]float64, _ []float64) { columns[0][0] = math.NaN() }
	r, err := LeastSquares(pr, []float64{-1.2, 1.44}, Settings{})
	if err != nil || r.Stop != StopNotFinite || !r.Stop.Early() || r.P[0] != -1.2 {
		t.Errorf("derivatives without a value: %+v, %v", r, err)
	}
}

func TestDependentColumns(t *testing.T) {
	x := []float64{0, 1, 2, 3, 4}
	y := []float64{1, 3, 2, 5, 4}
	differences := curve(3, x, y, func(p []float64, x float64) float64 { return p[0] + (p[1]+2*p[2])*x })
	exact := differences
	exact.Jacobian = func(columns [][]float64, _ []float64) {
		for k := range x {
			columns[0][k], columns[1][k], columns[2][k] = 1, x[k], 2*x[k]
		}
	}
	for name, pr := range map[string]Problem{"differences": differences, "exact": exact} {
		t.Run(name, func(t *testing.T) {
			r := solve(t, pr, []float64{1, 1, 1})
			within(t, "slope", r.P[1]+2*r.P[2], 0.8, 1e-8)
			within(t, "sum of squares", r.SSE, 3.6, 1e-12)
			if r.Covariance != nil {
				t.Errorf("two parameters that cannot be told apart have the covariance %v", r.Covariance)
			}
			for i, sd := range r.StdDev {
				if !math.IsNaN(sd) {
					t.Errorf("sd %d = %g", i, sd)
				}
			}
		})
	}
}

func TestPerfectFit(t *testing.T) {
	x := []float64{0, 1, 2, 3, 4, 6, 9}
	y := make([]float64, len(x))
	rise := func(p []float64, x float64) float64 { return -p[0] * math.Expm1(-x/p[1]) }
	for k := range y {
		y[k] = rise([]float64{80, 2.5}, x[k])
	}
	for _, start := range [][]float64{{1, 1}, {500, 30}, {80, 2.5}} {
		r := solve(t, curve(2, x, y, rise), start)
		within(t, "gain", r.P[0], 80, 1e-13)
		within(t, "lag", r.P[1], 2.5, 1e-13)
	}
	r := solve(t, curve(2, x[1:3], y[1:3], rise), []float64{40, 1}) // as many values as parameters
	within(t, "lag", r.P[1], 2.5, 1e-12)
}

// A kink in the sum of squares, as dead time has at every sample, is no
// minimum that derivatives can confirm: the solver must say so.
func TestKink(t *testing.T) {
	pr := Problem{M: 2, N: 1,
		Residuals: func(r, p []float64) { r[0], r[1] = 1+math.Abs(p[0]-0.3), 1 },
		Jacobian: func(columns [][]float64, p []float64) {
			columns[0][0], columns[0][1] = math.Copysign(1, p[0]-0.3), 0
		},
	}
	r, err := LeastSquares(pr, []float64{1}, Settings{})
	if err != nil {
		t.Fatal(err)
	}
	within(t, "p", r.P[0], 0.3, 1e-6)
	if r.Stop != StopStuck || !r.Stop.Early() {
		t.Errorf("stop: %v", r.Stop)
	}
}

func TestIterationsRunOut(t *testing.T) {
	pr, start := oxygenDemand()
	r, err := LeastSquares(pr, start, Settings{MaxIterations: 2})
	if err != nil || r.Stop != StopIterations || !r.Stop.Early() || r.Iterations != 2 {
		t.Errorf("%+v, %v", r, err)
	}
}

func TestSameBytes(t *testing.T) {
	pr, start := assay()
	a, b := solve(t, pr, start), solve(t, pr, start)
	if fmt.Sprint(a) != fmt.Sprint(b) {
		t.Errorf("two runs differ: %v, %v", a, b)
	}
	if !slices.Equal(start, second(assay())) {
		t.Error("the start was changed")
	}
}

func TestEvaluationsAreCounted(t *testing.T) {
	pr, start := assay()
	inside, calls := pr.Residuals, 0
	pr.Residuals = func(r, p []float64) { calls++; inside(r, p) }
	if r := solve(t, pr, start); r.Evaluations != calls {
		t.Errorf("%d evaluations reported, %d made", r.Evaluations, calls)
	}
}

func TestWrongCalls(t *testing.T) {
	pr, start := puromycin()
	for name, call := range map[string]func(){
		"too few residuals": func() { p := pr; p.M = 1; LeastSquares(p, start, Settings{}) },
		"no parameters":     func() { p := pr; p.N = 0; LeastSquares(p, nil, Settings{}) },
		"short start":       func() { LeastSquares(pr, start[:1], Settings{}) },
		"short bounds":      func() { p := pr; p.Lower = []float64{0}; LeastSquares(p, start, Settings{}) },
		"crossed bounds": func() {
			p := pr
			p.Lower, p.Upper = []float64{0, 1}, []float64{1, 0}
			LeastSquares(p, start, Settings{})
		},
	} {
		func() {
			defer func() {
				if recover() == nil {
					t.Errorf("%s: no panic", name)
				}
			}()
			call()
		}()
	}
}

// TestDifferences compares the differences with known slopes away from and
// next to bounds.
func TestDifferences(t *testing.T) {
	x := []float64{0.3, 1, 2.5}
	f := func(p []float64, x float64) float64 { return p[0] * math.Exp(-p[1]*x) }
	for _, c := range []struct {
		p            []float64
		lower, upper []float64
		tolerance    float64
	}{
		{[]float64{2e6, 0.7}, nil, nil, 1e-9},
		{[]float64{2e-6, 0.7}, nil, nil, 1e-9},
		{[]float64{2, 0}, nil, nil, 1e-9},
		{[]float64{2, 0}, []float64{0, 0}, nil, 1e-8},
		{[]float64{2, 0.7}, []float64{0, 0}, []float64{2, 0.7}, 1e-8},
		{[]float64{2, 0.7}, []float64{1.999999, 0.6999999}, []float64{2.000001, 0.7000001}, 1e-6},
	} {
		pr := curve(2, x, make([]float64, 3), f)
		pr.Lower, pr.Upper = c.lower, c.upper
		inside := pr.Residuals
		pr.Residuals = func(r, p []float64) {
			for i := range p {
				if lower, upper := pr.bounds(i); p[i] < lower || p[i] > upper {
					t.Errorf("evaluated at %v, outside the bounds", p)
				}
			}
			inside(r, p)
		}
		columns := [][]float64{make([]float64, 3), make([]float64, 3)}
		at, a, b := make([]float64, 3), make([]float64, 3), make([]float64, 3)
		pr.Residuals(at, c.p)
		pr.differences(columns, c.p, []float64{1, 1}, at, a, b)
		for k := range x {
			within(t, "slope in p0", columns[0][k], math.Exp(-c.p[1]*x[k]), c.tolerance)
			within(t, "slope in p1", columns[1][k], -c.p[0]*x[k]*math.Exp(-c.p[1]*x[k]), c.tolerance)
		}
	}
}

func ExampleLeastSquares() {
	// A first-order rise of 6 K with a lag of 4 s, logged every 2 s to 0.1 K.
	t := []float64{0, 2, 4, 6, 8, 10, 12}
	y := []float64{0, 2.4, 3.8, 4.7, 5.2, 5.5, 5.7}
	problem := Problem{
		M: len(t), N: 2,
		Residuals: func(r, p []float64) {
			for k := range r {
				r[k] = -p[0]*math.Expm1(-t[k]/p[1]) - y[k]
			}
		},
		Lower: []float64{math.Inf(-1), 0.01},
	}
	result, err := LeastSquares(problem, []float64{5, 1}, Settings{})
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Printf("rise %.2f K ± %.2f, lag %.2f s ± %.2f (%v)\n", result.P[0], result.StdDev[0], result.P[1], result.StdDev[1], result.Stop)
	// Output: rise 5.98 K ± 0.02, lag 3.92 s ± 0.03 (relative offset reached)
}
