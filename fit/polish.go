package fit

import (
	"math"
)

// A fit on averaged rows lies within a small part of a standard error of the
// fit on every row. polish closes that distance: Gauss-Newton steps on the full
// log, for all parameters at once, the linear ones too, in pieces (everyrow.go).

// polished is an optimum on every row of the logs.
type polished struct {
	eta  []float64 // as in point, coinciding lags apart
	gain float64
	beta [][]float64 // per record: baseline, drift, earlier input
	cov  [][]float64 // of gain, eta (coinciding lags as one) and the linear columns, for unit variance
}

// polish improves the optimum of b on the full logs, under the noise shapes in
// force; nil when nothing was averaged or the initial state is free.
func (f *fitted) polish() *polished {
	e := f.e
	averaged := false
	for _, r := range e.recs {
		if r.rest == free {
			return nil
		}
		averaged = averaged || r.averagesRows()
	}
	if !averaged {
		return nil
	}
	p := e.eval(f.p.eta, true)
	var m everyRowMemory
	at := polished{eta: append([]float64(nil), p.eta...), gain: p.gain}
	for i, r := range e.recs {
		_, beta, _ := r.solveLinear(&e.work[i], p.gain)
		at.beta = append(at.beta, beta)
	}
	sum, gram := f.downhill(&at, &m)
	if other := f.offZero(&at); other != nil {
		if s, g := f.downhill(other, &m); s < sum {
			at, gram = *other, g
		}
	}
	at.cov = f.unitCovariance(gram)
	return &at
}

// offZero is a place beside at whose shortest lag, nothing or next to it, has taken
// half a row from the dead time; nil where there is none. To first order the two are
// the same to the response, so that at a lag of zero no slope leads to a better one.
func (f *fitted) offZero(at *polished) *polished {
	e := f.e
	last, half := e.nl-1, e.recs[0].step/2
	if e.nl < 2 || e.held[last] || e.held[e.nl] || !f.alone(last+1) || at.eta[last] > half/25 || at.eta[e.nl]-half < e.lower[e.nl] {
		return nil
	}
	other := *at
	other.eta = append([]float64(nil), at.eta...)
	other.eta[last] += half
	other.eta[e.nl] -= half
	return &other
}

// downhill takes steps from at until the sum of squares over every row falls no more,
// leaves at there, and returns the sum and the normal equations.
func (f *fitted) downhill(at *polished, m *everyRowMemory) (sum float64, gram [][]float64) {
	gram = f.normal(at, &sum, m)
	damping, share := 0.0, 1.0
	for range 20 {
		next, promised, ok := f.step(at, gram, damping, share)
		if ok && promised < 1e-13*sum { // nothing left that a sum of squares could show
			*at = *next
			break
		}
		s := math.Inf(1)
		var g [][]float64
		if ok {
			g = f.normal(next, &s, m)
		}
		if s < sum {
			done := damping == 0 && sum-s < 1e-13*sum
			kept := (sum - s) / promised
			if damping == 0 {
				share = bend(kept, share)
			}
			less := 10.0
			if kept > 0.75 {
				less = 100
			}
			if *at, gram, sum, damping = *next, g, s, damping/less; damping < 1e-6 {
				damping = 0
			}
			if done {
				break
			}
			continue
		}
		if ok && promised < 1e-9*sum || damping > 10 {
			break
		}
		share, damping = 1, math.Max(20*damping, 1e-5) // lags near zero or near one another
	}
	return sum, gram
}

// bend is the share of the next Gauss-Newton step to take, given which part of what
// it promised the last one kept of which this share was taken. Where the residuals
// are large, the sum of squares bends 1+b times as much as their tangent says: the
// share x of a step promises x(2−x) of what the whole one does and keeps x(2−x(1+b)),
// and 1/(1+b) is the share that leads to the bottom.
func bend(kept, share float64) float64 {
	const least, most = 0.5, 1.5
	curvature := (2 - kept*(2-share)) / share
	if curvature*most <= 1 { // it hardly bends, or the other way
		return most
	}
	return math.Max(1/curvature, least)
}

// unitCovariance inverts the normal equations of the parameters that are free.
func (f *fitted) unitCovariance(gram [][]float64) [][]float64 {
	n := len(gram) - 1
	a := columns(n, n)
	for i := range n {
		copy(a[i], gram[i][:n])
	}
	if f.e.gainFix {
		a[0][0] = 0
	}
	for l, held := range f.e.held {
		if held {
			d := f.direction(l + 1)
			a[d][d] = 0
		}
	}
	return invert(a)
}

