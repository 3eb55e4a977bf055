package data

import (
	"errors"
	"fmt"
	"math"
	"math/big"
	"strconv"
	"time"

	"github.com/apache/arrow/go/v17/arrow/float16"
	"github.com/apache/arrow/go/v17/parquet"
	"github.com/apache/arrow/go/v17/parquet/file"
	"github.com/apache/arrow/go/v17/parquet/schema"
)

// parquetColumn is a flat column of a Parquet file, read in batches.
type parquetColumn struct {
	name  string
	index int // in the schema
	class class
	kind  parquetKind
	unit  int64 // ns in one unit of a time
	utc   bool  // the stamps are UTC, not local time of an unknown place
	scale int   // of a decimal
	wide  int   // bytes of a fixed-length value
	truth bool  // values are true and false

	role   role
	isTime bool // the column is the clock

	switched bool // the values are those of a switched input
	clock    *clock
	format   numberFormat

	reader file.ColumnChunkReader
	maxDef int16
	def    []int16
	there  []bool // a value is there
	floats []float64
	ints   []int64
	texts  [][]byte
	raw    struct {
		i32 []int32
		i64 []int64
		i96 []parquet.Int96
		f32 []float32
		f64 []float64
		b   []bool
		by  []parquet.ByteArray
		fix []parquet.FixedLenByteArray
	}
}

// parquetKind is what the values of a column become.
type parquetKind int

const (
	asFloat   parquetKind = iota // floats
	asInteger                    // ints, a plain number
	asInstant                    // ints, ns since 1970-01-01
	asDate                       // ints, ns since 1970-01-01, of midnight
	asTime                       // ints, ns since midnight
	asText                       // texts
)

// newParquetColumn tells what a column holds; nil when it is nested or holds
// neither numbers nor times nor text.
func newParquetColumn(d *schema.Column, index int) *parquetColumn {
	c := &parquetColumn{name: d.Name(), index: index, class: numbers, maxDef: d.MaxDefinitionLevel()}
	if d.MaxRepetitionLevel() > 0 || len(d.ColumnPath()) > 1 {
		return nil
	}
	switch lt := d.LogicalType().(type) {
	case *schema.TimestampLogicalType:
		c.class, c.kind, c.unit, c.utc = stamps, asInstant, unitOf(lt.TimeUnit()), lt.IsAdjustedToUTC()
		return only(c, d, parquet.Types.Int64)
	case schema.DateLogicalType:
		c.class, c.kind, c.unit = stamps, asDate, int64(nsDay)
		return only(c, d, parquet.Types.Int32)
	case *schema.TimeLogicalType:
		c.class, c.kind, c.unit = stamps, asTime, unitOf(lt.TimeUnit())
		return only(c, d, parquet.Types.Int32, parquet.Types.Int64)
	case *schema.DecimalLogicalType:
		c.scale, c.wide = int(lt.Scale()), d.TypeLength()
		return only(c, d, parquet.Types.Int32, parquet.Types.Int64, parquet.Types.ByteArray, parquet.Types.FixedLenByteArray)
	case *schema.IntLogicalType:
		c.kind = asInteger
		if !lt.IsSigned() && lt.BitWidth() == 64 {
			c.kind = asFloat
		}
		return only(c, d, parquet.Types.Int32, parquet.Types.Int64)
	case schema.StringLogicalType, schema.EnumLogicalType, schema.JSONLogicalType:
		c.class, c.kind = texts, asText
		return only(c, d, parquet.Types.ByteArray)
	case schema.Float16LogicalType:
		c.wide = 2
		return only(c, d, parquet.Types.FixedLenByteArray)
	case schema.IntervalLogicalType, schema.UUIDLogicalType, schema.BSONLogicalType, schema.NullLogicalType:
		return nil
	}
	switch d.PhysicalType() {
	case parquet.Types.Int32, parquet.Types.Int64:
		c.kind = asInteger
	case parquet.Types.Int96:
		c.class, c.kind, c.utc = stamps, asInstant, true
	case parquet.Types.Boolean:
		c.truth = true
	case parquet.Types.Float, parquet.Types.Double:
	case parquet.Types.ByteArray:
		c.class, c.kind = texts, asText
	default:
		return nil
	}
	return c
}

// only returns c when the column is stored as one of the types, else nil.
func only(c *parquetColumn, d *schema.Column, types ...parquet.Type) *parquetColumn {
	for _, t := range types {
		if d.PhysicalType() == t {
			return c
		}
	}
	return nil
}

func unitOf(u schema.TimeUnitType) int64 {
	switch u {
	case schema.TimeUnitMillis:
		return 1e6
	case schema.TimeUnitMicros:
		return 1e3
	}
	return 1
}

