package demo

import (
	"bufio"
	"fmt"
	"io"
	"math"
	"strconv"
	"time"
)

// WriteCSV writes the log as the logger exports it.
func (l Log) WriteCSV(w io.Writer) error {
	b := bufio.NewWriter(w)
	fmt.Fprintf(b, "%s,%s,%s,%s,%s\n", timeColumn, inputColumn, tempColumn, setpointColumn, modeColumn)
	for _, r := range l.Rows {
		temperature := "OPEN"
		if !math.IsNaN(r.Temperature) {
			temperature = strconv.FormatFloat(r.Temperature, 'f', 1, 64)
		}
		fmt.Fprintf(b, "%s,%.3f,%s,%.1f,%s\n", r.Time.Format(time.RFC3339), r.Input, temperature, r.Setpoint, mode(r.Auto))
	}
	return b.Flush()
}

func mode(auto bool) string {
	if auto {
		return "AUTO"
	}
	return "MAN"
}
