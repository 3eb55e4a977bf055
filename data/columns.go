package data

import (
	"fmt"
	"slices"
	"strings"
)

// column is what is known of a column before the rows are read.
type column struct {
	index  int
	label  string // as the file spells it
	name   string // without the unit
	unit   string // canonical where known, "" when the file names none
	class  class  // of most of its cells
	sample []string

	dated, timed bool    // cells of class stamp: with a date, with a time of day
	stepwise     float64 // share of cells equal to the one before; NaN below 5 cells
	ascending    bool    // numbers that never fall
	repeats      bool    // text of a few values that keep coming back
	numbered     bool    // whole numbers of a few values that keep coming back

	halves   bool // text of nothing but AM and PM
	units    bool // text of nothing but units
	ofUnits  bool // … and several of them, one of more than a letter
	beside   *unitColumn
	part     partOf   // of a clock in several columns
	switched bool     // nothing but words such as ON and OFF, or logged as true and false
	words    []string // some of these words
}

// class is what most cells of a column are.
type class int

const (
	blankCells class = iota
	numbers
	stamps // dates, times of day or both
	texts
)

// layout says which column has which role; -1 where none has.
type layout [numRoles]int

func noLayout() layout {
	var l layout
	for i := range l {
		l[i] = -1
	}
	return l
}

// options returns the name that o gives for the column of a role.
func (o *Options) column(r role) string {
	switch r {
	case roleTime:
		return o.TimeCol
	case roleInput:
		return o.InputCol
	case roleTemp:
		return o.TempCol
	case roleSetpoint:
		return o.SetpointCol
	case roleMode:
		return o.ModeCol
	case roleAirflow:
		return o.AirflowCol
	case roleInlet:
		return o.InletCol
	case roleCold:
		return o.ColdCol
	case roleRun:
		return o.RunCol
	}
	return ""
}

// assign gives every role its column: by the flags, else by name and unit,
// else, for input and temperature, by what the columns hold.
//
// With tags true the columns are tags of a log in long form, each with its
// own clock: no column is looked for that holds the time.
func assign(cols []column, o *Options, tags bool) (layout, []Note, error) {
	l := noLayout()
	taken := map[int]bool{}
	for r := range numRoles {
		name := o.column(r)
		if name == "" || tags && (r == roleTime || r == roleRun) {
			continue
		}
		i, err := findColumn(cols, name, flags[r])
		if err != nil {
			return l, nil, err
		}
		if taken[i] {
			return l, nil, twiceNamed(cols[i], &l, r)
		}
		l[r], taken[i] = i, true
	}
	for i, c := range cols {
		if c.part != noPart {
			taken[i] = true
		}
	}
	if !tags {
		if err := assignTime(cols, &l, taken); err != nil {
			return l, nil, err
		}
	}
	var notes []Note
	var chosen []role // by name
	for _, r := range []role{roleInput, roleTemp} {
		if l[r] >= 0 {
			continue
		}
		found := bestByName(cols, taken, r)
		if r == roleInput && len(found) == 0 {
			found = best(cols, taken, r, isSwitched)
		}
		if r == roleInput && len(found) > 1 {
			found = leaveOthers(cols, found)
		}
		named := true
		if r == roleInput && len(found) > 1 {
			if only := stepwiseAmong(cols, found); only >= 0 {
				found, named = []int{only}, false
				notes = append(notes, contentNote(cols[only], r))
			}
		}
		if r == roleTemp {
			found = actualOverAir(cols, taken, found)
		}
		if len(found) > 1 {
			return l, nil, ambiguous(cols, found, r)
		}
		if len(found) == 1 {
			l[r], taken[found[0]] = found[0], true
			if named {
				chosen = append(chosen, r)
			}
		}
	}
	notes = append(notes, assignOptional(cols, &l, taken)...)
	more, err := assignByContent(cols, &l, taken)
	if err == nil && cols[l[roleInput]].switched {
		more = append(more, readSwitched(&cols[l[roleInput]]))
	}
	for _, r := range chosen {
		more = append(more, passedOver(cols, taken, l[r], r)...)
	}
	if err == nil {
		var named []Note
		named, err = checkNamed(cols, &l, o)
		more = append(more, named...)
	}
	return l, append(notes, more...), err
}

// leaveOthers drops candidates whose name says that they are something else,
// such as the voltage of the supply, if that leaves any.
func leaveOthers(cols []column, found []int) []int {
	rest := slices.DeleteFunc(slices.Clone(found), func(i int) bool {
		return words[roleOther].in(cols[i])
	})
	if len(rest) == 0 {
		return found
	}
	return rest
}

