package data

import (
	"bytes"
	"context"
	"fmt"
	"math/rand/v2"
	"os"
	"path/filepath"
	"slices"
	"strconv"
	"strings"
	"testing"
	"time"

	"github.com/apache/arrow/go/v17/parquet"
	"github.com/apache/arrow/go/v17/parquet/compress"
	"github.com/apache/arrow/go/v17/parquet/file"
	"github.com/apache/arrow/go/v17/parquet/schema"
	"github.com/klauspost/compress/gzip"
	"github.com/klauspost/compress/zstd"
)

// The same recording written in many ways is the same run, to the last bit:
// uneven stamps to the microsecond, values of many digits.
func TestSameRunInEveryForm(t *testing.T) {
	rng := rand.New(rand.NewPCG(7, 7))
	const n = 400
	ns, u, y := make([]int64, n), make([]float64, n), make([]float64, n)
	at := int64(0)
	for i := range n {
		ns[i] = at
		at += 100_000_000 + 1000*int64(rng.IntN(9000))
		u[i] = []float64{0, 2.125, 1.0625e-3}[i/150]
		y[i] = 20 + 100*rng.Float64()
	}
	f := func(v float64) string { return strconv.FormatFloat(v, 'g', -1, 64) }
	comma := func(s string) string { return strings.ReplaceAll(s, ".", ",") }
	seconds := func(i int) string {
		return strings.TrimRight(fmt.Sprintf("%d.%09d", ns[i]/1e9, ns[i]%1e9), "0")
	}
	day := func(layout string) func(i int) string {
		return func(i int) string { return time.Unix(morning, ns[i]).UTC().Format(layout) }
	}
	write := func(head, form string, cells ...func(i int) string) []byte {
		b := []byte(head + "\n")
		for i := range n {
			args := make([]any, len(cells))
			for k, c := range cells {
				args[k] = c(i)
			}
			b = fmt.Appendf(b, form+"\n", args...)
		}
		return b
	}
	us := func(i int) string { return f(u[i]) }
	ys := func(i int) string { return f(y[i]) }
	plain := write("time_s,drive_V,outlet_degC", "%s,%s,%s", seconds, us, ys)
	long := []byte("time_s,tag,value\n")
	for i := range n {
		long = fmt.Appendf(long, "%s,drive_V,%s\n%s,outlet_degC,%s\n", seconds(i), us(i), seconds(i), ys(i))
	}
	micros := make([]int64, n)
	secondsF := make([]float64, n)
	for i := range n {
		micros[i] = morning*1e6 + ns[i]/1000
		secondsF[i], _ = strconv.ParseFloat(seconds(i), 64)
	}
	stamps := pqOf[int64, *file.Int64ColumnChunkWriter]("time", schema.NewTimestampLogicalType(true, schema.TimeUnitMicros), parquet.Types.Int64, -1, micros)
	var pq1, pq2 bytes.Buffer
	writeParquet(t, &pq1, pqOptions{rowGroup: 150}, stamps, pqFloat64("drive_V", u), pqFloat64("outlet_degC", y))
	writeParquet(t, &pq2, pqOptions{codec: compress.Codecs.Zstd, plain: true}, pqFloat64("time_s", secondsF), pqFloat64("drive_V", u), pqFloat64("outlet_degC", y))

	for _, c := range []struct {
		name string
		text []byte
	}{
		{"comma.csv", plain},
		{"semicolon, decimal comma.csv", write("time_s;drive_V;outlet_degC", "%s;%s;%s", func(i int) string { return comma(seconds(i)) },
			func(i int) string { return comma(us(i)) }, func(i int) string { return comma(ys(i)) })},
		{"tab, local date-time.tsv", write("time\tdrive_V\toutlet_degC", "%s\t%s\t%s", day("02.01.2006 15:04:05.999999999"), us, ys)},
		{"blanks, two columns of time.txt", write("date time drive_V outlet_degC", "%s  %s %s   %s", day("2006-01-02"), day("15:04:05.999999999"), us, ys)},
		{"quoted, CRLF, other order.csv", bytes.ReplaceAll(write(`"outlet_degC","time","drive_V"`, `"%s","%s","%s"`, ys, day(time.RFC3339Nano), us), []byte("\n"), []byte("\r\n"))},
		{"unix ns.csv", write("timestamp|drive_V|outlet_degC", "%s|%s|%s", func(i int) string { return strconv.FormatInt(morning*1e9+ns[i], 10) }, us, ys)},
		{"long form.csv", long},
		{"timestamps.parquet", pq1.Bytes()},
		{"float64.parquet", pq2.Bytes()},
	} {
		t.Run(c.name, func(t *testing.T) {
			runs, err := readBytes(t, c.name, c.text, Options{})
			if err != nil {
				t.Fatal(err)
			}
			r := runs[0]
			for i := range n {
				if want := float64(ns[i]) / 1e9; r.T[i] != want || r.U[i] != u[i] || r.Y[i] != y[i] {
					t.Fatalf("row %d is %v %v %v, want %v %v %v", i, r.T[i], r.U[i], r.Y[i], want, u[i], y[i])
				}
			}
			if len(r.T) != n || len(r.U) != n || len(r.Y) != n {
				t.Errorf("%d rows, want %d", len(r.T), n)
			}
			if want := (Units{Time: "s", Input: "V", Temperature: "degC"}); r.Units != want || len(r.Quality.Missing)+len(r.Quality.Dropped) > 0 {
				t.Errorf("units %+v, quality %+v", r.Units, r.Quality)
			}
		})
	}
}

