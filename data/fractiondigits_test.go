package data

import (
	"bytes"
	"context"
	"fmt"
	"strings"
	"testing"
)

func TestFractionAt(t *testing.T) {
	for _, c := range []struct {
		stamp string
		want  string // the digits
	}{
		{"10:22:31.50", "50"}, {"22:31.5", "5"}, {"9:5:8.25", "25"}, {"9:5:8:25", "25"}, {"0:10:0:1", "1"}, {"100:00:00:500", "500"},
		{"2026-03-14T10:22:31,250Z", "250"}, {"2026-03-14 10:22:31.5+01:00", "5"}, {"14.3.2026 9:5:8:25", "25"}, {"10:22:31.5 PM", "5"},
		{"10:22:31", ""}, {"10:22", ""}, {"14/Mar/2026:10:22:31", ""}, {"2026:03:14 10:22:31", ""}, {"2026-03-14T10:22:31+01:00", ""},
		{"10:22:31 14.03.2026", ""}, {"14.03.2026", ""}, {"", ""},
	} {
		at, n := fractionAt([]byte(c.stamp))
		if got := c.stamp[at : at+n]; got != c.want {
			t.Errorf("%q: fraction %q, want %q", c.stamp, got, c.want)
		}
	}
}

// Milliseconds without the zeros in front that only rows behind the sample show
// are read so where the sample can have no other meaning, else refused.
func TestMillisecondsBehindSample(t *testing.T) {
	for _, c := range []struct {
		name  string
		start int // milliseconds, of a row a second
		drift int // rows in which the clock gains a millisecond
		shape string
		wrong string
	}{
		{"number, zeros seen", 101, 20, "%02d:%02d:%02d.%d", ""},
		{"fixed width", 101, 20, "%02d:%02d:%02d.%03d", ""},
		{"with a date", 101, 20, "2026-01-25 %02d:%02d:%02d.%d", ""},
		{"number, no zeros seen", 991, 250, "%02d:%02d:%02d.%d", "has stamps of 3 digits behind the seconds, then others (10:37:31.0)"},
		{"two digits, then three", 98, 2000, "%02d:%02d:%02d.%d", "has stamps of 2 digits behind the seconds, then others (11:06:40.100)"},
	} {
		t.Run(c.name, func(t *testing.T) {
			var b strings.Builder
			b.WriteString("time,drive_V,outlet_degC\n")
			n := 10 * sampleRows
			for i := range n {
				ms := 36000_000 + c.start + 1000*i + i/c.drift
				s := ms / 1000
				fmt.Fprintf(&b, c.shape+",1,24.%d\n", s/3600, s/60%60, s%60, ms%1000, i%7)
			}
			runs, err := Read(context.Background(), "-", Options{Stdin: bytes.NewReader([]byte(b.String()))})
			if c.wrong != "" {
				if err == nil || !strings.Contains(err.Error(), c.wrong) {
					t.Fatalf("error %v, want %q", err, c.wrong)
				}
				return
			}
			if err != nil {
				t.Fatal(err)
			}
			same(t, "T", runs[0].T, ramp(n, func(i int) float64 { return float64(1000*i+i/c.drift) / 1000 }), 1e-9)
		})
	}
}
