package report

import (
	"math"
	"math/rand/v2"
	"slices"
	"testing"
)

func TestThinKeepsExtremes(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 2))
	for range 50 {
		n := 1 + rng.IntN(5000)
		x, y := make([]float64, n), make([]float64, n)
		for i := range x {
			x[i], y[i] = float64(i), rng.NormFloat64()
		}
		y[rng.IntN(n)] = 100
		y[rng.IntN(n)] = -100
		const buckets = 37
		tx, ty := thin(x, y, buckets)
		if len(tx) > 4*buckets && len(tx) != n {
			t.Fatalf("%d samples kept of %d", len(tx), n)
		}
		if slices.Max(ty) != slices.Max(y) || slices.Min(ty) != slices.Min(y) || tx[0] != 0 || tx[len(tx)-1] != float64(n-1) {
			t.Fatal("an extreme or an end was lost")
		}
		if !slices.IsSorted(tx) {
			t.Fatal("samples are out of order")
		}
		for i, v := range tx {
			if y[int(v)] != ty[i] {
				t.Fatal("a sample was changed")
			}
		}
	}
}

func TestThinBandCovers(t *testing.T) {
	rng := rand.New(rand.NewPCG(5, 6))
	n := 4000
	x, low, high := make([]float64, n), make([]float64, n), make([]float64, n)
	for i := range x {
		x[i], low[i] = float64(i), rng.NormFloat64()
		high[i] = low[i] + rng.Float64()
	}
	tx, tl, th := thinBand(x, low, high, 50)
	for i := range x {
		k, _ := slices.BinarySearch(tx, x[i])
		k = min(k, len(tx)-1)
		if low[i] < tl[k] || high[i] > th[k] {
			t.Fatalf("sample %d lies outside the thinned band", i)
		}
	}
}

func TestPieces(t *testing.T) {
	v := []float64{1, 2, math.NaN(), 4, math.NaN(), math.NaN(), 7}
	got := pieces(len(v), func(i int) bool { return finite(v[i]) })
	if want := [][2]int{{0, 2}, {3, 4}, {6, 7}}; !slices.Equal(got, want) {
		t.Errorf("pieces = %v, want %v", got, want)
	}
	if got := pieces(0, nil); got != nil {
		t.Errorf("pieces of nothing = %v", got)
	}
}
