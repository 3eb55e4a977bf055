package data

import (
	"context"
	"os"
	"path/filepath"
	"testing"
)

// shared finds the folder of material that several projects use: by
// LAGWRIGHT_SHARED, else beside the repository. A test that needs it is
// skipped where it is absent.
func shared(t testing.TB, parts ...string) string {
	t.Helper()
	dir := os.Getenv("LAGWRIGHT_SHARED")
	if dir != "" {
		path := filepath.Join(append([]string{dir}, parts...)...)
		if _, err := os.Stat(path); err != nil {
			t.Fatalf("LAGWRIGHT_SHARED is set, but %v", err)
		}
		return path
	}
	up, err := os.Getwd()
	if err != nil {
		t.Fatal(err)
	}
	for {
		path := filepath.Join(append([]string{up, "shared"}, parts...)...)
		if _, err := os.Stat(path); err == nil {
			return path
		}
		parent := filepath.Dir(up)
		if parent == up {
			t.Skip("no folder named shared beside the repository; set LAGWRIGHT_SHARED to run this test")
		}
		up = parent
	}
}

// The real logs: rows, first and last values as printed in the files.
func TestRealLogs(t *testing.T) {
	for _, c := range []struct {
		file           string
		rows           int
		u0, y0, end    float64
		uEnd, yEnd     float64
		tempUnit, unit string
	}{
		{"air_heater_bench.csv", 1000, 6.41, 4.7660989, 79.92, 6.41, 4.7318125, "", "unit"},
		{"small_heater_levels.csv", 150, 0, 27.224, 298.5, 0, 0, "C", "degC"},
		{"small_heater_doublet.csv", 571, 0, 299.53 - 273.15, 600, 0, 0, "K", "degC"},
	} {
		runs, err := Read(context.Background(), shared(t, "data", c.file), Options{TimeCol: "t_s", InputCol: "u", TempCol: "y", TempUnit: c.tempUnit})
		if err != nil {
			t.Errorf("%s: %v", c.file, err)
			continue
		}
		r := runs[0]
		t.Logf("%s: %d rows, %+v", c.file, len(r.T), r.Quality)
		n := len(r.T) - 1
		t.Logf("%v %v %v / %v %v %v %v", r.T[0], r.U[0], r.Y[0], r.T[n], r.U[n], r.Y[n], r.Units)
	}
}
