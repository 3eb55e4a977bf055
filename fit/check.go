package fit

import (
	"context"
	"fmt"
	"io"
	"math"
	"slices"
	"time"

	"lagwright/data"
	"lagwright/ident"
)

// CheckSchema is the schema of a check report.
const CheckSchema = "lagwright/check/1"

// CheckReport says what is in a log and whether it can support a fit. Times
// are in s from the first row, temperatures and inputs in Units.
type CheckReport struct {
	Schema  string            `json:"schema"`
	Tool    string            `json:"tool"`
	File    string            `json:"file"`
	Run     string            `json:"run,omitempty"` // name of the run inside a file of several
	SHA256  string            `json:"sha256"`
	Start   *string           `json:"start"` // RFC 3339 or null
	Columns map[string]string `json:"columns"`
	Units   CardUnits         `json:"units"`

	Rows     int            `json:"rows"`
	Span     float64        `json:"span_s"`
	Sampling Sampling       `json:"sampling"`
	Missing  map[string]int `json:"missing"` // cells set aside, by kind
	Dropped  map[string]int `json:"dropped"` // rows dropped, by reason
	Spikes   int            `json:"spikes"`
	Notes    []CheckNote    `json:"notes"` // what was mended while reading

	Range   CardRange     `json:"range"`
	Quantum *float64      `json:"quantum"`  // smallest step of the temperature; null when not visible
	Noise   *Noise        `json:"noise"`    // of a quick fit; null when nothing could be fitted
	Drift   *DriftBefore  `json:"drift"`    // before the first bump; null where too few rows tell
	Bumps   []CheckBump   `json:"bumps"`    //
	Loop    Loop          `json:"loop"`     //
	Modes   []ModeChange  `json:"modes"`    // changes between automatic and manual
	Airflow *CheckedRange `json:"airflow"`  // null where not logged
	Inlet   *CheckedRange `json:"inlet"`    // null where not logged
	Judged  *JudgedPart   `json:"judged"`   // null when the whole log was
	Quick   *QuickFit     `json:"quick"`    // null when nothing could be fitted
	Warning []Warning     `json:"warnings"` // of the quick fit: what limits a fit of this log
	Verdict []Verdict     `json:"verdicts"` // gain, lags, dead_time
	Caution []string      `json:"cautions"`
}

// Sampling is the clock of a log.
type Sampling struct {
	Median     float64 `json:"median_s"`
	Jitter     float64 `json:"jitter_s"` // 95th percentile of the distance from the median
	Gaps       int     `json:"gaps"`
	LongestGap float64 `json:"longest_gap_s"`
}

// CheckNote is something mended or noteworthy, with its line in the file (0:
// the whole file).
type CheckNote struct {
	Code string `json:"code"`
	Text string `json:"text"`
	Row  int    `json:"row,omitempty"`
}

// DriftBefore is the straight line through the temperature before the first
// bump.
type DriftBefore struct {
	Over  float64 `json:"over_s"`
	Slope float64 `json:"slope"` // temperature units per s
	Moved float64 `json:"moved"` // over the time before the bump
	Clear bool    `json:"clear"` // more than its scatter explains
}

// CheckBump is a bump of the input and the answer to it.
type CheckBump struct {
	Time          float64  `json:"time_s"`
	Ramp          float64  `json:"ramp_s"`
	Hold          float64  `json:"hold_s"`
	From          float64  `json:"from"`
	To            float64  `json:"to"`
	Rise          *float64 `json:"rise"`            // null where nothing was measured
	RiseOverNoise *float64 `json:"rise_over_noise"` // null without noise
	SettledBefore bool     `json:"settled_before"`
	SettledAfter  bool     `json:"settled_after"`
}

// Loop says whether a controller moved the input while the log was made.
type Loop struct {
	State  string `json:"state"` // open, closed, unclear
	Reason string `json:"reason"`
}

// ModeChange is a change between automatic and manual; the first entry is the
// mode at the first row.
type ModeChange struct {
	Time float64 `json:"time_s"`
	Auto bool    `json:"auto"`
}

