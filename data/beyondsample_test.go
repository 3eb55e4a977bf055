package data

import (
	"context"
	"fmt"
	"strings"
	"testing"
	"time"
)

// What only rows behind the sample show is seen all the same.
func TestBeyondSample(t *testing.T) {
	start := time.Date(2026, 1, 25, 23, 0, 0, 0, time.UTC)
	for _, c := range []struct {
		name, header string
		row          func(i int) string
		wrong        string
	}{
		{"year of two digits", "time,drive_V,outlet_degC", func(i int) string {
			return fmt.Sprintf("%s,1.5,24.%d", start.Add(time.Duration(i)*1800*time.Millisecond).Format("06-01-02 15:04:05.000"), i%7)
		}, `-: the dates of column "time" leap when they are read day first: say --time-format year-first if the year stands first, or --time-format day-first if they do leap`},
		{"clock for each channel", "t1,drive_V,t2,outlet_degC", func(i int) string {
			apart := 0.0
			if i >= sampleRows+2 {
				apart = 0.25
			}
			return fmt.Sprintf("%g,1.5,%g,24.%d", float64(i)/2, float64(i)/2+apart, i%7)
		}, `are two clocks that differ ("1001" and "1001.25" in line 2004)`},
		{"header that changes", "time_s,drive_V,outlet_degC", func(i int) string {
			if i == sampleRows+2 {
				return "time_s,drive_V,outlet_degF"
			}
			return fmt.Sprintf("%g,1.5,24.%d", float64(i)/2, i%7)
		}, "-:2004: the header changes here"},
		{"input with another decimal mark", "time_s;drive_V;outlet_degC", func(i int) string {
			if i > sampleRows {
				return fmt.Sprintf("%g;2,5;24.%d", float64(i)/2, i%7)
			}
			return fmt.Sprintf("%g;1.5;24.%d", float64(i)/2, i%7)
		}, `-:2003: the input is "2,5", which is no number as the rest of the column writes them, here and in 98 more rows`},
	} {
		t.Run(c.name, func(t *testing.T) {
			rows := []string{c.header}
			for i := range sampleRows + 100 {
				rows = append(rows, c.row(i))
			}
			_, err := Read(context.Background(), "-", Options{Stdin: strings.NewReader(strings.Join(rows, "\n") + "\n")})
			if err == nil || !strings.Contains(err.Error(), c.wrong) {
				t.Errorf("error %v, want one with %q", err, c.wrong)
			}
		})
	}
}
