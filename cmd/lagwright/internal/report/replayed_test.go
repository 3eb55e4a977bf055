package report

import (
	"testing"

	"lagwright/validate"
)

// Temperatures keep their tenths above a hundred degrees; other figures have
// three digits.
func TestBeforeAfter(t *testing.T) {
	peak := func(m *validate.RunMetrics) *float64 { return m.PeakTemp }
	run := func(logged, low, median, high float64) *validate.RunReplay {
		return &validate.RunReplay{Logged: validate.RunMetrics{PeakTemp: &logged}, Proposed: validate.BandMetrics{
			Low: validate.RunMetrics{PeakTemp: &low}, Median: validate.RunMetrics{PeakTemp: &median}, High: validate.RunMetrics{PeakTemp: &high},
		}}
	}
	for _, c := range []struct {
		run        *validate.RunReplay
		unit       string
		text, band string
	}{
		{run(173.24, 168.91, 169.13, 169.88), "degC", "173.2 → 169.1 °C", "168.9 to 169.9"},
		{run(82.34, 83.01, 83.13, 83.2), "degC", "82.3 → 83.1 °C", "83 to 83.2"},
		{run(19.83, 2.391, 3.712, 5.788), "%", "19.8 → 3.71 %", "2.39 to 5.79"},
	} {
		if got := beforeAfter(c.run, peak, c.unit); got.Text != c.text || got.Small != c.band {
			t.Errorf("%q, %q; want %q, %q", got.Text, got.Small, c.text, c.band)
		}
	}
}
