package tune

import (
	"bufio"
	"math"
	"math/cmplx"
	"os"
	"strconv"
	"strings"
	"testing"

	"lagwright/ident"
)

// A published is a line of testdata/published.csv, where the sources are.
type published struct {
	source, figure     string
	inputs             map[string]string
	printed, tolerance float64
	exact              float64 // differs from printed where the print is wrong
	wrong              bool
}

func readPublished(t *testing.T) []published {
	t.Helper()
	f, err := os.Open("testdata/published.csv")
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	var out []published
	for s := bufio.NewScanner(f); s.Scan(); {
		cells := strings.Split(s.Text(), ",")
		if strings.HasPrefix(cells[0], "#") || cells[0] == "source" {
			continue
		}
		p := published{source: cells[0], figure: cells[1], inputs: map[string]string{}, printed: number(t, cells[3]), tolerance: number(t, cells[4])}
		for _, kv := range strings.Fields(cells[2]) {
			k, v, _ := strings.Cut(kv, "=")
			p.inputs[k] = v
		}
		p.exact = p.printed
		if cells[5] != "" {
			v, _, _ := strings.Cut(cells[5], ":")
			p.exact, p.wrong = number(t, v), true
		}
		out = append(out, p)
	}
	return out
}

func number(t *testing.T, s string) float64 {
	t.Helper()
	v, err := strconv.ParseFloat(s, 64)
	if err != nil {
		t.Fatal(err)
	}
	return v
}

func (p published) list(t *testing.T, key string) []float64 {
	t.Helper()
	var out []float64
	for _, v := range strings.Split(p.inputs[key], "|") {
		if v != "" {
			out = append(out, number(t, v))
		}
	}
	return out
}

// value is a number among the inputs, 0 when absent.
func (p published) value(t *testing.T, key string) float64 {
	t.Helper()
	if p.inputs[key] == "" {
		return 0
	}
	return number(t, p.inputs[key])
}

// TestPublishedFigures recomputes every printed figure of the sources listed
// in testdata/published.csv.
func TestPublishedFigures(t *testing.T) {
	tested := map[string]int{}
	for _, p := range readPublished(t) {
		got, ok := recompute(t, p)
		if !ok {
			t.Errorf("%s %s %v: nothing computes this", p.source, p.figure, p.inputs)
			continue
		}
		tested[p.source]++
		switch {
		case p.wrong && math.Abs(got-p.printed) <= p.tolerance:
			t.Errorf("%s %s %v = %.6g agrees with the print %g, listed as wrong", p.source, p.figure, p.inputs, got, p.printed)
		case math.Abs(got-p.exact) > p.tolerance*(1+1e-9):
			t.Errorf("%s %s %v = %.8g, want %g ± %g", p.source, p.figure, p.inputs, got, p.exact, p.tolerance)
		}
	}
	for source, least := range map[string]int{"S03": 70, "HR": 7, "ITAE": 6, "SEB": 12, "EXAM": 15, "OGATA": 7, "AMIGO": 13, "STREJC": 15} {
		if tested[source] < least {
			t.Errorf("%s: %d figures tested, want %d or more", source, tested[source], least)
		}
	}
}

func recompute(t *testing.T, p published) (float64, bool) {
	t.Helper()
	switch {
	case p.inputs["reduce"] != "" && p.inputs["rule"] == "":
		lags, theta := p.reduced(t)
		return map[string]float64{"theta": theta, "tau1": lags[0], "tau2": lags[len(lags)-1]}[p.figure], true
	case p.inputs["reduce"] != "":
		lags, theta := p.reduced(t)
		c := simcSettings(p.value(t, "k"), lags, theta, theta)
		return setting(c, p.figure)
	case p.inputs["rule"] != "":
		return p.byRule(t)
	case p.inputs["read"] != "" || p.inputs["n"] != "":
		return p.byTangent(t)
	case p.figure == "Ku" || p.figure == "Pu":
		l := p.loop(t)
		w := l.phaseCross()
		return map[string]float64{"Ku": 1 / l.magnitude(w), "Pu": 2 * math.Pi / w}[p.figure], true
	case p.figure == "overshoot_pct":
		l := p.loop(t)
		return 100 * (l.stepPeak() - 1), true
	}
	l := p.loop(t)
	f := l.figures()
	v, ok := map[string]float64{"Ms": f.Ms, "Mt": f.Mt, "GM": f.GainMargin, "PM_deg": f.PhaseMargin}[p.figure]
	return v, ok && f.Stable
}

