package validate

import (
	"math"
	"slices"

	"gonum.org/v1/gonum/stat"

	"lagwright/ident"
	"lagwright/tune"
)

// A beginning is how the logged controller stood in the first row of a
// recording that begins in the middle of its work, as far as the first logged
// input does not say it: what the controller wanted where that input sits at a
// limit, and how fast its filtered temperature moved.
type beginning struct{ want, slope float64 }

// start starts the controller along a course; a nil beginning is one at rest.
func (b *beginning) start(control *tune.Controller, c *course) {
	if b == nil {
		control.Start(c.before, c.y[0], c.u[0])
		return
	}
	control.StartAt(c.before, c.y[0], c.u[0], b.want, b.slope)
}

// firstScan is the first row at which the controller ran, where it runs less
// often than there are rows: its input changes at every so many rows, counted
// from there. It is 0 where the input does not show it.
func (c *course) firstScan() int {
	every := c.lattice.scan
	if !c.even || c.lattice.row > 1 || every < 2 || len(c.u) < every+minSegment {
		return 0
	}
	first := -1
	for i := 1; i < len(c.u); i++ {
		switch {
		case c.u[i] == c.u[i-1]:
		case first < 0:
			first = i % every
		case i%every != first:
			return 0
		}
	}
	return max(first, 0)
}

// beginningOf finds how the controller with these gains began: the start from
// which, led along the logged temperature, it gives the logged inputs of the
// first rows that no limit holds. Nothing of the plant is used, and nothing of
// the rows after those, so that the rest of the run can contradict the gains.
func (p *plan) beginningOf(gains *tune.Gains, c *course) (*beginning, error) {
	b := &beginning{want: c.u[0]}
	held := heldRows(gains.Limits, c)
	free := slices.Index(held, false)
	remembers := gains.Filter > 0 || gains.Td != nil
	var err error
	switch {
	case free == 0 && remembers:
		b.slope, err = p.unseenSlope(gains, c, held)
	case free > 0 && gains.Ti != nil:
		if remembers {
			b.slope = seenSlope(c, memory*gains.Filter)
		}
		b.want, err = p.unseenWant(gains, c, b.slope, free)
	}
	return b, err
}

// heldRows tells for each row whether a limit, in range or in rate, holds its
// input.
func heldRows(limits tune.Limits, c *course) []bool {
	held := make([]bool, len(c.u))
	near := nearLimit(c)
	for i, u := range c.u {
		held[i] = limits.Max != nil && u >= *limits.Max-near || limits.Min != nil && u <= *limits.Min+near
		if limits.Rate != nil {
			k := max(i, 1) // whether the first row moves shows in the second
			held[i] = held[i] || math.Abs(c.u[k]-c.u[k-1]) >= 0.999**limits.Rate*(c.t[k]-c.t[k-1])
		}
	}
	return held
}

// memory is how many of its times a filter is taken to remember.
const memory = 5

// unseenSlope is how fast the filtered temperature moved in the first row. What
// that adds to the inputs of the next rows is in proportion to it and fades with
// the filter, so least squares over these rows give it.
func (p *plan) unseenSlope(gains *tune.Gains, c *course, held []bool) (float64, error) {
	last := 1
	for last+1 < len(c.t)/4 && c.t[last]-c.t[0] < max(memory*gains.Filter, c.scan) {
		last++
	}
	if k := slices.Index(held[:last+1], true); k > 0 {
		last = k - 1
	}
	free := *gains
	free.Limits = tune.Limits{}
	rest, err := p.lead(&free, c, beginning{want: c.u[0]}, last)
	if err != nil {
		return 0, err
	}
	moving, err := p.lead(&free, c, beginning{want: c.u[0], slope: 1}, last)
	if err != nil {
		return 0, err
	}
	product, square := 0.0, 0.0
	for i := range rest {
		more := moving[i] - rest[i]
		product += more * (c.u[i] - rest[i])
		square += more * more
	}
	if square == 0 {
		return 0, nil
	}
	return product / square, nil
}

