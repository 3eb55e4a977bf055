package validate

import (
	"strings"
	"testing"

	"lagwright/fit"
)

// Of a history only fits that tell something of the plant are tested.
func TestUnusableFits(t *testing.T) {
	between := func(name string, low, v, high float64) fit.Parameter {
		return fit.Parameter{Name: name, Unit: "K/V", Value: v, Low: &low, High: &high}
	}
	open := func(p fit.Parameter, low, high bool) fit.Parameter {
		if low {
			p.Low = nil
		}
		if high {
			p.High = nil
		}
		return p
	}
	lag := between("lag1", 20, 25, 30)
	for _, c := range []struct {
		name string
		p    []fit.Parameter
		want string
	}{
		{"usable", []fit.Parameter{between("gain", 11, 12, 13), lag, open(between("lag2", 0, 3, 9), true, false)}, ""},
		{"cooler", []fit.Parameter{between("gain", -13, -12, -11), lag}, ""},
		{"open above", []fit.Parameter{open(between("gain", 11, 12, 13), false, true), lag}, "no more than one side"},
		{"open below", []fit.Parameter{open(between("gain", 0, 2, 3.4), true, false), lag}, "no more than one side"},
		{"reaches zero", []fit.Parameter{between("gain", -0.2, 2, 4), lag}, "not told from zero"},
		{"known gain", []fit.Parameter{{Name: "gain", Value: 12, Fixed: true}, lag}, ""},
		{"lag beyond the log", []fit.Parameter{between("gain", 100, 800, 2000), between("lag1", 500, 900, 1500)}, "a lag of 15 min from a log of 300 s"},
	} {
		if got := (estimate{parameters: c.p, span: 300}).unusable(); c.want == "" && got != "" || !strings.Contains(got, c.want) {
			t.Errorf("%s: %q, want %q", c.name, got, c.want)
		}
	}
}
