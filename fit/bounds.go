package fit

import (
	"math"
	"math/rand/v2"
	"slices"
)

// estimate is a parameter with its bounds; NaN where there is none.
type estimate struct {
	value, se, low, high float64
	fixed                bool
}

// bounded is a fitted structure with the intervals of gain, lags and dead
// time, in this order.
type bounded struct {
	*fitted
	est       []estimate
	fine      *polished      // optimum on every row, nil when it is that of fitted
	written   *Model         // as it stands in the card, once it does
	members   []member       // linearised posterior over the noise shapes, coinciding lags as one
	nodes     [][]node       // of every record
	reference [][]float64    // linearised covariance at the shapes in force
	lin       [][]estimate   // per record: the fixed linear columns (baseline, drift)
	trails    [][][2]float64 // profile of est: value, root over its quantile, ascending
	cov       [][]float64    // Wald covariance of est, NaN rows where there is none
}

// bound finds the intervals of f at the level, and improves f when a better
// optimum turns up on the way.
func (s *study) bound(f *fitted, level float64, rng *rand.Rand) *bounded {
	f.activate()
	defer f.e.release()
	for range 3 {
		b, better := s.tryBound(f, level, rng)
		if better == nil {
			return b
		}
		f.p = f.e.descend(better.eta, finalTol)
		s.coincide(f)
		s.complete(f)
		s.score(f)
	}
	b, _ := s.tryBound(f, level, rng)
	return b
}

func (s *study) tryBound(f *fitted, level float64, rng *rand.Rand) (*bounded, *point) {
	e := f.e
	b := &bounded{fitted: f}
	ts := f.tangents()
	nodes := make([][]node, len(ts))
	for i, t := range ts {
		n := t.evaluate(s.recs[i].shape)
		n.weight = 1
		nodes[i] = []node{n}
	}
	here := members(nodes, rng)[0] // at the shapes in force; of several records, one draw
	if len(ts) > 1 {
		here = atBest(nodes)
	}
	b.members = []member{here}
	if !s.white && !s.refuted {
		for i, t := range ts {
			nodes[i] = t.mixture(nodes[i][0], s.walks[i], level)
		}
		b.members = members(nodes, rng)
	}
	b.reference, b.nodes = here.cov, nodes
	cov := pooled(b.members)

	// Of a log of which only an excerpt is in use, every row gives the widths where the
	// linearised model serves.
	regular := f.regular()
	shares := slices.Repeat([]float64{1}, e.nl+2)
	if regular {
		shares = b.narrower(here)
	}
	q := &profiler{e: e, best: f.p, s2: f.s2()}
	n := e.nl + 2
	b.est = make([]estimate, n)
	b.trails = make([][][2]float64, n)
	b.cov = columns(n, n)
	for i := range n {
		v := &b.est[i]
		if v.value = q.value(i); regular {
			v.value = f.full.value(i)
		}
		if (i == 0 && e.gainFix) || (i > 0 && e.held[i-1]) {
			v.fixed, v.se, v.low, v.high = true, 0, v.value, v.value
			continue
		}
		g := f.direction(i)
		v.se = math.NaN()
		if c := cov[g][g]; c > 0 && f.alone(i) {
			v.se = math.Sqrt(c) * shares[i]
		}
		lo, hi := b.quantiles(here, g, level)
		scale := math.Sqrt(here.cov[g][g]) * shares[i]
		lowEnd, highEnd := b.reach(i, v.value)
		if s.refuted || regular {
			v.low, v.high = inside(v.value-lo*scale, lowEnd, highEnd), inside(v.value+hi*scale, lowEnd, highEnd)
			continue
		}
		v.low = q.end(i, -1, lo, scale, lowEnd)
		v.high = q.end(i, 1, hi, scale, highEnd)
		b.trails[i] = q.takeTrail(v.value)
	}
	for i := range n {
		for j := range n {
			b.cov[i][j] = cov[f.direction(i)][f.direction(j)] * shares[i] * shares[j]
		}
	}
	if f.full == nil {
		b.lin = f.linear(b, level)
		return b, q.found
	}
	b.moveTo(f.full)
	b.linearFromEveryRow(here, cov, level)
	return b, q.found
}