func setting(c law, figure string) (float64, bool) {
	v, ok := map[string]float64{"Kc": c.kc, "Ti": c.ti, "Td": c.td}[figure]
	return v, ok
}

// loop is the loop a line describes; without a controller, that with Kc = 1.
func (p published) loop(t *testing.T) *openLoop {
	t.Helper()
	if p.inputs["tau"] != "" {
		p.inputs["lags"], p.inputs["k"], p.inputs["delay"] = p.inputs["tau"], p.inputs["K"], p.inputs["theta"]
	}
	l := &openLoop{k: p.value(t, "k"), integrators: int(p.value(t, "ints")), delay: p.value(t, "delay"), lags: p.list(t, "lags"), zeros: p.list(t, "zeros")}
	if p.inputs["form"] == "I" {
		l.integrators++
		l.k *= p.value(t, "ki")
		return l
	}
	if p.inputs["Kc"] == "" {
		return l
	}
	c, err := toIdeal(pidLaw(p.value(t, "Kc"), p.value(t, "Ti"), p.value(t, "Td")), p.inputs["form"])
	if err != nil {
		t.Fatal(err)
	}
	l.integrators++
	l.k *= c.ki()
	l.q1, l.q2 = c.ti, c.ti*c.td
	return l
}

// reduced applies the half rule, an integrator counting as an endless lag.
func (p published) reduced(t *testing.T) ([]float64, float64) {
	t.Helper()
	order := 1
	if p.inputs["reduce"] == "half_rule_order2" {
		order = 2
	}
	lags := p.list(t, "lags")
	if p.value(t, "ints") == 1 {
		lags = append(lags, math.Inf(1))
	}
	var inverse []float64
	for _, z := range p.list(t, "zeros") {
		if z > 0 {
			t.Fatalf("the half rule here has no left half plane zeros: %v", p.inputs)
		}
		inverse = append(inverse, -z)
	}
	return halfRule(lags, inverse, p.value(t, "delay"), order)
}

func (p published) byRule(t *testing.T) (float64, bool) {
	t.Helper()
	if p.figure == "Ku" || p.figure == "Pu" {
		t.Fatal("not a setting")
	}
	if p.source == "OGATA" { // its plant has an integrator and lags
		l := p.loop(t)
		w := l.phaseCross()
		return setting(pidLaw(0.6/l.magnitude(w), math.Pi/w, math.Pi/w/4), p.figure)
	}
	name, kind := map[string][2]string{
		"Lopez_ITAE_load_PI": {"itae-load", "pi"}, "Rovira_ITAE_set-point_PI": {"itae-setpoint", "pi"},
		"Rovira_IAE_set-point_PI": {"iae-setpoint", "pi"}, "CC_PID": {"cohen-coon", "pid"},
		"AMIGO_PI": {"amigo", "pi"}, "AMIGO_PID": {"amigo", "pid"}, "ZN_ultimate_PID": {"zn-ultimate", "pid"},
		"ZN_step_PID_(series)": {"zn-step", "pid"}, "ZN_step_PID_series->ideal": {"zn-step", "pid"},
		"direct_synthesis": {"direct-synthesis", "pid"},
	}[p.inputs["rule"]][0], ""
	kind = "pi"
	if strings.Contains(p.inputs["rule"], "PID") || name == "direct-synthesis" {
		kind = "pid"
	}
	lags, k, theta := []float64{p.value(t, "tau")}, p.value(t, "K"), p.value(t, "theta")
	structure := "fopdt"
	if p.inputs["lags"] != "" {
		structure, lags, theta = "chain2", p.list(t, "lags"), p.value(t, "delay")
	}
	r := ruleNamed(t, name)
	// outside its range a rule refuses; its formula can still be checked
	c, _, err := r.settings(plant(t, structure, k, lags, theta), firstOrder{k: k, tau: lags[0], theta: theta}, kind, p.value(t, "tauc"))
	if err != nil {
		t.Fatal(err)
	}
	if p.inputs["rule"] == "ZN_step_PID_series->ideal" {
		if c, err = toIdeal(c, Series); err != nil {
			t.Fatal(err)
		}
	}
	return setting(c, p.figure)
}

