package validate

import "math"

// A lattice is a grid of equal steps on which both the rows of a log and the
// controller's scans lie.
type lattice struct {
	step float64 // s
	row  int     // steps from row to row
	scan int     // steps from scan to scan
}

const (
	maxPerScan = 64 // most rows between two scans
	maxPerRow  = 64 // most scans between two rows
)

// findLattice returns the coarsest lattice of the times t (s) and the scan
// time; ok is false when there is none, because the rows are not evenly
// spaced or because rows and scans have no small common measure.
func findLattice(t []float64, scan float64) (l lattice, ok bool) {
	n := len(t)
	interval := (t[n-1] - t[0]) / float64(n-1)
	tolerance := 1e-9 * max(interval, math.Abs(t[0]), math.Abs(t[n-1]))
	for i := range t {
		if math.Abs(t[i]-t[0]-float64(i)*interval) > tolerance {
			return l, false
		}
	}
	for rows := 1; rows <= maxPerScan; rows++ { // scans·scan = rows·interval
		scans := math.Round(float64(rows) * interval / scan)
		if scans >= 1 && scans <= maxPerRow*float64(rows) && scans*float64(rows) <= maxPerRow*maxPerScan &&
			math.Abs(scans*scan-float64(rows)*interval) <= 1e-9*float64(rows)*interval {
			return lattice{interval / scans, int(scans), rows}, true
		}
	}
	return l, false
}

// continuousScan returns the scan time that stands for a continuous
// controller: the rows' interval divided by the least whole number that makes
// it no longer than a hundredth of the plant's response time, but by 25 at
// most.
func continuousScan(t []float64, response float64) float64 {
	interval := (t[len(t)-1] - t[0]) / float64(len(t)-1)
	parts := 1.0
	if response > 0 {
		parts = min(25, max(1, math.Ceil(100*interval/response)))
	}
	return interval / parts
}
