package fit

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"gonum.org/v1/gonum/mat"

	"lagwright/ident"
)

// TestFilterIsTheCholeskyFactor holds the filter to the covariance matrix of the
// rows written out sample by sample: whitened columns have the inner products of
// the inverse matrix, and the log determinant is the matrix's. Rows are samples and
// means of samples, with jitter and a hole, with and without a walk.
func TestFilterIsTheCholeskyFactor(t *testing.T) {
	r := rand.New(rand.NewPCG(3, 1))
	rows := []ident.Row{}
	at := 2.0
	for k, m := range []int{1, 1, 1, 4, 4, 3, 1, 8, 1, 1, 2, 2, 16, 1} {
		if k == 8 {
			at += 7 // a hole
		}
		rows = append(rows, ident.Row{T: at, H: 0.5, M: m})
		at += float64(m)*0.5 + 0.1*r.Float64()
	}
	for _, s := range []shape{
		{tc: 1.3, white: 0.2}, {tc: 1.3, white: 0.2, walk: 0.05}, {tc: 0.4, white: 0, walk: 2}, {tc: 1, white: 1, walk: 0.3}, {tc: 1, white: 1},
	} {
		t.Run(fmt.Sprintf("%+v", s), func(t *testing.T) {
			n := len(rows)
			dense := mat.NewSymDense(n, nil)
			for i, a := range rows {
				for j := range i + 1 {
					dense.SetSym(i, j, covarianceOfMeans(a, rows[j], s, rows[0].T))
				}
			}
			var ch mat.Cholesky
			if !ch.Factorize(dense) {
				t.Fatal("the covariance matrix is not positive definite")
			}
			var f filter
			f.set(rows, s)
			if want := ch.LogDet(); math.Abs(f.logdet-want) > 1e-9*math.Abs(want)+1e-9 {
				t.Errorf("log determinant %.12g, want %.12g", f.logdet, want)
			}
			cols := columns(5, n)
			for _, c := range cols {
				for k := range c {
					c[k] = r.NormFloat64()
				}
			}
			white := columns(5, n)
			for j := range cols {
				copy(white[j], cols[j])
			}
			f.applyAll(white)
			for i := range cols {
				var x mat.VecDense
				if err := ch.SolveVecTo(&x, mat.NewVecDense(n, cols[i])); err != nil {
					t.Fatal(err)
				}
				for j := range cols {
					want := mat.Dot(&x, mat.NewVecDense(n, cols[j]))
					if got := dot(white[i], white[j]); math.Abs(got-want) > 1e-9*(1+math.Abs(want)) {
						t.Errorf("columns %d and %d: %.12g, want %.12g", i, j, got, want)
					}
				}
			}
		})
	}
}

// covarianceOfMeans sums the covariance of every pair of samples of two rows; the
// walk starts from 0 at the time zero.
func covarianceOfMeans(a, b ident.Row, s shape, zero float64) float64 {
	sum := 0.0
	for p := range a.M {
		for q := range b.M {
			ta, tb := a.T+float64(p)*a.H, b.T+float64(q)*b.H
			sum += (1 - s.white) * math.Exp(-math.Abs(ta-tb)/s.tc)
			if ta == tb {
				sum += s.white
			}
			sum += s.walk * (math.Min(ta, tb) - zero)
		}
	}
	return sum / float64(a.M*b.M)
}

// TestWhitenerPassesLikeTheFilter holds the filter that keeps no coefficients to
// the one that does, on even rows in pieces, with a hole.
func TestWhitenerPassesLikeTheFilter(t *testing.T) {
	r := rand.New(rand.NewPCG(5, 1))
	var at []float64
	var rows []ident.Row
	for k := range 700 {
		x := 0.1 * float64(k)
		if k > 500 {
			x += 3.3
		}
		at = append(at, x)
		rows = append(rows, ident.Row{T: x, M: 1})
	}
	x := make([]float64, len(at))
	for k := range x {
		x[k] = r.NormFloat64()
	}
	for _, s := range []shape{{tc: 0.5, white: 0.1}, {tc: 0.5, white: 0.1, walk: 0.2}, {tc: 1, white: 1, walk: 0.01}} {
		var f filter
		f.set(rows, s)
		want := make([]float64, len(x))
		f.apply(want, x)
		got := append([]float64(nil), x...)
		w := (&record{}).whitener(s)
		for lo := 0; lo < len(x); lo += 130 {
			hi := min(lo+130, len(x))
			w.pass(got[lo:hi], at[lo:hi])
		}
		for k := range got {
			if math.Abs(got[k]-want[k]) > 1e-9 {
				t.Fatalf("%+v: row %d is %g, want %g", s, k, got[k], want[k])
			}
		}
		if math.Abs(w.logDeterminant()-f.logdet) > 1e-7 || math.Abs(w.sum-dot(want, want)) > 1e-9*w.sum {
			t.Errorf("%+v: sums %g, %g, want %g, %g", s, w.sum, w.logDeterminant(), dot(want, want), f.logdet)
		}
	}
}

