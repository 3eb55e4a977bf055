package data

import "testing"

// The line of every row is found again, and evenly spaced rows cost no memory.
func TestLineMap(t *testing.T) {
	for _, c := range []struct {
		name   string
		line   func(row int) int
		breaks int
	}{
		{"a header above", func(i int) int { return i + 2 }, 1},
		{"two lines for a row", func(i int) int { return 2*i + 3 }, 1},
		{"a line left out", func(i int) int { return i + 2 + i/500 }, 2},
		{"newest first", func(i int) int { return 2000 - i }, 1},
		{"no order", func(i int) int { return (i * i) % 1009 }, 1000},
	} {
		var m lineMap
		for i := range 1000 {
			m.add(i, c.line(i))
		}
		for i := range 1000 {
			if got, want := m.line(i), c.line(i); got != want {
				t.Fatalf("%s: row %d in line %d, want %d", c.name, i, got, want)
			}
		}
		if len(m.breaks) > c.breaks {
			t.Errorf("%s: %d breaks, want at most %d", c.name, len(m.breaks), c.breaks)
		}
	}
}
