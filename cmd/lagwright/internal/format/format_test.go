package format

import (
	"math"
	"strings"
	"testing"
	"unicode"
	"unicode/utf8"
)

func at(v float64) *float64 { return &v }

func TestValue(t *testing.T) {
	for _, c := range []struct {
		v         float64
		low, high *float64
		unit      string
		want      string
	}{
		{12.4312, at(12.12), at(12.74), "K/V", "12.43 ± 0.31 K/V"},
		{12.4312, at(9.23), at(15.63), "K/V", "12.4 ± 3.2 K/V"},
		{1243.12, at(1120), at(1366), "s", "1243 ± 123 s"},
		{0.051, at(0.05), at(0.052), "s", "0.0510 ± 0.0010 s"},
		{-3.2, at(-3.3), at(-3.1), "K/V", "-3.20 ± 0.10 K/V"},
		{3.2, at(2.6), at(4.9), "s", "3.2 s (2.6 to 4.9)"},
		{3.2, at(2.6), nil, "s", "3.20 s (at least 2.60)"},
		{3.2, nil, at(4.9), "s", "3.2 s (at most 4.9)"},
		{3.2, nil, nil, "s", "3.2 s (no bound)"},
		{0.05, at(0.05), at(0.05), "s", "0.05 s"},
		{80, at(79.97), at(80.03), "degC", "80.000 ± 0.030 °C"},
		{0, at(-0.02), at(0.02), "K/s", "0.000 ± 0.020 K/s"},
		{3e-8, at(1e-8), at(5e-8), "K/s", "3.0e-8 ± 2.0e-8 K/s"},
		{3e-5, at(1e-5), at(5e-5), "K/s", "3.0e-5 ± 2.0e-5 K/s"},
		{0.4, at(0.4 - 2.2e-16), at(0.4 + 2.2e-16), "s", "0.4 s (exact to 6 digits)"},
		{-3e-17, at(-2e-16), at(1e-16), "K/s", "0 K/s (exact to 6 digits)"},
		{5, at(6), at(7), "s", "5.00 s (6.00 to 7.00)"}, // a bound that leaves the value out is shown, not hidden
	} {
		if got := Value(c.v, c.low, c.high, c.unit); got != c.want {
			t.Errorf("Value(%v) = %q, want %q", c.v, got, c.want)
		}
	}
}

func TestInterval(t *testing.T) {
	for _, c := range []struct {
		v         float64
		low, high *float64
		want      string
	}{
		{12.4, at(12.12), at(12.74), "12.12 to 12.74"}, {3.2, at(2.6), nil, "at least 2.60"}, {3.2, nil, at(4.9), "at most 4.9"},
		{3.2, nil, nil, "no bound"}, {3, at(3), at(3), "fixed"}, {4.2e-4, at(1.4e-4), at(7.0e-4), "1.4e-4 to 7.0e-4"},
	} {
		if got := Interval(c.v, c.low, c.high); got != c.want {
			t.Errorf("Interval(%v) = %q, want %q", c.v, got, c.want)
		}
	}
}

func TestNumber(t *testing.T) {
	for _, c := range []struct {
		v      float64
		digits int
		want   string
	}{
		{9.996, 3, "10.0"}, {1234.5, 3, "1234"}, {1235.5, 3, "1236"}, {0.0123456, 3, "0.0123"},
		{0.00012, 3, "1.20e-4"}, {1234567, 3, "1.23e6"}, {0, 3, "0"}, {-0.5, 2, "-0.50"},
		{2.2e-16, 3, "0"}, {-2.2e-16, 3, "0"}, {math.NaN(), 3, "-"}, {math.Inf(1), 3, "-"},
	} {
		if got := Number(c.v, c.digits); got != c.want {
			t.Errorf("Number(%v, %d) = %q, want %q", c.v, c.digits, got, c.want)
		}
	}
	if got := Short(12.500, 4); got != "12.5" {
		t.Errorf("Short(12.5) = %q", got)
	}
	if got := Short(100, 2); got != "100" {
		t.Errorf("Short(100) = %q", got)
	}
}

