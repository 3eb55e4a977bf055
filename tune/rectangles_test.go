package tune

import (
	"math"
	"strings"
	"testing"
)

// A controller written out here, which adds error times scan at every scan, gives
// with the numbers for rectangles what the trapezoids give with the others.
func TestRectangularSum(t *testing.T) {
	const scan = 0.5
	for _, c := range []law{
		{kc: 0.2, ti: 6, b: 1}, {kc: 0.2, ti: 6, b: 0.4}, {kc: -1.5, ti: 2, td: 0.7, tf: 0.07, b: 1}, {kc: 0.3, ti: 0.6, td: 0.2, tf: 1, b: 0},
	} {
		k := newController(c, scan)
		k.Start(0, 0, 0)
		r, ok := c.rectangular(scan)
		if !ok {
			t.Fatalf("%+v has none", c)
		}
		f := newController(r, scan) // for its filter alone
		f.Start(0, 0, 0)
		sum := 0.0
		for i := range 60 {
			set, y := 10.0, 9*(1-math.Exp(-float64(i)/7))*math.Cos(float64(i)/5)
			if r.tf > 0 || r.td > 0 {
				f.filter(y)
			} else {
				f.yf = y
			}
			sum += r.kc / r.ti * scan * (set - f.yf)
			want := r.kc*(r.b*set-f.yf-r.td*f.slope) + sum
			if got := k.Next(set, y); math.Abs(got-want) > 1e-9*(1+math.Abs(want)) {
				t.Fatalf("%+v, scan %d: trapezoids give %g, rectangles %g", c, i, got, want)
			}
		}
	}
}

func TestSummingWords(t *testing.T) {
	for _, c := range []struct {
		name string
		law  law
		scan float64
		want string // "" for nothing
	}{
		{"continuous", law{kc: 0.2, ti: 6, b: 1}, 0, ""},
		{"fast scan", law{kc: 0.2, ti: 60, b: 1}, 1, ""},
		{"P", law{kc: 0.2, ti: math.Inf(1), b: 1}, 1, ""},
		{"slower", law{kc: 0.2, ti: 10, b: 1}, 1, "does the same with gain 0.19 V/K, integral time 9.5 s (ideal form)."},
		{"all terms", law{kc: 0.2, ti: 10, td: 1.9, tf: 0.19, b: 0.5}, 1, "gain 0.19 V/K, integral time 9.5 s, derivative time 2 s, setpoint weight 0.474 (ideal form)."},
		{"too slow", law{kc: 0.2, ti: 1, b: 1}, 1, "behaves otherwise at so slow a scan."},
	} {
		g := newGains(c.law, "pid")
		g.Scan, g.Units = c.scan, GainUnits{Input: "V", Temperature: "degC"}
		if got := g.summing(); got != c.want && (c.want == "" || !strings.HasSuffix(got, c.want)) {
			t.Errorf("%s: %q, want %q", c.name, got, c.want)
		}
	}
}
