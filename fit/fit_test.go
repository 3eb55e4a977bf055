package fit

import (
	"bytes"
	"context"
	"errors"
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"lagwright/data"
	"lagwright/ident"
)

// bumpLog is an invented log: a plant driven by steps of the input, with white
// noise. Times of steps are rows.
type bumpLog struct {
	structure string
	gain      float64
	lags      []float64
	dead      float64
	n         int
	every     float64 // s
	steps     []step  // the first one's input holds from the first row on
	sd        float64
	law       ident.Law
	name      string
}

type step struct{ at, to float64 }

func (l bumpLog) run(seed uint64) *data.Run {
	r := rand.New(rand.NewPCG(seed, 77))
	run := &data.Run{
		Source: data.Source{File: l.name, SHA256: "5e", Rows: l.n, ToS: float64(l.n-1) * l.every, Columns: data.Columns{Time: "t", Input: "EH-3.OUT", Temperature: "TT-3"}},
		Units:  data.Units{Time: "s", Input: "V", Temperature: "degC"},
	}
	if l.name == "" {
		run.Source.File = "bump.csv"
	}
	run.T, run.U = make([]float64, l.n), make([]float64, l.n)
	for k := range run.T {
		run.T[k] = float64(k) * l.every
		for _, s := range l.steps {
			if run.T[k] >= s.at-1e-9 {
				run.U[k] = s.to
			}
		}
	}
	st, err := ident.ParseStructure(l.structure)
	if err != nil {
		panic(err)
	}
	run.Y = ident.NewSimulator(run.T, ident.HeldInput(run.T, run.U, l.law)).Response(nil, st, l.lags, l.dead)
	for k := range run.Y {
		run.Y[k] = 61 + l.gain*run.Y[k] + l.sd*r.NormFloat64()
	}
	run.Quality.MedianInterval = l.every
	return run
}

// twoLags is a clean bump test of a chain of two, up and down.
func twoLags() bumpLog {
	return bumpLog{structure: "chain2", gain: 7.4, lags: []float64{11, 3.5}, dead: 2.3, n: 240, every: 0.7,
		steps: []step{{0, 3}, {21, 4.2}, {98, 3}}, sd: 0.06}
}

func fitted1(t testing.TB, runs []*data.Run, o Options) *Card {
	t.Helper()
	c, err := Fit(context.Background(), runs, o)
	if err != nil {
		t.Fatal(err)
	}
	return c
}

func cardBytes(t testing.TB, c *Card) []byte {
	t.Helper()
	var b bytes.Buffer
	if err := c.WriteJSON(&b); err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}

func TestFitFindsTheStructureAndThePlant(t *testing.T) {
	run := twoLags().run(1)
	c := fitted1(t, []*data.Run{run}, Options{Plants: 40})
	if c.Selected != "chain2" {
		t.Errorf("selected %s, want chain2", c.Selected)
	}
	if len(c.Models) != len(ident.Structures()) {
		t.Errorf("%d structures in the card, want all %d", len(c.Models), len(ident.Structures()))
	}
	plant, err := c.Plant()
	if err != nil {
		t.Fatal(err)
	}
	m, _ := c.Model("chain2")
	truth := map[string]float64{"gain": 7.4, "lag1": 11, "lag2": 3.5, "dead_time": 2.3, "baseline": 61}
	for _, q := range m.Parameters {
		want, ok := truth[q.Name]
		if !ok {
			continue
		}
		// The seed is one whose 95 % intervals all hold the truth; most do.
		if q.Low == nil || q.High == nil || *q.Low > want || *q.High < want {
			t.Errorf("%s %g: interval does not hold %g", q.Name, q.Value, want)
		}
	}
	if math.Abs(plant.Gain-7.4) > 0.1 {
		t.Errorf("gain %g, want 7.4", plant.Gain)
	}
	plants, err := c.PlausiblePlants()
	if err != nil || len(plants) != 40 {
		t.Errorf("%d plausible plants, error %v; want 40", len(plants), err)
	}
	for _, d := range c.Derived {
		if d.Low == nil || d.High == nil || *d.Low > d.Value || *d.High < d.Value {
			t.Errorf("%s: %g lies outside its own bounds", d.Name, d.Value)
		}
	}
}

// Same log, same seed: same bytes, however many workers; another seed draws
// other plants and finds the same optimum.
func TestFitIsTheSameAtAnyNumberOfWorkers(t *testing.T) {
	run := twoLags().run(2)
	o := Options{Plants: 30, Rand: 9, Workers: 1}
	one := fitted1(t, []*data.Run{run}, o)
	o.Workers = 3
	if many := fitted1(t, []*data.Run{run}, o); !bytes.Equal(cardBytes(t, one), cardBytes(t, many)) {
		t.Error("1 and 3 workers give different cards")
	}
	o.Rand = 10
	other := fitted1(t, []*data.Run{run}, o)
	if a, b := one.Plants.Values[0][0], other.Plants.Values[0][0]; a == b {
		t.Error("another seed draws the same plants")
	}
	a, _ := one.Plant()
	b, _ := other.Plant()
	if a.Gain != b.Gain || a.DeadTime != b.DeadTime {
		t.Error("the seed moves the optimum")
	}
}

