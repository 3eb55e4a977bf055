// Package tune finds gains for the heater a model card describes: gains that
// hold on every plant the log cannot rule out, not on the best fit alone. It
// holds the controllers and their forms, the analysis of a loop with its dead
// time exact (peaks, margins, poles), the loop in time as a real box runs it,
// the published rules by their names, the pole-region design for P control,
// and the synthesis to a requirement. Most callers need [Tune], [ReadGains]
// and [Convert]; [Controller] and [PlantStepper] run a loop step by step. It
// does not fit models and does not read logs; see packages fit and data.
//
// # Conventions
//
// A controller computes
//
//	u = Kc·[(b·r − yf) + 1/Ti·∫(r − yf)dt − Td·dyf/dt],   Tf·dyf/dt + yf = y
//
// with the derivative on the measurement only and one filter Tf in front of
// all three terms, so that L(s) = Kc·(1 + 1/(Ti·s) + Td·s)/(Tf·s + 1)·G(s) is
// what both the analysis and the simulation see. The load enters at the
// plant's input. Times are in s, gains in input units per temperature unit.
//
// A scanning controller is simulated scan by scan, and its stability, Ms,
// margins and damping are those of the sampled loop, see sampled.go. Only the
// poles that are listed and drawn count its sampling as half a scan of dead time
// (common practice, no source).
package tune
