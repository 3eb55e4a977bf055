package validate

import (
	"bufio"
	"bytes"
	"crypto/sha256"
	"encoding/hex"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"sync"
	"time"
)

// journalSchema is the schema of a journal: a file of JSON lines, a head and
// then one line for each log that is done, in the order in which they were.
const journalSchema = "lagwright/replay-journal/1"

// ErrJournal is wrapped by errors about a journal that cannot be gone on with.
var ErrJournal = errors.New("journal")

type journalHead struct {
	Schema string `json:"schema"`
	Key    string `json:"key"` // hash of everything that decides the result, see plan.key
}

// A done log: its identity and what came out of it.
type doneLog struct {
	File   string      `json:"file"` // base name
	SHA256 string      `json:"sha256"`
	Runs   []RunReplay `json:"runs"`
	Failed []FailedRun `json:"failed,omitempty"`
}

// logID tells a log by its base name and content: two logs that share both
// give the same result wherever they lie.
type logID struct{ file, sha string }

// identify hashes a file; ok is false for standard input and what cannot be
// read, which is then never taken from a journal.
func identify(path string) (id logID, ok bool) {
	if path == "-" {
		return logID{}, false
	}
	f, err := os.Open(path)
	if err != nil {
		return logID{}, false
	}
	defer f.Close()
	h := sha256.New()
	if _, err := io.Copy(h, f); err != nil {
		return logID{}, false
	}
	return logID{filepath.Base(path), hex.EncodeToString(h.Sum(nil))}, true
}

// journal is an append-only record of the logs that are done. Each entry is
// one write of one line, so a process killed at any moment leaves at most one
// torn line, at the end; it is dropped on the next opening. The file is
// synced to the disk about once a second and at the end: a power cut can cost
// that last second, a killed process nothing that was written.
type journal struct {
	mu     sync.Mutex
	file   *os.File
	synced time.Time
}

// openJournal opens the journal at path, and with resume returns what it
// holds. Without resume a journal already there is an error: it is the only
// trace of work that was broken off.
func openJournal(path, key string, resume bool) (*journal, map[logID]doneLog, error) {
	f, err := os.OpenFile(path, os.O_RDWR|os.O_CREATE, 0o644)
	if err != nil {
		return nil, nil, fmt.Errorf("open the journal: %w", err)
	}
	j := &journal{file: f}
	done, err := j.load(path, key, resume)
	if err != nil {
		f.Close()
		return nil, nil, err
	}
	return j, done, nil
}

// load reads the journal, cuts a torn last line off and leaves the file ready
// for appending. An empty file gets its head.
func (j *journal) load(path, key string, resume bool) (map[logID]doneLog, error) {
	done := map[logID]doneLog{}
	good, err := readJournal(j.file, path, key, done)
	if err != nil {
		return nil, err
	}
	if good > 0 && !resume {
		return nil, fmt.Errorf("%w %s: it is there from work that was broken off; go on with --resume, or delete it to begin again", ErrJournal, path)
	}
	if err := j.file.Truncate(good); err != nil {
		return nil, fmt.Errorf("mend the journal: %w", err)
	}
	if _, err := j.file.Seek(good, io.SeekStart); err != nil {
		return nil, fmt.Errorf("mend the journal: %w", err)
	}
	if good == 0 {
		return done, j.append(journalHead{journalSchema, key})
	}
	return done, nil
}

// readJournal fills done and returns the length of the part that is whole.
func readJournal(r io.Reader, path, key string, done map[logID]doneLog) (good int64, err error) {
	lines := bufio.NewReader(r)
	for n := 1; ; n++ {
		line, err := lines.ReadBytes('\n')
		if errors.Is(err, io.EOF) {
			return good, nil // what is left in line was torn
		}
		if err != nil {
			return 0, fmt.Errorf("read the journal: %w", err)
		}
		if n == 1 {
			err = checkHead(line, path, key)
		} else {
			err = addDone(line, done)
		}
		if err != nil && n > 1 {
			// A power cut can leave a whole block of nonsense at the end: what
			// follows the last sound line is done again.
			return good, nil
		}
		if err != nil {
			return 0, err
		}
		good += int64(len(line))
	}
}

func checkHead(line []byte, path, key string) error {
	var head journalHead
	if err := json.Unmarshal(line, &head); err != nil || head.Schema != journalSchema {
		return fmt.Errorf("%w %s: its first line is not that of a journal (%s); give the output another name, or delete the file", ErrJournal, path, journalSchema)
	}
	if head.Key != key {
		return fmt.Errorf("%w %s: it belongs to another card, other gains or other options; give the output another name, or delete the journal to begin again", ErrJournal, path)
	}
	return nil
}

func addDone(line []byte, done map[logID]doneLog) error {
	var d doneLog
	if err := json.Unmarshal(line, &d); err != nil {
		return err
	}
	done[logID{d.File, d.SHA256}] = d
	return nil
}

// append writes one entry as one line.
func (j *journal) append(entry any) error {
	var line bytes.Buffer
	if err := json.NewEncoder(&line).Encode(entry); err != nil {
		return fmt.Errorf("write the journal: %w", err)
	}
	j.mu.Lock()
	defer j.mu.Unlock()
	if _, err := j.file.Write(line.Bytes()); err != nil {
		return fmt.Errorf("write the journal: %w", err)
	}
	if time.Since(j.synced) < time.Second {
		return nil
	}
	j.synced = time.Now()
	return j.file.Sync()
}

// close syncs and closes the journal; it stays on the disk.
func (j *journal) close() error {
	return errors.Join(j.file.Sync(), j.file.Close())
}
