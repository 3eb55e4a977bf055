package fit

import "math"

// In its steady state the noise filter need not pass evenly spaced rows for their
// whitened sum of squares, since what it remembers of them dies away geometrically. With
//
//	e[k] = x[k] − a2·a[k],  a[k+1] = d·a[k] + g·x[k],  k = 0…n−1,
//
// the products at so many rows' distance, R_l = Σ_{k≥l} x[k]·x[k−l], give
//
//	X = Σ a[k]·x[k] = a[0]·Σ d^j·x[j] + g·Σ_{l≥1} d^(l−1)·R_l,
//
// the square of the recursion, summed over the rows, gives
//
//	(1 − d²)·A = 2·d·g·X + g²·R_0 + a[0]² − a[n]²,  A = Σ a[k]²,
//
// and Σe² = R_0 − 2·a2·X + a2²·A. The products are the same whatever the shape, of
// which hundreds are tried on the same rows. The derivation is the project's own.

// mostMemory is the longest memory of a filter, in rows, that is followed by products.
const mostMemory = 64

// memory is the number of rows after which what the filter remembers of a row is 1e-12
// of it; ok is false where that is too many, or where the filter is not in its steady
// state.
func (k *kalman) memory() (rows int, ok bool) {
	if !k.steady || k.s.walk > 0 || !(k.decay >= 0 && k.decay < 1) {
		return 0, false
	}
	if k.decay < 1e-12 {
		return 1, true
	}
	rows = 1 + int(math.Log(1e-12)/math.Log(k.decay))
	return rows, rows <= mostMemory
}

// over is steadily for n rows without passing them: r are their products at distances
// from 0 up to the filter's memory, head and tail as many of their first and last.
func (c *carried) over(k *kalman, n int, r, head, tail []float64) {
	a2, d, g := k.a2, k.decay, k.gain
	x, end, power := 0.0, 0.0, 1.0 // power: d^l
	start := 0.0
	for l, v := range head {
		start += power * v
		end += power * tail[len(tail)-1-l]
		x += power * r[l+1]
		power *= d
	}
	x = c.a*start + g*x
	end = math.Pow(d, float64(n))*c.a + g*end
	a := (2*d*g*x + g*g*r[0] + c.a*c.a - end*end) / (1 - d*d)
	c.sum += (r[0] - 2*a2*x + a2*a2*a) * k.isd * k.isd
	c.a = end
}

// lagProducts are the products of the rows of a column with those before them, found as
// far as they are asked for: of the rows after the first, which bring a filter to its
// steady state.
type lagProducts struct {
	x []float64 // the whole column
	r []float64
}

// set begins anew for a column, which is kept.
func (p *lagProducts) set(x []float64) { p.x, p.r = x, p.r[:0] }

// after are the rows after the first.
func (p *lagProducts) after() []float64 { return p.x[min(mostMemory, len(p.x)):] }

// upTo returns the products at distances up to the given one.
func (p *lagProducts) upTo(distance int) []float64 {
	p.r = productsTo(p.r, p.after(), distance)
	return p.r[:distance+1]
}

// productsTo appends to the products r of x those that are missing up to the distance.
func productsTo(r, x []float64, distance int) []float64 {
	for l := len(r); l <= distance; l++ {
		r = append(r, dot(x[l:], x))
	}
	return r
}

// passSum adds the whitened sum of squares of the next rows, those of p at the times t.
// They stay as they are; spare is memory.
func (w *whitener) passSum(p *lagProducts, t, spare []float64) {
	x := p.after()
	first := len(p.x) - len(x)
	w.passCopy(p.x[:first], t[:first], spare)
	if rows, ok := w.k.memory(); ok && w.even && len(x) >= 2*mostMemory {
		w.over(&w.k, len(x), p.upTo(rows), x[:rows], x[len(x)-rows:])
		w.skip(t[first:])
		return
	}
	w.passCopy(x, t[first:], spare)
}

// skip passes the rows at the times t in the steady state, without a column.
func (w *whitener) skip(t []float64) {
	if w.k.s.unfiltered() {
		return
	}
	w.variances.power(w.k.variance, len(t))
	w.k.prevEnd = t[len(t)-1]
}

// passCopy is pass without a change to x.
func (w *whitener) passCopy(x, t, spare []float64) {
	spare = spare[:copy(spare, x)]
	w.pass(spare, t)
}
