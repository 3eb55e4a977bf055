package main

import (
	"context"
	"errors"
	"fmt"
)

// Exit codes. Everything that is not one of the error types below is the
// machine's fault: a result that cannot be written, no memory, an interrupt.
const (
	exitDone    = 0 // the work is done
	exitMachine = 1 // the machine failed
	exitUsage   = 2 // the command line is wrong
	exitInput   = 3 // the input cannot be used
	exitNo      = 4 // the work is done and the answer is no; the result is written all the same
)

// exitHelp ends the help text of every command that computes.
const exitHelp = `
Exit codes:
  0  done
  1  the machine failed (a result cannot be written)
  2  the command line is wrong
  3  the input cannot be used (missing, unreadable, ambiguous, no bump)
  4  done, and the answer is no (requirement not met); the result is written`

type (
	usageError struct{ error } // the command line is wrong
	inputError struct{ error } // the input cannot be used
	answerNo   struct{ error } // the work was done and the answer is no
	resumable  struct{ error } // interrupted, and --resume goes on
)

func (e usageError) Unwrap() error { return e.error }
func (e inputError) Unwrap() error { return e.error }
func (e answerNo) Unwrap() error   { return e.error }
func (e resumable) Unwrap() error  { return e.error }

func usageErrorf(format string, a ...any) error { return usageError{fmt.Errorf(format, a...)} }
func inputErrorf(format string, a ...any) error { return inputError{fmt.Errorf(format, a...)} }
func answerNof(format string, a ...any) error   { return answerNo{fmt.Errorf(format, a...)} }

// exitCode is the only place where an error becomes a number.
func exitCode(err error) int {
	var (
		usage usageError
		input inputError
		no    answerNo
	)
	switch {
	case err == nil:
		return exitDone
	case errors.Is(err, context.Canceled): // wherever the interrupt was noticed
		return exitMachine
	case errors.As(err, &usage):
		return exitUsage
	case errors.As(err, &input):
		return exitInput
	case errors.As(err, &no):
		return exitNo
	}
	return exitMachine
}