// open starts reading the column's part of a row group.
func (c *parquetColumn) open(g *file.RowGroupReader) (err error) {
	c.reader, err = g.Column(c.index)
	return err
}

// fill reads the next n values.
func (c *parquetColumn) fill(n int) error {
	c.def, c.there = sized(c.def, n), sized(c.there, n)
	switch c.kind {
	case asFloat:
		c.floats = sized(c.floats, n)
	case asText:
		c.texts = sized(c.texts, n)
	default:
		c.ints = sized(c.ints, n)
	}
	switch r := c.reader.(type) {
	case *file.Float64ColumnChunkReader:
		c.raw.f64 = sized(c.raw.f64, n)
		return batches(c, n, r, c.raw.f64, func(i int, v float64) { c.floats[i] = v })
	case *file.Float32ColumnChunkReader:
		c.raw.f32 = sized(c.raw.f32, n)
		return batches(c, n, r, c.raw.f32, func(i int, v float32) { c.floats[i] = shortest32(v) })
	case *file.Int64ColumnChunkReader:
		c.raw.i64 = sized(c.raw.i64, n)
		return batches(c, n, r, c.raw.i64, c.putInt64)
	case *file.Int32ColumnChunkReader:
		c.raw.i32 = sized(c.raw.i32, n)
		unsigned := isUnsigned(r.Descriptor())
		return batches(c, n, r, c.raw.i32, func(i int, v int32) {
			if unsigned {
				c.putInt64(i, int64(uint32(v)))
				return
			}
			c.putInt64(i, int64(v))
		})
	case *file.Int96ColumnChunkReader:
		c.raw.i96 = sized(c.raw.i96, n)
		return batches(c, n, r, c.raw.i96, func(i int, v parquet.Int96) { c.ints[i] = v.ToTime().UnixNano() })
	case *file.BooleanColumnChunkReader:
		c.raw.b = sized(c.raw.b, n)
		return batches(c, n, r, c.raw.b, func(i int, v bool) {
			c.floats[i] = 0
			if v {
				c.floats[i] = 1
			}
		})
	case *file.ByteArrayColumnChunkReader:
		c.raw.by = sized(c.raw.by, n)
		return batches(c, n, r, c.raw.by, func(i int, v parquet.ByteArray) {
			if c.kind == asText {
				c.texts[i] = append(c.texts[i][:0], v...)
				return
			}
			c.floats[i] = decimalValue(v, c.scale)
		})
	case *file.FixedLenByteArrayColumnChunkReader:
		c.raw.fix = sized(c.raw.fix, n)
		return batches(c, n, r, c.raw.fix, func(i int, v parquet.FixedLenByteArray) {
			if c.wide == 2 && c.scale == 0 && isHalf(r.Descriptor()) {
				c.floats[i] = float64(float16.FromLEBytes(v).Float32())
				return
			}
			c.floats[i] = decimalValue(v, c.scale)
		})
	}
	return errors.New("is stored in a way that cannot be read")
}

func sized[T any](v []T, n int) []T {
	if cap(v) < n {
		return make([]T, n)
	}
	return v[:n]
}

func isUnsigned(d *schema.Column) bool {
	lt, ok := d.LogicalType().(*schema.IntLogicalType)
	return ok && !lt.IsSigned()
}

func isHalf(d *schema.Column) bool {
	_, ok := d.LogicalType().(schema.Float16LogicalType)
	return ok
}

// shortest32 widens a float32 through its shortest decimal, so that 24.1
// logged as a float32 is the same number as 24.1 in a text file.
func shortest32(v float32) float64 {
	var b [32]byte
	text := strconv.AppendFloat(b[:0], float64(v), 'g', -1, 32)
	if d, n, ok := scanDecimal(text, '.'); ok && n == len(text) {
		if w, ok := d.float(text, '.'); ok {
			return w
		}
	}
	return float64(v)
}

func (c *parquetColumn) putInt64(i int, v int64) {
	switch c.kind {
	case asFloat: // decimal, or unsigned of 64 bits
		switch {
		case c.scale > 0:
			c.floats[i] = decimalOf(big.NewInt(v), c.scale)
		case isUnsigned(c.reader.Descriptor()):
			c.floats[i] = float64(uint64(v))
		default:
			c.floats[i] = float64(v)
		}
	case asInstant, asDate, asTime:
		c.ints[i] = v * c.unit
		if v != 0 && (c.ints[i]/c.unit != v || c.ints[i] == noTime) {
			c.there[i] = false
		}
	default:
		c.ints[i] = v
	}
}

