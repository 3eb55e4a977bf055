package data

import (
	"context"
	"fmt"
	"strings"
	"testing"
)

// logOf is a log of 40 rows: the cells of row i under a header.
func logOf(header string, cells func(i int) string) string {
	var b strings.Builder
	fmt.Fprintln(&b, header)
	for i := range 40 {
		fmt.Fprintln(&b, cells(i))
	}
	return b.String()
}

// TestMisleadingNames reads logs in which a name, a mark or a flag misleads.
func TestMisleadingNames(t *testing.T) {
	still := func(i int) string { return fmt.Sprintf("%d;%d,0;68,4;%d,5", i, 40+i/20, 200+i) }
	moving := func(i int) string { return fmt.Sprintf("%d;%d,0;%d,4;%d,5", i, 40+i/20, 68+i%3, 200+i) }
	oven := "Zeit (s);Heizung (V);Zuluft (°F);Ofen Ist (°F)"
	for _, c := range []struct {
		name, text  string
		o           Options
		temperature string
		note        string // in that of a column passed over
		wrong       string
	}{
		{name: "actual value over still air", text: logOf(oven, still), temperature: "Ofen Ist (°F)", note: `not "Zuluft (°F)" (68,4, 68,4, 68,4); --temp-col`},
		{name: "over moving air", text: logOf(oven, moving), temperature: "Ofen Ist (°F)", note: `not "Zuluft (°F)"`},
		{name: "without units", text: logOf("Zeit (s);Heizung (V);Zulufttemperatur;Ofen-Istwert", moving), temperature: "Ofen-Istwert"},
		{name: "process value", text: logOf("time_s;heater_V;Supply air temp (degC);Oven PV (degC)", moving),
			temperature: "Oven PV (degC)", note: `not "Supply air temp (degC)"`},
		{name: "actual", text: logOf("time_s;heater_V;Supply air (degC);Oven actual (degC)", still), temperature: "Oven actual (degC)", note: "Supply air"},
		{name: "air alone", text: logOf("Zeit (s);Heizung (V);Zuluft (°C);Schrank (°C)", moving), temperature: "Zuluft (°C)", note: `not "Schrank (°C)"`},
		{name: "two actual values", text: logOf("Zeit (s);Heizung (V);Zuluft Ist (°C);Ofen Ist (°C)", moving), wrong: `2 columns could be the temperature: "Zuluft Ist (°C)"`},
		{name: "named by flag", text: logOf(oven, moving), o: Options{TempCol: "Zuluft"}, temperature: "Zuluft (°F)"},
		{name: "one column, two roles", text: logOf(oven, moving), o: Options{InputCol: "Heizung", TempCol: "heizung"},
			wrong: `column "Heizung (V)" cannot be both the input (--input-col) and the temperature (--temp-col)`},
		{name: "a date of its own", text: logOf("Datum;Uhrzeit;Heizung (V);Ofen (°C)", func(i int) string { return fmt.Sprintf("03/04/2026;10:00:%02d;%d,0;%d,5", i, 40+i/20, 200+i) }),
			wrong: `column "Datum" (03/04/2026) can be read day first or month first`},
		{name: "comma twice", text: logOf("Zeit,Heizung (V),Ofen (°C)", func(i int) string { return fmt.Sprintf("%d,%d,0,%d,5", i, 40+i/20, 200+i) }),
			wrong: "the comma seems to be both the delimiter and the decimal mark"},
		{name: "comma twice in one column", text: logOf("Zeit,Heizung (V),Ofen (°C)", func(i int) string { return fmt.Sprintf("%d,%d,%d,%d", i, 40+i/20, 200+i/10, i%10) }),
			wrong: "is the comma both the delimiter and the decimal mark?"},
		{name: "numbered rows", text: logOf("time_s,heater_V,outlet_degC", func(i int) string { return fmt.Sprintf("%d,%d,%d,%d", i+1, i, 40+i/20, 96+i) }), temperature: "outlet_degC"},
		{name: "numbered rows of two digits", text: logOf("time_s,heater_V,outlet_degC", func(i int) string { return fmt.Sprintf("%d,%d,%d,%d", i+1, i, 40+i/20, 50+i) }), temperature: "outlet_degC"},
		{name: "decimals of two digits", text: logOf("Zeit,Heizung (V),Ofen (°C)", func(i int) string { return fmt.Sprintf("%d,%d,%d,%02d", i, 40+i/20, 200+i/10, 7*i%100) }),
			wrong: "is the comma both the delimiter and the decimal mark?"},
		{name: "span too small", text: logOf("time_s,heater_V,outlet_degC", func(i int) string { return fmt.Sprintf("%d,%d,%d.5", i, 4+i/20, 120+i) }),
			o: Options{TempSpan: &Span{0, 100, "C"}}, wrong: "(40 cells are full scale): --temp-span 0..100C sets aside"},
		{name: "span in another unit", text: logOf("time_s,heater_V,outlet_degF", func(i int) string { return fmt.Sprintf("%d,%d,%d.5", i, 4+i/20, 220+i) }),
			o: Options{TempSpan: &Span{0, 200, "C"}}, temperature: "outlet_degF"},
		{name: "no log", text: "# Heater\n\nThe heater is warm, and dry, today.\nIt was warm, and wet, before.\n", wrong: "export the log as CSV"},
	} {
		t.Run(c.name, func(t *testing.T) {
			c.o.Stdin = strings.NewReader(c.text)
			runs, err := Read(context.Background(), "-", c.o)
			if c.wrong != "" {
				if err == nil || !strings.Contains(err.Error(), c.wrong) {
					t.Fatalf("error %v, want one with %q", err, c.wrong)
				}
				return
			}
			if err != nil {
				t.Fatal(err)
			}
			if got := runs[0].Source.Columns.Temperature; got != c.temperature {
				t.Errorf("temperature %q, want %q", got, c.temperature)
			}
			if len(runs[0].Quality.Missing) > 0 {
				t.Errorf("missing %v", runs[0].Quality.Missing)
			}
			note := ""
			for _, n := range runs[0].Quality.Notes {
				if n.Code == "column-passed-over" {
					note += n.Text
				}
			}
			if (note == "") != (c.note == "") || !strings.Contains(note, c.note) {
				t.Errorf("note %q, want one with %q", note, c.note)
			}
		})
	}
}
