package fit

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"os"
	"runtime"
	"sort"
	"strings"
	"sync"
	"testing"

	"lagwright/data"
	"lagwright/ident"
)

// family is a kind of invented log for the coverage study.
type family struct {
	name      string
	structure string
	gain      float64
	lags      []float64
	dead      float64
	n         int
	step      float64
	bumps     []float64 // times of the changes of a ±1.5 V input around 4 V
	sd        float64   // of the noise
	ar        float64   // correlation of the correlated part from sample to sample
	white     float64   // fraction of the variance that is white
	quantum   float64
	drift     float64 // K/s
	jitter    float64 // of the sampling, as a fraction of the step
	gaps      bool
	missing   float64 // share of the rows that are missing here and there
	closed    bool    // PI control during the log
	boundary  bool    // a parameter sits on the edge of its range
	auto      bool    // structure chosen by the fit: only the gain is held to the truth
	wander    float64 // sd of a random walk over the log: noise that the log alone cannot always tell
	wide      bool    // few effective samples: the width is not held to the bound
}

func families() []family {
	base := family{structure: "chain2", gain: 8, lags: []float64{2.1, 0.65}, dead: 0.42, n: 800, step: 0.1, bumps: []float64{10, 40}, sd: 0.15, white: 1}
	with := func(name string, change func(*family)) family {
		f := base
		f.name = name
		change(&f)
		return f
	}
	return []family{
		with("white", func(f *family) {}),
		with("ar 0.5", func(f *family) { f.ar, f.white = 0.5, 0 }),
		with("ar 0.8", func(f *family) { f.ar, f.white = 0.8, 0 }),
		with("ar 0.95", func(f *family) { f.ar, f.white, f.wide = 0.95, 0, true }),
		with("ar 0.9 and white", func(f *family) { f.ar, f.white = 0.9, 0.4 }),
		with("coarse quantum", func(f *family) { f.ar, f.white, f.sd, f.quantum = 0.5, 0.3, 0.1, 0.25 }),
		with("jittered", func(f *family) { f.ar, f.white, f.jitter = 0.8, 0, 0.3 }),
		with("gaps", func(f *family) { f.ar, f.white, f.gaps = 0.8, 0, true }),
		with("drift", func(f *family) { f.ar, f.white, f.drift = 0.8, 0, 0.02 }),
		with("lags 1:0.85", func(f *family) { f.ar, f.white, f.lags, f.boundary = 0.5, 0, []float64{1.4, 1.19}, true }),
		with("equal lags", func(f *family) { f.ar, f.white, f.lags, f.boundary = 0.5, 0, []float64{1.3, 1.3}, true }),
		with("fopdt, dead time 0.37 samples", func(f *family) {
			f.structure, f.lags, f.dead, f.ar, f.white = "fopdt", []float64{2.1}, 0.037, 0.5, 0
		}),
		with("no dead time", func(f *family) { f.dead, f.ar, f.white, f.boundary = 0, 0.5, 0, true }),
		with("closed loop", func(f *family) { f.closed, f.ar, f.white, f.dead = true, 0.8, 0, 0.4 }),
		with("short record", func(f *family) { f.n, f.bumps, f.ar, f.white, f.wide = 160, []float64{5}, 0.5, 0, true }),
		with("one bump", func(f *family) { f.bumps, f.ar, f.white = []float64{10}, 0.8, 0 }),
		with("fopdt ar 0.8", func(f *family) { f.structure, f.lags, f.ar, f.white = "fopdt", []float64{2.1}, 0.8, 0 }),
		with("auto, chain2", func(f *family) { f.ar, f.white, f.auto = 0.8, 0, true }),
		with("auto, short", func(f *family) { f.n, f.bumps, f.ar, f.white, f.auto = 160, []float64{5}, 0.5, 0, true }),
		with("auto, one bump, ar 0.95", func(f *family) {
			f.n, f.bumps, f.ar, f.white, f.auto = 400, []float64{10}, 0.95, 0, true
		}),
		with("ar 0.7, wanders", func(f *family) { f.ar, f.white, f.wander, f.wide = 0.7, 0, 0.3, true }),
		with("ar 0.7, quantum, wanders more", func(f *family) { f.ar, f.white, f.quantum, f.wander, f.wide = 0.7, 0, 0.1, 0.8, true }),
		with("equal3 ar 0.8", func(f *family) { f.structure, f.lags, f.ar, f.white = "equal3", []float64{0.9}, 0.8, 0 }),
		with("telegraph, beyond one excerpt", func(f *family) {
			f.n, f.ar, f.white, f.bumps = 16000, 0.8, 0, nil
			for at, i := 10.0, 0; at < 1600; i++ {
				f.bumps = append(f.bumps, at)
				at += 0.5 + 0.1*float64((i*7)%31)
			}
		}),
		with("rows missing", func(f *family) {
			f.n, f.step, f.ar, f.white, f.missing = 2400, 0.04, 0.91, 0, 0.33
		}),
	}
}

