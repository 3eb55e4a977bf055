package fit

import (
	"cmp"
	"math"
	"slices"
)

// profiler finds profile-likelihood intervals (Bates and Watts 1988, ch. 6):
// a parameter is held at v, the others are fitted again, and
//
//	r(v) = ±√((S(v) - S)/s²), s² = S/(n-p)
//
// is compared with the quantiles of its mixture over the noise shapes that
// the record does not rule out, in units of the standard error at the best
// shape. For a regular parameter and known noise these are Student's t.
type profiler struct {
	e    *engine
	best point
	s2   float64
	// found is a better optimum met on the way, nil when there is none.
	found *point
	trail [][2]float64 // points passed: value, root over the quantile of its side
}

// hold fits everything else with parameter i (0 gain, 1… eta) at v, from a
// nearby solution.
func (q *profiler) hold(i int, v float64, from point) point {
	return q.holdFrom(i, v, q.predict(i, v, from))
}

// holdFrom is hold from a start.
func (q *profiler) holdFrom(i int, v float64, start []float64) point {
	e := q.e
	lower, upper := append([]float64(nil), e.lower...), append([]float64(nil), e.upper...)
	gainFix, gain := e.gainFix, e.gain
	held := append([]bool(nil), e.held...)
	defer func() {
		e.lower, e.upper, e.gainFix, e.gain, e.held = lower, upper, gainFix, gain, held
	}()
	e.lower, e.upper = append([]float64(nil), lower...), append([]float64(nil), upper...)
	e.held = append([]bool(nil), held...)
	if i == 0 {
		e.gainFix, e.gain = true, v
		return e.descend(start, q.tol())
	}
	j := i - 1
	if j < e.ng { // the lag stays the j-th longest
		for l := range e.ng {
			switch {
			case held[l]:
				continue
			case l < j:
				e.lower[l] = math.Max(e.lower[l], v)
			case l > j:
				e.upper[l] = math.Min(e.upper[l], v)
			}
		}
	}
	start[j] = v
	e.lower[j], e.upper[j] = v, v
	e.held[j] = true
	return e.descend(start, q.tol())
}

// offZero is a start beside p at which the first lag of two rows or less has half of the
// next longer one, taken from the dead time or, where that has not as much or is the one
// held, from that lag; nil where there is none. Next to zero such a lag and the dead time
// are nearly the same to the response, and hardly a slope tells that the lag should grow
// while parameter i is held.
func (q *profiler) offZero(i int, p point) []float64 {
	e := q.e
	k := 1
	for k < e.ng && (e.held[k] || p.eta[k] > 2*e.recs[0].step) {
		k++
	}
	if k >= e.ng || k == i-1 {
		return nil
	}
	start := slices.Clone(p.eta)
	x := start[k-1] / 2
	switch {
	case e.ng != i-1 && !e.held[e.ng] && start[e.ng]-x >= e.lower[e.ng]:
		start[e.ng] -= x
	case k-1 != i-1 && !e.held[k-1]:
		start[k-1] -= x
	default:
		return nil
	}
	start[k] = x
	return start
}

// tol is what a sum of squares may be off by, relative, for r to be good to a
// thousandth at 1.
func (q *profiler) tol() float64 { return math.Max(searchTol, 2e-3*q.s2/q.best.s) }

// predict is where the others will be when parameter i is held at v: on the
// straight line through the optimum and a nearby solution, or along the
// linearised model's.
func (q *profiler) predict(i int, v float64, from point) []float64 {
	value, there := q.value(i), from.gain
	if i > 0 {
		there = from.eta[i-1]
	}
	if there != value {
		share := (v - value) / (there - value)
		out := append([]float64(nil), q.best.eta...)
		for l := range out {
			out[l] = q.near(q.best.eta[l]+share*(from.eta[l]-q.best.eta[l]), from.eta[l], l)
		}
		return out
	}
	out := append([]float64(nil), from.eta...)
	e := q.e
	a := e.reduced(&q.best)
	if i == 0 {
		a = unreduced(&q.best)
	}
	var free []int
	for l := range out {
		if l != i-1 && !e.held[l] && q.best.eta[l] > e.lower[l] && q.best.eta[l] < e.upper[l] && a[l][l] > 0 {
			free = append(free, l)
		}
	}
	rhs := make([]float64, len(out))
	for _, l := range free {
		if i == 0 {
			rhs[l] = -q.best.normal[0][l+1] * (v - value)
		} else {
			rhs[l] = -a[l][i-1] * (v - value)
		}
	}
	if e.damped.factor(a, free, 1e-6) {
		for k, x := range e.damped.solve(rhs, free) {
			l := free[k]
			out[l] = q.near(out[l]+x, out[l], l)
		}
	}
	return out
}