// twiceNamed is the error of a column that the flags give two roles.
func twiceNamed(c column, l *layout, second role) error {
	first := role(slices.Index(l[:], c.index))
	return fmt.Errorf("column %q cannot be both the %s (%s) and the %s (%s): name two columns",
		c.label, roleNames[first], flags[first], roleNames[second], flags[second])
}

func isSwitched(c column) bool { return c.switched }

// assignOptional finds the columns that a fit can do without. Of several
// equal ones none is used, and that is said.
func assignOptional(cols []column, l *layout, taken map[int]bool) []Note {
	var notes []Note
	for r := roleSetpoint; r < roleRun; r++ {
		if l[r] >= 0 {
			continue
		}
		switch found := bestByName(cols, taken, r); {
		case len(found) == 1:
			l[r], taken[found[0]] = found[0], true
		case len(found) > 1:
			text := fmt.Sprintf("several columns could be the %s: %s; none is used", roleNames[r], listColumns(cols, found))
			if flags[r] != "" {
				text += " (say which with " + flags[r] + ")"
			}
			notes = append(notes, Note{Code: "column-ambiguous", Text: text})
		}
	}
	return notes
}

// findColumn finds the column that a flag names: exactly, else without regard
// to case if that leaves one. The name may leave out the unit.
func findColumn(cols []column, name, flag string) (int, error) {
	same := []func(c column) bool{
		func(c column) bool { return c.label == name },
		func(c column) bool { return strings.EqualFold(c.label, name) },
		func(c column) bool { return c.name == name },
		func(c column) bool { return strings.EqualFold(c.name, name) },
		func(c column) bool { return strings.EqualFold(placeName(c), name) },
	}
	for _, is := range same {
		var found []int
		for i, c := range cols {
			if is(c) {
				found = append(found, i)
			}
		}
		if len(found) == 1 {
			return found[0], nil
		}
		if len(found) > 1 {
			return 0, fmt.Errorf("%s %q fits several columns: %s", flag, name, listColumns(cols, found))
		}
	}
	return 0, fmt.Errorf("%s %q: there is no such column; the columns are %s", flag, name, listColumns(cols, every(cols)))
}

// assignTime finds the clock: one column of stamps, a date and a time of day
// side by side, or numbers by their name; else the first numbers that only rise.
func assignTime(cols []column, l *layout, taken map[int]bool) error {
	if i := slices.IndexFunc(cols, func(c column) bool { return c.part == mainPart }); i >= 0 {
		l[roleTime] = i
		return nil
	}
	if l[roleTime] >= 0 {
		pairDate(cols, l, taken)
		return nil
	}
	found := bestByName(cols, taken, roleTime)
	if len(found) == 0 {
		for i, c := range cols {
			if !taken[i] && c.class == stamps {
				found = append(found, i)
			}
		}
	}
	if len(found) == 0 {
		for i, c := range cols {
			if r, _ := roleOf(c); !taken[i] && r == roleNone && c.class == numbers && c.ascending && !allEqual(c.sample) {
				found = []int{i}
				break
			}
		}
	}
	if len(found) > 1 {
		found = clockAmong(cols, found)
	}
	switch {
	case len(found) == 0 && unreadable(cols, taken, roleTime) >= 0:
		c := cols[unreadable(cols, taken, roleTime)]
		return fmt.Errorf("column %q is the time by its name, but its stamps (%s) are in no form that is known: say how to read them with --time-format, such as --time-format 'dd.MM.yyyy HH:mm:ss', or name another column with %s",
			c.label, strings.Join(c.sample[:min(2, len(c.sample))], ", "), flags[roleTime])
	case len(found) == 0:
		return fmt.Errorf("no column is a clock: say which with %s; the columns are %s", flags[roleTime], listColumns(cols, every(cols)))
	case len(found) > 1:
		return ambiguous(cols, found, roleTime)
	}
	l[roleTime] = found[0]
	taken[found[0]] = true
	pairDate(cols, l, taken)
	return nil
}

// clockAmong narrows several columns that could be the clock: a full stamp
// says more than a time of day, a time of day beside a date belongs to it.
func clockAmong(cols []column, found []int) []int {
	var full, timed, plain []int // a date alone is no clock
	for _, i := range found {
		switch c := cols[i]; {
		case c.class == stamps && c.dated && c.timed:
			full = append(full, i)
		case c.class == stamps && c.timed:
			timed = append(timed, i)
		case c.class == numbers:
			plain = append(plain, i)
		}
	}
	switch {
	case len(full) == 1:
		return full
	case len(full) == 0 && len(timed) == 1:
		return timed
	case len(full)+len(timed) == 0 && len(plain) == 1:
		return plain
	}
	return found
}

