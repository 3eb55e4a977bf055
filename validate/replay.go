package validate

import "lagwright/tune"

// ReplaySchema is the schema of a replay file.
const ReplaySchema = "lagwright/replay/1"

// Replay is what proposed gains would have done on runs already recorded.
type Replay struct {
	Schema      string           `json:"schema"`
	Tool        string           `json:"tool"`
	Card        string           `json:"card"`  // base name or hash of the card
	Gains       tune.Gains       `json:"gains"` // as replayed
	Requirement tune.Requirement `json:"requirement"`
	Plants      int              `json:"plants"`
	Confidence  float64          `json:"confidence"`
	Runs        []RunReplay      `json:"runs"`
	Failed      []FailedRun      `json:"failed"`
	Summary     Summary          `json:"summary"`
	Cautions    []string         `json:"cautions"`
}

// RunReplay is one run under the proposed gains.
type RunReplay struct {
	File   string  `json:"file"`
	Name   string  `json:"run,omitempty"`
	SHA256 string  `json:"sha256"`
	Rows   int     `json:"rows"`
	Start  *string `json:"start"`

	Proposed BandMetrics `json:"proposed"` // median and band over the plausible plants
	Logged   RunMetrics  `json:"logged"`

	Meets       bool     `json:"meets"`
	Probability float64  `json:"probability"` // share of plausible plants on which it meets
	Reasons     []string `json:"reasons"`
	Warnings    []string `json:"warnings"`

	BackTest *BackTest `json:"back_test"` // null unless --logged-gains

	Trace *Trace `json:"trace,omitempty"` // thinned series for figures
}

// RunMetrics of one signal; null where the figure does not exist.
type RunMetrics struct {
	Settling   *float64 `json:"settling_s"`
	Overshoot  *float64 `json:"overshoot_percent"`
	IAE        *float64 `json:"iae"`
	Deviation  *float64 `json:"largest_deviation"`
	PeakTemp   *float64 `json:"peak_temperature"`
	PeakInput  *float64 `json:"peak_input"`
	InputMoves *float64 `json:"input_travel"` // total variation of the input
}

// BandMetrics are metrics as low, median and high over the plausible plants.
type BandMetrics struct {
	Low    RunMetrics `json:"low"`
	Median RunMetrics `json:"median"`
	High   RunMetrics `json:"high"`
}

// BackTest is the replay of a run under the gains in force when it was made.
type BackTest struct {
	ShareInside float64  `json:"share_inside"` // of samples inside the stated band
	Stated      float64  `json:"stated"`       // the band's level
	Reproduced  bool     `json:"reproduced"`
	Differs     []string `json:"differs"` // what differs, in words
}

// Trace holds the series of one replay for figures, thinned without losing
// extremes; slices share one length.
type Trace struct {
	T        []float64  `json:"t_s"`
	Setpoint []*float64 `json:"setpoint"`
	Logged   []*float64 `json:"logged"`
	LoggedIn []*float64 `json:"logged_input"`
	Median   []*float64 `json:"median"`
	Low      []*float64 `json:"low"`
	High     []*float64 `json:"high"`
	MedianIn []*float64 `json:"median_input"`
	LowIn    []*float64 `json:"low_input"`
	HighIn   []*float64 `json:"high_input"`
}

// FailedRun is a log that could not be replayed.
type FailedRun struct {
	File   string `json:"file"`
	Reason string `json:"reason"`
}

// Summary over all runs.
type Summary struct {
	Runs       int     `json:"runs"`
	Meeting    int     `json:"meeting"`
	Failed     int     `json:"failed"`
	Meets      bool    `json:"meets"`
	ShareMeets float64 `json:"share_meeting"`
}
