package validate

import (
	"fmt"
	"io"
	"strings"
	"time"

	"github.com/apache/arrow/go/v17/parquet"
	"github.com/apache/arrow/go/v17/parquet/compress"
	"github.com/apache/arrow/go/v17/parquet/file"
	"github.com/apache/arrow/go/v17/parquet/schema"
)

// rowGroup is the most rows of one row group.
const rowGroup = 65536

// A tableColumn is one column of the table of runs. value returns a string,
// bool, int64, float64 or time.Time, or nil for null.
type tableColumn struct {
	name  string
	kind  parquet.Type
	time  bool // int64 of milliseconds since 1970, UTC
	value func(*RunReplay) any
}

// tableColumns lists the columns in the order of the file.
func tableColumns() []tableColumn {
	out := []tableColumn{
		{"file", parquet.Types.ByteArray, false, func(r *RunReplay) any { return r.File }},
		{"run", parquet.Types.ByteArray, false, func(r *RunReplay) any { return orNull(r.Name) }},
		{"sha256", parquet.Types.ByteArray, false, func(r *RunReplay) any { return r.SHA256 }},
		{"start", parquet.Types.Int64, true, startTime},
		{"rows", parquet.Types.Int64, false, func(r *RunReplay) any { return int64(r.Rows) }},
		{"judged", parquet.Types.Boolean, false, func(r *RunReplay) any { return r.Judged }},
		{"meets", parquet.Types.Boolean, false, func(r *RunReplay) any { return r.Meets }},
		{"probability", parquet.Types.Double, false, func(r *RunReplay) any { return r.Probability }},
	}
	for _, of := range []struct {
		name    string
		metrics func(*RunReplay) *RunMetrics
	}{
		{"proposed_low_", func(r *RunReplay) *RunMetrics { return &r.Proposed.Low }},
		{"proposed_", func(r *RunReplay) *RunMetrics { return &r.Proposed.Median }},
		{"proposed_high_", func(r *RunReplay) *RunMetrics { return &r.Proposed.High }},
		{"logged_", func(r *RunReplay) *RunMetrics { return &r.Logged }},
	} {
		for _, m := range metricColumns {
			out = append(out, tableColumn{of.name + m.name, parquet.Types.Double, false, func(r *RunReplay) any { return pointed(m.field(of.metrics(r))) }})
		}
	}
	return append(out,
		tableColumn{"with_noise_settling_s", parquet.Types.Double, false, func(r *RunReplay) any { return pointed(r.WithNoise.Settling) }},
		tableColumn{"with_noise_overshoot_percent", parquet.Types.Double, false, func(r *RunReplay) any { return pointed(r.WithNoise.Overshoot) }},
		tableColumn{"hand_over_away", parquet.Types.Double, false, handedOver(func(h *HandOver) *float64 { return &h.Away })},
		tableColumn{"hand_over_settling_s", parquet.Types.Double, false, handedOver(func(h *HandOver) *float64 { return h.Settling })},
		tableColumn{"hand_over_logged_settling_s", parquet.Types.Double, false, handedOver(func(h *HandOver) *float64 { return h.Logged })},
		tableColumn{"reproduced", parquet.Types.Boolean, false, tested(func(t *BackTest) any { return t.Reproduced })},
		tableColumn{"plant_reproduced", parquet.Types.Boolean, false, tested(func(t *BackTest) any { return t.Plant })},
		tableColumn{"controller_reproduced", parquet.Types.Boolean, false, tested(controllerReproduced)},
		tableColumn{"reasons", parquet.Types.ByteArray, false, func(r *RunReplay) any { return orNull(strings.Join(r.Reasons, "; ")) }},
		tableColumn{"warnings", parquet.Types.ByteArray, false, func(r *RunReplay) any { return orNull(strings.Join(r.Warnings, "; ")) }},
	)
}

// metricColumns names the metrics as the JSON does.
var metricColumns = []struct {
	name  string
	field func(*RunMetrics) *float64
}{
	{"settling_s", func(m *RunMetrics) *float64 { return m.Settling }},
	{"overshoot_percent", func(m *RunMetrics) *float64 { return m.Overshoot }},
	{"iae", func(m *RunMetrics) *float64 { return m.IAE }},
	{"largest_deviation", func(m *RunMetrics) *float64 { return m.Deviation }},
	{"peak_temperature", func(m *RunMetrics) *float64 { return m.PeakTemp }},
	{"peak_input", func(m *RunMetrics) *float64 { return m.PeakInput }},
	{"input_travel", func(m *RunMetrics) *float64 { return m.InputMoves }},
}

func orNull(s string) any {
	if s == "" {
		return nil
	}
	return s
}

