package tune

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"lagwright/data"
)

// Spelling is the way a controller wants its numbers. The zero value is gain
// and integral time in engineering units and seconds.
type Spelling struct {
	Band    bool // proportional band instead of gain
	Rate    bool // integral as repeats per time instead of time
	Minutes bool // minutes instead of seconds

	// Both spans together: gains in percent of output span per percent of
	// measurement span. Each is a range in the gains' own units.
	InputSpan, TempSpan *data.Span
}

// Entry is one number as it is entered at the controller.
type Entry struct {
	Name  string  `json:"name"`
	Value float64 `json:"value"`
	Unit  string  `json:"unit"`
}

// Convert returns the same controller in another form, with the numbers as
// entered in Entry. The loop does not change: what has no exact counterpart is
// refused (a series form needs Ti ≥ 4·Td, see [NoSeriesError]). Setpoint
// weight, filter, limits and judgement are carried along.
func Convert(g *Gains, form string, s Spelling) (*Gains, error) {
	c, err := g.law()
	if err != nil {
		return nil, err
	}
	out := *g
	switch form {
	case Ideal, Parallel:
	case Series:
		if c, err = toSeries(c); err != nil {
			return nil, err
		}
	default:
		return nil, fmt.Errorf("form %q: use %s, %s or %s", form, Ideal, Parallel, Series)
	}
	out.Form, out.Kc, out.SetpointWeight = form, c.kc, c.b
	out.Ti, out.Td = nil, nil
	if c.integral() {
		out.Ti = &c.ti
	}
	if g.Td != nil {
		out.Td = &c.td
	}
	if out.Entry, err = out.spell(s); err != nil {
		return nil, err
	}
	return &out, nil
}

// completed gives a span of 0 to 100 % to an input in percent where the
// temperature has one.
func (s Spelling) completed(u GainUnits) Spelling {
	if s.InputSpan == nil && s.TempSpan != nil && u.Input == "%" {
		s.InputSpan = &data.Span{Low: 0, High: 100, Unit: "%"}
	}
	return s
}

// scale returns what one gain unit is worth in a completed spelling, with the
// units of input and temperature there.
func (s Spelling) scale(u GainUnits) (factor float64, input, temperature string, err error) {
	if s.InputSpan == nil && s.TempSpan == nil {
		if s.Band {
			return 0, "", "", fmt.Errorf("a proportional band is a part of the temperature's span for the whole span of the output: give --temp-span and --input-span")
		}
		return 1, orUnit(u.Input, "input"), orUnit(perKelvin(u.Temperature), "K"), nil
	}
	if s.InputSpan == nil || s.TempSpan == nil {
		return 0, "", "", fmt.Errorf("percent gains need both spans: give --input-span and --temp-span")
	}
	if unit := s.InputSpan.Unit; unit != "" && u.Input != "" && unit != u.Input {
		return 0, "", "", fmt.Errorf("the input's span is in %s but the gains are for an input in %s: give the span in %s", unit, u.Input, u.Input)
	}
	in, temp := s.InputSpan.High-s.InputSpan.Low, s.TempSpan.High-s.TempSpan.Low
	switch strings.TrimPrefix(strings.TrimPrefix(s.TempSpan.Unit, "°"), "deg") {
	case "", "C", "K", u.Temperature:
	case "F": // a degree Fahrenheit is 5/9 K
		if u.Temperature == "degC" || u.Temperature == "K" {
			temp *= 5.0 / 9
		}
	default:
		return 0, "", "", fmt.Errorf("the temperature's span is in %s: give it in C, K or F", s.TempSpan.Unit)
	}
	if !(in > 0 && temp > 0) || !isFinite(in) || !isFinite(temp) {
		return 0, "", "", fmt.Errorf("spans %g..%g and %g..%g: the second number must be the larger", s.InputSpan.Low, s.InputSpan.High, s.TempSpan.Low, s.TempSpan.High)
	}
	return temp / in, "%", "%", nil
}

func orUnit(unit, otherwise string) string {
	if unit == "" {
		return otherwise
	}
	return unit
}

// spanWords writes a span of temperature down.
func spanWords(s *data.Span, unit string) string {
	if u := strings.TrimPrefix(strings.TrimPrefix(s.Unit, "°"), "deg"); u == "C" || u == "F" {
		unit = "deg" + u
	}
	return strings.TrimSpace(fmt.Sprintf("%s to %s %s", figure(&s.Low, 4), figure(&s.High, 4), unit))
}

// perKelvin is the unit of a temperature difference.
func perKelvin(unit string) string {
	if unit == "degC" {
		return "K"
	}
	return unit
}

