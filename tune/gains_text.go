package tune

import (
	"errors"
	"fmt"
	"regexp"
	"strconv"
	"strings"
	"sync"
)

// WrittenOut tells gains written out, as [ParseGains] reads them, from the
// name of a file: they begin with a word and an equals sign, such as kc=.
func WrittenOut(text string) bool {
	return settingFirst().MatchString(text) && !strings.HasSuffix(text, ".json")
}

var (
	settingFirst = sync.OnceValue(func() *regexp.Regexp {
		return regexp.MustCompile(`^\s*[A-Za-z]+\s*=`)
	})
	decimalComma = sync.OnceValue(func() *regexp.Regexp {
		return regexp.MustCompile(`=\s*[-+]?\d+,\d`)
	})
)

// perFahrenheit is the text of a gain per °F without its /°F.
func perFahrenheit(text string) (string, bool) {
	for _, unit := range []string{"/°F", "/degF", "/F"} {
		if number, ok := strings.CutSuffix(strings.TrimSpace(text), unit); ok {
			return number, true
		}
	}
	return "", false
}

// ParseGains reads gains written out for a heater with the units u, such as
//
//	kc=0.4V/K,ti=12s
//	kc=0.4V/K,ti=12s,td=3s,filter=300ms,form=series,scan=100ms,min=0V,max=10V
//	kc=0.4V/K,bias=4V
//
// What is left out stands as in a gains file: ideal form, setpoint weight 1,
// continuous, no limits. Gain and times must carry their unit; td needs its
// filter (0s for none) and P control its bias, since without them the loop
// might be another one than was meant.
func ParseGains(text string, u GainUnits) (*Gains, error) {
	g := &Gains{Schema: GainsSchema, Form: Ideal, SetpointWeight: 1, Units: u}
	given := map[string]bool{}
	if decimalComma().MatchString(text) {
		return nil, fmt.Errorf("write decimals with a point, as in %s: a comma parts the settings", u.example())
	}
	for part := range strings.SplitSeq(text, ",") {
		key, value, ok := strings.Cut(part, "=")
		name := settingName(key)
		read, known := settings[name]
		switch {
		case !ok:
			return nil, fmt.Errorf("%q is no setting: write %s", strings.TrimSpace(part), u.example())
		case !known:
			return nil, fmt.Errorf("%q is no setting: %s", strings.TrimSpace(key), u.instead(name))
		case given[name]:
			return nil, fmt.Errorf("%s is given twice", name)
		}
		given[name] = true
		if err := read(g, strings.TrimSpace(value)); err != nil {
			return nil, fmt.Errorf("%s: %w", name, err)
		}
	}
	if err := missingSetting(given, u); err != nil {
		return nil, err
	}
	return g, g.check()
}

// settingName is the name of a setting however it is written.
func settingName(key string) string {
	name := strings.ToLower(strings.TrimSpace(key))
	if name == "kp" {
		return "kc"
	}
	return name
}

// settings read the value of each setting.
var settings = map[string]func(g *Gains, value string) error{
	"kc": func(g *Gains, s string) (err error) {
		if number, ok := perFahrenheit(s); ok && strings.HasSuffix(g.Units.gain(), "/K") {
			g.Kc, err = inUnit(number+"/K", g.Units.gain(), true)
			g.Kc *= 1.8 // a kelvin is 1.8 °F
			return err
		}
		g.Kc, err = inUnit(s, g.Units.gain(), true)
		return err
	},
	"ti":     func(g *Gains, s string) error { return timeInto(&g.Ti, s) },
	"td":     func(g *Gains, s string) error { return timeInto(&g.Td, s) },
	"filter": func(g *Gains, s string) (err error) { g.Filter, err = timeOf(s); return err },
	"scan":   func(g *Gains, s string) (err error) { g.Scan, err = timeOf(s); return err },
	"form":   func(g *Gains, s string) error { g.Form = strings.ToLower(s); return nil },
	"weight": func(g *Gains, s string) (err error) { g.SetpointWeight, err = inUnit(s, "", false); return err },
	"bias": func(g *Gains, s string) (err error) {
		g.Bias, err = inUnit(s, unitWords(g.Units.Input), false)
		return err
	},
	"min":        func(g *Gains, s string) error { return inputInto(&g.Limits.Min, s, g.Units, "") },
	"max":        func(g *Gains, s string) error { return inputInto(&g.Limits.Max, s, g.Units, "") },
	"rate":       func(g *Gains, s string) error { return inputInto(&g.Limits.Rate, s, g.Units, "/s") },
	"resolution": func(g *Gains, s string) error { return inputInto(&g.Limits.Resolution, s, g.Units, "") },
}

