package tune

// GainsSchema is the schema of a gains file.
const GainsSchema = "lagwright/gains/1"

// Gains is a controller with what is known of it.
type Gains struct {
	Schema string `json:"schema"`
	Tool   string `json:"tool"`

	Cards []string `json:"cards,omitempty"` // fingerprints of the cards they were made from, see [fit.Card.Fingerprint]

	Controller string `json:"controller"` // "p", "pi" or "pid"
	Form       string `json:"form"`       // "ideal", "parallel" or "series"

	Kc             float64   `json:"kc"`              // input units per temperature unit
	Ti             *float64  `json:"ti_s"`            // null where absent
	Td             *float64  `json:"td_s"`            // null where absent
	Filter         float64   `json:"filter_s"`        // lag of the derivative (measurement) filter
	SetpointWeight float64   `json:"setpoint_weight"` // b
	Bias           float64   `json:"bias"`            // output of a P controller at zero error
	Action         string    `json:"action"`          // "reverse" (gain > 0) or "direct"
	Scan           float64   `json:"scan_s"`          // 0 means continuous
	Limits         Limits    `json:"limits"`
	Units          GainUnits `json:"units"`

	Rule        string      `json:"rule"` // name of the rule, "synthesis" for the default
	Requirement Requirement `json:"requirement"`

	Nominal      *Metrics `json:"nominal"`              // on the best-fit plant
	Worst        *Metrics `json:"worst"`                // the assurance quantile over plausible plants it was not chosen on; of several cards the worst
	WorstOver    float64  `json:"worst_over,omitempty"` // where meets rests on the sampling error: the share that meets, and worst is over those plants
	Assurance    float64  `json:"assurance"`
	Meets        bool     `json:"meets"`
	ShareMeeting float64  `json:"share_meeting"`         // of several cards, on the worst
	ShareError   float64  `json:"share_error,omitempty"` // its sampling error, one standard deviation
	SmallStep    bool     `json:"small_step,omitempty"`  // the input is limited, and a step that no limit touches must meet overshoot and settling too
	Reasons      []string `json:"reasons"`               // what fails and by how much
	Cures        []string `json:"cures,omitempty"`       // changes that would let it hold, sized
	Cautions     []string `json:"cautions"`

	OperatingInput *float64        `json:"operating_input,omitempty"`  // the figures are judged from here
	HoldsOver      *[2]float64     `json:"holds_over_input,omitempty"` // power law: inputs over which the requirement holds, on every card
	SquareRoot     *SquareRoot     `json:"square_root,omitempty"`      // power law: gain behind a square root
	Schedule       []ScheduleEntry `json:"schedule,omitempty"`         // several cards: a set for each

	PoleRegion *RegionDesign `json:"pole_region,omitempty"` // P control: gains that place the poles

	Entry []Entry `json:"entry,omitempty"` // the numbers as entered at the controller

	Candidates []Candidate `json:"candidates,omitempty"` // the table of everything tried
}

// Limits of the controller output.
type Limits struct {
	Min        *float64 `json:"min"`
	Max        *float64 `json:"max"`
	Rate       *float64 `json:"rate"`                 // per s
	Resolution *float64 `json:"resolution,omitempty"` // smallest step of the output
}

// GainUnits are the units of a gains file's numbers.
type GainUnits struct {
	Input       string `json:"input"`
	Temperature string `json:"temperature"`
}

// Metrics of a loop. Null where the figure does not exist (an unstable loop,
// no integral action, nothing settled in the time simulated).
type Metrics struct {
	Stable       bool     `json:"stable"`
	Ms           *float64 `json:"ms"`
	GainMargin   *float64 `json:"gain_margin"`
	PhaseMargin  *float64 `json:"phase_margin_deg"`
	DelayMargin  *float64 `json:"delay_margin_s"`
	Damping      *float64 `json:"damping"`
	Settling     *float64 `json:"settling_s"`
	Overshoot    *float64 `json:"overshoot_percent"`
	PeakInput    *float64 `json:"peak_input"`
	IAE          *float64 `json:"iae"` // after a unit load step at the plant's input
	SteadyOffset *float64 `json:"steady_offset"`
}

// Candidate is one row of the table of gains tried.
type Candidate struct {
	Rule       string   `json:"rule"`
	Controller string   `json:"controller"`
	Kc         float64  `json:"kc"`
	Ti         *float64 `json:"ti_s"`
	Td         *float64 `json:"td_s"`
	Filter     float64  `json:"filter_s"`
	Form       string   `json:"form"`
	Nominal    *Metrics `json:"nominal"`
	Worst      *Metrics `json:"worst"`
	WorstOver  float64  `json:"worst_over,omitempty"` // as in Gains
	Share      float64  `json:"share_meeting"`
	Meets      bool     `json:"meets"`
	Selected   bool     `json:"selected"`
	Note       string   `json:"note"`

	SetpointWeight *float64 `json:"setpoint_weight,omitempty"` // b; absent in files of earlier versions
	Missed         string   `json:"missed,omitempty"`          // what most of the plants that fail miss most

	InputNoise float64 `json:"input_noise"` // standard deviation at the output from the measurement's noise, input units
}

// SquareRoot is the gain to enter where the output of the controller goes
// through a square root to the drive, so that the loop is linear: the integral
// and derivative times stay.
type SquareRoot struct {
	Kc   float64 `json:"kc"`
	Unit string  `json:"unit"`
}

// ScheduleEntry is the set of gains for one of several cards, in the ideal
// form.
type ScheduleEntry struct {
	Card   string     `json:"card"`
	Input  [2]float64 `json:"input"` // range of the card
	Kc     float64    `json:"kc"`
	Ti     *float64   `json:"ti_s"`
	Td     *float64   `json:"td_s"`
	Filter float64    `json:"filter_s"`
	Meets  bool       `json:"meets"`
	Cost   *float64   `json:"cost"` // load IAE of the common set as a multiple of this one's
}
