package tune

import (
	"encoding/csv"
	"math"
	"math/cmplx"
	"os"
	"strings"
	"testing"
)

// TestLoopsAgainstIndependentScript compares with testdata/loops.csv, which
// testdata/loops.py computes with numpy and mpmath from the transfer
// functions alone.
func TestLoopsAgainstIndependentScript(t *testing.T) {
	f, err := os.Open("testdata/loops.csv")
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	rows, err := csv.NewReader(f).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	for _, row := range rows[1:] {
		row := row
		t.Run(strings.Join(row[:8], " "), func(t *testing.T) {
			var lags []float64
			for _, v := range strings.Split(row[2], "|") {
				if v != "" {
					lags = append(lags, number(t, v))
				}
			}
			c := law{kc: number(t, row[4]), ti: math.Inf(1), td: number(t, row[6]), tf: number(t, row[7]), b: 1}
			kind := "p"
			if row[5] != "" {
				c.ti, kind = number(t, row[5]), "pi"
			}
			if c.td > 0 {
				kind = "pid"
			}
			got := Analyse(plant(t, row[0], number(t, row[1]), lags, number(t, row[3])), newGains(c, kind))
			if !got.Stable {
				t.Fatal("called unstable")
			}
			for i, v := range []float64{got.Ms, got.Mt, got.GainMargin, got.PhaseMargin, got.DelayMargin} {
				want := number(t, row[8+i])
				if math.IsInf(want, 1) && math.IsInf(v, 1) {
					continue
				}
				near(t, rows[0][8+i], v, want, 1e-8*want)
			}
			matchPoles(t, got.Poles, row[13])
		})
	}
}

// matchPoles asks for the rightmost poles, all of them and in order.
func matchPoles(t *testing.T, got []complex128, want string) {
	t.Helper()
	i := 0
	for _, pair := range strings.Split(want, "|") {
		re, im, _ := strings.Cut(pair, ":")
		s := complex(number(t, re), number(t, im))
		again := 1
		if imag(s) > 0 {
			again = 2
		}
		for range again {
			if i >= len(got) {
				t.Errorf("pole %v missing: have %v", s, got)
				return
			}
			if cmplx.Abs(got[i]-s) > 1e-8*cmplx.Abs(s) {
				t.Errorf("pole %d = %v, want %v", i, got[i], s)
			}
			s = cmplx.Conj(s)
			i++
		}
	}
}

// The ultimate gain separates stable from unstable, by encirclements and by
// poles alike; an unstable loop is recognised even where its sensitivity
// peak looks harmless.
func TestStabilityAtTheUltimateGain(t *testing.T) {
	for _, c := range []struct {
		structure string
		lags      []float64
		deadTime  float64
	}{
		{"fopdt", []float64{10}, 0.5},
		{"fopdt", []float64{1}, 20},
		{"chain3", []float64{40, 5, 1}, 2},
		{"equal4", []float64{1}, 0},
		{"equal8", []float64{3}, 1},
		{"ipdt", nil, 3},
	} {
		p := plant(t, c.structure, 2, c.lags, c.deadTime)
		ku, _, err := ultimate(p)
		if err != nil {
			t.Fatal(err)
		}
		for _, factor := range []float64{0.5, 0.999, 1.001, 3, 20} {
			g := newGains(pLaw(ku*factor), "p")
			f := Analyse(p, g)
			if f.Stable != (factor < 1) {
				t.Errorf("%s: stable %v at %g of the ultimate gain", c.structure, f.Stable, factor)
			}
			if right := real(f.Poles[0]) < 0; right != f.Stable {
				t.Errorf("%s at %g: rightmost pole %v, stable %v", c.structure, factor, f.Poles[0], f.Stable)
			}
		}
	}
	p := plant(t, "fopdt", 1, []float64{1}, 1)
	for _, kc := range []float64{-0.5, -2} {
		g := newGains(piLaw(kc, 1), "pi")
		if Analyse(p, g).Stable {
			t.Errorf("integral action of the wrong sign, kc %g, called stable", kc)
		}
	}
	if Analyse(p, newGains(pLaw(-2), "p")).Stable {
		t.Error("P of the wrong sign and loop gain 2 called stable")
	}
	// derivative without filter on one lag: excess 0, a pole chain to the
	// right as soon as Kc·Td·K/tau passes 1
	if Analyse(p, newGains(pidLaw(1.1, 10, 1), "pid")).Stable {
		t.Error("unfiltered derivative with a limit circle beyond 1 called stable")
	}
}
