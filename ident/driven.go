package ident

import "math"

// An input that moves at nearly every row, as a controller moves it or a reading of
// it flickers, changes at the pace of the rows. On a uniform stretch a change then
// reaches each row the same time after it was made, whatever the dead time:
//
//	x(k) = Phi·x(k−1) − du(k)·kick,
//
// with one transition and one kick for all rows, and du = 0 at rows that no change
// reaches.

// longestPause is the number of rows from change to change up to which an input keeps
// the pace of the rows.
const longestPause = 8

// pause is the number of rows of the stretch from change j−1 to change j; 0 where that
// is no whole number, there is no such change, or the pause is too long.
func (s *Simulator) pause(j int, r stretch) int {
	if j >= len(s.in.At) {
		return 0
	}
	apart := s.in.At[j] - s.in.At[j-1]
	rows := math.Round(apart / r.step)
	if rows > longestPause || math.Abs(apart-rows*r.step) > 2*s.tolerance {
		return 0
	}
	return int(rows)
}

// runDriven carries the state through rows of a uniform stretch from row lo on, which
// the next change reaches, for as long as changes keep the pace, writes their outputs
// and returns the row after them: lo itself where none do, or where rows are means.
// The step is written out: with advance and emit in its place a fit takes as long as
// without this file, a tenth longer.
func (s *Simulator) runDriven(o *outputs, lo, end int, r stretch) int {
	wait := s.pause(s.next+1, r)
	if wait == 0 || s.rows != nil && s.rows[lo].M > 1 {
		return lo
	}
	c := &s.chain
	n, size := c.n, c.n+c.q
	kick := *s.kicks.after(c, max(s.t[lo]-(s.in.At[s.next]+s.deadTime), 0), s.tolerance)
	var a [maxStates][maxStates]float64
	for i := range size {
		copy(a[i][:], s.step[i*maxStates:(i+1)*maxStates])
	}
	x, level, rate := s.x, s.level, 1/c.last()
	due := lo // the row that the next change reaches
	k := lo
	for ; k < end; k++ {
		du := 0.0
		if k == due {
			du, level = s.change[s.next], s.in.Value[s.next]-s.in.Before
			s.next++
			due += wait
			wait = s.pause(s.next+1, r)
		}
		for i := size - 1; i >= n; i-- { // no sensitivity acts on another
			row := &a[i]
			sum := row[i]*x[i] - du*kick[i]
			for j := range n {
				sum += row[j] * x[j]
			}
			x[i] = sum
		}
		for i := n - 1; i >= 0; i-- {
			row := &a[i]
			sum := -du * kick[i]
			for j := 0; j <= i; j++ {
				sum += row[j] * x[j]
			}
			x[i] = sum
		}
		at := k - o.from
		o.y[at] = level + x[n-1]
		for i := n; i < size; i++ {
			o.v[i-n][at] = x[i]
		}
		if o.dtheta != nil {
			before := 0.0
			if n > 1 {
				before = x[n-2]
			}
			o.dtheta[at] = (x[n-1] - before) * rate
		}
		if k == due-1 && wait == 0 { // the change due next is the last that keeps the pace
			k++
			break
		}
	}
	s.x, s.level = x, level
	return k
}
