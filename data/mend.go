package data

import (
	"fmt"
	"slices"
	"time"
)

// stamps of one recording, in file order, and what is needed to mend them.
type stampSeries struct {
	t        []int64             // ns
	same     func(i, j int) bool // rows i and j hold the same values
	line     func(i int) int     // line in the file
	wall     bool                // local clock without a zone
	tod      bool                // time of day without a date
	dated    bool                // date and time
	counts   []int64             // after which a counter starts again at zero, ns
	reversed bool                // out: newest row first; the caller turns the rows round

	drop    []bool // out: rows that go; nil when all stay
	reasons map[string]int
	notes   []Note
}

func (s *stampSeries) note(code string, row int, format string, args ...any) {
	line := 0
	if row >= 0 {
		line = s.line(row)
	}
	addNote(&s.notes, Note{Code: code, Text: fmt.Sprintf(format, args...), Row: line})
}

// mend makes the stamps strictly ascending, and says how:
//   - rows in falling order are turned round
//   - a time of day that starts again at midnight goes on
//   - a local clock set back or forth by an hour goes on as before
//   - repeated rows are dropped
//   - stamps too coarse for the sampling are spread evenly
//
// Anything else is an error that names the row.
func (s *stampSeries) mend() error {
	if strictlyAscending(s.t) {
		s.springForward()
		s.noteRounded()
		return nil
	}
	s.reasons = map[string]int{}
	s.turnRound()
	if err := s.runOn(); err != nil {
		return err
	}
	s.springForward()
	if len(s.t) > 1 && s.t[len(s.t)-1] == s.t[0] {
		return errNoTime
	}
	s.spreadOrDrop()
	return nil
}

func strictlyAscending(t []int64) bool {
	for i := 1; i < len(t); i++ {
		if t[i] <= t[i-1] {
			return false
		}
	}
	return true
}

// turnRound reverses rows that stand newest first.
func (s *stampSeries) turnRound() {
	rising, falling := 0, 0
	half := int64(12 * time.Hour)
	for i := 1; i < len(s.t); i++ {
		d := s.t[i] - s.t[i-1]
		if s.tod && (d > half || d < -half) { // past midnight, one way or the other
			d = -d
		}
		switch {
		case d > 0:
			rising++
		case d < 0:
			falling++
		}
	}
	if falling < 2 || rising > 0 && falling < 20*rising {
		return
	}
	slices.Reverse(s.t)
	s.reversed = true
	s.note("rows-reversed", -1, "the newest row stood first; the rows were turned round")
	n := len(s.t)
	same, line := s.same, s.line
	s.same = func(i, j int) bool { return same(n-1-i, n-1-j) }
	s.line = func(i int) int { return line(n - 1 - i) }
}

// typicalStep is the median of the steps forward, ns, 0 when there is none.
func (s *stampSeries) typicalStep() int64 {
	stride := max(1, len(s.t)/100000)
	var steps []int64
	for i := stride; i < len(s.t); i += stride {
		if d := s.t[i] - s.t[i-1]; d > 0 {
			steps = append(steps, d)
		}
	}
	if len(steps) == 0 {
		return 0
	}
	slices.Sort(steps)
	return steps[len(steps)/2]
}

// correction is how far a clock may be set back in one go without leaving
// doubt, ns: a few rows are dropped then. A clock that shows the date may be
// corrected by seconds (by a time server); one that counts from its own zero
// has no reason to run back, unless two rows changed places.
func (s *stampSeries) correction(step int64) int64 {
	if s.dated {
		return max(min(5*step, int64(time.Minute)), min(int64(5*time.Second), 50*step))
	}
	return 2 * step
}

// catchesUp tells that the clock passes its latest stamp again soon.
func (s *stampSeries) catchesUp(i int, offset, last int64) bool {
	for k := i; k < len(s.t) && k < i+100; k++ {
		if s.t[k]+offset > last {
			return true
		}
	}
	return false
}

