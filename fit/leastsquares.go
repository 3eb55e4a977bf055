package fit

import (
	"errors"
	"fmt"
	"math"
)

// Problem is a nonlinear least-squares problem: find the N parameters p that
// minimise the sum of squares S(p) = Σ r(p)² of M residuals, inside a box.
type Problem struct {
	M, N int // residuals, parameters; M ≥ N ≥ 1

	// Residuals fills r (M numbers) at p (N numbers). A NaN or an infinity says
	// that the model has no value there: the solver then takes a shorter step.
	Residuals func(r, p []float64)

	// Jacobian fills the derivatives at p by columns: columns[i][k] = ∂r[k]/∂p[i],
	// N columns of M numbers. nil means central differences of Residuals.
	Jacobian func(columns [][]float64, p []float64)

	// Lower and Upper are the bounds of the parameters, N numbers each; nil
	// means none. A parameter whose bounds are equal is held there.
	Lower, Upper []float64
}

// Settings steers LeastSquares. The zero value is ready to use.
type Settings struct {
	MaxIterations int     // steps tried, taken or not; 0 means 5000
	Offset        float64 // relative offset at which a minimum counts as reached; 0 means 1e-10
}

// Result is the outcome of LeastSquares.
type Result struct {
	P       []float64 // parameters at the lowest sum of squares found, N numbers
	AtBound []bool    // parameters that their bounds hold, against the slope or because the bounds are equal

	SSE float64 // sum of squares at P
	S2  float64 // SSE/(M − parameters not at a bound): the variance of one residual; NaN where nothing is left over

	// Covariance is (JᵀJ)⁻¹ over the parameters that are not at a bound, N×N
	// with zeros elsewhere. Times S2 it is the covariance of P where the errors
	// are independent and of one size. nil where the columns of J are linearly
	// dependent to working precision.
	Covariance [][]float64
	StdDev     []float64 // √(S2·Covariance[i][i]), N numbers; NaN at a bound and where Covariance is nil

	// Offset is the relative offset at P, a length without unit: how far P is
	// from the minimum in terms of the standard deviations (see
	// linearised.offset). At 1e-3 the distance is already of no account.
	Offset      float64
	Stop        Stop
	Iterations  int // steps tried
	Evaluations int // calls of Problem.Residuals
}

// Stop says why the solver stopped.
type Stop int

const (
	StopIterations Stop = iota // the iterations ran out
	StopOffset                 // the relative offset reached its limit: a minimum
	StopRounding               // the offset no longer falls, rounding of the residuals hides the rest: a minimum
	StopResolution             // what is left to gain is as small as what the last digits of P do: a minimum, mostly a perfect fit
	StopStuck                  // no step lowers the sum of squares though the derivatives promise one: a kink, or wrong derivatives
	StopNotFinite              // derivatives that are not finite
)

// String returns the reason in a few words.
func (s Stop) String() string {
	switch s {
	case StopOffset:
		return "relative offset reached"
	case StopRounding:
		return "offset down to rounding"
	case StopResolution:
		return "resolution of the parameters reached"
	case StopStuck:
		return "no step lowers the sum of squares"
	case StopNotFinite:
		return "derivatives not finite"
	default:
		return "iterations ran out"
	}
}

// Early reports whether the solver stopped before it knew to be at a minimum:
// the parameters are then the best found, and the covariance is not to be trusted.
func (s Stop) Early() bool {
	return s == StopIterations || s == StopStuck || s == StopNotFinite
}

// ErrNotFinite says that a model has no value where a search should start.
var ErrNotFinite = errors.New("residuals are not finite")

// LeastSquares minimises the sum of squares of pr from start (N numbers; moved
// into the bounds first). It finds one local minimum, at the bounds or inside.
//
// The method is the damped Gauss–Newton step of Levenberg (Quart. Appl. Math. 2
// (1944) 164–168) and Marquardt (J. SIAM 11 (1963) 431–441), with the scaling
// of Moré (Lecture Notes in Mathematics 630 (1978) 105–116), the damping rule
// of Nielsen (report IMM-REP-1999-05, 1999), the geodesic acceleration of
// Transtrum and Sethna (arXiv:1201.5885, 2012) for curved valleys, an active
// set for the bounds, and the relative offset of Bates and Watts
// (Technometrics 23 (1981) 179–183) to stop; all citations from memory. Steps
// come from a QR decomposition of J, never from JᵀJ.
//
// It panics on a wrong call: lengths that disagree, M < N, crossed bounds. The
// error wraps ErrNotFinite where the residuals at the start are not finite.
// Where the search ended early, Result.Stop says so; that is no error.
func LeastSquares(pr Problem, start []float64, settings Settings) (Result, error) {
	pr.check(start)
	s := newSearch(pr, start, settings)
	if !isFinite(s.at.sse) {
		return Result{}, fmt.Errorf("least squares from %.6g: %w", s.at.p, ErrNotFinite)
	}
	stop := s.run()
	return s.result(stop), nil
}

// check panics where the problem is put wrongly.
func (pr Problem) check(start []float64) {
	switch {
	case pr.N < 1 || pr.M < pr.N:
		panic(fmt.Sprintf("fit: %d residuals cannot settle %d parameters", pr.M, pr.N))
	case len(start) != pr.N:
		panic(fmt.Sprintf("fit: a start of %d numbers for %d parameters", len(start), pr.N))
	case pr.Lower != nil && len(pr.Lower) != pr.N, pr.Upper != nil && len(pr.Upper) != pr.N:
		panic(fmt.Sprintf("fit: bounds do not have %d numbers", pr.N))
	}
	for i := range start {
		if lower, upper := pr.bounds(i); !(lower <= upper) {
			panic(fmt.Sprintf("fit: the bounds of parameter %d cross", i))
		}
	}
}

// bounds returns the bounds of parameter i, infinite where there are none.
func (pr Problem) bounds(i int) (lower, upper float64) {
	lower, upper = math.Inf(-1), math.Inf(1)
	if pr.Lower != nil {
		lower = pr.Lower[i]
	}
	if pr.Upper != nil {
		upper = pr.Upper[i]
	}
	return lower, upper
}

// clamp moves p into the bounds.
func (pr Problem) clamp(p []float64) {
	for i, x := range p {
		lower, upper := pr.bounds(i)
		p[i] = max(lower, min(upper, x))
	}
}
