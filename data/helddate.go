package data

import "time"

// heldDate completes the stamps of a log that writes the date in its first row
// or where the day changes, and the time of day in every row: such a row has
// the date of the row before it, or the next one when the clock passed
// midnight in between.
type heldDate struct {
	newestFirst bool
	t, alt      int64 // of the row before, as clock.parse returns them
	midnights   int   // passed without a date, less those gone back over
}

// isNoDate tells a cell that leaves out the date: blank, a dash, a ditto mark.
func isNoDate(cell []byte) bool {
	if len(cell) > 0 && cell[0]-'0' <= 9 {
		return false
	}
	_, known := knownMissing(cell)
	return known
}

// newHeldDate looks at the stamps of a sample; nil when all have a date, or
// none has. Rows in front of the first date get theirs by going back from it.
func newHeldDate(k *clock, cells [][]byte) *heldDate {
	probe := *k
	first, without, falls := -1, 0, 0
	var before int64
	for i, b := range cells {
		t, _, ok := probe.parse(b, '.')
		tod, plain := plainTimeOfDay(b)
		switch {
		case ok:
			tod = timeOfDay(t)
			if first < 0 {
				first = i
			}
		case plain:
			without++
		default:
			continue
		}
		if d := tod - before; i > 0 && d < 0 != (d < -halfDayLong || d > halfDayLong) {
			falls++
		}
		before = tod
	}
	if first < 0 || without == 0 || probe.zone != nil && probe.zone != time.UTC {
		return nil
	}
	h := &heldDate{newestFirst: 2*falls > len(cells)}
	h.t, h.alt, _ = probe.parse(cells[first], '.')
	reverse := &heldDate{newestFirst: !h.newestFirst, t: h.t, alt: h.alt}
	for i := first - 1; i >= 0; i-- {
		if tod, ok := plainTimeOfDay(cells[i]); ok {
			reverse.step(tod)
		}
	}
	h.t, h.alt = reverse.t, reverse.alt
	return h
}

const halfDayLong = int64(nsDay / 2)

// plainTimeOfDay reads a time of day with nothing beside it but AM, PM or the
// letters of a zone.
func plainTimeOfDay(b []byte) (tod int64, ok bool) {
	b = trimBlanks(b)
	tod, n, fields := scanTime(b, true)
	if fields == 0 {
		return 0, false
	}
	tod, rest, ok := halfDay(tod, b[n:])
	rest = skipSpaces(rest)
	return tod, ok && tod < int64(nsDay) && (len(rest) == 0 || isZoneName(rest))
}

// timeOfDay is what is left of an instant without its date.
func timeOfDay(t int64) int64 {
	return ((t % int64(nsDay)) + int64(nsDay)) % int64(nsDay)
}

// stamp takes what parse made of a stamp, and reads it again if it has no date.
func (h *heldDate) stamp(b []byte, t, alt int64, ok bool) (int64, int64, bool) {
	if ok {
		h.t, h.alt = t, alt
		return t, alt, true
	}
	tod, ok := plainTimeOfDay(b)
	if !ok {
		return 0, noTime, false
	}
	h.step(tod)
	return h.t, h.alt, true
}

// step goes on to a row that shows a time of day only. Behind a midnight, a
// leap against the order of the rows goes back over it, as rows sent again do.
func (h *heldDate) step(tod int64) {
	d := tod - timeOfDay(h.t)
	if h.newestFirst {
		d = -d
	}
	switch {
	case d < -halfDayLong:
		d += int64(nsDay)
		h.midnights++
	case d > halfDayLong && h.midnights > 0:
		d -= int64(nsDay)
		h.midnights--
	}
	if h.newestFirst {
		d = -d
	}
	h.t += d
	if h.alt != noTime {
		h.alt += d
	}
}

// say notes what was done with the dates.
func (h *heldDate) say(info *reading) {
	if h == nil {
		return
	}
	info.note("date-held", 0, "the date stands in some rows only; the others were given the date of the row before them")
	if h.midnights > 0 {
		info.note("clock-midnight", 0, "the clock passed midnight (%s) in a row without a date; it was taken to go on to the next day", times(h.midnights))
	}
}
