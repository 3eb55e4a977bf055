package data

import (
	"strings"
	"testing"
	"time"
)

// Stamps of a calendar, against package time.
func TestCalendar(t *testing.T) {
	for _, c := range []struct {
		text      string
		order     dateOrder
		want, alt string // RFC 3339; "" is none
	}{
		{text: "2026-01-05T10:00:00Z", want: "2026-01-05T10:00:00Z"},
		{text: "2026-01-05T10:00:00.25+01:00", want: "2026-01-05T09:00:00.25Z"},
		{text: "2026-01-05 10:00:00,123456789", want: "2026-01-05T10:00:00.123456789Z"},
		{text: "2026-01-05 10:00:00.1234567891", want: "2026-01-05T10:00:00.123456789Z"},
		{text: "2026-01-05 10:00:00 UTC", want: "2026-01-05T10:00:00Z"},
		{text: "2026-01-05 10:00:00 -0530", want: "2026-01-05T15:30:00Z"},
		{text: "2026/1/5 9:05", want: "2026-01-05T09:05:00Z"},
		{text: "20260105T10:00:00Z", want: "2026-01-05T10:00:00Z"},
		{text: "2026-01-05", want: "2026-01-05T00:00:00Z"},
		{text: "05.01.2026 10:00:00", want: "2026-01-05T10:00:00Z"},
		{text: "5.1.26 10:00:00,5", want: "2026-01-05T10:00:00.5Z"},
		{text: "05/01/2026 10:00:00", want: "2026-01-05T10:00:00Z", alt: "2026-05-01T10:00:00Z"},
		{text: "05-01-2026 10:00:00", want: "2026-01-05T10:00:00Z", alt: "2026-05-01T10:00:00Z"},
		{text: "05/01/2026 10:00:00", order: monthDayYear, want: "2026-05-01T10:00:00Z"},
		{text: "25/01/2026 10:00:00", want: "2026-01-25T10:00:00Z", alt: "2026-01-25T10:00:00Z"},
		{text: "1/25/2026 12:00:00 AM", want: "2026-01-25T00:00:00Z", alt: "2026-01-25T00:00:00Z"},
		{text: "1/25/2026 1:05:06.5 p.m.", want: "2026-01-25T13:05:06.5Z", alt: "2026-01-25T13:05:06.5Z"},
		{text: "5 Jan 2026 10:00", want: "2026-01-05T10:00:00Z"},
		{text: "Jan 5, 2026 10:00", want: "2026-01-05T10:00:00Z"},
		{text: "05-Dez-2026 10:00", want: "2026-12-05T10:00:00Z"},
		{text: "29.02.2024", want: "2024-02-29T00:00:00Z"},
		{text: "29.02.2026"},
		{text: "31/31/2026 10:00"},
		{text: "2026-13-01"},
		{text: "05.01.2026 25:61"},
		{text: "05.01.2026 10:00:00 sharp"},
		{text: "05.01-2026 10:00"},
		{text: "1/25/2026 13:00 PM"},
		{text: "24.1"},
		{text: ""},
	} {
		k := clock{kind: calendar, order: c.order}
		for range 2 { // the second time from the date kept
			ns, alt, ok := k.parse([]byte(c.text), '.')
			if ok != (c.want != "") {
				t.Errorf("%q: read %v, want %v", c.text, ok, c.want != "")
				continue
			}
			if ok && ns != unixNano(t, c.want) {
				t.Errorf("%q: %v, want %s", c.text, time.Unix(0, ns).UTC(), c.want)
			}
			if wantAlt := int64(noTime); ok {
				if c.alt != "" {
					wantAlt = unixNano(t, c.alt)
				}
				if alt != wantAlt {
					t.Errorf("%q: second reading %d, want %d", c.text, alt, wantAlt)
				}
			}
		}
	}
}

func unixNano(t *testing.T, stamp string) int64 {
	t.Helper()
	at, err := time.Parse(time.RFC3339Nano, stamp)
	if err != nil {
		t.Fatal(err)
	}
	return at.UnixNano()
}

