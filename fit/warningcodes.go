package fit

// CodeDoc documents a warning code of the model card.
type CodeDoc struct {
	Code  string // stable, kebab-case
	Seen  string // what was seen
	Means string // what it means for the card
	Do    string // what to do
}

// WarningCodes lists the codes that a fit can put into a card, in the order in
// which a card lists them. Codes of notes made while a log was read
// come from package data and are passed on as they are.
func WarningCodes() []CodeDoc {
	return []CodeDoc{
		{"short-record", "the interval of gain or of a lag has no upper end", "the log ends before the answer does; larger values explain it as well", "hold the next bump longer: four times the lags after it"},
		{"weak-bump", "the gain cannot be told from zero, or a slope has no bound", "the answer is lost in the noise", "make a larger bump, or several and fit them together"},
		{"lag-unresolved", "the interval of a lag reaches down to zero", "the rows are too coarse, or the lag is not there", "log faster, or take a simpler structure"},
		{"dead-time-unresolved", "the interval of the dead time reaches down to zero", "there may be none; only its upper end is known", "log faster if it matters"},
		{"structures-alike", "other structures have an AICc within 2 of the one taken", "the log cannot tell them apart; the simplest was taken", "use the plausible plants, which are of all of them, or log faster with a larger bump"},
		{"white-intervals", "residuals correlated from row to row in a fit that took them for white", "the bounds are too narrow", "fit with --noise auto"},
		{"residual-correlation", "the whitened residuals are still correlated (Ljung-Box p below 0.01)", "the noise is not a first-order one, or the structure misses something; the bounds may be too narrow", "look at the residuals; try another structure or part of the log"},
		{"coarse-quantum", "the temperature is logged in steps more than twice the noise", "small answers are lost between the steps", "log with more digits"},
		{"input-correlation", "the misfit follows the input (p below 0.01)", "structure, input law or dead time is not right over the whole log", "look at the residuals after each bump; try --input-law power or another structure"},
		{"up-down-differ", "gain or lags of steps up differ from those of steps down (p below 0.001 and more than 3 %)", "heating and cooling differ; the model is an average of both", "bump both ways about the working point, or fit the bumps one by one"},
		{"curvature", "the gain changes over the range of the input (p below 0.001 and more than 6 %)", "one straight line does not hold everywhere", "fit with --input-law power if it grows with the input, else bump about the working point only"},
		{"logs-differ", "logs of a joint fit do not share one plant (p below 0.001)", "the joint model describes none of them well", "fit them apart; look for what changed: airflow, filter, load, sensor"},
		{"little-explained", "the plant alone explains little of the temperature (fit below 40 %)", "drift and noise were given the rest; the model may be far from the heater", "look at the figure; make a larger bump, settle before it"},
		{"switched-input", "the input is ON and OFF in words and changes all the time", "a model of every switching is easily wrong by whole cycles", "read the log with --cycle, logged fifty times a cycle or faster"},
		{"not-at-rest", "the log begins on the way from an earlier input", "that input was fitted along, which costs width", "start the next test from a steady state"},
		{"drift", "the baseline drifts over the log", "the drift was fitted along, which costs width", "let the heater settle before the bump"},
		{"bump-instant", "the fit was told that the instant of the bump inside its sampling interval is not known", "the dead time is stated one sampling interval wider", "log faster, or log the input at the instant it changes"},
		{"closed-loop", "a controller moved the input, and the gain is not known to 10 %", "the input moved too little to tell the plant from the noise", "make a bump in manual, or a larger step of the setpoint"},
		{"closed-loop-white", "a controller moved the input, and the noise was taken for white", "its answers to the noise count as the plant's; gain and lags are shifted", "fit with --noise auto"},
	}
}
