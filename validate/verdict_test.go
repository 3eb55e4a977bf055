package validate

import (
	"math"
	"testing"
)

func TestNumber(t *testing.T) {
	for _, c := range []struct {
		x    float64
		want string
	}{
		{0, "0"}, {1, "1"}, {0.0498, "0.0498"}, {62.04, "62"}, {999.6, "1000"}, {12345.6, "12346"}, {-4.567, "-4.57"},
		{100, "100"}, {0.00001234, "1.23e-05"}, {math.Inf(1), "none"}, {10.5, "10.5"},
	} {
		if got := number(c.x); got != c.want {
			t.Errorf("number(%g) = %q, want %q", c.x, got, c.want)
		}
	}
}

func TestQuantity(t *testing.T) {
	for _, c := range []struct {
		x    float64
		unit string
		want string
	}{
		{45.04, "s", "45 s"}, {599, "s", "599 s"}, {1500, "s", "25 min"}, {14054, "s", "3.9 h"}, {math.Inf(1), "s", "not reached"},
		{81.44, "degC", "81.4 °C"}, {123.96, "degC", "124 °C"}, {123.84, "degC", "123.8 °C"}, {1203.26, "degF", "1203.3 °F"}, {-120.26, "degC", "-120.3 °C"},
		{3.456, "K", "3.46 K"}, {12.04, "%", "12%"}, {0.0503, "V", "0.0503 V"},
	} {
		if got := quantity(c.x, c.unit); got != c.want {
			t.Errorf("quantity(%g, %q) = %q, want %q", c.x, c.unit, got, c.want)
		}
	}
}

// The sentence of a demand names the median and what the assured share of the
// plants stay below: what the verdict goes by, not the ends of the band.
func TestReason(t *testing.T) {
	settling := demand{name: "settling", unit: "s", limit: 50, figure: func(f figures) float64 { return f.settling }}
	inf := math.Inf(1)
	from := func(tail ...float64) []figures { // 199 plants from 40 s up in steps of 0.05 s, the last as told
		var out []figures
		for i := range 199 {
			f := noFigures()
			f.settling = 40 + 0.05*float64(i)
			if k := i - 199 + len(tail); k >= 0 {
				f.settling = tail[k]
			}
			out = append(out, f)
		}
		return out
	}
	never := func(n int) (out []float64) {
		for range n {
			out = append(out, inf)
		}
		return out
	}
	for _, c := range []struct {
		name  string
		all   []figures
		share float64
		want  string
	}{
		{"a few are slow", from(90, 95, 100), 196. / 199, "settling 45 s (up to 49.5 s on 95 % of the plants) where at most 50 s is asked: fails on 3 of 199 plausible plants"},
		{"a few never settle", from(never(20)...), 179. / 199, "settling 45 s (not reached on 20 plants) where at most 50 s is asked: fails on 20 of 199 plausible plants"},
		{"most never settle", from(never(120)...), 79. / 199, "settling not reached where at most 50 s is asked: fails on 120 of 199 plausible plants"},
	} {
		share, _, reasons := judge([]demand{settling}, c.all, make([]bool, 199), 0.95)
		if math.Abs(share-c.share) > 1e-12 || len(reasons) != 1 || reasons[0] != c.want {
			t.Errorf("%s: share %g, want %g; %q, want %q", c.name, share, c.share, reasons, c.want)
		}
	}
}
