package fit

import (
	"cmp"
	"math"
	"math/rand/v2"
	"slices"
	"sort"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/stat/distuv"
)

// draw is one plausible plant of a structure.
type draw struct {
	gain float64
	eta  []float64 // lags longest first, dead time
}

// posterior is the distribution that the plausible plants of a structure are
// drawn from: the likelihood of the log, the noise shapes mixed as in its
// intervals, under a prior flat in gain, lags and dead time within their
// physical bounds. The gain is integrated out and drawn last, from its
// conditional Student's t, so that a record without a plateau keeps the tie
// between gain and lag.
type posterior struct {
	b       *bounded
	e       *engine // b's, on fewer rows
	least   float64 // its sum of squares at the optimum
	free    []int   // eta that are not held
	spreads []spread
	heights []float64 // density of each at the optimum, up to a constant
	s2, dof float64
	floor   float64     // least square of the response, see plausibleResponse
	root    [][]float64 // square root of a covariance to begin with
	rng     *rand.Rand
}

// plantAt is an eta with its gain, the weighted square of the gain's direction there
// and the logarithm of its density, up to a constant.
type plantAt struct {
	eta               []float64
	gain, gg, density float64
}

// plausibleResponse is the part of its final value that a plausible plant's
// response must reach within the log, in the mean of the rows. What comes later,
// and so small, could be of any gain.
const plausibleResponse = 1e-3

func (b *bounded) posterior(rng *rand.Rand) *posterior {
	q := &posterior{b: b, spreads: b.spreads(), s2: b.s2(), dof: float64(max(b.rows()-b.mean, 1)), rng: rng}
	for j, held := range b.e.held {
		if !held {
			q.free = append(q.free, j)
		}
	}
	for _, sp := range q.spreads {
		q.heights = append(q.heights, sp.weight*math.Pow(sp.k2, -float64(len(q.free))/2))
	}
	q.root = b.starts(q.free)
	q.e = b.sketch()
	optimum := q.e.eval(b.p.eta, false)
	q.least = optimum.s
	q.floor = math.Min(plausibleResponse*plausibleResponse*q.e.unity(), optimum.gg)
	return q
}

// sketch is the engine on records that are averaged more widely.
func (b *bounded) sketch() *engine {
	recs := make([]*record, len(b.e.recs))
	for i, r := range b.e.recs {
		recs[i] = r.sketch(b.p.eta[b.e.ng], b.zone())
	}
	e := newEngine(b.st, recs)
	e.lower, e.upper, e.held = b.e.lower, b.e.upper, b.e.held
	e.gain, e.gainFix = b.e.gain, b.e.gainFix
	return e
}

// at evaluates eta, and keeps it.
func (q *posterior) at(eta []float64) plantAt {
	e, d := q.e, float64(len(q.free))
	for j := range eta {
		if eta[j] < e.lower[j] || eta[j] > e.upper[j] {
			return plantAt{density: math.Inf(-1)}
		}
	}
	p := e.eval(eta, false)
	if p.gg < q.floor {
		return plantAt{density: math.Inf(-1)}
	}
	r2 := math.Max(p.s-q.least, 0) / q.s2
	t := 0.0
	for i, sp := range q.spreads {
		t += q.heights[i] * math.Exp(-0.5*(q.dof+d)*math.Log1p(r2/(sp.k2*q.dof)))
	}
	density := math.Log(t)
	if !e.gainFix { // the gain integrated out, over its own sign
		density += math.Log(q.rightSign(p)) - 0.5*math.Log(p.gg)
	}
	if math.IsNaN(density) {
		density = math.Inf(-1)
	}
	return plantAt{eta, p.gain, p.gg, density}
}

// rightSign is the probability that the gain at p has the sign of the estimate: a
// heater does not cool.
func (q *posterior) rightSign(p point) float64 {
	return studentCDF(math.Copysign(p.gain, p.gain*q.b.p.gain)*math.Sqrt(p.gg/q.s2), q.dof)
}

// plant draws the gain of a place, of the estimate's sign, and returns the whole
// plant.
func (q *posterior) plant(w plantAt) draw {
	g := w.gain
	for range 200 {
		if q.b.e.gainFix {
			break
		}
		k2 := q.spreads[pickSpread(q.spreads, q.rng.Float64())].gain
		t := distuv.StudentsT{Sigma: 1, Nu: q.dof, Src: q.rng}.Rand()
		if g = w.gain + t*math.Sqrt(k2*q.s2/w.gg); g*q.b.p.gain > 0 {
			break
		}
		g = w.gain
	}
	if !isFinite(g) || g == 0 {
		g = q.b.p.gain
	}
	eta := append([]float64(nil), w.eta...)
	if !slices.Contains(q.b.e.held, true) {
		sort.Sort(sort.Reverse(sort.Float64Slice(eta[:q.b.e.nl])))
	}
	return draw{g, eta}
}

