package data

import (
	"bytes"
	"context"
	"math"
	"os"
	"path/filepath"
	"runtime"
	"strings"
	"testing"
	"time"

	"github.com/apache/arrow/go/v17/parquet/compress"
)

// checkRun holds what is true of every run, whatever the file was.
func checkRun(t *testing.T, r *Run) {
	t.Helper()
	n := len(r.T)
	if n == 0 || r.T[0] != 0 || len(r.U) != n || len(r.Y) != n || r.Source.Rows != n {
		t.Fatalf("%d times, %d inputs, %d temperatures, source %+v", n, len(r.U), len(r.Y), r.Source)
	}
	for _, v := range [][]float64{r.Setpoint, r.Airflow, r.Inlet} {
		if v != nil && len(v) != n {
			t.Fatalf("a column of %d values beside %d times", len(v), n)
		}
	}
	if r.Auto != nil && len(r.Auto) != n {
		t.Fatalf("%d modes beside %d times", len(r.Auto), n)
	}
	for i := range n {
		if i > 0 && !(r.T[i] > r.T[i-1]) || math.IsInf(r.T[i], 0) {
			t.Fatalf("time %v after %v", r.T[i], r.T[max(i-1, 0)])
		}
		if math.IsNaN(r.U[i]) || math.IsInf(r.U[i], 0) || math.IsInf(r.Y[i], 0) {
			t.Fatalf("row %d: input %v, temperature %v", i, r.U[i], r.Y[i])
		}
	}
	kept := n
	for _, k := range r.Quality.Dropped {
		kept += k
	}
	if kept < n || r.Quality.RowsRead < n/2 {
		t.Fatalf("%d rows read, %d kept, dropped %v", r.Quality.RowsRead, n, r.Quality.Dropped)
	}
}

// memoryLimit is what reading a small file may take, bytes.
const memoryLimit = 1 << 30

// FuzzCSV reads any text: no panic, no hang, bounded memory, and what is read
// is a run. The rows read in place and those read cell by cell are the same.
func FuzzCSV(f *testing.F) {
	files, err := filepath.Glob(filepath.Join("..", "testdata", "logs", "quirks", "*"))
	if err != nil || len(files) == 0 {
		f.Fatalf("no seeds: %v", err)
	}
	for _, name := range files {
		text, err := os.ReadFile(name)
		if err != nil {
			f.Fatal(err)
		}
		f.Add(text, byte(0))
	}
	f.Fuzz(func(t *testing.T, text []byte, choice byte) {
		o := Options{Stdin: bytes.NewReader(text), Long: choice&1 > 0, RemoveSpikes: choice&2 > 0}
		if choice&4 > 0 {
			o.Cycle = time.Second
		}
		if choice&8 > 0 {
			o.InputSpan, o.TempSpan = &Span{Low: 0, High: 10}, &Span{Low: 0, High: 200}
		}
		if choice&16 > 0 {
			o.From, o.To = "1", "1h"
		}
		if choice&32 > 0 {
			o.TimeFormat = "day-first"
		}
		if choice&64 > 0 {
			o.RunCol = "run"
		}
		var before, after runtime.MemStats
		runtime.ReadMemStats(&before)
		runs, err := Read(context.Background(), "-", o)
		runtime.ReadMemStats(&after)
		if took := after.TotalAlloc - before.TotalAlloc; took > memoryLimit {
			t.Fatalf("%d bytes took %d bytes of memory", len(text), took)
		}
		if err != nil {
			return
		}
		for _, r := range runs {
			checkRun(t, r)
		}
	})
}

// FuzzClock reads any stamp in every way: no panic, and a calendar stamp that
// is read twice gives the same time twice.
func FuzzClock(f *testing.F) {
	for _, s := range []string{"2026-01-05T10:00:00.25+01:00", "05/01/2026 10:00:00 PM", "5.1.26 10:00:00,5", "05-Jan-2026", "20260105T10:00:00Z",
		"59:58.5", "100:00:00", "1767607200.123456789", "46027.4166667", "-1e18", "1e400", "10:15:30:250", "Jän 5, 2026 1:02", "Tue Dec  1 20:20:05.25 UTC 2026", "",
		"2026-W11-6T10:22:31", "Mar 14 10:22:31", "14.03. 10:22", "14032026 102231", "260314_102231", "10:22:31:50", "2026073T102231Z", "14 de marzo de 2026 a las 10h22",
		"639091225510000000", "2026-03-14 00:00:00 1899-12-30 10:22:31", "Sat Mar 14 2026 10:22:31 GMT+0100 (X)", "24.1-", "P1DT2H"} {
		f.Add(s, "dd.MM.yyyy HH:mm:ss")
	}
	f.Add("05/01/2026", "%d/%m/%Y")
	f.Fuzz(func(t *testing.T, s, format string) {
		b := []byte(s)
		for kind := elapsed; kind <= calendar; kind++ {
			for _, unit := range []uint64{1, nsSecond, nsDay} {
				k := clock{kind: kind, unit: unit}
				ns, alt, ok := k.parse(b, ',')
				ns2, alt2, ok2 := k.parse(b, ',')
				if ok != ok2 || ok && (ns != ns2 || alt != alt2) {
					t.Fatalf("%q read as %d, then as %d", s, ns, ns2)
				}
			}
		}
		found := &clock{kind: calendar}
		if _, err := found.findRewrite([][]byte{b}, column{label: "time"}); err == nil {
			ns, _, ok := found.parse(b, '.')
			again, _, also := found.parse(b, '.')
			if ok != also || ns != again {
				t.Fatalf("%q read as %d, then as %d", s, ns, again)
			}
		}
		if k, err := clockOfFormat(format); err == nil {
			k.parse(b, '.')
		}
	})
}

