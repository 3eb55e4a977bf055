package data

import (
	"math"
	"slices"
)

// sampleMax bounds how many values a median is taken of: of longer columns
// every k-th is used, which changes no figure that anyone acts on.
const sampleMax = 1 << 16

// stride is the odd step at which about sampleMax of n values are looked at;
// odd, so that a pattern that repeats every second row shows.
func stride(n int) int { return n/sampleMax | 1 }

// assess fills in the figures of Quality that need the finished columns.
func assess(run *Run, o *Options) {
	q := &run.Quality
	q.MedianInterval, q.JitterInterval = intervals(run.T)
	q.Gaps = findGaps(run.T, q.MedianInterval)
	q.Quantum = quantum(run.Y)
	q.Spikes = findSpikes(run.Y, q.Quantum)
	if n, ok := clippedNote(run.Y); ok {
		addNote(&q.Notes, n)
	}
	if o.RemoveSpikes {
		for _, i := range q.Spikes {
			run.Y[i] = math.NaN()
		}
		if n := len(q.Spikes); n > 0 {
			count(q.Missing, "spike", n)
		}
	}
}

// intervals gives the median interval between rows and the 95th percentile
// of the distance from it, s.
func intervals(t []float64) (median, jitter float64) {
	step := stride(len(t))
	d := make([]float64, 0, len(t)/step+1)
	for i := 1; i < len(t); i += step {
		d = append(d, t[i]-t[i-1])
	}
	if len(d) == 0 {
		return 0, 0
	}
	median = medianOf(d)
	for i := range d {
		d[i] = math.Abs(d[i] - median)
	}
	slices.Sort(d)
	return median, d[(len(d)-1)*95/100]
}

// medianOf sorts v and returns its median, NaN when v is empty.
func medianOf(v []float64) float64 {
	if len(v) == 0 {
		return math.NaN()
	}
	slices.Sort(v)
	m := len(v) / 2
	if len(v)%2 == 1 {
		return v[m]
	}
	return v[m-1] + (v[m]-v[m-1])/2
}

// findGaps lists the intervals in which more than a row was lost: those
// longer than three median intervals.
func findGaps(t []float64, median float64) []Gap {
	var gaps []Gap
	if median <= 0 {
		return nil
	}
	for i := 1; i < len(t); i++ {
		if d := t[i] - t[i-1]; d > 3*median {
			gaps = append(gaps, Gap{After: i - 1, Duration: d})
		}
	}
	return gaps
}

// quantum is the step of the temperature's resolution: the smallest change
// between rows, if the other small changes are whole multiples of it. It is 0
// where no resolution shows.
func quantum(y []float64) float64 {
	step := math.Inf(1)
	every := stride(len(y))
	diffs := make([]float64, 0, len(y)/every+1)
	for i := 1; i < len(y); i += every {
		d := math.Abs(y[i] - y[i-1])
		if d > 1e-9*(1+math.Abs(y[i])) {
			diffs = append(diffs, d)
			step = min(step, d)
		}
	}
	if len(diffs) < 3 {
		return 0
	}
	// The smallest change may carry the rounding of a printed value: take the
	// mean of the changes of about one step.
	var sum float64
	n := 0
	for _, d := range diffs {
		if d < 1.5*step {
			sum += d
			n++
		}
	}
	step = sum / float64(n)
	small, fit := 0, 0
	for _, d := range diffs {
		if k := d / step; k < 10.5 {
			small++
			if math.Abs(k-math.Round(k)) < 0.1 {
				fit++
			}
		}
	}
	if small < 3 || float64(fit) < 0.98*float64(small) {
		return 0
	}
	return step
}

// spikeFactor is how many times the usual distance of a reading from the
// middle of its neighbours a spike must exceed.
const spikeFactor = 12

// findSpikes finds single readings that stand out while the readings on both
// sides agree: the distance from the neighbours' middle is more than
// spikeFactor times the median such distance (1.4826 medians are a standard
// deviation of normal noise), more than ten quanta, and more than ten times
// the difference between the neighbours.
func findSpikes(y []float64, quantum float64) []int {
	if len(y) < 5 {
		return nil
	}
	off := func(i int) float64 { return math.Abs(y[i] - (y[i-1]+y[i+1])/2) }
	every := stride(len(y))
	usual := make([]float64, 0, len(y)/every+1)
	for i := 1; i < len(y)-1; i += every {
		if d := off(i); d == d {
			usual = append(usual, d)
		}
	}
	if len(usual) < 3 {
		return nil
	}
	limit := max(spikeFactor*1.4826*medianOf(usual), 10*quantum, 1e-6)
	var spikes []int
	for i := 1; i < len(y)-1; i++ {
		if d := off(i); d > limit && d > 10*math.Abs(y[i+1]-y[i-1]) {
			spikes = append(spikes, i)
		}
	}
	return spikes
}
