package fit

import (
	"math"
	"slices"
	"sort"
)

// reduced returns the Gauss-Newton matrix of eta with the gain eliminated
// (Kaufman's form of variable projection; from memory).
// It is valid until the next call.
func (e *engine) reduced(p *point) [][]float64 {
	n := len(p.eta)
	a := columnsIn(&e.square, n, n)
	for i := range n {
		for j := range n {
			a[i][j] = p.normal[i+1][j+1]
			if !e.gainFix && p.normal[0][0] > 0 {
				a[i][j] -= p.normal[0][i+1] * p.normal[0][j+1] / p.normal[0][0]
			}
		}
	}
	return a
}

// movable lists the parameters that may move from p: not held, and not
// pressed against a bound. The list is valid until the next call.
func (e *engine) movable(p *point, a [][]float64) []int {
	free := e.free[:0]
	for j := range p.eta {
		out := (p.eta[j] <= e.lower[j] && p.grad[j] < 0) || (p.eta[j] >= e.upper[j] && p.grad[j] > 0)
		if !e.held[j] && !out && a[j][j] > 0 {
			free = append(free, j)
		}
	}
	e.free = free
	return free
}

// uncut are those in free whose step x came to at least half, where a bound, or a lag
// just above zero, has cut those of others; none where that did not happen.
func (e *engine) uncut(p *point, free []int, x, next []float64) []int {
	var whole []int
	for i, j := range free {
		if math.Abs(next[j]-p.eta[j]) >= 0.5*math.Abs(x[i]) {
			whole = append(whole, j)
		}
	}
	if len(whole) == len(free) {
		return nil
	}
	return whole
}

// within steps on from next, where the step x of the parameters in free has been cut to
// so little that the rest of it leads nowhere: those that were cut keep what is left of
// their step where it leads downhill, and the others take the step that goes with it, until
// that promises enough.
func (e *engine) within(p *point, a [][]float64, free []int, x, next []float64, lambda, enough float64) (predicted float64) {
	all := free
	for len(free) > 0 {
		rest := e.uncut(p, free, x, next)
		if len(rest) == 0 {
			break
		}
		rhs := make([]float64, len(p.eta))
		move := make([]float64, len(p.eta))
		for _, j := range all {
			if slices.Contains(rest, j) {
				continue
			}
			if move[j] = next[j] - p.eta[j]; move[j]*p.grad[j] < 0 {
				move[j], next[j] = 0, p.eta[j]
			}
		}
		for _, j := range rest {
			rhs[j] = p.grad[j]
			for k, d := range move {
				rhs[j] -= a[j][k] * d
			}
		}
		if !e.damped.factor(a, rest, lambda) {
			break
		}
		x = e.damped.solve(rhs, rest)
		for i, j := range rest {
			next[j] = e.kept(p, j, p.eta[j]+x[i])
		}
		free = rest
		predicted = 0
		for _, j := range all {
			predicted += p.grad[j] * (next[j] - p.eta[j])
		}
		if predicted > enough {
			break
		}
	}
	return predicted
}

// kept is v, where parameter j may go from p in one step.
func (e *engine) kept(p *point, j int, v float64) float64 {
	if j < e.ng { // a lag changes by at most a factor in one step, but can leave zero
		v = math.Min(math.Max(v, 0.2*p.eta[j]), math.Max(5*p.eta[j], e.recs[0].step))
	}
	return math.Min(math.Max(v, e.lower[j]), e.upper[j])
}

// advance takes the step x of the parameters in free from p, kept inside the
// bounds, and returns the new eta, valid until the next call, with the reduction
// the gradient promises.
func (e *engine) advance(p *point, free []int, x []float64) (next []float64, predicted float64) {
	e.next = append(e.next[:0], p.eta...)
	next = e.next
	for i, j := range free {
		next[j] = e.kept(p, j, p.eta[j]+x[i])
		predicted += p.grad[j] * (next[j] - p.eta[j])
	}
	return next, predicted
}

// descend runs a damped Gauss-Newton iteration with bounds from eta until the
// sum of squares changes by less than tol, relative.
func (e *engine) descend(eta []float64, tol float64) point {
	e.next = append(e.next[:0], eta...)
	start := e.next
	for j := range start {
		start[j] = math.Min(math.Max(start[j], e.lower[j]), e.upper[j])
	}
	p := e.eval(start, true)
	lambda, small := 1e-3, 0
	for range 80 {
		a := e.reduced(&p)
		free := e.movable(&p, a)
		if len(free) == 0 {
			return p
		}
		improved := false
		for lambda < 1e12 {
			if !e.damped.factor(a, free, lambda) {
				lambda = math.Max(10*lambda, 1e-9)
				continue
			}
			x := e.damped.solve(p.grad, free)
			next, predicted := e.advance(&p, free, x)
			enough := 0.1 * tol * p.s
			if predicted <= enough && tol != scanTol { // a scan need not come to the bottom of every interval
				predicted = e.within(&p, a, free, x, next, lambda, enough)
			}
			if predicted <= enough {
				return p
			}
			q := e.eval(next, true)
			if q.s < p.s {
				if p.s-q.s < tol*p.s {
					small++
				} else {
					small = 0
				}
				e.drop(p)
				p, improved = q, true
				lambda = math.Max(lambda/8, 1e-10)
				break
			}
			e.drop(q)
			lambda *= 6
		}
		if !improved || small >= 2 {
			return p
		}
	}
	return p
}

