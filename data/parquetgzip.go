package data

import (
	"bytes"
	"errors"
	"fmt"
	"io"

	"github.com/apache/arrow/go/v17/parquet/compress"
	"github.com/klauspost/compress/gzip"
)

// checkedGzip unpacks a gzip page to its very end. The library's own codec
// stops when the page is full, before the check sum that follows it, and so
// takes damaged values for good ones.
type checkedGzip struct{ compress.Codec }

func init() {
	codec, err := compress.GetCodec(compress.Codecs.Gzip)
	if err != nil {
		return // without the library's codec such files are an error in any case
	}
	compress.RegisterCodec(compress.Codecs.Gzip, checkedGzip{codec})
}

// Decode panics on damage, as the codecs of the library do; readParquet turns
// that into an error.
func (checkedGzip) Decode(dst, src []byte) []byte {
	r, err := gzip.NewReader(bytes.NewReader(src))
	if err != nil {
		panic(fmt.Errorf("gzip page: %w", err))
	}
	if dst == nil {
		out, err := io.ReadAll(r)
		if err != nil {
			panic(fmt.Errorf("gzip page: %w", err))
		}
		return out
	}
	if _, err := io.ReadFull(r, dst); err != nil {
		panic(fmt.Errorf("gzip page: %w", err))
	}
	switch n, err := io.Copy(io.Discard, r); {
	case err != nil:
		panic(fmt.Errorf("gzip page: %w", err))
	case n > 0:
		panic(errors.New("gzip page: holds more than its header says"))
	}
	return dst
}
