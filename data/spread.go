package data

import (
	"math"
	"slices"
	"time"
)

// Stamps coarser than the sampling: rows share a stamp. They are told from
// rows sent again by their values, and the time of a stamp is divided among
// its rows.

// evenShare is the share of rows with the stamp of the row before from which
// on stamps are too coarse rather than a few rows repeated.
const evenShare = 1.0 / 20

// spreadOrDrop treats rows with equal stamps: where they are the rule the
// stamps are coarser than the sampling and are spread, else they are
// repetitions and all but the first go.
func (s *stampSeries) spreadOrDrop() {
	rows := s.kept()
	equal, alike := 0, 0
	for k := 1; k < len(rows); k++ {
		if s.t[rows[k]] == s.t[rows[k-1]] {
			equal++
			if s.same(rows[k], rows[k-1]) {
				alike++
			}
		}
	}
	if equal == 0 {
		return
	}
	rule := 3*equal > len(rows)
	if !rule && equal >= 3 && 2*alike <= equal {
		rule = float64(equal) > evenShare*float64(len(rows)) || s.isEven(rows)
	}
	if rule && !s.copied() {
		s.spread(rows)
		if strictlyAscending(s.t) {
			return
		}
	}
	prev := -1
	for _, i := range rows {
		if prev >= 0 && s.t[i] == s.t[prev] {
			if s.same(i, prev) {
				s.dropRow(i, "repeated row")
			} else {
				s.dropRow(i, "repeated time")
			}
			continue
		}
		prev = i
	}
}

// kept lists the rows not dropped.
func (s *stampSeries) kept() []int {
	rows := make([]int, 0, len(s.t))
	for i := range s.t {
		if s.drop == nil || !s.drop[i] {
			rows = append(rows, i)
		}
	}
	return rows
}

// enoughChanges is how many changes of value from stamp to stamp it takes to
// tell copied rows from samples between stamps: of samples at least every
// second change would fall inside a stamp, so that none of eight does is no
// chance (1 in 256).
const enoughChanges = 8

// copied tells that rows with equal stamps are one row written again, as a
// join of two exports leaves them: values change from stamp to stamp, and
// never inside one. Spread, they would pass for twice the samples.
func (s *stampSeries) copied() bool {
	changes, prev := 0, -1
	for i, t := range s.t {
		if s.drop != nil && s.drop[i] {
			continue
		}
		if prev >= 0 && !s.same(i, prev) {
			if t == s.t[prev] {
				return false
			}
			changes++
		}
		prev = i
	}
	return changes >= enoughChanges
}

// group is a stretch of rows that share a stamp: [lo, hi) of the rows kept.
type group struct{ lo, hi int }

func (s *stampSeries) groups(rows []int) (g []group) {
	for k := range rows {
		if k == 0 || s.t[rows[k]] != s.t[rows[k-1]] {
			g = append(g, group{k, k})
		}
		g[len(g)-1].hi = k + 1
	}
	return g
}

// spread gives rows that share a stamp times of their own: those of an even
// sampling if there is one that fits all stamps, else by dividing the time
// from each stamp to the next among its rows. What the latter costs is said
// where stamps do not hold the same number of rows.
func (s *stampSeries) spread(rows []int) {
	groups := s.groups(rows)
	if len(groups) < 2 {
		return
	}
	var sizes, widths, inner []int64 // inner: but for the first and the last, which may be cut short
	for g, gr := range groups {
		sizes = append(sizes, int64(gr.hi-gr.lo))
		if g > 0 && g < len(groups)-1 {
			inner = append(inner, int64(gr.hi-gr.lo))
		}
		if g > 0 {
			widths = append(widths, s.t[rows[gr.lo]]-s.t[rows[groups[g-1].lo]])
		}
	}
	slices.Sort(sizes)
	slices.Sort(widths)
	whole, width := sizes[len(sizes)/2], widths[len(widths)/2]
	least, most := whole, whole
	if n := len(inner); n > 0 { // but for a few
		slices.Sort(inner)
		least, most = inner[n/20], inner[n-1-n/20]
	}
	if least < most {
		if period, ok := s.even(rows, widths[0]); ok {
			s.note("clock-spread", -1, "rows share the stamps of the clock (every %v), %d to %d each; all stamps fit an even sampling every %v, which was taken",
				time.Duration(width), least, most, period)
			return
		}
	}
	s.divide(rows, groups, whole, width)
	if most-least > 1 || most > least && whole < 4 {
		s.note("clock-coarse", -1, "the stamps of the clock (every %v) are coarser than the sampling, and %d to %d rows share one unevenly: the rows of a stamp were spread over it, but their times can be wrong by up to %v, and the dead time with them; log fractions of the stamp",
			time.Duration(width), least, most, time.Duration(width))
		return
	}
	s.note("clock-spread", -1, "%d rows share each stamp of the clock (every %v); they were spread evenly between the stamps", whole, time.Duration(width))
}

