package fit

import (
	"math"
	"math/rand/v2"
	"slices"
	"sort"

	"gonum.org/v1/gonum/stat/distuv"

	"lagwright/ident"
)

// Where the input never rests nothing can be averaged. Of a long log of that kind the
// search is left to an excerpt, and every structure is then brought to its optimum on
// all rows. Such a log holds so much that every parameter is known far better than it
// takes for the sum of squares to be a parabola: its intervals are those of the
// linearised model on every row, and only the noise, and how not knowing it widens
// them, comes from the excerpt.
const (
	mostRows    = 12000 // rows in use at a time
	mostFree    = 60000 // the same when the states at the first row are free: there is no excerpt then
	mostChanges = 12000 // changes of the input in them
	runIn       = 3000  // changes before them that the response still heeds
)

// scope is where in the full log an excerpt may lie.
type scope struct {
	lo, hi int         // rows
	input  ident.Input // without what is long before them
}

func (s scope) rows() int { return s.hi - s.lo }

func (r *record) wholeScope() scope { return scope{0, len(r.t), r.input} }

// choosePlace moves the scope of a log of which only an excerpt can be used to where
// the input moves most: its beginning may hold no more than the flicker of a read-back.
func (r *record) choosePlace() {
	if len(r.input.At) <= blockGrowth || !r.survey(0, 3*r.step).excerpt() {
		return
	}
	const quarters = 4
	sums := r.inputSums(r.most / quarters)
	moves := func(i int) float64 { // Σ(u - mean)² over the quarters from i on
		var all inputSum
		for _, q := range sums[i : i+quarters] {
			all.u, all.square = all.u+q.u, all.square+q.square
		}
		return all.square - all.u*all.u/float64(r.most)
	}
	best, most := 0, 1.2*moves(0) // the beginning needs no run-in
	for i := 1; i+quarters <= len(sums); i++ {
		if m := moves(i); m > most {
			best, most = i*(r.most/quarters), m
		}
	}
	first := sort.SearchFloat64s(r.input.At, r.t[best]) // change in the scope
	r.scope.lo = best
	if last := first + mostChanges; last < len(r.input.At) {
		r.scope.hi = sort.SearchFloat64s(r.t, r.input.At[last])
	}
	cut := max(first-runIn, 0)
	r.scope.input = ident.Input{Before: r.input.Before, At: r.input.At[cut:], Value: r.input.Value[cut:]}
}

// changesInScope are the times of the changes of the input that rows of the scope
// lie behind.
func (r *record) changesInScope() []float64 {
	at := r.input.At
	lo, _ := slices.BinarySearch(at, r.t[r.scope.lo])
	hi, _ := slices.BinarySearch(at, r.t[r.scope.hi-1])
	return at[max(lo-1, 0):min(hi+1, len(at))]
}

// inputSum is Σu and Σu² over some rows, u counted from the first input.
type inputSum struct{ u, square float64 }

// inputSums are those of every n rows with a temperature; what is left at the end is
// left out.
func (r *record) inputSums(n int) []inputSum {
	out := make([]inputSum, len(r.t)/n)
	u, next := 0.0, 0
	for k, t := range r.t[:len(out)*n] {
		for next < len(r.input.At) && r.input.At[next] <= t {
			u = r.input.Value[next] - r.input.Before
			next++
		}
		q := &out[k/n]
		q.u += u
		q.square += u * u
	}
	return out
}

// complete brings f to its optimum on every row where its records are excerpts.
func (s *study) complete(f *fitted) {
	f.full = nil
	if slices.ContainsFunc(s.recs, (*record).excerpt) {
		f.full = f.polish()
	}
	if f.full != nil && len(s.fix) == 0 {
		sort.Sort(sort.Reverse(sort.Float64Slice(f.full.eta[:f.e.nl]))) // they may have crossed
	}
}

