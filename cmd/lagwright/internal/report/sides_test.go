package report

import (
	"strings"
	"testing"

	"lagwright/validate"
)

// TestBackTestNamesTheSide: a run that is not reproduced says which side
// failed, and no share that reaches the band's level is called too few.
func TestBackTestNamesTheSide(t *testing.T) {
	yes, no := true, false
	for _, c := range []struct {
		name     string
		test     validate.BackTest
		verdict  string
		says     []string
		saysNone []string
	}{
		{"controller alone",
			validate.BackTest{ShareInside: 0.954, Stated: 0.95, Plant: true, Controller: &no, InputInside: ptr(0.54)},
			"the temperatures speak for the model",
			[]string{"Temperature side: nothing speaks against the model, 95.4", "Controller side: it fails", "meets the logged one on 54"},
			[]string{"only 95", "Do not believe"}},
		{"temperature alone",
			validate.BackTest{ShareInside: 0.61, Stated: 0.95, Controller: &yes, InputInside: ptr(0.97)},
			"the model does not give the temperature",
			[]string{"Temperature side: it fails, 61", "Do not believe this replay", "Controller side: it passes"}, nil},
		{"both",
			validate.BackTest{ShareInside: 0.61, Stated: 0.95, Controller: &no, InputInside: ptr(0.2)},
			"the model does not give the temperature",
			[]string{"Temperature side: it fails", "Controller side: it fails"}, nil},
		{"in manual",
			validate.BackTest{ShareInside: 0.61, Stated: 0.95},
			"the model does not give the temperature",
			[]string{"Temperature side: it fails"}, []string{"Controller side"}},
	} {
		b := sampleBundle()
		b.Replay.Runs[1].BackTest = &c.test
		page := pageOf(t, b)
		for _, s := range append(c.says, c.verdict) {
			if !strings.Contains(page, s) {
				t.Errorf("%s: the page does not say %q", c.name, s)
			}
		}
		for _, s := range c.saysNone {
			if strings.Contains(page, s) {
				t.Errorf("%s: the page says %q", c.name, s)
			}
		}
	}
}
