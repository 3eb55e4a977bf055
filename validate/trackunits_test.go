package validate

import (
	"context"
	"errors"
	"strings"
	"testing"

	"lagwright/data"
	"lagwright/fit"
)

// TestTrackOtherUnits: runs in other units are no history of one heater, and
// are refused before any is fitted.
func TestTrackOtherUnits(t *testing.T) {
	run := func(file, input, temperature string) *data.Run {
		return &data.Run{Source: data.Source{File: file}, Units: data.Units{Time: "s", Input: input, Temperature: temperature}}
	}
	for _, c := range []struct {
		runs []*data.Run
		want string
	}{
		{[]*data.Run{run("a.csv", "%", "degC"), run("b.csv", "%", "degC"), run("d.csv", "V", "degC")},
			"a.csv is in % and °C, d.csv in V and °C; a history is that of one heater: track each heater by itself"},
		{[]*data.Run{run("a.csv", "V", "degC"), run("m.csv", "V", "mV")}, "a.csv is in V and °C, m.csv in V and mV"},
	} {
		_, err := Track(context.Background(), c.runs, fit.Options{}, TrackOptions{})
		if !errors.Is(err, fit.ErrUnlike) || !strings.Contains(err.Error(), c.want) || !strings.Contains(err.Error(), "--input-unit") {
			t.Errorf("%v, want %q", err, c.want)
		}
	}
	if _, err := Track(context.Background(), []*data.Run{run("a.csv", "V", "degC"), run("b.csv", "V", "degC")}, fit.Options{}, TrackOptions{}); errors.Is(err, fit.ErrUnlike) {
		t.Errorf("like units are refused: %v", err)
	}
}
