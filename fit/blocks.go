package fit

import (
	"math"
	"slices"
	"sort"

	"lagwright/ident"
)

// A bump log holds few facts in many rows: between changes of the input the
// response is a sum of exponentials that grows smoother with the time since
// the change. Rows are therefore averaged in blocks whose width grows with
// that time. The plant's response to a block is its exact mean, and so is the
// noise model's (see momentsOf); what is lost is only the information inside a
// block. For a part of the response with time scale s, a block of width w
// loses the fraction (w/s)²/12 of the Fisher information, and at the distance d
// from the change only parts with s of d/3 or more are still alive (the rest
// has decayed by exp(-6) in square), so that w = d/25 loses less than 0.1 %.
const blockGrowth = 25

// reduceAbove is the number of rows from which a log is averaged; below, it is
// not worth it.
const reduceAbove = 300

// ladder rounds a block length down to a power of two, so that blocks share
// their figures and each follows from the one half as long.
func ladder(w int) int {
	p := 1
	for 2*p <= w {
		p *= 2
	}
	return p
}

// averaged returns r with blocks in place of rows: allowed gives the longest
// block, in samples, that may start at a time. It returns rows as they are when
// little would be saved.
func (r *record) averaged(allowed func(t float64) int) *record {
	root := r.root
	from, n := root.scope.lo, root.scope.hi
	c := *r
	c.rows = make([]ident.Row, 0, searchRows)
	c.t, c.y = make([]float64, 0, searchRows), make([]float64, 0, searchRows)
	var samples []ident.Row // of the response, where they differ from the rows
	k := from
	for k < n && len(c.rows) < root.most {
		longest := ladder(allowed(root.t[k]))
		m, exact := root.uniform(k, longest)
		var row, response ident.Row
		if few := root.within(k, longest); few > m {
			if samples == nil {
				samples = slices.Clone(c.rows)
			}
			m = few
			row, response = raggedBlock(root.t[k : k+m])
		} else {
			row = ident.Row{T: root.t[k], H: root.step, M: m}
			if m > 1 && !exact {
				row.T = total(root.t[k:k+m])/float64(m) - float64(m-1)/2*root.step
			}
			response = row
		}
		c.rows = append(c.rows, row)
		if samples != nil {
			samples = append(samples, response)
		}
		c.t = append(c.t, response.T+float64(response.M-1)/2*response.H)
		c.y = append(c.y, root.sumOf(k, k+m)/float64(m))
		k += m
	}
	if float64(len(c.rows)) > 0.7*float64(k-from) {
		return r.window(min(k-from, root.most))
	}
	if c.used = k - from; c.excerpt() {
		c.parts, c.span = root.noiseParts(c.used), c.t[len(c.t)-1]-c.t[0]
	}
	if samples == nil {
		samples = c.rows
	}
	c.sim = ident.NewBlockSimulator(samples, root.scope.input)
	return r.adopt(&c)
}

// chunkRows is the number of rows whose temperatures are added up once for all averages.
const chunkRows = 256

// chunkSums are the sums of the chunks of a column.
func chunkSums(y []float64) []float64 {
	out := make([]float64, len(y)/chunkRows)
	for i := range out {
		out[i] = total(y[i*chunkRows : (i+1)*chunkRows])
	}
	return out
}

// sumOf is the sum of the temperatures of the rows lo ≤ k < hi of a full log.
func (r *record) sumOf(lo, hi int) float64 {
	first, last := (lo+chunkRows-1)/chunkRows, hi/chunkRows
	if first >= last {
		return total(r.y[lo:hi])
	}
	return total(r.y[lo:first*chunkRows]) + total(r.chunks[first:last]) + total(r.y[last*chunkRows:hi])
}

// within is the longest ladder length of rows from k on that span no more than m
// samples at the step would.
func (r *record) within(k, m int) int {
	if r.even || m < 2 {
		return 1
	}
	end := r.t[k] + float64(m-1)*r.step*(1+1e-9)
	n := 1
	for n < m && k+n < len(r.t) && r.t[k+n] <= end {
		n++
	}
	return ladder(n)
}

// raggedBlock is the mean of rows at uneven times: for the noise as many samples
// evenly spread over the same span, for the response two samples about the same mean
// time and of the same scatter of times, which give the mean of the response up to
// its third derivative.
func raggedBlock(t []float64) (noise, response ident.Row) {
	n := float64(len(t))
	mean, scatter := total(t)/n, 0.0
	for _, v := range t {
		scatter += (v - mean) * (v - mean) / n
	}
	sd := math.Sqrt(scatter)
	noise = ident.Row{T: t[0], H: (t[len(t)-1] - t[0]) / (n - 1), M: len(t)}
	return noise, ident.Row{T: mean - sd, H: 2 * sd, M: 2}
}

