package data

// numberQuirks are logs whose numbers are spelled in a less usual way.
var numberQuirks = []quirk{
	{file: "decimals-quoted-beside-whole.csv", t: ramp(8, func(i int) float64 { return float64(i) })},
	{file: "brackets-mark.csv", wrong: `brackets-mark.csv:5: column "outlet_degC" holds (24.6) beside 24.2: round brackets stand for a minus, or mark a value: export without them, or with the minus in front`},
	{file: "brackets-mark-input.csv", wrong: `brackets-mark-input.csv:5: column "drive_V" holds (1.5) beside 1.5`},
	{file: "brackets-mark-long.csv", wrong: `tag "outlet_degC": column "outlet_degC" holds (24.6) beside 24.2`},
	{file: "brackets-beside-minus.csv", wrong: `column "outlet_degC" holds (5) beside -4`},
	{file: "brackets-through-zero.csv", y: []float64{-5, -4, -3, -1, 1, 2, 4, 5}, notes: []string{"minus-brackets"}},
	{file: "minus-behind.csv", y: negative(baseY), notes: []string{"minus-behind"}},
	{file: "minus-behind-comma.csv", y: around26, notes: []string{"minus-behind"}},
	{file: "minus-brackets.csv", y: around26, notes: []string{"minus-brackets"}},
	{file: "minus-apart.csv", y: around26},
	{file: "minus-dash.csv", y: around26},
	{file: "thousands-india.csv", u: with(ramp(8, func(int) float64 { return 150000.5 }), 0, 0.5, 1, 0.5), input: "W"},
	{file: "thousands-no-break.csv", u: with(ramp(8, func(int) float64 { return 1500.5 }), 0, 0.5, 1, 0.5), input: "W"},
	{file: "thousands-with-unit.csv", u: times1500(baseU), input: "W"},
	{file: "exponent-d.csv"},
	{file: "unit-changes.csv"},
	{file: "long-unit-changes.csv", notes: []string{"long-form"}},
	{file: "unit-changes-not.csv", wrong: `unit-changes-not.csv:4: the input is "15 %", which is no number as the rest of the column writes them, here and in 5 more rows`},
	{file: "input-other-mark.csv", wrong: `column "drive_V" is the input by its name, but most of its cells (0.0, 0.0, 1,5) are no numbers`},
	{file: "input-other-mark-late.csv", wrong: `input-other-mark-late.csv:7: the input is "2,5", which is no number`},
}

// around26 is the base less 26, of both signs.
var around26 = []float64{-1.9, -1.9, -1.8, -1.4, -0.1, 1.3, 2.6, 3.8}

func negative(v []float64) []float64 {
	return ramp(len(v), func(i int) float64 { return -v[i] })
}
