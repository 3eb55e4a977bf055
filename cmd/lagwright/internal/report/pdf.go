package report

import (
	"strings"
	"sync"
	"time"

	"codeberg.org/go-pdf/fpdf"
	"golang.org/x/text/encoding/charmap"
)

// straight is an ink for the PDF canvas, which takes the colour and its alpha
// apart and so wants the colour not multiplied by it.
type straight struct{ ink }

func (k straight) RGBA() (r, g, b, a uint32) {
	full := k.ink
	full.alpha = 255
	r, g, b, _ = full.RGBA()
	return r, g, b, uint32(k.alpha) * 0x101
}

// fixPDF takes the clock out of PDF files, which otherwise hold the moment
// they were written, and sorts what is written from a map.
var fixPDF = sync.OnceFunc(func() {
	epoch := time.Unix(0, 0).UTC()
	fpdf.SetDefaultCreationDate(epoch)
	fpdf.SetDefaultModificationDate(epoch)
	fpdf.SetDefaultCatalogSort(true)
})

// windows1252 recodes text for PDF, whose back end takes bytes of that code
// page. Characters it lacks become "?".
func windows1252(s string) string {
	var b strings.Builder
	for _, r := range s {
		c, ok := charmap.Windows1252.EncodeRune(r)
		if !ok {
			c = '?'
		}
		b.WriteByte(c)
	}
	return b.String()
}
