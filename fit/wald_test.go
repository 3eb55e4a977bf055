package fit

import (
	"context"
	"encoding/json"
	"math"
	"os"
	"path/filepath"
	"testing"

	"lagwright/data"
)

// TestAgainstScipy compares estimates and Wald standard errors under white
// noise with those of scipy on the same logs; testdata/wald.py made logs and
// figures.
func TestAgainstScipy(t *testing.T) {
	text, err := os.ReadFile(filepath.Join("testdata", "wald.json"))
	if err != nil {
		t.Fatal(err)
	}
	var cases []struct {
		Name, Structure, Drift string
		SSE                    float64
		Value, SE              []float64 // gain, lags, dead time, baseline, drift
	}
	if err := json.Unmarshal(text, &cases); err != nil {
		t.Fatal(err)
	}
	for _, want := range cases {
		t.Run(want.Name, func(t *testing.T) {
			runs, err := data.Read(context.Background(), filepath.Join("testdata", "wald-"+want.Name+".csv"), data.Options{})
			if err != nil {
				t.Fatal(err)
			}
			c, err := Fit(context.Background(), runs, Options{Structure: want.Structure, Noise: "white", Initial: "rest", Drift: want.Drift, Plants: -1})
			if err != nil {
				t.Fatal(err)
			}
			m, _ := c.Model(want.Structure)
			if math.Abs(m.SSE/want.SSE-1) > 1e-9 {
				t.Errorf("SSE %.12g, scipy %.12g", m.SSE, want.SSE)
			}
			if len(m.Parameters) != len(want.Value) {
				t.Fatalf("%d parameters, want %d", len(m.Parameters), len(want.Value))
			}
			for i, q := range m.Parameters {
				if math.Abs(q.Value/want.Value[i]-1) > 1e-6 {
					t.Errorf("%s %.10g, scipy %.10g", q.Name, q.Value, want.Value[i])
				}
				switch {
				case q.SE == nil:
					t.Errorf("%s has no standard error", q.Name)
				case math.Abs(*q.SE/want.SE[i]-1) > 1e-4:
					t.Errorf("standard error of %s %.8g, scipy %.8g: %.2g apart", q.Name, *q.SE, want.SE[i], *q.SE/want.SE[i]-1)
				}
			}
		})
	}
}
