package main

import (
	"math"
	"strings"
	"testing"

	"github.com/spf13/pflag"

	"lagwright/data"
)

func TestSeconds(t *testing.T) {
	for _, tt := range []struct {
		in   string
		want float64
		err  string
	}{
		{"45s", 45, ""},
		{"250ms", 0.25, ""},
		{"2m", 120, ""},
		{"1m30s", 90, ""},
		{"1.5 h", 5400, ""},
		{"45", 0, "want a unit: 45s, 45ms or 45m"},
		{"soon", 0, "want a duration such as 45s, 250ms, 2min or 1h"},
		{"20min", 1200, ""},
		{"20 min", 1200, ""},
		{"100sec", 100, ""},
		{"100 Seconds", 100, ""},
		{"2 h", 7200, ""},
		{"1 hour 30 minutes", 5400, ""},
		{"1.5hr", 5400, ""},
		{"250 msec", 0.25, ""},
		{"5 min.", 300, ""},
		{".5s", 0.5, ""},
		{"0", 0, ""},
		{"+3s", 3, ""},
		{"10V", 0, "want a duration"},
		{"2 h 5", 0, "want a duration"},
		{"1,5 h", 0, "want a duration"},
		{"3 days", 0, "want a duration"},
		{"9999999999h", 0, "below 290 years"},
		{"-3s", 0, "not negative"},
		{"", 0, "want a duration"},
		{"1e400s", 0, "want a duration"},
	} {
		checkParsed(t, "seconds", tt.in, seconds, tt.want, tt.err)
	}
}

func TestPercent(t *testing.T) {
	for _, tt := range []struct {
		in   string
		want float64
		err  string
	}{
		{"5%", 5, ""},
		{"5 %", 5, ""},
		{"5", 5, ""},
		{"0", 0, ""},
		{"0.5%", 0.5, ""},
		{"0.05", 0, "is it 0.05% or 5%?"},
		{"1", 0, "is it 1% or 100%?"},
		{"-5%", 0, "want a percentage such as 5%"},
		{"five", 0, "want a percentage such as 5%"},
		{"NaN", 0, "want a percentage such as 5%"},
		{"Inf%", 0, "want a percentage such as 5%"},
	} {
		checkParsed(t, "percent", tt.in, percent, tt.want, tt.err)
	}
}

func TestShare(t *testing.T) {
	for _, tt := range []struct {
		in   string
		want float64
		err  string
	}{
		{"95%", 0.95, ""},
		{"0.95", 0.95, ""},
		{"95", 0.95, ""},
		{"2%", 0.02, ""},
		{"0.5%", 0.005, ""},
		{"100%", 0, "below 100%"},
		{"0", 0, "above 0%"},
		{"most", 0, "want a percentage"},
	} {
		checkParsed(t, "share", tt.in, share, tt.want, tt.err)
	}
}

func TestNumber(t *testing.T) {
	for _, tt := range []struct {
		in   string
		want float64
		err  string
	}{
		{"10", 10, ""},
		{"-0.5", -0.5, ""},
		{"1e3", 1000, ""},
		{"1_0", 0, "want a number"},
		{"0x1p-2", 0, "want a number"},
		{"nan", 0, "want a number"},
		{"inf", 0, "want a number"},
		{"1,5", 0, "want a number"},
		{"", 0, "want a number"},
		{"10V", 10, ""},
		{"100 %", 100, ""},
		{"4mA", 4, ""},
		{"-2 volts", -2, ""},
		{"1e3 V", 1000, ""},
		{"5kW", 0, "with the unit of the input (V, %, mA) or without"},
		{"5V/s", 0, "want a number"},
		{"V", 0, "want a number"},
	} {
		checkParsed(t, "number", tt.in, number, tt.want, tt.err)
	}
}

func TestRate(t *testing.T) {
	for _, tt := range []struct {
		in   string
		want float64
		err  string
	}{
		{"0.5", 0.5, ""},
		{"0.5V/s", 0.5, ""},
		{"2 %/s", 2, ""},
		{"2%", 0, "(V/s, %/s, mA/s) or without"},
		{"2V/min", 0, "(V/s, %/s, mA/s) or without"},
		{"-1V/s", 0, "above zero"},
	} {
		checkParsed(t, "positiveNumber", tt.in, positiveNumber, tt.want, tt.err)
	}
}

func TestErrorArea(t *testing.T) {
	for _, tt := range []struct {
		in   string
		want float64
		err  string
	}{
		{"50", 50, ""},
		{"50 K*s", 50, ""},
		{"50K·s", 50, ""},
		{"50V/s", 0, "want an area in K*s"},
		{"0", 0, "above zero"},
	} {
		checkParsed(t, "errorArea", tt.in, errorArea, tt.want, tt.err)
	}
}

