package report

import (
	"testing"

	"lagwright/fit"
)

// A percentage beyond the value itself is told in words, with the reason kept.
func TestKnownWords(t *testing.T) {
	for _, c := range []struct {
		name   string
		bound  *float64
		reason string
		want   string
	}{
		{"good", ptr(1.1), "known to ±1.1 %", "known to ±1.1 %"},
		{"wide", ptr(80), "known to ±80 % only: the rise is 2 times the noise.", "known to ±80 % only: the rise is 2 times the noise"},
		{"wider than the value", ptr(2.7e6), "known to ±2.7e6 % only: the rise is 2 times the noise", "not known, the bound is wider than the value: the rise is 2 times the noise"},
		{"open", nil, "the log sets no bound: no plateau", "the log sets no bound: no plateau"},
		{"nothing to say", nil, "", ""},
	} {
		if got := knownWords(fit.Verdict{Parameter: "gain", Bound: c.bound, Reason: c.reason}); got != c.want {
			t.Errorf("%s: %q, want %q", c.name, got, c.want)
		}
	}
}
