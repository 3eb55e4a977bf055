package fit

import (
	"math"

	"gonum.org/v1/gonum/floats"

	"lagwright/ident"
)

// engine evaluates one structure against the records, whitened under their
// noise shapes. The parameters it works on are eta = (lags…, dead time); what
// enters linearly is eliminated at every evaluation (variable projection,
// Golub and Pereyra 1973, from memory): per record the baseline, the drift and
// the initial state, and the gain shared by all records.
type engine struct {
	st     ident.Structure
	recs   []*record
	nl     int   // lag parameters
	groups []int // lag i of the structure is eta[groups[i]]
	ng     int   // distinct lags being fitted

	lower   []float64
	upper   []float64
	held    []bool // eta that must not move
	gain    float64
	gainFix bool

	work []workspace

	// Memory of a step of the descent.
	spread []float64
	inner  [][]float64
	square [][]float64
	free   []int
	next   []float64
	damped damped
	spare  []point // whose memory the next points take
}

// workspace holds the columns of one record.
type workspace struct {
	raw   [][]float64 // simulated: response, d/dlag…, d/ddeadtime
	start [][]float64 // the same for the change at the first row, or free states
	ahead []float64   // response at a longer dead time
	g, r  []float64
	jac   [][]float64 // whitened columns d/deta, of a gain of one at rest
	white [][]float64 // the columns whitened side by side
	extra [][]float64 // orthonormal columns of the initial state
	basis [][]float64 // the record's and extra
	spare [][]float64 // memory of extra
	state [][]float64 // derivatives of the initial state's part

	tangent tangentMemory
	linear  linearMemory
}

// point is an evaluated set of parameters.
type point struct {
	eta  []float64
	gain float64
	s    float64   // weighted sum of squares
	part []float64 // unweighted whitened sum of squares of each record
	gg   float64   // weighted square of the gain's whitened direction

	// Gauss-Newton figures of (gain, eta), present after a full evaluation.
	normal [][]float64 // JᵀJ, gain first
	grad   []float64   // Jᵀr for eta (that of the gain is zero when it is free)
}

func newEngine(st ident.Structure, recs []*record) *engine {
	e := &engine{st: st, recs: recs, nl: st.NumLags()}
	e.groups = make([]int, e.nl)
	for i := range e.groups {
		e.groups[i] = i
	}
	e.setGroups(e.groups)
	e.work = make([]workspace, len(recs))
	for i, r := range recs {
		w := &e.work[i]
		n := len(r.t)
		w.raw = columns(e.nl+2, n)
		switch r.rest {
		case earlier:
			w.start = columns(e.nl+2, n)
		case free:
			w.start = columns(max(st.Order(), 1), n)
		}
		w.g, w.r = make([]float64, n), make([]float64, n)
		w.jac = columns(e.nl+1, n)
	}
	return e
}

func columns(k, n int) [][]float64 {
	buf := make([]float64, k*n)
	out := make([][]float64, k)
	for i := range out {
		out[i] = buf[i*n : (i+1)*n : (i+1)*n]
	}
	return out
}

// columnsIn are k columns of n rows in the memory kept for them, which is made anew
// where it has another shape. They hold what was left there.
func columnsIn(memory *[][]float64, k, n int) [][]float64 {
	if m := *memory; len(m) < k || len(m) > 0 && len(m[0]) != n {
		*memory = columns(k, n)
	}
	return (*memory)[:k]
}

// setGroups ties lags of the structure together: groups[i] is the index of
// the fitted lag that element i shares.
func (e *engine) setGroups(groups []int) {
	e.groups = groups
	e.ng = 0
	for _, g := range groups {
		e.ng = max(e.ng, g+1)
	}
	tmax, dmax, limit := 0.0, 0.0, math.Inf(1)
	for _, r := range e.recs {
		tmax = math.Max(tmax, 20*r.span)
		dmax = math.Max(dmax, 0.9*(r.t[len(r.t)-1]-r.input.At[0]))
		if before := r.input.At[0] - r.t[0]; r.rest == earlier && before > 10*r.step {
			// The change at the first row, of unknown size, must not be put off
			// until the bump: it would explain all of it.
			limit = math.Min(limit, 0.9*before)
		}
	}
	n := e.ng + 1
	e.lower, e.upper, e.held = make([]float64, n), make([]float64, n), make([]bool, n)
	for i := range e.ng {
		e.upper[i] = tmax
		e.lower[i] = 1e-6 * e.recs[0].step
	}
	e.upper[e.ng] = math.Min(dmax, limit)
}

