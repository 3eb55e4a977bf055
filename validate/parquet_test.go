package validate

import (
	"bytes"
	"math"
	"slices"
	"testing"

	"github.com/apache/arrow/go/v17/parquet"
	"github.com/apache/arrow/go/v17/parquet/file"
)

// What is written comes back through the reader, nulls included.
func TestParquetTable(t *testing.T) {
	start := "2026-03-14T08:15:00+01:00"
	r := &Replay{Runs: []RunReplay{
		{File: "a.csv", SHA256: "aa", Rows: 10, Start: &start, Judged: true, Meets: true, Probability: 1, Proposed: BandMetrics{Median: RunMetrics{Settling: ptr(41.5)}},
			HandOver: &HandOver{Away: -3.25, Settling: ptr(18.5)}},
		{File: "b.csv", Name: "7", SHA256: "bb", Rows: 20, Judged: true, Probability: 0.25, Reasons: []string{"slow", "hot"}, BackTest: &BackTest{Plant: true, Controller: new(bool)}},
	}}
	var b bytes.Buffer
	if err := r.WriteParquet(&b); err != nil {
		t.Fatal(err)
	}
	rd, err := file.NewParquetReader(bytes.NewReader(b.Bytes()))
	if err != nil {
		t.Fatal(err)
	}
	defer rd.Close()
	if rd.NumRows() != 2 || rd.MetaData().Schema.NumColumns() != len(tableColumns()) {
		t.Fatalf("%d rows, %d columns", rd.NumRows(), rd.MetaData().Schema.NumColumns())
	}
	column := func(name string) file.ColumnChunkReader {
		c, err := rd.RowGroup(0).Column(rd.MetaData().Schema.ColumnIndexByName(name))
		if err != nil {
			t.Fatal(err)
		}
		return c
	}
	numbers := func(name string) []float64 {
		values, def := make([]float64, 2), make([]int16, 2)
		n, k, err := column(name).(*file.Float64ColumnChunkReader).ReadBatch(2, values, def, nil)
		if err != nil || n != 2 {
			t.Fatal(n, err)
		}
		out, next := []float64{math.NaN(), math.NaN()}, 0
		for i := range out {
			if def[i] == 1 {
				out[i] = values[next]
				next++
			}
		}
		if next != k {
			t.Fatalf("%s: %d values for %d present", name, k, next)
		}
		return out
	}
	none := math.NaN()
	for name, want := range map[string][]float64{
		"probability":                 {1, 0.25},
		"proposed_settling_s":         {41.5, none},
		"hand_over_away":              {-3.25, none},
		"hand_over_settling_s":        {18.5, none},
		"hand_over_logged_settling_s": {none, none},
	} {
		if got := numbers(name); !slices.EqualFunc(got, want, func(a, b float64) bool { return a == b || math.IsNaN(a) && math.IsNaN(b) }) {
			t.Errorf("%s: %v, want %v", name, got, want)
		}
	}
	for name, want := range map[string]bool{"reproduced": false, "plant_reproduced": true, "controller_reproduced": false} {
		values, def := make([]bool, 2), make([]int16, 2)
		n, k, err := column(name).(*file.BooleanColumnChunkReader).ReadBatch(2, values, def, nil)
		if err != nil || n != 2 || k != 1 || def[0] != 0 || values[0] != want {
			t.Errorf("%s: %v present %v, want null and %v (%v)", name, values, def, want, err)
		}
	}
	texts, def := make([]parquet.ByteArray, 2), make([]int16, 2)
	if _, _, err := column("reasons").(*file.ByteArrayColumnChunkReader).ReadBatch(2, texts, def, nil); err != nil || def[0] != 0 || string(texts[0]) != "slow; hot" {
		t.Errorf("reasons %q %v %v", texts, def, err)
	}
	times := make([]int64, 2)
	if _, _, err := column("start").(*file.Int64ColumnChunkReader).ReadBatch(2, times, def, nil); err != nil || times[0] != 1773472500000 || def[1] != 0 {
		t.Errorf("start %v %v %v", times, def, err)
	}
	var again bytes.Buffer
	if err := r.WriteParquet(&again); err != nil || !bytes.Equal(b.Bytes(), again.Bytes()) {
		t.Error("the same table written twice has other bytes")
	}
	if err := (&Replay{}).WriteParquet(&again); err != nil {
		t.Errorf("a table of no runs: %v", err)
	}
}
