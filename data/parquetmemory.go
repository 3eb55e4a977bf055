package data

import (
	"fmt"

	"github.com/apache/arrow/go/v17/arrow/memory"
)

// pageMemory gives out the memory for the pages of a Parquet file and refuses
// more than the file can need. The library believes the sizes in damaged page
// headers, and keeps what it took for each page that it skips. A refusal is a
// panic, as the interface knows no error; readParquet turns it into one.
type pageMemory struct {
	memory.Allocator
	limit, taken int64 // bytes
}

// smallPages is what any file may take, bytes.
const smallPages = 64 << 20

func newPageMemory() *pageMemory {
	return &pageMemory{Allocator: memory.DefaultAllocator, limit: smallPages}
}

// allow raises the limit for a file: twice what its largest row group unpacks
// to, as the footer says, but no more than any packing of its bytes can yield.
func (m *pageMemory) allow(unpacked, stored int64) {
	m.limit = smallPages + min(2*unpacked, maxRatio*stored)
}

func (m *pageMemory) take(size int) {
	if m.taken += int64(size); m.taken > m.limit {
		panic(fmt.Sprintf("its pages claim more than %d MiB", m.limit>>20))
	}
}

func (m *pageMemory) Allocate(size int) []byte {
	m.take(size)
	return m.Allocator.Allocate(size)
}

func (m *pageMemory) Reallocate(size int, b []byte) []byte {
	m.take(max(0, size-len(b)))
	return m.Allocator.Reallocate(size, b)
}

func (m *pageMemory) Free(b []byte) {
	m.taken -= int64(len(b))
	m.Allocator.Free(b)
}
