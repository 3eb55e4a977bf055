package data

// tableQuirks are logs whose columns or rows do not stand as in most.
var tableQuirks = []quirk{
	// a clock for each channel
	{file: "clock-for-each-channel-same.csv", notes: []string{"time-unit-assumed"}},
	{file: "clock-for-each-channel-same-stamps.csv", start: janStart},
	{file: "clock-for-each-channel-same-name.csv"},
	{file: "clock-for-each-channel.csv", wrong: `columns "t1" (0, 0.5, 1), "t2" (0.2, 0.7, 1.2) are two clocks that differ ("0" and "0.2" in line 2), as where every channel has its own: export the channels on one clock, or as rows of time, tag and value; if the difference does not matter, say which to use with --time-col`},
	{file: "clock-for-each-channel.csv", o: Options{TimeCol: "t2"}, notes: []string{"time-unit-assumed"}},
	{file: "clock-for-each-channel-named.csv", wrong: `columns "column 1" called "Time (s)" (0, 0.5, 1), "column 3" called "Time (s)" (0.2, 0.7, 1.2) are two clocks that differ`},
	{file: "clock-for-each-channel-named.csv", o: Options{TimeCol: "column 3"}},
	{file: "clock-for-each-channel-stamps.csv", wrong: `columns "drive time" (2026-01-25T10:00:00.000Z, 2026-01-25T10:00:00.500Z, 2026-01-25T10:00:01.000Z), "outlet time"`},
	{file: "clock-for-each-channel-late.csv", wrong: `are two clocks that differ ("1001.0" and "1001.1" in line 2004)`},
	{file: "two-names-alike.csv", wrong: `2 columns could be the temperature: "column 3" called "temp_degC" (24.1, 24.1, 24.2), "column 4" called "temp_degC" (25.1, 25.1, 25.2); say which with --temp-col`},
	{file: "two-names-alike.csv", o: Options{TempCol: "column 3"}},

	// one signal a row
	{file: "transposed.csv", wrong: `transposed.csv: the table seems to hold one signal in each row ("time_s", "drive_V", "outlet_degC") and one instant in each column: turn it round (in a spreadsheet: copy, paste special, transpose) and save it as CSV`},
	{file: "transposed-units.csv", wrong: `one signal in each row ("Zeit", "Ansteuerung", "Austritt")`},
	{file: "transposed-stamps.csv", wrong: `one signal in each row ("time", "drive_V", "outlet_degC")`},
	{file: "transposed-no-names.csv", wrong: "say which with --input-col; the table has 3 rows and 8 columns: if each row holds a signal, turn it round"},
}
