package data

import (
	"bytes"
	"context"
	"math"
	"math/big"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"
	"time"

	"github.com/apache/arrow/go/v17/parquet"
	"github.com/apache/arrow/go/v17/parquet/compress"
	"github.com/apache/arrow/go/v17/parquet/file"
	"github.com/apache/arrow/go/v17/parquet/schema"
)

// readBytes writes bytes to a file and reads it.
func readBytes(t testing.TB, name string, text []byte, o Options) ([]*Run, error) {
	t.Helper()
	path := filepath.Join(t.TempDir(), name)
	if err := os.WriteFile(path, text, 0o600); err != nil {
		t.Fatal(err)
	}
	return Read(context.Background(), path, o)
}

func mapped[T any](v []float64, f func(x float64) T) []T {
	out := make([]T, len(v))
	for i, x := range v {
		out[i] = f(x)
	}
	return out
}

const morning = 1767607200 // 2026-01-05T10:00:00Z, s

func ticks(perSecond float64) func(float64) int64 {
	return func(t float64) int64 { return int64(morning*perSecond) + int64(math.Round(t*perSecond)) }
}

// julian is a time stamp of old writers: nanoseconds of the day, and the day
// by its Julian number, of which 2440588 is 1970-01-01.
func julian(t float64) parquet.Int96 {
	ns := uint64((morning%86400)*1e9 + t*1e9)
	return parquet.NewInt96([3]uint32{uint32(ns), uint32(ns >> 32), 2440588 + morning/86400})
}

func fixedDecimal(scale float64) func(float64) parquet.FixedLenByteArray {
	return func(x float64) parquet.FixedLenByteArray {
		v := big.NewInt(int64(math.Round(x * scale)))
		if v.Sign() < 0 {
			v.Add(v, new(big.Int).Lsh(big.NewInt(1), 64))
		}
		return v.FillBytes(make([]byte, 8))
	}
}

