// Package validate replays logged runs under proposed gains, before they
// touch a live heater, and follows a heater's parameters from run to run.
//
// [ReplayRuns] and [ReplayFiles] take a model card and gains and compute, for
// every plausible plant, what each run would have been: what a plant does not
// explain of the log is its disturbance, and the loop is closed on that plant
// with that disturbance. The result is a band for temperature and input,
// metrics with bounds, and the share of plants on which the requirement is
// met. Nothing is assumed about baseline, drift or initial state, since they
// are in the log and cancel. With the gains that were in force the replay is
// first tested against the log itself; a run that is not reproduced says so.
// [Track] fits the same structure to run after run and tests for change.
//
// Logged, simulated and replayed signals are measured alike, see metrics.go:
// settling into the band of the requirement, widened for the noise that no
// controller can act on. The package draws nothing and writes no files but the
// journal of a long job.
package validate
