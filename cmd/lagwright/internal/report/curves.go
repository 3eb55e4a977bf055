package report

// The data of figures that no file holds, as the libraries compute them.
// Slices beside each other have one length; NaN is a hole.

// Ensemble is one signal on the best-fit plant, with its band over the
// plausible plants.
type Ensemble struct{ Best, Low, High []float64 }

// Response is the loop's answer to one disturbance, as deviations from where
// it rested.
type Response struct {
	T           []float64 // s after the step
	Temperature Ensemble  // temperature units
	Input       Ensemble  // input units
	Size        float64   // of the step: temperature units for a setpoint, input units for a load
}

// Sensitivity is |S(jw)| of the loop.
type Sensitivity struct {
	W []float64 // rad/s, ascending
	S Ensemble
}

// Poles are dominant closed-loop poles, 1/s and rad/s; of each pair the upper.
type Poles struct {
	Best      []complex128
	Plausible []complex128
	Locus     []complex128 // of the best-fit plant for growing gain, P control only
	Decay     float64      // required: real part at most −Decay, 1/s; 0 asks nothing
	Damping   float64      // required damping ratio; 0 asks nothing
}

// Loop is what the proposed gains do, drawn.
type Loop struct {
	Step, Load  *Response
	Sensitivity *Sensitivity
	Poles       *Poles
}
