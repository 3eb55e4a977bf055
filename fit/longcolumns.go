package fit

import "sync"

// longColumns are columns of many rows that a fit has done with: the structures of a
// log need as many one after the other, and memory touched for the first time is slow.
var longColumns sync.Pool

// longColumn is a column of n rows of any content, in the memory of an old one if
// that has room, or of one that was given back.
func longColumn(old []float64, n int) []float64 {
	if cap(old) >= n {
		return old[:n]
	}
	if p, ok := longColumns.Get().(*[]float64); ok && cap(*p) >= n {
		return (*p)[:n]
	}
	return make([]float64, n)
}

// giveBack gives up a column that nothing refers to any more.
func giveBack(c []float64) {
	if cap(c) > 0 {
		longColumns.Put(&c)
	}
}

// release gives back the long columns of the tangents taken last.
func (e *engine) release() {
	for i := range e.work {
		m := &e.work[i].tangent
		giveBack(m.rest)
		giveBack(m.spare)
		m.rest, m.spare = nil, nil
	}
}
