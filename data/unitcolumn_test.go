package data

import (
	"bytes"
	"context"
	"fmt"
	"strings"
	"testing"
)

// A column of units is compared in every row, behind the sample too.
func TestUnitColumnBehindSample(t *testing.T) {
	log := func(unit func(i int) string) string {
		var b strings.Builder
		b.WriteString("time_s,drive_V,outlet,outlet_unit\n")
		for i := range 3 * sampleRows {
			fmt.Fprintf(&b, "%d,1,%d,%s\n", i, 24+i%7, unit(i))
		}
		return b.String()
	}
	late := 2*sampleRows + 5
	for _, c := range []struct {
		name, after, wrong string
	}{
		{"the same", "degC", ""},
		{"another spelling", "°C", ""},
		{"blank", "", ""},
		{"another unit", "degF", fmt.Sprintf("-:%d: column \"outlet_unit\" goes from degC to \"degF\" here", late+2)},
		{"no unit", "xyz", "goes from degC to \"xyz\" here"},
	} {
		t.Run(c.name, func(t *testing.T) {
			text := log(func(i int) string {
				if i < late {
					return "degC"
				}
				return c.after
			})
			_, err := Read(context.Background(), "-", Options{Stdin: bytes.NewReader([]byte(text))})
			if c.wrong == "" && err != nil || c.wrong != "" && (err == nil || !strings.Contains(err.Error(), c.wrong)) {
				t.Errorf("error %v, want %q", err, c.wrong)
			}
		})
	}
}