// jitterShare is the part of a sampling interval by which the rows of a block
// may lie off an even series. The block is taken as even, at their mean time: what
// is lost is of second order, the curvature of the response times the block's
// length times the scatter of the times, a small part of the noise of a row (see
// TestBlocks), and nothing in what is confirmed on every row.
const jitterShare = 0.45

// uniform returns the longest ladder length up to m of rows from k on that are
// equally spaced, and whether they are so to the rounding of their times.
func (r *record) uniform(k, m int) (length int, exact bool) {
	m = min(m, len(r.t)-k)
	if m < 2 {
		return max(m, 1), true
	}
	if r.even {
		return ladder(m), true
	}
	off := 0.0
	for i := 1; i < m; i++ {
		gap, place := r.t[k+i]-r.t[k+i-1]-r.step, r.t[k+i]-r.t[k]-float64(i)*r.step
		if math.Max(math.Abs(gap), math.Abs(place)) > jitterShare*r.step {
			m = i
			break
		}
		off = math.Max(off, math.Abs(place))
	}
	return ladder(m), off <= 1e-6*r.step
}

// searchRows is how many blocks a long log is averaged into for the search.
const searchRows = 250

// coarse averages a long log into about rows equal blocks, for the search.
func (r *record) coarse(rows int) *record {
	w := r.root.scope.rows() / rows
	if w < 2 {
		return r.whole()
	}
	return r.averaged(func(float64) int { return w })
}

// focus averages the log for a plant with the given dead time: full
// resolution where the response to a change sets in, blocks that widen from
// there on both sides.
func (r *record) focus(dead, zone float64) *record {
	return r.focusOn(dead, dead, zone, 0, blockGrowth)
}

// zoneRows is how many blocks the zone of possible onsets is worth in a search.
const zoneRows = 60

// survey averages the log for a search among plants with dead times up to the
// given one.
func (r *record) survey(dead, zone float64) *record {
	return r.focusOn(0, dead, zone, (dead+zone)/zoneRows, blockGrowth)
}

// sketchGrowth is blockGrowth where plausible plants are drawn: thousands of
// evaluations, none of which is stated. A hundredth of the information is lost.
const sketchGrowth = 8

// sketch averages the log for drawing plants around one.
func (r *record) sketch(dead, zone float64) *record {
	return r.focusOn(dead, dead, zone, 0, sketchGrowth)
}

// focusOn averages the log for plants with dead times between first and last;
// no block need be shorter than least, and blocks widen by one part in growth
// of the time since the onset.
func (r *record) focusOn(first, last, zone, least, growth float64) *record {
	if len(r.root.t) < reduceAbove {
		return r.whole()
	}
	var onset []float64
	for _, at := range r.root.changesInScope() {
		onset = append(onset, at+first)
	}
	start := r.root.t[0]
	if r.rest == earlier {
		onset = append([]float64{start + first}, onset...)
	}
	zone += last - first
	span := r.span
	width := func(t float64) float64 {
		k := sort.SearchFloat64s(onset, t)
		w := span / (40 * growth / blockGrowth)
		if k > 0 {
			d := t - onset[k-1]
			if d < zone {
				return 0
			}
			w = math.Min(w, (d-last+first)/growth)
		} else if r.rest == free {
			w = math.Min(w, (t-start)/growth)
		}
		if k < len(onset) {
			// A block must end before the zone begins.
			w = math.Min(w, math.Max(onset[k]-t-(zone-last+first), 0)/4)
		}
		return w
	}
	return r.averaged(func(t float64) int { return int(math.Max(width(t), least)/r.step) + 1 })
}

// noiseRows is the largest number of rows on which a noise shape is judged: of
// a longer log, equal pieces spread over it. The shape is then known to about
// a percent. Uneven rows cost the noise filter ten times as much.
const (
	noiseRows       = 24000
	unevenNoiseRows = 8000
)

// noiseParts are the parts of the first n rows of the scope on which the noise is
// judged.
func (r *record) noiseParts(n int) []part {
	most := noiseRows
	if !r.even && r.usual == 0 {
		most = unevenNoiseRows
	}
	if n <= most {
		return []part{r.part(0, n)}
	}
	const count = 8
	size := most / count
	var out []part
	for i := range count {
		lo := i * (n - size) / (count - 1)
		out = append(out, r.part(lo, lo+size))
	}
	return out
}

// part is the rows lo to hi of the scope.
func (r *record) part(lo, hi int) part {
	lo, hi = lo+r.scope.lo, hi+r.scope.lo
	return part{lo, hi, ident.NewSimulator(r.t[lo:hi], r.scope.input)}
}
