package data

import (
	"bufio"
	"context"
	"os"
	"path/filepath"
	"runtime"
	"strconv"
	"testing"
	"time"
)

// long skips a study that takes minutes or much memory.
func long(t *testing.T) {
	t.Helper()
	if os.Getenv("LAGWRIGHT_LONG") == "" {
		t.Skip("set LAGWRIGHT_LONG=1 to run this test")
	}
}

// Ten million rows are read within three times the bytes of the columns kept.
func TestMemoryOfLongLog(t *testing.T) {
	long(t)
	const rows = 10_000_000
	path := filepath.Join(t.TempDir(), "long.csv")
	f, err := os.Create(path)
	if err != nil {
		t.Fatal(err)
	}
	w := bufio.NewWriter(f)
	w.WriteString("time_s,drive_V,outlet_degC\n")
	var b []byte
	for i := range rows {
		b = strconv.AppendFloat(b[:0], float64(i)/10, 'f', 1, 64)
		b = append(b, ",2.5,"...)
		b = strconv.AppendFloat(b, 40+float64(i%1000)/100, 'f', 2, 64)
		w.Write(append(b, '\n'))
	}
	if err := w.Flush(); err != nil {
		t.Fatal(err)
	}
	if err := f.Close(); err != nil {
		t.Fatal(err)
	}
	runtime.GC()
	var m runtime.MemStats
	runtime.ReadMemStats(&m)
	before := m.HeapSys - m.HeapReleased
	peak := before
	done := make(chan struct{})
	stopped := make(chan struct{})
	go func() {
		defer close(stopped)
		for {
			var m runtime.MemStats
			runtime.ReadMemStats(&m)
			peak = max(peak, m.HeapSys-m.HeapReleased)
			select {
			case <-done:
				return
			case <-time.After(5 * time.Millisecond):
			}
		}
	}()
	runs, err := Read(context.Background(), path, Options{})
	close(done)
	<-stopped
	if err != nil {
		t.Fatal(err)
	}
	kept := uint64(3 * 8 * len(runs[0].T))
	t.Logf("%d rows, %d MB of columns, %d MB taken", len(runs[0].T), kept>>20, (peak-before)>>20)
	if peak-before > 3*kept {
		t.Errorf("reading took %d bytes for columns of %d", peak-before, kept)
	}
}
