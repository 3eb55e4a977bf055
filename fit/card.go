package fit

// CardSchema is the schema of a model card.
const CardSchema = "lagwright/card/1"

// Card is the model card: the fitted models, their bounds, where they came
// from, how far to trust them.
type Card struct {
	Schema  string       `json:"schema"`
	Tool    string       `json:"tool"`
	Created string       `json:"created"` // RFC 3339: SOURCE_DATE_EPOCH, else the log's last time
	Source  []CardSource `json:"source"`

	Units      CardUnits `json:"units"`
	InputLaw   string    `json:"input_law"`    // "linear" or "power"
	Initial    string    `json:"initial"`      // "rest", "earlier" or "free": as used
	NoiseModel string    `json:"noise_model"`  // "auto" or "white"
	Drift      string    `json:"drift"`        // "none" or "linear": as used
	BumpTime   string    `json:"bump_instant"` // "row" or "unknown"

	Range      CardRange `json:"range"`
	Confidence float64   `json:"confidence"` // 0.95
	Selected   string    `json:"selected"`   // structure of the model to use
	Models     []Model   `json:"models"`     // every structure tried

	Conditions Conditions `json:"conditions"`
	Plants     Plants     `json:"plants"`
	Profiles   []Profile  `json:"profiles,omitempty"` // of the selected model
	Derived    []Derived  `json:"derived"`            // of the selected model
	Warnings   []Warning  `json:"warnings"`
	Cautions   []string   `json:"cautions"`
}

// CardSource is one log behind the card.
type CardSource struct {
	File    string            `json:"file"`
	SHA256  string            `json:"sha256"`
	Rows    int               `json:"rows"`
	FromS   float64           `json:"from_s"`
	ToS     float64           `json:"to_s"`
	Start   *string           `json:"start"` // RFC 3339 or null
	Columns map[string]string `json:"columns"`
}

// CardUnits are the units of the card's numbers.
type CardUnits struct {
	Time        string `json:"time"`
	Input       string `json:"input"`
	Temperature string `json:"temperature"`
}

// CardRange is where the model was measured.
type CardRange struct {
	Input       [2]float64 `json:"input"`
	Temperature [2]float64 `json:"temperature"`
}

// Conditions are the ranges of what gain, lags and dead time depend on; null
// where not logged.
type Conditions struct {
	Airflow *[2]float64 `json:"airflow"`
	Inlet   *[2]float64 `json:"inlet_temperature"`
}

// Model is one fitted structure.
type Model struct {
	Structure  string      `json:"structure"`
	Parameters []Parameter `json:"parameters"`
	Covariance [][]float64 `json:"covariance"` // in the order of the free parameters

	Samples    int     `json:"samples"`
	SSE        float64 `json:"sse"`
	RMSE       float64 `json:"rmse"`
	FitPercent float64 `json:"fit_percent"`
	LogLik     float64 `json:"loglik"`
	AICc       float64 `json:"aicc"`
	BIC        float64 `json:"bic"`

	Noise     Noise     `json:"noise"`
	Residuals Residuals `json:"residuals"`
}

// Parameter is one number of a model with its bounds. Low and High are the
// ends of the interval at the card's confidence; null where the log sets no
// bound. SE is the Wald standard error, null where there is none.
type Parameter struct {
	Name  string   `json:"name"` // gain, lag1, lag2, …, dead_time, baseline, drift
	Unit  string   `json:"unit"`
	Value float64  `json:"value"`
	SE    *float64 `json:"se"`
	Low   *float64 `json:"low"`
	High  *float64 `json:"high"`
	Fixed bool     `json:"fixed"`
}

// Noise is what the model leaves: a first-order correlated part and a white part.
type Noise struct {
	SD              float64 `json:"sd"`                 // of the whole, temperature units
	CorrelationTime float64 `json:"correlation_time_s"` // of the correlated part; 0 when white
	WhiteSD         float64 `json:"white_sd"`
	WanderSD        float64 `json:"wander_sd,omitempty"` // of a random walk on top of it, over the log
}

// Residuals are the checks of what is left.
type Residuals struct {
	Lag1Correlation   float64 `json:"lag1_correlation"` // of log minus simulated output
	LjungBoxP         float64 `json:"ljung_box_p"`      // of the whitened residuals
	InputCorrelationP float64 `json:"input_correlation_p"`
}

// Plants is the sample of plausible plants. Each row of Values is one plant,
// in the order of Parameters (gain, lags…, dead_time).
type Plants struct {
	Structure  string      `json:"structure"`
	Rand       int64       `json:"rand"`
	Parameters []string    `json:"parameters"`
	Values     [][]float64 `json:"values"`
}

// Profile is how the fit worsens as one parameter is held away from its best
// value and the others are fitted again: Root is the signed root of the
// likelihood ratio, (S(v) - S)/s², in units in which the interval ends at ±1
// on either side. Points are in ascending order of Value.
type Profile struct {
	Parameter string    `json:"parameter"`
	Value     []float64 `json:"value"`
	Root      []float64 `json:"root"`
}

// Derived is a quantity computed from the model, with bounds.
type Derived struct {
	Name  string   `json:"name"` // sum_of_lags, total_delay, initial_slope, local_gain
	Unit  string   `json:"unit"`
	Value float64  `json:"value"`
	Low   *float64 `json:"low"`
	High  *float64 `json:"high"`
}

// Dated reports whether a log of the card has a date: one of logs without has the
// epoch for it, which tells nobody anything.
func (c *Card) Dated() bool { return c.Created != "1970-01-01T00:00:00Z" }

// Warning is one thing that limits the card.
type Warning struct {
	Code      string `json:"code"`
	Text      string `json:"text"`
	Parameter string `json:"parameter,omitempty"`
}