// spell writes the gains in their form the way a controller wants them.
func (g *Gains) spell(s Spelling) ([]Entry, error) {
	s = s.completed(g.Units)
	factor, in, temp, err := s.scale(g.Units)
	if err != nil {
		return nil, err
	}
	spans := s.InputSpan != nil && s.TempSpan != nil
	second, clock := 1.0, "s"
	if s.Minutes {
		second, clock = 60, "min"
	}
	kc := g.Kc * factor
	out := []Entry{{"gain", kc, in + "/" + temp}}
	switch {
	case s.Band && spans:
		out[0] = Entry{"proportional band", 100 / math.Abs(kc), "% of " + spanWords(s.TempSpan, g.Units.Temperature)}
	case s.Band:
		return nil, fmt.Errorf("a proportional band is a percentage of the measurement span: give --input-span and --temp-span")
	}
	if g.Form == Parallel && s.Band {
		return nil, fmt.Errorf("the parallel form has separate gains, no proportional band")
	}
	if g.Form == Parallel {
		out[0].Name = "proportional gain"
	}
	if g.Ti != nil {
		switch ti := *g.Ti / second; {
		case g.Form == Parallel:
			out = append(out, Entry{"integral gain", kc / ti, in + "/(" + temp + "·" + clock + ")"})
		case s.Rate:
			out = append(out, Entry{"integral rate", 1 / ti, "repeats/" + clock})
		default:
			out = append(out, Entry{"integral time", ti, clock})
		}
	}
	if g.Td != nil {
		td := *g.Td / second
		if g.Form == Parallel {
			out = append(out, Entry{"derivative gain", kc * td, in + "·" + clock + "/" + temp})
		} else {
			out = append(out, Entry{"derivative time", td, clock})
		}
	}
	if g.Filter > 0 {
		out = append(out, Entry{"measurement filter", g.Filter / second, clock})
	}
	out = append(out, Entry{"setpoint weight", g.SetpointWeight, ""})
	if g.Ti == nil {
		bias, unit := g.Bias, orUnit(g.Units.Input, "input")
		if spans {
			bias, unit = 100*(g.Bias-s.InputSpan.Low)/(s.InputSpan.High-s.InputSpan.Low), "%"
		}
		out = append(out, Entry{"bias", bias, unit})
	}
	return out, nil
}

// FromEntries returns gains from the numbers that stand in a controller, the
// inverse of what [Convert] puts into Entry. A proportional band has no sign:
// action says it ("direct" for an output that rises with the temperature).
func FromEntries(entries []Entry, form, action string, u GainUnits, s Spelling) (*Gains, error) {
	s = s.completed(u)
	factor, _, _, err := s.scale(u)
	if err != nil {
		return nil, err
	}
	second := 1.0
	if s.Minutes {
		second = 60
	}
	find := func(name string) (float64, bool) {
		i := slices.IndexFunc(entries, func(e Entry) bool { return e.Name == name })
		if i < 0 {
			return 0, false
		}
		return entries[i].Value, true
	}
	g := &Gains{Schema: GainsSchema, Controller: "p", Form: form, SetpointWeight: 1, Action: action, Units: u}
	kc, ok := find("gain")
	if !ok {
		kc, ok = find("proportional gain")
	}
	if band, has := find("proportional band"); !ok && has {
		kc, ok = 100/band, true
		if action == "direct" {
			kc = -kc
		}
	}
	if !ok {
		return nil, fmt.Errorf("no gain among the entries: give a gain or a proportional band")
	}
	time := func(name, rate, gain string, fromGain func(float64) float64) *float64 {
		v, ok := find(name)
		if r, has := find(rate); !ok && has {
			v, ok = 1/r, true
		}
		if k, has := find(gain); !ok && has {
			v, ok = fromGain(k), true
		}
		if !ok {
			return nil
		}
		v *= second
		return &v
	}
	g.Ti = time("integral time", "integral rate", "integral gain", func(ki float64) float64 { return kc / ki })
	g.Td = time("derivative time", "", "derivative gain", func(kd float64) float64 { return kd / kc })
	if f, ok := find("measurement filter"); ok {
		g.Filter = f * second
	}
	if b, ok := find("setpoint weight"); ok {
		g.SetpointWeight = b
	}
	if b, ok := find("bias"); ok {
		g.Bias = b
		if s.InputSpan != nil {
			g.Bias = s.InputSpan.Low + b/100*(s.InputSpan.High-s.InputSpan.Low)
		}
	}
	g.Kc = kc / factor
	switch {
	case g.Td != nil:
		g.Controller = "pid"
	case g.Ti != nil:
		g.Controller = "pi"
	}
	if _, err := g.law(); err != nil {
		return nil, err
	}
	return g, nil
}
