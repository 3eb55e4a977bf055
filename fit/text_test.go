package fit

import (
	"bytes"
	"flag"
	"io"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"unicode/utf8"
)

var update = flag.Bool("update", false, "write the golden files anew")

func ptr(v float64) *float64 { return &v }

// shownCard is a card made by hand, so that the golden text changes only with
// the words.
func shownCard() *Card {
	start := "2026-03-04T08:12:30+01:00"
	chain2 := Model{
		Structure: "chain2",
		Parameters: []Parameter{
			{Name: "gain", Unit: "K/V", Value: 12.4123, SE: ptr(0.066), Low: ptr(12.283), High: ptr(12.541)},
			{Name: "lag1", Unit: "s", Value: 38.21, SE: ptr(0.7), Low: ptr(36.9), High: ptr(39.5)},
			{Name: "lag2", Unit: "s", Value: 5.93, SE: ptr(0.9), Low: ptr(4.4), High: ptr(8.13)},
			{Name: "dead_time", Unit: "s", Value: 0.61, SE: ptr(0.3), High: ptr(1.22)},
			{Name: "baseline", Unit: "degC", Value: 62.013, SE: ptr(0.03), Low: ptr(61.95), High: ptr(62.07)},
			{Name: "drift", Unit: "K/s", Value: 0.000043, SE: ptr(0.000011), Low: ptr(0.000021), High: ptr(0.000065)},
		},
		Samples: 1394, SSE: 48.2, RMSE: 0.186, FitPercent: 97.61, AICc: -2311.4, BIC: -2280.1,
		Noise:     Noise{SD: 0.186, CorrelationTime: 2.21, WhiteSD: 0.081},
		Residuals: Residuals{Lag1Correlation: 0.713, LjungBoxP: 0.41, InputCorrelationP: 0.62},
	}
	fopdt := chain2
	fopdt.Structure, fopdt.AICc, fopdt.RMSE, fopdt.FitPercent = "fopdt", -2209.8, 0.231, 96.9
	fopdt.Parameters = []Parameter{
		{Name: "gain", Unit: "K/V", Value: 12.4}, {Name: "lag1", Unit: "s", Value: 41}, {Name: "dead_time", Unit: "s", Value: 8.8},
	}
	ipdt := fopdt
	ipdt.Structure, ipdt.AICc, ipdt.RMSE, ipdt.FitPercent = "ipdt", -804.2, 1.93, 61.4
	ipdt.Parameters = []Parameter{{Name: "gain", Unit: "K/(V·s)", Value: 0.211}, {Name: "dead_time", Unit: "s", Value: 4.02}}
	return &Card{
		Schema: CardSchema, Tool: "lagwright 0.1", Created: "2026-03-04T07:24:00Z",
		Source: []CardSource{{File: "dryer2-bump\x1b[31m.csv", Rows: 1400, ToS: 705.5, Start: &start,
			Columns: map[string]string{"time": "Time", "input": "EH-3.OUT", "temperature": "TT-3"}}},
		Units: CardUnits{Time: "s", Input: "V", Temperature: "degC"}, InputLaw: "linear", Initial: "earlier", NoiseModel: "auto", Drift: "linear", BumpTime: "row",
		Range: CardRange{Input: [2]float64{3, 4.5}, Temperature: [2]float64{61.5, 81.2}}, Confidence: 0.95,
		Selected: "chain2", Models: []Model{fopdt, chain2, ipdt},
		Conditions: Conditions{Airflow: &[2]float64{410, 432}},
		Derived: []Derived{
			{Name: "sum_of_lags", Unit: "s", Value: 44.1, Low: ptr(42.6), High: ptr(45.8)},
			{Name: "initial_slope", Unit: "K/V/s", Value: 0.301},
		},
		Warnings: []Warning{
			{Code: "structures-alike", Text: "the log cannot tell chain2 from chain3; chain2 was taken, the simplest"},
			{Code: "dead-time-unresolved", Parameter: "dead_time", Text: "the dead time cannot be told from zero: its interval is one-sided; log faster if it matters"},
		},
		Cautions: []string{"Keep the independent over-temperature cut-out and the airflow interlock in service during every test and trial."},
	}
}

