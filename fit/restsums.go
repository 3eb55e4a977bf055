package fit

import "sync"

// Most rows of a long log lie where every lag has died away since the last change of the
// input. What a model leaves there is the log less a straight line, whichever model it
// is, and so the sums over what is left follow from sums over the log that are taken
// once: with x[k] the log less the straight line through the piece, so that no large terms
// cancel, and e[k] = x[k] − (at + slope·k), the products of a piece of n rows at the distance
// l are
//
//	Σ_{k≥l} e[k]·e[k−l] = R_l − Σ_{k≥l} x[k]·(at + slope·(k−l)) − Σ_{k<n−l} x[k]·(at + slope·(k+l))
//	                      + Σ_{k<n−l} (at + slope·k)·(at + slope·(k+l)).

// restSums are the sums over the pieces of a full log.
type restSums struct {
	t, y   []float64
	group  int // rows added up in what the input is compared with
	rows   int // of a piece, whole groups; the last piece of the log may be shorter
	first  int // row from which pieces are taken by their sums
	mu     sync.Mutex
	pieces []pieceSums
	ramp   []float64 // 0, 1, 2, …
	spare  []float64
}

// pieceSums are those of one piece.
type pieceSums struct {
	through   line
	sum, tilt float64   // Σx[k] and Σk·x[k]
	r         []float64 // R_l
	groups    []float64 // Σx[k] over the piece's groups
}

// newRestSums is nil for a log that is too short to gain by it, or unevenly sampled.
func newRestSums(t, y []float64, even bool) *restSums {
	n := len(t)
	if !even || n < 2*noiseRows {
		return nil
	}
	group := groupSize(n)
	s := &restSums{t: t, y: y, group: group, rows: group * max(1, pieceRows/group)}
	s.first = (whiteRows + s.rows - 1) / s.rows * s.rows
	s.pieces = make([]pieceSums, (n+s.rows-1)/s.rows)
	s.ramp, s.spare = make([]float64, s.rows), make([]float64, s.rows)
	for k := range s.ramp {
		s.ramp[k] = float64(k)
	}
	return s
}

// pieceLength is the number of rows to take at a time.
func (s *restSums) pieceLength() int {
	if s == nil {
		return pieceRows
	}
	return s.rows
}

// serve reports whether the n rows from lo on may be passed by their sums under the filter
// in force, and how many rows back it remembers.
func (s *restSums) serve(w *whitener, lo, n int) (reach int, ok bool) {
	if s == nil || lo < s.first || n < 2*mostMemory {
		return 0, false
	}
	if w.k.s.unfiltered() {
		return 1, true
	}
	return w.k.memory()
}

// piece returns the sums of the piece that begins at row lo, with products up to the
// distance.
func (s *restSums) piece(lo, distance int) pieceSums {
	s.mu.Lock()
	defer s.mu.Unlock()
	p := &s.pieces[lo/s.rows]
	if len(p.r) > distance {
		return *p
	}
	y := s.y[lo:min(lo+s.rows, len(s.y))]
	x := s.spare[:len(y)]
	if p.r == nil {
		p.through = lineThrough(y)
	}
	for k, v := range y {
		x[k] = v - p.through.over(float64(k))
	}
	if p.r == nil {
		p.r = make([]float64, 0, distance+1)
		p.sum, p.tilt = total(x), dot(x, s.ramp)
		for rest := x; len(rest) > 0; rest = rest[min(s.group, len(rest)):] {
			p.groups = append(p.groups, total(rest[:min(s.group, len(rest))]))
		}
	}
	p.r = productsTo(p.r, x, distance)
	return *p
}

// restRows is what a model leaves of a piece where it is a straight line.
type restRows struct {
	s     *restSums
	lo, n int
	model line
	less  line // model, counted from the line through the piece
	p     pieceSums

	reach int
	room  [mostMemory + 1]float64 // products of what is left at distances up to reach
}

// under sets r to what the model leaves of the piece of n rows from lo on, for a filter that
// reaches so many rows back.
func (r *restRows) under(model line, s *restSums, lo, n, reach int) {
	p := s.piece(lo, reach)
	r.s, r.lo, r.n, r.model, r.less, r.p, r.reach = s, lo, n, model, model.plus(-1, p.through), p, reach
	at, slope := r.less.at, r.less.slope
	all := at*p.sum + slope*p.tilt         // Σ x[k]·(at + slope·k)
	var first, last, firstX, lastX float64 // the same, and Σx, over the first and last l rows
	for l := range reach + 1 {
		far := slope * float64(l)
		back := all - first - far*(p.sum-firstX)
		ahead := all - last + far*(p.sum-lastX)
		r.room[l] = p.r[l] - back - ahead + r.less.product(line{at + far, slope}, float64(n-l))
		x, end := s.y[lo+l]-p.through.over(float64(l)), s.y[lo+n-1-l]-p.through.over(float64(n-1-l))
		first += x * r.less.over(float64(l))
		last += end * r.less.over(float64(n-1-l))
		firstX += x
		lastX += end
	}
}

