package fit

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"os"
	"runtime/debug"
	"testing"

	"lagwright/data"
)

// Columns that are no bump test, as a wrong name or a dead sensor gives them, end in
// an error or in a card whose numbers are numbers; never in a panic.
func TestNonsense(t *testing.T) {
	r := rand.New(rand.NewPCG(3, 6))
	type pattern struct {
		name string
		at   func(k, n int) float64
	}
	patterns := []pattern{
		{"a step at the end", func(k, n int) float64 { return 4 + 0.1*float64((k+3)/n) }},
		{"two levels", func(k, n int) float64 { return 4 + float64(k/5%2) }},
		{"a step", func(k, n int) float64 { return 4 + float64(2*k/n) }},
		{"a ramp", func(k, n int) float64 { return float64(k) }},
		{"a walk", func(k, n int) float64 { return 60 + math.Round(10*float64(k)/float64(n)*r.Float64()) }},
		{"a spike", func(k, n int) float64 { return 20 + 1e6*float64(k/(n-3)%2*(n-1-k)) }},
		{"noise", func(k, n int) float64 { return 63 + r.NormFloat64() }},
		{"a curve", func(k, n int) float64 { return 20 + 50*(1-math.Exp(-5*float64(k)/float64(n))) }},
		{"tiny", func(k, n int) float64 { return 1e-9 * float64(k*k%7) }},
	}
	for i, u := range patterns {
		for j, y := range patterns {
			if os.Getenv("LAGWRIGHT_LONG") == "" && (i+j)%3 > 0 {
				continue
			}
			n := 20 + r.IntN(50)
			run := &data.Run{Source: data.Source{File: fmt.Sprintf("%s over %s", y.name, u.name)}}
			for k := range n {
				run.T = append(run.T, float64(k))
				run.U = append(run.U, u.at(k, n))
				run.Y = append(run.Y, y.at(k, n))
			}
			func() {
				defer func() {
					if p := recover(); p != nil {
						t.Errorf("%s, %d rows: panic: %v\n%s", run.Source.File, n, p, debug.Stack())
					}
				}()
				_, _ = Check(context.Background(), run, Options{})
				card, err := Fit(context.Background(), []*data.Run{run}, Options{Workers: 1, Plants: 50})
				if err != nil {
					return
				}
				for _, m := range card.Models {
					for _, p := range m.Parameters {
						if math.IsNaN(p.Value) || math.IsInf(p.Value, 0) {
							t.Errorf("%s: %s of %s is %v", run.Source.File, p.Name, m.Structure, p.Value)
						}
					}
				}
				for _, d := range card.Derived {
					if d.Low != nil && *d.Low > d.Value || d.High != nil && *d.High < d.Value {
						t.Errorf("%s: %s is %g, its interval %g to %g", run.Source.File, d.Name, d.Value, *d.Low, *d.High)
					}
				}
				if _, err := card.PlausiblePlants(); err != nil {
					t.Errorf("%s: %v", run.Source.File, err)
				}
			}()
		}
	}
}