func TestTimeOfDay(t *testing.T) {
	for _, c := range []struct {
		text  string
		hours bool
		want  time.Duration
		ok    bool
	}{
		{"00:00:00", false, 0, true},
		{"1:02:03.004", false, time.Hour + 2*time.Minute + 3*time.Second + 4*time.Millisecond, true},
		{"100:00:01", false, 100*time.Hour + time.Second, true},
		{"59:58.5", false, 59*time.Minute + 58500*time.Millisecond, true},
		{"10:15", true, 10*time.Hour + 15*time.Minute, true},
		{"10:15 PM", true, 22*time.Hour + 15*time.Minute, true},
		{"10:15:30:250", false, 10*time.Hour + 15*time.Minute + 30*time.Second + 250*time.Millisecond, true},
		{"10:15:99", false, 0, false},
		{"10", false, 0, false},
		{"10:15:30 x", false, 0, false},
	} {
		ns, ok := parseTimeOfDay([]byte(c.text), c.hours)
		if ok != c.ok || ok && ns != int64(c.want) {
			t.Errorf("%q: %v %v, want %v %v", c.text, time.Duration(ns), ok, c.want, c.ok)
		}
	}
}

// mendCase is a clock by its stamps in seconds.
func TestMend(t *testing.T) {
	hour := 3600.0
	for _, c := range []struct {
		name    string
		in      []float64
		values  []float64 // nil: all different
		wall    bool
		tod     bool
		dated   bool
		want    []float64
		dropped map[string]int
		note    string
		wrong   string
	}{
		{name: "as it should be", in: []float64{0, 1, 2, 3}, want: []float64{0, 1, 2, 3}},
		{name: "equal stamp, equal values", in: []float64{0, 1, 2, 2, 3, 4, 5}, values: []float64{1, 2, 3, 3, 4, 5, 6}, want: []float64{0, 1, 2, 3, 4, 5}, dropped: map[string]int{"repeated row": 1}},
		{name: "equal stamp, other values", in: []float64{0, 1, 2, 2, 3, 4, 5}, want: []float64{0, 1, 2, 3, 4, 5}, dropped: map[string]int{"repeated time": 1}},
		{name: "block sent again", in: []float64{0, 1, 2, 3, 1, 2, 3, 4}, values: []float64{1, 2, 3, 4, 2, 3, 4, 5}, want: []float64{0, 1, 2, 3, 4}, dropped: map[string]int{"repeated row": 3}},
		{name: "two blocks sent again", in: []float64{0, 1, 2, 1, 2, 3, 4, 3, 4, 5}, values: []float64{1, 2, 3, 2, 3, 4, 5, 4, 5, 6}, want: []float64{0, 1, 2, 3, 4, 5}, dropped: map[string]int{"repeated row": 4}},
		{name: "set back by seconds", dated: true, in: []float64{0, 1, 2, 3, 1.5, 2.5, 3.5, 4.5}, want: []float64{0, 1, 2, 3, 3.5, 4.5}, dropped: map[string]int{"clock set back": 2}, note: "clock-set-back"},
		{name: "starts again", in: []float64{0, 1, 2, 3, 0, 1, 2, 3}, wrong: "jumps back by 3s"},
		{name: "never catches up", dated: true, in: []float64{0, 1, 2, 3, 1.5, 1.6, 1.7}, wrong: "jumps back by 1.5s"},
		{name: "winter time", wall: true, dated: true, in: []float64{0, 10, 20, 30 - hour, 40 - hour}, want: []float64{0, 10, 20, 30, 40}, note: "clock-jump-back"},
		{name: "an hour back with a zone", dated: true, in: []float64{0, 10, 20, 30 - hour, 40 - hour}, wrong: "jumps back by 59m50s"},
		{name: "midnight twice", tod: true, wall: true, in: []float64{80000, 86000, 5600, 60000, 86390, 10}, want: []float64{80000, 86000, 92000, 146400, 172790, 172810}, note: "clock-midnight"},
		{name: "twelve hours", tod: true, wall: true, in: []float64{46000, 46700, 4200, 4900}, want: []float64{46000, 46700, 47400, 48100}, note: "clock-twelve-hours"},
		{name: "newest first", in: []float64{3, 2, 1, 0}, want: []float64{0, 1, 2, 3}, note: "rows-reversed"},
		{name: "newest first past midnight", tod: true, wall: true, in: []float64{3, 2, 1, 0, 86399, 86398}, want: []float64{86398, 86399, 86400, 86401, 86402, 86403}, note: "rows-reversed"},
		{name: "block sent again past midnight", tod: true, wall: true, in: []float64{86397, 86398, 86399, 0, 1, 86398, 86399, 0, 1, 2}, values: []float64{1, 2, 3, 4, 5, 2, 3, 4, 5, 6},
			want: []float64{86397, 86398, 86399, 86400, 86401, 86402}, dropped: map[string]int{"repeated row": 4}, note: "clock-midnight"},
		{name: "four rows a stamp", in: []float64{0, 0, 0, 0, 1, 1, 1, 1, 2, 2, 2, 2}, want: []float64{0, .25, .5, .75, 1, 1.25, 1.5, 1.75, 2, 2.25, 2.5, 2.75}, note: "clock-spread"},
		{name: "every row twice", in: []float64{0, 0, 1, 1, 2, 2, 3, 3, 4, 4, 5, 5, 6, 6, 7, 7, 8, 8}, values: []float64{1, 1, 2, 2, 3, 3, 4, 4, 5, 5, 6, 6, 7, 7, 8, 8, 9, 9},
			want: []float64{0, 1, 2, 3, 4, 5, 6, 7, 8}, dropped: map[string]int{"repeated row": 9}},
		{name: "two rows a stamp, seldom alike", in: []float64{0, 0, 1, 1, 2, 2, 3, 3, 4, 4}, values: []float64{1, 1, 1, 1, 2, 2, 2, 3, 3, 3},
			want: []float64{0, .5, 1, 1.5, 2, 2.5, 3, 3.5, 4, 4.5}, note: "clock-spread"},
		{name: "first and last stamp cut short", in: []float64{0, 1, 1, 1, 1, 2, 2, 2, 2, 3, 3}, want: []float64{.75, 1, 1.25, 1.5, 1.75, 2, 2.25, 2.5, 2.75, 3, 3.25}, note: "clock-spread"},
	} {
		t.Run(c.name, func(t *testing.T) {
			s := &stampSeries{line: func(i int) int { return i + 2 }, wall: c.wall, tod: c.tod, dated: c.dated}
			for _, x := range c.in {
				s.t = append(s.t, int64(x*1e9))
			}
			s.same = func(i, j int) bool { return c.values != nil && c.values[i] == c.values[j] }
			err := s.mend()
			if c.wrong != "" {
				if err == nil || !strings.Contains(err.Error(), c.wrong) {
					t.Fatalf("error %v, want one with %q", err, c.wrong)
				}
				return
			}
			if err != nil {
				t.Fatal(err)
			}
			var got []float64
			for i, x := range s.t {
				if s.drop == nil || !s.drop[i] {
					got = append(got, float64(x)/1e9)
				}
			}
			same(t, "stamps", got, c.want, 0)
			sameCounts(t, "dropped", s.reasons, c.dropped)
			if c.note == "" && len(s.notes) > 0 || c.note != "" && (len(s.notes) == 0 || s.notes[0].Code != c.note) {
				t.Errorf("notes %v, want %q", s.notes, c.note)
			}
		})
	}
}

func TestTimeFormat(t *testing.T) {
	for format, want := range map[string]string{
		"dd/MM/yyyy HH:mm:ss.SSS":  "02/01/2006 15:04:05",
		"%Y-%m-%d %H:%M:%S.%f":     "2006-01-02 15:04:05",
		"yyyy-MM-dd'T'HH:mm:ssXXX": "2006-01-02T15:04:05Z07:00",
		"d MMM yy h:mm a":          "2 Jan 06 3:04 PM",
	} {
		k, err := clockOfFormat(format)
		if err != nil || k.layout != want {
			t.Errorf("%q: %+v, %v, want layout %q", format, k, err, want)
		}
	}
	for _, format := range []string{"", "bogus", "%", "%q", "'open", "/"} {
		if k, err := clockOfFormat(format); err == nil {
			t.Errorf("%q was taken for %+v", format, k)
		}
	}
}