// runOn removes jumps back: midnight, the hour of daylight saving, rows sent
// again and small corrections.
func (s *stampSeries) runOn() error {
	hour, day := int64(time.Hour), int64(24*time.Hour)
	step := s.typicalStep()
	var offset, last int64 // last: the latest stamp kept
	hourly := func(back int64) bool {
		return s.wall && back <= hour && hour-back <= min(max(4*step, int64(2*time.Second)), int64(10*time.Minute))
	}
	midnights, first := 0, 0
	for i, t := range s.t {
		t += offset
		back := last - t
		switch {
		case i == 0:
		case midnights > 0 && -back > day/2 && s.resent(i, t-day, offset-day, false): // from before midnight
			s.dropRow(i, "repeated row")
			s.t[i] = last
			continue
		case back <= 0:
		case s.tod && day-back >= 0 && day-back < day/2:
			offset += day
			t += day
			if midnights++; midnights == 1 {
				first = i
			}
		case s.dated && s.wall && day-back >= 0 && day-back <= max(5*step, int64(2*time.Second)):
			offset += day
			t += day
			s.note("clock-midnight", i, "the date did not go on at midnight; the clock was taken to")
		case s.resent(i, t, offset, hourly(back) || s.startsAgain(i, back, step) > 0):
			s.dropRow(i, "repeated row")
			s.t[i] = last
			continue
		case s.startsAgain(i, back, step) > 0:
			count := s.startsAgain(i, back, step)
			offset += count
			t += count
			s.note("clock-counter", i, "the clock started again at its largest count, after %v; it was taken to go on", time.Duration(count))
		case s.tod && max12(s.t) && back > 11*hour && back <= 12*hour:
			offset += 12 * hour
			t += 12 * hour
			s.note("clock-twelve-hours", i, "the clock shows twelve hours and started again; it was taken to go on")
		case hourly(back):
			offset += hour
			t += hour
			s.note("clock-jump-back", i, "the clock was set back by an hour (end of daylight saving time?); it was taken to go on")
		case back <= s.correction(step) && s.catchesUp(i, offset, last):
			s.dropRow(i, "clock set back")
			s.note("clock-set-back", i, "the clock was set back a little; the rows until it had caught up were dropped")
			s.t[i] = last
			continue
		default:
			return &lineError{s.line(i), fmt.Errorf("the clock jumps back by %v: these may be two recordings in one file; cut it in two, or name the column that tells them apart with --run-col",
				time.Duration(back))}
		}
		s.t[i] = t
		last = t
	}
	if midnights > 0 {
		s.note("clock-midnight", first, "the clock started again at midnight (%s); it was taken to go on", times(midnights))
	}
	return nil
}

// startsAgain is the count after which the clock started again, 0 where a jump
// back is none such: the row must come where it would without, within half a
// step. One at exactly zero, where every recording begins, must come on time.
func (s *stampSeries) startsAgain(i int, back, step int64) int64 {
	late := step / 2
	if s.t[i] == 0 {
		late = step / 50
	}
	for _, c := range s.counts {
		if over := c - back; over >= step-late && over <= step+late {
			return c
		}
	}
	return 0
}

// resentRows is how many rows are compared to tell rows sent again from a
// clock set back.
const resentRows = 20

// resent tells that a row with a stamp in the past repeats an earlier row.
// Where the clock could as well have been set back by an hour, or started again
// at its largest count, the rows that follow must repeat too, and must not all
// be alike.
func (s *stampSeries) resent(i int, t, offset int64, doubtful bool) bool {
	j, found := slices.BinarySearch(s.t[:i], t)
	for ; found && j < i && s.t[j] == t && !s.same(i, j); j++ {
	}
	if !found || j >= i || s.t[j] != t {
		return false
	}
	if !doubtful {
		return true
	}
	varied := false
	for k := 0; k < resentRows && i+k < len(s.t) && j+k < i; k++ {
		if s.t[i+k]+offset != s.t[j+k] || !s.same(i+k, j+k) {
			return false
		}
		varied = varied || !s.same(j, j+k)
	}
	return varied
}

func max12(t []int64) bool { return slices.Max(t) < int64(13*time.Hour) }

func (s *stampSeries) dropRow(i int, reason string) {
	if s.drop == nil {
		s.drop = make([]bool, len(s.t))
	}
	s.drop[i] = true
	count(s.reasons, reason, 1)
}

// springForward takes back the hour that a local clock was set forward: a
// step of an hour and an ordinary interval, in the small hours, in a log that
// is regular otherwise.
func (s *stampSeries) springForward() {
	if !s.wall || s.tod || len(s.t) < 3 {
		return
	}
	hour := int64(time.Hour)
	var step, offset int64
	for i := 1; i < len(s.t); i++ {
		d := s.t[i] - (s.t[i-1] + offset)
		if d >= hour && d < hour+hour/2 {
			if step == 0 {
				step = s.typicalStep()
			}
			at := time.Unix(0, s.t[i-1]+offset).UTC()
			if over := d - hour - step; over <= step/2 && over >= -step/2 && step < hour/4 && at.Hour() < 3 && at.Minute() >= 45 {
				s.note("clock-jump-forward", i, "the clock was set forward by an hour (daylight saving time?); it was taken to go on")
				offset += hour
			}
		}
		s.t[i] -= offset
	}
}

// maxNotes bounds the notes of one kind.
const maxNotes = 20

// addNote adds a note unless there are many of its kind already, or the same
// one stands there.
func addNote(notes *[]Note, n Note) {
	same := 0
	for _, m := range *notes {
		if m.Code == n.Code {
			if same++; same >= maxNotes || m == n || m.Text == n.Text && n.Code == "clock-set-back" {
				return
			}
		}
	}
	*notes = append(*notes, n)
}
