package data

import (
	"bytes"
	"context"
	"encoding/csv"
	"io"
	"math"
	"os"
	"path/filepath"
	"runtime"
	"strconv"
	"testing"
	"time"
)

// benchRows is the length of the logs that the benchmarks read.
const benchRows = 1_000_000

// dryerLog is a long recording of a heater: 10 rows a second, a drive that
// steps every minute, a temperature with two decimals that follows.
func dryerLog(n int) (t, u, y []float64) {
	t, u, y = make([]float64, n), make([]float64, n), make([]float64, n)
	temp := 24.0
	for i := range n {
		t[i] = float64(i) / 10
		u[i] = []float64{1.5, 3, 2.25, 4}[i/600%4]
		temp += (24 + 20*u[i] - temp) / 120
		y[i] = math.Round(100*(temp+0.3*math.Sin(float64(i)*0.7))) / 100
	}
	return t, u, y
}

func csvText(t, u, y []float64, stamp func(b []byte, t float64) []byte) []byte {
	b := []byte("time_s,drive_V,outlet_degC\n")
	for i := range t {
		b = stamp(b, t[i])
		b = append(b, ',')
		b = strconv.AppendFloat(b, u[i], 'f', -1, 64)
		b = append(b, ',')
		b = strconv.AppendFloat(b, y[i], 'f', -1, 64)
		b = append(b, '\n')
	}
	return b
}

func plainSeconds(b []byte, t float64) []byte { return strconv.AppendFloat(b, t, 'f', -1, 64) }

func rfc3339(b []byte, t float64) []byte {
	return time.Unix(1767607200, int64(math.Round(t*1e9))).UTC().AppendFormat(b, "2006-01-02T15:04:05.000Z")
}

func quotedStamp(b []byte, t float64) []byte {
	return append(rfc3339(append(b, '"'), t), '"')
}

// benchFile reads a file and reports rows a second and bytes allocated a row.
func benchFile(b *testing.B, path string, rows int) {
	b.ReportAllocs()
	for b.Loop() {
		runs, err := Read(context.Background(), path, Options{})
		if err != nil {
			b.Fatal(err)
		}
		if len(runs[0].T) != rows {
			b.Fatalf("%d rows, want %d", len(runs[0].T), rows)
		}
	}
	perOp := b.Elapsed().Seconds() / float64(b.N)
	b.ReportMetric(float64(rows)/perOp, "rows/s")
	b.ReportMetric(perOp/float64(rows)*1e9, "ns/row")
}

func BenchmarkReadCSV(b *testing.B) {
	t, u, y := dryerLog(benchRows)
	for _, c := range []struct {
		name  string
		stamp func([]byte, float64) []byte
	}{{"seconds", plainSeconds}, {"rfc3339", rfc3339}, {"quoted", quotedStamp}} {
		path := filepath.Join(b.TempDir(), c.name+".csv")
		if err := os.WriteFile(path, csvText(t, u, y, c.stamp), 0o600); err != nil {
			b.Fatal(err)
		}
		b.Run(c.name, func(b *testing.B) { benchFile(b, path, benchRows) })
	}
}

// BenchmarkReadSmall reads a log of a short test, as most logs are: what counts
// is finding out how it is written.
func BenchmarkReadSmall(b *testing.B) {
	t, u, y := dryerLog(1000)
	path := filepath.Join(b.TempDir(), "small.csv")
	if err := os.WriteFile(path, csvText(t, u, y, plainSeconds), 0o600); err != nil {
		b.Fatal(err)
	}
	benchFile(b, path, len(t))
}

// TestSmallLogTakesLittle bounds what reading a short log allocates: no buffer
// is larger than the file needs it.
func TestSmallLogTakesLittle(t *testing.T) {
	at, u, y := dryerLog(1000)
	text := csvText(at, u, y, plainSeconds)
	path := filepath.Join(t.TempDir(), "small.csv")
	if err := os.WriteFile(path, text, 0o600); err != nil {
		t.Fatal(err)
	}
	var before, after runtime.MemStats
	runtime.ReadMemStats(&before)
	if _, err := Read(context.Background(), path, Options{}); err != nil {
		t.Fatal(err)
	}
	runtime.ReadMemStats(&after)
	if took := after.TotalAlloc - before.TotalAlloc; took > 40*uint64(len(text)) {
		t.Errorf("%d bytes of text took %d bytes of memory", len(text), took)
	}
}

func BenchmarkReadParquet(b *testing.B) {
	t, u, y := dryerLog(benchRows)
	stamps := make([]int64, len(t))
	for i := range t {
		stamps[i] = 1767607200_000 + int64(math.Round(1000*t[i]))
	}
	var buf bytes.Buffer
	writeParquet(b, &buf, pqOptions{}, pqTimestampMillis("time", stamps), pqFloat64("drive_V", u), pqFloat64("outlet_degC", y))
	path := filepath.Join(b.TempDir(), "log.parquet")
	if err := os.WriteFile(path, buf.Bytes(), 0o600); err != nil {
		b.Fatal(err)
	}
	benchFile(b, path, benchRows)
}

// BenchmarkStandardLibrary reads the same text with encoding/csv and
// strconv.ParseFloat, for the ratio.
func BenchmarkStandardLibrary(b *testing.B) {
	t, u, y := dryerLog(benchRows)
	text := csvText(t, u, y, plainSeconds)
	b.ReportAllocs()
	for b.Loop() {
		r := csv.NewReader(bytes.NewReader(text))
		r.ReuseRecord = true
		if _, err := r.Read(); err != nil {
			b.Fatal(err)
		}
		var cols [3][]float64
		for {
			row, err := r.Read()
			if err == io.EOF {
				break
			}
			if err != nil {
				b.Fatal(err)
			}
			for i, cell := range row {
				v, err := strconv.ParseFloat(cell, 64)
				if err != nil {
					b.Fatal(err)
				}
				cols[i] = append(cols[i], v)
			}
		}
		if len(cols[2]) != benchRows {
			b.Fatalf("%d rows, want %d", len(cols[2]), benchRows)
		}
	}
	b.ReportMetric(b.Elapsed().Seconds()/float64(b.N)/benchRows*1e9, "ns/row")
}