// divide spreads the rows of each stamp over the time to the next. The first
// and the last stamp may be cut short: their rows keep the spacing of a whole
// one.
func (s *stampSeries) divide(rows []int, groups []group, whole, width int64) {
	for g, gr := range groups {
		n := int64(gr.hi - gr.lo)
		start, from, per, wide := s.t[rows[gr.lo]], int64(0), n, width
		if g+1 < len(groups) { // a stamp never reaches beyond the next one
			wide = min(wide, s.t[rows[groups[g+1].lo]]-start)
		}
		if (g == 0 || g == len(groups)-1) && n < whole {
			per = whole
			if g == 0 {
				from = whole - n
			}
		}
		for k := gr.lo; k < gr.hi; k++ {
			s.t[rows[k]] = start + (from+int64(k-gr.lo))*wide/per
		}
	}
}

// evenRows is how many rows it takes to tell an even sampling.
const evenRows = 20

// isEven tells that an even sampling fits all stamps.
func (s *stampSeries) isEven(rows []int) bool {
	width := int64(math.MaxInt64)
	for k := 1; k < len(rows); k++ {
		if d := s.t[rows[k]] - s.t[rows[k-1]]; d > 0 {
			width = min(width, d)
		}
	}
	_, _, ok := s.evenFit(rows, width)
	return ok
}

// even gives the rows the times of an even sampling, if there is one.
func (s *stampSeries) even(rows []int, width int64) (period time.Duration, ok bool) {
	start, step, ok := s.evenFit(rows, width)
	if !ok {
		return 0, false
	}
	first := s.t[rows[0]]
	for k, i := range rows {
		s.t[i] = first + int64(math.Round(start+step*float64(k)))
	}
	return time.Duration(math.Round(step)), true
}

// evenFit looks for an even sampling that falls into every stamp, which then
// means width from its time on: start from the first stamp, and step, ns. A
// tenth of a width is allowed for jitter. Of the steps that fit without jitter
// the one of fewest digits is taken, as a logger is set to one.
func (s *stampSeries) evenFit(rows []int, width int64) (start, step float64, ok bool) {
	n := len(rows)
	if n < evenRows {
		return 0, 0, false
	}
	first := s.t[rows[0]]
	slope := slopeOf(n, func(k int) float64 { return float64(s.t[rows[k]] - first) })
	reach := func(step float64) (lo, hi float64) { // of the first row, as each row's stamp shows it
		for k, i := range rows {
			off := float64(s.t[i]-first) - step*float64(k)
			lo, hi = min(lo, off), max(hi, off)
		}
		return lo, hi
	}
	lo, hi := reach(slope)
	if slope < 1 || hi-lo > 1.1*float64(width) {
		return 0, 0, false
	}
	step = slope
	for digits := 1; digits < 9; digits++ {
		if a, b := reach(rounded(slope, digits)); b-a < float64(width) {
			step, lo, hi = rounded(slope, digits), a, b
			break
		}
	}
	return (lo + hi + float64(width)) / 2, step, true // the stamps allow hi to lo+width
}

// rounded gives v > 0 to so many significant digits.
func rounded(v float64, digits int) float64 {
	unit := math.Pow(10, math.Floor(math.Log10(v))+1-float64(digits))
	return math.Round(v/unit) * unit
}

// slopeOf is the slope of the least-squares line through n values at 0, 1, ….
func slopeOf(n int, v func(k int) float64) float64 {
	middle := float64(n-1) / 2
	var sum, norm float64
	for k := range n {
		x := float64(k) - middle
		sum += x * v(k)
		norm += x * x
	}
	return sum / norm
}

// roundedRows is how many rows are looked at for stamps that are rounded.
const roundedRows = 1000

// noteRounded says that an even sampling was stamped with a coarser clock,
// each row with a stamp of its own: the steps are one and two of the clock's
// units and nothing else. The stamps stay.
func (s *stampSeries) noteRounded() {
	n := min(len(s.t), roundedRows)
	if n < evenRows {
		return
	}
	unit := s.t[1] - s.t[0]
	for i := 2; i < n; i++ {
		unit = min(unit, s.t[i]-s.t[i-1])
	}
	two := 0
	for i := 1; i < n; i++ {
		switch s.t[i] - s.t[i-1] {
		case unit:
		case 2 * unit:
			two++
		default:
			return
		}
	}
	if 20*two < n {
		return
	}
	probe := stampSeries{t: s.t[:n]}
	if _, step, ok := probe.evenFit(probe.kept(), unit); ok {
		s.note("clock-coarse", -1, "rows come every %v but are stamped to %v: each time can be wrong by up to %v, and the dead time with it; log a finer time",
			time.Duration(math.Round(step)), time.Duration(unit), time.Duration(unit))
	}
}
