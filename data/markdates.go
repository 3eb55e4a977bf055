package data

// markDates makes stamps of the columns that hold dates of bare digits or dates
// without a year, by their names and by all of their cells. A date alone counts
// only beside a time of day.
func markDates(d *dialect) {
	markZeroDates(d)
	for i := range d.cols {
		c := &d.cols[i]
		if c.class != numbers && c.class != texts || c.unit != "" {
			continue
		}
		cells := d.cellsOf(i)
		if c.class == texts {
			if all, timed := areYearless(cells); all && (timed || d.besideTime(i)) {
				c.class, c.dated, c.timed = stamps, true, timed
				continue
			}
		}
		if !namesTime(*c) {
			continue
		}
		if forms, _ := fittingDigits(cells); len(forms) > 0 {
			alone := true
			for _, b := range cells {
				alone = alone && len(b) <= 8
			}
			if !alone || d.besideTime(i) && fewValues(cells) {
				c.class, c.dated, c.timed = stamps, true, !alone
			}
		}
	}
}

// cellsOf lists the cells of a column that hold anything.
func (d *dialect) cellsOf(i int) (cells [][]byte) {
	for _, l := range d.rows {
		if len(l.cells) < d.fields || len(l.cells[i]) == 0 { // words below the data, a row cut off
			continue
		}
		cells = append(cells, l.cells[i])
	}
	return cells
}

// besideTime tells that another column holds a time of day, or is called by one
// and may hold its digits.
func (d *dialect) besideTime(i int) bool {
	for k, c := range d.cols {
		if k == i {
			continue
		}
		if c.class == stamps && c.timed && !c.dated {
			return true
		}
		if c.class == numbers && namesTime(c) && c.unit == "" && !fewValues(d.cellsOf(k)) {
			if w, _ := d.findClockDigits(k); w > 0 {
				return true
			}
		}
	}
	return false
}

// fewValues tells cells that change at most once in ten rows, as the days of a
// log do.
func fewValues(cells [][]byte) bool {
	changes := 0
	for i := 1; i < len(cells); i++ {
		if string(cells[i]) != string(cells[i-1]) {
			changes++
		}
	}
	return changes <= max(1, len(cells)/10)
}