// seenSlope is the slope of a straight line through the temperatures of the
// first seconds, two rows at least.
func seenSlope(c *course, span float64) float64 {
	n := 2
	for n < len(c.t) && c.t[n]-c.t[0] <= span {
		n++
	}
	_, slope := stat.LinearRegression(c.t[:n], c.y[:n], nil, false)
	return slope
}

// The search for what a controller wanted beyond its limit: so many values
// tried apart, then the best of them refined.
const (
	wantsTried   = 100
	wantsRefined = 30
)

// unseenWant is what the controller wanted in the first row, beyond the limit
// that holds its input there: that with which it comes off the limit as the log
// does, at the row free and with that row's input.
func (p *plan) unseenWant(gains *tune.Gains, c *course, slope float64, free int) (float64, error) {
	first := c.u[0]
	away := heldTowards(gains.Limits, c)
	var failed error
	misses := func(beyond float64) (sum float64) {
		u, err := p.lead(gains, c, beginning{first + away*beyond, slope}, free)
		if err != nil {
			failed = err
		}
		for i := range u {
			sum += (u[i] - c.u[i]) * (u[i] - c.u[i])
		}
		return sum
	}
	// no more than twice what the error asks for and the whole range of the input
	step := (2*math.Abs(gains.Kc*(c.before-c.y[0])) + slices.Max(c.u) - slices.Min(c.u)) / wantsTried
	best, least := 0.0, misses(0)
	for k := 1; k <= wantsTried && failed == nil; k++ {
		if m := misses(float64(k) * step); m < least {
			best, least = float64(k)*step, m
		}
	}
	low, high := max(0, best-step), best+step
	for range wantsRefined {
		third := (high - low) / 3
		if misses(low+third) <= misses(high-third) {
			high -= third
		} else {
			low += third
		}
	}
	if at := (low + high) / 2; misses(at) < least {
		best = at
	}
	return first + away*best, failed
}

// heldTowards is +1 where a limit holds the first input from rising further,
// −1 from falling.
func heldTowards(limits tune.Limits, c *course) float64 {
	switch u := c.u[0]; {
	case limits.Max != nil && u >= *limits.Max-nearLimit(c):
		return 1
	case limits.Min != nil && u <= *limits.Min+nearLimit(c):
		return -1
	}
	return math.Copysign(1, c.u[1]-c.u[0])
}

// nearLimit is how near to a limit an input counts as held by it.
func nearLimit(c *course) float64 { return 1e-3 * (slices.Max(c.u) - slices.Min(c.u)) }

// lead leads the controller along the logged temperature and returns its
// inputs at the rows up to the last.
func (p *plan) lead(gains *tune.Gains, c *course, b beginning, last int) ([]float64, error) {
	_, control, err := newRunner(p.law, gains, []ident.Plant{p.best}).ready(c, 0)
	if err != nil {
		return nil, err
	}
	b.start(control, c)
	u := make([]float64, last+1)
	u[0] = c.u[0]
	if !c.even {
		leadScans(control, c, u)
		return u, nil
	}
	now := u[0]
	for k := 1; k <= last*c.lattice.row; k++ {
		row := k / c.lattice.row
		if k%c.lattice.scan == 0 {
			now = control.Next(c.r[row], c.log[k])
		}
		if k%c.lattice.row == 0 {
			u[row] = now
		}
	}
	return u, nil
}

// leadScans is lead for scans that the rows do not meet: there the logged
// temperature is taken to move in straight lines.
func leadScans(control *tune.Controller, c *course, u []float64) {
	row, now := 0, c.u[0]
	interpolate(c.scans, c.t, c.y, func(j int, y float64) {
		for row < len(u) && c.t[row] < c.scans[j]-1e-9*c.scan {
			u[row] = now
			row++
		}
		if j > 0 && row < len(u) {
			now = control.Next(c.r[c.scanRow[j]], y)
		}
	})
	for ; row < len(u); row++ {
		u[row] = now
	}
}
