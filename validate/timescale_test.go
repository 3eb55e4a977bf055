package validate

import (
	"bytes"
	"strings"
	"testing"

	"lagwright/tune"
)

// slowReplay is a run of an oven that settles in so many seconds.
func slowReplay(settling float64, reasons ...string) *Replay {
	r := &Replay{
		Gains: tune.Gains{Units: tune.GainUnits{Input: "%", Temperature: "degC"}}, Plants: 200, Confidence: 0.95,
		Requirement: tune.Requirement{Settling: ptr(900)},
		Runs: []RunReplay{{
			File: "oven.csv", Judged: true, Reasons: reasons, WithNoise: StepMetrics{Settling: ptr(1.1 * settling)},
			Proposed: BandMetrics{RunMetrics{Settling: ptr(0.9 * settling)}, RunMetrics{Settling: ptr(settling)}, RunMetrics{Settling: ptr(1.2 * settling)}},
			Logged:   RunMetrics{Settling: ptr(2 * settling)},
		}},
	}
	r.sum(true)
	return r
}

// TestOneUnitOfTime: the table of a replay and the comparison write settling in
// the unit of the words below them.
func TestOneUnitOfTime(t *testing.T) {
	for _, c := range []struct {
		settling float64
		unit     string
		cells    []string // as proposed, band, with noise, logged
	}{
		{100, "s", []string{"100", "90..120", "110", "200"}},
		{1030, "min", []string{"17.2", "15.4..20.6", "18.9", "34.3"}},
		{7200, "h", []string{"2", "1.8..2.4", "2.2", "4"}},
	} {
		r := slowReplay(c.settling, "settling "+duration(c.settling)+" where at most 90 s is asked: fails on 200 of 200 plausible plants")
		var b bytes.Buffer
		if err := r.WriteText(&b); err != nil {
			t.Fatal(err)
		}
		text := b.String()
		if !strings.Contains(text, " settling "+c.unit+" ") || !strings.Contains(text, c.cells[0]+" "+c.unit+" where") {
			t.Errorf("%g s: not in %s throughout\n%s", c.settling, c.unit, text)
		}
		for i, label := range []string{"  fails, 0 %", "  band", "  with noise", "  logged"} {
			if line := lineOf(text, label); len(strings.Fields(line)) == 0 || !strings.Contains(line+" ", " "+c.cells[i]+" ") {
				t.Errorf("%g s: %q, want %q", c.settling, line, c.cells[i])
			}
		}
		compared, err := Compare([]string{"a", "b"}, []*Replay{r, slowReplay(c.settling / 2)})
		if err != nil {
			t.Fatal(err)
		}
		b.Reset()
		if err := compared.WriteText(&b); err != nil {
			t.Fatal(err)
		}
		if text := b.String(); !strings.Contains(text, " settling "+c.unit+" ") || !strings.Contains(lineOf(text, "  a")+" ", " "+c.cells[0]+" ") {
			t.Errorf("%g s: the comparison is not in %s\n%s", c.settling, c.unit, text)
		}
	}
}

func lineOf(text, label string) string {
	for line := range strings.Lines(text) {
		if strings.HasPrefix(line, label) {
			return strings.TrimRight(line, "\n")
		}
	}
	return ""
}

// TestSidesTold: where a reason gives a one-sided figure beside the two-sided
// band, the text says which is which, and only there.
func TestSidesTold(t *testing.T) {
	const said = "band: two-sided, from 2.5 % to 97.5 % of the plants; \"up to\" in a reason is one-sided"
	for reason, want := range map[string]bool{
		"settling 110 s (up to 121 s on 95 % of the plants) where at most 100 s is asked: fails on 40 of 200 plausible plants": true,
		"settling 110 s (not reached on 12 plants) where at most 100 s is asked: fails on 40 of 200 plausible plants":          false,
	} {
		var b bytes.Buffer
		if err := slowReplay(110, reason).WriteText(&b); err != nil {
			t.Fatal(err)
		}
		if got := strings.Contains(b.String(), said); got != want {
			t.Errorf("%s: said %v, want %v\n%s", reason, got, want, b.String())
		}
	}
	// the words are those that a reason is made of
	d := demand{name: "settling", unit: "s", limit: 100, figure: func(f figures) float64 { return f.settling }}
	var all []figures
	for i := range 200 {
		all = append(all, figures{settling: 80 + float64(i)*0.2})
	}
	_, _, reasons := judge([]demand{d}, all, make([]bool, len(all)), 0.95)
	if run := (&RunReplay{Reasons: reasons}); !run.OneSided() {
		t.Errorf("%q is not told as one-sided", reasons)
	}
}
