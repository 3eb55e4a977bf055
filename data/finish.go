package data

import (
	"errors"
	"fmt"
	"math"
	"slices"
	"time"
)

// reading is what was learned of a file while its rows were read.
type reading struct {
	cols  []column
	at    layout
	clock *clock
	open  bool // stamps were read both day and month first
	notes []Note
}

func (r *reading) note(code string, line int, format string, args ...any) {
	addNote(&r.notes, Note{Code: code, Text: fmt.Sprintf(format, args...), Row: line})
}

// label is the name of the column that has a role, "" when none has.
func (r *reading) label(x role) string {
	if i := r.at[x]; i >= 0 {
		return r.cols[i].label
	}
	return ""
}

func (r *reading) unit(x role) string {
	if i := r.at[x]; i >= 0 {
		return r.cols[i].unit
	}
	return ""
}

// switched tells that the input is words such as ON and OFF.
func (r *reading) switched() bool {
	i := r.at[roleInput]
	return i >= 0 && r.cols[i].switched
}

// rows are the columns of one run, each in one piece.
type rows struct {
	t     []int64 // ns
	v     [numRoles][]float64
	auto  []int8
	lines lineMap
	notes []Note
	counts
}

// finish turns the rows of a table into a run: the clock is mended, what is
// no value is set aside, units become base units, the input is held.
func finish(path string, tb *table, info *reading, o *Options) (*Run, error) {
	fail := func(err error) error {
		where := path
		if at := (*lineError)(nil); errors.As(err, &at) {
			where = fmt.Sprintf("%s:%d", path, at.line)
		}
		if tb.name != "" {
			return fmt.Errorf("%s: run %q: %w", where, tb.name, err)
		}
		return fmt.Errorf("%s: %w", where, err)
	}
	if tb.rows == 0 {
		return nil, fail(errNoRows)
	}
	t, err := settleOrder(tb, info)
	if err != nil {
		return nil, fail(err)
	}
	r := &rows{t: t, lines: tb.lines, counts: tb.counts, notes: slices.Clone(info.notes)}
	for i, c := range tb.cols {
		if c != nil {
			r.v[i] = c.flat()
		}
	}
	if tb.auto != nil {
		r.auto = tb.auto.flat()
	}
	for x, v := range r.v {
		if err := tb.brackets.markRatherThanMinus(role(x), v, tb.lines.line, info.label(role(x))); err != nil {
			return nil, fail(err)
		}
	}
	r.joinComplements()
	if err := r.mendClock(info.clock); err != nil {
		return nil, fail(err)
	}
	run := &Run{Units: Units{Time: "s"}}
	r.setAside(info, o)
	if err := r.convert(run, info, o); err != nil {
		return nil, fail(err)
	}
	if err := r.holdInput(); err != nil {
		return nil, fail(err)
	}
	if err := r.cut(run, info.clock, o); err != nil {
		return nil, fail(err)
	}
	r.cycleMean(o.Cycle)
	r.fill(run, tb.name, info)
	run.Quality.Notes = append(run.Quality.Notes, noteSwapped(run, info)...)
	if !slices.ContainsFunc(run.Y, func(y float64) bool { return y == y }) {
		return nil, fail(fmt.Errorf("column %q holds no temperature%s%s", info.label(roleTemp), commonest(r.missing), spanCure(r.missing, o)+impossibleCure(r.missing)))
	}
	assess(run, o)
	return run, nil
}

// lineError is an error that belongs to a line of the file.
type lineError struct {
	line int
	err  error
}

func (e *lineError) Error() string { return e.err.Error() }
func (e *lineError) Unwrap() error { return e.err }

// mendClock mends the stamps and drops the rows that go with that.
func (r *rows) mendClock(k *clock) error {
	s := &stampSeries{t: r.t, same: r.sameValues, line: r.lines.line, wall: k.wall(), tod: k.timeOfDay(), dated: k.dated() || k.yearless, counts: k.counts()}
	if k.yearless {
		if err := s.mendYears(); err != nil {
			return err
		}
	}
	if err := s.mend(); err != nil {
		return err
	}
	if s.reversed {
		r.reverse()
	}
	r.notes = append(r.notes, s.notes...)
	for reason, n := range s.reasons {
		count(r.dropped, reason, n)
	}
	if s.drop != nil {
		r.keep(func(i int) bool { return !s.drop[i] })
	}
	return nil
}

func (r *rows) sameValues(i, j int) bool {
	for _, x := range []role{roleInput, roleTemp} {
		if v := r.v[x]; v != nil && v[i] != v[j] && (v[i] == v[i] || v[j] == v[j]) {
			return false
		}
	}
	return true
}

func (r *rows) reverse() {
	for _, v := range r.v {
		slices.Reverse(v)
	}
	slices.Reverse(r.auto)
}

// copyRow moves row i to place n.
func (r *rows) copyRow(n, i int) {
	r.t[n] = r.t[i]
	for _, v := range r.v {
		if v != nil {
			v[n] = v[i]
		}
	}
	if r.auto != nil {
		r.auto[n] = r.auto[i]
	}
}

// keep drops the rows for which ok is false, in place.
func (r *rows) keep(ok func(i int) bool) {
	n := 0
	for i := range r.t {
		if !ok(i) {
			continue
		}
		r.copyRow(n, i)
		n++
	}
	r.truncate(0, n)
}

// truncate keeps the rows lo to hi.
func (r *rows) truncate(lo, hi int) {
	r.t = r.t[lo:hi]
	for i, v := range r.v {
		if v != nil {
			r.v[i] = v[lo:hi]
		}
	}
	if r.auto != nil {
		r.auto = r.auto[lo:hi]
	}
}

