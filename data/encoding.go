package data

import (
	"bufio"
	"bytes"
	"io"

	"golang.org/x/text/encoding/charmap"
	"golang.org/x/text/encoding/unicode"
	"golang.org/x/text/transform"
)

// utf8Reader returns a reader of UTF-8 for a text that begins with head.
// UTF-16 is known by its byte order mark, or by every other byte being zero.
// One-byte encodings pass as they are: digits and delimiters are the same in
// all of them, and names go through decodeName.
func utf8Reader(head []byte, r io.Reader) io.Reader {
	wide := func(order unicode.Endianness, mark unicode.BOMPolicy) io.Reader {
		return transform.NewReader(bufio.NewReaderSize(r, bufferSize/8), unicode.UTF16(order, mark).NewDecoder())
	}
	switch {
	case bytes.HasPrefix(head, []byte{0xFF, 0xFE}), bytes.HasPrefix(head, []byte{0xFE, 0xFF}):
		return wide(unicode.LittleEndian, unicode.ExpectBOM)
	case zeroShare(head, 1) > 0.8 && zeroShare(head, 0) < 0.2:
		return wide(unicode.LittleEndian, unicode.IgnoreBOM)
	case zeroShare(head, 0) > 0.8 && zeroShare(head, 1) < 0.2:
		return wide(unicode.BigEndian, unicode.IgnoreBOM)
	}
	return r
}

// zeroShare is the share of zeros among the bytes at even (from 0) or odd
// (from 1) places.
func zeroShare(head []byte, from int) float64 {
	zeros, n := 0, 0
	for i := from; i < len(head) && i < 4096; i += 2 {
		n++
		if head[i] == 0 {
			zeros++
		}
	}
	if n == 0 {
		return 0
	}
	return float64(zeros) / float64(n)
}

func windows1252(b []byte) string {
	s, err := charmap.Windows1252.NewDecoder().Bytes(b)
	if err != nil {
		return string(bytes.ToValidUTF8(b, []byte("?")))
	}
	return string(s)
}
