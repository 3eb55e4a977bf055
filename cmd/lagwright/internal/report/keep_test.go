package report

import (
	"os"
	"testing"
)

// TestKeepPage leaves the sample page where LAGWRIGHT_KEEP_PAGE says, to be
// looked at.
func TestKeepPage(t *testing.T) {
	name := os.Getenv("LAGWRIGHT_KEEP_PAGE")
	if name == "" {
		t.Skip("LAGWRIGHT_KEEP_PAGE names no file to leave the page in")
	}
	if err := os.WriteFile(name, []byte(pageOf(t, sampleBundle())), 0o666); err != nil {
		t.Fatal(err)
	}
}
