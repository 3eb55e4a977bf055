package report

import (
	"bytes"
	"testing"

	"lagwright/validate"
)

// What fails on a few plants is a fault only of a run that misses the
// requirement; a file that could not be used is named once.
func TestWatch(t *testing.T) {
	for _, c := range []struct {
		name          string
		judged, meets bool
		bad           bool
	}{{"meets", true, true, false}, {"misses", true, false, true}, {"not judged", false, false, false}} {
		b := &Bundle{Replay: &validate.Replay{
			Runs:   []validate.RunReplay{{File: "a.csv", Judged: c.judged, Meets: c.meets, Reasons: []string{"settling 71 s where at most 60 s is asked"}}},
			Failed: []validate.FailedRun{{File: "b.csv", Reason: "b.csv: no temperature column"}},
		}}
		var page bytes.Buffer
		if err := Page(&page, *b); err != nil {
			t.Fatal(err)
		}
		items := watch(b).Blocks[0].List.Items
		if got := items[0].Sign == "bad"; got != c.bad {
			t.Errorf("%s: told as a fault: %v", c.name, got)
		}
		if want := []byte("b.csv could not be replayed: no temperature column"); !bytes.Contains(page.Bytes(), want) {
			t.Errorf("%s: %q is not on the page", c.name, want)
		}
	}
}