func ruleNamed(t *testing.T, name string) Rule {
	t.Helper()
	for _, r := range rules {
		if r.Name == name {
			return r
		}
	}
	t.Fatalf("no rule %q", name)
	return Rule{}
}

// byTangent reads chains of equal lags.
func (p published) byTangent(t *testing.T) (float64, bool) {
	t.Helper()
	n := int(p.value(t, "n"))
	if n == 0 {
		n = len(p.list(t, "lags"))
	}
	chain := plant(t, "equal"+strconv.Itoa(n), 1, []float64{1}, 0)
	if p.inputs["read"] != "" {
		f := byTangentAnd63(chain)
		return map[string]float64{"theta": f.theta, "tau": f.tau}[p.figure], true
	}
	f := byTangent(chain)
	return map[string]float64{"Tu/T": f.theta, "Tg/T": f.tau, "Tu/Tg": f.theta / f.tau}[p.figure], true
}

// stepPeak is the peak of the unit step response of L/(1+L) without dead
// time, as the sum of the residues at its poles.
func (l *openLoop) stepPeak() float64 {
	poles := l.poles()
	best := 0.0
	for t := 0.0; t < 20; t += 1e-3 {
		y := 0.0
		for _, s := range poles {
			_, slope := l.characteristic(s)
			num := complex(l.k, 0) * (1 + s*complex(l.q1, 0) + s*s*complex(l.q2, 0))
			y += real(num / (s * slope) * cmplx.Exp(s*complex(t, 0)))
		}
		best = max(best, 1+y)
	}
	return best
}