// lags spreads the fitted lags over the elements of the structure.
func (e *engine) lags(eta []float64) []float64 { return e.spreadTo(make([]float64, 0, e.nl), eta) }

func (e *engine) spreadTo(out, eta []float64) []float64 {
	for _, g := range e.groups {
		out = append(out, eta[g])
	}
	return out
}

// newPoint is the point at eta, to be evaluated, in the memory of one that was
// dropped; all its numbers lie together, since thousands are made.
func (e *engine) newPoint(eta []float64, full bool) point {
	n, m := len(eta), len(e.recs)
	if last := len(e.spare) - 1; last >= 0 && full {
		p := e.spare[last]
		e.spare = e.spare[:last]
		if len(p.eta) == n {
			p.clear()
			copy(p.eta, eta)
			return p
		}
	}
	size := n + m
	if full {
		size += n + (n+1)*(n+1)
	}
	buf := make([]float64, size)
	cut := func(k int) []float64 {
		part := buf[:k:k]
		buf = buf[k:]
		return part
	}
	p := point{eta: cut(n), part: cut(m)}
	copy(p.eta, eta)
	if full {
		p.grad = cut(n)
		p.normal = make([][]float64, n+1)
		for i := range p.normal {
			p.normal[i] = cut(n + 1)
		}
	}
	return p
}

// drop gives up a full point that nothing refers to any more.
func (e *engine) drop(p point) { e.spare = append(e.spare, p) }

// clear sets the sums of p to zero.
func (p *point) clear() {
	p.gain, p.s, p.gg = 0, 0, 0
	clear(p.part)
	clear(p.grad)
	for _, row := range p.normal {
		clear(row)
	}
}

// eval evaluates eta; with full, the Gauss-Newton figures too.
func (e *engine) eval(eta []float64, full bool) point {
	p := e.newPoint(eta, full)
	e.spread = e.spreadTo(e.spread[:0], eta)
	lags, dead := e.spread, eta[e.ng]
	var gg, gy float64
	for i, r := range e.recs {
		w := &e.work[i]
		e.simulate(r, w, lags, dead, full)
		copy(w.g, w.raw[0])
		w.white = append(w.white[:0], w.g)
		if full && r.rest == rest {
			e.slopes(w)
			w.white = append(w.white, w.jac[:e.ng+1]...)
		}
		r.filter.applyAll(w.white)
		project(w.g, w.basis)
		gg += r.weight * dot(w.g, w.g)
		gy += r.weight * dot(w.g, r.yw)
	}
	p.gain, p.gg = e.gain, gg
	if !e.gainFix {
		if gg > leastResponse*leastResponse*e.unity() {
			p.gain = gy / gg
		} else {
			p.gain = 0
		}
	}
	for i, r := range e.recs {
		w := &e.work[i]
		floats.AddScaledTo(w.r, r.yw, -p.gain, w.g)
		if len(w.extra) > 0 {
			project(w.r, w.extra)
		}
		ss := dot(w.r, w.r)
		p.part[i] = ss
		p.s += r.weight * ss
	}
	if full {
		e.gaussNewton(&p)
	}
	return p
}

// leastResponse is the part of its final value that a response must reach within
// the log, in the mean of the rows, for a gain to be read from it: below, a fit
// could explain the rounding of the response.
const leastResponse = 1e-7

// unity is the weighted square of a response that is at its final value in every
// row.
func (e *engine) unity() float64 {
	sum := 0.0
	for _, r := range e.recs {
		sum += r.weight * r.swing * r.swing * float64(len(r.t))
	}
	return sum
}

