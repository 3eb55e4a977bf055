package fit

import (
	"math"
	"math/rand/v2"
	"testing"
)

// TestPassSum holds sums found by products to those of rows passed one by one, over parts
// with gaps between them, short ones and long ones, for filters with a short memory, a long
// one, none, and noise that wanders.
func TestPassSum(t *testing.T) {
	rng := rand.New(rand.NewPCG(8, 1))
	const step = 0.1
	var times, values [][]float64
	at := 0.0
	for _, n := range []int{3000, 40, 130, 191, 192, 3000, 64, 1} {
		var ts, xs []float64
		x := 0.0
		for range n {
			x = 0.6*x + rng.NormFloat64()
			ts, xs = append(ts, at), append(xs, x+0.3*rng.NormFloat64()+0.1)
			at += step
		}
		times, values = append(times, ts), append(values, xs)
		at += 77
	}
	byProducts := 0
	for _, s := range []shape{
		{tc: 0.3, white: 0.05}, {tc: 0.3}, {tc: 0.02, white: 0.1}, {tc: 1e-3, white: 0.3}, {tc: 2, white: 0.4},
		{tc: 0.9, white: 0.2}, {tc: 50, white: 0.93}, {tc: 0.3, white: 0.05, walk: 0.01}, whiteShape,
	} {
		got, want := (&record{even: true}).whitener(s), (&record{even: true}).whitener(s)
		spare := make([]float64, 3000)
		for i := range times {
			var p lagProducts
			p.set(values[i])
			before := append([]float64(nil), values[i]...)
			got.passSum(&p, times[i], spare)
			if len(p.r) > 0 {
				byProducts++
			}
			want.pass(before, times[i])
		}
		if math.Abs(got.sum-want.sum) > 1e-10*want.sum || math.Abs(got.logDeterminant()-want.logDeterminant()) > 1e-9 ||
			math.Abs(got.carried.a-want.carried.a) > 1e-10 {
			t.Errorf("%+v: sum %.15g, ln determinant %.15g, carried %.15g; row by row %.15g, %.15g, %.15g",
				s, got.sum, got.logDeterminant(), got.carried.a, want.sum, want.logDeterminant(), want.carried.a)
		}
	}
	if byProducts < 12 {
		t.Errorf("only %d parts were summed by products", byProducts)
	}
}
