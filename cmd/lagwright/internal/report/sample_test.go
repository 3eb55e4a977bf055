package report

import (
	"math"
	"math/cmplx"
	"math/rand/v2"
	"time"

	"lagwright/data"
	"lagwright/fit"
	"lagwright/ident"
	"lagwright/tune"
	"lagwright/validate"
)

// The sample is an invented process-air heater on a drying line: 12.4 K/V,
// lags of 38 s and 6 s, 4.5 s of dead time, bumped from 3 V to 4.5 V and back.
const (
	sampleGain  = 12.4
	sampleLag1  = 38.0
	sampleLag2  = 6.0
	sampleDelay = 4.5
)

// sampleStep is the unit step response of the two lags after the dead time.
func sampleStep(t float64) float64 {
	t -= sampleDelay
	if t <= 0 {
		return 0
	}
	return 1 - (sampleLag1*math.Exp(-t/sampleLag1)-sampleLag2*math.Exp(-t/sampleLag2))/(sampleLag1-sampleLag2)
}

func sampleRun(n int) (*data.Run, *fit.Curves) {
	rng := rand.New(rand.NewPCG(7, 7))
	r := &data.Run{
		Source: data.Source{
			File: "dryer2-bump.csv", SHA256: "4f0c1a9b2d7e8f60c1a9b2d7e8f604f0c1a9b2d7e8f60c1a9b2d7e8f604f0c1a",
			Rows: n, ToS: float64(n-1) * 0.5, Columns: data.Columns{Time: "Time", Input: "HTR2 volts", Temperature: "TT-217"},
		},
		Units: data.Units{Time: "s", Input: "V", Temperature: "degC"},
		Start: time.Date(2026, 3, 4, 8, 12, 30, 0, time.FixedZone("", 3600)), Zone: time.FixedZone("", 3600),
		Quality: data.Quality{
			RowsRead: n + 3, Missing: map[string]int{"OPEN": 2, "blank": 4}, MedianInterval: 0.5, Quantum: 0.1,
			Gaps: []data.Gap{{After: 300, Duration: 6}}, Spikes: []int{77},
			Notes: []data.Note{{Code: "units-row", Text: "A row of units below the header was read as such.", Row: 2}},
		},
	}
	c := &fit.Curves{ACFBound: 0.05}
	up, down := 60.0, 420.0
	noise, burst := 0.0, 0.0
	for i := range n {
		t := float64(i) * 0.5
		if i > 300 {
			t += 6
		}
		u := 3.0
		if t >= up && t < down {
			u = 4.5
		}
		y := 62 + sampleGain*1.5*(sampleStep(t-up)-sampleStep(t-down))
		noise = 0.8*noise + 0.1*rng.NormFloat64()
		burst = noise + 0.08*rng.NormFloat64()
		r.T, r.U = append(r.T, t), append(r.U, u)
		r.Y = append(r.Y, math.Round((y+burst)*10)/10)
		c.T, c.Fitted = append(c.T, t), append(c.Fitted, y)
		c.Low, c.High = append(c.Low, y-0.45), append(c.High, y+0.45)
		c.Residual = append(c.Residual, r.Y[i]-y)
	}
	r.Y[500] = math.NaN()
	r.Source.ToS = r.T[n-1]
	for k := range 40 {
		c.ACF = append(c.ACF, 0.04*math.Sin(float64(k)*1.7)*math.Exp(-float64(k)/30))
	}
	c.Bumps = []ident.Bump{{Row: 120, Time: up, From: 3, To: 4.5}, {Row: 828, Time: down, From: 4.5, To: 3}}
	return r, c
}