// refine polishes b and moves its values to the optimum found. Under a known
// noise shape (exact) the standard errors are those of every row, too.
func (b *bounded) refine(exact bool) {
	if b.full != nil { // done
		return
	}
	b.activate()
	at := b.polish()
	if at == nil {
		return
	}
	b.moveTo(at)
	if exact {
		for i := range b.est {
			for j := range b.est {
				b.cov[i][j] = b.s2() * b.fine.cov[b.direction(i)][b.direction(j)]
			}
			if !math.IsNaN(b.est[i].se) && !b.est[i].fixed {
				b.est[i].se = math.Sqrt(b.cov[i][i])
			}
		}
	}
	for i, lin := range b.lin {
		for j := range lin {
			shift := b.fine.beta[i][j] - lin[j].value
			lin[j].value += shift
			lin[j].low += shift
			lin[j].high += shift
		}
	}
}

// moveTo takes the values of p, and widens the intervals where they would not hold
// them; NaN, an open end, stays.
func (b *bounded) moveTo(p *polished) {
	b.fine = p
	for i := range b.est {
		v := &b.est[i]
		v.value = p.value(i)
		v.low, v.high = math.Min(v.low, v.value), math.Max(v.high, v.value)
	}
}

// value is that of parameter i (0 gain, 1… eta).
func (p *polished) value(i int) float64 {
	if i == 0 {
		return p.gain
	}
	return p.eta[i-1]
}

// unknowns is the number of parameters polished: gain, eta with coinciding
// lags as one, and the linear columns of every record.
func (f *fitted) unknowns() int {
	n := f.direction(f.e.nl+1) + 1
	for _, r := range f.e.recs {
		n += r.linearColumns()
	}
	return n
}

// linearColumns counts baseline, drift and earlier input.
func (r *record) linearColumns() int {
	n := 1
	if r.drift {
		n++
	}
	if r.rest == earlier {
		n++
	}
	return n
}

// normal accumulates the normal equations of all unknowns, the residual last,
// over every row of the logs.
func (f *fitted) normal(at *polished, sum *float64, memory *everyRowMemory) [][]float64 {
	n := f.unknowns()
	gram := columns(n+1, n+1)
	shared := f.direction(f.e.nl+1) + 1 // gain, lags, dead time
	base := shared
	for i, r := range f.e.recs {
		idx := []int{}
		for k := range shared {
			idx = append(idx, k)
		}
		for k := range r.linearColumns() {
			idx = append(idx, base+k)
		}
		idx = append(idx, n)
		f.accumulate(r, at, at.beta[i], idx, gram, memory)
		base += r.linearColumns()
	}
	*sum = gram[n][n]
	return gram
}

// everyRowMemory is what the sums over every row use one after the other.
type everyRowMemory struct{ raw, cols, start [][]float64 }

// accumulate adds one record; idx says where its columns stand in gram.
func (f *fitted) accumulate(r *record, at *polished, beta []float64, idx []int, gram [][]float64, memory *everyRowMemory) {
	e, root := f.e, r.root
	nl, m := e.nl, len(idx)
	lags, dead := e.lags(at.eta), at.eta[nl]
	walk := restWalk{f: f, r: r, gain: at.gain, beta: beta}
	walk.sim = root.sim.Clone()
	response := walk.sim.Pieces(e.st, lags, dead, true)
	var started func([][]float64) int
	if r.rest == earlier {
		walk.started = root.sim.WithInput(r.fromFirstRow())
		started = walk.started.Pieces(e.st, lags, dead, true)
	}
	white, carry := r.whitener(r.shape), make([]carried, m)
	size := min(root.sums.pieceLength(), len(root.t))
	raw, cols := columnsIn(&memory.raw, nl+2, size), columnsIn(&memory.cols, m, size)
	var start [][]float64
	if started != nil {
		start = columnsIn(&memory.start, nl+2, size)
	}
	upper := columns(m, m)
	for lo := 0; lo < len(root.t); {
		if n, ok := walk.pass(lo, &white, carry, upper); ok {
			lo += n
			continue
		}
		n := response(raw)
		if started != nil {
			started(start)
		}
		rows := cut(cols, n)
		f.directions(rows, raw, start, at.gain, beta, r, lo)
		white.passAll(rows, carry, root.t[lo:lo+n])
		addProducts(upper, rows)
		lo += n
	}
	for a := range m {
		for c := a; c < m; c++ {
			gram[idx[a]][idx[c]] += r.weight * upper[a][c]
			if a != c {
				gram[idx[c]][idx[a]] += r.weight * upper[a][c]
			}
		}
	}
}