// make draws one log of the family.
func (f family) make(seed uint64) *data.Run {
	r := rand.New(rand.NewPCG(seed, uint64(len(f.name))*7919+uint64(f.name[0])*131+uint64(f.name[len(f.name)-1])))
	run := &data.Run{Source: data.Source{File: fmt.Sprintf("%s-%d", f.name, seed)}}
	t := 0.0
	for k := range f.n {
		if k > 0 {
			t += f.step
		}
		tk := t
		if f.jitter > 0 {
			tk += f.step * f.jitter * (r.Float64() - 0.5)
		}
		if f.gaps && (k%200 > 150 && k%200 < 185) {
			continue
		}
		if f.missing > 0 && k > 0 && r.Float64() < f.missing {
			continue
		}
		run.T = append(run.T, tk)
	}
	st, _ := ident.ParseStructure(f.structure)
	run.U = make([]float64, len(run.T))
	for k, tk := range run.T {
		run.U[k] = 4
		for i, b := range f.bumps {
			if tk >= b-1e-9 {
				run.U[k] = 4 + 1.5*float64((i+1)%2)
			}
		}
	}
	noise := f.noise(run.T, r)
	if f.closed {
		f.close(run, st, noise)
	} else {
		y := ident.NewSimulator(run.T, ident.HeldInput(run.T, run.U, ident.Linear)).Response(nil, st, f.lags, f.dead)
		run.Y = make([]float64, len(y))
		for k := range y {
			run.Y[k] = 60 + f.gain*y[k] + f.drift*run.T[k] + noise[k]
		}
	}
	if f.quantum > 0 {
		for k := range run.Y {
			run.Y[k] = f.quantum * math.Round(run.Y[k]/f.quantum)
		}
	}
	return run
}

func (f family) noise(t []float64, r *rand.Rand) []float64 {
	out := make([]float64, len(t))
	c := r.NormFloat64()
	for k := range t {
		if k > 0 {
			phi := 0.0
			if f.ar > 0 {
				phi = math.Pow(f.ar, (t[k]-t[k-1])/f.step)
			}
			c = phi*c + math.Sqrt(1-phi*phi)*r.NormFloat64()
		}
		out[k] = f.sd * (math.Sqrt(1-f.white)*c + math.Sqrt(f.white)*r.NormFloat64())
	}
	for k, walk := 1, 0.0; f.wander > 0 && k < len(t); k++ {
		walk += f.wander * math.Sqrt((t[k]-t[k-1])/t[len(t)-1]) * r.NormFloat64()
		out[k] += walk
	}
	return out
}

// close runs the log under PI control with setpoint steps instead of bumps; the
// dead time is a whole number of rows.
func (f family) close(run *data.Run, st ident.Structure, noise []float64) {
	n := len(run.T)
	run.Y = make([]float64, n)
	x := make([]float64, len(f.lags))
	integral, kc, ti := 0.0, 0.12, 2.5
	u := make([]float64, n)
	delay := int(math.Round(f.dead / f.step))
	for k := range n {
		y := 60.0
		if len(x) > 0 {
			y += f.gain * x[len(x)-1]
		}
		run.Y[k] = y + noise[k]
		sp := 60.0
		for i, b := range f.bumps {
			if run.T[k] >= b-1e-9 {
				sp = 60 + 10*float64((i+1)%2)
			}
		}
		err := sp - run.Y[k]
		integral += err * f.step / ti
		u[k] = 4 + kc*(err+integral)
		run.U[k] = u[k]
		// The plant to the next sample, in small exact steps of each lag.
		drive := 0.0
		if k >= delay {
			drive = u[k-delay] - 4
		}
		const sub = 50
		for range sub {
			in := drive
			for i, tau := range f.lags {
				a := math.Exp(-f.step / sub / tau)
				next := a*x[i] + (1-a)*in
				in = (x[i] + next) / 2
				x[i] = next
			}
		}
	}
}

// truth is the value of a parameter in the family.
func (f family) truth(i, n int) float64 {
	switch {
	case i == 0:
		return f.gain
	case i == n-1:
		return f.dead
	}
	l := append([]float64(nil), f.lags...)
	sort.Sort(sort.Reverse(sort.Float64Slice(l)))
	return l[i-1]
}

// coverage counts, per parameter, how often the interval holds the truth.
type coverage struct {
	in, below, above []int
	width            [][]float64
	logs             int
}

