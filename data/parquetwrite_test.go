package data

import (
	"io"
	"testing"

	"github.com/apache/arrow/go/v17/parquet"
	"github.com/apache/arrow/go/v17/parquet/compress"
	"github.com/apache/arrow/go/v17/parquet/file"
	"github.com/apache/arrow/go/v17/parquet/schema"
)

// pqColumn is a column that a test writes.
type pqColumn struct {
	node  schema.Node
	write func(w file.ColumnChunkWriter, lo, hi int) error
	rows  int
}

// pqOptions says how a test file is written; zero is snappy, one row group.
type pqOptions struct {
	codec    compress.Compression
	rowGroup int
	plain    bool // no dictionaries
}

func writeParquet(t testing.TB, w io.Writer, o pqOptions, cols ...pqColumn) {
	t.Helper()
	var fields schema.FieldList
	for _, c := range cols {
		fields = append(fields, c.node)
	}
	root, err := schema.NewGroupNode("log", parquet.Repetitions.Required, fields, -1)
	if err != nil {
		t.Fatal(err)
	}
	if o.codec == 0 {
		o.codec = compress.Codecs.Snappy
	}
	props := parquet.NewWriterProperties(parquet.WithCompression(o.codec), parquet.WithDictionaryDefault(!o.plain))
	f := file.NewParquetWriter(w, root, file.WithWriterProps(props))
	rows := cols[0].rows
	step := o.rowGroup
	if step == 0 {
		step = max(rows, 1)
	}
	for lo := 0; lo < rows; lo += step {
		g := f.AppendRowGroup()
		for _, c := range cols {
			cw, err := g.NextColumn()
			if err != nil {
				t.Fatal(err)
			}
			if err := c.write(cw, lo, min(lo+step, rows)); err != nil {
				t.Fatal(err)
			}
			if err := cw.Close(); err != nil {
				t.Fatal(err)
			}
		}
		if err := g.Close(); err != nil {
			t.Fatal(err)
		}
	}
	if err := f.Close(); err != nil {
		t.Fatal(err)
	}
}

// chunkWriter is what the writers of all physical types have in common.
type chunkWriter[T any] interface {
	WriteBatch(values []T, def, rep []int16) (int64, error)
}

func pqOf[T any, W chunkWriter[T]](name string, lt schema.LogicalType, typ parquet.Type, width int, values []T) pqColumn {
	return pqWith[T, W](name, lt, typ, width, values, nil)
}

// pqWith writes an optional column when there is given: there[i] says whether
// row i has a value; values holds one for every row.
func pqWith[T any, W chunkWriter[T]](name string, lt schema.LogicalType, typ parquet.Type, width int, values []T, there []bool) pqColumn {
	rep := parquet.Repetitions.Required
	if there != nil {
		rep = parquet.Repetitions.Optional
	}
	if lt == nil {
		lt = schema.NoLogicalType{}
	}
	node := schema.MustPrimitive(schema.NewPrimitiveNodeLogical(name, rep, lt, typ, width, -1))
	return pqColumn{node: node, rows: len(values), write: func(cw file.ColumnChunkWriter, lo, hi int) error {
		if there == nil {
			_, err := cw.(W).WriteBatch(values[lo:hi], nil, nil)
			return err
		}
		var present []T
		var def []int16
		for i := lo; i < hi; i++ {
			if there[i] {
				present = append(present, values[i])
				def = append(def, 1)
			} else {
				def = append(def, 0)
			}
		}
		_, err := cw.(W).WriteBatch(present, def, nil)
		return err
	}}
}

func pqFloat64(name string, v []float64) pqColumn {
	return pqOf[float64, *file.Float64ColumnChunkWriter](name, nil, parquet.Types.Double, -1, v)
}

func pqTimestampMillis(name string, v []int64) pqColumn {
	return pqOf[int64, *file.Int64ColumnChunkWriter](name, schema.NewTimestampLogicalType(true, schema.TimeUnitMillis), parquet.Types.Int64, -1, v)
}
