package data

import "bytes"

// Nearly all rows of nearly all logs hold plain numbers and a stamp. They are
// read where they stand, without being cut into cells first.

// canReadInPlace tells that the rows of a log can be read so: one run, no words
// to read, and the clock in one cell.
func (c *csvReader) canReadInPlace() bool {
	if c.d.delim == ' ' || c.spread != nil || c.long != nil || c.pair || c.at[roleHalf] >= 0 || c.at[roleRun] >= 0 || len(c.twins) > 0 {
		return false
	}
	for _, f := range c.fields {
		if f.beside != nil || f.switched && f.role == roleInput || f.role != roleTime && !isValue(f.role) {
			return false
		}
	}
	return true
}

// isValue tells the roles whose cells are numbers.
func isValue(r role) bool {
	switch r {
	case roleInput, roleTemp, roleSetpoint, roleAirflow, roleInlet, roleCold:
		return true
	}
	return false
}

// fast reads a row in place. It gives up, and adds nothing, at anything out of
// the ordinary. quoted tells that the text has quotes, though not where.
func (c *csvReader) fast(text []byte, line int, quoted bool) bool {
	if len(text) == 0 || mayComment(text[0]) || quoted && !c.fits(text) {
		return false
	}
	delim := c.d.delim
	i, col := 0, 0
	for k := range c.fields {
		f := &c.fields[k]
		for ; col < f.index; col++ {
			if i < len(text) && text[i] == delim {
				i++
				continue
			}
			n := bytes.IndexByte(text[i:], delim)
			if n < 0 || quoted && bytes.IndexByte(text[i:i+n], '"') >= 0 {
				return false
			}
			i += n + 1
		}
		cell, n := text[i:], 0
		if quoted {
			cell, n = insideQuotes(cell, delim)
		}
		m, ok := 0, false
		if f.role == roleTime {
			m, ok = c.stampInPlace(cell)
		} else {
			m, ok = c.valueInPlace(cell, &c.rec.v[f.role])
		}
		if !ok || n > 0 && m < len(cell) {
			return false
		}
		i += max(n, m)
	}
	if rest := text[i:]; len(rest) > 0 {
		extra := bytes.Count(rest, []byte{delim})
		if col+extra >= c.d.fields || bytes.IndexByte(rest, 0) >= 0 ||
			quoted && bytes.IndexByte(rest, '"') >= 0 {
			return false
		}
	}
	if c.only == nil {
		c.only = c.table("")
	}
	c.rec.line = line
	c.only.take(&c.rec, c.open)
	return true
}

// fits tells that a row has as many cells as it should, delimiters in quotes
// counted, and no NUL bytes.
func (c *csvReader) fits(text []byte) bool {
	n := bytes.Count(text, []byte{c.d.delim})
	return c.last <= n && n < c.d.fields && bytes.IndexByte(text, 0) < 0
}

// insideQuotes returns what stands between the quotes around the cell that text
// begins with, and the length with them; text itself and 0 where there are none.
func insideQuotes(text []byte, delim byte) (inside []byte, n int) {
	if len(text) == 0 || text[0] != '"' {
		return text, 0
	}
	n = bytes.IndexByte(text[1:], '"') + 2
	if n < 2 || n < len(text) && text[n] != delim {
		return text, 0
	}
	return text[1 : n-1], n
}

// valueInPlace reads the number that text begins with and returns its length.
func (c *csvReader) valueInPlace(text []byte, v *float64) (n int, ok bool) {
	d, n, ok := scanDecimal(text, c.d.format.point)
	if !ok || n < len(text) && text[n] != c.d.delim {
		return 0, false
	}
	*v, ok = d.float(text[:n], c.d.format.point)
	return n, ok
}

// stampInPlace reads the stamp that text begins with and returns its length.
func (c *csvReader) stampInPlace(text []byte) (n int, ok bool) {
	if c.clock.kind == elapsed || c.clock.kind == epoch {
		d, n, ok := scanDecimal(text, c.d.format.point)
		if ok && !d.dropped && (n == len(text) || text[n] == c.d.delim) {
			c.rec.t, ok = d.scaled(c.clock.unit)
			return n, ok
		}
	}
	if n = bytes.IndexByte(text, c.d.delim); n < 0 {
		n = len(text)
	}
	c.rec.t, c.rec.alt, ok = c.clock.parse(text[:n], c.d.format.point)
	return n, ok
}

// mayComment tells the characters that a comment can begin with.
func mayComment(c byte) bool { return c == '#' || c == '%' || c == '!' || c == '/' || c == ';' }

// take counts and adds a complete row.
func (tb *table) take(r *record, open bool) {
	tb.counts.read++
	tb.add(r, open)
}
