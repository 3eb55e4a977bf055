package fit

import (
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

// sample draws count plausible plants of a bounded structure from the
// likelihood of the log, the noise shapes mixed as in its intervals, under a
// prior flat in gain, lags and dead time within their physical bounds.
//
// The lags and the dead time are sampled by the affine-invariant ensemble
// (Goodman and Weare 2010, from memory), which needs no tuning where lags are
// nearly exchangeable or pressed against zero; the gain is drawn from its
// conditional Student's t, so that a record without a plateau keeps the tie
// between gain and lag.
func (b *bounded) sample(count int, rng *rand.Rand) []draw {
	b.activate()
	e := b.e
	var free []int
	for j := range e.held {
		if !e.held[j] {
			free = append(free, j)
		}
	}
	d := len(free)
	walkers := 2 * max(8, 2*d)
	if d == 0 {
		walkers = 2
	}
	spreads := b.spreads()
	s2 := b.s2()
	dof := float64(max(b.rows()-b.mean, 1))

	type walker struct {
		p      point
		target float64
	}
	evaluate := func(eta []float64) walker {
		for j := range eta {
			if eta[j] < e.lower[j] || eta[j] > e.upper[j] {
				return walker{target: math.Inf(-1)}
			}
		}
		p := e.eval(eta, false)
		r2 := math.Max(p.s-b.p.s, 0) / s2
		t := 0.0
		for _, sp := range spreads {
			t += sp.weight * math.Pow(sp.k2, -float64(d)/2) * math.Exp(-0.5*(dof+float64(d))*math.Log1p(r2/(sp.k2*dof)))
		}
		target := math.Log(t)
		if !e.gainFix {
			target -= 0.5 * math.Log(p.gg) // the gain integrated out
		}
		return walker{p, target}
	}
	spread := b.starts(free)
	ws := make([]walker, walkers)
	for i := range ws {
		for try := 0; ; try++ {
			eta := append([]float64(nil), b.p.eta...)
			shrink := math.Pow(0.7, float64(try))
			z := make([]float64, d)
			for k := range z {
				z[k] = rng.NormFloat64() * shrink
			}
			for k, j := range free {
				for l := range z {
					eta[j] += spread[k][l] * z[l]
				}
				if eta[j] < e.lower[j] {
					eta[j] = math.Min(2*e.lower[j]-eta[j], e.upper[j])
				}
			}
			ws[i] = evaluate(eta)
			if ws[i].target > -math.Inf(1) && ws[i].target > -60 || try > 40 {
				break
			}
		}
		if math.IsInf(ws[i].target, -1) {
			ws[i] = evaluate(b.p.eta)
		}
	}
	var out []draw
	emit := func(w walker) {
		k2 := spreads[pickSpread(spreads, rng.Float64())].gain
		g := w.p.gain
		if !e.gainFix {
			t := distuv.StudentsT{Sigma: 1, Nu: dof, Src: rng}.Rand()
			g += t * math.Sqrt(k2*s2/w.p.gg)
		}
		eta := append([]float64(nil), w.p.eta...)
		if !slices.Contains(e.held, true) {
			sort.Sort(sort.Reverse(sort.Float64Slice(eta[:e.nl])))
		}
		out = append(out, draw{g, eta})
	}
	if d == 0 {
		for len(out) < count {
			emit(ws[0])
		}
		return out
	}
	const burn, every = 60, 5
	half := walkers / 2
	for sweep := 0; len(out) < count; sweep++ {
		for side := range 2 {
			for i := range half {
				k := side*half + i
				other := ws[(1-side)*half+rng.IntN(half)]
				u := rng.Float64()
				z := (1 + u) * (1 + u) / 2 // density ∝ 1/√z on [1/2, 2]
				eta := append([]float64(nil), b.p.eta...)
				for _, j := range free {
					eta[j] = other.p.eta[j] + z*(ws[k].p.eta[j]-other.p.eta[j])
				}
				accept := rng.Float64()
				next := evaluate(eta)
				if math.Log(accept) < float64(d-1)*math.Log(z)+next.target-ws[k].target {
					ws[k] = next
				}
			}
		}
		if sweep >= burn && (sweep-burn)%every == 0 {
			for _, k := range rng.Perm(walkers) {
				if len(out) < count {
					emit(ws[k])
				}
			}
		}
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
