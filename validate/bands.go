package validate

import (
	"math"
	"slices"
)

// runaway marks the figures of a replay that ran away, in moves.
const runaway = -1

func runawayFigures() figures {
	inf := math.Inf(1)
	return figures{
		settling: inf, overshoot: inf, iae: inf, deviation: inf, peakTemp: inf,
		peakInput: inf, lowInput: -inf, rate: inf, travel: inf, moves: runaway,
	}
}

// metrics writes figures as they stand in files: null where there is none.
func (f figures) metrics() RunMetrics {
	return RunMetrics{
		Settling: finite(f.settling), Overshoot: finite(f.overshoot), IAE: finite(f.iae), Deviation: finite(f.deviation),
		PeakTemp: finite(f.peakTemp), PeakInput: finite(f.peakInput), InputMoves: finite(f.travel),
	}
}

// bandMetrics returns each metric's median and band over the plants.
func bandMetrics(all []figures, level float64) BandMetrics {
	var b BandMetrics
	put := func(figure func(figures) float64, field func(*RunMetrics) **float64) {
		var values []float64
		for _, f := range all {
			if v := figure(f); !math.IsNaN(v) {
				values = append(values, v)
			}
		}
		s := spreadOf(values, level)
		*field(&b.Low), *field(&b.Median), *field(&b.High) = finite(s.low), finite(s.median), finite(s.high)
	}
	put(func(f figures) float64 { return f.settling }, func(m *RunMetrics) **float64 { return &m.Settling })
	put(func(f figures) float64 { return f.overshoot }, func(m *RunMetrics) **float64 { return &m.Overshoot })
	put(func(f figures) float64 { return f.iae }, func(m *RunMetrics) **float64 { return &m.IAE })
	put(func(f figures) float64 { return f.deviation }, func(m *RunMetrics) **float64 { return &m.Deviation })
	put(func(f figures) float64 { return f.peakTemp }, func(m *RunMetrics) **float64 { return &m.PeakTemp })
	put(func(f figures) float64 { return f.peakInput }, func(m *RunMetrics) **float64 { return &m.PeakInput })
	put(func(f figures) float64 { return f.travel }, func(m *RunMetrics) **float64 { return &m.InputMoves })
	return b
}

// maxTrace is the most rows of a trace.
const maxTrace = 2400

// thin returns the rows to keep of series of equal length: all when they are
// few, else of every stretch its first row and those of each series' least
// and greatest value, and the last row.
func thin(limit int, series ...[]float64) []int {
	n := len(series[0])
	if n <= limit {
		rows := make([]int, n)
		for i := range rows {
			rows[i] = i
		}
		return rows
	}
	stretches := max(1, (limit-1)/(1+2*len(series)))
	var rows []int
	for b := range stretches {
		lo, hi := b*n/stretches, (b+1)*n/stretches
		rows = append(rows, lo)
		for _, s := range series {
			least, greatest := lo, lo
			for i := lo; i < hi; i++ {
				if s[i] < s[least] {
					least = i
				}
				if s[i] > s[greatest] {
					greatest = i
				}
			}
			rows = append(rows, least, greatest)
		}
	}
	rows = append(rows, n-1)
	slices.Sort(rows)
	return slices.Compact(rows)
}

// trace writes the kept rows as series with their bands. Between two segments
// stands one row of nulls, which breaks a drawn line.
func (e *ensemble) trace(courses []*course, level float64) *Trace {
	tr := &Trace{}
	n := len(e.figures)
	at := 0
	for i, c := range courses {
		if i > 0 {
			before := courses[i-1]
			tr.add((before.t[len(before.t)-1]+c.t[0])/2, nil, nil, nil, nil, nil, nil, nil, nil, nil)
		}
		for _, row := range e.rows[i] {
			y := spreadOf(e.y[at*n:(at+1)*n], level)
			u := spreadOf(e.u[at*n:(at+1)*n], level)
			tr.add(c.t[row], &c.r[row], &c.y[row], &c.u[row],
				finite(y.median), finite(y.low), finite(y.high), finite(u.median), finite(u.low), finite(u.high))
			at++
		}
	}
	return tr
}

func (tr *Trace) add(t float64, setpoint, logged, loggedIn, median, low, high, medianIn, lowIn, highIn *float64) {
	tr.T = append(tr.T, t)
	for _, s := range []struct {
		to *[]*float64
		v  *float64
	}{
		{&tr.Setpoint, setpoint}, {&tr.Logged, logged}, {&tr.LoggedIn, loggedIn},
		{&tr.Median, median}, {&tr.Low, low}, {&tr.High, high},
		{&tr.MedianIn, medianIn}, {&tr.LowIn, lowIn}, {&tr.HighIn, highIn},
	} {
		*s.to = append(*s.to, s.v)
	}
}