func shownCheck() *CheckReport {
	c := shownCard()
	return &CheckReport{
		Schema: CheckSchema, File: "dryer2-bump.csv", Start: c.Source[0].Start, Columns: c.Source[0].Columns, Units: c.Units,
		Rows: 1400, Span: 705.5, Sampling: Sampling{Median: 0.5, Jitter: 0.013, Gaps: 1, LongestGap: 6},
		Missing: map[string]int{"OPEN": 2, "blank": 1}, Dropped: map[string]int{"repeated time": 4}, Spikes: 1,
		Notes: []CheckNote{{Code: "clock-jump-back", Text: "the clock jumped back an hour and was mended", Row: 212}},
		Range: c.Range, Quantum: ptr(0.1), Noise: &c.Models[1].Noise, Drift: &DriftBefore{Over: 60, Slope: 0.01, Moved: 0.6, Clear: true},
		Bumps: []CheckBump{
			{Time: 60, Hold: 360, From: 3, To: 4.5, Rise: ptr(18.6), RiseOverNoise: ptr(100), SettledBefore: true, SettledAfter: true},
			{Time: 420, Hold: 285.5, From: 4.5, To: 3, Rise: nil, RiseOverNoise: nil},
		},
		Loop: Loop{"open", "the controller was in manual"}, Modes: []ModeChange{{0, false}},
		Airflow: &CheckedRange{Low: 410, High: 432}, Inlet: &CheckedRange{Low: 18, High: 24, Moved: true},
		Quick: &QuickFit{Structure: "chain2", Parameters: c.Models[1].Parameters},
		Verdict: []Verdict{
			{Parameter: "gain", Verdict: good, Reason: "known to ±1.1 %"},
			{Parameter: "lags", Verdict: doubtful, Reason: "known to ±14 % of their sum only: the largest rise is 8.2 times the noise", Cures: []string{"hold the last bump 40 s longer", "bump at least 2.1 V instead of 1.5 V (the temperature would go to about 88 °C)"}},
			{Parameter: "dead_time", Verdict: not, Reason: "the log sets no bound: rows every 500 ms are coarse beside a lag of 600 ms", Cures: []string{"log every 100 ms or faster"}},
		},
		Caution: c.Cautions,
	}
}

func shownPlan() *Plan {
	return &Plan{
		Schema: PlanSchema, Units: shownCard().Units, From: 3, To: 4.4, Size: 1.4, Before: 90, Hold: 230, Back: 230, Sampling: 0.5, Duration: 550, Repeats: 2,
		Expected: []PlannedBound{{"gain", 10, 1.13}, {"lags", 10, 4.2}, {"dead_time", 5, 6.1}},
		Reasons:  []string{"the input may go to 4.4 V", "dead time is expected to ±6.1 % only, wanted ±5 %"},
		Caution:  []string{"This bump would bring the outlet to about 81.2 °C at most."},
	}
}

func TestTextIsAsInTheGoldenFiles(t *testing.T) {
	for name, shown := range map[string]interface{ WriteText(io.Writer) error }{
		"card.txt": shownCard(), "check.txt": shownCheck(), "plan.txt": shownPlan(),
	} {
		var b bytes.Buffer
		if err := shown.WriteText(&b); err != nil {
			t.Fatal(err)
		}
		for i, line := range strings.Split(b.String(), "\n") {
			if n := utf8.RuneCountInString(line); n > pageWidth {
				t.Errorf("%s: line %d is %d columns wide: %s", name, i+1, n, line)
			}
			if strings.ContainsRune(line, 0x1b) || strings.HasSuffix(line, " ") {
				t.Errorf("%s: line %d holds an escape or ends with a blank: %q", name, i+1, line)
			}
		}
		golden := filepath.Join("testdata", name)
		if *update {
			if err := os.WriteFile(golden, b.Bytes(), 0o644); err != nil {
				t.Fatal(err)
			}
		}
		want, err := os.ReadFile(golden)
		if err != nil {
			t.Fatal(err)
		}
		if !bytes.Equal(b.Bytes(), want) {
			t.Errorf("%s differs; after a look, write it anew with -update. Got:\n%s", name, b.String())
		}
	}
}

