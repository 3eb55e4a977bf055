package validate

import (
	"bytes"
	"flag"
	"os"
	"path/filepath"
	"testing"

	"lagwright/tune"
)

var update = flag.Bool("update", false, "write the golden files anew")

// golden compares with a file under testdata, or writes it with -update.
func golden(t *testing.T, name string, got []byte) {
	t.Helper()
	path := filepath.Join("testdata", name)
	if *update {
		if err := os.WriteFile(path, got, 0o644); err != nil {
			t.Fatal(err)
		}
	}
	want, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	if !bytes.Equal(got, want) {
		t.Errorf("%s: got\n%s\nwant\n%s", name, got, want)
	}
}

// What the terminal shows of a replay, of runs written down here.
func TestReplayTextGolden(t *testing.T) {
	metrics := func(settling, overshoot, temp, input float64) RunMetrics {
		return RunMetrics{Settling: ptr(settling), Overshoot: ptr(overshoot), PeakTemp: ptr(temp), PeakInput: ptr(input)}
	}
	r := &Replay{
		Gains: tune.Gains{Units: tune.GainUnits{Input: "V", Temperature: "degC"}}, Plants: 200,
		Requirement: tune.Requirement{Settling: ptr(45)},
		Runs: []RunReplay{
			{File: "dryer-0301.csv", Judged: true, Meets: true, Probability: 1,
				Proposed: BandMetrics{metrics(31, 1.2, 81, 6.1), metrics(34, 2.4, 81.4, 6.3), metrics(38, 3.9, 82, 6.6)}, Logged: metrics(74, 11, 83.5, 7.2)},
			{File: "dryer-0302.csv", Name: "night", Judged: true, Probability: 0.42,
				Proposed: BandMetrics{metrics(39, 1.2, 81, 6.1), metrics(46, 2.4, 81.4, 6.3), RunMetrics{Overshoot: ptr(9)}},
				Reasons:  []string{"settling 46 s (not reached on 12 plants) where at most 45 s is asked: fails on 116 of 200 plausible plants"},
				Warnings: []string{"3 missing temperatures are bridged by straight lines (at most 3 in a row)"}},
			{File: "dryer-0303.csv", Reasons: []string{"not judged on this run: settling and overshoot"}},
			{File: "dryer-0304.csv", Judged: true, Meets: true, Probability: 1, BackTest: &BackTest{Stated: 0.95, ShareInside: 0.4, Differs: []string{"the gain here is about 25% lower than the card's"}}},
		},
		Failed:   []FailedRun{{"dryer-0305.csv", "no unbroken part of 10 rows with a temperature"}},
		Cautions: []string{"Stay with the heater."},
	}
	r.sum(true)
	var b bytes.Buffer
	if err := r.WriteText(&b); err != nil {
		t.Fatal(err)
	}
	golden(t, "replay.txt", b.Bytes())
}