func pointed(x *float64) any {
	if x == nil {
		return nil
	}
	return *x
}

// handedOver is a figure of the hand-over, null where a run has none.
func handedOver(figure func(*HandOver) *float64) func(*RunReplay) any {
	return func(r *RunReplay) any {
		if r.HandOver == nil {
			return nil
		}
		return pointed(figure(r.HandOver))
	}
}

// tested is an answer of the back-test, null where none was made.
func tested(answer func(*BackTest) any) func(*RunReplay) any {
	return func(r *RunReplay) any {
		if r.BackTest == nil {
			return nil
		}
		return answer(r.BackTest)
	}
}

// controllerReproduced is null for a run in manual.
func controllerReproduced(t *BackTest) any {
	if t.Controller == nil {
		return nil
	}
	return *t.Controller
}

func startTime(r *RunReplay) any {
	if r.Start == nil {
		return nil
	}
	t, err := time.Parse(time.RFC3339Nano, *r.Start)
	if err != nil {
		return nil
	}
	return t
}

// WriteParquet writes the table of runs: one row a run, one column for each
// figure, nulls where there is none, zstd. Tables of several replays can be
// put together row by row by any engine. Runs that failed are not in it.
func (r *Replay) WriteParquet(w io.Writer) (err error) {
	columns := tableColumns()
	root, err := tableSchema(columns)
	if err != nil {
		return fmt.Errorf("write the table of runs: %w", err)
	}
	defer func() {
		if p := recover(); p != nil { // the library panics where a write fails late
			err = fmt.Errorf("write the table of runs: %v", p)
		}
	}()
	out := file.NewParquetWriter(w, root, file.WithWriterProps(parquet.NewWriterProperties(
		parquet.WithCompression(compress.Codecs.Zstd), parquet.WithCreatedBy("lagwright"))))
	for lo := 0; lo == 0 || lo < len(r.Runs); lo += rowGroup {
		if err := writeGroup(out, columns, r.Runs[lo:min(lo+rowGroup, len(r.Runs))]); err != nil {
			return fmt.Errorf("write the table of runs: %w", err)
		}
	}
	if err := out.Close(); err != nil {
		return fmt.Errorf("write the table of runs: %w", err)
	}
	return nil
}

func tableSchema(columns []tableColumn) (*schema.GroupNode, error) {
	var fields schema.FieldList
	for _, c := range columns {
		var logical schema.LogicalType = schema.NoLogicalType{}
		switch {
		case c.time:
			logical = schema.NewTimestampLogicalType(true, schema.TimeUnitMillis)
		case c.kind == parquet.Types.ByteArray:
			logical = schema.StringLogicalType{}
		}
		node, err := schema.NewPrimitiveNodeLogical(c.name, parquet.Repetitions.Optional, logical, c.kind, 0, -1)
		if err != nil {
			return nil, err
		}
		fields = append(fields, node)
	}
	return schema.NewGroupNode("runs", parquet.Repetitions.Required, fields, -1)
}

func writeGroup(out *file.Writer, columns []tableColumn, runs []RunReplay) error {
	group := out.AppendRowGroup()
	for _, c := range columns {
		chunk, err := group.NextColumn()
		if err != nil {
			return err
		}
		if err := writeColumn(chunk, c, runs); err != nil {
			return fmt.Errorf("column %s: %w", c.name, err)
		}
		if err := chunk.Close(); err != nil {
			return err
		}
	}
	return group.Close()
}

func writeColumn(chunk file.ColumnChunkWriter, c tableColumn, runs []RunReplay) error {
	present := make([]int16, len(runs))
	var texts []parquet.ByteArray
	var numbers []float64
	var whole []int64
	var flags []bool
	for i := range runs {
		v := c.value(&runs[i])
		if v == nil {
			continue
		}
		present[i] = 1
		switch v := v.(type) {
		case string:
			texts = append(texts, parquet.ByteArray(v))
		case float64:
			numbers = append(numbers, v)
		case int64:
			whole = append(whole, v)
		case time.Time:
			whole = append(whole, v.UnixMilli())
		case bool:
			flags = append(flags, v)
		}
	}
	var err error
	switch chunk := chunk.(type) {
	case *file.ByteArrayColumnChunkWriter:
		_, err = chunk.WriteBatch(texts, present, nil)
	case *file.Float64ColumnChunkWriter:
		_, err = chunk.WriteBatch(numbers, present, nil)
	case *file.Int64ColumnChunkWriter:
		_, err = chunk.WriteBatch(whole, present, nil)
	case *file.BooleanColumnChunkWriter:
		_, err = chunk.WriteBatch(flags, present, nil)
	default:
		err = fmt.Errorf("no writer for %T", chunk)
	}
	return err
}
