package data

import (
	"fmt"
	"math"
	"strings"
)

// convert brings input and temperatures to the units that everything after
// this package works in.
func (r *rows) convert(run *Run, info *reading, o *Options) error {
	if err := r.convertInput(run, info, o); err != nil {
		return err
	}
	return r.convertTemps(run, info, o)
}

func (r *rows) convertInput(run *Run, info *reading, o *Options) error {
	unit := info.unit(roleInput)
	if o.InputUnit != "" {
		unit = unitOption(o.InputUnit)
		if info.switched() && unit != "%" {
			return fmt.Errorf("column %q holds words such as ON and OFF, which are read as 100 and 0 %%: instead of --input-unit %s say what 0 and 100 %% are, such as --input-span 0..230V",
				info.label(roleInput), o.InputUnit)
		}
		r.noteUnit(info, roleInput, unit, "--input-unit "+o.InputUnit)
	}
	if unit != "" {
		if err := refuseFactor(info.label(roleInput), roleInput, o.InputUnit != "" || o.InputSpan != nil); err != nil {
			return err
		}
	}
	run.Units.Input = unit
	u := r.v[roleInput]
	if unit == "%" && o.InputUnit == "" && !info.switched() {
		r.notes = append(r.notes, notePercent(u, info.label(roleInput))...)
	}
	switch {
	case unit == "mA" && o.InputSpan != nil:
		if err := spanOK(o.InputSpan, "--input-span"); err != nil {
			return err
		}
		r.setFaultCurrentsAside(u)
		scale(u, 4, 20, o.InputSpan.Low, o.InputSpan.High)
		run.Units.Input = spanUnit(o.InputSpan, "V")
	case unit == "%" && o.InputSpan != nil && spanUnit(o.InputSpan, "V") != "%":
		if err := spanOK(o.InputSpan, "--input-span"); err != nil {
			return err
		}
		scale(u, 0, 100, o.InputSpan.Low, o.InputSpan.High)
		run.Units.Input = spanUnit(o.InputSpan, "V")
	case unit == "mV":
		scale(u, 0, 1000, 0, 1)
		run.Units.Input = "V"
	case unit == "kV":
		scale(u, 0, 1, 0, 1000)
		run.Units.Input = "V"
	case unit == "":
		run.Units.Input = unitless
		r.notes = append(r.notes, Note{Code: "input-unit-unknown",
			Text: fmt.Sprintf("column %q names no unit; the gain is per unit of it (say the unit with --input-unit)", info.label(roleInput))})
	}
	return nil
}

// noteUnit says that a flag gives a column another unit than the file does.
func (r *rows) noteUnit(info *reading, x role, given, flag string) {
	if own := info.unit(x); own != "" && own != given {
		r.notes = append(r.notes, Note{Code: "unit-named-otherwise",
			Text: fmt.Sprintf("column %q is in %s as the file has it, and read in %s because of %s", info.label(x), ShownUnit(own), ShownUnit(given), flag)})
	}
}

func (r *rows) convertTemps(run *Run, info *reading, o *Options) error {
	unit := info.unit(roleTemp)
	if o.TempUnit != "" {
		unit = unitOption(o.TempUnit)
		r.noteUnit(info, roleTemp, unit, "--temp-unit "+o.TempUnit)
	}
	y := r.v[roleTemp]
	if unit != "" {
		if err := refuseFactor(info.label(roleTemp), roleTemp, o.TempUnit != "" || o.TempSpan != nil); err != nil {
			return err
		}
	}
	if unit == "K" && o.TempUnit == "" {
		notes, err := kelvinOrType(y, info.label(roleTemp))
		if err != nil {
			return err
		}
		r.notes = append(r.notes, notes...)
	}
	switch {
	case unit == "mV":
		if err := r.convertThermocouple(info, o); err != nil {
			return err
		}
		run.Units.Temperature = "degC"
	case (unit == "mA" || unit == "%") && o.TempSpan != nil:
		if err := spanOK(o.TempSpan, "--temp-span"); err != nil {
			return err
		}
		lo, hi := 0.0, 100.0
		if unit == "mA" {
			lo, hi = 4, 20
			r.setFaultCurrentsAside(y)
		}
		scale(y, lo, hi, o.TempSpan.Low, o.TempSpan.High)
		run.Units.Temperature = toCelsius(y, spanUnit(o.TempSpan, "degC"))
	default:
		degrees := unit == "degC" || unit == "degF" || unit == "K"
		run.Units.Temperature = toCelsius(y, unit)
		if o.TempSpan != nil {
			ends := []float64{o.TempSpan.Low, o.TempSpan.High}
			if degrees { // else in whatever the column is in
				toCelsius(ends, spanUnit(o.TempSpan, unit))
			}
			r.setFullScaleAside(y, ends[0], ends[1])
		}
		if unit == "degF" {
			r.notes = append(r.notes, Note{Code: "fahrenheit",
				Text: "the temperature is logged in °F; everything is told in °C and K, gains too: a controller that works in °F needs 5/9 of a gain in V/K"})
		}
		if !degrees {
			r.notes = append(r.notes, Note{Code: "unit-unknown",
				Text: fmt.Sprintf("the unit of column %q is not known as a unit of temperature; its values stay as they are (say C, F or K with --temp-unit)", info.label(roleTemp))})
		}
	}
	if run.Units.Temperature == "degC" {
		r.setImpossibleAside(y)
	}
	for _, x := range []role{roleSetpoint, roleInlet} {
		own := info.unit(x)
		if own != "degC" && own != "degF" && own != "K" {
			own = unit
		}
		toCelsius(r.v[x], own)
	}
	return nil
}

