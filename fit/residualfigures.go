package fit

import "math"

// residuals fills the figures of the misfit. The whitened residuals are those
// of the noise model; the simulated output is what the plant alone explains.
func (out *outcome) residuals(b *bounded, m *Model) {
	var sse, sst, lag1 float64
	pIn := 1.0
	figures := b.residualFigures()
	count := 0
	for _, f := range figures {
		count += len(f.white)
	}
	whitened := longColumn(nil, count)[:0]
	defer func() { giveBack(whitened) }()
	for i, f := range figures {
		r, c := b.e.recs[i], out.yardstick(i)
		n := len(r.root.t)
		m.Samples += n
		sse += f.squares
		sst += c.sst
		lag1 += f.lag1() * float64(n)
		scale := 1 / math.Sqrt(math.Max(r.sigma2, 1e-300)) // logs of different noise on one scale
		for _, v := range f.white {
			whitened = append(whitened, v*scale)
		}
		reach := max(4, crossLags(r.root, b)/groupSize(n))
		pIn = math.Min(pIn, finite(crossCorrelationP(f.grouped, c.basis(windowsTo(reach))), 1))
	}
	n := float64(m.Samples)
	m.SSE, m.RMSE = sse, math.Sqrt(sse/n)
	m.FitPercent = 100 * (1 - math.Sqrt(sse/sst))
	m.Residuals.Lag1Correlation = lag1 / n
	lags := max(1, min(20, len(whitened)/5))
	fitted := 2
	if out.opt.Noise == "white" {
		fitted = 0
	}
	_, p := ljungBox(whitened, lags, min(fitted, lags-1))
	m.Residuals.LjungBoxP = finite(p, 1)
	m.Residuals.InputCorrelationP = math.Min(1, pIn*float64(len(b.e.recs)))
	m.Noise = out.noise(b)
}

// residualFigures are those of the optimum, on every row where it was brought
// there, per record.
func (b *bounded) residualFigures() []*residualFigures {
	if b.fine == nil || b.full != nil {
		return b.figures
	}
	var out []*residualFigures
	for i, r := range b.e.recs {
		f, _ := r.walkResiduals(b.fine.explained(b.st, i), nil)
		out = append(out, f)
	}
	return out
}

// walkResiduals passes the residuals of x on every row of the full log, and
// returns their whitener too. The figures take the memory of some that are no longer
// needed, unless nil.
func (r *record) walkResiduals(x explained, old *residualFigures) (*residualFigures, *whitener) {
	f, w := r.newResidualFigures(old), r.whitener(r.shape)
	t, sums := r.root.t, r.root.sums
	walk := r.leaving(x, part{0, len(t), r.root.sim.Clone()})
	var rest restRows
	size := sums.pieceLength()
	left := make([]float64, min(size, len(t)))
	for lo := 0; lo < len(t); {
		n := min(size, len(t)-lo)
		if reach, ok := sums.serve(&w, lo, n); ok {
			if model, ok := walk.line(n); ok {
				rest.under(model, sums, lo, n, reach)
				w.passRest(&rest, f)
				lo += n
				continue
			}
		}
		walk.next(left[:n])
		f.add(left[:n])
		w.pass(left[:n], t[lo:lo+n])
		f.addWhite(left[:n], lo, len(t))
		lo += n
	}
	return f, &w
}

// testRows is the number of rows above which the misfit is compared with the
// input in sums over several rows: a slow misfit shows in them just as well.
const testRows = 5000

// whiteRows is how many whitened rows are kept for the test of what the noise model leaves:
// more would find it wanting on every log.
const whiteRows = 8000

// groupSize is the number of rows added up in a log of n.
func groupSize(n int) int { return max(1, (n+testRows-1)/testRows) }

// yardstick is what the residuals of a record are held against.
type yardstick struct {
	sst     float64   // of the temperature about its mean
	changes []float64 // of the input, added up in groups of rows
	bases   map[int][][]float64
}

// basis is the changeBasis for so many windows, made once: the structures of a log
// ask for the same few.
func (y *yardstick) basis(windows int) [][]float64 {
	b, ok := y.bases[windows]
	if !ok {
		b = changeBasis(y.changes, windows)
		y.bases[windows] = b
	}
	return b
}