// unreduced is the Gauss-Newton matrix of eta at a held gain.
func unreduced(p *point) [][]float64 {
	out := make([][]float64, len(p.eta))
	for l := range out {
		out[l] = p.normal[l+1][1:]
	}
	return out
}

// near keeps a predicted x of eta[l] within reach of where it was.
func (q *profiler) near(x, was float64, l int) float64 {
	if l < q.e.ng {
		return math.Min(math.Max(x, 0.3*was), math.Max(3*was, q.e.recs[0].step))
	}
	return math.Max(x, q.e.lower[l])
}

// end finds the end of the interval of parameter i in the direction dir (±1)
// where r reaches c; scale is a first guess of the standard error, limit the
// physical end of the parameter's range. It is NaN where r stays below c all
// the way.
func (q *profiler) end(i int, dir, c, scale, limit float64) float64 {
	value := q.value(i)
	r := func(v float64, from point) (float64, point) {
		p := q.hold(i, v, from)
		if rise := math.Max(p.s-q.best.s, 0) / q.s2; rise >= c*c && !(i == 0 && q.endless(p)) {
			// Before an end is believed, a lag at zero must have had the chance to grow.
			if start := q.offZero(i, p); start != nil {
				if other := q.holdFrom(i, v, start); other.s < p.s {
					p = other
				}
			}
		}
		if p.s < q.best.s*(1-1e-7) && (q.found == nil || p.s < q.found.s) {
			cp := p
			q.found = &cp
		}
		root := math.Sqrt(math.Max(p.s-q.best.s, 0) / q.s2)
		q.trail = append(q.trail, [2]float64{v, dir * root / c})
		return root, p
	}
	room := math.Abs(limit - value)
	if !(scale > 0) || math.IsInf(scale, 0) || scale > math.Abs(value) {
		scale = 0.2*math.Abs(value) + 1e-3*q.e.recs[0].step
	}
	x, from := math.Min(c*scale, room), q.best
	xl, rl := 0.0, 0.0
	var xh, rh float64
	for tries := 0; ; tries++ {
		rv, p := r(value+dir*x, from)
		if rv >= c {
			if i == 0 && q.endless(p) {
				return math.NaN()
			}
			xh, rh = x, rv
			break
		}
		if x >= room*(1-1e-12) || tries > 25 {
			return math.NaN()
		}
		if rv > rl || tries == 0 {
			xl, rl = x, rv
		}
		from = p
		grow := 3.0
		if rv > 0.2*c {
			grow = math.Min(1.15*c/rv, 3)
		}
		x = math.Min(x*grow, room)
	}
	b := bracket{lo: xl, hi: xh, fl: rl - c, fh: rh - c} // r is nearly linear in v
	for range 12 {
		if math.Abs(b.hi-b.lo) < 1e-5*b.hi {
			break
		}
		x := b.next()
		rv, p := r(value+dir*x, from)
		from = p
		f := rv - c
		if math.Abs(f) < 2e-3*c {
			return value + dir*x
		}
		b.take(x, f)
	}
	return value + dir*b.middle()
}

// takeTrail hands over the points passed, in order, the optimum among them.
func (q *profiler) takeTrail(value float64) [][2]float64 {
	t := append(q.trail, [2]float64{value, 0})
	q.trail = nil
	slices.SortFunc(t, func(a, b [2]float64) int { return cmp.Compare(a[0], b[0]) })
	return t
}

// endless reports whether a lag of p sits on the limit of the search: there the
// sum of squares rises only because the lag may not grow with the gain.
func (q *profiler) endless(p point) bool {
	for j := range q.e.ng {
		if !q.e.held[j] && p.eta[j] >= 0.999*q.e.upper[j] {
			return true
		}
	}
	return false
}

func (q *profiler) value(i int) float64 {
	if i == 0 {
		return q.best.gain
	}
	return q.best.eta[i-1]
}
