package validate

import "math"

// runaway marks the figures of a replay that ran away, in moves.
const runaway = -1

func runawayFigures() figures {
	inf := math.Inf(1)
	f := figures{
		settling: inf, overshoot: inf, iae: inf, deviation: inf, peakTemp: inf, lowTemp: -inf,
		peakInput: inf, lowInput: -inf, travel: inf, handOver: inf, moves: runaway,
	}
	f.noisy.settling, f.noisy.overshoot = inf, inf
	return f
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
		s := spreadOf(valuesOf(all, figure), level)
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

// valuesOf lists a figure over the plants that have it.
func valuesOf(all []figures, figure func(figures) float64) []float64 {
	values := make([]float64, 0, len(all))
	for _, f := range all {
		if v := figure(f); !math.IsNaN(v) {
			values = append(values, v)
		}
	}
	return values
}

// withNoise returns the medians of settling and overshoot in the noisy replay.
func withNoise(all []figures) StepMetrics {
	median := func(figure func(figures) float64) *float64 {
		return finite(spreadOf(valuesOf(all, figure), 0.95).median)
	}
	return StepMetrics{
		Settling:  median(func(f figures) float64 { return f.noisy.settling }),
		Overshoot: median(func(f figures) float64 { return f.noisy.overshoot }),
	}
}