// toCelsius converts degF and K to degC in place and returns the unit the
// values have afterwards.
func toCelsius(v []float64, unit string) string {
	switch unit {
	case "degC":
	case "degF":
		for i := range v {
			v[i] = (v[i] - 32) / 1.8
		}
	case "K":
		for i := range v {
			v[i] -= 273.15
		}
	case "":
		return unitless
	default:
		return unit
	}
	return "degC"
}

// scale maps lo..hi to the range from..to, in place.
func scale(v []float64, lo, hi, from, to float64) {
	for i := range v {
		v[i] = from + (v[i]-lo)/(hi-lo)*(to-from)
	}
}

func spanOK(s *Span, flag string) error {
	if !(s.High > s.Low) || math.IsInf(s.High-s.Low, 0) {
		return fmt.Errorf("%s %v..%v: the upper end must be above the lower one", flag, s.Low, s.High)
	}
	return nil
}

func spanUnit(s *Span, usual string) string {
	if s.Unit == "" {
		return usual
	}
	return unitOption(s.Unit)
}

// Currents that signal a fault of the transmitter instead of a value: 3.6 mA
// and less, 21 mA and more (NAMUR NE 43, from memory).
const (
	faultLow  = 3.6
	faultHigh = 21
)

func (r *rows) setFaultCurrentsAside(v []float64) {
	for i, x := range v {
		if x <= faultLow || x >= faultHigh {
			kind := "current below 3.6 mA"
			if x >= faultHigh {
				kind = "current above 21 mA"
			}
			count(r.missing, kind, 1)
			v[i] = math.NaN()
		}
	}
}

// setFullScaleAside makes missing the readings at or beyond the ends of the
// instrument's range, where it shows its limit and no temperature.
func (r *rows) setFullScaleAside(y []float64, low, high float64) {
	for i, x := range y {
		if x >= high || x < low {
			kind := "full scale"
			if x < low {
				kind = "below scale"
			}
			count(r.missing, kind, 1)
			y[i] = math.NaN()
		}
	}
}

// spanCure says that a span set readings aside, for a log that lost them all.
func spanCure(missing map[string]int, o *Options) string {
	if o.TempSpan == nil || missing["full scale"]+missing["below scale"] == 0 {
		return ""
	}
	return fmt.Sprintf(": --temp-span %g..%g%s sets aside what lies at its upper end or outside; give the span that the instrument really has, or leave --temp-span out",
		o.TempSpan.Low, o.TempSpan.High, o.TempSpan.Unit)
}

// convertThermocouple turns the voltage of a thermocouple into temperature:
// the voltage its reference junction would give is added, and the reference
// function of its type is solved for the sum.
func (r *rows) convertThermocouple(info *reading, o *Options) error {
	label := info.label(roleTemp)
	letter, ok := typeInName(label)
	if o.Thermocouple != "" {
		letter, ok = strings.ToUpper(o.Thermocouple)[0], len(o.Thermocouple) == 1
	}
	if !ok {
		return fmt.Errorf("column %q is in mV: say the type of the thermocouple (B E J K N R S T) with --thermocouple", label)
	}
	tc, err := newThermocouple(letter)
	if err != nil {
		return err
	}
	cold := r.v[roleCold]
	if cold == nil {
		return fmt.Errorf("column %q is in mV: say which column holds the temperature of the reference junction with %s", label, flags[roleCold])
	}
	toCelsius(cold, info.unit(roleCold))
	hold(cold)
	y := r.v[roleTemp]
	for i, e := range y {
		if e != e {
			continue
		}
		if y[i] = tc.temperature(e + tc.emf(cold[i])); y[i] != y[i] {
			count(r.missing, "outside the thermocouple's range", 1)
		}
	}
	return nil
}
