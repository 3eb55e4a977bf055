package fit

import (
	"math"
	"testing"

	"lagwright/ident"
)

// TestDerivativeAtNoDeadTime holds the slope of the sum of squares along a dead time
// that begins to grow from zero, with a controller that answers every row, against
// differences: the slope on the other side of the kink has another sign.
func TestDerivativeAtNoDeadTime(t *testing.T) {
	for _, c := range []struct {
		structure string
		eta       []float64
	}{{"fopdt", []float64{10, 0}}, {"fopdt", []float64{0.2, 0}}, {"ipdt", []float64{0}}, {"chain2", []float64{10, 0, 0}}, {"chain2", []float64{10, 2, 0}}} {
		st, err := ident.ParseStructure(c.structure)
		if err != nil {
			t.Fatal(err)
		}
		rec, err := newRecord(quietLoop(), ident.Linear)
		if err != nil {
			t.Fatal(err)
		}
		for _, in := range []initial{rest, earlier, free} {
			r := rec.whole()
			r.model(in, false)
			e := newEngine(st, []*record{r})
			e.gainFix, e.gain = true, 6
			d := len(c.eta) - 1
			at := func(dead float64) float64 {
				eta := append([]float64(nil), c.eta...)
				eta[d] = dead
				return e.eval(eta, false).s
			}
			const h = 1e-4
			want := (-3*at(0) + 4*at(h) - at(2*h)) / (2 * h)
			if got := -2 * e.eval(c.eta, true).grad[d]; math.Abs(got-want) > 1e-5*math.Abs(want)+1e-6 {
				t.Errorf("%s, %s at %v: slope %.9g, by differences %.9g", c.structure, in, c.eta, got, want)
			}
		}
	}
}