// setAside makes missing what stands for "no value".
func (r *rows) setAside(info *reading, o *Options) {
	setInputSentinelsAside(r.v[roleInput], info.unit(roleInput), r.missing)
	temps := append(slices.Clone(fillValues), rangeEnds...)
	if info.unit(roleTemp) == "degF" {
		for _, c := range rangeEnds {
			temps = append(temps, c*1.8+32)
		}
	}
	setSentinelsAside(r.v[roleTemp], temps, r.missing)
	other := map[string]int{} // gaps in these columns are no loss to the fit
	for _, x := range []role{roleSetpoint, roleAirflow, roleInlet, roleCold} {
		setSentinelsAside(r.v[x], fillValues, other)
	}
}

// holdInput gives a row without an input the input before it, for that is
// what the heater got, and the same for setpoint and mode. Rows before the
// first input are dropped.
func (r *rows) holdInput() error {
	u := r.v[roleInput]
	first := slices.IndexFunc(u, func(v float64) bool { return v == v })
	if first < 0 {
		return fmt.Errorf("the input column holds no value%s: an input is numbers, or ON and OFF", commonest(r.missing))
	}
	if slices.ContainsFunc(u[first:], func(v float64) bool { return v != v }) {
		unseen := r.unseenChange(first)
		held := hold(u)
		r.notes = append(r.notes, Note{Code: "input-held", Text: fmt.Sprintf("%d rows without an input were given the input before them", held)})
		if float64(held) < lostShare*float64(len(u)) && unseen != "" {
			r.notes = append(r.notes, Note{Code: "input-change-unseen", Text: unseen})
		}
	}
	hold(r.v[roleSetpoint])
	for i := 1; i < len(r.auto); i++ {
		if r.auto[i] < 0 {
			r.auto[i] = r.auto[i-1]
		}
	}
	if first > 0 {
		r.notes = append(r.notes, Note{Code: "rows-before-input", Row: r.lines.line(0),
			Text: fmt.Sprintf("%d rows before the first input were dropped", first)})
		count(r.dropped, "before the first input", first)
		r.truncate(first, len(r.t))
	}
	return nil
}

// lostShare is the largest share of rows without an input that counts as
// cells lost; where more are blank the log writes the input when it changes
// (common practice, no source).
const lostShare = 0.3

// unseenChange describes the longest stretch of rows without an input over
// which the input changed, "" when there is none: the instant of that change
// is not known, and holding puts it at the end of the stretch.
func (r *rows) unseenChange(first int) string {
	u := r.v[roleInput]
	var longest int64
	text := ""
	last := first
	for i := first + 1; i < len(u); i++ {
		if u[i] != u[i] {
			continue
		}
		if took := r.t[i] - r.t[last]; i > last+1 && u[i] != u[last] && took > longest {
			longest = took
			text = fmt.Sprintf("the input went from %.6g to %.6g in the %.6g s from %.6g s on, in which it was not recorded: the change was put at their end, and the dead time can be wrong by as much",
				u[last], u[i], float64(took)/1e9, float64(r.t[last]-r.t[first])/1e9)
		}
		last = i
	}
	return text
}

// hold fills gaps with the value before them and counts those it filled.
func hold(v []float64) (held int) {
	last := math.NaN()
	for i, x := range v {
		if x == x {
			last = x
		} else if last == last {
			v[i] = last
			held++
		}
	}
	return held
}

// fill hands the columns over.
func (r *rows) fill(run *Run, name string, info *reading) {
	n := len(r.t)
	run.T = roomFor[float64](n)[:n]
	for i, t := range r.t {
		run.T[i] = float64(t-r.t[0]) / 1e9
	}
	run.U, run.Y = r.v[roleInput], r.v[roleTemp]
	run.Setpoint, run.Airflow, run.Inlet = r.v[roleSetpoint], r.v[roleAirflow], r.v[roleInlet]
	if r.auto != nil {
		run.Auto = make([]bool, n)
		for i, a := range r.auto {
			run.Auto[i] = a == 1
		}
	}
	if info.clock.dated() {
		run.Zone = info.clock.zone
		if run.Zone == nil {
			run.Zone = time.UTC
			if info.clock.wall() {
				r.notes = append(r.notes, Note{Code: "zone-unknown", Text: "the clock names no zone; its start is written as if it were UTC"})
			}
		}
		run.Start = time.Unix(0, r.t[0]).In(run.Zone)
	}
	run.Source.Rows, run.Source.Name = n, name
	date := info.label(roleDate)
	if date != "" {
		date += " "
	}
	run.Source.Columns = Columns{
		Time: date + info.label(roleTime), Input: info.label(roleInput), Temperature: info.label(roleTemp),
		Setpoint: info.label(roleSetpoint), Mode: info.label(roleMode), Airflow: info.label(roleAirflow),
		Inlet: info.label(roleInlet), Status: info.label(roleStatus),
	}
	run.Quality.RowsRead, run.Quality.Missing, run.Quality.Dropped = r.read, r.missing, r.dropped
	run.Quality.Notes = r.notes
}

// commonest names the kind of missing value met most.
func commonest(missing map[string]int) string {
	best, most := "", 0
	for kind, n := range missing {
		if n > most || n == most && kind < best {
			best, most = kind, n
		}
	}
	if best == "" {
		return ""
	}
	return fmt.Sprintf(" (%d cells are %s)", most, best)
}