// regular reports whether f is known from every row, with all its parameters so far
// from their bounds and its lags from one another that the linearised model serves.
func (f *fitted) regular() bool {
	if f.full == nil {
		return false
	}
	const far = 4 // standard errors
	se := func(i int) float64 { return math.Sqrt(f.s2() * f.full.cov[f.direction(i)][f.direction(i)]) }
	for l, v := range f.full.eta {
		if f.e.held[l] {
			continue
		}
		s := se(l + 1)
		if !(s > 0) || !f.alone(l+1) || v-f.e.lower[l] < far*s || f.e.upper[l]-v < far*s {
			return false
		}
		if l+1 < f.e.nl && v-f.full.eta[l+1] < far*(s+se(l+2)) {
			return false
		}
	}
	return true
}

// irregular reports whether f is known from every row and yet keeps the intervals of
// its excerpt, which are wider: where a parameter presses against its bound or another,
// every row may say more than the linearised model does.
func (f *fitted) irregular() bool { return f.full != nil && !f.regular() }

// anyRegular reports whether one of the models is.
func (out *outcome) anyRegular() bool {
	return slices.ContainsFunc(out.models, func(m *bounded) bool { return m.regular() })
}

// explained is the model on record i.
func (p *polished) explained(st ident.Structure, i int) explained {
	n := len(p.eta) - 1
	return explained{st, p.gain, p.eta[:n], p.eta[n], p.beta[i]}
}

// narrower are the standard errors of every row over those of the excerpt, at the
// noise shapes in force, of gain, lags and dead time.
func (b *bounded) narrower(here member) []float64 {
	out := make([]float64, b.e.nl+2)
	for i := range out {
		g := b.direction(i)
		if c := here.cov[g][g]; c > 0 {
			out[i] = math.Min(math.Sqrt(b.s2()*b.full.cov[g][g]/c), 1)
		}
	}
	return out
}

// linearFromEveryRow sets baselines and drifts, widened by the noise mixture as the
// gain is: of an excerpt far from the first row a baseline and an earlier input are
// hard to tell apart.
func (b *bounded) linearFromEveryRow(here member, cov [][]float64, level float64) {
	lo, hi := b.quantiles(here, 0, level)
	wider := 1.0
	if c := here.cov[0][0]; c > 0 {
		wider = math.Max(math.Sqrt(cov[0][0]/c), 1)
	}
	base := b.direction(b.e.nl+1) + 1
	b.lin = make([][]estimate, len(b.e.recs))
	for i, r := range b.e.recs {
		for j := range r.fixed {
			value, se := b.full.beta[i][j], math.Sqrt(b.s2()*b.full.cov[base+j][base+j])
			b.lin[i] = append(b.lin[i], estimate{value: value, se: se * wider, low: value - lo*se, high: value + hi*se})
		}
		base += r.linearColumns()
	}
}

// sampleEveryRow draws plausible plants around the optimum on every row, from a
// multivariate Student's t, spread as the noise mixture says.
func (b *bounded) sampleEveryRow(count int, rng *rand.Rand) []draw {
	n := b.direction(b.e.nl+1) + 1
	var free []int
	for g := range n {
		if b.full.cov[g][g] > 0 {
			free = append(free, g)
		}
	}
	var root damped
	if !root.factor(b.full.cov, free, 1e-12) {
		free = nil
	}
	spreads, dof := b.spreads(), float64(max(b.rows()-b.mean, 1))
	out := make([]draw, 0, count)
	for range count {
		size := math.Sqrt(spreads[pickSpread(spreads, rng.Float64())].k2 * b.s2() * dof / distuv.ChiSquared{K: dof, Src: rng}.Rand())
		z, move := make([]float64, len(free)), make([]float64, n)
		for i, g := range free {
			z[i] = size * rng.NormFloat64()
			for l := range i + 1 {
				move[g] += root.l[i][l] * z[l]
			}
		}
		d := draw{gain: b.full.gain + move[0], eta: slices.Clone(b.full.eta)}
		if d.gain*b.full.gain <= 0 {
			d.gain = b.full.gain
		}
		for l := range d.eta {
			d.eta[l] = math.Min(math.Max(d.eta[l]+move[b.direction(l+1)], b.e.lower[l]), b.e.upper[l])
		}
		if !slices.Contains(b.e.held, true) {
			sort.Sort(sort.Reverse(sort.Float64Slice(d.eta[:b.e.nl])))
		}
		out = append(out, d)
	}
	return out
}
