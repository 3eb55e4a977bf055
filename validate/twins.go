package validate

import (
	"crypto/sha256"
	"encoding/binary"
	"fmt"
	"math"

	"lagwright/data"
)

// withoutTwins leaves out each run that holds the same recording as one before
// it, as a CSV and its Parquet twin do: the same times, inputs and temperatures,
// and no other date. The same values under another date are kept, with a
// warning: a history of copies says nothing.
func withoutTwins(runs []*data.Run) (kept []*data.Run, left []FailedRun, warnings []string) {
	seen := map[[sha256.Size]byte]*data.Run{}
	for _, run := range runs {
		id := valuesID(run)
		first, twin := seen[id]
		switch {
		case !twin || len(run.T) == 0:
			seen[id] = run
		case first.Start.Equal(run.Start) || first.Start.IsZero() || run.Start.IsZero():
			left = append(left, FailedRun{titleOf(run), fmt.Sprintf("holds the same recording as %s, which counts once", titleOf(first))})
			continue
		default:
			warnings = append(warnings, fmt.Sprintf("%s holds the same values as %s under another date: is it a copy?", titleOf(run), titleOf(first)))
		}
		kept = append(kept, run)
	}
	return kept, left, warnings
}

// valuesID hashes times, inputs and temperatures.
func valuesID(run *data.Run) (id [sha256.Size]byte) {
	h := sha256.New()
	var b [8]byte
	for _, column := range [][]float64{run.T, run.U, run.Y} {
		for _, v := range column {
			if math.IsNaN(v) {
				v = math.NaN() // one of many
			}
			binary.LittleEndian.PutUint64(b[:], math.Float64bits(v))
			h.Write(b[:])
		}
	}
	h.Sum(id[:0])
	return id
}

func titleOf(run *data.Run) string {
	return clean(DriftRun{File: run.Source.File, Name: run.Source.Name}.title())
}