// Every way in which Parquet holds a time or a number gives the same run.
func TestParquetTypes(t *testing.T) {
	i64 := func(name string, lt schema.LogicalType, v []int64) pqColumn {
		return pqOf[int64, *file.Int64ColumnChunkWriter](name, lt, parquet.Types.Int64, -1, v)
	}
	i32 := func(name string, lt schema.LogicalType, v []int32) pqColumn {
		return pqOf[int32, *file.Int32ColumnChunkWriter](name, lt, parquet.Types.Int32, -1, v)
	}
	text := func(name string, v []parquet.ByteArray) pqColumn {
		return pqOf[parquet.ByteArray, *file.ByteArrayColumnChunkWriter](name, schema.StringLogicalType{}, parquet.Types.ByteArray, -1, v)
	}
	seconds := pqFloat64("time_s", baseT)
	drive, outlet := pqFloat64("drive_V", baseU), pqFloat64("outlet_degC", baseY)
	stamp := func(adjusted bool, u schema.TimeUnitType) schema.LogicalType {
		return schema.NewTimestampLogicalType(adjusted, u)
	}
	const at = "2026-01-05T10:00:00Z"
	for _, c := range []struct {
		name  string
		cols  []pqColumn
		start string
		notes []string
	}{
		{name: "float64 seconds", cols: []pqColumn{seconds, drive, outlet}},
		{name: "timestamp ms", cols: []pqColumn{i64("time", stamp(true, schema.TimeUnitMillis), mapped(baseT, ticks(1e3))), drive, outlet}, start: at},
		{name: "timestamp us", cols: []pqColumn{i64("time", stamp(true, schema.TimeUnitMicros), mapped(baseT, ticks(1e6))), drive, outlet}, start: at},
		{name: "timestamp ns local", cols: []pqColumn{i64("time", stamp(false, schema.TimeUnitNanos), mapped(baseT, ticks(1e9))), drive, outlet}, start: at, notes: []string{local}},
		{name: "int96", cols: []pqColumn{pqOf[parquet.Int96, *file.Int96ColumnChunkWriter]("time", nil, parquet.Types.Int96, -1, mapped(baseT, julian)), drive, outlet}, start: at},
		{name: "date and time of day", cols: []pqColumn{
			i32("day", schema.DateLogicalType{}, mapped(baseT, func(float64) int32 { return morning / 86400 })),
			i64("clock", schema.NewTimeLogicalType(false, schema.TimeUnitMicros), mapped(baseT, func(x float64) int64 { return (morning%86400)*1e6 + int64(x*1e6) })),
			drive, outlet}, start: at, notes: []string{local}},
		{name: "unix ms as int64", cols: []pqColumn{i64("timestamp", nil, mapped(baseT, ticks(1e3))), drive, outlet}, start: at},
		{name: "unix s as float64", cols: []pqColumn{pqFloat64("timestamp", mapped(baseT, func(x float64) float64 { return morning + x })), drive, outlet}, start: at},
		{name: "stamps as text", cols: []pqColumn{text("time", mapped(baseT, func(x float64) parquet.ByteArray {
			return parquet.ByteArray(time.Unix(0, ticks(1e9)(x)).UTC().Format(time.RFC3339Nano))
		})), drive, outlet}, start: at},
		{name: "float32", cols: []pqColumn{seconds,
			pqOf[float32, *file.Float32ColumnChunkWriter]("drive_V", nil, parquet.Types.Float, -1, mapped(baseU, func(x float64) float32 { return float32(x) })),
			pqOf[float32, *file.Float32ColumnChunkWriter]("outlet_degC", nil, parquet.Types.Float, -1, mapped(baseY, func(x float64) float32 { return float32(x) }))}},
		{name: "decimals", cols: []pqColumn{seconds,
			i32("drive_V", schema.NewDecimalLogicalType(6, 1), mapped(baseU, func(x float64) int32 { return int32(math.Round(x * 10)) })),
			pqOf[parquet.FixedLenByteArray, *file.FixedLenByteArrayColumnChunkWriter]("outlet_degC", schema.NewDecimalLogicalType(10, 2), parquet.Types.FixedLenByteArray, 8, mapped(baseY, fixedDecimal(100)))}},
		{name: "numbers as text", cols: []pqColumn{seconds, drive, text("outlet_degC", mapped(baseY, func(x float64) parquet.ByteArray {
			return parquet.ByteArray(string(appendShort(x)))
		}))}},
		{name: "integers of a millisecond clock", cols: []pqColumn{
			i32("time_ms", schema.NewIntLogicalType(32, false), mapped(baseT, func(x float64) int32 { return int32(x * 1000) })), drive, outlet}},
	} {
		t.Run(c.name, func(t *testing.T) {
			var buf bytes.Buffer
			writeParquet(t, &buf, pqOptions{rowGroup: 3}, c.cols...)
			runs, err := readBytes(t, "log.parquet", buf.Bytes(), Options{})
			if err != nil {
				t.Fatal(err)
			}
			q := quirk{start: c.start, notes: c.notes}
			q.check(t, runs[0])
		})
	}
}

// A switched drive is the same run as truth values, as text and as CSV.
func TestParquetSwitched(t *testing.T) {
	for _, c := range []struct {
		name   string
		heater pqColumn
	}{
		{name: "truth values", heater: pqOf[bool, *file.BooleanColumnChunkWriter]("heater", nil, parquet.Types.Boolean, -1, mapped(baseU, func(x float64) bool { return x > 0 }))},
		{name: "text", heater: pqOf[parquet.ByteArray, *file.ByteArrayColumnChunkWriter]("heater", schema.StringLogicalType{}, parquet.Types.ByteArray, -1, mapped(baseU, func(x float64) parquet.ByteArray {
			return parquet.ByteArray(map[bool]string{true: "On", false: "Off"}[x > 0])
		}))},
	} {
		t.Run(c.name, func(t *testing.T) {
			var buf bytes.Buffer
			writeParquet(t, &buf, pqOptions{rowGroup: 3}, pqFloat64("time_s", baseT), c.heater, pqFloat64("outlet_degC", baseY))
			runs, err := readBytes(t, "log.parquet", buf.Bytes(), Options{})
			if err != nil {
				t.Fatal(err)
			}
			q := quirk{u: switchedU, input: "%", notes: []string{"input-switched"}}
			q.check(t, runs[0])
		})
	}
}

