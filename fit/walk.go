package fit

import "math"

// walkRange is the range of the walk, per s, that a record can speak about:
// over its span it adds from a tenth of the standard deviation of the rest, which
// hardly matters, to thirty times.
func (t *tangent) walkRange() (lo, hi float64) {
	return 0.1 * 0.1 / t.rec.span, 30 * 30 / t.rec.span
}

// bestWalk finds the noise shape of greatest restricted likelihood among those
// that wander: from near, when it does already, or else from a coarse grid, since
// what looked like long correlation may be a walk under a short one.
func (t *tangent) bestWalk(near shape) node {
	low, high := t.tcRange()
	least, most := t.walkRange()
	best := node{dev: math.Inf(1)}
	better := func(s shape) bool {
		s.tc = math.Min(math.Max(s.tc, low), high)
		s.white = math.Min(math.Max(s.white, 0), 0.9999)
		s.walk = math.Min(math.Max(s.walk, least), most)
		n := t.judge(s)
		if n.dev < best.dev-1e-9 {
			best = n
			return true
		}
		return false
	}
	step := [3]float64{0.3, 0.1, 0.4}
	if near.walk > 0 {
		better(near)
	} else {
		h := t.rec.step
		for _, sd := range []float64{0.2, 1, 5} {
			for _, s := range []shape{near, {tc: near.tc / 4, white: near.white}, {tc: h, white: 0.6}, {tc: 3 * h, white: 0.1}} {
				s.walk = sd * sd / t.rec.span
				better(s)
			}
		}
		step = [3]float64{0.6, 0.2, 0.8}
	}
	closeIn := func(step [3]float64) {
		for step[0] > 0.1 {
			c, moved := best.shape, false
			for axis := range 3 {
				for _, sign := range []float64{1, -1} {
					if better(c.moved(axis, sign*step[axis])) {
						moved = true
						break
					}
				}
			}
			if moved { // on in the direction that all the moves together took
				d := best.shape
				better(shape{tc: d.tc * d.tc / c.tc, white: 2*d.white - c.white, walk: d.walk * d.walk / c.walk})
				continue
			}
			for axis := range step {
				step[axis] /= 2
			}
		}
	}
	closeIn(step)
	if best.shape.white == 0 {
		for _, w := range littleWhite {
			s := best.shape
			s.white = w
			better(s)
		}
	}
	if w := best.shape.white; w > 0 && w <= littleWhite[0] {
		closeIn([3]float64{0.2, w / 2, 0.4})
	}
	return best
}

// moved is the shape a step further along an axis: log tc, white, log walk.
func (s shape) moved(axis int, d float64) shape {
	switch axis {
	case 0:
		s.tc *= math.Exp(d)
	case 1:
		s.white += d
	default:
		s.walk *= math.Exp(d)
	}
	return s
}
