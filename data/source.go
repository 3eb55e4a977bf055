package data

import (
	"bufio"
	"bytes"
	"crypto/sha256"
	"encoding/binary"
	"encoding/hex"
	"errors"
	"fmt"
	"hash"
	"io"
	"os"
	"path/filepath"

	"github.com/klauspost/compress/gzip"
	"github.com/klauspost/compress/zstd"
)

// source is an opened log: its bytes unpacked, and the hash of the bytes as
// they are stored.
type source struct {
	path string // as given, for messages
	file string // base name, "-" for standard input
	head []byte // first unpacked bytes, not consumed

	r        *bufio.Reader // unpacked bytes
	stored   *hashReader
	closer   io.Closer
	unpacker *zstd.Decoder // nil when not packed with zstd
	packed   string        // "gzip", "zstd" or ""
}

// headSize is how many bytes are enough to tell the kind of file.
const headSize = 4096

// bufferSize is how much is read at once of a large file, or of one whose size
// is not known.
const bufferSize = 1 << 18

// openSource opens path, or stdin for "-", and unpacks gzip and zstd.
func openSource(path string, stdin io.Reader) (*source, error) {
	s := &source{path: path, file: "-"}
	in := stdin
	if path != "-" {
		f, err := os.Open(path)
		if err != nil {
			return nil, fmt.Errorf("%s: %w", path, pathCause(err))
		}
		if info, err := f.Stat(); err == nil && info.IsDir() {
			f.Close()
			return nil, fmt.Errorf("%s: is a folder; name the logs in it", path)
		}
		in, s.file, s.closer = f, filepath.Base(path), f
	} else if stdin == nil {
		return nil, errors.New("-: there is no standard input to read")
	}
	s.stored = &hashReader{r: in, hash: sha256.New()}
	if err := s.unpack(); err != nil {
		s.close()
		return nil, err
	}
	return s, nil
}

func (s *source) unpack() error {
	raw := bufio.NewReaderSize(s.stored, headSize) // larger reads pass it by
	magic, err := raw.Peek(4)
	if err != nil && len(magic) == 0 && !errors.Is(err, io.EOF) {
		return fmt.Errorf("%s: %w", s.path, err)
	}
	switch {
	case bytes.HasPrefix(magic, []byte{0x1F, 0x8B}):
		z, err := gzip.NewReader(bufio.NewReaderSize(raw, s.bufferSize()))
		if err != nil {
			return fmt.Errorf("%s: damaged gzip file: %w", s.path, err)
		}
		s.packed, s.r = "gzip", bufio.NewReaderSize(&unpacked{r: z, s: s}, headSize)
	case bytes.HasPrefix(magic, []byte{0x28, 0xB5, 0x2F, 0xFD}):
		z, err := zstd.NewReader(raw, zstd.WithDecoderConcurrency(1), zstd.WithDecoderMaxWindow(128<<20))
		if err != nil {
			return fmt.Errorf("%s: damaged zstd file: %w", s.path, err)
		}
		s.unpacker = z
		s.packed, s.r = "zstd", bufio.NewReaderSize(&unpacked{r: z, s: s}, headSize)
	case bytes.HasPrefix(magic, []byte("PK\x03\x04")):
		return fmt.Errorf("%s: is a zip archive or a spreadsheet, not a log: export it as CSV", s.path)
	default:
		s.r = raw
	}
	s.head, err = s.r.Peek(headSize)
	if err != nil && !errors.Is(err, io.EOF) {
		return err
	}
	return nil
}

// sum is the SHA-256 of all stored bytes, hex; what was not read yet is read.
func (s *source) sum() (string, error) {
	if s.stored.ended {
		return hex.EncodeToString(s.stored.hash.Sum(nil)), nil
	}
	rest := struct{ io.Writer }{io.Discard} // without the small pieces in which Discard itself reads
	if _, err := io.CopyBuffer(rest, s.stored, make([]byte, s.bufferSize())); err != nil {
		return "", fmt.Errorf("%s: %w", s.path, err)
	}
	return hex.EncodeToString(s.stored.hash.Sum(nil)), nil
}

// expectedRows guesses the number of lines of a stored text from its size and
// the lines of its beginning; 0 where the size is not known.
func (s *source) expectedRows(sample []byte) int {
	size := s.textSize()
	lines := bytes.Count(sample, []byte{'\n'})
	if size == 0 || lines == 0 {
		return 0
	}
	perLine := float64(len(sample)) / float64(lines)
	return int(1.02*float64(size)/perLine) + firstBlock
}

// bufferSize is how much of the stored bytes is worth reading at once.
func (s *source) bufferSize() int {
	if n := s.storedSize(); n > 0 {
		return int(min(max(n, headSize), bufferSize))
	}
	return bufferSize
}

// storedSize is the size of a file, 0 of anything else.
func (s *source) storedSize() int64 {
	if f, ok := s.closer.(*os.File); ok {
		if info, err := f.Stat(); err == nil && info.Mode().IsRegular() {
			return info.Size()
		}
	}
	return 0
}

// textSize is the number of bytes of the text as far as the file shows it
// without being read; 0 where it does not.
func (s *source) textSize() int64 {
	size := s.storedSize()
	switch {
	case size == 0 || s.packed == "":
		return size
	case s.packed == "gzip": // the last four bytes, modulo 2^32 (RFC 1952)
		var b [4]byte
		if _, err := s.closer.(*os.File).ReadAt(b[:], size-4); err != nil {
			return 0
		}
		if n := int64(binary.LittleEndian.Uint32(b[:])); n < 50*size {
			return n
		}
	}
	return 0
}

func (s *source) close() {
	if s.unpacker != nil {
		s.unpacker.Close()
	}
	if s.closer != nil {
		s.closer.Close()
	}
}

// hashReader hashes and counts what passes through it.
type hashReader struct {
	r    io.Reader
	hash hash.Hash
	n    int64

	ended bool // there is no more
}

func (h *hashReader) Read(p []byte) (int, error) {
	n, err := h.r.Read(p)
	h.hash.Write(p[:n])
	h.n += int64(n)
	h.ended = err == io.EOF
	return n, err
}

// A log of constant values packs to a hundredth of its size. More than
// maxRatio beyond the first freeBytes is no log but a file made to fill the
// memory.
const (
	maxRatio  = 1000
	freeBytes = 64 << 20
)

// unpacked watches the bytes that come out of a decompressor: it names the
// file in errors, treats an early end as damage and stops decompression bombs.
type unpacked struct {
	r io.Reader
	s *source
	n int64
}

func (u *unpacked) Read(p []byte) (int, error) {
	n, err := u.r.Read(p)
	u.n += int64(n)
	if u.n > freeBytes && u.n/maxRatio > u.s.stored.n {
		return 0, fmt.Errorf("%s: unpacks to more than %d times its size, this is not a log", u.s.path, maxRatio)
	}
	if err != nil && err != io.EOF {
		return n, fmt.Errorf("%s: damaged or cut-off %s file after %d unpacked bytes: %w", u.s.path, u.s.packed, u.n, err)
	}
	return n, err
}