// directions fills cols, rows lo and after of the record: gain, lags and dead
// time (coinciding lags as one), the linear columns, what is left.
func (f *fitted) directions(cols, raw, start [][]float64, gain float64, beta []float64, r *record, lo int) {
	nl := f.e.nl
	state := beta[len(beta)-1]
	copy(cols[0], raw[0])
	for l := range nl + 1 {
		clear(cols[f.direction(l+1)])
	}
	for l := range nl + 1 {
		c := cols[f.direction(l+1)]
		for i, v := range raw[l+1][:len(c)] {
			c[i] += gain * v
		}
		if r.rest == earlier {
			for i, v := range start[l+1][:len(c)] {
				c[i] += state * v
			}
		}
	}
	c := f.direction(nl+1) + 1
	left := cols[len(cols)-1]
	one, y := cols[c][:len(left)], r.root.y[lo:lo+len(left)]
	for i, v := range raw[0][:len(left)] {
		one[i] = 1
		left[i] = y[i] - gain*v - beta[0]
	}
	if r.drift {
		c++
		copy(cols[c], r.root.t[lo:lo+len(left)])
		for i, v := range cols[c] {
			left[i] -= beta[1] * v
		}
	}
	if r.rest == earlier {
		c++
		copy(cols[c], start[0])
		for i, v := range cols[c] {
			left[i] -= state * v
		}
	}
}

// addProducts adds the products of all columns to the upper triangle.
func addProducts(upper, cols [][]float64) {
	for a := range cols {
		for c := a; c < len(cols); c++ {
			upper[a][c] += dot(cols[a], cols[c])
		}
	}
}

func cut(cols [][]float64, n int) [][]float64 {
	out := make([][]float64, len(cols))
	for i, c := range cols {
		out[i] = c[:n]
	}
	return out
}

// step solves the damped normal equations and returns the point to which a share of
// their solution leads, inside the bounds, and by how much it promises to lower the
// sum of squares.
func (f *fitted) step(at *polished, gram [][]float64, damping, share float64) (next *polished, promised float64, ok bool) {
	e := f.e
	n := len(gram) - 1
	var free []int
	for j := range n {
		if (j == 0 && e.gainFix) || !(gram[j][j] > 0) {
			continue
		}
		pinned := false
		for l := 1; l <= e.nl+1; l++ {
			if f.direction(l) == j && j > 0 && (e.held[l-1] || at.eta[l-1] <= e.lower[l-1] || at.eta[l-1] >= e.upper[l-1]) {
				pinned = true
			}
		}
		if !pinned {
			free = append(free, j)
		}
	}
	scaled, rhs := columns(n, n), make([]float64, n)
	for _, i := range free {
		rhs[i] = gram[i][n] / math.Sqrt(gram[i][i])
		for _, j := range free {
			scaled[i][j] = gram[i][j] / math.Sqrt(gram[i][i]*gram[j][j])
		}
	}
	if !e.damped.factor(scaled, free, damping) {
		return nil, 0, false
	}
	move := make([]float64, n)
	for k, x := range e.damped.solve(rhs, free) {
		j := free[k]
		move[j] = share * x / math.Sqrt(gram[j][j])
		promised += share * (2 - share) * x * rhs[j]
	}
	next = &polished{gain: at.gain + move[0], eta: append([]float64(nil), at.eta...)}
	for l := range next.eta {
		next.eta[l] = math.Min(math.Max(next.eta[l]+move[f.direction(l+1)], e.lower[l]), e.upper[l])
	}
	base := f.direction(e.nl+1) + 1
	for i := range at.beta {
		beta := append([]float64(nil), at.beta[i]...)
		for k := range beta {
			beta[k] += move[base+k]
		}
		base += len(beta)
		next.beta = append(next.beta, beta)
	}
	return next, promised, true
}
