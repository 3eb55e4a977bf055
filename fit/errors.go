package fit

import "errors"

// What makes a log unfit for fitting. The errors that [Fit] and [Check]
// return wrap one of these.
var (
	ErrTooShort = errors.New("too few rows")
	ErrConstant = errors.New("the temperature never changes")
	ErrNoBump   = errors.New("no bump in the input")
	ErrNoAnswer = errors.New("the temperature does not answer the input")
	ErrUnlike   = errors.New("logs that do not go together")
	ErrOption   = errors.New("option")
)
