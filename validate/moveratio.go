package validate

import "math"

// ratioKnown is the standard error, as a fraction, up to which a factor is told
// (common practice, no source).
const ratioKnown = 0.05

// moveRatio is by what factor the logged moves of the input are larger than
// those that the logged gains ask for when led along the logged temperature.
//
// The noise of the log makes moves of its own in what is asked, which the real
// controller, with its own reading, need not have made; least squares would
// take them for a gain that is too small. So both are weighed by the moves that
// the setpoint alone asks for, which owe nothing to any noise (instrumental
// variables, see [plan.shift]). Its standard error is infinite where the
// setpoint does not move.
func (p *plan) moveRatio(courses []*course) (ratio, se float64, err error) {
	var logged, asked, weight []float64
	for _, c := range courses {
		if !c.even || c.lattice.scan > 1 {
			continue // moves row by row are not the controller's
		}
		b, err := p.beginningOf(p.logged, c)
		if err != nil {
			return 0, 0, err
		}
		led, err := p.lead(p.logged, c, *b, len(c.t)-1)
		if err != nil {
			return 0, 0, err
		}
		quiet, err := p.setpointInput(c)
		if err != nil {
			return 0, 0, err
		}
		logged, asked, weight = append(logged, movesOf(c.u)...), append(asked, movesOf(led)...), append(weight, movesOf(quiet)...)
	}
	ratio, se = instrumentalRatio(logged, asked, weight)
	return ratio, se, nil
}

// movesOf are the differences from row to row.
func movesOf(u []float64) []float64 {
	out := make([]float64, len(u)-1)
	for i := range out {
		out[i] = u[i+1] - u[i]
	}
	return out
}

// instrumentalRatio is Σzy/Σzx with its standard error, which is infinite
// where the instrument z moves nothing.
func instrumentalRatio(y, x, z []float64) (ratio, se float64) {
	var zy, zx, zz, left float64
	for i := range z {
		zy, zx, zz = zy+z[i]*y[i], zx+z[i]*x[i], zz+z[i]*z[i]
	}
	if zx == 0 || zz == 0 {
		return 0, math.Inf(1)
	}
	ratio = zy / zx
	for i := range z {
		e := y[i] - ratio*x[i]
		left += e * e
	}
	return ratio, math.Sqrt(zz*left/float64(len(z))) / math.Abs(zx)
}