// decimalValue is an unscaled big-endian two's complement integer over 10^scale.
func decimalValue(b []byte, scale int) float64 {
	if len(b) == 0 || len(b) > 64 {
		return math.NaN()
	}
	v := new(big.Int).SetBytes(b)
	if b[0]&0x80 != 0 {
		v.Sub(v, new(big.Int).Lsh(big.NewInt(1), uint(8*len(b))))
	}
	return decimalOf(v, scale)
}

func decimalOf(v *big.Int, scale int) float64 {
	f, err := strconv.ParseFloat(v.String()+"e-"+strconv.Itoa(scale), 64)
	if err != nil {
		return math.NaN()
	}
	return f
}

// batchReader is what the readers of all physical types have in common.
type batchReader[T any] interface {
	ReadBatch(n int64, values []T, def, rep []int16) (total int64, read int, err error)
	HasNext() bool
	Err() error
}

var errFewValues = errors.New("holds fewer values than the footer says")

// batches reads n values, page by page, and puts each in its row.
func batches[T any](c *parquetColumn, n int, r batchReader[T], buf []T, put func(i int, v T)) error {
	for row := 0; row < n; {
		if !r.HasNext() {
			if err := r.Err(); err != nil {
				return err
			}
			return fmt.Errorf("%w: %d rows are missing", errFewValues, n-row)
		}
		total, read, err := r.ReadBatch(int64(n-row), buf, c.def, nil)
		if err != nil {
			return err
		}
		if total <= 0 || int(total) > n-row || read > int(total) {
			return errFewValues
		}
		next := 0
		for k := range int(total) {
			here := c.maxDef == 0 || c.def[k] >= c.maxDef
			c.there[row+k] = here
			if here {
				if next >= read {
					return errFewValues
				}
				put(row+k, buf[next])
				next++
			}
		}
		row += int(total)
	}
	return nil
}

// number is the value of row k for a column of numbers; NaN when missing.
func (c *parquetColumn) number(k int) float64 {
	if !c.there[k] {
		return math.NaN()
	}
	v := math.NaN()
	switch c.kind {
	case asFloat:
		v = c.floats[k]
	case asInteger:
		v = float64(c.ints[k])
	case asText:
		if x, ok := c.format.parse(c.texts[k]); ok {
			v = x
		}
	}
	switch {
	case c.switched && c.truth:
		v *= full
	case c.switched:
		v = math.NaN()
		if x, ok := switchOf(c.texts[k]); ok {
			v = x
		}
	}
	if math.IsInf(v, 0) {
		return math.NaN()
	}
	return v
}

// missing names the kind of a value that is none.
func (c *parquetColumn) missing(k int) string {
	switch {
	case !c.there[k]:
		return "blank"
	case c.kind == asText:
		kind, _ := missingKind(c.texts[k])
		return kind
	case c.kind == asFloat && math.IsInf(c.floats[k], 0):
		return "INF"
	}
	return "NAN"
}

// stamp is the value of row k for the clock.
func (c *parquetColumn) stamp(k int) (ns, alt int64, ok bool) {
	if !c.there[k] {
		return 0, noTime, false
	}
	switch c.kind {
	case asInstant, asDate, asTime:
		return c.ints[k], noTime, true
	case asInteger:
		if c.clock.kind > dayNumber {
			return c.clock.parse(c.cell(k), '.')
		}
		d := decimal{mant: uint64(c.ints[k])}
		if c.ints[k] < 0 {
			d = decimal{mant: uint64(-c.ints[k]), neg: true}
		}
		ns, ok = c.clock.ofDecimal(d, nil, '.')
		return ns, noTime, ok
	case asFloat:
		if c.clock.kind > dayNumber {
			return 0, noTime, false
		}
		ns, ok = c.clock.ofFloat(c.floats[k])
		return ns, noTime, ok
	}
	return c.clock.parse(c.texts[k], '.')
}

// cell writes the value of row k as a text file would hold it.
func (c *parquetColumn) cell(k int) []byte {
	if !c.there[k] {
		return nil
	}
	switch c.kind {
	case asText:
		return append([]byte(nil), c.texts[k]...)
	case asInteger:
		return strconv.AppendInt(nil, c.ints[k], 10)
	case asInstant:
		layout := "2006-01-02T15:04:05.999999999"
		if c.utc {
			layout += "Z"
		}
		return time.Unix(0, c.ints[k]).UTC().AppendFormat(nil, layout)
	case asDate:
		return time.Unix(0, c.ints[k]).UTC().AppendFormat(nil, "2006-01-02")
	case asTime:
		return time.Unix(0, c.ints[k]).UTC().AppendFormat(nil, "15:04:05.999999999")
	}
	if math.IsNaN(c.floats[k]) {
		return []byte("NaN")
	}
	return strconv.AppendFloat(nil, c.floats[k], 'g', -1, 64)
}