// The tolerances of a scan of intervals, of a search and of a final fit, relative
// in the sum of squares.
const (
	scanTol   = 1e-4
	searchTol = 1e-7
	finalTol  = 1e-13
)

// search descends from every start and then through the sampling intervals of
// dead time around the best: the sum of squares has a kink wherever a change
// of the input, delayed, meets a sample, so one descent is not to be trusted.
func (e *engine) search(starts [][]float64) point {
	var found []point
	for _, s := range starts {
		found = append(found, e.descend(s, searchTol))
	}
	sort.SliceStable(found, func(i, j int) bool { return found[i].s < found[j].s })
	best := found[0]
	for i, f := range found {
		if i > 2 || f.s > 1.5*found[0].s {
			break
		}
		if i > 0 && near(f.eta, found[0].eta) {
			continue
		}
		if q := e.intervals(f); q.s < best.s {
			best = q
		}
	}
	return e.descend(best.eta, finalTol)
}

func near(a, b []float64) bool {
	for i := range a {
		if math.Abs(a[i]-b[i]) > 1e-3*(math.Abs(a[i])+math.Abs(b[i])) {
			return false
		}
	}
	return true
}

// intervals searches the sampling intervals of dead time around p, outward on
// both sides until two in a row are clearly worse.
func (e *engine) intervals(p point) point {
	h, d := e.recs[0].step, e.ng
	lo, hi := e.lower[d], e.upper[d]
	if e.held[d] {
		return p
	}
	defer func() { e.lower[d], e.upper[d] = lo, hi }()
	best := p
	worse := 12 * p.s / float64(max(e.samples()-len(p.eta)-2, 1))
	m0 := math.Floor(p.eta[d] / h)
	try := func(m, frac float64, from []float64) (point, bool) {
		a, b := math.Max(m*h, lo), math.Min((m+1)*h, hi)
		if a >= b {
			return point{}, false
		}
		e.lower[d], e.upper[d] = a, b
		start := slices.Clone(from)
		start[d] = a + frac*(b-a)
		q := e.descend(start, scanTol)
		if q.s < best.s+worse/12 { // near enough to become the best
			q = e.descend(q.eta, searchTol)
		}
		if q.s < best.s {
			best = q
		}
		return q, true
	}
	try(m0, 0.1, p.eta)
	try(m0, 0.9, p.eta)
	for _, dir := range []float64{-1, 1} {
		from, miss := p.eta, 0
		for k := 1.0; k <= 12 && miss < 2; k++ {
			q, ok := try(m0+dir*k, 0.5-0.48*dir, from) // at its end next to the one before
			if !ok {
				break
			}
			if e.samples() <= fewSamples {
				if other, _ := try(m0+dir*k, 0.5, e.traded(from, (m0+dir*k+0.5)*h)); other.s < q.s {
					q = other
				}
			}
			if q.s > best.s+worse {
				miss++
			} else {
				miss = 0
			}
			from = q.eta
		}
	}
	return best
}

// fewSamples is the number of rows up to which an interval of dead time is entered in its
// middle too: few rows leave several optima in one.
const fewSamples = 60

// traded is eta with the longest lag giving part of what a longer dead time takes.
func (e *engine) traded(eta []float64, dead float64) []float64 {
	s := slices.Clone(eta)
	if e.ng > 0 && !e.held[0] {
		s[0] = math.Max(s[0]-0.3*(dead-s[e.ng]), 0.3*s[0])
	}
	return s
}

func (e *engine) samples() int {
	n := 0
	for _, r := range e.recs {
		n += len(r.t)
	}
	return n
}

// coarse scans lag and dead time of a single-lag plant and returns the best
// few places, best first: starts for everything else. The grid runs from
// below the sampling interval to the length of the record.
func (e *engine) coarse() [][]float64 {
	r := e.recs[0]
	type place struct {
		s   float64
		eta []float64
	}
	const nTau, nDead = 14, 20
	first := 0.3 * r.step
	ratio := math.Pow(r.span/first, 1/float64(nTau-1))
	dmax := math.Min(e.upper[e.ng], 0.5*r.span)
	var places []place
	for i := range nTau {
		for k := range nDead {
			x := float64(k) / (nDead - 1)
			eta := []float64{first * math.Pow(ratio, float64(i)), dmax * x * x} // finer near zero
			if e.ng == 0 {
				eta = eta[1:]
			}
			for j := range eta {
				eta[j] = math.Min(math.Max(eta[j], e.lower[j]), e.upper[j])
			}
			places = append(places, place{e.eval(eta, false).s, eta})
		}
		if e.ng == 0 {
			break
		}
	}
	sort.SliceStable(places, func(i, j int) bool { return places[i].s < places[j].s })
	var out [][]float64
	for _, p := range places {
		far := true
		for _, o := range out {
			k := len(o) - 1
			if math.Abs(o[k]-p.eta[k]) < 0.03*dmax && (k == 0 || math.Abs(math.Log(o[0]/p.eta[0])) < 1.2*math.Log(ratio)) {
				far = false
			}
		}
		if far {
			out = append(out, p.eta)
		}
		if len(out) == 4 {
			break
		}
	}
	return out
}