// TestRulesAtOnePoint checks settings and exact Ms, gain and phase margin of
// every rule for K = 2, tau = 10, theta = 2, from the reference tables of
// this project (sources of the rules beside them in rules.go).
func TestRulesAtOnePoint(t *testing.T) {
	p := plant(t, "fopdt", 2, []float64{10}, 2)
	ku, pu, err := ultimate(p)
	if err != nil {
		t.Fatal(err)
	}
	near(t, "Ku", ku, 4.251212, 5e-7)
	near(t, "Pu", pu, 7.441523, 5e-7)
	for _, c := range []struct {
		rule, kind                   string
		tauC, kc, ti, td, ms, gm, pm float64
	}{
		{"zn-step", "p", 0, 2.5, 0, 0, 2.652, 1.700, 45.40},
		{"zn-step", "pi", 0, 2.25, 6.66667, 0, 2.948, 1.656, 31.24},
		{"zn-step", "pid", 0, 3, 4, 1, 3.339, 1.433, 41.02},
		{"zn-ultimate", "p", 0, 2.12561, 0, 0, 2.162, 2, 56.26},
		{"zn-ultimate", "pi", 0, 1.91305, 6.20127, 0, 2.427, 1.922, 36.22},
		{"zn-ultimate", "pid", 0, 2.55073, 3.72076, 0.93019, 2.354, 1.755, 39.84},
		{"cohen-coon", "p", 0, 2.66667, 0, 0, 2.944, 1.594, 40.78},
		{"cohen-coon", "pi", 0, 2.29167, 4.70769, 0, 3.759, 1.499, 21.99},
		{"cohen-coon", "pid", 0, 3.45833, 4.54795, 0.70175, 3.878, 1.376, 28.30},
		{"chr-setpoint-0", "p", 0, 0.75, 0, 0, 1.254, 5.668, 119.00},
		{"chr-setpoint-0", "pi", 0, 0.875, 12, 0, 1.355, 4.558, 75.15},
		{"chr-setpoint-0", "pid", 0, 1.5, 10, 1, 1.590, 2.722, 72.98},
		{"chr-setpoint-20", "p", 0, 1.75, 0, 0, 1.817, 2.429, 68.17},
		{"chr-setpoint-20", "pi", 0, 1.5, 10, 0, 1.773, 2.618, 55.62},
		{"chr-setpoint-20", "pid", 0, 2.375, 14, 0.94, 2.347, 1.757, 63.05},
		{"chr-load-0", "p", 0, 0.75, 0, 0, 1.254, 5.668, 119.00},
		{"chr-load-0", "pi", 0, 1.5, 8, 0, 1.828, 2.553, 50.61},
		{"chr-load-0", "pid", 0, 2.375, 4.8, 0.84, 2.126, 1.923, 45.56},
		{"chr-load-20", "p", 0, 1.75, 0, 0, 1.817, 2.429, 68.17},
		{"chr-load-20", "pi", 0, 1.75, 4.6, 0, 2.539, 1.948, 30.69},
		{"chr-load-20", "pid", 0, 3, 4, 0.84, 2.927, 1.540, 35.98},
		{"iae-load", "pi", 0, 2.40519, 5.27138, 0, 3.797, 1.474, 22.83},
		{"iae-load", "pid", 0, 3.15917, 3.41175, 0.77325, 3.147, 1.504, 28.34},
		{"itae-load", "pi", 0, 2.06946, 4.96639, 0, 3.006, 1.686, 27.47},
		{"itae-load", "pid", 0, 3.11512, 3.62116, 0.76816, 3.061, 1.523, 30.10},
		{"iae-setpoint", "pi", 0, 1.51514, 10.46682, 0, 1.777, 2.603, 56.19},
		{"iae-setpoint", "pid", 0, 2.19890, 14.00560, 0.79932, 2.010, 2.029, 63.43},
		{"itae-setpoint", "pi", 0, 1.27975, 10.03009, 0, 1.610, 3.069, 60.74},
		{"itae-setpoint", "pid", 0, 1.89506, 13.04291, 0.69057, 1.735, 2.452, 65.82},
		{"imc", "pi", 3.4, 1.61765, 11, 0, 1.853, 2.448, 54.70},
		{"imc", "pid", 1.6, 2.11538, 11, 0.90909, 2.006, 2.017, 64.87},
		{"lambda", "pi", 10, 0.41667, 10, 0, 1.159, 9.425, 80.45},
		{"lambda", "pi", 30, 0.15625, 10, 0, 1.058, 25.133, 86.42},
		{"dahlin", "pi", 0, 1.5, 10, 0, 1.773, 2.618, 55.62},
		{"dahlin", "pid", 0, 2.08333, 10, 1, 2.187, 1.862, 62.10},
		{"simc", "pi", 0, 1.25, 10, 0, 1.590, 3.142, 61.35},
		{"simc-improved", "pi", 0, 1.33333, 10.66667, 0, 1.638, 2.963, 60.87},
		{"simc-improved", "pid", 0, 1.66667, 10, 0.66667, 1.658, 2.665, 63.66},
		{"amigo", "pi", 0, 0.60278, 7.76522, 0, 1.264, 6.328, 67.52},
		{"amigo", "pid", 0, 1.22500, 5.86667, 0.94340, 1.406, 3.515, 59.13},
		{"am-simplified", "pi", 0, 0.95, 6.78571, 0, 1.476, 3.933, 56.37},
	} {
		g, note, err := ApplyRule(c.rule, c.kind, p, RuleOptions{TauC: c.tauC})
		if err != nil {
			t.Errorf("%s %s: %v", c.rule, c.kind, err)
			continue
		}
		name := c.rule + " " + c.kind
		if note != "" {
			t.Errorf("%s: unexpected note %q", name, note)
		}
		near(t, name+" Kc", g.Kc, c.kc, 5.1e-6)
		if c.ti != 0 {
			near(t, name+" Ti", *g.Ti, c.ti, 5.1e-6)
		}
		if c.td != 0 {
			near(t, name+" Td", *g.Td, c.td, 5.1e-6)
		}
		f := Analyse(p, g)
		near(t, name+" Ms", f.Ms, c.ms, 5.1e-4)
		near(t, name+" GM", f.GainMargin, c.gm, 5.1e-4)
		near(t, name+" PM", f.PhaseMargin, c.pm, 5.1e-3)
	}
}