// A word among numbers stored as text is refused as in a text file.
func TestParquetWordAmongNumbers(t *testing.T) {
	drive := mapped(baseU, func(x float64) parquet.ByteArray { return parquet.ByteArray(string(appendShort(x))) })
	drive[6] = parquet.ByteArray("OFF")
	var buf bytes.Buffer
	writeParquet(t, &buf, pqOptions{}, pqFloat64("time_s", baseT),
		pqOf[parquet.ByteArray, *file.ByteArrayColumnChunkWriter]("drive_V", schema.StringLogicalType{}, parquet.Types.ByteArray, -1, drive), pqFloat64("outlet_degC", baseY))
	_, err := readBytes(t, "log.parquet", buf.Bytes(), Options{})
	if err == nil || !strings.Contains(err.Error(), `log.parquet:7: the input is "OFF" among numbers`) {
		t.Errorf("error %v, want one that names row 7", err)
	}
}

func appendShort(x float64) []byte { return plainSeconds(nil, x) }

// What is not there in a Parquet file is missing, never zero: nulls, NaN.
// Nested columns are named and skipped.
func TestParquetMissing(t *testing.T) {
	outlet := pqWith[float64, *file.Float64ColumnChunkWriter]("outlet_degC", nil, parquet.Types.Double, -1,
		with(baseY, 4, nan), []bool{true, false, true, true, true, false, true, true})
	drive := pqWith[float64, *file.Float64ColumnChunkWriter]("drive_V", nil, parquet.Types.Double, -1,
		baseU, []bool{true, true, true, true, false, true, true, true})
	list := schema.MustPrimitive(schema.NewPrimitiveNode("spectrum", parquet.Repetitions.Repeated, parquet.Types.Double, -1, -1))
	nested := pqColumn{node: list, rows: 8, write: func(w file.ColumnChunkWriter, lo, hi int) error {
		n := hi - lo
		_, err := w.(*file.Float64ColumnChunkWriter).WriteBatch(make([]float64, n), slices.Repeat([]int16{1}, n), make([]int16, n))
		return err
	}}
	var buf bytes.Buffer
	writeParquet(t, &buf, pqOptions{}, nested, pqFloat64("time_s", baseT), drive, outlet)
	runs, err := readBytes(t, "log.parquet", buf.Bytes(), Options{})
	if err != nil {
		t.Fatal(err)
	}
	q := quirk{y: with(baseY, 1, nan, 4, nan, 5, nan), missing: map[string]int{"blank": 3, "NAN": 1}, notes: []string{"columns-skipped", "input-held"}}
	q.check(t, runs[0])
	if note := runs[0].Quality.Notes[0].Text; !strings.Contains(note, "spectrum") {
		t.Errorf("note %q does not name the column skipped", note)
	}
}

// Long form and several runs work in Parquet as in text.
func TestParquetLong(t *testing.T) {
	text := func(name string, v []parquet.ByteArray) pqColumn {
		return pqOf[parquet.ByteArray, *file.ByteArrayColumnChunkWriter](name, schema.StringLogicalType{}, parquet.Types.ByteArray, -1, v)
	}
	tags := append(mapped(baseT, func(float64) parquet.ByteArray { return parquet.ByteArray("EH-3 drive (V)") }),
		mapped(baseT, func(float64) parquet.ByteArray { return parquet.ByteArray("TT-7 outlet (degC)") })...)
	times := slices.Concat(baseT, baseT)
	var buf bytes.Buffer
	writeParquet(t, &buf, pqOptions{rowGroup: 5}, pqFloat64("time_s", times), text("tag", tags), pqFloat64("value", slices.Concat(baseU, baseY)))
	runs, err := readBytes(t, "log.parquet", buf.Bytes(), Options{})
	if err != nil {
		t.Fatal(err)
	}
	q := quirk{notes: []string{"long-form"}}
	q.check(t, runs[0])

	names := append(mapped(baseT, func(float64) parquet.ByteArray { return parquet.ByteArray("A") }),
		mapped(baseT, func(float64) parquet.ByteArray { return parquet.ByteArray("B") })...)
	buf.Reset()
	writeParquet(t, &buf, pqOptions{rowGroup: 5}, text("batch", names), pqFloat64("time_s", times),
		pqFloat64("drive_V", slices.Concat(baseU, baseU)), pqFloat64("outlet_degC", slices.Concat(baseY, baseY)))
	runs, err = readBytes(t, "log.parquet", buf.Bytes(), Options{RunCol: "batch"})
	if err != nil || len(runs) != 2 {
		t.Fatalf("%d runs, error %v, want 2 runs", len(runs), err)
	}
	for k, r := range runs {
		(&quirk{}).check(t, r)
		if r.Source.Name != []string{"A", "B"}[k] {
			t.Errorf("run %d is called %q", k, r.Source.Name)
		}
	}
}