// The SHA-256 is that of the bytes as stored; standard input gives the same
// run as the file; reading twice gives the same bytes.
func TestSource(t *testing.T) {
	text := []byte("time_s,drive_V,outlet_degC\n0,0,24\n1,0,24\n2,1,25\n")
	runs, err := readBytes(t, "abc.csv", text, Options{})
	if err != nil {
		t.Fatal(err)
	}
	const want = "e6e516f103333de6682fe3b096a7221de957ad2dec4ace1c00f8d0a067f508c3" // of sha256sum
	piped, err := Read(context.Background(), "-", Options{Stdin: bytes.NewReader(text)})
	if err != nil {
		t.Fatal(err)
	}
	if got := piped[0].Source; got.File != "-" || got.SHA256 != runs[0].Source.SHA256 {
		t.Errorf("source of standard input %+v, of the file %+v", got, runs[0].Source)
	}
	if got := runs[0].Source; got.File != "abc.csv" || got.Rows != 3 || got.ToS != 2 || got.SHA256 != want {
		t.Errorf("source %+v, want sum %s", got, want)
	}
}

func packed(t testing.TB, how string, text []byte) []byte {
	t.Helper()
	var buf bytes.Buffer
	switch how {
	case "gz":
		z := gzip.NewWriter(&buf)
		z.Write(text)
		if err := z.Close(); err != nil {
			t.Fatal(err)
		}
	case "zst":
		z, err := zstd.NewWriter(&buf)
		if err != nil {
			t.Fatal(err)
		}
		z.Write(text)
		if err := z.Close(); err != nil {
			t.Fatal(err)
		}
	}
	return buf.Bytes()
}

// A packed log that was cut off or damaged is an error: both formats carry a
// check sum. Only bits that mean nothing (the time in a gzip header, a code
// that no symbol uses) may change, and then the run is the same. The long form
// of the test has several blocks and flips a bit in every seventh byte.
func TestPackedDamage(t *testing.T) {
	rows, tries, block := 3000, 25, 1 // block: flips for one block zeroed and one cut out
	if os.Getenv("LAGWRIGHT_LONG") != "" {
		rows, tries, block = 12000, 0, 9
	}
	ts, u, y := dryerLog(rows)
	text := csvText(ts, u, y, plainSeconds)
	for _, how := range []string{"gz", "zst"} {
		whole := packed(t, how, text)
		read := func(b []byte) (*Run, error) {
			runs, err := Read(context.Background(), "-", Options{Stdin: bytes.NewReader(b)})
			if err != nil {
				return nil, err
			}
			return runs[0], nil
		}
		clean, err := read(whole)
		if err != nil || len(clean.T) != rows {
			t.Fatalf("%s: undamaged: %v", how, err)
		}
		for k := 1; k < 8; k++ {
			if _, err := read(whole[:len(whole)*k/8]); err == nil {
				t.Errorf("%s: cut at %d eighths was read", how, k)
			}
		}
		if _, err := read(whole[:len(whole)-1]); err == nil {
			t.Errorf("%s: without its last byte it was read", how)
		}
		step, unseen, n := 7, 0, 0
		if tries > 0 {
			step = len(whole) / tries
		}
		for k, at := 0, 30; at < len(whole)-8; k, at = k+1, at+step {
			for what, damage := range map[string]func(b []byte) []byte{
				"flipped bit":   func(b []byte) []byte { b[at] ^= 1 << (at % 8); return b },
				"zeroed block":  func(b []byte) []byte { clear(b[at:min(at+64, len(b))]); return b },
				"block cut out": func(b []byte) []byte { return slices.Delete(b, at, min(at+64, len(b))) },
			} {
				if k%block > 0 && what != "flipped bit" {
					continue
				}
				n++
				run, err := read(damage(slices.Clone(whole)))
				if err != nil {
					continue
				}
				unseen++
				if !slices.Equal(run.T, clean.T) || !slices.Equal(run.U, clean.U) || !slices.Equal(run.Y, clean.Y) {
					t.Errorf("%s: %s at %d was read as another run", how, what, at)
				}
			}
		}
		if 100*unseen > n {
			t.Errorf("%s: %d of %d changes unnoticed", how, unseen, n)
		}
		t.Logf("%s: %d bytes, %d changes, %d without effect", how, len(whole), n, unseen)
	}
}