// pairDate adds the column of dates to a clock that shows the time of day.
func pairDate(cols []column, l *layout, taken map[int]bool) {
	t := cols[l[roleTime]]
	if t.class != stamps || t.dated {
		if t.class == stamps && !t.timed { // the date was named: look for the time of day
			for i, c := range cols {
				if !taken[i] && c.class == stamps && c.timed && !c.dated {
					l[roleDate], l[roleTime] = l[roleTime], i
					taken[i] = true
					return
				}
			}
		}
		return
	}
	for i, c := range cols {
		if !taken[i] && c.class == stamps && c.dated && !c.timed {
			l[roleDate] = i
			taken[i] = true
			return
		}
	}
}

// bestByName lists the columns not taken that fit a role best.
func bestByName(cols []column, taken map[int]bool, want role) []int {
	return best(cols, taken, want, func(c column) bool { return fits(c.class, want) && !(c.switched && want == roleInput) })
}

func best(cols []column, taken map[int]bool, want role, usable func(c column) bool) []int {
	best := 0
	var found []int
	for i, c := range cols {
		if taken[i] || !usable(c) {
			continue
		}
		r, score := roleOf(c)
		if r != want {
			continue
		}
		if score > best {
			best, found = score, nil
		}
		if score == best {
			found = append(found, i)
		}
	}
	return found
}

// fits tells whether a column of this class can have the role.
func fits(c class, r role) bool {
	switch r {
	case roleTime:
		return c == numbers || c == stamps
	case roleMode, roleStatus, roleRun:
		return c == texts || c == numbers
	case roleTag:
		return c == texts
	}
	return c == numbers
}

// roleOf reads the role of a column from its name and unit; score grows with
// how well they fit.
func roleOf(c column) (role, int) {
	parts := wordsOf(c.name)
	hit := func(r role) int { return words[r].hit(c.name, parts) }
	millivolts := c.unit == "mV" && (hit(roleInput) == 0 || hit(roleTemp) > 0) // of a thermocouple, else of a drive
	degrees := c.unit == "degC" || c.unit == "degF" || c.unit == "K" || millivolts
	electric := slices.Contains([]string{"V", "%", "mA", "W", "kW", "kV"}, c.unit) || c.unit == "mV" && !millivolts
	_, clocked := timeUnits[c.unit]
	switch {
	case c.switched && hit(roleInput) > 0 && hit(roleInput) >= hit(roleOther) && hit(roleMode) < 2:
		return roleInput, hit(roleInput)
	case clocked:
		return roleTime, 2 + hit(roleTime)
	case hit(roleRun) > 0:
		return roleRun, hit(roleRun)
	case hit(roleCold) > 0:
		return roleCold, hit(roleCold)
	case hit(roleSetpoint) > 0 && !electric && hit(roleSetpoint) >= hit(roleInput):
		return roleSetpoint, hit(roleSetpoint)
	case hit(roleMode) > 1:
		return roleMode, hit(roleMode)
	case hit(roleStatus) > 0 && !degrees && !electric:
		return roleStatus, hit(roleStatus)
	case hit(roleInlet) > 0 && hit(roleAirflow) == 0 && !electric:
		return roleInlet, hit(roleInlet)
	case hit(roleAirflow) > 0 && !degrees:
		return roleAirflow, hit(roleAirflow)
	case hit(roleOther) > 1 && !(electric && hit(roleInput) > 0):
		return roleOther, 1
	case degrees:
		return roleTemp, 1 + hit(roleTemp)
	case electric && !(hit(roleTemp) > 1 && hit(roleInput) == 0):
		return roleInput, 1 + hit(roleInput)
	case hit(roleTemp) > 0 && hit(roleTemp) >= hit(roleInput) && hit(roleTemp) >= hit(roleTime):
		return roleTemp, hit(roleTemp)
	case hit(roleInput) > 0 && hit(roleInput) >= hit(roleTime):
		return roleInput, hit(roleInput)
	case hit(roleTime) > 0:
		return roleTime, hit(roleTime)
	case c.class == stamps:
		return roleTime, 1
	}
	return roleNone, 0
}

// stepwiseAmong picks the only candidate for the input that moves in steps, as
// a drive set by hand does and its measured voltage does not; -1 when there is
// no such one. Temperatures are never told apart by content: the still one
// may be the outlet before its bump.
func stepwiseAmong(cols []column, found []int) int {
	only := -1
	for _, i := range found {
		if isStepwise(cols[i]) {
			if only >= 0 {
				return -1
			}
			only = i
		}
	}
	return only
}

