package validate

import (
	"bytes"
	"context"
	"strings"
	"testing"
)

func TestCompare(t *testing.T) {
	card, runs := many(t, 3, 200)
	var all []*Replay
	for _, kc := range []float64{0.05, 0.25} {
		gains := piGains(kc, 8, 0.5)
		gains.Requirement.Settling = ptr(45)
		r, err := ReplayRuns(context.Background(), card, runs[:2+len(all)], gains, Options{})
		if err != nil {
			t.Fatal(err)
		}
		all = append(all, r)
	}
	c, err := Compare([]string{"slow", "fast"}, all)
	if err != nil {
		t.Fatal(err)
	}
	if len(c.Rows) != 3 || c.Rows[2].Cells[0] != nil || c.Rows[2].Cells[1] == nil {
		t.Fatalf("%d rows, the third with %v", len(c.Rows), c.Rows[2].Cells)
	}
	for _, row := range c.Rows[:2] {
		if slow, fast := row.Cells[0], row.Cells[1]; !(*slow.Proposed.Median.IAE > *fast.Proposed.Median.IAE) {
			t.Errorf("%s: IAE %g with slow gains, %g with fast", row.File, *slow.Proposed.Median.IAE, *fast.Proposed.Median.IAE)
		}
	}
	var text, js bytes.Buffer
	if err := c.WriteText(&text); err != nil || !strings.Contains(text.String(), "meets on") {
		t.Errorf("%v\n%s", err, text.String())
	}
	if err := c.WriteJSON(&js); err != nil {
		t.Error(err)
	}
	if _, err := Compare([]string{"one"}, all); err == nil {
		t.Error("one label for two replays is taken")
	}
}