// Rows so far apart that the noise between them is next to independent, and then close
// together again: what is carried over must keep its digits.
func TestWhitenerFarApart(t *testing.T) {
	r := rand.New(rand.NewPCG(5, 4))
	for i, gap := range []float64{300, 346, 500, 710, 735, 744, 744, 744, 744, 746, 2000} {
		far := 20 + i%4
		var rows []ident.Row
		var at, x []float64
		now := 0.0
		for k := range 30 {
			rows, at, x = append(rows, ident.Row{T: now, M: 1}), append(at, now), append(x, r.NormFloat64())
			switch {
			case k >= 10 && k < far:
				now += gap
			case k == far:
				now += 0.05
			default:
				now++
			}
		}
		var f filter
		s := shape{tc: 1, white: 0.1}
		f.set(rows, s)
		want := make([]float64, len(x))
		f.apply(want, x)
		w := (&record{}).whitener(s)
		w.pass(x, at)
		for k := range x {
			if math.Abs(x[k]-want[k]) > 1e-12 {
				t.Errorf("gaps of %g: row %d is %g, want %g", gap, k, x[k], want[k])
			}
		}
	}
}

// Columns passed together must be what they are when passed one by one, whatever
// their number, over rows whose distance changes, and far enough apart to be independent.
func TestWhitenerPassesColumnsTogether(t *testing.T) {
	r := rand.New(rand.NewPCG(5, 3))
	var at []float64
	x := 0.0
	for k := range 600 {
		at = append(at, x)
		switch {
		case k == 200:
			x += 1e4
		case k > 400:
			x += 0.3
		default:
			x += 0.1
		}
	}
	for _, s := range []shape{{tc: 0.5, white: 0.1}, {tc: 1e-5, white: 0.2}, {tc: 0.5, white: 0.1, walk: 0.2}, whiteShape} {
		for m := 1; m <= 9; m++ {
			cols, want := columns(m, len(at)), columns(m, len(at))
			for j, c := range cols {
				for k := range c {
					c[k] = r.NormFloat64()
				}
				copy(want[j], c)
				w := (&record{}).whitener(s)
				w.pass(want[j], at)
			}
			w, carry := (&record{}).whitener(s), make([]carried, m)
			for lo := 0; lo < len(at); lo += 130 {
				hi := min(lo+130, len(at))
				w.passAll(sliced(cols, lo, hi), carry, at[lo:hi])
			}
			for j := range cols {
				for k, v := range cols[j] {
					if math.Abs(v-want[j][k]) > 1e-9 {
						t.Fatalf("%+v: column %d of %d, row %d is %g, want %g", s, j, m, k, v, want[j][k])
					}
				}
			}
		}
	}
}

// sliced is the rows lo to hi of some columns.
func sliced(cols [][]float64, lo, hi int) [][]float64 {
	out := make([][]float64, len(cols))
	for j, c := range cols {
		out[j] = c[lo:hi]
	}
	return out
}

// TestColumnsSideBySide holds columns filtered side by side to one filtered alone.
func TestColumnsSideBySide(t *testing.T) {
	r := rand.New(rand.NewPCG(5, 2))
	var rows []ident.Row
	for k := range 90 {
		rows = append(rows, ident.Row{T: 0.4 * float64(k), H: 0.1, M: 1 + k%4})
	}
	for _, s := range []shape{{tc: 0.5, white: 0.1}, {tc: 0.5, white: 0.1, walk: 0.2}, {tc: 1, white: 1, walk: 0.01}, whiteShape} {
		var f filter
		f.set(rows, s)
		cols, want := columns(7, len(rows)), columns(7, len(rows))
		for j, c := range cols {
			for k := range c {
				c[k] = r.NormFloat64()
			}
			f.apply(want[j], c)
		}
		f.applyAll(cols)
		for j, c := range cols {
			for k, v := range c {
				if math.Abs(v-want[j][k]) > 1e-12 {
					t.Fatalf("%+v: row %d of column %d is %g, alone %g", s, k, j, v, want[j][k])
				}
			}
		}
	}
}