func TestFixedParametersStay(t *testing.T) {
	run := twoLags().run(3)
	c := fitted1(t, []*data.Run{run}, Options{Structure: "chain2", Fix: map[string]float64{"lag2": 3.5}, Plants: 25})
	free := fitted1(t, []*data.Run{run}, Options{Structure: "chain2", Plants: -1})
	m, _ := c.Model("chain2")
	f, _ := free.Model("chain2")
	for i, q := range m.Parameters {
		switch {
		case q.Name == "lag2" && (!q.Fixed || q.Value != 3.5 || q.SE != nil):
			t.Errorf("lag2 is %+v, want 3.5 and fixed", q)
		case q.Name != "lag2" && q.Fixed:
			t.Errorf("%s is fixed", q.Name)
		case q.Name == "dead_time" && *q.High-*q.Low >= *f.Parameters[i].High-*f.Parameters[i].Low:
			t.Error("a known lag does not narrow the dead time")
		}
	}
	if n := len(m.Covariance); n != len(m.Parameters)-1 {
		t.Errorf("covariance of %d parameters, want %d", n, len(m.Parameters)-1)
	}
	plants, err := c.PlausiblePlants()
	if err != nil {
		t.Fatal(err)
	}
	for _, p := range plants {
		if p.Lags[0] != 3.5 && p.Lags[1] != 3.5 {
			t.Fatalf("a plausible plant has lags %v, none 3.5", p.Lags)
		}
	}
}

func TestSeveralLogsShareThePlant(t *testing.T) {
	one, two := twoLags().run(4), twoLags().run(5)
	for k := range two.Y {
		two.Y[k] += 9 // another day: another baseline
	}
	joint := fitted1(t, []*data.Run{one, two}, Options{Structure: "chain2", Plants: -1})
	alone := fitted1(t, []*data.Run{one}, Options{Structure: "chain2", Plants: -1})
	m, _ := joint.Model("chain2")
	a, _ := alone.Model("chain2")
	if m.Samples != 2*a.Samples {
		t.Errorf("%d samples, want %d", m.Samples, 2*a.Samples)
	}
	if len(joint.Source) != 2 {
		t.Errorf("%d sources, want 2", len(joint.Source))
	}
	values := map[string]float64{}
	for _, q := range m.Parameters {
		values[q.Name] = q.Value
	}
	if d := values["baseline_2"] - values["baseline"]; math.Abs(d-9) > 0.2 {
		t.Errorf("baselines %g apart, want 9", d)
	}
	// Twice the data: the interval shrinks by about √2.
	width := func(m *Model) float64 { return *m.Parameters[0].High - *m.Parameters[0].Low }
	if r := width(a) / width(m); r < 1.1 || r > 1.9 {
		t.Errorf("two logs narrow the gain %.2f times, want about 1.4", r)
	}
}

func TestConfidenceWidens(t *testing.T) {
	run := twoLags().run(6)
	narrow := fitted1(t, []*data.Run{run}, Options{Structure: "chain2", Confidence: 0.68, Plants: -1})
	wide := fitted1(t, []*data.Run{run}, Options{Structure: "chain2", Confidence: 0.99, Plants: -1})
	for i, q := range narrow.Models[0].Parameters {
		w := wide.Models[0].Parameters[i]
		if *q.High-*q.Low >= *w.High-*w.Low {
			t.Errorf("%s: the 68 %% interval is as wide as the 99 %% one", q.Name)
		}
	}
}

func TestFitRefuses(t *testing.T) {
	flat := twoLags().run(1)
	for k := range flat.Y {
		flat.Y[k] = 50
	}
	still := twoLags().run(1)
	for k := range still.U {
		still.U[k] = 3
	}
	short := twoLags()
	short.n = 5
	for _, c := range []struct {
		name string
		run  *data.Run
		o    Options
		want error
	}{
		{"constant temperature", flat, Options{}, ErrConstant},
		{"no bump", still, Options{}, ErrNoBump},
		{"five rows", short.run(1), Options{}, ErrTooShort},
		{"structure", twoLags().run(1), Options{Structure: "chain9"}, ErrOption},
		{"noise", twoLags().run(1), Options{Noise: "pink"}, ErrOption},
		{"fix", twoLags().run(1), Options{Fix: map[string]float64{"lag1": -2}}, ErrOption},
		{"confidence", twoLags().run(1), Options{Confidence: 95}, ErrOption},
	} {
		_, err := Fit(context.Background(), []*data.Run{c.run}, c.o)
		if !errors.Is(err, c.want) {
			t.Errorf("%s: error %v, want %v", c.name, err, c.want)
		} else if strings.Contains(err.Error(), "\n") {
			t.Errorf("%s: error of several lines: %v", c.name, err)
		}
	}
}

func TestFitStopsWhenCancelled(t *testing.T) {
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	if _, err := Fit(ctx, []*data.Run{twoLags().run(1)}, Options{}); !errors.Is(err, context.Canceled) {
		t.Errorf("error %v, want that of the context", err)
	}
}