func TestDuration(t *testing.T) {
	for s, want := range map[float64]string{
		0: "0 s", 0.25: "250 ms", 0.9999: "1 s", 12.5: "12.5 s", 90: "90 s", 245: "4 min 5 s", 120: "2 min",
		7800: "2 h 10 min", 273600: "3 d 4 h", -245: "-4 min 5 s", 3599.7: "1 h",
	} {
		if got := Duration(s); got != want {
			t.Errorf("Duration(%v) = %q, want %q", s, got, want)
		}
	}
}

func TestTimeUnit(t *testing.T) {
	for longest, want := range map[float64]string{0: "s", 599: "s", 600: "min", 3599: "min", 3600: "h"} {
		if unit, seconds := TimeUnit(nil, &longest, at(0)); unit != want || longest/seconds >= 600 {
			t.Errorf("TimeUnit(%v) = %s of %v s, want %s", longest, unit, seconds, want)
		}
	}
	if unit, _ := TimeUnit(nil); unit != "s" {
		t.Errorf("no time is in %s", unit)
	}
}

func TestPercentNeverClaimsAll(t *testing.T) {
	for share, want := range map[float64]string{
		1: "100 %", 0: "0 %", 0.9999: "over 99.9 %", 0.0001: "under 0.1 %", 0.975: "97.5 %", 0.95: "95 %",
	} {
		if got := Percent(share); got != want {
			t.Errorf("Percent(%v) = %q, want %q", share, got, want)
		}
	}
}

func TestThousands(t *testing.T) {
	for n, want := range map[int]string{7: "7", 9999: "9999", 12000: "12 000", 1234567: "1 234 567", -123456: "-123 456"} {
		if got := Thousands(n); got != want {
			t.Errorf("Thousands(%d) = %q, want %q", n, got, want)
		}
	}
}

func TestTextShowsWhatHides(t *testing.T) {
	for in, want := range map[string]string{
		"TIC 7.PV °C":          "TIC 7.PV °C",
		"a\x1b[31mred":         `a\x1b[31mred`,
		"abc\u202egnp.exe":     `abc\u202egnp.exe`,
		"line\nbreak\ttab":     `line\nbreak\ttab`,
		"bad\xffbyte":          `bad\xffbyte`,
		"\ufeffmark":           `\ufeffmark`,
		"real \ufffd sign":     "real \ufffd sign",
		"<script>":             "<script>",
		"نیم\u200cفاصله":       "نیم\u200cفاصله", // the non-joiner is part of the word
		"\U000e0041tag":        `\U000e0041tag`,
		"c1 \u009b31m control": `c1 \u009b31m control`,
	} {
		if got := Text(in); got != want {
			t.Errorf("Text(%q) = %q, want %q", in, got, want)
		}
	}
}

func FuzzText(f *testing.F) {
	f.Add("a\x1b[0m\u2066b\xff")
	f.Fuzz(func(t *testing.T, s string) {
		got := Text(s)
		if !utf8.ValidString(got) {
			t.Fatalf("%q is not UTF-8", got)
		}
		if i := strings.IndexFunc(got, func(r rune) bool { return unicode.IsControl(r) || r == 0x202e }); i >= 0 {
			t.Fatalf("%q keeps a control character", got)
		}
	})
}

func TestUnitAndClip(t *testing.T) {
	for in, want := range map[string]string{"degC": "°C", "K/V": "K/V", "K/V2": "K/V²", "K/(V*s)": "K/(V·s)", "K/V^2": "K/V²"} {
		if got := Unit(in); got != want {
			t.Errorf("Unit(%q) = %q, want %q", in, got, want)
		}
	}
	if got := Clip("abcdef", 4); got != "abc…" {
		t.Errorf("Clip = %q", got)
	}
}
