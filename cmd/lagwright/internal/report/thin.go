package report

import "math"

// thin keeps the first, lowest, highest and last sample of each of n buckets
// of consecutive samples, in order, so that no spike is lost. Short traces
// come back as they are. x and y have the same length.
func thin(x, y []float64, n int) (tx, ty []float64) {
	if n < 1 || len(x) <= 4*n {
		return x, y
	}
	keep := func(i int) { tx, ty = append(tx, x[i]), append(ty, y[i]) }
	for b := range n {
		from, to := b*len(x)/n, (b+1)*len(x)/n
		low, high := from, from
		for i := from; i < to; i++ {
			if y[i] < y[low] {
				low = i
			}
			if y[i] > y[high] {
				high = i
			}
		}
		last := -1
		for _, i := range [4]int{from, min(low, high), max(low, high), to - 1} {
			if i > last {
				keep(i)
				last = i
			}
		}
	}
	return tx, ty
}

// thinBand keeps of each of n buckets the lowest low and the highest high, at
// the bucket's first and last x, so that the thinned band covers the whole.
func thinBand(x, low, high []float64, n int) (tx, tl, th []float64) {
	if n < 1 || len(x) <= 2*n {
		return x, low, high
	}
	for b := range n {
		from, to := b*len(x)/n, (b+1)*len(x)/n
		l, h := math.Inf(1), math.Inf(-1)
		for i := from; i < to; i++ {
			l, h = math.Min(l, low[i]), math.Max(h, high[i])
		}
		tx = append(tx, x[from], x[to-1])
		tl, th = append(tl, l, l), append(th, h, h)
	}
	return tx, tl, th
}

// pieces are the stretches [from, to) of n samples without a NaN, as ok says.
func pieces(n int, ok func(i int) bool) [][2]int {
	var out [][2]int
	from := -1
	for i := range n {
		switch {
		case ok(i) && from < 0:
			from = i
		case !ok(i) && from >= 0:
			out = append(out, [2]int{from, i})
			from = -1
		}
	}
	if from >= 0 {
		out = append(out, [2]int{from, n})
	}
	return out
}
