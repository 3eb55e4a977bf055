package ident

import (
	"math"
	"slices"
)

// A Bump is a deliberate change of the input with the response it makes, up to
// the next change or the end of the record.
type Bump struct {
	Start    int     // first row of the input held before the bump
	Row      int     // first row of the new input
	End      int     // row of the next bump, else the number of rows
	Time     float64 // of Row, s
	Ramp     float64 // time the input took to reach To, s; 0 for a step
	Hold     float64 // from Time to the next bump or the last row, s
	From, To float64 // mean input before and after

	// Before is the mean temperature over the last third of the hold before
	// the bump or, where that is not settled, the end of a straight line through
	// it; After is the mean over the last third of the bump's own hold. NaN where
	// nothing was measured.
	Before, After float64
	Noise         float64 // scatter of the temperature just before the bump about a straight line, else at the end of the hold

	// Settled tells that a straight line through the last third of the hold
	// before or after the bump moves by less than 5 % of the rise, or by less
	// than the noise; false when too few rows tell.
	SettledBefore, SettledAfter bool
}

// Rise is the temperature's change over the bump; NaN where it is not known.
func (b Bump) Rise() float64 { return b.After - b.Before }

// RiseOverNoise is |Rise| in units of the noise, infinite without noise.
func (b Bump) RiseOverNoise() float64 { return math.Abs(b.Rise()) / b.Noise }

const (
	leastBump     = 0.02 // of the input's swing; smaller changes are no bumps
	noisyBump     = 6    // standard deviations of the input's own noise; likewise
	rampRows      = 8    // levels held for less, on the way up or down, are a ramp
	settledMotion = 0.05 // of the rise, over the last third of the hold
)

// FindBumps returns the bumps of a record in order. t is in s and strictly
// ascending, u the input, y the temperature, NaN where missing, all of one
// length.
//
// The input is cut into held levels: a new one begins where u leaves the
// running mean of the level by more than 2 % of the input's swing and more than 6
// standard deviations of its noise, and either stays away for two rows or ends
// the record. The noise is taken from the median absolute difference of
// neighbouring rows, so that it is zero for an input that is held. A row that
// jumps and comes straight back is not a level when the input is noisy. Levels
// of less than 8 rows on the way up or down make one bump, which began with the
// first of them: a rate limit, or a knob turned by hand. The thresholds are
// common practice, no source.
func FindBumps(t, u, y []float64) []Bump {
	if len(t) < 2 || len(u) != len(t) || len(y) != len(t) {
		return nil
	}
	var out []Bump
	levels := joinRamps(heldLevels(u))
	for i := 1; i < len(levels); i++ {
		from, to := levels[i-1], levels[i]
		b := Bump{
			Start: from.held, Row: to.start, End: to.end, Time: t[to.start], Ramp: t[to.held] - t[to.start],
			From: from.mean(), To: to.mean(),
		}
		last := to.end
		if to.end == len(t) {
			last--
		}
		b.Hold = t[last] - t[to.start]
		b.describe(t, y)
		out = append(out, b)
	}
	return out
}

// A level is a stretch of rows start ≤ k < end in which the input is held from
// row held on.
type level struct {
	start, held, end int
	first            float64 // of the held rows
	excess           float64 // sum over the held rows of what they exceed the first by
}

// mean is exact for an input that does not move at all.
func (l level) mean() float64 { return l.first + l.excess/float64(l.end-l.held) }

// heldLevels cuts the input into levels.
func heldLevels(u []float64) []level {
	noise := differenceNoise(u)
	threshold := max(leastBump*swing(u), noisyBump*noise)
	now := level{end: 1, first: u[0]}
	var out []level
	for k := 1; k < len(u); k++ {
		if now.excess == 0 { // held, as nearly every row of a bump test
			from := k
			for k < len(u) && u[k] == now.first {
				k++
			}
			if now.end += k - from; k == len(u) {
				break
			}
		}
		away := math.Abs(u[k]-now.mean()) > threshold
		if away && noise > 0 && k+1 < len(u) {
			away = math.Abs(u[k+1]-now.mean()) > threshold
			if !away {
				mean := now.mean()
				now.end++
				now.excess += mean - now.first // a stray row counts as the level
				continue
			}
		}
		if away {
			out = append(out, now)
			now = level{start: k, held: k, end: k, first: u[k]}
		}
		now.end++
		now.excess += u[k] - now.first
	}
	return append(out, now)
}

