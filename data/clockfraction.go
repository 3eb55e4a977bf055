package data

import (
	"fmt"
	"math"
	"slices"
	"strings"
)

// A column of milliseconds beside a clock of whole seconds is the fraction of
// its second, or the time of a loop that has nothing to do with it. Only rows
// that go on evenly with the fraction, and not without, tell.

// findFractionOfStamps looks for the milliseconds beside stamps of whole
// seconds.
func findFractionOfStamps(d *dialect) (*spreadClock, []Note) {
	at, unit, ok := findFraction(d)
	if !ok {
		return nil, nil
	}
	s := &spreadClock{stamp: ownStamp, main: at}
	s.parts = []clockPart{{[]int{at}, scaledCell(at, unit, d.format.point)}}
	for i, c := range d.cols {
		if c.class != stamps || !c.timed {
			continue
		}
		var k clock
		whole := func(cells [][]byte) (int64, bool) {
			t, _, ok := k.parseCalendar(cells[i])
			if !ok {
				t, ok = parseTimeOfDay(cells[i], true)
			}
			return t, ok
		}
		t, sub := d.clockAndFraction([]clockPart{{[]int{i}, whole}}, s.parts[0])
		switch {
		case slices.ContainsFunc(t, func(ns int64) bool { return ns%int64(nsSecond) != 0 }):
			return nil, nil
		case !isFraction(t, sub):
			return nil, []Note{d.leaveFraction(at)}
		}
		d.cols[at].part = somePart
		return s, []Note{{Code: "clock-columns", Text: fmt.Sprintf("column %q was added to the clock as its fraction of a second; --time-format with the layout of the clock alone leaves it out",
			d.cols[at].label)}}
	}
	return nil, nil
}

// leaveFraction says that a column was not added to the clock. One that stands
// still, or falls, is no clock of its own either.
func (d *dialect) leaveFraction(at int) Note {
	v := d.instants([]clockPart{{[]int{at}, scaledCell(at, 1, d.format.point)}})
	for i := 1; i < len(v); i++ {
		if v[i] <= v[i-1] {
			d.cols[at].part = somePart
		}
	}
	return Note{Code: "clock-fraction", Text: fmt.Sprintf("column %q was not added to the clock: with it the rows go on no more evenly than with whole seconds alone", d.cols[at].label)}
}

// clockAndFraction reads whole seconds and their fraction from the rows of the
// sample.
func (d *dialect) clockAndFraction(whole []clockPart, fraction clockPart) (t, sub []int64) {
	both := spreadClock{stamp: noStamp, parts: whole}
	for _, l := range d.rows {
		if len(l.cells) < d.fields {
			continue
		}
		ns, _, ok := both.add(0, noTime, true, l.cells)
		f, is := fraction.read(l.cells)
		if ok && is {
			t, sub = append(t, ns), append(sub, f)
		}
	}
	return t, sub
}

// Rows of the same second that must rise by their fraction, with nothing else
// to tell that it is one.
const enoughRepeats = 3

// isFraction tells that a column holds the fractions of the seconds beside it.
// Where the seconds stand still it must rise, everywhere. Beyond that it must
// fall where they step on by one, as it does in most rows if there are several
// in a second, or make the steps half as uneven as they are without it.
func isFraction(t, sub []int64) bool {
	if isNewestFirst(t) {
		t, sub = slices.Clone(t), slices.Clone(sub)
		slices.Reverse(t)
		slices.Reverse(sub)
	}
	var alone, both []float64
	repeats, steps, falls := 0, 0, 0
	for i := 1; i < len(t); i++ {
		dt, ds := t[i]-t[i-1], sub[i]-sub[i-1]
		if dt < 0 || dt > halfDayLong { // midnight, a clock put back
			continue
		}
		switch {
		case dt == 0 && ds < 0:
			return false
		case dt == 0 && ds > 0:
			repeats++
		case dt == int64(nsSecond):
			if steps++; ds < 0 {
				falls++
			}
		}
		alone, both = append(alone, float64(dt)), append(both, float64(dt+ds))
	}
	return repeats >= enoughRepeats && 2*falls >= steps || 2*unevenness(both) <= unevenness(alone) && unevenness(alone) > 0
}

// isNewestFirst tells that most steps go back.
func isNewestFirst(t []int64) bool {
	back := 0
	for i := 1; i < len(t); i++ {
		switch dt := t[i] - t[i-1]; {
		case dt < 0 && dt > -halfDayLong:
			back++
		case dt > 0 && dt < halfDayLong:
			back--
		}
	}
	return back > 0
}

// unevenness is the mean distance of steps from the usual one; a pause counts
// for a second.
func unevenness(steps []float64) float64 {
	if len(steps) == 0 {
		return 0
	}
	usual, sum := medianOf(slices.Clone(steps)), 0.0
	for _, x := range steps {
		sum += min(math.Abs(x-usual), float64(nsSecond))
	}
	return sum / float64(len(steps))
}

// addFraction adds the column of milliseconds (or finer) that stands beside a
// column whose seconds are whole.
func (f *partFinder) addFraction(sec int) bool {
	if !f.d.holds(sec, math.Inf(-1), math.Inf(1), true) {
		return false
	}
	i, unit, ok := findFraction(f.d)
	if !ok {
		return false
	}
	fraction := clockPart{[]int{i}, scaledCell(i, unit, f.point)}
	if !isFraction(f.d.clockAndFraction(f.probe, fraction)) {
		f.notes = append(f.notes, f.d.leaveFraction(i))
		return false
	}
	f.s.main = i
	f.s.parts = append(f.s.parts, fraction)
	f.probe = append(slices.Clone(f.probe), fraction)
	return true
}

// findFraction finds the one column of parts of a second: named so and nothing
// else, whole numbers below one second.
func findFraction(d *dialect) (at int, unit uint64, ok bool) {
	for i, c := range d.cols {
		if c.class != numbers {
			continue
		}
		name := strings.ToLower(strings.TrimSpace(c.label))
		for _, sub := range []string{"ms", "us", "ns"} {
			u := timeUnits[sub]
			if (slices.Contains(partNames[sub], name) || c.unit == sub && c.name == c.label) && d.holds(i, 0, float64(nsSecond/u-1), true) {
				if ok {
					return 0, 0, false
				}
				at, unit, ok = i, u, true
			}
		}
	}
	return at, unit, ok
}