// simulate fills the raw columns and the basis of the record's linear columns.
func (e *engine) simulate(r *record, w *workspace, lags []float64, dead float64, full bool) {
	e.respond(r.sim, w, w.raw[:e.nl+2], r.step, lags, dead, full)
	w.extra = w.extra[:0]
	w.basis = append(w.basis[:0], r.basis...)
	switch r.rest {
	case earlier:
		e.respond(r.start, w, w.start, r.step, lags, dead, full)
		e.addExtra(r, w, w.start[0])
	case free:
		r.sim.FreeStates(w.start, e.st, lags, dead)
		for _, c := range w.start {
			e.addExtra(r, w, c)
		}
	}
}

// respond fills a simulator's columns: the response, and with full its derivatives.
func (e *engine) respond(sim *ident.Simulator, w *workspace, columns [][]float64, step float64, lags []float64, dead float64, full bool) {
	if !full {
		sim.Response(columns[0], e.st, lags, dead)
		return
	}
	sim.Sensitivities(columns, e.st, lags, dead)
	if dead <= e.lower[e.ng] && !e.held[e.ng] && e.kinked(lags) {
		e.fromAbove(sim, w, columns, step, lags, dead)
	}
}

func (e *engine) addExtra(r *record, w *workspace, c []float64) {
	k := len(w.extra)
	if k == len(w.spare) {
		w.spare = append(w.spare, make([]float64, len(c)))
	}
	x := w.spare[k]
	r.filter.apply(x, c)
	if addToBasis(&w.basis, x) {
		w.extra = append(w.extra, x)
	}
}

// column is the eta that lag l of the structure belongs to, or the dead time after them.
func (e *engine) column(l int) int {
	if l == e.nl {
		return e.ng
	}
	return e.groups[l]
}

// slopes sets the columns d/deta to those of a gain of one.
func (e *engine) slopes(w *workspace) {
	last := -1
	for l := range e.nl + 1 {
		j := e.column(l)
		if j > last { // groups are numbered as they appear
			copy(w.jac[j], w.raw[l+1])
			last = j
		} else {
			floats.Add(w.jac[j], w.raw[l+1])
		}
	}
}

// gaussNewton fills normal and grad of p from the sensitivities.
func (e *engine) gaussNewton(p *point) {
	n := e.ng + 1
	for i, r := range e.recs {
		w := &e.work[i]
		gain := p.gain // of the columns, unless they hold it
		if r.rest != rest {
			e.slopes(w)
			states := e.stateDerivatives(r, w, p)
			for j := range n {
				floats.Scale(p.gain, w.jac[j])
			}
			for l, c := range states {
				floats.Add(w.jac[e.column(l)], c)
			}
			r.filter.applyAll(w.jac[:n])
			gain = 1
		}
		// The residual and g are free of the basis already; the columns are
		// freed of it in their products, which saves passes over the rows.
		in := columnsIn(&e.inner, n, len(w.basis))
		for j := range n {
			for l, q := range w.basis {
				in[j][l] = dot(q, w.jac[j])
			}
		}
		p.normal[0][0] += r.weight * dot(w.g, w.g)
		for j := range n {
			p.normal[0][j+1] += r.weight * gain * dot(w.g, w.jac[j])
			p.grad[j] += r.weight * gain * dot(w.jac[j], w.r)
			for l := 0; l <= j; l++ {
				p.normal[l+1][j+1] += r.weight * gain * gain * (dot(w.jac[l], w.jac[j]) - dot(in[l], in[j]))
			}
		}
	}
	for j := range p.normal {
		for l := range j {
			p.normal[j][l] = p.normal[l][j]
		}
	}
}

