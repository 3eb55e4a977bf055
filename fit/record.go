package fit

import (
	"fmt"
	"math"
	"slices"

	"gonum.org/v1/gonum/floats"

	"lagwright/data"
	"lagwright/ident"
)

// record is one log made ready for fitting: the rows with a temperature, the
// input as held, and the columns that enter the model linearly.
type record struct {
	run    *data.Run
	input  ident.Input // phi(u)
	t, y   []float64   // rows with a temperature, or means of some (t their middle)
	rows   []ident.Row // the same rows
	span   float64     // s, first to last row
	swing  float64     // of the input
	extent CardRange   // of input and temperature
	step   float64     // s, median interval
	sim    *ident.Simulator
	start  *ident.Simulator // response to a unit change at the first row, for an earlier rest
	rest   initial
	drift  bool

	root   *record   // the record at full resolution; itself when nothing is averaged
	used   int       // rows of the full log that these rows stand for, see excerpt.go
	scope  scope     // where they may lie
	most   int       // how many there may be, of a log whose input never rests
	even   bool      // the full log is evenly sampled
	usual  float64   // s, interval of a log that is so but for jitter, else 0
	parts  []part    // of the full log, on which its noise is judged
	sums   *restSums // over its pieces, nil where they are not worth it
	chunks []float64 // sums of its temperature

	fixed [][]float64 // unwhitened linear columns that do not depend on the plant: 1, time

	// Under the noise shape in force:
	shape   shape
	filter  filter
	scratch filter      // of other shapes
	yw      []float64   // whitened temperature, free of the fixed columns
	basis   [][]float64 // whitened fixed columns, orthonormal
	white   [][]float64 // memory of basis
	weight  float64     // 1/variance relative to the first record
	sigma2  float64     // variance of a whitened row
}

// initial says what is known of the state at the first row.
type initial int

const (
	rest    initial = iota // at rest at the first recorded input
	earlier                // at rest at an unknown earlier input, left at the first row
	free                   // nothing is known: every element starts anywhere
)

func (i initial) String() string { return [...]string{"rest", "earlier", "free"}[i] }

func parseInitial(s string) (initial, error) {
	for _, i := range []initial{rest, earlier, free} {
		if s == i.String() {
			return i, nil
		}
	}
	return rest, fmt.Errorf("initial %q is not one of auto, rest, earlier, free", s)
}

func newRecord(run *data.Run, law ident.Law) (*record, error) {
	r := &record{run: run, weight: 1, shape: whiteShape}
	r.input = ident.HeldInput(run.T, run.U, law)
	r.t, r.y = present(run.T, run.Y)
	name := run.Source.File
	if len(r.t) < 8 {
		return nil, fmt.Errorf("%s: %w: %d rows hold a temperature, at least 8 are needed", name, ErrTooShort, len(r.t))
	}
	lo, hi := rangeOf(r.y)
	r.extent.Temperature = [2]float64{lo, hi}
	if lo == hi {
		return nil, fmt.Errorf("%s: %w: %sit is %.6g in every row; check the sensor, or name the right column with --temp-col", name, ErrConstant, columnNamed(run.Source.Columns.Temperature), lo)
	}
	if len(r.input.At) == 0 {
		return nil, fmt.Errorf("%s: %w: the input is %g in every row; step it and record the answer", name, ErrNoBump, run.U[0])
	}
	r.span = r.t[len(r.t)-1] - r.t[0]
	lo, hi = rangeOf(run.U)
	r.extent.Input = [2]float64{lo, hi}
	r.swing = math.Max(slices.Max(r.input.Value), r.input.Before) - math.Min(slices.Min(r.input.Value), r.input.Before)
	r.step = evenStep(r.t, medianInterval(r.t))
	r.root = r
	r.used, r.most = len(r.t), mostRows
	r.even = isEven(r.t, r.step)
	if r.usual = r.step; !r.even {
		r.usual = usualStep(r.t, r.step)
	}
	r.chunks = chunkSums(r.y)
	r.sums = newRestSums(r.t, r.y, r.even)
	r.sim = ident.NewSimulator(r.t, r.input)
	r.scope = r.wholeScope()
	r.parts = r.noiseParts(len(r.t))
	r.choosePlace()
	return r, nil
}

// rise is the highest temperature less the lowest.
func (r *record) rise() float64 { return r.extent.Temperature[1] - r.extent.Temperature[0] }

// columnNamed begins a sentence on a column of a log; a run that was not read
// from one has no names.
func columnNamed(name string) string {
	if name == "" {
		return ""
	}
	return fmt.Sprintf("column %q was read, ", name)
}

// present returns the rows that hold a temperature; the columns themselves when
// all do.
func present(t, y []float64) (pt, py []float64) {
	if !slices.ContainsFunc(y, math.IsNaN) {
		return t, y
	}
	for i, v := range y {
		if !math.IsNaN(v) {
			pt, py = append(pt, t[i]), append(py, v)
		}
	}
	return pt, py
}

// whole is the record with every row of the log, or as many as may be used at a
// time, ready for fitting.
func (r *record) whole() *record { return r.window(min(r.root.scope.rows(), r.root.most)) }

