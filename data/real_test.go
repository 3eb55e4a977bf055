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

// The real logs: rows, first and last row as printed in the files, sampling
// as their README says.
func TestRealLogs(t *testing.T) {
	for _, c := range []struct {
		file           string
		rows           int
		u0, y0         float64
		end, u, y      float64 // last row
		kelvin         bool
		median, within float64 // sampling, s
	}{
		{"air_heater_bench.csv", 1000, 6.41, 4.7660989, 79.92, 6.41, 4.6830789, false, 0.08, 1e-9},
		{"small_heater_levels.csv", 150, 0, 27.224, 297.56, 10, 53.617, false, 2, 0.01},
		{"small_heater_doublet.csv", 571, 0, 299.53, 572.14, 150, 339.81, true, 1, 0.01},
	} {
		o := Options{TimeCol: "t_s", InputCol: "u", TempCol: "y"}
		unit, zero := unitless, 0.0
		if c.kelvin {
			o.TempUnit, unit, zero = "K", "degC", 273.15
		}
		runs, err := Read(context.Background(), shared(t, "data", c.file), o)
		if err != nil {
			t.Errorf("%s: %v", c.file, err)
			continue
		}
		r := runs[0]
		n := len(r.T) - 1
		if len(r.T) != c.rows || r.Quality.RowsRead != c.rows || len(r.Quality.Missing)+len(r.Quality.Dropped)+len(r.Quality.Gaps)+len(r.Quality.Spikes) > 0 {
			t.Errorf("%s: %d rows, want %d; quality %+v", c.file, len(r.T), c.rows, r.Quality)
		}
		same(t, c.file, []float64{r.T[0], r.U[0], r.Y[0], r.T[n], r.U[n], r.Y[n]}, []float64{0, c.u0, c.y0 - zero, c.end, c.u, c.y - zero}, 0)
		if d := r.Quality.MedianInterval - c.median; d > c.within || d < -c.within {
			t.Errorf("%s: sampled every %v s, want %v", c.file, r.Quality.MedianInterval, c.median)
		}
		if r.Units != (Units{Time: "s", Input: unitless, Temperature: unit}) {
			t.Errorf("%s: units %+v", c.file, r.Units)
		}
	}
}
