package validate

import (
	"bytes"
	"strings"
	"testing"
)

const journalStart = `{"schema":"lagwright/replay-journal/1","key":"k"}` + "\n"

// Whatever stands in a journal, what is read back is a prefix of whole lines,
// and reading that prefix again gives the same.
func FuzzReadJournal(f *testing.F) {
	line := `{"file":"a.csv","sha256":"aa","runs":[]}` + "\n"
	f.Add([]byte(journalStart + line + line[:20]))
	f.Add([]byte(journalStart + line + "\x00\x00\x00\n" + line))
	f.Add([]byte("notes\n"))
	f.Fuzz(func(t *testing.T, in []byte) {
		done := map[logID]doneLog{}
		good, err := readJournal(bytes.NewReader(in), "j", "k", done)
		if err != nil {
			return
		}
		if good > 0 && in[good-1] != '\n' {
			t.Fatalf("the sound part ends inside a line, at %d", good)
		}
		again := map[logID]doneLog{}
		if n, err := readJournal(bytes.NewReader(in[:good]), "j", "k", again); err != nil || n != good || len(again) != len(done) {
			t.Fatalf("read again: %d of %d bytes, %d of %d logs, %v", n, good, len(again), len(done), err)
		}
	})
}

// A torn line and all that follows it are done again; what is before stays.
func TestReadJournal(t *testing.T) {
	sound := `{"file":"a.csv","sha256":"aa","runs":[]}` + "\n"
	for _, c := range []struct {
		name, text string
		good       int
		logs       int
		fails      bool
	}{
		{"empty", "", 0, 0, false},
		{"torn head", journalStart[:20], 0, 0, false},
		{"head only", journalStart, len(journalStart), 0, false},
		{"one log", journalStart + sound, len(journalStart + sound), 1, false},
		{"torn last line", journalStart + sound + sound[:9], len(journalStart + sound), 1, false},
		{"nonsense in between", journalStart + sound + "\x00\x00\n" + strings.Replace(sound, "a.csv", "b.csv", 1), len(journalStart + sound), 1, false},
		{"another key", strings.Replace(journalStart, `"k"`, `"x"`, 1), 0, 0, true},
		{"no journal", "a,b,c\n", 0, 0, true},
	} {
		done := map[logID]doneLog{}
		good, err := readJournal(strings.NewReader(c.text), "j", "k", done)
		if (err != nil) != c.fails || int(good) != c.good || len(done) != c.logs {
			t.Errorf("%s: %d bytes, %d logs, %v; want %d and %d", c.name, good, len(done), err, c.good, c.logs)
		}
	}
}
