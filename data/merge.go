package data

import "fmt"

// joinComplements puts rows together that share a stamp and fill different
// columns, as a log writes them that has a line for each value: spread over the
// time to the next stamp, they would stand where nothing was recorded. Where
// any two rows of a stamp hold a value of the same column nothing is changed.
func (r *rows) joinComplements() {
	var lines lineMap
	joined, n := 0, 0
	for i := range r.t {
		if n > 0 && r.t[i] == r.t[i-1] {
			if joined++; !r.complement(i, i-1) {
				return
			}
		} else {
			n++
		}
	}
	if joined == 0 {
		return
	}
	blank := r.blanks()
	n = -1
	for i, t := range r.t {
		if i == 0 || t != r.t[n] {
			n++
			lines.add(n, r.lines.line(i))
			r.copyRow(n, i)
			continue
		}
		for _, v := range r.v {
			if v != nil && v[i] == v[i] {
				v[n] = v[i]
			}
		}
		if r.auto != nil && r.auto[i] >= 0 {
			r.auto[n] = r.auto[i]
		}
	}
	r.truncate(0, n+1)
	r.lines = lines
	r.notes = append(r.notes, Note{Code: "rows-joined", Text: fmt.Sprintf("%d rows were put together with the row before them, which has the same stamp and fills other columns", joined)})
	count(r.dropped, "joined to the row before", joined)
	if left := r.missing["blank"] - (blank - r.blanks()); left > 0 {
		r.missing["blank"] = left
	} else {
		delete(r.missing, "blank")
	}
}

// blanks is the number of rows without an input, and without a temperature.
func (r *rows) blanks() (n int) {
	for _, x := range []role{roleInput, roleTemp} {
		for _, v := range r.v[x] {
			if v != v {
				n++
			}
		}
	}
	return n
}

// complement tells that no column has a value in row i and in any row of the
// same stamp in front of it, and that both rows have one.
func (r *rows) complement(i, j int) bool {
	for ; j >= 0 && r.t[j] == r.t[i]; j-- {
		mine, theirs := false, false
		for _, v := range r.v {
			if v == nil {
				continue
			}
			a, b := v[i] == v[i], v[j] == v[j]
			if a && b {
				return false
			}
			mine, theirs = mine || a, theirs || b
		}
		if r.auto != nil && r.auto[i] >= 0 && r.auto[j] >= 0 || !mine && (r.auto == nil || r.auto[i] < 0) || !theirs && (r.auto == nil || r.auto[j] < 0) {
			return false
		}
	}
	return true
}