func sampleCard() *fit.Card {
	start := "2026-03-04T08:12:30+01:00"
	par := func(name, unit string, v, low, high float64) fit.Parameter {
		se := (high - low) / 3.92
		return fit.Parameter{Name: name, Unit: unit, Value: v, SE: &se, Low: &low, High: &high}
	}
	chain2 := fit.Model{
		Structure: "chain2",
		Parameters: []fit.Parameter{
			par("gain", "K/V", 12.41, 12.28, 12.54), par("lag1", "s", 38.2, 36.9, 39.5),
			par("lag2", "s", 5.9, 4.4, 8.1), par("dead_time", "s", 4.6, 3.9, 5.2),
			par("baseline", "degC", 62.01, 61.95, 62.07),
		},
		Samples: 1394, SSE: 48.2, RMSE: 0.186, FitPercent: 97.6, AICc: -2311.4, BIC: -2280.1,
		Noise:     fit.Noise{SD: 0.186, CorrelationTime: 2.2, WhiteSD: 0.08},
		Residuals: fit.Residuals{Lag1Correlation: 0.71, LjungBoxP: 0.41, InputCorrelationP: 0.62},
	}
	fopdt := chain2
	fopdt.Structure, fopdt.AICc, fopdt.BIC, fopdt.RMSE, fopdt.FitPercent = "fopdt", -2209.8, -2183.7, 0.231, 96.9
	fopdt.Residuals.LjungBoxP = 0.003
	fopdt.Parameters = []fit.Parameter{par("gain", "K/V", 12.4, 12.2, 12.6), par("lag1", "s", 41, 39, 43), par("dead_time", "s", 8.8, 8.1, 9.4)}
	c := &fit.Card{
		Schema: fit.CardSchema, Tool: "lagwright (devel)", Created: "2026-03-04T08:24:00Z",
		Source: []fit.CardSource{{
			File: "dryer2-bump.csv", SHA256: "4f0c1a9b2d7e8f60c1a9b2d7e8f604f0c1a9b2d7e8f60c1a9b2d7e8f604f0c1a", Rows: 1400, ToS: 705.5, Start: &start,
			Columns: map[string]string{"time": "Time", "input": "HTR2 volts", "temperature": "TT-217"},
		}},
		Units:    fit.CardUnits{Time: "s", Input: "V", Temperature: "degC"},
		InputLaw: "linear", Initial: "rest", NoiseModel: "auto", Drift: "none", BumpTime: "row",
		Range:      fit.CardRange{Input: [2]float64{3, 4.5}, Temperature: [2]float64{61.5, 81.2}},
		Confidence: 0.95, Selected: "chain2", Models: []fit.Model{chain2, fopdt},
		Plants: fit.Plants{Structure: "chain2", Rand: 1, Parameters: []string{"gain", "lag1", "lag2", "dead_time"}},
		Derived: []fit.Derived{
			{Name: "sum_of_lags", Unit: "s", Value: 44.1, Low: ptr(42.6), High: ptr(45.8)},
			{Name: "total_delay", Unit: "s", Value: 10.5, Low: ptr(9.8), High: ptr(11.1)},
		},
		Warnings: []fit.Warning{{Code: "lag-near-sampling", Text: "The second lag is bounded on a wide interval; a faster logger would narrow it.", Parameter: "lag2"}},
		Cautions: []string{
			"Keep the independent over-temperature cut-out and the airflow interlock in service.",
			"The outlet sensor does not see the element's sheath, which runs hotter, the more so at low flow.",
			"The model holds between 3 V and 4.5 V, 61.5 °C and 81.2 °C; beyond that it is a guess.",
		},
	}
	for range 200 {
		c.Plants.Values = append(c.Plants.Values, []float64{12.4, 38, 6, 4.5})
	}
	return c
}

func sampleGains() *tune.Gains {
	metrics := func(ms, settling, overshoot, iae float64) *tune.Metrics {
		return &tune.Metrics{
			Stable: true, Ms: &ms, GainMargin: ptr(3.4), PhaseMargin: ptr(61), DelayMargin: ptr(9.1), Damping: ptr(0.74),
			Settling: &settling, Overshoot: &overshoot, PeakInput: ptr(5.9), IAE: &iae, SteadyOffset: ptr(0),
		}
	}
	q := tune.Requirement{Settling: ptr(60), Overshoot: ptr(8), Ms: ptr(1.7), InputMin: ptr(0), InputMax: ptr(10), SetpointStep: ptr(10)}
	g := &tune.Gains{
		Schema: tune.GainsSchema, Tool: "lagwright (devel)", Controller: "pi", Form: "ideal",
		Kc: 0.1873, Ti: ptr(34.62), SetpointWeight: 1, Action: "reverse", Scan: 0.1,
		Limits: tune.Limits{Min: ptr(0), Max: ptr(10)}, Units: tune.GainUnits{Input: "V", Temperature: "degC"},
		Rule: "synthesis", Requirement: q, Nominal: metrics(1.52, 48.1, 4.2, 185), Worst: metrics(1.63, 55.7, 6.9, 201),
		Assurance: 0.95, Meets: true, ShareMeeting: 0.987,
		Cautions: []string{"Start new gains with the output limited and a setpoint step of 2 K."},
	}
	g.OperatingInput, g.HoldsOver = ptr(3.75), &[2]float64{3.2, 4.4}
	g.Candidates = []tune.Candidate{
		{Rule: "synthesis", Controller: "pi", Kc: g.Kc, Ti: g.Ti, Worst: g.Worst, Share: 0.987, Meets: true, Selected: true},
		{Rule: "simc", Controller: "pi", Kc: 0.161, Ti: ptr(41), Worst: metrics(1.55, 71.2, 3.1, 255), Share: 0.31, Note: "settles too late"},
	}
	return g
}

