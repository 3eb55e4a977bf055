package tune

// Requirement is what the loop must do. A nil field asks for nothing.
type Requirement struct {
	Settling  *float64 `json:"settling_s"`        // s, into Band of the step and staying
	Band      float64  `json:"band"`              // fraction of the step; 0 means 0.02
	Overshoot *float64 `json:"overshoot_percent"` // of the setpoint step
	Damping   *float64 `json:"damping"`           // least damping ratio of the dominant poles
	Ms        *float64 `json:"ms"`                // largest peak sensitivity

	InputMin  *float64 `json:"input_min"` // input units
	InputMax  *float64 `json:"input_max"`
	InputRate *float64 `json:"input_rate"`      // input units per s
	TempMax   *float64 `json:"temperature_max"` // hard ceiling, temperature units

	SetpointStep *float64 `json:"setpoint_step"` // size of the step judged, temperature units
	Scan         float64  `json:"scan_s"`        // controller's scan time; 0 means continuous
}
