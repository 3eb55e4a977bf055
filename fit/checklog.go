package fit

import (
	"fmt"
	"math"
	"slices"

	"gonum.org/v1/gonum/stat"

	"lagwright/data"
	"lagwright/ident"
)

// The thresholds of this file are common practice, no source.

// driftBefore draws a straight line through the temperatures before the first
// bump; nil where fewer than 8 rows tell.
func driftBefore(run *data.Run, bumps []ident.Bump) *DriftBefore {
	end := len(run.T)
	if len(bumps) > 0 {
		end = bumps[0].Row
	}
	var t, y []float64
	for k := range end {
		if !math.IsNaN(run.Y[k]) {
			t, y = append(t, run.T[k]), append(y, run.Y[k])
		}
	}
	n := len(t)
	if n < 8 {
		return nil
	}
	offset, slope := stat.LinearRegression(t, y, nil, false)
	ss := 0.0
	left := make([]float64, n)
	for i := range t {
		left[i] = y[i] - offset - slope*t[i]
		ss += left[i] * left[i]
	}
	over := t[n-1] - t[0]
	// The scatter of a slope over n rows that are as correlated as these look.
	rho := math.Max(autocorrelation(left, 1)[1], 0)
	independent := math.Max(effectiveSampleSize(n, math.Min(rho, 0.999)), 3)
	se := math.Sqrt(12*ss/float64(n)/(independent-2)) / over
	return &DriftBefore{Over: over, Slope: slope, Moved: slope * over, Clear: math.Abs(slope) > 3*se && math.Abs(slope*over) > run.Quality.Quantum}
}

func checkedRange(v []float64, moved func(low, high, middle float64) bool) *CheckedRange {
	var seen []float64
	for _, x := range v {
		if !math.IsNaN(x) && !math.IsInf(x, 0) {
			seen = append(seen, x)
		}
	}
	if len(seen) == 0 {
		return nil
	}
	slices.Sort(seen)
	// Between the 5 % and 95 % quantiles, so that a spike is not a move.
	return &CheckedRange{Low: seen[0], High: seen[len(seen)-1],
		Moved: moved(quantileOf(seen, 0.05), quantileOf(seen, 0.95), quantileOf(seen, 0.5))}
}

const (
	fewLevels  = 10   // distinct inputs that a hand or a program sets
	busyInput  = 0.2  // share of rows at which the input of a controller moves
	closedFrom = 0.5  // share of the input's moves that the temperature explains in a closed loop
	openBelow  = 0.2  // and in an open one
	mostLooked = 1e5  // rows looked at
	autoShare  = 0.05 // of the rows in automatic that make a log closed-loop
)

// loopOf says whether a controller moved the input.
func loopOf(run *data.Run) Loop {
	if run.Auto != nil {
		n := 0
		for _, a := range run.Auto {
			if a {
				n++
			}
		}
		share := float64(n) / float64(len(run.Auto))
		if share > autoShare {
			return Loop{"closed", fmt.Sprintf("the controller was in automatic on %.0f %% of the rows", 100*share)}
		}
		return Loop{"open", "the controller was in manual"}
	}
	rows := min(len(run.T), mostLooked)
	u, y := run.U[:rows], run.Y[:rows]
	moves := 0
	levels := map[float64]bool{}
	for k := 1; k < rows; k++ {
		if u[k] != u[k-1] {
			moves++
		}
		if len(levels) <= fewLevels {
			levels[u[k]] = true
		}
	}
	switch {
	case len(levels) <= fewLevels:
		if switchesOnTemperature(u, y) {
			return Loop{"closed", "the input switches whenever the temperature passes a limit"}
		}
		return Loop{"open", fmt.Sprintf("the input is held on %s", counted(len(levels), "level", "levels"))}
	case float64(moves) < busyInput*float64(rows):
		return Loop{"open", "the input is held between few moves"}
	}
	r2 := explainedMoves(u, y, run.Setpoint)
	said := fmt.Sprintf("the input moves at %.0f %% of the rows and the temperature explains %.0f %% of that", 100*float64(moves)/float64(rows), 100*r2)
	switch {
	case r2 > closedFrom:
		return Loop{"closed", said}
	case r2 < openBelow:
		return Loop{"open", said}
	}
	return Loop{"unclear", said}
}

// switchesOnTemperature reports whether every step of the input up was made at
// lower temperatures than every step down, as a two-position controller does
// (or the other way round for a cooler), at least three times each.
func switchesOnTemperature(u, y []float64) bool {
	upLow, upHigh, downLow, downHigh := math.Inf(1), math.Inf(-1), math.Inf(1), math.Inf(-1)
	ups, downs := 0, 0
	for k := 1; k < len(u); k++ {
		if u[k] == u[k-1] || math.IsNaN(y[k]) {
			continue
		}
		if u[k] > u[k-1] {
			ups++
			upLow, upHigh = math.Min(upLow, y[k]), math.Max(upHigh, y[k])
		} else {
			downs++
			downLow, downHigh = math.Min(downLow, y[k]), math.Max(downHigh, y[k])
		}
	}
	if ups < 3 || downs < 3 {
		return false
	}
	// The switching temperatures of a controller are narrow beside their distance.
	if upHigh < downLow {
		return upHigh-upLow+downHigh-downLow < downLow-upHigh
	}
	return downHigh < upLow && upHigh-upLow+downHigh-downLow < upLow-downHigh
}

// explainedMoves is the share of the input's changes from row to row that a
// straight-line combination of the control error and its changes explains, at
// the same row and at the rows before: what a P, PI or PID controller does. The
// error is setpoint less temperature, or minus the temperature without a
// setpoint; the few great moves that a step of the setpoint makes are clipped.
func explainedMoves(u, y, setpoint []float64) float64 {
	e := func(k int) float64 {
		if setpoint != nil {
			return setpoint[k] - y[k]
		}
		return -y[k]
	}
	var du []float64
	cols := make([][]float64, 4)
	for k := 3; k < len(u); k++ {
		row := [4]float64{e(k), e(k) - e(k-1), e(k-1) - e(k-2), e(k-2) - e(k-3)}
		if math.IsNaN(row[0] + row[1] + row[2] + row[3]) {
			continue
		}
		du = append(du, u[k]-u[k-1])
		for j, v := range row {
			cols[j] = append(cols[j], v)
		}
	}
	if len(du) < 20 {
		return 0
	}
	clip(du)
	du = centred(du)
	whole := dot(du, du)
	if whole == 0 {
		return 0
	}
	var basis [][]float64
	for _, c := range cols {
		addToBasis(&basis, centred(c))
	}
	project(du, basis)
	return 1 - dot(du, du)/whole
}

// clip brings values further from 0 than 8 median distances to there.
func clip(v []float64) {
	away := make([]float64, len(v))
	for i, x := range v {
		away[i] = math.Abs(x)
	}
	slices.Sort(away)
	if most := 8 * quantileOf(away, 0.5); most > 0 {
		for i := range v {
			v[i] = math.Max(-most, math.Min(v[i], most))
		}
	}
}
