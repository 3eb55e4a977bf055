package ident

import (
	"encoding/json"
	"fmt"
	"math"
	"os"
	"slices"
	"testing"
)

// closedForms is testdata/closed_forms.json, written by closed_forms.py.
type closedForms struct {
	Input struct {
		Before float64
		At     []float64
		Value  []float64
	}
	Grids map[string][]float64
	Cases []struct {
		Structure string
		Lags      []float64
		DeadTime  float64 `json:"dead_time"`
		Grid      string
		Columns   [][]float64
	}
}

func readClosedForms(t *testing.T) closedForms {
	t.Helper()
	blob, err := os.ReadFile("testdata/closed_forms.json")
	if err != nil {
		t.Fatal(err)
	}
	var c closedForms
	if err := json.Unmarshal(blob, &c); err != nil {
		t.Fatal(err)
	}
	return c
}

func structure(t testing.TB, name string) Structure {
	t.Helper()
	st, err := ParseStructure(name)
	if err != nil {
		t.Fatal(err)
	}
	return st
}

func columnsFor(st Structure, rows int) [][]float64 {
	dst := make([][]float64, st.NumLags()+2)
	for i := range dst {
		dst[i] = make([]float64, rows)
	}
	return dst
}

func span(x []float64) float64 { return slices.Max(x) - slices.Min(x) }

func greatestDifference(a, b []float64) float64 {
	worst := 0.0
	for k := range a {
		if d := math.Abs(a[k] - b[k]); !(d <= worst) {
			worst = d
		}
	}
	return worst
}

// TestClosedForms holds the simulation to closed forms computed in 300-digit
// arithmetic: distinct, equal, nearly equal (1e-6 apart) and widely spread
// lags, on uniform, jittered and gapped rows, with changes of the input between
// the rows and at the first.
func TestClosedForms(t *testing.T) {
	forms := readClosedForms(t)
	in := Input{forms.Input.Before, forms.Input.At, forms.Input.Value}
	for _, c := range forms.Cases {
		name := fmt.Sprintf("%s %v %g %s", c.Structure, c.Lags, c.DeadTime, c.Grid)
		st := structure(t, c.Structure)
		s := NewSimulator(forms.Grids[c.Grid], in)
		got := columnsFor(st, len(forms.Grids[c.Grid]))
		s.Sensitivities(got, st, c.Lags, c.DeadTime)
		// The times themselves are rounded, to 4e-15 s at 29 s.
		tolerance := 1e-11 + 4e-15/slices.Min(c.Lags)
		if c.Structure != "fopdt" {
			tolerance = 1e-11
		}
		unit := span(c.Columns[0])
		if d := greatestDifference(got[0], c.Columns[0]); !(d <= tolerance*unit) {
			t.Errorf("%s: response is off by %.2g of its span", name, d/unit)
		}
		for i, column := range c.Columns[1:] {
			if d := greatestDifference(got[1+i], column); !(d <= tolerance*span(column)) {
				t.Errorf("%s: sensitivity %d is off by %.2g of its span", name, i, d/span(column))
			}
		}
		if d := greatestDifference(s.Response(nil, st, c.Lags, c.DeadTime), c.Columns[0]); !(d <= tolerance*unit) {
			t.Errorf("%s: response alone is off by %.2g of its span", name, d/unit)
		}
	}
}
