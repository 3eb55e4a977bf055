package demo

import (
	"bytes"
	"flag"
	"io"
	"math"
	"os"
	"path/filepath"
	"testing"
)

var update = flag.Bool("update", false, "write testdata/demo anew")

// folder holds the same logs as files, for those who want to try the commands
// one by one.
const folder = "../../../../testdata/demo"

func logs(t *testing.T) []Log {
	t.Helper()
	logs, err := Logs()
	if err != nil {
		t.Fatal(err)
	}
	return logs
}

// The committed files are what the generator makes, to the byte.
func TestCommittedFiles(t *testing.T) {
	for _, l := range logs(t) {
		checkFile(t, l.Name+".csv", l.WriteCSV)
		checkFile(t, l.Name+".parquet", func(w io.Writer) error { return writeParquet(w, l) })
	}
	checkFile(t, "gains-in-force.json", GainsInForce().WriteJSON)
}

func checkFile(t *testing.T, name string, write func(io.Writer) error) {
	t.Helper()
	var want bytes.Buffer
	if err := write(&want); err != nil {
		t.Fatal(err)
	}
	path := filepath.Join(folder, name)
	if *update {
		if err := os.MkdirAll(folder, 0o755); err != nil {
			t.Fatal(err)
		}
		if err := os.WriteFile(path, want.Bytes(), 0o644); err != nil {
			t.Fatal(err)
		}
	}
	got, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	if !bytes.Equal(got, want.Bytes()) {
		t.Errorf("%s is not what the generator makes; run go test ./cmd/lagwright/internal/demo -update", name)
	}
}

// The scenario holds what it promises: a temperature that follows the input,
// a dropout, values on the logger's grid, a loop that finds its setpoint.
func TestScenario(t *testing.T) {
	for _, l := range logs(t) {
		open := 0
		for i, r := range l.Rows {
			if math.IsNaN(r.Temperature) {
				open++
				continue
			}
			if steps := r.Temperature / resolution; math.Abs(steps-math.Round(steps)) > 1e-9 {
				t.Fatalf("%s row %d: %v is off the grid of %v °C", l.Name, i, r.Temperature, resolution)
			}
			if r.Input < 0 || r.Input > 10 {
				t.Fatalf("%s row %d: input %v V leaves the drive's range", l.Name, i, r.Input)
			}
		}
		if want := map[string]int{"bump": 12}[l.Name]; open != want {
			t.Errorf("%s: %d rows open, want %d", l.Name, open, want)
		}
		last := l.Rows[len(l.Rows)-1]
		if last.Auto && math.Abs(last.Temperature-last.Setpoint) > 2 {
			t.Errorf("%s ends at %v °C, its setpoint is %v °C", l.Name, last.Temperature, last.Setpoint)
		}
	}
}

// The bump moves the temperature by gain times step: the plant's own figure,
// found again in the record's means.
func TestBumpRise(t *testing.T) {
	heater, err := Heater()
	if err != nil {
		t.Fatal(err)
	}
	rows := logs(t)[0].Rows
	mean := func(from, to int) float64 {
		sum := 0.0
		for _, r := range rows[from:to] {
			sum += r.Temperature
		}
		return sum / float64(to-from)
	}
	drift := scripts[0].drift * (430 - 110)
	rise := mean(380, 480) - mean(70, 150) - drift
	want := heater.Gain * 1.6
	// The mean of 80 s of noise with a correlation time of 6 s varies by
	// 0.15·√(2·6/80) = 0.058 °C; of two such means by 0.08.
	if math.Abs(rise-want) > 4*0.08 {
		t.Errorf("rise %.2f °C, want %.2f", rise, want)
	}
}
