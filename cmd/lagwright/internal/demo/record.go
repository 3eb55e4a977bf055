package demo

import (
	"math"
	"math/rand/v2"
	"time"

	"lagwright/ident"
	"lagwright/tune"
)

// What the thermocouple adds, in °C: turbulence, a first-order process of the
// given correlation time in s, and the white noise of the electronics.
const (
	turbulence     = 0.15
	turbulenceTime = 6.0
	electronics    = 0.05
)

// resolution of the logged temperature, °C.
const resolution = 0.1

// GainsInForce are the gains the box ran with when the two earlier runs were
// logged: a sluggish PI.
func GainsInForce() *tune.Gains {
	ti, low, high := 60.0, 0.0, 10.0
	return &tune.Gains{
		Schema:         tune.GainsSchema,
		Controller:     "pi",
		Form:           tune.Ideal,
		Kc:             0.08,
		Ti:             &ti,
		SetpointWeight: 1,
		Action:         "reverse",
		Scan:           interval,
		Limits:         tune.Limits{Min: &low, Max: &high},
		Units:          tune.GainUnits{Input: "V", Temperature: "degC"},
		Rule:           "as found",
	}
}

// record runs the script: at every row the temperature is read, the input set
// and both are logged; the input then holds until the next row.
func (s script) record(stream uint64) ([]Row, error) {
	heater, err := Heater()
	if err != nil {
		return nil, err
	}
	outlet, err := tune.NewPlantStepper(heater, interval)
	if err != nil {
		return nil, err
	}
	inlet, err := inletEffect(heater)
	if err != nil {
		return nil, err
	}
	box, err := tune.NewController(GainsInForce(), interval)
	if err != nil {
		return nil, err
	}
	rest := s.restInput(heater.Gain)
	base := s.ambient + heater.Gain*rest
	box.Start(at(s.setpoint, 0), base, rest)
	noise := newNoise(stream)

	var rows []Row
	for t := 0.0; t <= s.duration; t += interval {
		y := base + outlet.Output() + inlet.Output() + s.drift*t + noise.next()
		u := at(s.input, t)
		if s.automatic {
			u = box.Next(at(s.setpoint, t), y)
		}
		rows = append(rows, s.row(t, u, y))
		outlet.Step(u - rest)
		inlet.Step(at(s.load, t))
	}
	return rows, nil
}

// inletEffect is how a change of the inlet air's temperature reaches the
// sensor: through the same lags, at gain 1 and without the way of the air.
func inletEffect(heater ident.Plant) (*tune.PlantStepper, error) {
	p, err := ident.NewPlant(heater.Structure, 1, heater.Lags, 0)
	if err != nil {
		return nil, err
	}
	return tune.NewPlantStepper(p, interval)
}

// restInput is the input that holds the first setpoint, or the first input
// in manual.
func (s script) restInput(gain float64) float64 {
	if !s.automatic {
		return at(s.input, 0)
	}
	return (at(s.setpoint, 0) - s.ambient) / gain
}

// row rounds as the logger does.
func (s script) row(t, u, y float64) Row {
	r := Row{
		Time:        s.start.Add(time.Duration(t * float64(time.Second))),
		Input:       math.Round(u*1000) / 1000,
		Temperature: math.Round(y/resolution) * resolution,
		Setpoint:    at(s.setpoint, t),
		Auto:        s.automatic,
	}
	if s.open[0] <= t && t < s.open[1] {
		r.Temperature = math.NaN()
	}
	return r
}

// noise is the thermocouple's, sampled once per interval.
type noise struct {
	draw    *rand.Rand
	flutter float64
}

func newNoise(stream uint64) *noise {
	n := &noise{draw: rand.New(rand.NewPCG(seed, stream))}
	n.flutter = turbulence * n.draw.NormFloat64()
	return n
}

func (n *noise) next() float64 {
	keep := math.Exp(-interval / turbulenceTime)
	v := n.flutter + electronics*n.draw.NormFloat64()
	n.flutter = keep*n.flutter + turbulence*math.Sqrt(1-keep*keep)*n.draw.NormFloat64()
	return v
}
