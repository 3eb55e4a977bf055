package data

import "math"

// tableQuirks are logs whose columns or rows do not stand as in most.
var tableQuirks = []quirk{
	// a clock for each channel
	{file: "clock-for-each-channel-same.csv", notes: []string{"time-unit-assumed"}},
	{file: "clock-for-each-channel-same-stamps.csv", start: janStart},
	{file: "clock-for-each-channel-same-name.csv"},
	{file: "clock-for-each-channel.csv", wrong: `columns "t1" (0, 0.5, 1), "t2" (0.2, 0.7, 1.2) are two clocks that differ ("0" and "0.2" in line 2): if every channel has its own, export the channels on one clock, or as rows of time, tag and value; else say which to use with --time-col`},
	{file: "clock-for-each-channel.csv", o: Options{TimeCol: "t2"}, notes: []string{"time-unit-assumed"}},
	{file: "clock-for-each-channel-named.csv", wrong: `columns "column 1" called "Time (s)" (0, 0.5, 1), "column 3" called "Time (s)" (0.2, 0.7, 1.2) are two clocks that differ`},
	{file: "clock-for-each-channel-named.csv", o: Options{TimeCol: "column 3"}},
	{file: "clock-for-each-channel-stamps.csv", wrong: `columns "drive time" (2026-01-25T10:00:00.000Z, 2026-01-25T10:00:00.500Z, 2026-01-25T10:00:01.000Z), "outlet time"`},
	{file: "two-names-alike.csv", wrong: `2 columns could be the temperature: "column 3" called "temp_degC" (24.1, 24.1, 24.2), "column 4" called "temp_degC" (25.1, 25.1, 25.2); say which with --temp-col`},
	{file: "two-names-alike.csv", o: Options{TempCol: "column 3"}},

	// rows and cells
	{file: "blanks-cell-missing.txt", t: without(baseT, 3), u: without(baseU, 3), y: without(baseY, 3), dropped: map[string]int{"row too short": 1}},
	{file: "brackets-round-rows.log"},
	{file: "brackets-rows.log"},
	{file: "quotes-single-rows.csv"},
	{file: "quotes-single-comma.csv"},
	{file: "dictionary-lines.log", notes: []string{"rows-of-pairs"}},
	{file: "three-decimals-comma.csv", t: ramp(8, func(i int) float64 { return float64(i) }), y: wholeY},
	{file: "header-changes-order.csv", wrong: "header-changes-order.csv:6: the header changes here (time_s | outlet_degC | drive_V): cut the file in two and read each by itself"},
	{file: "energy-beside-clock.csv"},
	{file: "remark-row.csv", dropped: map[string]int{"no time": 1}},
	{file: "header-changes-unit.csv", wrong: "header-changes-unit.csv:6: the header changes here (time_s | drive_V | outlet_degF)"},
	{file: "invisible-marks.csv", start: janStart, notes: []string{local}},
	{file: "blanks-stamp-one-name.txt", start: janStart, notes: []string{local}, dropped: map[string]int{"row too short": 1}},
	{file: "json-one-line.txt", wrong: "this seems to be JSON, of which only one object or list for every time, in a line of its own, can be read: export it so, or as CSV"},
	{file: "long-annotated.csv", start: janStart, notes: []string{"long-form"}},
	{file: "long-states.csv", y: with(baseY, 3, nan), input: "unit", temp: "unit", start: janStart, notes: []string{"long-form", "input-unit-unknown", "unit-unknown"}, missing: map[string]int{"UNAVAILABLE": 1}},
	{file: "long-numbered-tags.csv", wrong: `because of the names of their columns; among the tags in column "TagIndex", 2 columns could be the input: "0" (0, 0, 1.5), "1" (24.1, 24.1, 24.2); say which with --input-col`},
	{file: "long-numbered-tags.csv", o: Options{InputCol: "0", TempCol: "1", InputUnit: "V", TempUnit: "C"}, start: janStart, notes: []string{"clock-columns", "long-form", local}},
	{file: "spreadsheet-date-in-input.csv", wrong: `spreadsheet-date-in-input.csv:7: the input is "01. Mai", which is no number`},

	// one signal a row
	{file: "transposed.csv", wrong: `transposed.csv: the table seems to hold one signal in each row ("time_s", "drive_V", "outlet_degC") and one instant in each column: turn it round (in a spreadsheet: copy, paste special, transpose) and save it as CSV`},
	{file: "transposed-units.csv", wrong: `one signal in each row ("Zeit", "Ansteuerung", "Austritt")`},
	{file: "transposed-stamps.csv", wrong: `one signal in each row ("time", "drive_V", "outlet_degC")`},
	{file: "transposed-no-names.csv", wrong: "say which with --input-col; the table has 3 rows and 8 columns: if each row holds a signal, turn it round"},

	// the wrong way round
	{file: "comma.csv", o: Options{InputCol: "outlet_degC", TempCol: "drive_V"}, wrong: `column "outlet_degC" is named as the input and column "drive_V" as the temperature, but their names or units say the reverse: change over --input-col and --temp-col, or, if it is meant, say the units with --input-unit and --temp-unit`},
	{file: "comma.csv", o: Options{InputCol: "outlet_degC", TempCol: "drive_V", InputUnit: "%", TempUnit: "C"}, u: baseY, y: baseU, input: "%", notes: []string{"unit-named-otherwise"}},
	{file: "setpoint-as-temperature.csv", o: Options{TempCol: "setpoint_degC"}, y: ramp(8, func(int) float64 { return 60 }), notes: []string{"column-named-otherwise"}},
	{file: "columns-look-swapped.csv", t: ramp(40, half), u: swappedU, y: swappedY, input: "unit", temp: "unit", notes: []string{"input-unit-unknown", "unit-unknown", "columns-look-swapped"}},
	{file: "coarse-closed-loop.csv", t: ramp(40, half), u: ramp(40, func(i int) float64 { return math.Round(100*(5+2*math.Sin(float64(i)/9))+float64(i)) / 100 }),
		y: ramp(40, func(i int) float64 { return []float64{24, 26}[i/20] })},
	{file: "factor-in-name.csv", wrong: `column "outlet x10 (°C)" names a factor beside its unit: export the temperature without it, or, if its values are in that unit as they are, say so with --temp-unit`},
	{file: "factor-in-name.csv", o: Options{TempUnit: "C"}, y: ramp(8, func(i int) float64 { return math.Round(10 * baseY[i]) })},
	{file: "factor-tenth.csv", wrong: `column "outlet in 0,1 °C" names a factor beside its unit`},
	{file: "factor-input.csv", wrong: `column "drive*100 [V]" names a factor beside its unit: export the input without it, or, if its values are in that unit as they are, say so with --input-unit`},

	// units and readings that cannot be
	{file: "unit-columns.csv", notes: []string{"unit-column"}},
	{file: "unit-columns-named.csv", notes: []string{"unit-column"}},
	{file: "unit-columns-blank.csv", notes: []string{"unit-column"}},
	{file: "unit-columns-prefix.csv", notes: []string{"unit-column"}},
	{file: "unit-columns-change.csv", wrong: `unit-columns-change.csv:8: column "outlet_unit" goes from degC to "degF" here, and column "outlet" with it: cut the log in two, or export it in one unit`},
	{file: "unit-columns-against-name.csv", wrong: `column "outlet_degC" is in degC by its name and in degF by column "outlet_unit"`},
	{file: "unit-columns-against-name.csv", o: Options{TempUnit: "C"}},
	{file: "long-units-other-name.csv", notes: []string{"long-form"}},
	{file: "long-flag-of-one-letter.csv", input: "unit", temp: "unit", notes: []string{"long-form", "input-unit-unknown", "unit-unknown"}},
	{file: "flag-of-one-letter.csv", temp: "unit", notes: []string{"unit-unknown"}},
	{file: "phase-of-one-letter.csv", notes: []string{"time-unit-assumed"}},
	{file: "units-russian.csv", t: ramp(8, func(i int) float64 { return 30 * float64(i) })},
	{file: "units-misspelt.csv"},
	{file: "degree-alone.csv", temp: "°", notes: []string{"unit-unknown"}},
	{file: "thermocouple-type-or-kelvin.csv", wrong: `column "outlet_TC_K": K could be kelvin or the type of the thermocouple, and its lowest value of 24.1 K would be -249.05 °C: say which unit it is with --temp-unit C, F or K`},
	{file: "thermocouple-type-or-kelvin.csv", o: Options{TempUnit: "C"}, notes: []string{"unit-named-otherwise"}},
	{file: "kelvin-too-cold.csv", wrong: `column "outlet (K)": K could be kelvin or the type of the thermocouple`},
	{file: "kelvin-hot-type.csv", wrong: `column "outlet (K)": K could be kelvin or the type of the thermocouple, and its lowest value of 24.1 K would be -249.05 °C`},
	{file: "thermocouple-numbered.csv", wrong: `column "TC1_K": K could be kelvin or the type of the thermocouple, and its lowest value of 297.25 K`},
	{file: "thermocouple-in-kelvin.csv", within: 1e-12, notes: []string{"kelvin-or-type"}},
	{file: "temperature-difference.csv", wrong: `column "rise (K)" seems to be a difference: a temperature of 0.1 K would be -273.05 °C; name the column of the temperature itself with --temp-col`},
	{file: "percent-below-one.csv", u: []float64{0, 0, 0.15, 0.15, 0.15, 0.15, 0.15, 0.15}, within: 1e-15, input: "%", notes: []string{"percent-below-one"}},
	{file: "temperature-thousands.csv", wrong: `column "outlet_degC" holds no temperature (8 cells are above 3500 °C): is a decimal mark, a factor of ten, the unit or the sign of a 16-bit number lost in the export?`},
	{file: "temperature-16-bit.csv", y: []float64{nan, nan, nan, nan, nan, 13, 26, 38}, missing: map[string]int{"above 3500 °C": 5}},
	{file: "temperature-bytes.csv", y: with(baseY, 3, nan), missing: map[string]int{"no reading, below 1e-30": 1}},
}

var (
	swappedU = ramp(40, func(i int) float64 {
		y := 24.1
		if i >= 10 {
			y += 20 * (1 - math.Exp(-float64(i-9)/12))
		}
		return math.Round(100*y+float64(i*i%7)) / 100
	})
	swappedY = ramp(40, func(i int) float64 { return []float64{0, 1.5}[min(1, i/10)] })
)
