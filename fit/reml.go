package fit

import (
	"math"

	"gonum.org/v1/gonum/floats"
)

// tangent is a fitted model near its optimum on one record: what is left of
// the log and an orthonormal basis of the directions in which the model can
// move, the linear columns first, then gain, lags, dead time.
type tangent struct {
	rec    *record
	left   []float64    // log minus model, unwhitened
	judged []judgedPart // the parts of the log on which the noise is judged, when rec averages rows, else none
	rows   int          // of these
	model  explained    // the model itself
	cols   [][]float64  // orthonormal (unwhitened) directions
	first  int          // how many of cols are linear columns
	param  []int        // parameter (0 gain, 1… eta) behind cols[first+i]
	tri    [][]float64  // parameter block of the triangular factor: direction = Σ tri·parameter
	scale  []float64    // norm of each parameter's direction after the linear columns; 0 when nothing is left
	nparam int
	fixed  [][]float64 // coefficients of the record's fixed columns in terms of cols

	memory *tangentMemory
	still  map[shape]judged // remembered by judgeWalk
}

// judgedPart is a part of the log on which the noise is judged.
type judgedPart struct {
	times []float64
	left  lagProducts // of log minus model
}

// tangentMemory is what the tangents of a record use one after the other.
type tangentMemory struct {
	rest   []float64   // log minus model, of the judged parts
	room   [][]float64 // of its columns
	spare  []float64   // a part of it whitened
	judged []judgedPart
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
		for _, c := range r.parts {
			t.rows += c.hi - c.lo
		}
		t.memory.rest = longColumn(t.memory.rest, t.rows)
		if t.memory.judged == nil {
			t.memory.judged = make([]judgedPart, len(r.parts))
		}
		t.judged = t.memory.judged
		next := t.memory.rest
		for i, c := range r.parts {
			n := c.hi - c.lo
			r.residual(next[:n], t.model, c)
			t.judged[i].times = r.root.t[c.lo:c.hi]
			t.judged[i].left.set(next[:n])
			next = next[n:]
		}
	}
	var kept [][]float64 // of linear
	for _, c := range linear {
		copy(room[0], c)
		if addToBasis(&t.cols, room[0]) {
			kept = append(kept, c)
		}
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
	cross := columns(t.first, len(dirs)) // directions on the linear columns
	t.scale = make([]float64, len(dirs))
	var params [][]float64
	for j, c := range dirs {
		if (j == 0 && e.gainFix) || (j > 0 && e.held[j-1]) {
			continue
		}
		norm := math.Sqrt(dot(c, c))
		for i, q := range t.cols[:t.first] {
			cross[i][j] = dot(q, c)
		}
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
	t.fixed = t.fixedRows(len(r.fixed), kept, cross)
	return t
}

// fixedRows are the first rows of the inverse of the triangular matrix that has the
// model's own columns, the linear ones and then the directions, in terms of the
// orthonormal ones: with them a coefficient is read off coordinates. nil where a
// fixed column is no direction of its own.
func (t *tangent) fixedRows(n int, kept, cross [][]float64) [][]float64 {
	if len(kept) < n {
		return nil
	}
	entry := func(i, k int) float64 {
		switch {
		case k < t.first:
			return dot(t.cols[i], kept[k])
		case i < t.first:
			return cross[i][t.param[k-t.first]]
		}
		return t.tri[i-t.first][t.param[k-t.first]]
	}
	rows := columns(n, len(t.cols))
	for j, row := range rows {
		row[j] = 1
		for k := j; k < len(row); k++ {
			for i := j; i < k; i++ {
				row[k] -= entry(i, k) * row[i]
			}
			row[k] /= entry(k, k)
		}
	}
	return rows
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

	fixed []margin // of the coefficients of the fixed columns, counted from the optimum
}

// evaluate judges a noise shape and has the quadratic form of the parameters too.
func (t *tangent) evaluate(s shape) node {
	nd := t.judge(s)
	nd.a, nd.b = t.quadratic()
	nd.fixed = t.fixedMargins(nd.s2, float64(nd.dof))
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
	nd, _, _ := t.judgeRows(s)
	return nd
}

func (t *tangent) judgeRows(s shape) (nd node, sums onRowsSums, rss float64) {
	sums = t.onRows(s)
	logdet, n, p := sums.logdet, len(t.left), len(t.cols)
	rss = sums.least
	nd = node{shape: s, dof: n - p}
	if t.rows > 0 {
		rss, logdet = t.fullSum(s, sums)
		n = t.rows
		nd.dof = max(t.rec.used-p, 1)
	}
	nd.s2 = t.rounded(rss / float64(n-p))
	nd.dev = float64(n-p)*math.Log(rss) + logdet + sums.directions
	return nd, sums, rss
}

// sampled reports whether the noise is judged on a part of the log's rows.
func (t *tangent) sampled() bool { return t.rows > 0 && t.rows < t.rec.used }

// judgeWalk is judge for a log whose noise is judged on pieces of it. A
// walk is slow: what it takes from rss and adds to the determinants is told by the averaged
// rows, which cover the whole log, and the rest of the shape by the pieces. (On the pieces
// alone a walk would take credit for the baseline of the whole log being known less well than
// the pieces say.) Of all rows rss is that of the averaged ones and that of the pieces, scaled
// up. Both count as much as the pieces have rows: a walk known from the whole log beside a
// correlation time known from a part of it would make up for any correlation time.
func (t *tangent) judgeWalk(s shape) node {
	without := s
	without.walk = 0
	still, ok := t.still[without]
	if !ok {
		still.node, still.sums, still.rss = t.judgeRows(without)
		if t.still == nil {
			t.still = map[shape]judged{}
		}
		t.still[without] = still
	}
	r, r0, nd := t.onRows(s), still.sums, still.node
	nd.shape = s
	judged := float64(t.rows) / float64(t.rec.used)
	within := still.rss / judged
	share := (r.least + within) / (r0.least + within)
	nd.s2 = t.rounded(nd.s2 * share)
	nd.dev += float64(t.rows-len(t.cols))*math.Log(share) + judged*(r.logdet-r0.logdet+r.directions-r0.directions)
	return nd
}

// judged is a noise shape without a walk with the sums on the rows in use.
type judged struct {
	node node
	sums onRowsSums
	rss  float64
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

// fixedMargins are the coefficients of the fixed columns under the noise shape last
// judged. With x solving l·x = row, a coefficient's variance is x·x and its distance
// from the optimum x·l', l' the last row of the factor l.
func (t *tangent) fixedMargins(s2, dof float64) []margin {
	p, l := len(t.cols), t.memory.factor
	out := make([]margin, len(t.fixed))
	x := make([]float64, p)
	for j, row := range t.fixed {
		for i := range x {
			x[i] = (row[i] - dot(l[i][:i], x[:i])) / l[i][i]
		}
		out[j] = margin{centre: dot(x, l[p][:p]), sd: math.Sqrt(s2 * dot(x, x)), dof: dof}
	}
	return out
}

// fullSum is the generalised least-squares sum over the noise rows: their
// whitened sum of squares less what the model's directions would still take
// from it, which the averaged rows tell (whitened sum minus least). Pieces of the log are
// spared that: what the directions take lies about the bumps, where the pieces may not.
func (t *tangent) fullSum(s shape, r onRowsSums) (sum, logdet float64) {
	m := t.memory
	m.spare = longColumn(m.spare, t.rows)
	w := t.rec.whitener(s)
	for i := range t.judged {
		w.passSum(&t.judged[i].left, t.judged[i].times, m.spare)
	}
	if t.sampled() {
		return w.sum, w.logDeterminant()
	}
	return math.Max(w.sum-(r.all-r.least), 1e-3*w.sum), w.logDeterminant()
}

// tcRange is the range of correlation times that a record can speak about.
func (t *tangent) tcRange() (lo, hi float64) {
	return 0.2 * t.rec.step, math.Max(0.7*t.rec.span, 2*t.rec.step)
}

// bestShape finds the noise shape without a walk of greatest restricted
// likelihood: from near where that is known, else, or where that search strays, from the
// best of a coarse grid.
func (t *tangent) bestShape(near *shape) node {
	s := &shapeSearch{t: t, best: t.judge(whiteShape)}
	s.lo, s.hi = t.tcRange()
	if near != nil && near.white < 1 {
		s.at(near.tc, near.white)
		s.narrow(0.067, 0.025)
		if !s.strayed(*near) {
			return s.best
		}
	}
	da := math.Log(s.hi/s.lo) / 8
	coarse := &shapeSearch{t: t.glance(), lo: s.lo, hi: s.hi}
	coarse.best = coarse.t.judge(whiteShape)
	for i := range 9 {
		for _, w := range []float64{0, 0.3, 0.7, 0.93} {
			coarse.at(s.lo*math.Exp(float64(i)*da), w)
		}
	}
	s.at(coarse.best.shape.tc, coarse.best.shape.white)
	s.narrow(da/2, 0.12)
	return s.best
}

// glance is the tangent with every third of the parts on which the noise is judged.
func (t *tangent) glance() *tangent {
	if len(t.judged) < 4 {
		return t
	}
	c := *t
	c.judged, c.rows = nil, 0
	for i := 0; i < len(t.judged); i += 3 {
		c.judged = append(c.judged, t.judged[i])
		c.rows += len(t.judged[i].times)
	}
	return &c
}

// shapeSearch is a search for the best noise shape.
type shapeSearch struct {
	t      *tangent
	lo, hi float64 // of tc
	best   node
}

// at judges a shape and returns its -2L.
func (s *shapeSearch) at(tc, w float64) float64 {
	tc = math.Min(math.Max(tc, s.lo), s.hi)
	w = math.Min(math.Max(w, 0), 0.995)
	n := s.t.judge(shape{tc: tc, white: w})
	if n.dev < s.best.dev-1e-9 {
		s.best = n
	}
	return n.dev
}

// strayed reports whether the best shape lies so far from where the search for it began,
// or at such an end of its range, that there may be a better one elsewhere.
func (s *shapeSearch) strayed(from shape) bool {
	c := s.best.shape
	return math.Abs(math.Log(c.tc/from.tc)) > 1.5 || c.tc <= 1.01*s.lo || c.tc >= 0.99*s.hi || c.white >= 0.99
}

// littleWhite are white fractions to try where a search ended at none: long correlation leaves
// a valley of little white that its steps pass over.
var littleWhite = []float64{0.03, 0.01, 0.003, 0.001}

// narrow closes in on the lowest -2L around the best shape by parabolas over a lattice, da
// and db its first steps in log tc and in white. It ends where a parabola told the value
// that was found, or where the lattice is narrow.
func (s *shapeSearch) narrow(da, db float64) {
	looked := false // for a little white
	for range 40 {
		c, centre := s.best.shape, s.best.dev
		if c.white >= 1 {
			c = shape{tc: s.lo * 3, white: 0.97}
			centre = s.at(c.tc, c.white)
		}
		at := func(x, y float64) float64 { return s.at(c.tc*math.Exp(x*da), c.white+y*db) }
		p, ok := parabola(centre, at)
		inside := ok && math.Max(math.Abs(p.x), math.Abs(p.y)) <= 1
		told := ok && math.Abs(at(p.x, p.y)-p.least) < 0.002 && inside
		far := math.Max(math.Abs(math.Log(s.best.shape.tc/c.tc))/da, math.Abs(s.best.shape.white-c.white)/db)
		switch {
		case far > 0.9 && !inside:
			da, db = math.Min(2*da, 0.6), math.Min(2*db, 0.2)
		case told, far <= 0.6 && da < 0.1:
			if looked || s.best.shape.white > 0 {
				return
			}
			looked = true
			for _, w := range littleWhite {
				s.at(s.best.shape.tc, w)
			}
			if s.best.shape.white == 0 {
				return
			}
			da, db = 0.2, s.best.shape.white/2
		case far <= 0.6:
			da, db = da/3, db/3
		}
	}
}

// bowl is the lowest point of a parabola, in steps, and the value there.
type bowl struct{ x, y, least float64 }

// parabola is the one through the values of f at the origin, known already, at its four
// neighbours and on the diagonal towards the lower ones of them. Its lowest point is
// taken no further than two steps away; ok is false where it has none.
func parabola(centre float64, f func(x, y float64) float64) (p bowl, ok bool) {
	right, left, up, down := f(1, 0), f(-1, 0), f(0, 1), f(0, -1)
	sx, sy := math.Copysign(1, left-right), math.Copysign(1, down-up)
	corner := f(sx, sy) - math.Min(right, left) - math.Min(up, down) + centre
	gx, gy := (right-left)/2, (up-down)/2
	xx, yy, xy := right+left-2*centre, up+down-2*centre, corner*sx*sy
	det := xx*yy - xy*xy
	if !(xx > 0) || !(yy > 0) || !(det > 1e-3*xx*yy) {
		return bowl{}, false
	}
	x, y := (xy*gy-yy*gx)/det, (xy*gx-xx*gy)/det
	if far := math.Max(math.Abs(x), math.Abs(y)) / 2; far > 1 {
		x, y = x/far, y/far
	}
	return bowl{x, y, centre + gx*x + gy*y + xx*x*x/2 + yy*y*y/2 + xy*x*y}, true
}
