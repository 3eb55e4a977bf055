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