// sampleLoop is a loop made up of plain formulas: shapes for figures, no claim.
func sampleLoop() *Loop {
	step := &Response{Size: 10}
	load := &Response{Size: 1}
	rise := func(t, k float64) float64 {
		if t < sampleDelay {
			return 0
		}
		t -= sampleDelay
		return 10 * (1 - math.Exp(-t/(13*k))*math.Cos(t/(17*k)))
	}
	for i := range 300 {
		t := float64(i) * 0.5
		step.T = append(step.T, t)
		y := [3]float64{rise(t, 1), rise(t, 0.9), rise(t, 1.1)}
		appendTo(&step.Temperature, y[0], math.Min(y[1], y[2])-0.05, math.Max(y[1], y[2])+0.05)
		u := 0.8 + 1.1*math.Exp(-t/15)
		appendTo(&step.Input, u, u-0.1, u+0.1)
		d := 9 * (math.Exp(-t/40) - math.Exp(-t/9))
		appendTo(&load.Temperature, d, d*0.9, d*1.1)
		v := -(1 - math.Exp(-t/25))
		appendTo(&load.Input, v, v*1.05, v*0.95)
	}
	load.T = step.T
	s := &Sensitivity{}
	for i := range 120 {
		w := 0.001 * math.Pow(10, 3*float64(i)/119)
		g := func(k float64) float64 {
			l := complex(0.05*k, 0) * cmplx.Exp(complex(0, -w*8)) / complex(0, w)
			return 1 / cmplx.Abs(1+l)
		}
		s.W = append(s.W, w)
		appendTo(&s.S, g(1), math.Min(g(0.85), g(1.15)), math.Max(g(0.85), g(1.15)))
	}
	p := &Poles{Best: []complex128{-0.075 + 0.05i}, Decay: math.Log(50) / 60, Damping: 0.7}
	rng := rand.New(rand.NewPCG(3, 3))
	for range 150 {
		p.Plausible = append(p.Plausible, complex(-0.075+0.006*rng.NormFloat64(), 0.05+0.005*rng.NormFloat64()))
	}
	return &Loop{Step: step, Load: load, Sensitivity: s, Poles: p}
}

func appendTo(e *Ensemble, best, low, high float64) {
	e.Best, e.Low, e.High = append(e.Best, best), append(e.Low, low), append(e.High, high)
}

func sampleProfiles(m *fit.Model) []fit.Profile {
	var out []fit.Profile
	for _, p := range m.Parameters {
		pr := fit.Profile{Parameter: p.Name}
		down, up := p.Value-*p.Low, *p.High-p.Value
		for i := range 7 {
			z := -1.5 + 3*float64(i)/6
			w := up
			if z < 0 {
				w = down
			}
			pr.Value, pr.Root = append(pr.Value, p.Value+z*w), append(pr.Root, z)
		}
		out = append(out, pr)
	}
	return out
}

func sampleReplay(g *tune.Gains) *validate.Replay {
	r := &validate.Replay{
		Schema: validate.ReplaySchema, Tool: "lagwright (devel)", Card: "card.json", Gains: *g, Requirement: g.Requirement, Plants: 200, Confidence: 0.95,
		Summary:  validate.Summary{Runs: 2, Judged: 2, Meeting: 1, Failed: 1, ShareMeets: 0.5},
		Failed:   []validate.FailedRun{{File: "dryer2-old.csv", Reason: "no temperature column"}},
		Cautions: []string{"A replay trusts the model outside what it has seen; it is no test of the live loop."},
	}
	for k := range 2 {
		start := "2026-03-05T10:00:00+01:00"
		t := &validate.Trace{}
		for i := range 400 {
			s := float64(i) * 3
			t.T = append(t.T, s)
			base := 75 + 4*math.Exp(-s/200)*math.Sin(s/60)
			now := 75 + 1.5*math.Exp(-s/120)*math.Sin(s/45)
			t.Setpoint, t.Logged, t.LoggedIn = append(t.Setpoint, ptr(75)), append(t.Logged, ptr(base)), append(t.LoggedIn, ptr(3.8))
			t.Median, t.Low, t.High = append(t.Median, ptr(now)), append(t.Low, ptr(now-0.3)), append(t.High, ptr(now+0.3))
			u := 3.8 - 0.3*math.Exp(-s/120)*math.Sin(s/45)
			t.MedianIn, t.LowIn, t.HighIn = append(t.MedianIn, &u), append(t.LowIn, ptr(u-0.05)), append(t.HighIn, ptr(u+0.05))
		}
		run := validate.RunReplay{
			File: "dryer2-shift" + string(rune('a'+k)) + ".csv", SHA256: "aa11bb22cc33dd44ee55ff66aa11bb22cc33dd44ee55ff66aa11bb22cc33dd44", Rows: 2400, Start: &start,
			Logged: validate.RunMetrics{IAE: ptr(820), Deviation: ptr(3.6), PeakTemp: ptr(78.6), PeakInput: ptr(3.8)},
			Judged: true, Meets: k == 0, Probability: 0.99 - 0.4*float64(k), Trace: t,
		}
		run.Proposed = validate.BandMetrics{
			Low:    validate.RunMetrics{IAE: ptr(190), Deviation: ptr(1.1), PeakTemp: ptr(76.1), PeakInput: ptr(3.9)},
			Median: validate.RunMetrics{IAE: ptr(210), Deviation: ptr(1.2), PeakTemp: ptr(76.2), PeakInput: ptr(4)},
			High:   validate.RunMetrics{IAE: ptr(240), Deviation: ptr(1.4), PeakTemp: ptr(76.4), PeakInput: ptr(4.1)},
		}
		if k == 1 {
			run.Reasons = []string{"settling 71 s, 60 s asked"}
			run.BackTest = &validate.BackTest{ShareInside: 0.94, Stated: 0.95, Reproduced: true}
		}
		r.Runs = append(r.Runs, run)
	}
	return r
}