func contentNote(c column, r role) Note {
	return Note{Code: "column-by-content", Text: fmt.Sprintf("column %q was taken for the %s because of what it holds; %s says otherwise",
		c.label, roleNames[r], flags[r])}
}

func isStepwise(c column) bool { return c.stepwise > 0.9 }

// assignByContent fills the roles that no name told, when what is left is
// clear: one stepwise column for the input, one other for the temperature.
func assignByContent(cols []column, l *layout, taken map[int]bool) ([]Note, error) {
	var notes []Note
	for _, r := range []role{roleInput, roleTemp} {
		if l[r] >= 0 {
			continue
		}
		left := unnamed(cols, taken, isNumeric)
		var fit []int
		for _, i := range left {
			if isStepwise(cols[i]) == (r == roleInput) {
				fit = append(fit, i)
			}
		}
		other := roleInput + roleTemp - r
		if len(left) == 1 && l[other] >= 0 {
			fit = left
		}
		if len(fit) == 0 && r == roleInput && len(left) > 1 {
			fit = left
		}
		if r == roleInput && (len(fit) == 0 || len(left) == 1 && l[other] < 0) {
			if words := unnamed(cols, taken, isSwitched); len(words) > 0 {
				fit = words
			}
		}
		switch bad := unreadable(cols, taken, r); {
		case len(fit) == 0 && bad >= 0:
			return nil, fmt.Errorf("column %q is the %s by its name, but most of its cells (%s) are no numbers: mend the export, or name another column with %s",
				cols[bad].label, roleNames[r], strings.Join(cols[bad].sample[:min(3, len(cols[bad].sample))], ", "), flags[r])
		case len(fit) == 0:
			return nil, fmt.Errorf("no column is the %s: say which with %s; the columns are %s", roleNames[r], flags[r], listColumns(cols, every(cols)))
		case len(fit) > 1:
			return nil, ambiguous(cols, fit, r)
		}
		l[r] = fit[0]
		taken[fit[0]] = true
		notes = append(notes, contentNote(cols[fit[0]], r))
	}
	return notes, nil
}

// unreadable finds the one column of text that is called as the role asks; -1
// where there is none, or several.
func unreadable(cols []column, taken map[int]bool, r role) int {
	if found := best(cols, taken, r, func(c column) bool { return c.class == texts && !c.switched && len(c.sample) > 0 }); len(found) == 1 {
		return found[0]
	}
	return -1
}

func isNumeric(c column) bool { return c.class == numbers && !c.switched }

// unnamed lists the columns whose name says nothing.
func unnamed(cols []column, taken map[int]bool, usable func(c column) bool) (left []int) {
	for i, c := range cols {
		if known, _ := roleOf(c); !taken[i] && known == roleNone && usable(c) {
			left = append(left, i)
		}
	}
	return left
}

// ambiguousError is the error of several columns that could have a role.
type ambiguousError struct {
	role  role
	found []int
	text  string
}

func (e *ambiguousError) Error() string { return e.text }

func ambiguous(cols []column, found []int, r role) error {
	return &ambiguousError{r, found, fmt.Sprintf("%d columns could be the %s: %s; say which with %s", len(found), roleNames[r], listColumns(cols, found), flags[r])}
}

// maxListed bounds a list of columns in a message.
const maxListed = 12

// listColumns names columns with some of their values.
func listColumns(cols []column, which []int) string {
	var b strings.Builder
	for k, i := range which {
		if k == maxListed {
			fmt.Fprintf(&b, " and %d more", len(which)-k)
			break
		}
		if k > 0 {
			b.WriteString(", ")
		}
		if slices.ContainsFunc(cols, func(c column) bool { return c.index != cols[i].index && c.label == cols[i].label }) {
			fmt.Fprintf(&b, "%q called ", placeName(cols[i]))
		}
		fmt.Fprintf(&b, "%q", cols[i].label)
		if s := cols[i].sample; len(s) > 0 {
			fmt.Fprintf(&b, " (%s)", strings.Join(s[:min(3, len(s))], ", "))
		}
	}
	return b.String()
}

// placeName is a name for a column whose own name another has as well.
func placeName(c column) string { return fmt.Sprintf("column %d", c.index+1) }

func every(cols []column) []int {
	all := make([]int, len(cols))
	for i := range all {
		all[i] = i
	}
	return all
}

func allEqual(s []string) bool {
	return len(s) == 0 || !slices.ContainsFunc(s, func(x string) bool { return x != s[0] })
}
