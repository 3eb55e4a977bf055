package fit

import (
	"math"
	"strings"
	"testing"

	"lagwright/data"
	"lagwright/ident"
)

func TestCurves(t *testing.T) {
	run := twoLags().run(3)
	for k := 60; k < 66; k++ {
		run.Y[k] = math.NaN() // a thermocouple that read open
	}
	for _, o := range []Options{
		{Structure: "chain2", Plants: 60},
		{Structure: "equal2", Plants: 60, Initial: "earlier", Drift: "linear"},
		{Structure: "fopdt", Plants: 60, Noise: "white"},
	} {
		card := fitted1(t, []*data.Run{run}, o)
		c, err := card.Curves(run, 0)
		if err != nil {
			t.Fatal(err)
		}
		m, _ := card.Model(card.Selected)
		var sse float64
		inside, bumpWidth := 0, 0.0
		for k := range run.T {
			if math.IsNaN(run.Y[k]) {
				if !math.IsNaN(c.Residual[k]) || math.IsNaN(c.Fitted[k]) {
					t.Fatalf("row %d has no temperature: residual %g, fitted %g", k, c.Residual[k], c.Fitted[k])
				}
				continue
			}
			sse += c.Residual[k] * c.Residual[k]
			if c.Low[k] <= c.Fitted[k] && c.Fitted[k] <= c.High[k] {
				inside++
			}
			bumpWidth = math.Max(bumpWidth, c.High[k]-c.Low[k])
		}
		if math.Abs(sse/m.SSE-1) > 1e-6 {
			t.Errorf("%s: the curve leaves %g, the card says %g", o.Structure, sse, m.SSE)
		}
		if inside < 95*len(run.T)/100 {
			t.Errorf("%s: the band holds the fitted output at %d of %d rows", o.Structure, inside, len(run.T))
		}
		if bumpWidth > 0.5 || bumpWidth < 0.01 {
			t.Errorf("%s: the band is up to %g K wide with noise of 0.06 K", o.Structure, bumpWidth)
		}
		if len(c.Bumps) != 2 || len(c.ACF) != 40 || math.Abs(c.ACFBound-1.96/math.Sqrt(float64(m.Samples))) > 1e-4 {
			t.Errorf("%s: %d bumps, %d lags of autocorrelation, bound %g", o.Structure, len(c.Bumps), len(c.ACF), c.ACFBound)
		}
	}
}

// The band holds the true output where the fitted structure is the true one.
func TestBandHoldsTheTruth(t *testing.T) {
	l := twoLags()
	st, _ := ident.ParseStructure(l.structure)
	inside, of := 0, 0
	for seed := range uint64(20) {
		run := l.run(40 + seed)
		truth := ident.NewSimulator(run.T, ident.HeldInput(run.T, run.U, l.law)).Response(nil, st, l.lags, l.dead)
		card := fitted1(t, []*data.Run{run}, Options{Structure: "chain2", Plants: 150, Initial: "rest", Drift: "none"})
		c, err := card.Curves(run, 0)
		if err != nil {
			t.Fatal(err)
		}
		for k := 35; k < len(run.T); k += 5 { // from the first bump on; before it the band has no width
			// The baseline is the log's own: what is known of the shape is judged.
			v := 61 + l.gain*truth[k]
			of++
			if v >= c.Low[k]-l.sd/8 && v <= c.High[k]+l.sd/8 {
				inside++
			}
		}
	}
	if share := float64(inside) / float64(of); share < 0.9 {
		t.Errorf("the 95 %% band, widened by an eighth of the noise for the baseline, holds the truth at %.1f %% of the rows", 100*share)
	}
}

func TestCurvesOfAnotherRun(t *testing.T) {
	run, other := twoLags().run(3), twoLags().run(4)
	card := fitted1(t, []*data.Run{run}, Options{Structure: "chain2", Plants: 20})
	if _, err := card.Curves(run, 1); err == nil || !strings.Contains(err.Error(), "no log 2") {
		t.Errorf("log 2 of 1: error %v", err)
	}
	other.Source.SHA256 = "another"
	if _, err := card.Curves(other, 0); err == nil {
		t.Error("another file passes for the card's")
	}
	for k := range other.Y {
		other.Y[k] += 30
	}
	c, err := card.Curves(other, -1)
	if err != nil {
		t.Fatal(err)
	}
	for k, r := range c.Residual {
		if math.Abs(r) > 0.5 {
			t.Fatalf("row %d: a run 30 K higher is %g K off its own baseline", k, r)
		}
	}
}

// Of a long log the band is computed at few rows, and is the same but for what
// straight lines between them leave out.
func TestBandOfALongLog(t *testing.T) {
	l := twoLags()
	l.n, l.every = 24000, 0.01
	l.steps = []step{{0, 3}, {60, 4.2}, {150, 3}}
	run := l.run(5)
	bumps := ident.FindBumps(run.T, run.U, run.Y)
	rows := closeRows(run, bumps, mostBandRows)
	if len(rows) > mostBandRows || rows[0] != 0 || rows[len(rows)-1] != l.n-1 {
		t.Fatalf("%d rows from %d to %d", len(rows), rows[0], rows[len(rows)-1])
	}
	card := fitted1(t, []*data.Run{twoLags().run(5)}, Options{Structure: "chain2", Plants: 15})
	few, err := card.Curves(run, -1)
	if err != nil {
		t.Fatal(err)
	}
	m, _, err := card.output(run, run.T, run.Y)
	if err != nil {
		t.Fatal(err)
	}
	plants, err := card.PlausiblePlants()
	if err != nil {
		t.Fatal(err)
	}
	low, high := append([]float64(nil), few.Fitted...), append([]float64(nil), few.Fitted...)
	for _, p := range plants {
		for k, v := range m.of(p) {
			low[k], high[k] = math.Min(low[k], v), math.Max(high[k], v)
		}
	}
	widest := 0.0
	for k := range run.T {
		widest = math.Max(widest, high[k]-low[k])
	}
	for k := range run.T {
		if few.High[k] > high[k]+0.05*widest || few.Low[k] < low[k]-0.05*widest {
			t.Fatalf("row %d: band %g..%g, plants reach %g..%g", k, few.Low[k], few.High[k], low[k], high[k])
		}
	}
}
