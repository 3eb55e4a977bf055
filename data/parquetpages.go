package data

import (
	"encoding/binary"
	"errors"
	"fmt"
	"io"
)

// The library walks from page to page by what the headers say, and beyond the
// end of a column when they hold fewer values than the footer promises: there
// it reads what is left in its buffer, without end. The walk is made here
// first, through the headers alone.

// checkPages walks through the pages of a column of a row group: n bytes from
// start, which must hold the given number of values.
func checkPages(in io.ReaderAt, start, n, values int64) error {
	at, end := start, start+n
	for at < end {
		h, err := readPageHeader(in, at, end)
		if err != nil {
			return err
		}
		at += h.size + h.ints[pagePacked]
		values -= h.values()
		if at > end || h.ints[pagePacked] < 0 || h.ints[pageUnpacked] < 0 || h.values() < 0 {
			return errPage
		}
	}
	if values != 0 {
		return errFewValues
	}
	return nil
}

var errPage = errors.New("a page header is damaged")

// pageHeader is what the header of a page says: numbers by field, those of
// structures inside by 100 times its field and theirs (parquet.thrift of the
// Apache Parquet format, from memory).
type pageHeader struct {
	ints map[int]int64
	size int64 // of the header, bytes
}

const (
	pageType     = 1
	pageUnpacked = 2
	pagePacked   = 3
	valuesV1     = 501 // of a data page
	rowsV2       = 803 // of a data page of the second version
)

// values counts what the library counts: values of a page of the first
// version, rows of the second.
func (h pageHeader) values() int64 {
	switch h.ints[pageType] {
	case 0:
		return h.ints[valuesV1]
	case 3:
		return h.ints[rowsV2]
	}
	return 0
}

// readPageHeader reads the header at a place; a header may hold the least and
// the largest value, which are as long as texts are.
func readPageHeader(in io.ReaderAt, at, end int64) (pageHeader, error) {
	for most := int64(4 << 10); ; most *= 16 {
		b := make([]byte, min(most, end-at))
		if _, err := in.ReadAt(b, at); err != nil && err != io.EOF {
			return pageHeader{}, err
		}
		r := thriftReader{b: b, ints: map[int]int64{}}
		if r.structure(0, 0) {
			if t := r.ints[pageType]; t < 0 || t > 3 {
				return pageHeader{}, fmt.Errorf("%w: kind %d of a page is unknown", errPage, t)
			}
			return pageHeader{ints: r.ints, size: int64(r.i)}, nil
		}
		if most >= end-at || most > 4<<20 {
			return pageHeader{}, errPage
		}
	}
}

// thriftReader reads a structure in the compact protocol of Apache Thrift
// (from memory).
type thriftReader struct {
	b    []byte
	i    int
	ints map[int]int64
}

// deepest is how far structures may lie inside each other.
const deepest = 8

func (r *thriftReader) structure(path, depth int) bool {
	id := 0
	for depth < deepest {
		if r.i >= len(r.b) {
			return false
		}
		head := r.b[r.i]
		r.i++
		if head == 0 {
			return true
		}
		if delta := int(head >> 4); delta > 0 {
			id += delta
		} else {
			v, ok := r.integer()
			if !ok {
				return false
			}
			id = int(v)
		}
		if !r.value(head&15, 100*path+id, depth) {
			return false
		}
	}
	return false
}

// value reads one value of a type; truth values of fields are in their type.
func (r *thriftReader) value(kind byte, path, depth int) bool {
	switch kind {
	case 1, 2:
		return true
	case 3:
		r.i++
	case 4, 5, 6:
		v, ok := r.integer()
		r.ints[path] = v
		return ok
	case 7:
		r.i += 8
	case 8:
		n, w := binary.Uvarint(r.b[min(r.i, len(r.b)):])
		if w <= 0 || n > uint64(len(r.b)) {
			return false
		}
		r.i += w + int(n)
	case 12:
		return r.structure(path, depth+1)
	default: // lists and maps are in no page header
		return false
	}
	return r.i <= len(r.b)
}

func (r *thriftReader) integer() (int64, bool) {
	v, w := binary.Varint(r.b[min(r.i, len(r.b)):])
	r.i += max(w, 0)
	return v, w > 0
}
