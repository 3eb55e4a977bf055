package fit

import (
	"math"
	"slices"

	"gonum.org/v1/gonum/floats"
)

// tangent is a fitted model near its optimum on one record: what is left of
// the log and an orthonormal basis of the directions in which the model can
// move, the linear columns first, then gain, lags, dead time.
type tangent struct {
	rec    *record
	left   []float64   // log minus model, unwhitened
	rest   []float64   // the same of the parts of the log on which the noise is judged, when rec averages rows, else nil
	model  explained   // the model itself
	cols   [][]float64 // orthonormal (unwhitened) directions
	first  int         // how many of cols are linear columns
	param  []int       // parameter (0 gain, 1… eta) behind cols[first+i]
	tri    [][]float64 // parameter block of the triangular factor: direction = Σ tri·parameter
	scale  []float64   // norm of each parameter's direction after the linear columns; 0 when nothing is left
	nparam int

	memory *tangentMemory
	still  map[shape]judged // remembered by judgeWalk
}

// tangentMemory is what the tangents of a record use one after the other.
type tangentMemory struct {
	rest   []float64   // of the tangent
	room   [][]float64 // of its columns
	spare  []float64   // rest whitened
	white  [][]float64 // its directions and left, whitened
	factor [][]float64 // Cholesky factor of their products
	turned [][]float64 // a part of that, in terms of the parameters
}

// tangents linearises the model at p on every record. They are valid until the
// next call.
func (e *engine) tangents(p point) []*tangent {
	p = e.eval(p.eta, true)
	out := make([]*tangent, len(e.recs))
	for i, r := range e.recs {
		out[i] = e.tangent(r, &e.work[i], &p)
	}
	return out
}

func (e *engine) tangent(r *record, w *workspace, p *point) *tangent {
	n := len(r.t)
	t := &tangent{rec: r, nparam: e.ng + 2, memory: &w.tangent}
	states := e.stateDerivatives(r, w, p)
	linear, beta, left := r.solveLinear(w, p.gain)
	room := columnsIn(&t.memory.room, len(linear)+e.ng+2, n)
	t.left = left
	t.model = explained{e.st, p.gain, e.lags(p.eta), p.eta[e.ng], beta}
	if r.averagesRows() {
		t.rest = t.memory.rest[:0]
		for _, c := range r.parts {
			n := len(t.rest)
			t.rest = slices.Grow(t.rest, c.hi-c.lo)[:n+c.hi-c.lo]
			r.residual(t.rest[n:], t.model, c)
		}
		t.memory.rest = t.rest
	}
	for _, c := range linear {
		copy(room[0], c)
		addToBasis(&t.cols, room[0])
		room = room[1:]
	}
	t.first = len(t.cols)
	// Directions of the parameters.
	dirs := room
	copy(dirs[0], w.raw[0])
	for j := range e.ng + 1 {
		c := dirs[j+1]
		clear(c)
		for l := range e.nl + 1 {
			if (l < e.nl && e.groups[l] != j) || (l == e.nl && j != e.ng) {
				continue
			}
			floats.AddScaled(c, p.gain, w.raw[l+1])
			if states != nil {
				floats.Add(c, states[l])
			}
		}
	}
	t.tri = columns(len(dirs), len(dirs))
	t.scale = make([]float64, len(dirs))
	var params [][]float64
	for j, c := range dirs {
		if (j == 0 && e.gainFix) || (j > 0 && e.held[j-1]) {
			continue
		}
		norm := math.Sqrt(dot(c, c))
		project(c, t.cols[:t.first])
		project(c, t.cols[:t.first])
		t.scale[j] = math.Sqrt(dot(c, c))
		for range 2 {
			for i, q := range params {
				s := dot(q, c)
				t.tri[i][j] += s
				floats.AddScaled(c, -s, q)
			}
		}
		after := math.Sqrt(dot(c, c))
		if !(after > 1e-7*norm) || !(after > 1e-6*t.scale[j]) {
			for i := range params {
				t.tri[i][j] = 0
			}
			t.scale[j] = 0
			continue
		}
		floats.Scale(1/after, c)
		t.tri[len(params)][j] = after
		t.param = append(t.param, j)
		params = append(params, c)
	}
	t.cols = append(t.cols, params...)
	return t
}

// node is one noise shape with what the record says under it: its weight,
// and the quadratic form of the model's parameters (gain, eta):
// rss(d) = least + (d-shift)ᵀ·a·(d-shift), d counted from the optimum the
// tangent was taken at. Parameters absent from the tangent have zero rows.
type node struct {
	shape  shape
	weight float64
	a      [][]float64
	b      []float64 // a·shift
	s2     float64   // variance of a whitened row
	dof    int
	dev    float64 // -2 restricted log likelihood, up to a constant
}