// FuzzParquet reads damaged Parquet files: no panic, bounded memory, and what
// is read is a run.
func FuzzParquet(f *testing.F) {
	for _, codec := range []compress.Compression{compress.Codecs.Snappy, compress.Codecs.Zstd, compress.Codecs.Gzip} {
		var buf bytes.Buffer
		writeParquet(f, &buf, pqOptions{codec: codec, rowGroup: 5}, pqFloat64("time_s", baseT), pqFloat64("drive_V", baseU), pqFloat64("outlet_degC", baseY))
		f.Add(buf.Bytes(), uint16(0), byte(0), uint16(0))
		f.Add(buf.Bytes(), uint16(buf.Len()/2), byte(4), uint16(9))
	}
	f.Fuzz(func(t *testing.T, text []byte, at uint16, flip byte, cut uint16) {
		text = bytes.Clone(text)
		if int(at) < len(text) {
			text[at] ^= flip
		}
		text = append([]byte("PAR1"), bytes.TrimPrefix(text[:max(0, len(text)-int(cut))], []byte("PAR1"))...)
		var before, after runtime.MemStats
		runtime.ReadMemStats(&before)
		runs, err := Read(context.Background(), "-", Options{Stdin: bytes.NewReader(text)})
		runtime.ReadMemStats(&after)
		if took := after.TotalAlloc - before.TotalAlloc; took > memoryLimit {
			t.Fatalf("%d bytes took %d bytes of memory", len(text), took)
		}
		if err != nil {
			return
		}
		for _, r := range runs {
			checkRun(t, r)
		}
	})
}

// The rows read in place are those read cell by cell.
func FuzzRow(f *testing.F) {
	f.Add("0.5,1.5,24.1", byte(','))
	f.Add("1e3;,5;24,1", byte(';'))
	f.Add("1,2,3,,", byte(','))
	f.Add(`"1,5";"2";3;"a;b"`, byte(';'))
	f.Add(" 1,2 , 3", byte(','))
	f.Fuzz(func(t *testing.T, text string, delim byte) {
		if delim != ',' && delim != ';' && delim != '\t' && delim != '|' {
			return
		}
		point := byte('.')
		if delim == ';' {
			point = ','
		}
		read := func(fast bool) (*table, bool) {
			c := &csvReader{d: &dialect{delim: delim, format: numberFormat{point}, fields: 4, cols: make([]column, 4)},
				clock: &clock{kind: elapsed, unit: nsSecond}, byName: map[string]*table{}, firstNo: map[string]int{}}
			c.at = noLayout()
			c.at[roleTime], c.at[roleInput], c.at[roleTemp] = 0, 1, 2
			c.fields, c.last = []field{{index: 0, role: roleTime}, {index: 1, role: roleInput}, {index: 2, role: roleTemp}}, 2
			if fast {
				ok := c.fast([]byte(text), 1, strings.Contains(text, `"`))
				return c.table(""), ok
			}
			c.slow([]byte(text), 1)
			return c.table(""), true
		}
		quick, ok := read(true)
		if !ok || bytes.ContainsAny([]byte(text), "\n\r\x00") {
			return
		}
		careful, _ := read(false)
		if quick.rows != careful.rows {
			t.Fatalf("%q: %d rows in place, %d cell by cell", text, quick.rows, careful.rows)
		}
		for _, r := range []role{roleInput, roleTemp} {
			a, b := quick.cols[r].flat(), careful.cols[r].flat()
			if len(a) == 1 && math.Float64bits(a[0]) != math.Float64bits(b[0]) {
				t.Fatalf("%q: %v in place, %v cell by cell", text, a, b)
			}
		}
		if a, b := quick.t.flat(), careful.t.flat(); len(a) == 1 && a[0] != b[0] {
			t.Fatalf("%q: time %v in place, %v cell by cell", text, a, b)
		}
	})
}
