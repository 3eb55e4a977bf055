package report

import (
	"strings"
	"testing"
	"time"
)

func labels(ticks []tick) string {
	var s []string
	for _, t := range ticks {
		s = append(s, t.label)
	}
	return strings.Join(s, " ")
}

func TestNumberTicks(t *testing.T) {
	for _, c := range []struct {
		low, high float64
		n         int
		want      string
	}{
		{61.2, 81.3, 6, "65 70 75 80"},
		{-0.067, 0.067, 3, "-0.05 0 0.05"},
		{-0.35, 0.32, 3, "-0.2 0 0.2"}, // 0 alone is no scale
		{0, 1, 5, "0 0.2 0.4 0.6 0.8 1.0"},
		{0, 12000, 4, "0 5000 10000"},
		{100.04, 100.41, 4, "100.1 100.2 100.3 100.4"}, // four digits where three cannot tell them apart
		{118.2, 121.9, 5, "119 120 121"},
		{0, 3e7, 3, "0 1e7 2e7 3e7"},
		{-1e-5, 1e-5, 3, "-1e-5 0 1e-5"},
		{5, 5.0001, 3, "5.00000 5.00005 5.00010"},
	} {
		if got := labels(numberTicks(c.low, c.high, c.n)); got != c.want {
			t.Errorf("numberTicks(%g, %g, %d) = %q, want %q", c.low, c.high, c.n, got, c.want)
		}
	}
}

func TestLogTicks(t *testing.T) {
	for _, c := range []struct {
		low, high float64
		n         int
		want      string
	}{
		{0.001, 1, 9, "0.001 0.002 0.005 0.01 0.02 0.05 0.1 0.2 0.5 1"},
		{0.001, 1, 4, "0.001 0.01 0.1 1"},
		{0.02, 30, 7, "0.03 0.1 0.3 1 3 10 30"},
		{0, 1, 4, ""},
	} {
		if got := labels(logTicks(c.low, c.high, c.n)); got != c.want {
			t.Errorf("logTicks(%g, %g, %d) = %q, want %q", c.low, c.high, c.n, got, c.want)
		}
	}
}

func TestElapsedTicks(t *testing.T) {
	for _, c := range []struct {
		span float64
		want string
	}{
		{90, "0 20 40 60 80"}, {600, "0 100 200 300 400 500 600"},
		{3000, "0 10 20 30 40 50"}, {7200, "0 30 60 90 120"}, {5 * 3600, "0 1 2 3 4 5"}, {30 * 3600, "0 6 12 18 24 30"}, {6 * 86400, "0 1 2 3 4 5 6"},
	} {
		u := elapsedUnit(c.span)
		if got := labels(elapsedTicks(u)(0, c.span, 7)); got != c.want {
			t.Errorf("%g s in %s: %q, want %q", c.span, u.name, got, c.want)
		}
	}
}

func TestClockTicks(t *testing.T) {
	zone, err := time.LoadLocation("Europe/Amsterdam")
	if err != nil {
		t.Skip("no time zone data here")
	}
	for _, c := range []struct {
		start string
		span  float64
		want  string
	}{
		{"2026-03-04 08:12:30", 706, "08:14 08:16 08:18 08:20 08:22 08:24"},
		{"2026-03-04 08:12:31", 40, "08:12:35 08:12:40 08:12:45 08:12:50 08:12:55 08:13:00 08:13:05 08:13:10"},
		{"2026-03-04 23:50:00", 1200, "23:50 23:55 00:00 00:05 00:10"},
		{"2026-03-04 07:10:00", 4 * 86400, "12:00 5 Mar 12:00 6 Mar 12:00 7 Mar 12:00 8 Mar"},
		{"2026-03-04 07:10:00", 7 * 86400, "5 Mar 6 Mar 7 Mar 8 Mar 9 Mar 10 Mar 11 Mar"},
		// The night summer time begins: the clock jumps from 02:00 to 03:00, labels stay on full hours.
		{"2026-03-29 00:00:00", 6 * 3600, "00:00 01:00 03:00 04:00 05:00 06:00 07:00"},
	} {
		start, err := time.ParseInLocation(time.DateTime, c.start, zone)
		if err != nil {
			t.Fatal(err)
		}
		got := clockTicks(start)(0, c.span, 8)
		if labels(got) != c.want {
			t.Errorf("%s and %g s: %q, want %q", c.start, c.span, labels(got), c.want)
		}
		for _, k := range got {
			if at := start.Add(seconds(k.at)); !strings.HasPrefix(k.label, at.Format("2 Jan")) && !strings.HasPrefix(at.Format(time.TimeOnly), k.label) {
				t.Errorf("%s: label %s stands at %s", c.start, k.label, at)
			}
		}
	}
}