// missingSetting says which setting the loop cannot be told without.
func missingSetting(given map[string]bool, u GainUnits) error {
	switch {
	case !given["kc"]:
		return fmt.Errorf("the gain is missing: write %s", u.example())
	case given["td"] && !given["ti"]:
		return errors.New("td without ti: give the integral time too")
	case given["td"] && !given["filter"]:
		return errors.New("td without filter: give the time of the measurement filter, filter=0s where there is none")
	case !given["ti"] && !given["bias"]:
		return fmt.Errorf("neither ti nor bias: give ti, or for P control the output at no error, such as bias=4%s", unitWords(u.Input))
	case given["ti"] && given["bias"]:
		return errors.New("bias is for P control: with ti the integral takes its place")
	}
	return nil
}

// gain is the unit of the gain, "" where one of its parts is not known.
func (u GainUnits) gain() string {
	if u.Input == "" || u.Temperature == "" {
		return ""
	}
	return unitWords(u.Input) + "/" + unitWords(perKelvin(u.Temperature))
}

// example is a complete set of gains written out.
func (u GainUnits) example() string { return "kc=0.4" + u.gain() + ",ti=12s" }

// instead says what to give in place of a number that is no setting here.
func (u GainUnits) instead(name string) string {
	switch name {
	case "ki":
		return "give ti, which is kp/ki"
	case "kd":
		return "give td, which is kd/kp"
	case "pb":
		return "give kc, which is 100/pb times the output's span over the temperature's, in " + orUnit(u.gain(), "input units per degree")
	}
	return "use kc, ti, td, filter, form, weight, bias, scan, min, max, rate, resolution"
}

// inUnit reads a number with its unit, which only must be there where demanded.
func inUnit(text, unit string, demanded bool) (float64, error) {
	end := len(text)
	var v float64
	for ; end > 0; end-- {
		x, err := strconv.ParseFloat(text[:end], 64)
		if err == nil && isFinite(x) && !strings.ContainsAny(text[:end], "_xXpP") {
			v = x
			break
		}
	}
	rest := strings.TrimSpace(text[end:])
	switch {
	case end == 0:
		return 0, fmt.Errorf("%q is no number", text)
	case rest == "" && demanded && unit != "":
		return 0, fmt.Errorf("%s has no unit: for this heater write %s%s", text, text, unit)
	case rest != "" && unit != "" && !sameUnit(rest, unit):
		return 0, fmt.Errorf("%s is not in %s, the unit for this heater", text, unit)
	case rest != "" && unit == "" && !demanded:
		return 0, fmt.Errorf("%q is no number", text)
	}
	return v, nil
}

// sameUnit compares units however they are written; a degree Celsius is a
// kelvin where temperatures are subtracted.
func sameUnit(a, b string) bool {
	plainly := strings.NewReplacer(" ", "", "°C", "K", "degC", "K", "/C", "/K", "percent", "%", "sec", "s").Replace
	return strings.EqualFold(plainly(a), plainly(b))
}

func inputInto(to **float64, text string, u GainUnits, per string) error {
	unit := unitWords(u.Input)
	if unit != "" {
		unit += per
	}
	v, err := inUnit(text, unit, false)
	*to = &v
	return err
}

func timeInto(to **float64, text string) error {
	v, err := timeOf(text)
	*to = &v
	return err
}

// InWords says the gains in one line, with what stands where nothing was given.
func (g *Gains) InWords() string {
	parts := []string{kindWords(g.Controller), g.Form + " form", "Kc " + quantity(g.Kc, g.Units.gain(), 6)}
	say := func(name string, v *float64, unit string) {
		if v != nil {
			parts = append(parts, name+" "+quantity(*v, unit, 6))
		}
	}
	say("Ti", g.Ti, "s")
	say("Td", g.Td, "s")
	if g.Td != nil || g.Filter > 0 {
		say("filter", &g.Filter, "s")
	}
	if g.Ti == nil {
		say("bias", &g.Bias, g.Units.Input)
	}
	say("setpoint weight", &g.SetpointWeight, "")
	if g.Scan > 0 {
		say("scan", &g.Scan, "s")
	} else {
		parts = append(parts, "continuous")
	}
	say("output from", g.Limits.Min, g.Units.Input)
	say("output to", g.Limits.Max, g.Units.Input)
	say("output rate", g.Limits.Rate, g.Units.Input+"/s")
	say("output in steps of", g.Limits.Resolution, g.Units.Input)
	if g.Limits == (Limits{}) {
		parts = append(parts, "no output limits")
	}
	return strings.Join(parts, ", ")
}