// A writer that fails is told of.
func TestTextPassesTheWritersError(t *testing.T) {
	if err := shownCard().WriteText(failing{}); err != io.ErrClosedPipe {
		t.Errorf("error %v, want the writer's", err)
	}
}

type failing struct{}

func (failing) Write([]byte) (int, error) { return 0, io.ErrClosedPipe }

func TestNumbersInWords(t *testing.T) {
	for _, c := range []struct {
		value     float64
		low, high *float64
		fixed     bool
		want      written
	}{
		{12.4312, ptr(12.12), ptr(12.74), false, written{"12.43", "± 0.31", "12.12 to 12.74"}},
		{3.2, ptr(2.6), ptr(4.9), false, written{"3.2", "", "2.6 to 4.9"}},
		{3.2, ptr(2.6), nil, false, written{"3.20", "", "at least 2.60"}},
		{3.2, nil, ptr(4.9), false, written{"3.2", "", "at most 4.9"}},
		{3.2, nil, nil, false, written{"3.2", "", "no bound"}},
		{0.05, ptr(0.05), ptr(0.05), true, written{"0.05", "", "known, not fitted"}},
		{1243.12, ptr(1120), ptr(1366), false, written{"1243", "± 123", "1120 to 1366"}},
		{3e-8, ptr(1e-8), ptr(5e-8), false, written{"3.0e-8", "± 2.0e-8", "1.0e-8 to 5.0e-8"}},
		{0.4, ptr(0.4 - 2.2e-16), ptr(0.4 + 2.2e-16), false, written{"0.4", "", "exact to 6 digits"}},
		{11.67, ptr(11.669996), ptr(11.670004), false, written{"11.67", "", "exact to 6 digits"}},
		{11.67, ptr(11.66996), ptr(11.67004), false, written{"11.670000", "± 0.000040", "11.669960 to 11.670040"}},
		{-3e-17, ptr(-2e-16), ptr(1e-16), false, written{"0", "", "0 to 9 decimals"}},
	} {
		if got := write(c.value, c.low, c.high, c.fixed); got != c.want {
			t.Errorf("write(%g) = %q, want %q", c.value, got, c.want)
		}
	}
	for _, c := range []struct{ got, want string }{
		{figure(9.996, 3), "10"}, {figure(0.0123456, 3), "0.0123"}, {figure(1235.5, 3), "1236"}, {figure(0, 3), "0"},
		{figure(2.2e-16, 2), "0"}, {figure(-2.2e-16, 2), "0"}, {figure(0.000043, 2), "4.3e-5"}, {figure(1e-6, 3), "1e-6"}, {figure(0, 3), "0"},
		{plusMinus(2.31), "±2.3 %"}, {plusMinus(1e-9), "±0.01 %"},
		{duration(0.25), "250 ms"}, {duration(90), "90 s"}, {duration(600), "10 min"}, {duration(7800), "2.17 h"},
		{sentence("the log ends"), "The log ends."}, {sentence("bump.csv: ends"), "bump.csv: ends."},
	} {
		if c.got != c.want {
			t.Errorf("%q, want %q", c.got, c.want)
		}
	}
	for v, want := range map[float64]float64{41.2: 42, 40: 40, 0.123: 0.13, 1999: 2000} {
		if got := roundUp(v); got < want*(1-1e-12) || got > want*(1+1e-12) {
			t.Errorf("roundUp(%g) = %g, want %g", v, got, want)
		}
	}
	if got := roundDown(0.1999); got < 0.18999 || got > 0.19001 {
		t.Errorf("roundDown(0.1999) = %g, want 0.19", got)
	}
}
