package ident

import (
	"errors"
	"fmt"
	"math"
)

// The levels of the two-point reading. For a first-order element they are
// reached tau/3 and tau after the dead time, so that tau = 1.5·(t63 − t28)
// exactly. The reading at about 28 % and 63 % is in C. L. Smith, Digital
// Computer Process Control, 1972 (citation from memory).
const (
	lowLevel  = 0.28346868942621073 // 1 − e^(−1/3)
	highLevel = 0.63212055882855768 // 1 − e^(−1)
)

// lagRatios are the ratios of neighbouring lags that a first estimate tries
// for a chain of distinct lags.
var lagRatios = []float64{1, 0.6, 0.35, 0.15, 0.04}

// ErrNoResponse says that a bump's response cannot be told from nothing.
var ErrNoResponse = errors.New("the temperature does not answer the bump")

// FirstEstimate returns a plant of the structure that roughly explains one
// bump of the record t (s), y (NaN where missing), to start a fit from. It
// needs a response that comes to an end; where the hold is too short the
// estimate is short too, in gain and lags.
//
// For a lag chain it tries the two-point reading, for equal lags and for lags in
// a few fixed ratios, the moments of the response and, for fopdt, its areas,
// and returns what leaves the smallest sum of squares with the best gain and
// baseline. For ipdt it draws straight lines through the record before the bump
// and through the second half of the hold.
func FirstEstimate(st Structure, t, y []float64, b Bump, law Law) (Plant, error) {
	du := law.Apply(b.To) - law.Apply(b.From)
	rise := b.Rise()
	switch {
	case du == 0 || !finite(du):
		return Plant{}, fmt.Errorf("row %d: the bump does not change the heat", b.Row)
	case math.IsNaN(rise) || rise == 0:
		return Plant{}, fmt.Errorf("row %d: %w", b.Row, ErrNoResponse)
	case st.integrating:
		return estimateIntegrator(st, t, y, b, du)
	}
	z := normalise(t, y, b)
	if len(z.t) < 3 {
		return Plant{}, fmt.Errorf("row %d: only %d temperatures follow the bump", b.Row, len(z.t))
	}
	var best candidate
	for _, c := range z.candidates(st) {
		if z.judge(st, &c); best.lags == nil || c.sse < best.sse {
			best = c
		}
	}
	if best.lags == nil || !(best.gain != 0) {
		return Plant{}, fmt.Errorf("row %d: %w", b.Row, ErrNoResponse)
	}
	return NewPlant(st, best.gain*rise/du, best.lags, best.deadTime)
}

// A rise is the response to a bump, normalised from 0 before to 1 at the end,
// with its times counted from the bump; missing temperatures are left out.
type rise struct{ t, z []float64 }

// mostRows bounds the work of a first estimate; longer holds are averaged.
const mostRows = 2000

func normalise(t, y []float64, b Bump) rise {
	var r rise
	group := (b.End - b.Row + mostRows - 1) / mostRows
	for lo := b.Row; lo < b.End; lo += group {
		var sumT, sumY float64
		rows := 0
		for k := lo; k < min(lo+group, b.End); k++ {
			if !math.IsNaN(y[k]) {
				rows++
				sumT += t[k] - b.Time
				sumY += y[k] - b.Before
			}
		}
		if rows > 0 {
			r.t = append(r.t, sumT/float64(rows))
			r.z = append(r.z, sumY/float64(rows)/b.Rise())
		}
	}
	return r
}

// below is the total time, from the bump on, that the response spends below a
// level, with straight lines between the rows. For a response that rises
// steadily it is the time when the level is reached; noise crosses the level both
// ways and cancels to first order.
func (r rise) below(level float64) float64 {
	total, t0, z0 := 0.0, 0.0, 0.0
	for k, z1 := range r.z {
		t1 := r.t[k]
		switch {
		case z0 < level && z1 < level:
			total += t1 - t0
		case z0 < level:
			total += (t1 - t0) * (level - z0) / (z1 - z0)
		case z1 < level:
			total += (t1 - t0) * (level - z1) / (z0 - z1)
		}
		t0, z0 = t1, z1
	}
	return total
}

// moments returns the mean and the variance of the impulse response dz/dt:
//
//	mean = ∫ (1 − z) dt,  variance = 2·∫ t·(1 − z) dt − mean²
//
// For a lag chain they are the dead time plus the sum of the lags, and the
// sum of the squared lags.
func (r rise) moments() (mean, variance float64) {
	t0, z0, first := 0.0, 0.0, 0.0
	for k, z1 := range r.z {
		t1 := r.t[k]
		mean += (t1 - t0) * (2 - z0 - z1) / 2
		first += (t1 - t0) * (t0*(1-z0) + t1*(1-z1)) / 2
		t0, z0 = t1, z1
	}
	return mean, 2*first - mean*mean
}

