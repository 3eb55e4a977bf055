package tune

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"os"
	"runtime"
	"sort"
	"sync"
	"testing"

	"lagwright/data"
	"lagwright/fit"
	"lagwright/ident"
)

// An invented heater of the field trial with the log of its bump test.
type trialHeater struct {
	plant ident.Plant
	run   *data.Run
	ms    float64
	over  float64
}

// inventHeater draws one heater: 1 to 4 lags, dead time 0.04 to 0.6 of their
// sum, noise 0.5 to 10 % of the swing, correlated, quantised, some drifting.
func inventHeater(seed uint64) trialHeater {
	r := rand.New(rand.NewPCG(seed, 4242))
	n := 1 + r.IntN(4)
	sum := math.Exp(r.Float64()*math.Log(100)) * 2 // 2 to 200 s
	lags := make([]float64, n)
	total := 0.0
	for i := range lags {
		lags[i] = math.Exp(1.2 * r.NormFloat64())
		total += lags[i]
	}
	for i := range lags {
		lags[i] *= sum / total
	}
	dead := sum * math.Exp(math.Log(0.04)+r.Float64()*math.Log(0.6/0.04))
	gain := 2 + 18*r.Float64()
	name := "fopdt"
	if n > 1 {
		name = fmt.Sprintf("chain%d", n)
	}
	st, _ := ident.ParseStructure(name)
	p, err := ident.NewPlant(st, gain, lags, dead)
	if err != nil {
		panic(err)
	}
	h := trialHeater{plant: p, ms: []float64{1.4, 1.6, 1.8}[r.IntN(3)], over: []float64{5, 10, 20}[r.IntN(3)]}

	reach := sum + dead
	rows := 300 + r.IntN(900)
	step := 7 * reach / float64(rows) * (0.8 + 0.6*r.Float64())
	before := rows / 8
	du := 1.5
	swing := gain * du
	sd := swing * 0.005 * math.Exp(r.Float64()*math.Log(20))
	rho := 0.95 * r.Float64()
	white := r.Float64() * 0.5
	quantum := 0.0
	if r.Float64() < 0.6 {
		quantum = sd * (0.2 + 1.3*r.Float64())
	}
	drift := 0.0
	if r.Float64() < 0.3 {
		drift = (r.Float64() - 0.5) * 0.2 * swing / (float64(rows) * step)
	}
	run := &data.Run{Source: data.Source{File: fmt.Sprintf("heater-%d.csv", seed)}, Units: data.Units{Time: "s", Input: "V", Temperature: "degC"}}
	twice := r.Float64() < 0.4
	for k := range rows {
		run.T = append(run.T, float64(k)*step)
		u := 4.0
		if k >= before {
			u += du
		}
		if twice && k >= before+(rows-before)*3/5 {
			u -= du
		}
		run.U = append(run.U, u)
	}
	y := ident.NewSimulator(run.T, ident.HeldInput(run.T, run.U, ident.Linear)).Response(nil, st, p.Lags, dead)
	c := r.NormFloat64()
	run.Y = make([]float64, rows)
	for k := range y {
		c = rho*c + math.Sqrt(1-rho*rho)*r.NormFloat64()
		v := 60 + gain*y[k] + drift*run.T[k] + sd*(math.Sqrt(1-white)*c+math.Sqrt(white)*r.NormFloat64())
		if quantum > 0 {
			v = quantum * math.Round(v/quantum)
		}
		run.Y[k] = v
	}
	run.Quality.Quantum = quantum
	return h.with(run)
}

func (h trialHeater) with(run *data.Run) trialHeater { h.run = run; return h }

// trialResult is one heater of the trial.
type trialResult struct {
	meets  bool
	ratio  float64 // load IAE over the best possible
	share  float64 // stated
	stated bool    // the tool said the requirement is met
	what   string
}

