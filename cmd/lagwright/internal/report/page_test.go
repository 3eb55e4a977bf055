package report

import (
	"bytes"
	"os"
	"testing"
)

func TestPage(t *testing.T) {
	var page bytes.Buffer
	if err := Page(&page, sampleBundle()); err != nil {
		t.Fatal(err)
	}
	if keep := os.Getenv("LAGWRIGHT_KEEP_PAGE"); keep != "" {
		if err := os.WriteFile(keep, page.Bytes(), 0o666); err != nil {
			t.Fatal(err)
		}
	}
	t.Logf("%d bytes", page.Len())
}
