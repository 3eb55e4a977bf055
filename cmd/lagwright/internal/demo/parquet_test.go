package demo

import (
	"io"
	"math"

	"github.com/apache/arrow/go/v17/parquet"
	"github.com/apache/arrow/go/v17/parquet/compress"
	"github.com/apache/arrow/go/v17/parquet/file"
	"github.com/apache/arrow/go/v17/parquet/schema"
)

// writeParquet writes the log as a historian exports it: UTC time stamps in
// microseconds, doubles, an open thermocouple as null, the mode as text.
func writeParquet(w io.Writer, l Log) error {
	root, err := parquetSchema()
	if err != nil {
		return err
	}
	props := parquet.NewWriterProperties(parquet.WithCompression(compress.Codecs.Zstd), parquet.WithCreatedBy("demo log"))
	pw := file.NewParquetWriter(w, root, file.WithWriterProps(props))
	if err := writeColumns(pw.AppendRowGroup(), l.Rows); err != nil {
		return err
	}
	return pw.Close()
}

func parquetSchema() (*schema.GroupNode, error) {
	utc := schema.NewTimestampLogicalType(true, schema.TimeUnitMicros)
	stamp, err := schema.NewPrimitiveNodeLogical(timeColumn, parquet.Repetitions.Required, utc, parquet.Types.Int64, 0, -1)
	if err != nil {
		return nil, err
	}
	text, err := schema.NewPrimitiveNodeLogical(modeColumn, parquet.Repetitions.Required, schema.StringLogicalType{}, parquet.Types.ByteArray, 0, -1)
	if err != nil {
		return nil, err
	}
	return schema.NewGroupNode("log", parquet.Repetitions.Required, schema.FieldList{
		stamp,
		schema.NewFloat64Node(inputColumn, parquet.Repetitions.Required, -1),
		schema.NewFloat64Node(tempColumn, parquet.Repetitions.Optional, -1),
		schema.NewFloat64Node(setpointColumn, parquet.Repetitions.Required, -1),
		text,
	}, -1)
}

func writeColumns(g file.SerialRowGroupWriter, rows []Row) error {
	var (
		stamps                        []int64
		inputs, temperatures, targets []float64
		present                       []int16 // definition levels of the temperature
		modes                         []parquet.ByteArray
	)
	for _, r := range rows {
		stamps = append(stamps, r.Time.UnixMicro())
		inputs = append(inputs, r.Input)
		targets = append(targets, r.Setpoint)
		modes = append(modes, parquet.ByteArray(mode(r.Auto)))
		if math.IsNaN(r.Temperature) {
			present = append(present, 0)
			continue
		}
		present = append(present, 1)
		// The file carries the same decimal as the CSV, not the product that made it.
		temperatures = append(temperatures, math.Round(r.Temperature*10)/10)
	}
	writes := []func(file.ColumnChunkWriter) error{
		func(c file.ColumnChunkWriter) error {
			_, err := c.(*file.Int64ColumnChunkWriter).WriteBatch(stamps, nil, nil)
			return err
		},
		doubles(inputs, nil),
		doubles(temperatures, present),
		doubles(targets, nil),
		func(c file.ColumnChunkWriter) error {
			_, err := c.(*file.ByteArrayColumnChunkWriter).WriteBatch(modes, nil, nil)
			return err
		},
	}
	for _, write := range writes {
		c, err := g.NextColumn()
		if err != nil {
			return err
		}
		if err := write(c); err != nil {
			return err
		}
		if err := c.Close(); err != nil {
			return err
		}
	}
	return g.Close()
}

func doubles(values []float64, levels []int16) func(file.ColumnChunkWriter) error {
	return func(c file.ColumnChunkWriter) error {
		_, err := c.(*file.Float64ColumnChunkWriter).WriteBatch(values, levels, nil)
		return err
	}
}
