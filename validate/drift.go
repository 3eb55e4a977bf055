package validate

import (
	"fmt"
	"io"
	"math"
	"strings"

	"lagwright/data"
)

// DriftSchema is the schema of a drift file.
const DriftSchema = "lagwright/drift/1"

// Drift is one structure fitted run by run, and what changed from run to run.
type Drift struct {
	Schema     string           `json:"schema"`
	Tool       string           `json:"tool"`
	Structure  string           `json:"structure"`
	Confidence float64          `json:"confidence"`  // of every interval
	FalseAlarm float64          `json:"false_alarm"` // chance of any alarm on a history without change
	Clock      bool             `json:"clock"`       // times are dates; false: runs are taken in order, one apart
	Runs       []DriftRun       `json:"runs"`        // in order of time
	Parameters []DriftParameter `json:"parameters"`
	Alarm      bool             `json:"alarm"`
	Hints      []string         `json:"hints"` // where to look, each with its reasoning; never a diagnosis
	Warnings   []string         `json:"warnings"`
	Failed     []FailedRun      `json:"failed"`
	Cautions   []string         `json:"cautions"`
}

// DriftRun is one run of the history.
type DriftRun struct {
	File   string  `json:"file"`
	Name   string  `json:"run,omitempty"`
	SHA256 string  `json:"sha256"`
	Start  *string `json:"start"` // RFC 3339 or null
	Day    float64 `json:"day"`   // days from the first run; without a clock the run's number
}

// DriftParameter is one parameter over the runs.
type DriftParameter struct {
	Name   string       `json:"name"`
	Unit   string       `json:"unit"`
	Points []DriftPoint `json:"points"` // by run
	Tested int          `json:"tested"` // runs whose interval has two ends and that the tests used

	Alarm   bool    `json:"alarm"`
	Step    *Change `json:"step"`          // null when fewer than two runs were tested
	Slope   *Change `json:"slope"`         // null when fewer than three were
	Scatter float64 `json:"scatter_ratio"` // scatter of the runs over what their intervals explain, at least 1

	Text string `json:"text"` // the finding in plain words
}

// DriftPoint is the estimate of one run with its interval, and the chart's
// centre and limits there: the level that the finding says, and 3 standard
// errors of that run's estimate about it. Null where the fit sets no bound.
type DriftPoint struct {
	Value  *float64 `json:"value"`
	Low    *float64 `json:"low"`
	High   *float64 `json:"high"`
	Centre *float64 `json:"centre"`
	Least  *float64 `json:"limit_low"`
	Most   *float64 `json:"limit_high"`
}

// Change is the outcome of one test for change. Size is after less before for
// a step, and per 30 days for a slope (per run without a clock), in the
// parameter's unit; Percent is the same in percent of the parameter, null for
// one that can be zero. Each stands with its interval, which takes the place
// of the change as known.
type Change struct {
	P           float64  `json:"p"`   // chance of as much on a history without change, corrected for all its tests
	Run         *int     `json:"run"` // step: index of the first run after it; null for a slope
	Size        float64  `json:"size"`
	SizeLow     float64  `json:"size_low"`
	SizeHigh    float64  `json:"size_high"`
	Percent     *float64 `json:"percent"`
	PercentLow  *float64 `json:"percent_low"`
	PercentHigh *float64 `json:"percent_high"`
	Alarm       bool     `json:"alarm"` // p ≤ the false alarm rate
}

// ReadDrift reads a drift written by [Drift.WriteJSON] and checks it; name is
// the file's name for errors.
func ReadDrift(r io.Reader, name string) (*Drift, error) {
	var d Drift
	if err := readJSON(r, name, DriftSchema, &d); err != nil {
		return nil, err
	}
	for _, p := range d.Parameters {
		if len(p.Points) != len(d.Runs) {
			return nil, fmt.Errorf("%s: parameters: %s has %d points for %d runs", name, clean(p.Name), len(p.Points), len(d.Runs))
		}
		for _, c := range []*Change{p.Step, p.Slope} {
			if c != nil && (!isShare(c.P) || c.Run != nil && (*c.Run < 1 || *c.Run >= len(d.Runs))) {
				return nil, fmt.Errorf("%s: parameters: %s has a change that is none (p %g)", name, clean(p.Name), c.P)
			}
		}
	}
	return &d, nil
}

// WriteText writes the drift for a terminal: the findings, the hints with
// their reasoning, and the table run by run.
func (d *Drift) WriteText(w io.Writer) error {
	var b strings.Builder
	fmt.Fprintf(&b, "%s fitted to %d runs; %g%% false alarms on a history without change\n\n", d.Structure, len(d.Runs), 100*d.FalseAlarm)
	for _, p := range d.Parameters {
		mark := " "
		if p.Alarm {
			mark = "!"
		}
		fmt.Fprintf(&b, "%s %s\n", mark, p.Text)
	}
	for _, h := range d.Hints {
		fmt.Fprintf(&b, "\n%s\n", h)
	}
	d.writeTable(&b)
	for _, text := range d.Warnings {
		fmt.Fprintf(&b, "\nwarning: %s\n", text)
	}
	for _, f := range d.Failed {
		fmt.Fprintf(&b, "left out: %s\n", f.Words())
	}
	if len(d.Cautions) > 0 {
		b.WriteString("\nCautions\n")
	}
	for _, text := range d.Cautions {
		fmt.Fprintf(&b, "  - %s\n", text)
	}
	_, err := io.WriteString(w, b.String())
	return err
}

// writeTable writes the estimates run by run with the half-widths of their
// intervals, 80 columns wide at most.
func (d *Drift) writeTable(b *strings.Builder) {
	b.WriteString("\n")
	const name, cell = 28, 13
	inLine := name+len(d.Parameters)*cell <= 80
	label := fmt.Sprintf("%-*s", name, "run, date")
	if !inLine {
		label = "run, date\n  "
	}
	line := label
	for _, p := range d.Parameters {
		line += fmt.Sprintf("%*s", cell, wordFor(p.Name)+" "+data.ShownUnit(p.Unit))
	}
	fmt.Fprintln(b, line)
	for i, r := range d.Runs {
		label := clean(r.title())
		if r.Start != nil {
			date, _, _ := strings.Cut(*r.Start, "T")
			label += ", " + clean(date)
		}
		switch short := len([]rune(label)) < name; {
		case inLine && short:
			label = fmt.Sprintf("%-*s", name, label)
		case inLine:
			label += fmt.Sprintf("\n%*s", name, "")
		default:
			label += "\n  "
		}
		line := label
		for _, p := range d.Parameters {
			line += fmt.Sprintf("%*s", cell, p.Points[i].words())
		}
		fmt.Fprintln(b, line)
	}
}

// words writes the estimate with half the width of its interval, "11.7
// ±0.07", or the one end that its interval has. Of an interval wider than the
// value either way, ± would say nothing: its ends are written.
func (p DriftPoint) words() string {
	switch {
	case p.Value == nil:
		return "-"
	case p.Low == nil && p.High == nil:
		return "no bound"
	case p.Low == nil:
		return "≤ " + number(*p.High)
	case p.High == nil:
		return "≥ " + number(*p.Low)
	}
	half := (*p.High - *p.Low) / 2
	if half > math.Abs(*p.Value) {
		return number(*p.Low) + ".." + number(*p.High)
	}
	decimals := 0
	if half > 0 {
		decimals = min(max(1-int(math.Floor(math.Log10(half))), 0), 6)
	}
	return fmt.Sprintf("%.*f ±%.*f", decimals, *p.Value, decimals, half)
}