// evaluate judges a noise shape and has the quadratic form of the parameters too.
func (t *tangent) evaluate(s shape) node {
	nd := t.judge(s)
	nd.a, nd.b = t.quadratic()
	return nd
}

// judge computes the restricted likelihood (REML: Patterson and Thompson
// 1971; Harville 1977, from memory) of a noise shape,
//
//	-2·L = (n-p)·ln rss + ln|R| + ln|XᵀR⁻¹X|
//
// with rss the generalised least-squares sum over all directions X of the
// tangent.
func (t *tangent) judge(s shape) node {
	if s.walk > 0 && t.sampled() {
		return t.judgeWalk(s)
	}
	nd, _ := t.judgeRows(s)
	return nd
}

func (t *tangent) judgeRows(s shape) (node, onRowsSums) {
	sums := t.onRows(s)
	rss, logdet, n, p := sums.least, sums.logdet, len(t.left), len(t.cols)
	nd := node{shape: s, dof: n - p}
	if t.rest != nil {
		rss, logdet = t.fullSum(s, sums)
		n = len(t.rest)
		nd.dof = max(t.rec.used-p, 1)
	}
	nd.s2 = t.rounded(rss / float64(n-p))
	nd.dev = float64(n-p)*math.Log(rss) + logdet + sums.directions
	return nd, sums
}

// sampled reports whether the noise is judged on a part of the log's rows.
func (t *tangent) sampled() bool { return t.rest != nil && len(t.rest) < t.rec.used }

// judgeWalk is judge for a log whose noise is judged on pieces of it. A
// walk is slow: what it adds to -2L is told by the averaged rows, which cover the
// whole log, with the variance and the rest of the shape as the pieces tell them.
// (On the pieces alone a walk would take credit for the baseline of the whole
// log being known less well than the pieces say.)
func (t *tangent) judgeWalk(s shape) node {
	without := s
	without.walk = 0
	still, ok := t.still[without]
	if !ok {
		still.node, still.sums = t.judgeRows(without)
		if t.still == nil {
			t.still = map[shape]judged{}
		}
		t.still[without] = still
	}
	r, r0, nd := t.onRows(s), still.sums, still.node
	nd.shape = s
	nd.dev += (r.least-r0.least)/nd.s2 + r.logdet - r0.logdet + r.directions - r0.directions
	return nd
}

// judged is a noise shape without a walk with the sums on the rows in use.
type judged struct {
	node node
	sums onRowsSums
}

// rounded is a variance of readings of the logged resolution: a rounded reading
// is never better than its rounding, Δ²/12 (GUM, rectangular distribution),
// however well the steps are met.
func (t *tangent) rounded(variance float64) float64 {
	q := t.rec.run.Quality.Quantum
	return math.Max(variance, q*q/12)
}

// onRowsSums are what the rows in use say under a noise shape.
type onRowsSums struct {
	all, least float64 // whitened sum of squares: of what is left, and less what the directions take
	logdet     float64 // ln|R|
	directions float64 // ln|XᵀR⁻¹X|
}

// onRows whitens the directions and what is left on the rows in use, and leaves the
// factor of their products in memory.
func (t *tangent) onRows(s shape) onRowsSums {
	f := &t.rec.scratch
	f.set(t.rec.rows, s)
	n, p := len(t.left), len(t.cols)
	m := t.memory
	white, l := columnsIn(&m.white, p+1, n), columnsIn(&m.factor, p+1, p+1)
	for j, c := range t.cols {
		copy(white[j], c)
	}
	copy(white[p], t.left)
	f.applyAll(white)
	sums := onRowsSums{logdet: f.logdet}
	// Cholesky of the Gram matrix, columns in order, the residual last.
	for i := 0; i <= p; i++ {
		for j := 0; j <= i; j++ {
			s := dot(white[i], white[j])
			if i == p && j == p {
				sums.all = s
			}
			for k := range j {
				s -= l[i][k] * l[j][k]
			}
			if i == j {
				l[i][i] = math.Sqrt(math.Max(s, 1e-300))
			} else {
				l[i][j] = s / l[j][j]
			}
		}
		if i < p {
			sums.directions += 2 * math.Log(l[i][i])
		}
	}
	sums.least = l[p][p] * l[p][p]
	return sums
}