func TestRulesRefuse(t *testing.T) {
	far := plant(t, "fopdt", 1, []float64{1}, 3)
	none := plant(t, "chain2", 1, []float64{10, 2}, 0)
	integrator := plant(t, "ipdt", 0.5, nil, 2)
	for _, c := range []struct {
		rule, kind string
		p          ident.Plant
		says       string
	}{
		{"iae-setpoint", "pi", far, "made for 0.1 to 1"},
		{"itae-load", "pid", far, "made for 0.1 to 1"},
		{"zn-ultimate", "pi", none, "no ultimate gain"},
		{"cohen-coon", "pi", integrator, "integrating"},
		{"simc", "pid", far, "second lag"},
		{"simc", "p", far, "no settings for p"},
		{"nonsense", "pi", far, "unknown rule"},
	} {
		_, _, err := ApplyRule(c.rule, c.kind, c.p, RuleOptions{})
		if err == nil || !strings.Contains(err.Error(), c.says) {
			t.Errorf("%s %s: error %v, want one that says %q", c.rule, c.kind, err, c.says)
		}
	}
	if _, note, err := ApplyRule("cohen-coon", "pi", far, RuleOptions{}); err != nil || note == "" {
		t.Errorf("cohen-coon outside its range: note %q, error %v", note, err)
	}
}

// Lower bounds on the margins by Ms and Mt: Skogestad and Postlethwaite,
// Multivariable Feedback Control, 2nd ed. 2005, eq. 2.47, 2.48 (through a
// transcription).
func TestMarginsRespectPeaks(t *testing.T) {
	for _, ratio := range []float64{0.05, 0.2, 1, 4} {
		for _, structure := range []string{"fopdt", "equal3", "equal8"} {
			p := plant(t, structure, -3, []float64{2}, 2*ratio)
			for _, r := range rules {
				for _, kind := range r.Controllers {
					g, _, err := ApplyRule(r.Name, kind, p, RuleOptions{})
					if err != nil {
						continue
					}
					f := Analyse(p, g)
					if !f.Stable {
						continue
					}
					name := structure + " " + r.Name + " " + kind
					const slack = 1 - 1e-9
					if f.GainMargin < slack*f.Ms/(f.Ms-1) || f.GainMargin < slack*(1+1/f.Mt) {
						t.Errorf("%s: gain margin %g below its bound, Ms %g, Mt %g", name, f.GainMargin, f.Ms, f.Mt)
					}
					pm := f.PhaseMargin * math.Pi / 180
					if pm < slack*2*math.Asin(1/(2*f.Ms)) || pm < slack*2*math.Asin(min(1, 1/(2*f.Mt))) {
						t.Errorf("%s: phase margin %g° below its bound, Ms %g, Mt %g", name, f.PhaseMargin, f.Ms, f.Mt)
					}
				}
			}
		}
	}
}