// sample draws count plausible plants of a bounded structure. Where the
// posterior is close to its linearisation, they are taken from proposals by
// rejection, each independent of the others; where lags are nearly exchangeable
// or pressed against zero, from proposals that adapt to it (see adapt).
func (b *bounded) sample(count int, rng *rand.Rand) []draw {
	if b.regular() {
		return b.sampleEveryRow(count, rng)
	}
	b.activate()
	q := b.posterior(rng)
	var out []draw
	if len(q.free) == 0 {
		w := q.at(b.p.eta)
		for range count {
			out = append(out, q.plant(w))
		}
		return out
	}
	first := q.propose(firstProposals)
	taken, ok := q.reject(first, count)
	if !ok {
		taken = q.adapt(first, count)
	}
	for _, w := range taken {
		out = append(out, q.plant(w))
	}
	return out
}

// spread is a member of the noise mixture reduced to how much wider (variance)
// the posterior is under it than at the shapes in force: on the whole, and for
// the gain, which slow noise hits most.
type spread struct{ weight, k2, gain float64 }

func (b *bounded) spreads() []spread {
	ref := b.reference
	out := make([]spread, 0, len(b.members))
	for _, m := range b.members {
		logs, n := 0.0, 0
		for i := range m.cov {
			if ref[i][i] > 0 && m.cov[i][i] > 0 {
				logs += math.Log((m.cov[i][i] + m.shift[i]*m.shift[i]) / ref[i][i])
				n++
			}
		}
		k2 := 1.0
		if n > 0 {
			k2 = math.Exp(logs / float64(n))
		}
		s := spread{m.weight, k2, k2}
		if ref[0][0] > 0 {
			s.gain = math.Max((m.cov[0][0]+m.shift[0]*m.shift[0])/ref[0][0], k2)
		}
		out = append(out, s)
	}
	return merged(out)
}

// merged joins spreads that differ by less than a tenth.
func merged(ss []spread) []spread {
	slices.SortFunc(ss, func(a, b spread) int { return cmp.Compare(a.k2, b.k2) })
	var out []spread
	for _, s := range ss {
		n := len(out)
		if n == 0 || s.k2 > 1.1*out[n-1].k2 {
			out = append(out, s)
			continue
		}
		o := &out[n-1]
		w := o.weight + s.weight
		o.k2 = (o.weight*o.k2 + s.weight*s.k2) / w
		o.gain = (o.weight*o.gain + s.weight*s.gain) / w
		o.weight = w
	}
	return out
}

func pickSpread(ss []spread, u float64) int {
	for i, s := range ss {
		if u -= s.weight; u < 0 {
			return i
		}
	}
	return 0
}

// starts is a square root of a covariance from which the walkers start: that
// of the linearised model where it is regular, the widths of the intervals
// where it is not.
func (b *bounded) starts(free []int) [][]float64 {
	d := len(free)
	cov := mat.NewSymDense(max(d, 1), nil)
	for k, j := range free {
		for l, m := range free {
			v := 0.0
			if b.alone(j+1) && b.alone(m+1) {
				v = b.cov[j+1][m+1]
			}
			cov.SetSym(k, l, v)
		}
		width := b.est[j+1].width()
		if v := cov.At(k, k); !(v > 0) || v > width*width {
			for l := range free {
				cov.SetSym(k, l, 0)
			}
			cov.SetSym(k, k, width*width/16)
		}
	}
	var ch mat.Cholesky
	out := columns(d, d)
	if d > 0 && ch.Factorize(cov) {
		var l mat.TriDense
		ch.LTo(&l)
		for i := range d {
			for j := 0; j <= i; j++ {
				out[i][j] = l.At(i, j)
			}
		}
		return out
	}
	for i, j := range free {
		out[i][i] = b.est[j+1].width() / 4
	}
	return out
}

// width is the length of the interval, with the value standing in for an end
// that the log does not set.
func (v estimate) width() float64 {
	lo, hi := v.low, v.high
	if math.IsNaN(lo) {
		lo = math.Min(0, v.value)
	}
	if math.IsNaN(hi) {
		hi = 3 * math.Abs(v.value)
	}
	return math.Max(hi-lo, 1e-9*math.Abs(v.value)+1e-12)
}