func sampleDrift() *validate.Drift {
	d := &validate.Drift{
		Schema: validate.DriftSchema, Tool: "lagwright (devel)", Structure: "chain2", Confidence: 0.95, FalseAlarm: 0.01, Clock: true, Alarm: true,
		Hints:    []string{"The gain fell while the lags stayed: look at the airflow and the element first."},
		Cautions: []string{"A drift says where to look, not what is wrong."},
	}
	gain := validate.DriftParameter{Name: "gain", Unit: "K/V", Alarm: true, Tested: 9, Text: "Gain fell by 5.9 % (4.1 to 7.7) between run 5 and run 6."}
	lag := validate.DriftParameter{Name: "lag1", Unit: "s", Tested: 9, Text: "Lag 1: no change seen."}
	step := 5
	gain.Step = &validate.Change{P: 0.0004, Run: &step, Size: -0.73, SizeLow: -0.95, SizeHigh: -0.51, Alarm: true}
	for i := range 9 {
		start := time.Date(2026, 1, 7+14*i, 6, 0, 0, 0, time.UTC).Format(time.RFC3339)
		d.Runs = append(d.Runs, validate.DriftRun{File: "dryer2-" + start[:10] + ".csv", SHA256: "ee", Start: &start, Day: float64(14 * i)})
		level, wobble := 12.4, 0.06*math.Sin(float64(3*i))
		if i >= step {
			level = 11.67
		}
		point := func(v, centre, half float64) validate.DriftPoint {
			return validate.DriftPoint{Value: &v, Low: ptr(v - half), High: ptr(v + half), Centre: &centre, Least: ptr(centre - 1.5*half), Most: ptr(centre + 1.5*half)}
		}
		gain.Points = append(gain.Points, point(level+wobble, level, 0.13))
		lag.Points = append(lag.Points, point(38+20*wobble, 38, 1.4))
	}
	lag.Points[3].High = nil
	d.Parameters = []validate.DriftParameter{gain, lag}
	return d
}

func sampleCheck() *fit.CheckReport {
	return &fit.CheckReport{
		Loop: fit.Loop{State: "open", Reason: "the input does not follow the temperature"},
		Verdict: []fit.Verdict{
			{Parameter: "gain", Verdict: "good", Bound: ptr(1.1), Reason: "known to ±1.1 %"},
			{Parameter: "lags", Verdict: "good", Bound: ptr(3.6), Reason: "known to ±3.6 % of their sum"},
			{Parameter: "dead_time", Verdict: "doubtful", Bound: ptr(6.2), Reason: "known to ±6.2 % of dead time and lags only: a row every 500 ms is coarse", Cures: []string{"log every 200 ms", "repeat the bump"}},
		},
	}
}

func sampleBundle() Bundle {
	r, c := sampleRun(1400)
	card, g := sampleCard(), sampleGains()
	card.Profiles = sampleProfiles(&card.Models[0])
	return Bundle{
		Runs: []*data.Run{r}, Curves: []*fit.Curves{c}, Checks: []*fit.CheckReport{sampleCheck()}, Card: card, Gains: g, Replay: sampleReplay(g), Drift: sampleDrift(),
		Loop: sampleLoop(),
		Tool: "lagwright (devel)", Command: "lagwright run dryer2-bump.csv --settling 60s --overshoot 8% --ms 1.7 --input-max 10 --rand 1",
	}
}
