package validate

import "math"

// A signal is one recording to be measured, whether it was logged, simulated
// or replayed: all three go through the same [figures.add]. The slices share
// one length and clock (s, ascending).
type signal struct {
	t  []float64
	y  []float64 // temperature; NaN where missing
	u  []float64 // input, holds from its row on
	r  []float64 // setpoint, holds from its row on; nil when there is none
	r0 float64   // setpoint (or level) in force before the first row
	// midway: no setpoint step is made in the first row. If r0 differs from its
	// setpoint, the signal starts in the middle of a move, or of heating up: the
	// way that is left is a hand-over, not the answer to a step
	midway bool
	// final is where the temperature comes to rest under a P controller with the
	// setpoint r: settling and overshoot are told from there, as tune tells them;
	// nil: at the setpoint
	final func(r float64) float64
}

// A yardstick is how signals are measured.
type yardstick struct {
	band     float64  // half-width of the settling band, fraction of the step
	noise    float64  // sd of the noise that no controller can act on, see noiseBeyondControl
	apart    float64  // s between noise values that can be taken as independent
	quantum  float64  // resolution of the temperature
	limit    *float64 // settling time asked, s; nil when none is
	response float64  // dead time + sum of lags, s; 0 means: judge to the end of the record
	// noiseless: the signal has no noise, so none is allowed for; a move too
	// small to show in the noisy record is passed over all the same
	noiseless bool
}

// figures of one run, added up over its segments. NaN: no such figure;
// +Inf: the temperature did not settle.
type figures struct {
	settling  float64 // s, the slowest of the run's setpoint moves
	overshoot float64 // % of the move, the largest
	iae       float64 // ∫|r − y| dt
	deviation float64 // largest |r − y| while no setpoint move is being followed
	peakTemp  float64
	lowTemp   float64 // the least temperature
	peakInput float64
	lowInput  float64 // the least input
	travel    float64 // Σ|Δu|
	allowance float64 // widest noise allowance used, temperature units
	moves     int     // setpoint moves judged
	handOver  float64 // s, the slowest way to the setpoint from where a segment starts in mid-move
	offset    float64 // largest distance from the setpoint at which P control comes to rest
	small     int     // setpoint moves too small against the noise to judge
	cut       int     // setpoint moves whose record ends before it shows whether they settle in time
	unsettled int     // moves after which the temperature did not settle

	noisy struct{ settling, overshoot float64 } // as the replayed record shows them past the allowance
}

func noFigures() figures {
	nan := math.NaN()
	f := figures{settling: nan, overshoot: nan, iae: nan, deviation: nan, peakTemp: nan, lowTemp: nan, peakInput: nan, lowInput: nan, travel: nan, handOver: nan}
	f.noisy.settling, f.noisy.overshoot = nan, nan
	return f
}

// endsTooSoon tells that the setpoint moved, but that the record of every move
// ends before it shows whether the temperature settles in the time asked. A loop
// that does nothing has no overshoot either: such a run cannot be called good.
func (f figures) endsTooSoon() bool { return f.cut > 0 && math.IsNaN(f.settling) }

// add measures one unbroken segment and adds it to the figures of the run.
func (f *figures) add(s signal, m yardstick) {
	f.peakTemp = larger(f.peakTemp, greatest(s.y))
	f.lowTemp = -larger(-f.lowTemp, -least(s.y))
	f.peakInput = larger(f.peakInput, greatest(s.u))
	f.lowInput = -larger(-f.lowInput, -least(s.u))
	f.travel = plus(f.travel, travel(s.u))
	if s.r == nil {
		return
	}
	f.iae = plus(f.iae, absoluteError(s))
	all := moves(s, m)
	quiet := f.takeOver(s, m, all) // first row not yet given to a move
	for _, mv := range all {
		f.deviation = larger(f.deviation, deviation(s, quiet, mv.from))
		quiet = f.follow(s, m, mv)
	}
	f.deviation = larger(f.deviation, deviation(s, quiet, len(s.t)))
}

// takeOver measures the way to the setpoint that a signal starting in mid-move
// has left, up to the first setpoint move, and returns the first row that no
// longer belongs to it. Nothing is asked of it.
func (f *figures) takeOver(s signal, m yardstick, all []move) (rest int) {
	way := move{to: len(s.t), target: s.r[0], size: s.r[0] - s.r0}
	if len(all) > 0 {
		way.to = all[0].from
	}
	allowance := m.allowance(s.t[len(s.t)-1] - s.t[0])
	if !s.midway || way.to == 0 || math.Abs(way.size) <= allowance {
		return 0
	}
	at, rest := settled(s, way, m.band*math.Abs(way.size)+allowance, m.response, m.kept())
	f.handOver = larger(f.handOver, at)
	return rest
}

// follow measures settling and overshoot of one setpoint move and returns the
// first row that no longer belongs to it.
func (f *figures) follow(s signal, m yardstick, mv move) (rest int) {
	if s.final != nil {
		end := s.final(mv.target)
		f.offset = max(f.offset, math.Abs(end-mv.target))
		mv.target = end
		mv.size = mv.target - s.y[mv.from]
	}
	allowance := m.allowance(s.t[mv.to-1] - s.t[mv.from])
	f.allowance = max(f.allowance, allowance)
	if allowance >= 0.5*math.Abs(mv.size) {
		f.small++
		return mv.to
	}
	f.moves++
	if m.noiseless {
		allowance = 0
	}
	half := m.band*math.Abs(mv.size) + allowance
	at, rest := settled(s, mv, half, m.response, m.kept())
	switch {
	case !math.IsInf(at, 1):
	case m.limit != nil && endsTooSoon(s, mv, half, *m.limit):
		f.cut++
		at = math.NaN()
	default:
		f.unsettled++
	}
	f.settling = larger(f.settling, at)
	f.overshoot = larger(f.overshoot, overshoot(s, mv, rest, allowance))
	return rest
}

