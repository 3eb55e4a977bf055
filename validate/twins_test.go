package validate

import (
	"math"
	"slices"
	"testing"
	"time"

	"lagwright/data"
)

func TestTwinsCountOnce(t *testing.T) {
	day := time.Date(2026, 3, 1, 8, 0, 0, 0, time.UTC)
	run := func(file string, start time.Time, last float64) *data.Run {
		return &data.Run{Source: data.Source{File: file}, Start: start,
			T: []float64{0, 1, 2, 3}, U: []float64{4, 4, 5, 5}, Y: []float64{60, math.NaN(), 61, last}}
	}
	for _, c := range []struct {
		name       string
		second     *data.Run
		kept, warn int
	}{
		{"another recording", run("b.csv", day, 63), 2, 0},
		{"the same", run("a.parquet", day, 62), 1, 0},
		{"the same in another zone", run("a.parquet", day.In(time.FixedZone("", 3600)), 62), 1, 0},
		{"the same without a clock", run("a.txt", time.Time{}, 62), 1, 0},
		{"a copy under another date", run("b.csv", day.AddDate(0, 1, 0), 62), 2, 1},
	} {
		kept, left, warnings := withoutTwins([]*data.Run{run("a.csv", day, 62), c.second})
		if len(kept) != c.kept || len(left) != 2-c.kept || len(warnings) != c.warn {
			t.Errorf("%s: %d kept, %v left out, warnings %q", c.name, len(kept), left, warnings)
		}
		if slices.ContainsFunc(left, func(f FailedRun) bool {
			return f.File != c.second.Source.File || f.Reason != "holds the same recording as a.csv, which counts once"
		}) {
			t.Errorf("%s: %v", c.name, left)
		}
	}
}
