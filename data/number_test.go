package data

import (
	"math"
	"math/rand/v2"
	"strconv"
	"strings"
	"testing"
)

func TestNumberFormat(t *testing.T) {
	for _, c := range []struct {
		text  string
		point byte
		want  float64
		ok    bool
	}{
		{"0", '.', 0, true},
		{" 24.1\t", '.', 24.1, true},
		{"24,1", ',', 24.1, true},
		{"+6.4100000e+00", '.', 6.41, true},
		{".5", '.', 0.5, true},
		{"5.", '.', 5, true},
		{"-1e-3", '.', -0.001, true},
		{"−3.5", '.', -3.5, true}, // U+2212
		{"1,234.5", '.', 1234.5, true},
		{"1.234.567,5", ',', 1234567.5, true},
		{"1 234,5", ',', 1234.5, true},
		{"1\u202f234,5", ',', 1234.5, true},
		{"1'234.5", '.', 1234.5, true},
		{"1,23.5", '.', 0, false},
		{"12,34", '.', 0, false},
		{"1234,567", '.', 0, false},
		{"24.1.2", '.', 0, false},
		{"24,1", '.', 0, false},
		{"1e", '.', 0, false},
		{"1e999", '.', 0, false}, // too large for a float64
		{"8_0", '.', 0, false},
		{"0x10", '.', 0, false},
		{"Inf", '.', 0, false},
		{"nan", '.', 0, false},
		{"", '.', 0, false},
		{"-", '.', 0, false},
		{"9007199254740993", '.', 9007199254740992, true}, // 2^53 + 1: ties to even
		{"0.1000000000000000055511151231257827", '.', 0.1, true},
	} {
		got, ok := numberFormat{c.point}.parse([]byte(c.text))
		if ok != c.ok || ok && got != c.want {
			t.Errorf("%q with %q: %v %v, want %v %v", c.text, c.point, got, ok, c.want, c.ok)
		}
	}
}

// The fast way gives the nearest float64, as strconv.ParseFloat does, for
// numbers of every length and size.
func TestNumberIsNearest(t *testing.T) {
	rng := rand.New(rand.NewPCG(3, 1))
	for range 200000 {
		v := math.Float64frombits(rng.Uint64())
		if math.IsNaN(v) || math.IsInf(v, 0) {
			continue
		}
		if rng.IntN(2) == 0 {
			v = rng.Float64() * math.Pow10(rng.IntN(30)-15)
		}
		text := strconv.FormatFloat(v, "gef"[rng.IntN(3)], rng.IntN(22)-1, 64)
		want, err := strconv.ParseFloat(text, 64)
		got, ok := numberFormat{'.'}.parse([]byte(text))
		if ok != (err == nil) || ok && math.Float64bits(got) != math.Float64bits(want) {
			t.Fatalf("%q: %v %v, want %v", text, got, ok, want)
		}
	}
}

func TestScaled(t *testing.T) {
	for _, c := range []struct {
		text string
		unit uint64
		want int64
		ok   bool
	}{
		{"0.1", nsSecond, 1e8, true},
		{"1767607200.123456789", nsSecond, 1767607200123456789, true},
		{"-2.5", nsSecond, -25e8, true},
		{"0.0000000005", nsSecond, 1, true}, // half a ns away from zero
		{"0.00000000049", nsSecond, 0, true},
		{"1e-60", nsSecond, 0, true},
		{"2e3", nsSecond, 2e12, true},
		{"1e19", nsSecond, 0, false},
		{"9223372036.854775807", nsSecond, math.MaxInt64, true},
		{"9223372036.854775808", nsSecond, 0, false},
		{"46027.5", nsDay, 46027*int64(nsDay) + int64(nsDay)/2, true},
	} {
		d, _, ok := scanDecimal([]byte(c.text), '.')
		if !ok {
			t.Fatalf("%q is not read", c.text)
		}
		got, ok := d.scaled(c.unit)
		if ok != c.ok || ok && got != c.want {
			t.Errorf("%q: %d %v, want %d %v", c.text, got, ok, c.want, c.ok)
		}
	}
}

func TestMissingKind(t *testing.T) {
	for cell, want := range map[string]string{
		"": "blank", "  ": "blank", "OPEN": "OPEN", "open": "OPEN", "----": "----", "---": "---", "#N/A": "#N/A", "[OL]": "OL", "nan": "NAN",
		"Sensor Break": "SENSOR BREAK", "warm up": `text "warm up"`, strings.Repeat("x", 100): "other text",
	} {
		if got, _ := missingKind([]byte(cell)); got != want {
			t.Errorf("%q is %q, want %q", cell, got, want)
		}
	}
}