// kept is how long the temperature stays inside the band before what pushes it
// out again passes for a load: two response times (common practice, no source).
func (m yardstick) kept() float64 {
	if m.noiseless || m.response == 0 {
		return math.Inf(1)
	}
	return 2 * m.response
}

// settled returns the time from the move until the temperature enters
// ±half around the new setpoint and keeps it, interpolated to the crossing,
// and the first row that follows the move no longer. Kept means for
// 5 × response, or to the end of the move's rows if that leaves at least one
// response time; with response 0, to the end. It returns +Inf when the
// temperature does not settle.
//
// A load that pushes the temperature out again later, or once it has been inside
// for the time kept, counts as a load deviation, not as slow settling (common
// practice, no source). kept is infinite where there are no loads: what then
// leaves the band is the loop.
func settled(s signal, mv move, half, response, kept float64) (at float64, rest int) {
	entered, last := math.NaN(), -1 // time of entry; last row with a temperature
	outside := math.Abs(mv.size)    // |error| at that row
	for i := mv.from; i < mv.to; i++ {
		e := math.Abs(s.y[i] - mv.target)
		if math.IsNaN(e) {
			continue
		}
		switch {
		case e > half && s.t[i]-entered >= kept:
			return entered - s.t[mv.from], i
		case e > half:
			entered = math.NaN()
		case math.IsNaN(entered) && last >= 0 && outside > half:
			entered = s.t[last] + (s.t[i]-s.t[last])*(outside-half)/(outside-e)
		case math.IsNaN(entered):
			entered = s.t[i]
		}
		if response > 0 && s.t[i]-entered >= 5*response {
			return entered - s.t[mv.from], i + 1
		}
		outside, last = e, i
	}
	if end := s.t[mv.to-1]; end-entered >= response {
		return entered - s.t[mv.from], mv.to
	}
	return math.Inf(1), mv.to
}

// endsTooSoon tells whether the record of a move that was not seen to settle
// leaves open whether it does so within limit: it ends outside the band before
// the limit has passed, or inside the band, entered in time.
func endsTooSoon(s signal, mv move, half, limit float64) bool {
	entered := math.NaN()
	for i := mv.from; i < mv.to; i++ {
		switch e := math.Abs(s.y[i] - mv.target); {
		case e > half:
			entered = math.NaN()
		case math.IsNaN(entered) && e <= half:
			entered = s.t[i]
		}
	}
	start := s.t[mv.from]
	if math.IsNaN(entered) {
		return s.t[mv.to-1]-start < limit
	}
	return entered-start <= limit
}

// overshoot returns how far the temperature passes the new setpoint, in
// percent of the move, beyond what noise alone would explain.
func overshoot(s signal, mv move, rest int, allowance float64) float64 {
	worst := 0.0
	for i := mv.from; i < rest; i++ {
		past := math.Copysign(1, mv.size)*(s.y[i]-mv.target) - allowance
		if past > worst {
			worst = past
		}
	}
	return 100 * worst / math.Abs(mv.size)
}

// deviation returns the largest |r − y| over the rows lo ≤ i < hi, NaN when
// there is none. It is the reading's own: nothing is taken off for noise.
func deviation(s signal, lo, hi int) float64 {
	worst := math.Inf(-1)
	for i := lo; i < hi; i++ {
		if e := math.Abs(s.r[i] - s.y[i]); e > worst {
			worst = e
		}
	}
	return orNaN(worst)
}

// absoluteError returns ∫|r − y| dt by the trapezoid rule between the rows
// that have a temperature; the setpoint holds from its row on.
func absoluteError(s signal) float64 {
	sum, last := 0.0, -1
	for i, y := range s.y {
		if math.IsNaN(y) {
			continue
		}
		if last >= 0 {
			sum += (s.t[i] - s.t[last]) * (math.Abs(s.y[last]-s.r[last]) + math.Abs(y-s.r[last])) / 2
		}
		last = i
	}
	return sum
}

// travel returns the sum of |Δu| from row to row.
func travel(u []float64) float64 {
	sum := 0.0
	for i := 1; i < len(u); i++ {
		sum += math.Abs(u[i] - u[i-1])
	}
	return sum
}

// greatest returns the greatest value; NaN values are passed over, and the
// result is NaN when there is nothing else.
func greatest(x []float64) float64 {
	top := math.Inf(-1)
	for _, v := range x {
		if v > top {
			top = v
		}
	}
	return orNaN(top)
}

// least returns the least value as greatest does the greatest.
func least(x []float64) float64 {
	low := math.Inf(1)
	for _, v := range x {
		if v < low {
			low = v
		}
	}
	return -orNaN(-low)
}

// orNaN turns the −Inf of an empty search into NaN.
func orNaN(x float64) float64 {
	if math.IsInf(x, -1) {
		return math.NaN()
	}
	return x
}

// larger returns the larger of two values, the other where one is NaN.
func larger(a, b float64) float64 {
	if math.IsNaN(a) || b > a {
		return b
	}
	return a
}

// plus returns a + b, b where a is NaN.
func plus(a, b float64) float64 {
	if math.IsNaN(a) {
		return b
	}
	return a + b
}
