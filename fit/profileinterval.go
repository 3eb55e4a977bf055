package fit

import (
	"fmt"
	"math"
)

// interval is a confidence interval of one parameter. An end that the data do
// not set is at the parameter's bound, or infinite where there is none.
type interval struct {
	Low, High       float64
	HasLow, HasHigh bool // whether the data set that end
}

// betterMinimum is the error of a profile that came upon a lower sum of
// squares than the one it started from: the fit was not the minimum.
type betterMinimum struct {
	P   []float64
	SSE float64
}

func (e *betterMinimum) Error() string {
	return fmt.Sprintf("profile found a lower sum of squares, %.10g; fit again from there", e.SSE)
}

const (
	profileDigits  = 1e-9 // of the interval's half width, to which an end is found
	profileStretch = 50   // doublings of the first step after which an end counts as open
	profileSlack   = 1e-7 // share of the sum of squares by which a refit must be lower to count as better
)

// profileInterval returns the profile-t interval of parameter i at a
// confidence level (0.95), the set of values x with |τ(x)| ≤ t(ν; (1+level)/2),
//
//	τ(x) = ±√(S̃(x) − S) / s,
//
// where S̃(x) is the sum of squares minimised over the other parameters with
// parameter i held at x, S and s² = S/ν those of best, and ν = M less the
// parameters not at a bound. It follows τ outwards from best and takes the
// first crossing on each side. Bates and Watts, Nonlinear Regression Analysis
// and Its Applications (Wiley 1988), chapter 6 (from memory).
//
// The error is a *betterMinimum, or says that best leaves no residual variance
// to measure with.
func profileInterval(pr Problem, best Result, i int, level float64) (interval, error) {
	freedom := pr.M
	for _, held := range best.AtBound {
		if !held {
			freedom--
		}
	}
	f := profile{pr: pr, best: best, i: i, limit: tQuantile((1+level)/2, float64(freedom))}
	if !(f.limit > 0) || !isFinite(f.limit) || !(best.S2 > 0) {
		return interval{}, fmt.Errorf("profile of parameter %d at level %g: no residual variance to measure with, %d degrees of freedom", i, level, freedom)
	}
	var in interval
	var err error
	if in.Low, in.HasLow, err = f.end(-1); err != nil {
		return interval{}, err
	}
	in.High, in.HasHigh, err = f.end(+1)
	return in, err
}

// profile follows the minimum of a problem while one parameter is held.
type profile struct {
	pr    Problem
	best  Result
	i     int
	limit float64 // |τ| at the ends
}

// held is the minimum with the parameter held at x.
type held struct {
	x   float64
	tau float64 // |τ|, +Inf where the model has no value
	p   []float64
}

// at refits with the parameter held at x, starting from the minimum found at
// a value nearby.
func (f profile) at(x float64, from held) (held, error) {
	pr := f.pr
	pr.Lower, pr.Upper = make([]float64, pr.N), make([]float64, pr.N)
	for k := range pr.N {
		pr.Lower[k], pr.Upper[k] = f.pr.bounds(k)
	}
	pr.Lower[f.i], pr.Upper[f.i] = x, x
	r, err := LeastSquares(pr, from.p, Settings{})
	switch {
	case err != nil: // the model ends before x
		return held{x: x, tau: math.Inf(1), p: from.p}, nil
	case r.SSE < f.best.SSE*(1-profileSlack):
		return held{}, &betterMinimum{P: r.P, SSE: r.SSE}
	}
	return held{x: x, tau: math.Sqrt(max(r.SSE-f.best.SSE, 0) / f.best.S2), p: r.P}, nil
}

// end returns where |τ| crosses its limit in the direction −1 or +1.
func (f profile) end(direction float64) (x float64, exists bool, err error) {
	lower, upper := f.pr.bounds(f.i)
	bound := lower
	if direction > 0 {
		bound = upper
	}
	inside := held{x: f.best.P[f.i], p: f.best.P}
	if inside.x == bound {
		return bound, false, nil
	}
	step := f.firstStep()
	for range profileStretch {
		x := max(lower, min(upper, f.best.P[f.i]+direction*step))
		h, err := f.at(x, inside)
		if err != nil {
			return 0, false, err
		}
		if h.tau >= f.limit {
			x, err := f.crossing(inside, h)
			return x, err == nil, err
		}
		if x == bound {
			break
		}
		inside = h
		step *= 2
	}
	return bound, false, nil
}

// firstStep is the half width of the Wald interval, or a guess where there is none.
func (f profile) firstStep() float64 {
	step := f.limit * f.best.StdDev[f.i]
	if !(step > 0) || !isFinite(step) {
		step = 0.1 * math.Abs(f.best.P[f.i])
	}
	if step == 0 {
		step = 1
	}
	return step
}

// crossing finds |τ| = limit between two values by the Illinois variant of
// false position (Dowell and Jarratt, BIT 11 (1971) 168, from memory), which
// suits a τ that is close to a straight line; where τ is infinite at the
// outside it halves.
func (f profile) crossing(inside, outside held) (float64, error) {
	low, high := inside.tau-f.limit, outside.tau-f.limit
	precision := profileDigits * math.Abs(outside.x-f.best.P[f.i])
	for range 200 {
		width := outside.x - inside.x
		if math.Abs(width) <= precision || high == 0 {
			break
		}
		share := 0.5
		if isFinite(high) {
			share = low / (low - high)
		}
		x := inside.x + share*width
		if x == inside.x || x == outside.x {
			break
		}
		h, err := f.at(x, inside)
		if err != nil {
			return 0, err
		}
		if math.Abs(h.tau-f.limit) <= profileDigits*f.limit {
			return x, nil
		}
		if h.tau < f.limit {
			inside, low = h, h.tau-f.limit
			high /= 2
		} else {
			outside, high = h, h.tau-f.limit
			low /= 2
		}
	}
	return outside.x, nil
}