// cover fits logs of a family and counts.
func cover(t testing.TB, f family, logs int, o Options) coverage {
	var c coverage
	o.Structure, o.Plants, o.Workers = f.structure, -1, 1
	if f.auto {
		o.Structure = "auto"
	}
	o, err := o.withDefaults()
	if err != nil {
		t.Fatal(err)
	}
	var mu sync.Mutex
	var wg sync.WaitGroup
	next := make(chan int)
	for range runtime.GOMAXPROCS(0) {
		wg.Go(func() {
			for i := range next {
				recs, err := prepare([]*data.Run{f.make(uint64(1000 + i))}, ident.Linear)
				if err != nil {
					t.Error(err)
					continue
				}
				out, err := find(context.Background(), recs, o)
				if err != nil {
					t.Error(err)
					continue
				}
				mu.Lock()
				est := out.models[out.selected].est
				if f.auto {
					est = est[:1]
				}
				c.count(f, est)
				mu.Unlock()
			}
		})
	}
	for i := range logs {
		next <- i
	}
	close(next)
	wg.Wait()
	return c
}

func (c *coverage) count(f family, est []estimate) {
	n := len(est)
	if c.in == nil {
		c.in, c.below, c.above, c.width = make([]int, n), make([]int, n), make([]int, n), make([][]float64, n)
	}
	c.logs++
	for j, e := range est {
		v := f.truth(j, n)
		switch {
		case !math.IsNaN(e.low) && v < e.low:
			c.below[j]++
		case !math.IsNaN(e.high) && v > e.high:
			c.above[j]++
		default:
			c.in[j]++
		}
		c.width[j] = append(c.width[j], e.width())
	}
}

// bound is the Cramér-Rao width of the 95 % intervals at the truth, baseline
// and drift unknown; the noise figures are orthogonal to the mean (Kay,
// Fundamentals of Statistical Signal Processing, 1993, ch. 3, from memory).
func (f family) bound(t testing.TB) []float64 {
	recs, err := prepare([]*data.Run{f.make(1)}, ident.Linear)
	if err != nil {
		t.Fatal(err)
	}
	r := recs[0].window(len(recs[0].root.t))
	r.model(rest, true)
	s := shape{tc: 1, white: 1}
	if f.ar > 0 {
		s = shape{tc: -f.step / math.Log(f.ar), white: f.white}
	}
	r.setShape(s)
	st, _ := ident.ParseStructure(f.structure)
	e := newEngine(st, []*record{r})
	e.gain, e.gainFix = f.gain, true
	p := e.eval(append(append([]float64(nil), f.lags...), f.dead), true)
	e.gainFix = false
	cov := invert(e.tangent(r, &e.work[0], &p).evaluate(s).a)
	var out []float64
	for i := range cov {
		out = append(out, 2*1.959964*f.sd*math.Sqrt(cov[i][i]))
	}
	return out
}

// TestCoverage holds the stated 95 % intervals of gain, lags and dead time
// against the truth over many invented logs: 93 to 97 %, from 93 % up where a
// parameter sits on an edge (to 98.5 %) or the structure is chosen by the fit,
// within two standard deviations of the count (three in the short study). The median width is held to 1.15
// of the Cramér-Rao width in the long study. Without LAGWRIGHT_LONG it takes
// three families and few logs, and only a gross failure shows.
func TestCoverage(t *testing.T) {
	logs, sds, long := 60, 3.0, os.Getenv("LAGWRIGHT_LONG") != ""
	if long {
		logs, sds = 1000, 2
	}
	for i, f := range families() {
		if !long && i != 2 && i != 10 && i != 11 {
			continue
		}
		c := cover(t, f, logs, Options{})
		bound := f.bound(t)
		var line []string
		for j := range c.in {
			sort.Float64s(c.width[j])
			share := float64(c.in[j]) / float64(c.logs)
			ratio := c.width[j][len(c.width[j])/2] / bound[j]
			line = append(line, fmt.Sprintf("%.1f (%d, %d) %.2f", 100*share, c.below[j], c.above[j], ratio))
			lo, hi := 0.93, 0.97
			switch {
			case f.auto:
				hi = 1
			case f.wander > 0 && j == 0:
				// Where a walk hides in the rest, the gain's interval misses it: 60 %
				// without a walk in the mixture. What is held here is that it is looked for.
				lo = 0.75
			case f.wander > 0:
				lo, hi = 0.85, 0.99
			case f.boundary:
				hi = 0.985
			}
			slack := sds * math.Sqrt(0.95*0.05/float64(c.logs))
			if share < lo-slack || share > hi+slack {
				t.Errorf("%s: parameter %d is covered in %.1f %% of %d logs", f.name, j, 100*share, c.logs)
			}
			if long && ratio > 1.15 && !f.boundary && !f.auto && !f.wide {
				t.Errorf("%s: parameter %d has a median width of %.2f times the bound", f.name, j, ratio)
			}
		}
		t.Logf("| %s | %s |", f.name, strings.Join(line, " | "))
	}
}
