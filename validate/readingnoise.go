package validate

import (
	"math"
	"slices"

	"lagwright/data"
	"lagwright/ident"
)

// A controller acts on its own reading of the temperature, the log holds the
// logger's. The white noise of both, and the steps of the logged resolution,
// go through the controller, and through its derivative most of all, in a
// replay but not in the run, or the other way round.

// noiseDraws is how often noise is put on a log to see what it does.
const noiseDraws = 4

// A nearness is how near the replayed input must come to the logged one: row by
// row, and, where noise makes that wide, also in its mean over some rows, in
// which the noise goes down and what other gains do stays.
type nearness struct {
	row, mean float64 // in units of the input
	rows      int     // that the mean is taken over; 0: none is
}

// nearness allows for a share of the input's own range and for what the noise
// of the readings explains: the log is replayed again with as much noise put
// on it as two readings differ by, with its start found anew, and the inputs
// are compared.
func (p *plan) nearness(run *data.Run, courses []*course) (nearness, error) {
	own := inputTolerance * inputRange(courses)
	n := nearness{row: own}
	white := min(p.noise.WhiteSD, p.noise.SD)
	apart := math.Sqrt2 * math.Hypot(white, run.Quality.Quantum/math.Sqrt(12))
	if apart == 0 {
		return n, nil
	}
	off, err := p.noiseThrough(run, courses, apart)
	if err != nil {
		return n, err
	}
	noise := p.rarelyPassed(off)
	n.row += noise
	if noise > own {
		n.rows = max(2, int(math.Round(response(p.best)/medianInterval(run.T))))
		for i := range off {
			off[i] = runningMeans(off[i], n.rows)
		}
		n.mean = own + p.rarelyPassed(off)
	}
	return n, nil
}

// noiseThrough lists what white noise of that size on the log changes in the
// replayed inputs, course by course and draw by draw.
func (p *plan) noiseThrough(run *data.Run, courses []*course, sd float64) (off [][]float64, err error) {
	plain, err := p.replayedInputs(courses)
	if err != nil {
		return nil, err
	}
	noisy := *run
	for draw := range uint64(noiseDraws) {
		rng := newRand(1, draw)
		noisy.Y = slices.Clone(run.Y)
		for i := range noisy.Y {
			noisy.Y[i] += sd * rng.NormFloat64()
		}
		again, err := p.automatic(&noisy)
		if err != nil {
			return nil, err
		}
		inputs, err := p.replayedInputs(again)
		if err != nil {
			return nil, err
		}
		for i := range inputs {
			for k := range inputs[i] {
				inputs[i][k] -= plain[i][k]
			}
		}
		off = append(off, inputs...)
	}
	return off, nil
}

// rarelyPassed is the size that all but half of what the confidence leaves out
// stays below. Rows without any difference are held by a limit and not counted.
func (p *plan) rarelyPassed(off [][]float64) float64 {
	var sizes []float64
	for _, x := range off {
		for _, d := range x {
			if d != 0 && !math.IsInf(d, 0) && !math.IsNaN(d) {
				sizes = append(sizes, math.Abs(d))
			}
		}
	}
	if len(sizes) == 0 {
		return 0
	}
	slices.Sort(sizes)
	return quantile(sizes, (1+p.options.Confidence)/2)
}

// runningMeans are the means of every n values that follow each other.
func runningMeans(x []float64, n int) []float64 {
	var out []float64
	sum := 0.0
	for i, v := range x {
		sum += v
		if i >= n {
			sum -= x[i-n]
		}
		if i >= n-1 {
			out = append(out, sum/float64(n))
		}
	}
	return out
}

// replayedInputs are the inputs that the logged gains choose on the best-fit
// plant, course by course.
func (p *plan) replayedInputs(courses []*course) ([][]float64, error) {
	r := newRunner(p.law, p.logged, []ident.Plant{p.best})
	var out [][]float64
	for _, c := range courses {
		y, u := make([]float64, len(c.t)), make([]float64, len(c.t))
		var err error
		if r.begin, err = p.beginningOf(p.logged, c); err != nil {
			return nil, err
		}
		if err := r.replay(c, 0, y, u); err != nil {
			return nil, err
		}
		out = append(out, u)
	}
	return out, nil
}
