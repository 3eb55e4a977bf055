package fit

import (
	"fmt"
	"math"
	"slices"
	"sort"

	"lagwright/data"
	"lagwright/ident"
)

// Curves is a card's model beside one log: what a figure draws. All but ACF
// and Bumps have one element for each row of the run; NaN is a hole.
type Curves struct {
	T         []float64 // s
	Fitted    []float64 // output of the best fit, temperature units
	Low, High []float64 // band of the output over the plausible plants, at the card's confidence
	Residual  []float64 // log minus Fitted; NaN where the temperature is missing
	Whitened  []float64 // Residual after the noise model, in units of its standard deviation

	ACF      []float64    // autocorrelation of Whitened at the lags 1, 2, … rows
	ACFBound float64      // white noise stays within ±ACFBound at the card's confidence, lag by lag
	Bumps    []ident.Bump // in the run
}

// Curves returns the card's selected model beside a run: source is the index
// of the run among the card's sources, or negative for a run that the card was
// not fitted to. Baseline, drift and the state at the first row are those that
// suit the run best, anew for every plausible plant of the band.
func (c *Card) Curves(run *data.Run, source int) (*Curves, error) {
	name := run.Source.File
	switch {
	case source >= len(c.Source):
		return nil, fmt.Errorf("%s: the card has %d logs, there is no log %d", name, len(c.Source), source+1)
	case source >= 0 && c.Source[source].SHA256 != run.Source.SHA256:
		return nil, fmt.Errorf("%s: not the file the card was fitted to: fit it anew", name)
	case len(run.T) < 2:
		return nil, fmt.Errorf("%s: %w: %d", name, ErrTooShort, len(run.T))
	}
	best, err := c.Plant()
	if err != nil {
		return nil, err
	}
	m, model, err := c.output(run, run.T, run.Y)
	if err != nil {
		return nil, err
	}
	if len(m.measured) < 2 {
		return nil, fmt.Errorf("%s: %w: %d hold a temperature", name, ErrTooShort, len(m.measured))
	}
	best.DeadTime = c.onClock(best.DeadTime, run)
	out := &Curves{T: run.T, Fitted: m.of(best), Bumps: ident.FindBumps(run.T, run.U, run.Y)}
	out.residuals(m, model.Noise.SD, c.Confidence)
	if err := c.band(out, run, best); err != nil {
		return nil, err
	}
	return out, nil
}

// onClock turns a stated dead time into that of the rows. With an unknown
// instant of the bump a card states half a sampling interval more than the
// rows show.
func (c *Card) onClock(deadTime float64, run *data.Run) float64 {
	if c.BumpTime != "unknown" {
		return deadTime
	}
	return math.Max(deadTime-medianInterval(run.T)/2, 0)
}

// residuals fills what the model leaves.
func (v *Curves) residuals(m *modelOutput, sd, confidence float64) {
	n := len(m.t)
	v.Residual, v.Whitened = filled(n, math.NaN()), filled(n, math.NaN())
	left := m.pick(m.y)
	for i, k := range m.measured {
		left[i] -= v.Fitted[k]
		v.Residual[k] = left[i]
	}
	m.filter.apply(left, left)
	if sd > 0 {
		for i := range left {
			left[i] /= sd
		}
	}
	for i, k := range m.measured {
		v.Whitened[k] = left[i]
	}
	lags := max(1, min(40, len(left)/4))
	v.ACF = autocorrelation(left, lags)[1:]
	v.ACFBound = normalQuantile((1+confidence)/2) / math.Sqrt(float64(len(left)))
}

// mostBandRows bounds the work of a band: of longer runs every plausible plant
// is computed at so many rows only, and the width between them interpolated.
const mostBandRows = 4000

// band fills Low and High with the quantiles of the plausible outputs.
func (c *Card) band(v *Curves, run *data.Run, best ident.Plant) error {
	plants, err := c.PlausiblePlants()
	if err != nil {
		return err
	}
	rows := closeRows(run, v.Bumps, mostBandRows)
	t, y := rowsOf(run, rows)
	m, _, err := c.output(run, t, y)
	if err != nil {
		return err
	}
	middle := m.of(best)
	away := make([][]float64, len(rows)) // distance of every plausible plant from the best fit, by row
	for _, p := range plants {
		p.DeadTime = c.onClock(p.DeadTime, run)
		for i, x := range m.of(p) {
			away[i] = append(away[i], x-middle[i])
		}
	}
	low, high := make([]float64, len(rows)), make([]float64, len(rows))
	for i, a := range away {
		a = append(a, 0) // the best fit itself
		sort.Float64s(a)
		low[i], high[i] = quantileOf(a, (1-c.Confidence)/2), quantileOf(a, (1+c.Confidence)/2)
	}
	v.Low, v.High = append([]float64(nil), v.Fitted...), append([]float64(nil), v.Fitted...)
	addBetween(v.Low, run.T, t, low)
	addBetween(v.High, run.T, t, high)
	return nil
}

// closeRows returns at most about most rows of a run in order: the first, the
// last, all of a short run; of a longer one they lie close together after each
// bump and ever wider from there on.
func closeRows(run *data.Run, bumps []ident.Bump, most int) []int {
	n := len(run.T)
	every := max(1, 2*n/most)
	rows := make([]int, 0, n/every+most)
	for k := 0; k < n; k += every {
		rows = append(rows, k)
	}
	rows = append(rows, n-1)
	if each := most / 2 / max(len(bumps), 1); every > 1 && each > 4 {
		for _, b := range bumps {
			// Rows at distances that grow by a fixed ratio fill the hold with about each of them.
			growth := math.Pow(float64(b.End-b.Row+1), 2/float64(each))
			rows = append(rows, max(b.Row-1, 0))
			for d := 1.0; b.Row+int(d)-1 < b.End; d = math.Max(d*growth, d+1) {
				rows = append(rows, b.Row+int(d)-1)
			}
		}
	}
	slices.Sort(rows)
	return slices.Compact(rows)
}

// rowsOf are the times and temperatures of some rows.
func rowsOf(run *data.Run, rows []int) (t, y []float64) {
	t, y = make([]float64, len(rows)), make([]float64, len(rows))
	for i, k := range rows {
		t[i], y[i] = run.T[k], run.Y[k]
	}
	return t, y
}

// addBetween adds to x, at the times t, the values v given at the times at, with
// straight lines between; at begins and ends with t.
func addBetween(x, t, at, v []float64) {
	j := 0
	for k := range x {
		for j+2 < len(at) && t[k] > at[j+1] {
			j++
		}
		if len(at) == 1 {
			x[k] += v[0]
			continue
		}
		w := (t[k] - at[j]) / (at[j+1] - at[j])
		x[k] += v[j] + w*(v[j+1]-v[j])
	}
}

func filled(n int, v float64) []float64 {
	out := make([]float64, n)
	for i := range out {
		out[i] = v
	}
	return out
}