// yardstick returns that of record i, made once.
func (out *outcome) yardstick(i int) *yardstick {
	if out.yardsticks == nil {
		out.yardsticks = make([]*yardstick, len(out.recs))
	}
	if out.yardsticks[i] != nil {
		return out.yardsticks[i]
	}
	r := out.recs[i].root
	n := len(r.t)
	c := &yardstick{changes: groupedChanges(r, groupSize(n)), bases: map[int][][]float64{}}
	c.sst = squaresAbout(r.y, total(r.y)/float64(n))
	out.yardsticks[i] = c
	return c
}

// squaresAbout is the sum of squares of x about a value.
func squaresAbout(x []float64, value float64) float64 {
	var a, b, c, d float64 // one sum alone waits for itself
	for ; len(x) >= 4; x = x[4:] {
		p, q, r, s := x[0]-value, x[1]-value, x[2]-value, x[3]-value
		a, b, c, d = a+p*p, b+q*q, c+r*r, d+s*s
	}
	for _, v := range x {
		a += (v - value) * (v - value)
	}
	return (a + b) + (c + d)
}

// residualFigures are sums over the residuals of a record.
type residualFigures struct {
	n                    int
	sum, squares, lagged float64 // lagged: Σ of neighbours' products
	first, last          float64

	white   []float64 // whitened, the first whiteRows
	grouped []float64 // whitened, every so many rows added up
}

// newResidualFigures begins the sums over a full log.
func (r *record) newResidualFigures(old *residualFigures) *residualFigures {
	if old != nil {
		clear(old.grouped)
		*old = residualFigures{white: old.white[:0], grouped: old.grouped}
		return old
	}
	n := len(r.root.t)
	group := groupSize(n)
	return &residualFigures{
		white:   make([]float64, 0, min(n, whiteRows)),
		grouped: make([]float64, (n+group-1)/group),
	}
}

// add takes the next rows, before they are whitened.
func (f *residualFigures) add(left []float64) {
	if f.n == 0 {
		f.first = left[0]
	} else {
		f.lagged += f.last * left[0]
	}
	f.sum += total(left)
	f.squares += dot(left, left)
	f.lagged += dot(left[:len(left)-1], left[1:])
	f.last = left[len(left)-1]
	f.n += len(left)
}

// addWhite takes the whitened rows lo and after of a log of n.
func (f *residualFigures) addWhite(left []float64, lo, n int) {
	f.white = append(f.white, left[:min(len(left), cap(f.white)-len(f.white))]...)
	group := groupSize(n)
	for len(left) > 0 {
		k := min(group-lo%group, len(left))
		f.grouped[lo/group] += total(left[:k])
		left, lo = left[k:], lo+k
	}
}

// lag1 is the autocorrelation at a lag of one row, about the mean m (see
// autocorrelation): Σ(e−m)(e'−m) = Σee' − m·(2Σe − first − last) + (n−1)m².
func (f *residualFigures) lag1() float64 {
	n := float64(f.n)
	m := f.sum / n
	whole := f.squares - n*m*m
	if !(whole > 0) {
		return 0
	}
	return (f.lagged - m*(2*f.sum-f.first-f.last) + (n-1)*m*m) / whole
}

// groupedChanges is the change of phi(u) since the row before, at each row with a
// temperature, added up over groups of rows: a change at a row shows in the rows
// after it, and in closed loop it was made from that row's noise.
func groupedChanges(r *record, group int) []float64 {
	out := make([]float64, (len(r.t)+group-1)/group)
	k := 0
	last := r.input.Before
	for i, at := range r.input.At {
		for k < len(r.t)-1 && r.t[k] <= at {
			k++
		}
		if g := (k + group - 1) / group; g < len(out) { // the first group all of whose rows come after it
			out[g] += r.input.Value[i] - last
		}
		last = r.input.Value[i]
	}
	return out
}

// crossLags is how far back, in rows, the input is compared with the residuals:
// dead time and three times the lags.
func crossLags(r *record, b *bounded) int {
	reach := b.p.eta[len(b.p.eta)-1]
	for _, l := range b.e.lags(b.p.eta) {
		reach += 3 * l
	}
	return max(4, min(int(reach/r.step), len(r.t)/4))
}