// TestAgreeOnInput: a unit that was typed must be that of the card or log.
func TestAgreeOnInput(t *testing.T) {
	for _, tt := range []struct{ flag, text, unit, want string }{
		{"input-max", "10", "%", ""},
		{"input-max", "10V", "V", ""},
		{"input-max", "10 volts", "V", ""},
		{"input-max", "10V", "%", "--input-max 10V is in V, but the input of a.csv is in %; give it in %"},
		{"input-min", "4mA", "V", "--input-min 4mA is in mA, but the input of a.csv is in V; give it in V"},
		{"operating-input", "37%", "mA", "--operating-input 37% is in %"},
		{"input-rate", "1V/s", "V", ""},
		{"input-rate", "1V/s", "%", "give it in %/s"},
		{"gain", "12K/V", "%", "give it in K/%"},
		{"gain", "12K/%", "%", ""},
		{"input-max", "10V", "", ""}, // the log does not say
	} {
		fs := pflag.NewFlagSet("", pflag.ContinueOnError)
		var v *float64
		for name, parse := range map[string]func(string) (float64, error){"input-max": number, "input-min": number, "operating-input": number, "input-rate": positiveNumber, "gain": guessedGain} {
			optionalFlag(fs, &v, name, "NUMBER", "", parse)
		}
		if err := fs.Parse([]string{"--" + tt.flag, tt.text}); err != nil {
			t.Errorf("%s %s: %v", tt.flag, tt.text, err)
			continue
		}
		err := (&console{flags: fs}).agreeOnInput("a.csv", tt.unit)
		if (err == nil) != (tt.want == "") || err != nil && (!strings.Contains(err.Error(), tt.want) || exitCode(err) != exitUsage) {
			t.Errorf("%s %s against %q: %v, want %q", tt.flag, tt.text, tt.unit, err, tt.want)
		}
	}
}

func TestSpan(t *testing.T) {
	for _, tt := range []struct {
		in   string
		want data.Span
		err  string
	}{
		{"0..10V", data.Span{Low: 0, High: 10, Unit: "V"}, ""},
		{"4..20mA", data.Span{Low: 4, High: 20, Unit: "mA"}, ""},
		{"-20..180C", data.Span{Low: -20, High: 180, Unit: "C"}, ""},
		{"0 .. 200 degC", data.Span{Low: 0, High: 200, Unit: "degC"}, ""},
		{"0.5..2.5", data.Span{Low: 0.5, High: 2.5}, ""},
		{"-40..-10C", data.Span{Low: -40, High: -10, Unit: "C"}, ""},
		{"10..0V", data.Span{}, "want the low end first"},
		{"5..5", data.Span{}, "want the low end first"},
		{"0-10V", data.Span{}, "want low..high"},
		{"..10", data.Span{}, "want low..high"},
		{"1e999..2e999", data.Span{}, "want low..high"},
	} {
		checkParsed(t, "span", tt.in, span, tt.want, tt.err)
	}
}

func checkParsed[T comparable](t *testing.T, what, in string, parse func(string) (T, error), want T, wantErr string) {
	t.Helper()
	got, err := parse(in)
	switch {
	case wantErr == "" && err != nil:
		t.Errorf("%s(%q): %v", what, in, err)
	case wantErr != "" && (err == nil || !strings.Contains(err.Error(), wantErr)):
		t.Errorf("%s(%q): error %v, want one that says %q", what, in, err, wantErr)
	case wantErr == "" && got != want:
		t.Errorf("%s(%q) = %v, want %v", what, in, got, want)
	}
}

// Whatever is typed, a flag gives a finite number or an error.
func FuzzFlagTypes(f *testing.F) {
	for _, s := range []string{"45s", "5%", "0.95", "0..10V", "-1e3", "1m30s", "Inf", "%", "..", "2 h 5 min", "10 mA"} {
		f.Add(s)
	}
	f.Fuzz(func(t *testing.T, s string) {
		for _, parse := range []func(string) (float64, error){number, positiveNumber, errorArea, guessedGain, seconds, percent, share, dampingRatio, peakSensitivity} {
			if v, err := parse(s); err == nil && (math.IsNaN(v) || math.IsInf(v, 0)) {
				t.Errorf("%q gives %v", s, v)
			}
		}
		if v, err := span(s); err == nil && !(v.Low < v.High) {
			t.Errorf("%q gives the span %v", s, v)
		}
	})
}

func TestTemperature(t *testing.T) {
	for _, tt := range []struct {
		in   string
		want float64
		err  string
	}{
		{"95", 95, ""},
		{"-4.5 C", -4.5, ""},
		{"95°C", 95, ""},
		{"212F", 100, ""},
		{"32 degF", 0, ""},
		{"273.15K", 0, ""},
		{"hot", 0, "such as 95, 95C or 203F"},
		{"F", 0, "such as 95"},
	} {
		checkParsed(t, "temperature", tt.in, temperature, tt.want, tt.err)
	}
}

func TestDifference(t *testing.T) {
	for _, tt := range []struct {
		in   string
		want float64
		err  string
	}{
		{"5", 5, ""},
		{"-5K", -5, ""},
		{"5 °C", 5, ""},
		{"9F", 5, ""},
		{"some", 0, "such as 5, 5K or 9F"},
	} {
		checkParsed(t, "difference", tt.in, difference, tt.want, tt.err)
	}
}