// area returns ∫ z dt from the bump to the time given. For a first-order
// element behind a dead time and the time mean = dead time + tau it is tau/e: K.
// J. Åström, T. Hägglund, PID Controllers, 1995 (citation from memory).
func (r rise) area(until float64) float64 {
	area, t0, z0 := 0.0, 0.0, 0.0
	for k, z1 := range r.z {
		t1 := r.t[k]
		if t1 >= until {
			z1 = z0 + (z1-z0)*(until-t0)/(t1-t0)
			return area + (until-t0)*(z0+z1)/2
		}
		area += (t1 - t0) * (z0 + z1) / 2
		t0, z0 = t1, z1
	}
	return area
}

// A candidate is one guess at lags and dead time, with the gain to the
// normalised response that suits it best.
type candidate struct {
	lags     []float64
	deadTime float64
	gain     float64
	sse      float64
}

// candidates returns the guesses for a lag chain.
func (r rise) candidates(st Structure) []candidate {
	var out []candidate
	low, high := r.below(lowLevel), r.below(highLevel)
	mean, variance := r.moments()
	ratios := lagRatios
	if st.NumLags() == 1 {
		ratios = ratios[:1]
	}
	for _, ratio := range ratios {
		shape := make([]float64, st.NumLags())
		for i := range shape {
			shape[i] = math.Pow(ratio, float64(i))
		}
		out = append(out, twoPoint(st, shape, low, high), fromMoments(st, shape, mean, variance))
	}
	if st.order == 1 {
		tau := math.E * r.area(mean)
		out = append(out, scaled([]float64{1}, tau, mean-tau))
	}
	usable := out[:0]
	for _, c := range out {
		if c.lags != nil {
			c.deadTime = max(c.deadTime, 0)
			usable = append(usable, c)
		}
	}
	return usable
}

// twoPoint returns lags in the proportions of shape, and the dead time, for
// which the response is at the two levels at the times low and high.
func twoPoint(st Structure, shape []float64, low, high float64) candidate {
	unitLow, unitHigh := levelTime(st, shape, lowLevel), levelTime(st, shape, highLevel)
	scale := (high - low) / (unitHigh - unitLow)
	return scaled(shape, scale, low-scale*unitLow)
}

// fromMoments returns lags in the proportions of shape, and the dead time, with
// this mean and variance of the impulse response.
func fromMoments(st Structure, shape []float64, mean, variance float64) candidate {
	unit := Plant{Structure: st, Lags: shape}
	var sum, squares float64
	for _, tau := range unit.Elements() {
		sum += tau
		squares += tau * tau
	}
	scale := math.Sqrt(variance / squares)
	return scaled(shape, scale, mean-scale*sum)
}

// scaled returns the candidate, without lags when they make no sense.
func scaled(shape []float64, scale, deadTime float64) candidate {
	if !(scale > 0) || !finite(scale) || !finite(deadTime) {
		return candidate{}
	}
	lags := make([]float64, len(shape))
	for i := range lags {
		lags[i] = scale * shape[i]
	}
	return candidate{lags: lags, deadTime: deadTime}
}

// levelTime is the time at which the unit step response of a chain without
// dead time reaches a level between 0 and 1, by bisection.
func levelTime(st Structure, lags []float64, level float64) float64 {
	var c chain
	c.set(st, lags, false)
	response := func(t float64) float64 {
		var f matrix
		var kick state
		c.transition(&f, t)
		c.kick(&kick, &f)
		return 1 - kick[c.n-1]
	}
	lo, hi := 0.0, c.last()
	for response(hi) < level {
		lo, hi = hi, 2*hi
	}
	for range 60 {
		if middle := lo + (hi-lo)/2; response(middle) < level {
			lo = middle
		} else {
			hi = middle
		}
	}
	return hi
}

// judge sets the candidate's gain, together with a baseline by linear least
// squares, and the sum of squares they leave.
func (r rise) judge(st Structure, c *candidate) {
	step := Input{At: []float64{0}, Value: []float64{1}}
	model := NewSimulator(r.t, step).Response(nil, st, c.lags, c.deadTime)
	n := float64(len(model))
	var sumX, sumZ float64
	for k, x := range model {
		sumX += x
		sumZ += r.z[k]
	}
	var xx, xz, zz float64
	for k, x := range model {
		dx, dz := x-sumX/n, r.z[k]-sumZ/n
		xx, xz, zz = xx+dx*dx, xz+dx*dz, zz+dz*dz
	}
	c.gain, c.sse = 0, zz
	if xx > 0 {
		c.gain, c.sse = xz/xx, zz-xz*xz/xx
	}
}

// estimateIntegrator is FirstEstimate for ipdt.
func estimateIntegrator(st Structure, t, y []float64, b Bump, du float64) (Plant, error) {
	before := lineThrough(t, y, b.Start, b.Row)
	after := lineThrough(t, y, b.Row+(b.End-b.Row)/2, b.End)
	if before.rows < 2 || after.rows < 2 {
		return Plant{}, fmt.Errorf("row %d: too few temperatures before or after the bump", b.Row)
	}
	slope := after.slope - before.slope
	if slope == 0 {
		return Plant{}, fmt.Errorf("row %d: %w", b.Row, ErrNoResponse)
	}
	// The two lines cross when the bump arrives.
	crossing := (before.mean - before.slope*before.at - after.mean + after.slope*after.at) / slope
	return NewPlant(st, slope/du, nil, max(crossing-b.Time, 0))
}
