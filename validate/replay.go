package validate

import "lagwright/tune"

// ReplaySchema is the schema of a replay file.
const ReplaySchema = "lagwright/replay/1"

// Replay is what proposed gains would have done on runs already recorded.
type Replay struct {
	Schema      string           `json:"schema"`
	Tool        string           `json:"tool"`
	Card        string           `json:"card"`  // short hash of the card
	Key         string           `json:"key"`   // short hash of all that decides a run's result besides its log
	Gains       tune.Gains       `json:"gains"` // as replayed
	Requirement tune.Requirement `json:"requirement"`
	RunLimits   RunLimits        `json:"run_limits"`
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

	// Proposed are median and band over the plausible plants. Settling and
	// overshoot are those of the setpoint moves alone, without noise and loads;
	// WithNoise are their medians as the replayed record shows them, past an
	// allowance for its noise.
	Proposed  BandMetrics `json:"proposed"`
	WithNoise StepMetrics `json:"with_noise"`
	Logged    RunMetrics  `json:"logged"`

	// HandOver is the way to the setpoint that a run beginning in mid-move had
	// left: told, not judged, since no setpoint step is made there. Null where it
	// begins at its setpoint, or nearer than noise lets see.
	HandOver *HandOver `json:"hand_over,omitempty"`

	Judged      bool     `json:"judged"`      // the run shows what the requirement asks for; false where nothing fails but its record ends too early, or the back-test speaks against the model
	Meets       bool     `json:"meets"`       // probability not below the assurance of the gains by more than twice its sampling error; false when nothing could be judged
	Probability float64  `json:"probability"` // share of plausible plants on which it meets
	Reasons     []string `json:"reasons"`
	Warnings    []string `json:"warnings"`

	BackTest *BackTest `json:"back_test"` // null unless --logged-gains

	Trace *Trace `json:"trace,omitempty"` // thinned series for figures
}

// StepMetrics are the figures of a setpoint move; null where there is none.
type StepMetrics struct {
	Settling  *float64 `json:"settling_s"`
	Overshoot *float64 `json:"overshoot_percent"`
}

// HandOver is a start off the setpoint, and how long the way there takes.
type HandOver struct {
	Away     float64  `json:"away"`              // setpoint less temperature in the first rows
	Settling *float64 `json:"settling_s"`        // median over the plausible plants; null where it does not settle
	Logged   *float64 `json:"logged_settling_s"` // of the log; null also where no setpoint was followed
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

// BackTest says whether a run can have been made by the card's model and the
// gains then in force. Differs says what differs; in a run that is reproduced,
// what a reader should know of the test.
type BackTest struct {
	ShareInside float64  `json:"share_inside"`          // of the temperatures inside the band of plants and noise, given the logged input
	Stated      float64  `json:"stated"`                // the band's level
	InputInside *float64 `json:"input_share_inside"`    // of the rows at which the replayed input meets the logged one; null in manual
	InputRMSE   *float64 `json:"input_rmse"`            // replayed less logged input
	TempRMSE    *float64 `json:"temperature_rmse"`      // replayed less logged temperature
	Reproduced  bool     `json:"reproduced"`            // by plant and controller
	Plant       bool     `json:"plant_reproduced"`      // nothing in the temperature speaks against the plant
	Controller  *bool    `json:"controller_reproduced"` // the logged gains give the logged input; null in manual
	Differs     []string `json:"differs"`               // what differs, in words
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
	Judged     int     `json:"judged"`        // runs on which the requirement could be judged
	Meeting    int     `json:"meeting"`       // of these
	Distrusted int     `json:"distrusted"`    // runs that the back-test did not reproduce
	Failed     int     `json:"failed"`        // logs and runs that could not be replayed
	Meets      bool    `json:"meets"`         // every judged run meets it
	ShareMeets float64 `json:"share_meeting"` // of the judged runs
}