func tryHeater(h trialHeater, assurance float64) (trialResult, error) {
	ctx := context.Background()
	card, err := fit.Fit(ctx, []*data.Run{h.run}, fit.Options{Workers: 1})
	if err != nil {
		return trialResult{}, err
	}
	q := Requirement{Ms: &h.ms, Overshoot: &h.over}
	g, err := Tune(ctx, []*fit.Card{card}, q, Options{Controller: "pi", Assurance: assurance, Workers: 1})
	if err != nil {
		return trialResult{}, err
	}
	op, err := operate(card, nil)
	if err != nil {
		return trialResult{}, err
	}
	if q, err = complete(q, op); err != nil {
		return trialResult{}, err
	}
	t := newTask(q, 4, 60)
	truth := newEnsemble([]*scenario{newScenario(h.plant, &t, 0)}, 1)
	l := law{kc: g.Kc, ti: *g.Ti, b: 1}
	best := newSearch(ctx, truth, h.plant, 1).design("pi")
	out := trialResult{share: g.ShareMeeting, stated: g.Meets, ratio: math.NaN()}
	out.meets = truth.holds(l, 1)
	if best.found {
		out.ratio = truth.loadIAE(l, 1, reportStep) / truth.loadIAE(best.law, 1, reportStep)
	}
	out.what = fmt.Sprintf("%s selected %s, ms %.1f over %g: kc %.4g ti %.4g, best kc %.4g ti %.4g", h.plant.Structure, card.Selected, h.ms, h.over, g.Kc, *g.Ti, best.law.kc, best.law.ti)
	return out, nil
}

// TestFieldTrial makes gains from the bump logs of invented heaters and puts
// them on the true ones. The long trial asks for what the trade's best practice
// does not reach: at --assurance 95 % at least 93 % meet their requirement, at a
// load IAE of at most 1.15 times the best possible (90th percentile 1.45). The
// short one only shows a gross failure.
func TestFieldTrial(t *testing.T) {
	heaters, least := 8, 0.7
	long := os.Getenv("LAGWRIGHT_LONG") != ""
	if long {
		heaters, least = 500, 0.93
	}
	results := make([]trialResult, heaters)
	var wg sync.WaitGroup
	next := make(chan int)
	for range runtime.GOMAXPROCS(0) {
		wg.Go(func() {
			for i := range next {
				r, err := tryHeater(inventHeater(uint64(i)), 0.95)
				if err != nil {
					t.Errorf("heater %d: %v", i, err)
				}
				results[i] = r
			}
		})
	}
	for i := range heaters {
		next <- i
	}
	close(next)
	wg.Wait()
	met, high, metHigh := 0, 0, 0
	var ratios []float64
	for i, r := range results {
		if r.meets {
			met++
			if !math.IsNaN(r.ratio) {
				ratios = append(ratios, r.ratio)
			}
		}
		if r.share >= 0.9 {
			high++
			if r.meets {
				metHigh++
			}
		}
		if !r.meets || long {
			t.Logf("%3d meets %-5v IAE ratio %.3f share %.3f stated %v: %s", i, r.meets, r.ratio, r.share, r.stated, r.what)
		}
	}
	sort.Float64s(ratios)
	if len(ratios) == 0 {
		t.Fatal("no heater met its requirement")
	}
	share, median, most := float64(met)/float64(heaters), ratios[len(ratios)/2], ratios[len(ratios)*9/10]
	t.Logf("%d heaters: %.1f %% meet; load IAE over the best possible: median %.3f, 90th percentile %.3f; of %d stated at 0.9 to 1, %.1f %% met",
		heaters, 100*share, median, most, high, 100*float64(metHigh)/float64(max(high, 1)))
	if share < least {
		t.Errorf("%.1f %% of the heaters meet their requirement, want %.0f %%", 100*share, 100*least)
	}
	if long && (median > 1.15 || most > 1.45) {
		t.Errorf("load IAE %.3f times the best possible in the median, %.3f at the 90th percentile", median, most)
	}
}