// swing is the range of an input that repeats itself in most rows.
func swing(u []float64) float64 {
	lo, hi := u[0], u[0]
	for k := 1; k < len(u); k++ {
		if u[k] != u[k-1] {
			lo, hi = min(lo, u[k]), max(hi, u[k])
		}
	}
	return hi - lo
}

// joinRamps joins short levels on the way up or down with the level they lead
// to.
func joinRamps(levels []level) []level {
	out := levels[:1:1]
	for i := 1; i < len(levels); i++ {
		l := levels[i]
		for i+1 < len(levels) && l.end-l.held < rampRows &&
			(levels[i].mean() > out[len(out)-1].mean()) == (levels[i+1].mean() > levels[i].mean()) {
			i++
			start := l.start
			l = levels[i]
			l.start = start
		}
		out = append(out, l)
	}
	return out
}

// mostDifferences bounds the work of differenceNoise on a long record.
const mostDifferences = 50_000

// differenceNoise estimates the standard deviation of white noise on a held
// value from the median absolute difference of neighbours, which is 0.6745·√2
// deviations for a normal one. Of a long record it takes differences evenly
// spread.
func differenceNoise(x []float64) float64 {
	stride := 1 + len(x)/mostDifferences
	d := make([]float64, 0, len(x)/stride+1)
	for k := 1; k < len(x); k += stride {
		d = append(d, math.Abs(x[k]-x[k-1]))
	}
	if len(d) == 0 {
		return 0
	}
	slices.Sort(d)
	return d[len(d)/2] / (0.6745 * math.Sqrt2)
}

// describe fills in what the temperature did.
func (b *Bump) describe(t, y []float64) {
	before := lineThrough(t, y, b.Row-(b.Row-b.Start+2)/3, b.Row)
	held := b.End - b.Row
	after := lineThrough(t, y, b.End-(held+2)/3, b.End)
	b.Before, b.After = before.mean, after.mean
	b.Noise = before.scatter
	if before.rows < enoughRows {
		b.Noise = after.scatter
	}
	b.SettledBefore = before.settled(b.Rise())
	b.SettledAfter = after.settled(b.Rise())
	if !b.SettledBefore && before.rows >= enoughRows {
		b.Before += before.slope * (b.Time - before.at)
	}
}

// enoughRows is how many rows tell a scatter about a line.
const enoughRows = 5

// A line is a straight line through the temperatures of some rows.
type line struct {
	rows    int
	at      float64 // mean time, s
	mean    float64 // temperature there; NaN without a row
	slope   float64 // per s
	moved   float64 // over the rows' time
	scatter float64 // standard deviation about the line
}

// lineThrough fits a line to the rows lo ≤ k < hi where y is measured.
func lineThrough(t, y []float64, lo, hi int) line {
	l := line{mean: math.NaN()}
	var sumT, sumY float64
	first, last := 0.0, 0.0
	for k := max(lo, 0); k < hi; k++ {
		if math.IsNaN(y[k]) {
			continue
		}
		if l.rows == 0 {
			first = t[k]
		}
		last = t[k]
		l.rows++
		sumT += t[k]
		sumY += y[k]
	}
	if l.rows == 0 {
		return l
	}
	l.at, l.mean = sumT/float64(l.rows), sumY/float64(l.rows)
	var tt, ty, yy float64
	for k := max(lo, 0); k < hi; k++ {
		if math.IsNaN(y[k]) {
			continue
		}
		dt, dy := t[k]-l.at, y[k]-l.mean
		tt, ty, yy = tt+dt*dt, ty+dt*dy, yy+dy*dy
	}
	if tt > 0 {
		l.slope = ty / tt
	}
	l.moved = l.slope * (last - first)
	if l.rows > 2 {
		l.scatter = math.Sqrt(max(yy-l.slope*ty, 0) / float64(l.rows-2))
	}
	return l
}

func (l line) settled(rise float64) bool {
	return l.rows >= enoughRows && math.Abs(l.moved) <= max(settledMotion*math.Abs(rise), l.scatter)
}