// window is the record with the first n rows of the scope.
func (r *record) window(n int) *record {
	c := *r.root
	from := c.scope.lo
	c.t, c.y, c.used = c.t[from:from+n], c.y[from:from+n], n
	c.rows = make([]ident.Row, n)
	for i, t := range c.t {
		c.rows[i] = ident.Row{T: t, H: c.step, M: 1}
	}
	if n == len(r.root.t) {
		c.sim = r.root.sim.Clone()
	} else {
		c.sim = ident.NewSimulator(c.t, c.scope.input)
		c.parts, c.span = r.root.noiseParts(n), c.t[n-1]-c.t[0]
	}
	return r.adopt(&c)
}

// adopt gives c, a fresh set of rows of the same log, what r has been told.
func (r *record) adopt(c *record) *record {
	c.start, c.filter, c.scratch, c.fixed = nil, filter{}, filter{}, nil
	c.yw, c.basis, c.white = nil, nil, nil
	c.shape, c.weight, c.sigma2 = r.shape, r.weight, r.sigma2
	c.model(r.rest, r.drift)
	return c
}

// model fixes which linear columns the record carries.
func (r *record) model(in initial, drift bool) {
	r.rest, r.drift = in, drift
	r.fixed = nil
	one := make([]float64, len(r.t))
	for i := range one {
		one[i] = 1
	}
	r.fixed = append(r.fixed, one)
	if drift {
		r.fixed = append(r.fixed, append([]float64(nil), r.t...))
	}
	if in == earlier && r.start == nil {
		r.start = r.sim.WithInput(r.fromFirstRow())
	}
	r.setShape(r.shape)
}

// setShape whitens what does not depend on the plant.
func (r *record) setShape(s shape) {
	r.shape = s
	r.filter.set(r.rows, s)
	n := len(r.y)
	r.yw = resize(r.yw, n)
	r.filter.apply(r.yw, r.y)
	r.basis = r.basis[:0]
	white := columnsIn(&r.white, len(r.fixed), n)
	for i, c := range r.fixed {
		r.filter.apply(white[i], c)
		addToBasis(&r.basis, white[i])
	}
	project(r.yw, r.basis)
}

// clone returns a record that can be used beside r: what a fit changes is its
// own, what it only reads is shared.
func (r *record) clone() *record {
	c := *r
	c.sim = r.sim.Clone()
	c.parts = slices.Clone(r.parts)
	for i := range c.parts {
		c.parts[i].sim = c.parts[i].sim.Clone()
	}
	if r.start != nil {
		c.start = r.start.Clone()
	}
	c.filter, c.scratch = filter{}, filter{}
	c.yw, c.basis, c.white = nil, nil, nil
	c.setShape(r.shape)
	return &c
}

// addToBasis makes w orthonormal to the basis and appends it; it reports
// false when nothing of w is left.
func addToBasis(basis *[][]float64, w []float64) bool {
	before := math.Sqrt(dot(w, w))
	project(w, *basis)
	project(w, *basis) // twice is enough: Parlett, The Symmetric Eigenvalue Problem (from memory)
	after := math.Sqrt(dot(w, w))
	if !(after > 1e-9*before) {
		return false
	}
	floats.Scale(1/after, w)
	*basis = append(*basis, w)
	return true
}

// project takes the part of x that lies in the basis out of x.
func project(x []float64, basis [][]float64) {
	for _, q := range basis {
		floats.AddScaled(x, -dot(q, x), q)
	}
}

// dot is the inner product of a and as many elements of b.
func dot(a, b []float64) float64 { return floats.Dot(a, b[:len(a)]) }

func resize(x []float64, n int) []float64 {
	if cap(x) < n {
		return make([]float64, n)
	}
	return x[:n]
}

// intervalSample is the number of intervals of which a long log's median is taken.
const intervalSample = 20000

// medianInterval is the median distance of neighbouring rows; of a long log,
// that of rows spread over it.
func medianInterval(t []float64) float64 {
	stride := max(1, len(t)/intervalSample)
	d := make([]float64, 0, len(t)/stride+1)
	for i := 1; i < len(t); i += stride {
		d = append(d, t[i]-t[i-1])
	}
	slices.Sort(d)
	return d[len(d)/2]
}

// evenStep is the median interval freed of the rounding of two stamps: where all
// rows lie on one even series, rows missing or not, it is the span over the number of
// steps; elsewhere the mean of the intervals near the median.
func evenStep(t []float64, median float64) float64 {
	span := t[len(t)-1] - t[0]
	last := math.Max(math.Abs(t[0]), math.Abs(t[len(t)-1]))
	step := span / math.Round(span/median)
	if math.Abs(step-median) <= 4*(math.Nextafter(last, math.Inf(1))-last) {
		return step
	}
	sum, n := 0.0, 0
	for k := 1; k < len(t); k++ {
		if d := t[k] - t[k-1]; math.Abs(d-median) <= jitterShare*median {
			sum += d
			n++
		}
	}
	return sum / float64(n)
}

// usualStep is the step when nine in ten intervals are near it, else 0.
func usualStep(t []float64, step float64) float64 {
	near := 0
	for k := 1; k < len(t); k++ {
		if math.Abs(t[k]-t[k-1]-step) <= jitterShare*step {
			near++
		}
	}
	if float64(near) < 0.9*float64(len(t)-1) {
		return 0
	}
	return step
}

// averagesRows reports whether rows of the log are averaged, or left out.
func (r *record) averagesRows() bool { return len(r.t) < len(r.root.t) }

// excerpt reports whether rows of the log are left out.
func (r *record) excerpt() bool { return r.used < len(r.root.t) }
