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

// referenceFit is a best fit by plain least squares on the simulated output,
// found with general-purpose numerical libraries from many starts in every
// sampling interval of dead time.
type referenceFit struct {
	File      string             `json:"file"`
	Structure string             `json:"structure"`
	Initial   string             `json:"initial"`
	Drift     string             `json:"drift"`
	Gain      float64            `json:"gain"`
	Lags      []float64          `json:"lags"`
	DeadTime  float64            `json:"dead_time"`
	SSE       float64            `json:"sse"`
	Percent   float64            `json:"fit_percent"`
	SEWhite   map[string]float64 `json:"se_white"`
}

// TestReferenceFits fits real laboratory logs and compares with the
// reference fits beside them: sum of squares, gain, lags, dead time.
func TestReferenceFits(t *testing.T) {
	folder := filepath.Join(sharedFolder(t), "data")
	text, err := os.ReadFile(filepath.Join(folder, "reference-fits.json"))
	if err != nil {
		t.Fatal(err)
	}
	var references []referenceFit
	if err := json.Unmarshal(text, &references); err != nil {
		t.Fatal(err)
	}
	if len(references) != 13 {
		t.Errorf("%d reference fits, want 13", len(references))
	}
	runs := map[string]*data.Run{}
	for _, want := range references {
		t.Run(want.File+" "+want.Structure+" "+want.Initial+" "+want.Drift, func(t *testing.T) {
			run := runs[want.File]
			if run == nil {
				all, err := data.Read(context.Background(), filepath.Join(folder, want.File), data.Options{TimeCol: "t_s", InputCol: "u", TempCol: "y"})
				if err != nil {
					t.Fatal(err)
				}
				run = all[0]
				runs[want.File] = run
			}
			c, err := Fit(context.Background(), []*data.Run{run}, Options{
				Structure: want.Structure, Noise: "white", Initial: want.Initial, Drift: want.Drift, Plants: -1,
			})
			if err != nil {
				t.Fatal(err)
			}
			m, _ := c.Model(want.Structure)
			if r := m.SSE/want.SSE - 1; math.Abs(r) > 1e-6 {
				t.Errorf("SSE %.12g, reference %.12g: %.2g apart", m.SSE, want.SSE, r)
			}
			if math.Abs(m.FitPercent-want.Percent) > 1e-4 {
				t.Errorf("fit %.8g %%, reference %.8g %%", m.FitPercent, want.Percent)
			}
			plant, err := m.Plant()
			if err != nil {
				t.Fatal(err)
			}
			near := func(what string, got, want, tolerance float64) {
				t.Helper()
				if math.Abs(got-want) > tolerance*math.Abs(want) {
					t.Errorf("%s %.10g, reference %.10g", what, got, want)
				}
			}
			near("gain", plant.Gain, want.Gain, 1e-6)
			near("dead time", plant.DeadTime, want.DeadTime, 2e-6)
			for i, l := range want.Lags {
				near("lag", plant.Lags[i], l, 2e-6)
			}
		})
	}
}