// CheckedRange is the range of a condition, and whether it moved enough to
// matter.
type CheckedRange struct {
	Low   float64 `json:"low"`
	High  float64 `json:"high"`
	Moved bool    `json:"moved"`
}

// JudgedPart is the part of a very long log that the verdict rests on.
type JudgedPart struct {
	From float64 `json:"from_s"`
	To   float64 `json:"to_s"`
}

// QuickFit is the fit that the verdict rests on: one lag or two.
type QuickFit struct {
	Structure  string      `json:"structure"`
	Parameters []Parameter `json:"parameters"`
	Derived    []Derived   `json:"derived"`
	FitPercent float64     `json:"fit_percent"`
}

// WriteJSON writes the report as indented JSON.
func (r *CheckReport) WriteJSON(w io.Writer) error { return writeJSON(w, r) }

// quickRows is how many rows of an input that moves all the time the quick fit
// looks at.
const quickRows = 4000

// Check says what is in a run and, from a quick fit of one lag and of two,
// whether the run can support a fit. Where nothing can be fitted the error
// wraps [ErrNoBump], [ErrConstant], [ErrTooShort] or [ErrNoAnswer]; the report
// then still holds what was seen.
func Check(ctx context.Context, run *data.Run, o Options) (*CheckReport, error) {
	if _, err := o.withDefaults(); err != nil {
		return nil, err
	}
	r := recording(run, o)
	bumps := ident.FindBumps(run.T, run.U, run.Y)
	r.bumps(bumps)
	r.Drift = driftBefore(run, bumps)
	r.Loop = loopOf(run)
	part := busiest(run, quickRows)
	if part != run {
		r.Judged = &JudgedPart{From: part.Source.FromS - run.Source.FromS, To: part.Source.ToS - run.Source.FromS}
	}
	card, err := quickFit(ctx, part, o)
	r.Caution = checkCautions(run, r, card)
	if err != nil {
		return r, err
	}
	if !answers(card, bumps) {
		return r, fmt.Errorf("%s: %w: the rise after every bump is lost in the noise; check heater, airflow and columns, or make a larger bump", run.Source.File, ErrNoAnswer)
	}
	m, _ := card.Model(card.Selected)
	r.Noise = &m.Noise
	r.Quick = &QuickFit{Structure: m.Structure, Parameters: m.Parameters, Derived: card.Derived, FitPercent: m.FitPercent}
	if m.unbounded(part) == atLimit {
		r.Quick.Parameters, r.Quick.Derived = withoutFalseBounds(m.Parameters, card.Derived)
	}
	r.Warning = card.Warnings
	r.Verdict, err = judge(card, part, r.Loop)
	return r, err
}

// quickFit fits two lags and, where the second cannot be told from zero, one. The
// card holds what the verdict needs, and of the warnings of a whole fit those that
// one more look at the log gives.
func quickFit(ctx context.Context, run *data.Run, o Options) (*Card, error) {
	o.quick = true
	o.Plants, o.Progress = 48, nil
	o, err := o.withDefaults()
	if err != nil {
		return nil, err
	}
	recs, err := prepare([]*data.Run{run}, o.Law)
	if err != nil {
		return nil, err
	}
	if o.Structure != "auto" {
		return warned(quickCard(ctx, recs, o))
	}
	o.Structure = "chain2"
	two, found, err := quickCard(ctx, recs, o)
	if err != nil {
		return nil, err
	}
	m := two.Models[0]
	if lag2 := m.Parameters[2]; lag2.Fixed || (lag2.Low != nil && *lag2.Low > 0) {
		return warned(two, found, nil)
	}
	o.Structure = "fopdt"
	one, foundOne, err := quickCard(ctx, recs, o)
	if err != nil || m.AICc < one.Models[0].AICc-2 {
		return warned(two, found, err)
	}
	if m.AICc < one.Models[0].AICc+alikeBy {
		one.reachOver(two)
	}
	return warned(one, foundOne, nil)
}

