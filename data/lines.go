package data

import (
	"bytes"
	"fmt"
	"io"
)

// maxLine bounds the length of a line. A header of a thousand million columns
// is not a log, and must not fill the memory before that is known.
const maxLine = 4 << 20

// lineReader hands out the lines of a text. A run of NUL bytes (a logger that
// lost power leaves them) is shortened to one. In text with quotes, a line
// end inside a quoted cell does not end the line.
type lineReader struct {
	path string
	r    io.Reader
	buf  []byte
	lo   int  // buf[lo:hi] is unread
	hi   int  //
	eof  bool // r is at its end
	err  error

	onlyCR bool // lines end with CR alone
	quoted bool // a quote was seen: a record may hold line ends
	delim  byte // delimiter, for the end of quoted cells

	rewrite func(line []byte) []byte // makes a row of a line that holds it in another form; nil where lines are rows
	lastNL  bool                     // the text read so far ends with a line end

	line int // number of the line handed out last, from 1
	next int // number of the line that follows it
}

// newLineReader reads the lines of a text whose beginning, head, was read
// already; r holds the rest, nil where there is none. The memory of head is the
// reader's from then on. start must be called before the first line is read.
func newLineReader(path string, head []byte, r io.Reader) *lineReader {
	return &lineReader{path: path, r: r, buf: head, next: 1, eof: r == nil}
}

// start makes ready what was read before.
func (l *lineReader) start() { l.take(len(l.buf)) }

// read returns the next line without its end, valid until the next call, and
// io.EOF after the last.
func (l *lineReader) read() ([]byte, error) {
	if !l.quoted && l.rewrite == nil {
		if n := bytes.IndexByte(l.buf[l.lo:l.hi], '\n'); 0 <= n && n < maxLine {
			line := l.buf[l.lo : l.lo+n]
			l.line = l.next
			l.next++
			l.lo += n + 1
			return withoutCR(line), nil
		}
	}
	from := 0 // in buf[lo:], searched already
	for {
		if n, end, ok := l.find(from); ok {
			if n >= maxLine {
				return nil, l.tooLong()
			}
			line := l.buf[l.lo : l.lo+n]
			l.line = l.next
			l.next++
			if l.quoted && l.rewrite == nil {
				l.next += bytes.Count(line, []byte{'\n'})
			}
			l.lo += end
			line = withoutCR(line)
			if l.rewrite != nil {
				line = l.rewrite(line)
			}
			return line, nil
		}
		if l.eof {
			if l.err != nil {
				return nil, l.err
			}
			return nil, io.EOF
		}
		from = l.hi - l.lo
		if l.quoted && l.rewrite == nil {
			from = 0
		}
		if err := l.fill(); err != nil {
			return nil, err
		}
	}
}

// withoutCR takes away what stands in front of the line end.
func withoutCR(line []byte) []byte {
	for len(line) > 0 && line[len(line)-1] == '\r' {
		line = line[:len(line)-1]
	}
	return line
}

// find looks for the end of the line at lo: its length, and the length with
// the line end. At the end of the text the rest is a line.
func (l *lineReader) find(from int) (n, end int, ok bool) {
	rest := l.buf[l.lo:l.hi]
	if l.quoted && l.rewrite == nil {
		n = recordEnd(rest, l.delim, l.eof)
	} else if n = bytes.IndexByte(rest[from:], '\n'); n >= 0 {
		n += from
	}
	if n >= 0 {
		return n, n + 1, true
	}
	if l.eof && len(rest) > 0 && l.err == nil {
		return len(rest), len(rest), true
	}
	return 0, 0, false
}

// fill reads more text behind the unread part.
func (l *lineReader) fill() error {
	if l.lo > 0 {
		copy(l.buf, l.buf[l.lo:l.hi])
		l.lo, l.hi = 0, l.hi-l.lo
	}
	if l.hi >= maxLine {
		return l.tooLong()
	}
	if l.hi == len(l.buf) {
		l.buf = append(l.buf, make([]byte, max(len(l.buf), bufferSize))...)
	}
	n, err := l.r.Read(l.buf[l.hi:])
	l.take(n)
	if err == io.EOF {
		l.eof = true
	} else if err != nil {
		l.eof, l.err = true, err
	}
	return nil
}

func (l *lineReader) tooLong() error {
	return fmt.Errorf("%s:%d: line is longer than %d MiB, this is not a log", l.path, l.next, maxLine>>20)
}

// take adds the n bytes behind the unread part to it.
func (l *lineReader) take(n int) {
	fresh := l.buf[l.hi : l.hi+n]
	if bytes.IndexByte(fresh, 0) >= 0 {
		fresh = squeezeNULs(fresh, l.hi > l.lo && l.buf[l.hi-1] == 0)
	}
	if l.onlyCR {
		for i, c := range fresh {
			if c == '\r' {
				fresh[i] = '\n'
			}
		}
	}
	if !l.quoted && bytes.IndexByte(fresh, '"') >= 0 {
		l.quoted = true
	}
	l.hi += len(fresh)
	if len(fresh) > 0 {
		l.lastNL = fresh[len(fresh)-1] == '\n'
	}
}

// squeezeNULs shortens every run of NUL bytes to one, in place; open tells
// that a NUL stands before b.
func squeezeNULs(b []byte, open bool) []byte {
	out := b[:0]
	for _, c := range b {
		if c == 0 && open {
			continue
		}
		open = c == 0
		out = append(out, c)
	}
	return out
}

// maxQuoted bounds a quoted cell. A quote without its partner would otherwise
// swallow the rest of the file.
const maxQuoted = 1 << 16

// recordEnd is the index of the line end that ends the record at the start of
// b, -1 when it is not in b. A quote opens a quoted cell only at the start of
// a cell, and only if its partner follows within maxQuoted bytes; any other
// quote is a character.
func recordEnd(b []byte, delim byte, eof bool) int {
	if n := bytes.IndexByte(b, '\n'); n >= 0 && bytes.IndexByte(b[:n], '"') < 0 {
		return n
	}
	start := true // of a cell
	for i := 0; i < len(b); i++ {
		switch c := b[i]; {
		case c == '\n':
			return i
		case c == delim:
			start = true
			continue
		case c == ' ' && start:
			continue
		case c == '"' && start:
			n := quotedLength(b[i:], delim)
			if n < 0 && !eof && len(b)-i < maxQuoted {
				return -1 // the partner may still come
			}
			if n > 0 {
				i += n - 1
			}
		}
		start = false
	}
	return -1
}

// quotedLength is the length of the quoted cell that b begins with, from
// quote to quote, -1 when the closing quote is missing or does not stand in
// front of a delimiter or a line end. Two quotes inside mean one.
func quotedLength(b []byte, delim byte) int {
	for i := 1; i < len(b) && i < maxQuoted; i++ {
		if b[i] != '"' {
			continue
		}
		if i+1 < len(b) && b[i+1] == '"' {
			i++
			continue
		}
		if b[1] == delim && b[i-1] == '\n' { // two ditto marks, a line apart
			return -1
		}
		rest := bytes.TrimLeft(b[i+1:], " \r")
		if len(rest) == 0 || rest[0] == delim || rest[0] == '\n' || delim == ' ' && i+1 < len(b) && b[i+1] == ' ' {
			return i + 1
		}
		return -1
	}
	return -1
}
