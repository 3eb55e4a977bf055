package report

import (
	"strings"
	"testing"
)

// TestDated: a card of logs without a date does not come out as one of 1970.
func TestDated(t *testing.T) {
	b := sampleBundle()
	if page := outline(pageOf(t, b)); !strings.Contains(page, "Model card dated | 2026-03-04T08:24:00Z") {
		t.Error("the date is not on the page")
	}
	b.Card.Created = "1970-01-01T00:00:00Z"
	page := outline(pageOf(t, b))
	if strings.Contains(page, "1970") || !strings.Contains(page, "Model card dated | without a date: the log has none") {
		t.Error("the page shows 1970")
	}
}

// TestReplayTableWords: times of a slow heater are in the units of the words
// beside them, and the band is told from the one-sided figure of a reason.
func TestReplayTableWords(t *testing.T) {
	b := sampleBundle()
	run := &b.Replay.Runs[0]
	run.Logged.Settling, run.Proposed.Median.Settling, run.Proposed.Low.Settling, run.Proposed.High.Settling = ptr(1500), ptr(1030), ptr(900), ptr(1230)
	run.Reasons = nil
	got := replayTable(b.Replay)
	if c := got.Rows[0][1]; c.Text != "25 → 17.2 min" || c.Small != "15 to 20.5" {
		t.Errorf("settling %q, band %q", c.Text, c.Small)
	}
	if !strings.Contains(got.Caption, "the two-sided 95 % band") || strings.Contains(got.Caption, "one-sided") {
		t.Errorf("caption %q", got.Caption)
	}
	run.Reasons = []string{"settling 1030 s (up to 20.1 min on 95 % of the plants) where at most 15 min is asked: fails on 180 of 200 plausible plants"}
	if got = replayTable(b.Replay); !strings.Contains(got.Caption, "\"up to\" under what to watch for is one-sided") {
		t.Errorf("caption %q", got.Caption)
	}
}