// alikeBy is the difference in AICc up to which the second structure of a quick fit
// counts beside the first, as in the gain's interval of a whole fit.
const alikeBy = 4

// reachOver widens the bounds of the gain, the dead time and what is derived over those
// of another quick card: which of the two structures the heater has is not known.
func (c *Card) reachOver(other *Card) {
	widen := func(low, high **float64, otherLow, otherHigh *float64) {
		if *low == nil || otherLow == nil || *otherLow < **low {
			*low = otherLow
		}
		if *high == nil || otherHigh == nil || *otherHigh > **high {
			*high = otherHigh
		}
	}
	for i := range c.Models[0].Parameters {
		p := &c.Models[0].Parameters[i]
		for _, q := range other.Models[0].Parameters {
			if q.Name == p.Name && !p.Fixed && (p.Name == "gain" || p.Name == "dead_time") {
				widen(&p.Low, &p.High, q.Low, q.High)
			}
		}
	}
	for i := range c.Derived {
		d := &c.Derived[i]
		for _, q := range other.Derived {
			if q.Name == d.Name {
				widen(&d.Low, &d.High, q.Low, q.High)
			}
		}
	}
}

// warned adds the warnings to a quick card of one log.
func warned(c *Card, out *outcome, err error) (*Card, error) {
	if out == nil {
		return c, err
	}
	c.Warnings = []Warning{}
	out.warnNonlinear([]*data.Run{out.recs[0].run}, out.models[0], &c.Models[0], gather(&c.Warnings))
	// Two lags may be too few, and the misfit follow the input for that.
	c.Warnings = slices.DeleteFunc(c.Warnings, func(w Warning) bool { return w.Code == "input-correlation" })
	if out.initial == earlier {
		out.warnStart(gather(&c.Warnings))
	}
	return c, err
}

// quickCard fits one structure; the card has no warnings yet.
func quickCard(ctx context.Context, recs []*record, o Options) (*Card, *outcome, error) {
	out, err := find(ctx, recs, o)
	if err != nil {
		return nil, nil, err
	}
	out.sample()
	u := recs[0].run.Units
	c := &Card{
		Schema: CardSchema, Units: CardUnits{Time: "s", Input: u.Input, Temperature: u.Temperature},
		InputLaw: o.Law.String(), Initial: out.initial.String(), Drift: "none", BumpTime: o.BumpInstant,
		Confidence: o.Confidence, Selected: o.Structure, Models: []Model{out.model(out.models[0])}, Derived: out.derived(),
	}
	if out.drift {
		c.Drift = "linear"
	}
	return c, out, nil
}

// answers reports whether the temperature follows the input at all: a gain that
// is told from zero, or a bump whose rise stands out of the noise.
func answers(c *Card, bumps []ident.Bump) bool {
	m, _ := c.Model(c.Selected)
	g := m.Parameters[0]
	if g.Fixed || (g.Low != nil && *g.Low > 0) || (g.High != nil && *g.High < 0) {
		return true
	}
	for _, b := range bumps {
		if b.RiseOverNoise() > 3 {
			return true
		}
	}
	return false
}