// quadratic is the quadratic form of the parameters under the noise shape last
// judged. In the orthonormal coordinates a is lp·lpᵀ, with lp the trailing block of the factor l; in
// parameters a = triᵀ·lp·lpᵀ·tri.
func (t *tangent) quadratic() (a [][]float64, b []float64) {
	np, p, l := len(t.param), len(t.cols), t.memory.factor
	all := columns(t.nparam+1, t.nparam)
	a, b = all[:t.nparam:t.nparam], all[t.nparam]
	m := columnsIn(&t.memory.turned, np, t.nparam) // lpᵀ·tri
	for i := range np {
		clear(m[i])
		for _, j := range t.param {
			for k := i; k < np; k++ {
				m[i][j] += l[t.first+k][t.first+i] * t.tri[k][j]
			}
		}
	}
	for _, i := range t.param {
		for k := range np {
			b[i] += m[k][i] * l[p][t.first+k]
			for _, j := range t.param {
				a[i][j] += m[k][i] * m[k][j]
			}
		}
	}
	return a, b
}

// fullSum is the generalised least-squares sum over the noise rows: their
// whitened sum of squares less what the model's directions would still take
// from it, which the averaged rows tell (whitened sum minus least, scaled to
// the number of rows).
func (t *tangent) fullSum(s shape, r onRowsSums) (sum, logdet float64) {
	m := t.memory
	m.spare = append(m.spare[:0], t.rest...)
	w := t.rec.whitener(s)
	left := m.spare
	for _, c := range t.rec.parts {
		n := c.hi - c.lo
		w.pass(left[:n], t.rec.root.t[c.lo:c.hi])
		left = left[n:]
	}
	taken := (r.all - r.least) * float64(len(t.rest)) / float64(t.rec.used)
	return math.Max(w.sum-taken, 1e-3*w.sum), w.logDeterminant()
}

// tcRange is the range of correlation times that a record can speak about.
func (t *tangent) tcRange() (lo, hi float64) {
	return 0.2 * t.rec.step, math.Max(0.7*t.rec.span, 2*t.rec.step)
}

// bestShape finds the noise shape without a walk of greatest restricted
// likelihood, from a coarse grid and a pattern search; near narrows the grid to a
// neighbourhood.
func (t *tangent) bestShape(near *shape) node {
	lo, hi := t.tcRange()
	best := t.judge(whiteShape)
	better := func(tc, w float64) (up bool, dev float64) {
		tc = math.Min(math.Max(tc, lo), hi)
		w = math.Min(math.Max(w, 0), 0.995)
		n := t.judge(shape{tc: tc, white: w})
		if up = n.dev < best.dev-1e-9; up {
			best = n
		}
		return up, n.dev
	}
	da, db := math.Log(hi/lo)/8, 0.25
	if near == nil || near.white >= 1 {
		for i := range 9 {
			for _, w := range []float64{0, 0.3, 0.7, 0.93} {
				better(lo*math.Exp(float64(i)*da), w)
			}
		}
		da /= 2
		db = 0.12
	} else {
		better(near.tc, near.white)
		da, db = 0.3, 0.1
	}
	// Pattern search (Hooke and Jeeves 1961, from memory): halve when nothing
	// helps. At the last lattice the nine values give a parabola, and its bottom.
	for da > 0.05 {
		c, centre := best.shape, best.dev
		if c.white >= 1 {
			c = shape{tc: lo * 3, white: 0.97}
		}
		var dev [8]float64
		moved := false
		for i, d := range neighbours {
			if i >= 4 && moved {
				break // the diagonals are for ridges
			}
			var up bool
			up, dev[i] = better(c.tc*math.Exp(d[0]*da), c.white+d[1]*db)
			moved = moved || up
		}
		if moved {
			continue
		}
		if da <= 0.1 && best.shape.white < 1 {
			if x, y, ok := bottom(centre, dev); ok {
				better(c.tc*math.Exp(x*da), c.white+y*db)
			}
		}
		da, db = da/2, db/2
	}
	return best
}

// neighbours are those of a shape on a lattice, in steps of log tc and of white.
var neighbours = [8][2]float64{{1, 0}, {-1, 0}, {0, 1}, {0, -1}, {1, 1}, {-1, -1}, {1, -1}, {-1, 1}}

// bottom is the lowest point of the parabola through the centre of a lattice and
// its neighbours, in steps; ok is false where it has none within reach.
func bottom(centre float64, dev [8]float64) (x, y float64, ok bool) {
	gx, gy := (dev[0]-dev[1])/2, (dev[2]-dev[3])/2
	xx, yy := dev[0]+dev[1]-2*centre, dev[2]+dev[3]-2*centre
	xy := (dev[4] + dev[5] - dev[6] - dev[7]) / 4
	det := xx*yy - xy*xy
	if !(xx > 0) || !(yy > 0) || !(det > 1e-3*xx*yy) {
		return 0, 0, false
	}
	x, y = (xy*gy-yy*gx)/det, (xy*gx-xx*gy)/det
	return x, y, math.Abs(x) <= 1 && math.Abs(y) <= 1
}
