package main

import (
	"errors"

	"lagwright/cmd/lagwright/internal/atomicfile"
)

// refuseUnwritable finds out before the work whether every output can be put in
// place; "" and "-" are no files.
func refuseUnwritable(outputs ...string) error {
	for _, output := range outputs {
		if output == "" || output == "-" {
			continue
		}
		if err := unwritable(atomicfile.Check(output)); err != nil {
			return err
		}
	}
	return nil
}

// unwritable makes a folder that is not there a fault of the command line.
func unwritable(err error) error {
	if errors.As(err, new(*atomicfile.NoFolder)) {
		return usageError{err}
	}
	return err
}
