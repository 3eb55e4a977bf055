package data

import (
	"fmt"
	"math"
	"sort"
	"strings"
	"time"
)

// cut keeps the part of the recording between --from and --to, which are
// seconds from the first row or clock times.
func (r *rows) cut(run *Run, k *clock, o *Options) error {
	first := r.t[0]
	from, to := first, r.t[len(r.t)-1]
	var err error
	if o.From != "" {
		if from, err = instant(o.From, "--from", first, k); err != nil {
			return err
		}
	}
	if o.To != "" {
		if to, err = instant(o.To, "--to", first, k); err != nil {
			return err
		}
	}
	lo := sort.Search(len(r.t), func(i int) bool { return r.t[i] >= from })
	hi := sort.Search(len(r.t), func(i int) bool { return r.t[i] > to })
	if lo >= hi {
		return fmt.Errorf("no rows between --from %q and --to %q: the recording is %.6g s long", o.From, o.To, float64(r.t[len(r.t)-1]-first)/1e9)
	}
	count0 := len(r.t) - (hi - lo)
	if count0 > 0 {
		count(r.dropped, "outside --from and --to", count0)
	}
	r.truncate(lo, hi)
	run.Source.FromS = float64(r.t[0]-first) / 1e9
	run.Source.ToS = float64(r.t[len(r.t)-1]-first) / 1e9
	return nil
}

// instant reads the value of --from or --to: seconds from the first row, a
// duration such as 2m, a time of day on the first day, or a date and time.
func instant(text, flag string, first int64, k *clock) (int64, error) {
	b := []byte(strings.TrimSpace(text))
	if v, ok := (numberFormat{'.'}).parse(b); ok {
		return afterFirst(first, v*1e9, text, flag)
	}
	if d, err := time.ParseDuration(string(b)); err == nil {
		return afterFirst(first, float64(d), text, flag)
	}
	if tod, ok := parseTimeOfDay(b, true); ok {
		if k.timeOfDay() {
			return tod, nil
		}
		if k.dated() || k.yearless {
			east := int64(0)
			if k.zone != nil {
				_, s := time.Unix(0, first).In(k.zone).Zone()
				east = int64(s) * int64(nsSecond)
			}
			local := first + east
			return local - modulo(local, int64(nsDay)) + tod - east, nil
		}
	}
	probe := clock{kind: calendar, order: k.order}
	if probe.order == openOrder && k.dayFirst != k.monthFirst {
		probe.order = dayMonthYear
		if k.monthFirst {
			probe.order = monthDayYear
		}
	}
	ns, alt, ok := probe.parseCalendar(b)
	switch {
	case !ok:
		return 0, fmt.Errorf("%s %q is neither seconds nor a clock time", flag, text)
	case !k.dated():
		return 0, fmt.Errorf("%s %q is a date, but the log has no dates: say seconds from its first row", flag, text)
	case alt != noTime && alt != ns:
		return 0, fmt.Errorf("%s %q can be read day first or month first: write it as 2026-01-31 10:00", flag, text)
	}
	if probe.zone == nil && k.zone != nil {
		_, s := time.Unix(0, ns).In(k.zone).Zone()
		ns -= int64(s) * int64(nsSecond)
	}
	return ns, nil
}

func afterFirst(first int64, ns float64, text, flag string) (int64, error) {
	if math.Abs(ns) > 9e18-math.Abs(float64(first)) {
		return 0, fmt.Errorf("%s %q is out of range", flag, text)
	}
	return first + int64(math.Round(ns)), nil
}

// modulo is the remainder that is never negative.
func modulo(a, b int64) int64 { return ((a % b) + b) % b }