// Files made to fill the memory, and files that are no logs, are errors.
func TestNoLogs(t *testing.T) {
	bomb := func(how string, unit string, n int) []byte { return packed(t, how, []byte(strings.Repeat(unit, n))) }
	for _, c := range []struct {
		name, file string
		text       []byte
		wrong      string
	}{
		{"empty", "a.csv", nil, "empty"},
		{"header only", "a.csv", []byte("time_s,drive_V,outlet_degC\n"), "no rows"},
		{"blank lines", "a.csv", []byte("\n\n\n"), "empty"},
		{"prose", "a.txt", []byte("This is a letter, not a log.\nIt has no numbers in it.\n"), "no rows of two or more numbers"},
		{"one column", "a.csv", []byte("1\n2\n3\n4\n"), "no rows of two or more numbers"},
		{"spreadsheet", "a.xlsx", []byte("PK\x03\x04rest of a zip archive"), "export it as CSV"},
		{"endless line", "a.csv", bytes.Repeat([]byte("1,"), 5<<20), "line is longer than 4 MiB"},
		{"many columns", "a.csv", append(bytes.Repeat([]byte("a,"), 200000), bytes.Repeat([]byte("\n1,2"), 20)...), ""},
		{"NUL bytes", "a.csv", make([]byte, 1<<20), "empty"},
		{"random bytes", "a.csv", randomBytes(1 << 16), ""},
		{"gzip bomb of one line", "a.csv.gz", bomb("gz", "1", 8<<20), "line is longer"},
		{"zstd bomb of comments", "a.csv.zst", append(packed(t, "zst", csvText(dryer3000())), bomb("zst", strings.Repeat("#", 127)+"\n", 9<<16)...), "times its size"},
		{"header of a Parquet file", "a.parquet", []byte("PAR1"), "Parquet"},
		{"Parquet without a footer", "a.parquet", append([]byte("PAR1"), make([]byte, 4096)...), "Parquet"},
		{"clock that stands still", "a.csv", []byte("time_s,drive_V,outlet_degC\n1,0,20\n1,0,21\n1,1,22\n"), "the clock does not move"},
		{"no temperature", "a.csv", []byte("time_s,drive_V,outlet_degC\n1,0,OPEN\n2,0,OPEN\n3,1,OPEN\n"), "OPEN"},
		{"no input", "a.csv", []byte("time_s,drive_V,outlet_degC\n1,,20\n2,,21\n3,,22\n"), ""},
		{"mostly unreadable", "a.csv", []byte("time_s,drive_V,outlet_degC\n1,0,20\n2,0,20\n3,0,20\n" + strings.Repeat(",0,20\n", 4)), "a.csv:5: 4 of 7 rows cannot be read"},
	} {
		t.Run(c.name, func(t *testing.T) {
			_, err := readBytes(t, c.file, c.text, Options{})
			if err == nil || !strings.Contains(err.Error(), c.wrong) {
				t.Fatalf("error %v, want one with %q", err, c.wrong)
			}
			if !strings.Contains(err.Error(), filepath.Base(c.file)) {
				t.Errorf("error %q does not name the file", err)
			}
		})
	}
	if _, err := Read(context.Background(), filepath.Join(t.TempDir(), "none.csv"), Options{}); err == nil {
		t.Error("a missing file was read")
	}
	if _, err := Read(context.Background(), t.TempDir(), Options{}); err == nil || !strings.Contains(err.Error(), "folder") {
		t.Errorf("a folder: %v", err)
	}
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	if _, err := Read(ctx, filepath.Join("..", "testdata", "logs", "quirks", "comma.csv"), Options{}); err == nil {
		t.Error("a cancelled context did not stop the reading")
	}
}

func dryer3000() (t, u, y []float64, stamp func([]byte, float64) []byte) {
	t, u, y = dryerLog(3000)
	return t, u, y, plainSeconds
}

func randomBytes(n int) []byte {
	rng := rand.New(rand.NewPCG(1, 2))
	b := make([]byte, n)
	for i := range b {
		b[i] = byte(rng.Uint32())
	}
	return b
}
