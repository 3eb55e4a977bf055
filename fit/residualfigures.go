package fit

import "math"

// residuals fills the figures of the misfit. The whitened residuals are those
// of the noise model; the simulated output is what the plant alone explains.
func (out *outcome) residuals(b *bounded, m *Model) {
	var whitened []float64
	var sse, sst, lag1 float64
	pIn := 1.0
	for i, x := range b.explanations() {
		r := b.e.recs[i]
		c := out.yardstick(i)
		f := r.walkResiduals(x, c.group)
		n := float64(len(r.root.t))
		m.Samples += len(r.root.t)
		sse += f.squares
		sst += c.sst
		lag1 += f.lag1() * n
		scale := 1 / math.Sqrt(math.Max(r.sigma2, 1e-300)) // logs of different noise on one scale
		for _, v := range f.white {
			whitened = append(whitened, v*scale)
		}
		reach := max(4, crossLags(r.root, b)/c.group)
		pIn = math.Min(pIn, finite(crossCorrelationP(f.grouped, c.changes, reach), 1))
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

// explanations is the model with its linear columns, for every record: at the
// optimum on every row where there is one.
func (b *bounded) explanations() []explained {
	e := b.e
	out := make([]explained, len(e.recs))
	p := e.eval(b.p.eta, true)
	for i, r := range e.recs {
		if b.fine != nil {
			n := len(b.fine.eta) - 1
			out[i] = explained{b.st, b.fine.gain, b.fine.eta[:n], b.fine.eta[n], b.fine.beta[i]}
			continue
		}
		_, beta, _ := r.solveLinear(&e.work[i], p.gain)
		out[i] = explained{b.st, p.gain, e.lags(p.eta), p.eta[e.ng], beta}
	}
	return out
}

// testRows is the number of rows above which the misfit is compared with the
// input in sums over several rows: a slow misfit shows in them just as well.
const testRows = 5000

// yardstick is what the residuals of a record are held against.
type yardstick struct {
	sst     float64   // of the temperature about its mean
	group   int       // rows added up
	changes []float64 // of the input, added up
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
	c := &yardstick{group: max(1, (n+testRows-1)/testRows)}
	c.changes = groupedChanges(r, c.group)
	mean := total(r.y) / float64(n)
	for _, v := range r.y {
		c.sst += (v - mean) * (v - mean)
	}
	out.yardsticks[i] = c
	return c
}

// residualFigures are sums over the residuals of a record.
type residualFigures struct {
	n                    int
	sum, squares, lagged float64 // lagged: Σ of neighbours' products
	first, last          float64

	white   []float64 // whitened, the first noiseRows
	grouped []float64 // whitened, every so many rows added up
}

// walkResiduals passes the residuals of x on every row of the full log.
func (r *record) walkResiduals(x explained, group int) *residualFigures {
	n := len(r.root.t)
	f := &residualFigures{white: make([]float64, 0, min(n, noiseRows)), grouped: make([]float64, 0, n/group+1)}
	w := newWhitener(r.shape, r.even)
	inGroup := 0
	r.everyRow(x, func(lo int, left []float64) {
		f.add(left)
		w.pass(left, r.root.t[lo:lo+len(left)])
		f.white = append(f.white, left[:min(len(left), cap(f.white)-len(f.white))]...)
		for _, v := range left {
			if inGroup == 0 {
				f.grouped = append(f.grouped, 0)
			}
			f.grouped[len(f.grouped)-1] += v
			if inGroup++; inGroup == group {
				inGroup = 0
			}
		}
	})
	return f
}

func (f *residualFigures) add(left []float64) {
	if f.n == 0 {
		f.first, f.last = left[0], 0
	}
	last := f.last
	for _, v := range left {
		f.sum += v
		f.squares += v * v
		f.lagged += last * v
		last = v
	}
	f.last = last
	f.n += len(left)
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
		out[k/group] += r.input.Value[i] - last
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