// recording fills what needs no fit.
func recording(run *data.Run, o Options) *CheckReport {
	s, q := run.Source, run.Quality
	r := &CheckReport{
		Schema: CheckSchema, Tool: o.Tool, File: s.File, Run: s.Name, SHA256: s.SHA256,
		Units: CardUnits{Time: "s", Input: run.Units.Input, Temperature: run.Units.Temperature},
		Rows:  len(run.T), Missing: q.Missing, Dropped: q.Dropped, Spikes: len(q.Spikes),
		Sampling: Sampling{Median: q.MedianInterval, Jitter: q.JitterInterval, Gaps: len(q.Gaps)},
		Range: CardRange{
			Input:       extent([]*data.Run{run}, func(r *data.Run) []float64 { return r.U }),
			Temperature: extent([]*data.Run{run}, func(r *data.Run) []float64 { return r.Y }),
		},
		Bumps: []CheckBump{}, Modes: modeChanges(run), Notes: []CheckNote{}, Verdict: []Verdict{}, Warning: []Warning{},
	}
	card := source(run)
	r.Columns, r.Start = card.Columns, card.Start
	if n := len(run.T); n > 1 {
		r.Span = run.T[n-1] - run.T[0]
		if r.Sampling.Median == 0 {
			r.Sampling.Median = medianInterval(run.T)
		}
	}
	for _, g := range q.Gaps {
		r.Sampling.LongestGap = math.Max(r.Sampling.LongestGap, g.Duration)
	}
	for _, n := range q.Notes {
		r.Notes = append(r.Notes, CheckNote(n))
	}
	if r.Range.Temperature[0] > r.Range.Temperature[1] { // no temperature at all
		r.Range.Temperature = [2]float64{}
	}
	if q.Quantum > 0 {
		r.Quantum = &q.Quantum
	}
	swing := r.Range.Temperature[1] - r.Range.Temperature[0]
	r.Airflow = checkedRange(run.Airflow, func(low, high, middle float64) bool { return high-low > 0.1*math.Abs(middle) })
	r.Inlet = checkedRange(run.Inlet, func(low, high, _ float64) bool { return high-low > 0.1*swing })
	return r
}

func (r *CheckReport) bumps(bumps []ident.Bump) {
	for _, b := range bumps {
		r.Bumps = append(r.Bumps, CheckBump{
			Time: b.Time, Ramp: b.Ramp, Hold: b.Hold, From: b.From, To: b.To,
			Rise: numberOrNull(b.Rise()), RiseOverNoise: numberOrNull(b.RiseOverNoise()),
			SettledBefore: b.SettledBefore, SettledAfter: b.SettledAfter,
		})
	}
}

// modeChanges lists the mode at the first row and its changes; empty when no
// mode was logged.
func modeChanges(run *data.Run) []ModeChange {
	out := []ModeChange{}
	for k, auto := range run.Auto {
		if k == 0 || auto != run.Auto[k-1] {
			out = append(out, ModeChange{run.T[k], auto})
		}
	}
	return out
}

// busiest returns the run, or, where the input moves at more than so many rows,
// the stretch of so many rows in which it moves most: the quick fit of a
// controller's record does not get better from more than that.
func busiest(run *data.Run, rows int) *data.Run {
	n := len(run.T)
	moves := 0
	sum := make([]float64, n)
	for k := 1; k < n; k++ {
		d := run.U[k] - run.U[k-1]
		if d != 0 {
			moves++
		}
		sum[k] = sum[k-1] + d*d
	}
	if n <= rows || moves <= rows {
		return run
	}
	best := 0
	for lo := 0; lo+rows <= n; lo += rows / 4 {
		if sum[lo+rows-1]-sum[lo] > sum[best+rows-1]-sum[best] {
			best = lo
		}
	}
	return stretchOf(run, best, best+rows)
}

// stretchOf is the rows lo ≤ k < hi of a run as a run of their own, without its
// other columns.
func stretchOf(run *data.Run, lo, hi int) *data.Run {
	c := *run
	c.Source.FromS += run.T[lo]
	c.Source.ToS = c.Source.FromS + run.T[hi-1] - run.T[lo]
	c.Source.Rows = hi - lo
	c.T = make([]float64, hi-lo)
	for i := range c.T {
		c.T[i] = run.T[lo+i] - run.T[lo]
	}
	c.U, c.Y = run.U[lo:hi], run.Y[lo:hi]
	c.Setpoint, c.Auto, c.Airflow, c.Inlet = nil, nil, nil, nil
	c.Quality.Gaps, c.Quality.Spikes = nil, nil
	if !run.Start.IsZero() {
		c.Start = run.Start.Add(time.Duration(run.T[lo] * float64(time.Second)))
	}
	return &c
}
