package fit

import (
	"math"

	"lagwright/ident"
)

// A fit on averaged rows lies within a small part of a standard error of the
// fit on every row. polish closes that distance: Gauss-Newton steps on the full
// log, for all parameters at once, the linear ones too, taken in chunks so that
// memory does not grow with the log.

// polished is an optimum on every row of the logs.
type polished struct {
	eta  []float64 // as in point, coinciding lags apart
	gain float64
	beta [][]float64 // per record: baseline, drift, earlier input
	cov  [][]float64 // of gain, eta (coinciding lags as one) and the linear columns, for unit variance
}

// polishChunk is how many rows are taken at a time.
const polishChunk = 32768

// polish improves the optimum of b on the full logs, nil when nothing was
// averaged or the initial state is free.
func (b *bounded) polish() *polished {
	b.activate()
	e := b.e
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
	p := e.eval(b.p.eta, true)
	at := polished{eta: append([]float64(nil), p.eta...), gain: p.gain}
	for i, r := range e.recs {
		_, beta, _ := r.solveLinear(&e.work[i], p.gain)
		at.beta = append(at.beta, beta)
	}
	var sum float64
	gram := b.normal(&at, &sum)
	for range 4 {
		next, ok := b.step(&at, gram)
		if !ok {
			break
		}
		var s float64
		g := b.normal(next, &s)
		if !(s < sum) {
			break
		}
		done := sum-s < 1e-14*sum
		at, gram, sum = *next, g, s
		if done {
			break
		}
	}
	at.cov = b.unitCovariance(gram)
	return &at
}

// unitCovariance inverts the normal equations of the parameters that are free.
func (b *bounded) unitCovariance(gram [][]float64) [][]float64 {
	n := len(gram) - 1
	a := columns(n, n)
	for i := range n {
		copy(a[i], gram[i][:n])
	}
	if b.e.gainFix {
		a[0][0] = 0
	}
	for l, held := range b.e.held {
		if held {
			d := b.direction(l + 1)
			a[d][d] = 0
		}
	}
	return invert(a)
}

// refine polishes b and moves its values to the optimum found. Under a known
// noise shape (exact) the standard errors are those of every row, too.
func (b *bounded) refine(exact bool) {
	b.fine = b.polish()
	if b.fine == nil {
		return
	}
	b.est[0].value = b.fine.gain
	for i, v := range b.fine.eta {
		b.est[i+1].value = v
	}
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

// unknowns is the number of parameters polished: gain, eta with coinciding
// lags as one, and the linear columns of every record.
func (b *bounded) unknowns() int {
	n := b.direction(b.e.nl+1) + 1
	for _, r := range b.e.recs {
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
func (b *bounded) normal(at *polished, sum *float64) [][]float64 {
	n := b.unknowns()
	gram := columns(n+1, n+1)
	base := b.direction(b.e.nl+1) + 1
	for i, r := range b.e.recs {
		idx := []int{}
		for k := range base {
			idx = append(idx, k)
		}
		for k := range r.linearColumns() {
			idx = append(idx, base+k)
		}
		idx = append(idx, n)
		b.accumulate(r, at, at.beta[i], idx, gram)
		base += r.linearColumns()
	}
	*sum = gram[n][n]
	return gram
}

// accumulate adds one record; idx says where its columns stand in gram.
func (b *bounded) accumulate(r *record, at *polished, beta []float64, idx []int, gram [][]float64) {
	e, t, y := b.e, r.root.t, r.root.y
	nl := e.nl
	dirs := b.direction(nl+1) + 1
	m := len(idx)
	carry := make([]float64, m)
	k := newKalman(r.shape)
	size := min(polishChunk, len(t))
	raw, start, cols := columns(nl+2, size), columns(nl+2, size), columns(m, size)
	onset := ident.Input{At: []float64{t[0]}, Value: []float64{1}}
	for lo := 0; lo < len(t); lo += size {
		hi := min(lo+size, len(t))
		n := hi - lo
		ident.NewSimulator(t[lo:hi], r.input).Sensitivities(cut(raw, n), e.st, e.lags(at.eta), at.eta[nl])
		if r.rest == earlier {
			ident.NewSimulator(t[lo:hi], onset).Sensitivities(cut(start, n), e.st, e.lags(at.eta), at.eta[nl])
		}
		for j := range m {
			clear(cols[j][:n])
		}
		for i := range n {
			cols[0][i] = raw[0][i]
			left := y[lo+i] - at.gain*raw[0][i] - beta[0]
			for l := range nl + 1 {
				d := at.gain * raw[l+1][i]
				if r.rest == earlier {
					d += beta[len(beta)-1] * start[l+1][i]
				}
				cols[b.direction(l+1)][i] += d
			}
			c := dirs
			cols[c][i] = 1
			if r.drift {
				c++
				cols[c][i] = t[lo+i]
				left -= beta[1] * t[lo+i]
			}
			if r.rest == earlier {
				c++
				cols[c][i] = start[0][i]
				left -= beta[len(beta)-1] * start[0][i]
			}
			cols[m-1][i] = left
		}
		if r.shape.white < 1 {
			for i := range n {
				k.next(ident.Row{T: t[lo+i], M: 1})
				for j := range m {
					x := cols[j][i]
					cols[j][i] = (x - k.a2*carry[j]) * k.isd
					carry[j] = k.decay*carry[j] + k.gain*x
				}
			}
		}
		for a := range m {
			for c := 0; c <= a; c++ {
				v := r.weight * dot(cols[a][:n], cols[c][:n])
				gram[idx[a]][idx[c]] += v
				if a != c {
					gram[idx[c]][idx[a]] += v
				}
			}
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

// step solves the normal equations and returns the point they lead to, inside
// the bounds.
func (b *bounded) step(at *polished, gram [][]float64) (*polished, bool) {
	e := b.e
	n := len(gram) - 1
	var free []int
	for j := range n {
		if (j == 0 && e.gainFix) || !(gram[j][j] > 0) {
			continue
		}
		pinned := false
		for l := 1; l <= e.nl+1; l++ {
			if b.direction(l) == j && j > 0 && (e.held[l-1] || at.eta[l-1] <= e.lower[l-1] || at.eta[l-1] >= e.upper[l-1]) {
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
	x, ok := solveDamped(scaled, rhs, free, 0)
	if !ok {
		return nil, false
	}
	move := make([]float64, n)
	for k, j := range free {
		move[j] = x[k] / math.Sqrt(gram[j][j])
	}
	next := &polished{gain: at.gain + move[0], eta: append([]float64(nil), at.eta...)}
	for l := range next.eta {
		next.eta[l] = math.Min(math.Max(next.eta[l]+move[b.direction(l+1)], e.lower[l]), e.upper[l])
	}
	base := b.direction(e.nl+1) + 1
	for i := range at.beta {
		beta := append([]float64(nil), at.beta[i]...)
		for k := range beta {
			beta[k] += move[base+k]
		}
		base += len(beta)
		next.beta = append(next.beta, beta)
	}
	return next, true
}