// stateDerivatives returns, per eta of the structure, the derivative of the
// initial-state columns times their coefficients; nil at rest.
func (e *engine) stateDerivatives(r *record, w *workspace, p *point) [][]float64 {
	if r.rest == rest || len(w.extra) == 0 {
		return nil
	}
	coef := e.stateCoefficients(r, w, p)
	if w.state == nil {
		w.state = columns(e.nl+1, len(r.t))
	}
	out := w.state
	if r.rest == earlier {
		for l := range e.nl + 1 {
			floats.ScaleTo(out[l], coef[0], w.start[l+1])
		}
		return out
	}
	// Free states: central differences of their columns, which are smooth in the lags.
	for l := range out {
		clear(out[l])
	}
	lags, dead := e.lags(p.eta), p.eta[e.ng]
	up, down := columns(len(w.start), len(r.t)), columns(len(w.start), len(r.t))
	for l := range e.nl {
		h := 1e-5 * lags[l]
		a := append([]float64(nil), lags...)
		a[l] += h
		r.sim.FreeStates(up, e.st, a, dead)
		a[l] -= 2 * h
		r.sim.FreeStates(down, e.st, a, dead)
		for s, c := range coef {
			for k := range out[l] {
				out[l][k] += c * (up[s][k] - down[s][k]) / (2 * h)
			}
		}
	}
	return out
}

// stateCoefficients solves for the coefficients of the initial-state columns
// (unwhitened) at the point by least squares on what the gain leaves.
func (e *engine) stateCoefficients(r *record, w *workspace, p *point) []float64 {
	_, beta, _ := r.solveLinear(w, p.gain)
	return beta[len(r.fixed):]
}

// solveLinear fits the record's linear columns, the fixed ones first and then
// those of the initial state, to what the gain's response last simulated leaves:
// the columns, their coefficients by generalised least squares, and what is
// then left. Columns and what is left are valid until the next call.
func (r *record) solveLinear(w *workspace, gain float64) (cols [][]float64, beta, left []float64) {
	m := &w.linear
	cols = append(m.cols[:0], r.fixed...)
	switch r.rest {
	case earlier:
		cols = append(cols, w.start[0])
	case free:
		cols = append(cols, w.start...)
	}
	m.cols, m.left = cols, resize(m.left, len(r.t))
	left = m.left
	floats.AddScaledTo(left, r.y, -gain, w.raw[0])
	beta = m.solve(&r.filter, cols, left)
	for j, c := range cols {
		floats.AddScaled(left, -beta[j], c)
	}
	return cols, beta, left
}

// linearMemory is what the solutions for a record's linear columns use one after
// the other; the zero value is ready to use.
type linearMemory struct {
	cols  [][]float64
	left  []float64
	white [][]float64 // cols and the right-hand side, whitened
}

// solve is the generalised least-squares solution for a few columns, by modified
// Gram-Schmidt on the whitened columns; a column that adds nothing gets the
// coefficient 0.
func (l *linearMemory) solve(f *filter, cols [][]float64, rhs []float64) []float64 {
	m, n := len(cols), len(rhs)
	white := columnsIn(&l.white, m+1, n)
	q := make([][]float64, m)
	rr := columns(m, m)
	y := white[m]
	f.apply(y, rhs)
	z := make([]float64, m)
	for j, c := range cols {
		x := white[j]
		f.apply(x, c)
		before := math.Sqrt(dot(x, x))
		for range 2 {
			for i := range j {
				if q[i] == nil {
					continue
				}
				s := dot(q[i], x)
				rr[i][j] += s
				floats.AddScaled(x, -s, q[i])
			}
		}
		after := math.Sqrt(dot(x, x))
		if !(after > 1e-10*before) {
			continue
		}
		floats.Scale(1/after, x)
		q[j], rr[j][j] = x, after
		z[j] = dot(x, y)
		floats.AddScaled(y, -z[j], x)
	}
	beta := make([]float64, m)
	for j := m - 1; j >= 0; j-- {
		if q[j] == nil {
			continue
		}
		s := z[j]
		for l := j + 1; l < m; l++ {
			s -= rr[j][l] * beta[l]
		}
		beta[j] = s / rr[j][j]
	}
	return beta
}
