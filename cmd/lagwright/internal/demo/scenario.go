// Package demo makes the logs of lagwright demo: an invented process-air
// heater, EH-214 on drying line 2 of Alder Mill, driven with 0 to 10 V, with
// a thermocouple TT-214 in the outlet duct. One log is a bump test in manual,
// two are earlier runs in automatic under the gains then in force.
//
// The heater is a plant of package ident, the controller and the exact
// simulation are those of package tune. What the logger adds is in it, too:
// slow drift, correlated noise, 0.1 °C resolution, an open thermocouple for
// some seconds. Every draw comes from a fixed seed.
package demo

import (
	"time"

	"lagwright/ident"
)

// seed of every random draw.
const seed = 214

// interval between two rows, which is also the controller's scan time, in s.
const interval = 1.0

// Column names, as the logger writes them.
const (
	timeColumn     = "Time"
	inputColumn    = "EH-214.OUT [V]"
	tempColumn     = "TT-214.PV [degC]"
	setpointColumn = "TC-214.SP [degC]"
	modeColumn     = "TC-214.MODE"
)

// Heater is the true plant: gain in K/V, lags of the element and of the
// thermocouple in its pocket, and the way of the air to the sensor.
func Heater() (ident.Plant, error) {
	chain2, err := ident.ParseStructure("chain2")
	if err != nil {
		return ident.Plant{}, err
	}
	return ident.NewPlant(chain2, 11.6, []float64{26, 8.5}, 4.4)
}

// Log is one recording.
type Log struct {
	Name string // without ending
	Rows []Row
}

// Row is what the logger writes at one instant.
type Row struct {
	Time        time.Time
	Input       float64 // V
	Temperature float64 // °C; NaN where the thermocouple reads open
	Setpoint    float64 // °C
	Auto        bool
}

// Logs makes the bump test and the two earlier runs.
func Logs() ([]Log, error) {
	var logs []Log
	for i, s := range scripts {
		rows, err := s.record(uint64(i))
		if err != nil {
			return nil, err
		}
		logs = append(logs, Log{Name: s.name, Rows: rows})
	}
	return logs, nil
}

// mill is the zone of the logger's clock.
var mill = time.FixedZone("", 3600)

// script is what happens during one recording. Times are in s from its first
// row; moves are applied from their time on.
type script struct {
	name     string
	start    time.Time
	duration float64
	ambient  float64 // °C at no input

	input     []move // in manual
	setpoint  []move // in automatic
	load      []move // °C by which the inlet air differs, before the heater's lags
	drift     float64
	open      [2]float64 // the thermocouple reads open in this interval
	automatic bool
}

type move struct{ at, to float64 }

var scripts = []script{
	{
		name:     "bump",
		start:    time.Date(2026, 3, 11, 9, 12, 0, 0, mill),
		duration: 840,
		ambient:  22.3,
		input:    []move{{0, 4}, {150, 5.6}, {480, 4}},
		setpoint: []move{{0, 70}},
		drift:    1.4 / 3600,
		open:     [2]float64{331, 343},
	},
	{
		name:      "setpoint-change",
		start:     time.Date(2026, 2, 17, 6, 40, 0, 0, mill),
		duration:  1200,
		ambient:   21.6,
		setpoint:  []move{{0, 72}, {120, 82}, {660, 77}},
		automatic: true,
	},
	{
		name:      "wet-board",
		start:     time.Date(2026, 2, 24, 14, 5, 0, 0, mill),
		duration:  1200,
		ambient:   22.1,
		setpoint:  []move{{0, 76}},
		load:      []move{{0, 0}, {180, -6}, {700, -1.5}},
		automatic: true,
	},
}

// at is the value of the last move up to time t.
func at(moves []move, t float64) float64 {
	v := 0.0
	for _, m := range moves {
		if m.at <= t {
			v = m.to
		}
	}
	return v
}