// times are those of the piece's rows.
func (r *restRows) times() []float64 { return r.s.t[r.lo : r.lo+r.n] }

// sum is that of what is left.
func (r *restRows) sum() float64 { return r.p.sum - r.less.sum(float64(r.n)) }

// row is what is left of row k of the piece.
func (r *restRows) row(k int) float64 { return r.s.y[r.lo+k] - r.model.over(float64(k)) }

// whiteSums are the sums over whitened rows: tilt is that of k times row k.
type whiteSums struct{ sum, tilt, squares float64 }

// whiten passes what is left with what a column carries. The recursion summed over the
// rows, and k+1 times it, with a before the first and b after the last of n rows, are
//
//	(1 − d)·Σa[k] = g·Σe[k] + a − b,  (1 − d)·Σk·a[k] = d·Σa[k] + g·(Σk·e[k] + Σe[k]) − n·b.
func (r *restRows) whiten(k *kalman, c *carried) whiteSums {
	n := float64(r.n)
	sum, tilt := r.sum(), r.p.tilt-r.less.tilt(n)
	if k.s.unfiltered() {
		c.sum += r.room[0]
		return whiteSums{sum, tilt, r.room[0]}
	}
	var ends [2][mostMemory]float64
	head, tail := ends[0][:r.reach], ends[1][:r.reach]
	for j := range head {
		head[j], tail[j] = r.row(j), r.row(r.n-len(tail)+j)
	}
	a, before := c.a, c.sum
	c.over(k, r.n, r.room[:], head, tail)
	carried := (k.gain*sum + a - c.a) / (1 - k.decay)
	carriedTilt := (k.decay*carried + k.gain*(tilt+sum) - n*c.a) / (1 - k.decay)
	return whiteSums{k.isd * (sum - k.a2*carried), k.isd * (tilt - k.a2*carriedTilt), c.sum - before}
}

// passRest is pass for a piece at rest; its sums go to the figures.
func (w *whitener) passRest(r *restRows, f *residualFigures) {
	f.addRest(r)
	w.groupRest(r, f)
	r.whiten(&w.k, &w.carried)
	w.skip(r.times())
}

// groupRest adds up the whitened rows of the piece's groups. With a what the filter carries
// at the first row of a group and b at that after it, the recursion summed over the group
// gives (1 − d)·Σa = g·Σe + a − b.
func (w *whitener) groupRest(r *restRows, f *residualFigures) {
	k, a := &w.k, w.carried.a
	white := k.s.unfiltered()
	var room [mostMemory]float64
	powers := room[:r.reach] // d^(reach−1) … d, 1
	power := 1.0
	var faded, fadedTilt float64 // Σd^j and Σj·d^j
	for j := range powers {
		powers[r.reach-1-j] = power
		faded += power
		fadedTilt += power * float64(j)
		power *= k.decay
	}
	for g, lo := 0, 0; lo < r.n; g, lo = g+1, lo+r.s.group {
		hi := min(lo+r.s.group, r.n)
		n := float64(hi - lo)
		sum := r.p.groups[g] - line{r.less.over(float64(lo)), r.less.slope}.sum(n)
		if !white {
			b := 0.0
			if hi-lo < r.reach {
				b = a
				for j := lo; j < hi; j++ {
					b = k.decay*b + k.gain*r.row(j)
				}
			} else { // Σ d^j·(y − model) over the last rows
				y := r.s.y[r.lo+hi-r.reach : r.lo+hi]
				b = k.gain * (dot(powers, y) - r.model.over(float64(hi-1))*faded + r.model.slope*fadedTilt)
			}
			sum = k.isd * (sum - k.a2*(k.gain*sum+a-b)/(1-k.decay))
			a = b
		}
		f.grouped[(r.lo+lo)/r.s.group] += sum
	}
}

// addRest takes the rows of a piece at rest, before they are whitened.
func (f *residualFigures) addRest(r *restRows) {
	f.lagged += f.last*r.row(0) + r.room[1]
	f.sum += r.sum()
	f.squares += r.room[0]
	f.last = r.row(r.n - 1)
	f.n += r.n
}