// A wide file is read through its names; only the columns used are unpacked.
func TestParquetWide(t *testing.T) {
	cols := []pqColumn{pqFloat64("time_s", baseT), pqFloat64("drive_V", baseU), pqFloat64("outlet_degC", baseY)}
	for i := range 500 {
		cols = append(cols, pqFloat64("X"+string(appendShort(float64(i))), baseT))
	}
	var buf bytes.Buffer
	writeParquet(t, &buf, pqOptions{}, cols...)
	runs, err := readBytes(t, "log.parquet", buf.Bytes(), Options{})
	if err != nil {
		t.Fatal(err)
	}
	(&quirk{}).check(t, runs[0])
}

// damageLog is a Parquet log large enough to hold several pages and groups.
func damageLog(t testing.TB, codec compress.Compression) []byte {
	ts, u, y := dryerLog(3000)
	var buf bytes.Buffer
	writeParquet(t, &buf, pqOptions{codec: codec, rowGroup: 1000}, pqFloat64("time_s", ts), pqFloat64("drive_V", u), pqFloat64("outlet_degC", y))
	return buf.Bytes()
}

// A damaged Parquet file is an error or still has all its rows: a truncated
// one always is an error. Nothing panics.
func TestParquetDamage(t *testing.T) {
	for _, codec := range []compress.Compression{compress.Codecs.Snappy, compress.Codecs.Gzip, compress.Codecs.Zstd} {
		whole := damageLog(t, codec)
		clean, err := readBytes(t, "log.parquet", whole, Options{})
		if err != nil {
			t.Fatal(err)
		}
		path := filepath.Join(t.TempDir(), "damaged.parquet")
		try := func(what string, at int, text []byte) (rows int, err error) {
			if err := os.WriteFile(path, text, 0o600); err != nil {
				t.Fatal(err)
			}
			runs, err := Read(context.Background(), path, Options{TimeCol: "time_s", InputCol: "drive_V", TempCol: "outlet_degC"})
			if err != nil {
				return 0, err
			}
			return runs[0].Quality.RowsRead, nil
		}
		for k := 1; k < 8; k++ {
			if _, err := try("cut", k, whole[:len(whole)*k/8]); err == nil {
				t.Errorf("%s: cut at %d eighths was read", codec, k)
			}
		}
		silent, caught := 0, 0
		check := func(what string, at int, text []byte) {
			rows, err := try(what, at, text)
			switch {
			case err != nil:
				caught++
			case rows != len(clean[0].T):
				t.Errorf("%s: %s at %d: %d rows of %d, no error", codec, what, at, rows, len(clean[0].T))
			default:
				silent++
			}
		}
		step := 331
		if os.Getenv("LAGWRIGHT_LONG") != "" {
			step = 7
		}
		for at := 4; at < len(whole); at += step {
			flipped := slices.Clone(whole)
			flipped[at] ^= 1 << (at % 8)
			check("flipped bit", at, flipped)
		}
		for at := 4; at+64 < len(whole); at += 1501 {
			zeroed := slices.Clone(whole)
			clear(zeroed[at : at+64])
			check("zeroed block", at, zeroed)
			check("block cut out", at, slices.Delete(slices.Clone(whole), at, at+100))
		}
		// Pages packed with gzip and zstd carry check sums: what stays
		// unnoticed lies outside the pages, in names and statistics.
		if codec != compress.Codecs.Snappy && silent*5 > caught {
			t.Errorf("%s: %d changes unnoticed, %d caught: check sums are not looked at", codec, silent, caught)
		}
		t.Logf("%s: %d bytes, %d changes caught, %d left all rows", codec, len(whole), caught, silent)
	}
}
