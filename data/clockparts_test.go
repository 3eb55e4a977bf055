package data

import (
	"fmt"
	"slices"
	"strings"
	"testing"
)

// What may be a part of the clock joins it only where the rows say so.
func TestClockParts(t *testing.T) {
	whole := ramp(8, func(i int) float64 { return float64(i) })
	unrelated := func(i int) int { return (37*i + 11) % 1000 }
	hms := func(s, ms int) string { return fmt.Sprintf("%d,%d,%d,%d", s/3600, s/60%60, s%60, ms) }
	for _, c := range []struct {
		name, header string
		cells        func(i int) string
		t            []float64
		note         string // codes of the notes about the parts of the clock
		wrong        string
	}{
		{"ms beside stamps", "timestamp,ms", func(i int) string { return fmt.Sprintf("2026-01-25 10:00:%02d,%d", i, unrelated(i)) }, whole, "clock-fraction", ""},
		{"us beside stamps", "timestamp,us", func(i int) string { return fmt.Sprintf("2026-01-25 10:00:%02d,%d", i, unrelated(i)) }, whole, "clock-fraction", ""},
		{"ms beside repeated stamps", "timestamp,ms", func(i int) string { return fmt.Sprintf("2026-01-25 10:00:%02d,%d", i/2, unrelated(i)) }, baseT, "clock-fraction", ""},
		{"ms that stands still", "timestamp,ms", func(i int) string { return fmt.Sprintf("2026-01-25 10:00:%02d,100", i) }, whole, "clock-fraction", ""},
		{"ms beside epoch", "epoch,ms", func(i int) string { return fmt.Sprintf("%d,%d", 1769335200+i, unrelated(i*7)) }, whole, "clock-fraction", ""},
		{"ms beside seconds", "s,ms", func(i int) string { return fmt.Sprintf("%d,%d", i, unrelated(i*7)) }, whole, "clock-fraction", ""},
		{"ms beside hours", "hour,minute,second,ms", func(i int) string { return hms(36000+i, unrelated(i*7)) }, whole, "clock-fraction clock-columns", ""},
		{"ms of stamps", "timestamp,ms", func(i int) string { return fmt.Sprintf("2026-01-25 10:00:%02d,%d", i/2, i%2*500) }, baseT, "clock-columns", ""},
		{"ms of slow stamps", "timestamp,ms", func(i int) string { return fmt.Sprintf("2026-01-25 10:00:%02d,%d", 5*i/2, i%2*500) },
			ramp(8, func(i int) float64 { return 2.5 * float64(i) }), "clock-columns", ""},
		{"ms of stamps, newest first", "timestamp,ms", func(i int) string { return fmt.Sprintf("2026-01-25 10:00:%02d,%d", 10-(i+1)/2, i%2*500) }, baseT, "clock-columns", ""},
		{"ms of epoch", "epoch,ms", func(i int) string { return fmt.Sprintf("%d,%d", 1769335200+i/2, i%2*500) }, baseT, "clock-columns", ""},
		{"hh, mm, ss", "hh,mm,ss,ms", func(i int) string { return hms(36000+i/2, i%2*500) }, baseT, "clock-columns", ""},
		{"hh, mm, ss from zero", "hh,mm,ss,fan", func(i int) string { return hms(i, 7) }, whole, "clock-columns", ""},
		{"constant min and s", "elapsed,min,s", func(i int) string { return fmt.Sprintf("%d,10,5", i) }, whole, "", ""},
		{"min and leaping s", "elapsed,min,s", func(i int) string { return fmt.Sprintf("%d,10,%d", i, i%3) }, whole, "", ""},
		{"count of milliseconds", "Date,Time", func(i int) string { return fmt.Sprintf("2026-01-25,%d", 100*i) }, nil, "",
			`column "Time" (0, 100, 200) beside a date could be a number of milliseconds or of seconds: say --time-col "Time" with --time-format ms or with --time-format seconds`},
		{"count of seconds", "Date,Time", func(i int) string { return fmt.Sprintf("2026-01-25,%d", i) }, whole, "", ""},
		{"count of minutes", "Date,Time", func(i int) string { return fmt.Sprintf("2026-01-25,%d", 60*i) }, ramp(8, func(i int) float64 { return 60 * float64(i) }), "", ""},
		{"elapsed below a second", "date,time", func(i int) string { return fmt.Sprintf("46047,%.2f", 0.05+float64(i)/10) }, nil, "", "2 columns could be the time"},
		{"elapsed from zero", "date,time", func(i int) string { return fmt.Sprintf("46047,%.4f", float64(i)/2000) }, nil, "", "2 columns could be the time"},
	} {
		t.Run(c.name, func(t *testing.T) {
			r, err := readRowsOf(t, c.header+",drive_V,outlet_degC\n", func(i int) string {
				k := i
				if strings.HasSuffix(c.name, "newest first") {
					k = len(baseU) - 1 - i
				}
				return fmt.Sprintf("%s,%g,%g", c.cells(i), baseU[k], baseY[k])
			})
			if c.wrong != "" {
				if err == nil || !strings.Contains(err.Error(), c.wrong) {
					t.Fatalf("error %v, want one with %q", err, c.wrong)
				}
				return
			}
			if err != nil {
				t.Fatal(err)
			}
			same(t, "T", r.T, c.t, 1e-9)
			same(t, "U", r.U, baseU, 0)
			same(t, "Y", r.Y, baseY, 0)
			for _, code := range []string{"clock-fraction", "clock-columns"} {
				if got := slices.ContainsFunc(r.Quality.Notes, func(n Note) bool { return n.Code == code }); got != strings.Contains(c.note, code) {
					t.Errorf("notes %v, want %q alone", r.Quality.Notes, c.note)
				}
			}
		})
	}
}

// Months and minutes may both be written mm, and the note names them.
func TestMonthsAndMinutes(t *testing.T) {
	for _, header := range []string{"yyyy,mm,dd,hh,mi,ss", "yyyy,MM,dd,HH,mm,ss"} {
		r, err := readRowsOf(t, header+",drive_V,outlet_degC\n", func(i int) string {
			return fmt.Sprintf("2026,11,25,10,4,%g,%g,%g", baseT[i], baseU[i], baseY[i])
		})
		if err != nil {
			t.Fatal(err)
		}
		same(t, "T", r.T, baseT, 1e-9)
		if got := r.Start.Format("2006-01-02 15:04:05"); got != "2026-11-25 10:04:00" {
			t.Errorf("%s: start %s", header, got)
		}
		for _, n := range r.Quality.Notes {
			for _, name := range strings.Split(header, ",") {
				if n.Code == "clock-columns" && !strings.Contains(n.Text, fmt.Sprintf("%q", name)) {
					t.Errorf("note %q leaves out %s", n.Text, name)
				}
			}
		}
	}
}