// eta are lags and dead time as stated.
func (b *bounded) eta() []float64 {
	out := make([]float64, 0, len(b.est)-1)
	for _, e := range b.est[1:] {
		out = append(out, e.value)
	}
	return out
}

// reach is the range that parameter i may take: the gain keeps its sign.
func (b *bounded) reach(i int, value float64) (low, high float64) {
	const far = 1e4
	switch {
	case i > 0:
		return b.e.lower[i-1], b.e.upper[i-1]
	case value < 0:
		return far * value, 0
	}
	return 0, far * value
}

// inside is x, or NaN where the parameter's range ends before it.
func inside(x, low, high float64) float64 {
	if x <= low || x >= high {
		return math.NaN()
	}
	return x
}

// direction is the index in the linearised model of parameter i (0 gain, 1…).
func (f *fitted) direction(i int) int {
	switch {
	case i == 0:
		return 0
	case i <= f.e.nl:
		return 1 + f.groups[i-1]
	}
	ng := 0
	for _, g := range f.groups {
		ng = max(ng, g+1)
	}
	return ng + 1
}

// alone reports whether parameter i has a direction of its own: a lag that
// coincides with another has no standard error.
func (f *fitted) alone(i int) bool {
	if i == 0 || i > f.e.nl {
		return true
	}
	n := 0
	for _, g := range f.groups {
		if g == f.groups[i-1] {
			n++
		}
	}
	return n == 1
}

// quantiles returns how far, in standard errors at the shapes in force, the
// interval reaches below and above the optimum.
func (b *bounded) quantiles(here member, g int, level float64) (lo, hi float64) {
	se := math.Sqrt(here.cov[g][g])
	if !(se > 0) {
		g = 0 // a direction the linearisation cannot tell: use the gain's
		se = math.Sqrt(here.cov[0][0])
	}
	floor := tQuantile((1+level)/2, math.Max(here.dof, 1))
	if len(b.members) == 1 || !(se > 0) {
		return floor, floor
	}
	mix := mixtureOf(b.members, g)
	lo = -mix.quantile((1-level)/2) / se
	hi = mix.quantile((1+level)/2) / se
	return math.Min(math.Max(lo, 0.8*floor), 6*floor), math.Min(math.Max(hi, 0.8*floor), 6*floor)
}

// atBest is the member at one shape per record, variances at their estimates.
func atBest(nodes [][]node) member {
	d := len(nodes[0][0].b)
	a, v := columns(d, d), make([]float64, d)
	dof := 0.0
	for _, ns := range nodes {
		n := ns[0]
		s2 := n.s2
		dof += float64(n.dof)
		for i := range d {
			v[i] += n.b[i] / s2
			for j := range d {
				a[i][j] += n.a[i][j] / s2
			}
		}
	}
	cov := invert(a)
	return member{weight: 1, cov: cov, shift: multiply(cov, v), dof: dof}
}

// linear returns the fixed linear columns of every record with their bounds:
// generalised least squares over all columns of the linearised model, mixed
// over the noise shapes that the record does not rule out, like the others.
func (f *fitted) linear(b *bounded, level float64) [][]estimate {
	out := make([][]estimate, len(f.e.recs))
	p := f.e.eval(f.p.eta, true)
	for i, r := range f.e.recs {
		_, beta, _ := r.solveLinear(&f.e.work[i], p.gain)
		for j := range r.fixed {
			e := estimate{value: beta[j], se: math.NaN(), low: math.NaN(), high: math.NaN()}
			if len(b.nodes[i][0].fixed) > 0 {
				mix := fixedMixture(b.nodes[i], j)
				e.se = mix.sd()
				e.low, e.high = e.value+mix.quantile((1-level)/2), e.value+mix.quantile((1+level)/2)
			}
			out[i] = append(out[i], e)
		}
	}
	return out
}
