package data

import (
	"bytes"
	"math"
	"strings"
	"testing"
	"time"

	"github.com/apache/arrow/go/v17/parquet"
	"github.com/apache/arrow/go/v17/parquet/compress"
	"github.com/apache/arrow/go/v17/parquet/file"
	"github.com/apache/arrow/go/v17/parquet/schema"
)

// parquetNumbers are ways to hold a column of numbers; NaN is a null.
var parquetNumbers = map[string]func(name string, v []float64) pqColumn{
	"float64": func(name string, v []float64) pqColumn {
		return pqWith[float64, *file.Float64ColumnChunkWriter](name, nil, parquet.Types.Double, -1, v, present(v))
	},
	"float32": func(name string, v []float64) pqColumn {
		return pqWith[float32, *file.Float32ColumnChunkWriter](name, nil, parquet.Types.Float, -1, mapped(v, func(x float64) float32 { return float32(x) }), present(v))
	},
	"decimal": func(name string, v []float64) pqColumn {
		return pqWith[int64, *file.Int64ColumnChunkWriter](name, schema.NewDecimalLogicalType(12, 2), parquet.Types.Int64, -1, mapped(v, func(x float64) int64 { return int64(math.Round(100 * x)) }), present(v))
	},
	"fixed decimal": func(name string, v []float64) pqColumn {
		return pqWith[parquet.FixedLenByteArray, *file.FixedLenByteArrayColumnChunkWriter](name, schema.NewDecimalLogicalType(10, 2), parquet.Types.FixedLenByteArray, 8, mapped(v, fixedDecimal(100)), present(v))
	},
	"text": func(name string, v []float64) pqColumn {
		return pqOf[parquet.ByteArray, *file.ByteArrayColumnChunkWriter](name, schema.StringLogicalType{}, parquet.Types.ByteArray, -1, mapped(v, func(x float64) parquet.ByteArray {
			if x != x {
				return parquet.ByteArray("Bad")
			}
			return parquet.ByteArray(string(appendShort(x)))
		}))
	},
}

func present(v []float64) []bool {
	there := make([]bool, len(v))
	for i, x := range v {
		there[i] = x == x
	}
	return there
}

// parquetClocks are ways to hold a clock.
var parquetClocks = map[string]func(t []float64) []pqColumn{
	"float64": func(t []float64) []pqColumn { return []pqColumn{pqFloat64("time_s", t)} },
	"int32 ms": func(t []float64) []pqColumn {
		return []pqColumn{pqOf[int32, *file.Int32ColumnChunkWriter]("time_ms", nil, parquet.Types.Int32, -1, mapped(t, func(x float64) int32 { return int32(math.Round(1000 * x)) }))}
	},
	"unix us": func(t []float64) []pqColumn {
		return []pqColumn{pqOf[int64, *file.Int64ColumnChunkWriter]("timestamp", nil, parquet.Types.Int64, -1, mapped(t, ticks(1e6)))}
	},
	"timestamp ns": func(t []float64) []pqColumn {
		return []pqColumn{pqOf[int64, *file.Int64ColumnChunkWriter]("time", schema.NewTimestampLogicalType(false, schema.TimeUnitNanos), parquet.Types.Int64, -1, mapped(t, ticks(1e9)))}
	},
	"int96": func(t []float64) []pqColumn {
		return []pqColumn{pqOf[parquet.Int96, *file.Int96ColumnChunkWriter]("time", nil, parquet.Types.Int96, -1, mapped(t, julian))}
	},
	"compact": func(t []float64) []pqColumn {
		return []pqColumn{pqOf[int64, *file.Int64ColumnChunkWriter]("time", nil, parquet.Types.Int64, -1, mapped(t, func(x float64) int64 {
			at := time.Unix(morning, int64(20e9*x)).UTC()
			return int64(at.Year())*1e10 + int64(at.Month())*1e8 + int64(at.Day())*1e6 + int64(at.Hour())*1e4 + int64(at.Minute())*100 + int64(at.Second())
		}))}
	},
	"text": func(t []float64) []pqColumn {
		return []pqColumn{pqText("time", mapped(t, func(x float64) string { return time.Unix(0, ticks(1e9)(x)).UTC().Format("02.01.2006 15:04:05.000") }))}
	},
	"two of text": func(t []float64) []pqColumn {
		at := func(x float64) time.Time { return time.Unix(0, ticks(1e9)(x)).UTC() }
		return []pqColumn{pqText("date", mapped(t, func(x float64) string { return at(x).Format("2006-01-02") })),
			pqText("time", mapped(t, func(x float64) string { return at(x).Format("03:04:05.000 PM") }))}
	},
}

func pqText(name string, v []string) pqColumn {
	var b []parquet.ByteArray
	for _, s := range v {
		b = append(b, parquet.ByteArray(s))
	}
	return pqOf[parquet.ByteArray, *file.ByteArrayColumnChunkWriter](name, schema.StringLogicalType{}, parquet.Types.ByteArray, -1, b)
}

// Ways to hold numbers and clocks in Parquet, drawn at random side by side,
// give the values that were written.
func TestCombinedParquet(t *testing.T) {
	for seed := range uint64(60) {
		m := newMess(t, 5*seed)
		m.how = nil
		for i, x := range m.y { // as readings are: to the hundredth
			m.y[i] = math.Round(100*x) / 100
		}
		for i := range m.u {
			m.u[i] = []float64{0, 2.5, 1.25}[i*3/len(m.u)]
		}
		scale := 1.0
		clock := pick(m, "clock", parquetClocks)
		if strings.HasSuffix(m.how[0], "compact") {
			scale = 20
		}
		cols := append(clock(m.t), pick(m, "input", parquetNumbers)("drive_V", m.u), pick(m, "temperature", parquetNumbers)("outlet_degC", m.y),
			pick(m, "setpoint", parquetNumbers)("setpoint_degC", m.sp))
		o := pqOptions{rowGroup: []int{3, 8, 1000}[m.rng.IntN(3)], plain: m.rng.IntN(2) == 0,
			codec: pick(m, "packed", map[string]compress.Compression{"snappy": compress.Codecs.Snappy, "gzip": compress.Codecs.Gzip, "zstd": compress.Codecs.Zstd, "brotli": compress.Codecs.Brotli})}
		m.rng.Shuffle(len(cols), func(i, j int) { cols[i], cols[j] = cols[j], cols[i] })
		var buf bytes.Buffer
		writeParquet(t, &buf, o, cols...)
		for i := range m.t {
			m.t[i] *= scale
		}
		m.input = "V"
		m.check(t, seed, &buf)
	}
}
