package tune

import (
	"errors"
	"fmt"
	"math"
	"slices"
	"strings"

	"lagwright/ident"
)

// A Rule is a published tuning rule.
type Rule struct {
	Name        string   // as given to --rule
	Source      string   // where it was published
	Controllers []string // p, pi, pid: those it has settings for
	Aim         string

	reduce      func(ident.Plant) firstOrder // how the plant is brought to a first order
	integrating bool                         // it has settings for an integrating plant
	low, high   float64                      // range of theta/tau it was made for, 0 0 when none is stated
	refuse      bool                         // outside that range it is refused rather than noted
	settings    func(ident.Plant, firstOrder, string, float64) (law, string, error)
}

// RuleOptions are the choices a rule leaves open.
type RuleOptions struct {
	TauC float64 // wanted closed-loop time constant (tau_c, lambda), s; 0 means the rule's usual choice
}

// Rules lists the published rules in the order of the table of candidates.
func Rules() []Rule { return slices.Clone(rules) }

// ApplyRule returns the settings a published rule gives for a plant, in the
// form in which it was published and without measurement filter, and a note
// where the plant lies outside the range the rule was made for. It refuses
// what the rule does not cover.
func ApplyRule(name, controller string, p ident.Plant, o RuleOptions) (*Gains, string, error) {
	i := slices.IndexFunc(rules, func(r Rule) bool { return r.Name == name })
	if i < 0 {
		var names []string
		for _, r := range rules {
			names = append(names, r.Name)
		}
		return nil, "", fmt.Errorf("unknown rule %q: use one of %s", name, strings.Join(names, ", "))
	}
	r := rules[i]
	if !slices.Contains(r.Controllers, controller) {
		return nil, "", fmt.Errorf("rule %s has no settings for %s: it has %s", name, controller, strings.Join(r.Controllers, ", "))
	}
	f := r.reduce(p)
	note, err := r.covers(f)
	if err != nil {
		return nil, "", fmt.Errorf("rule %s: %w", name, err)
	}
	c, form, err := r.settings(p, f, controller, o.TauC)
	if err != nil {
		return nil, "", fmt.Errorf("rule %s: %w", name, err)
	}
	g := newGains(c, controller)
	g.Form, g.Rule = form, name
	return g, note, nil
}

// covers tells whether a rule is made for a plant, with a note where it is
// doubtful.
func (r Rule) covers(f firstOrder) (note string, err error) {
	if f.integrating {
		if !r.integrating {
			return "", errors.New("it has no settings for an integrating plant")
		}
		return "", nil
	}
	if r.high == 0 {
		return "", nil
	}
	// the ends count as inside but for rounding
	if x := f.ratio(); x < r.low*(1-1e-9) || x > r.high*(1+1e-9) {
		note = fmt.Sprintf("dead time is %.2g of the lag; the rule was made for %g to %g", x, r.low, r.high)
		if r.refuse {
			return "", errors.New(note)
		}
	}
	return note, nil
}

var all = []string{"p", "pi", "pid"}
var noP = []string{"pi", "pid"}

// The coefficients are collected, with what is known of their sources, in
// the tests beside; worked figures are checked in TestPublishedFigures.
var rules = []Rule{
	{Name: "zn-step", Source: "Ziegler and Nichols, Trans. ASME 64 (1942) 759–768", Controllers: all, Aim: "quarter decay of a load upset",
		reduce: byTangent, integrating: true, low: 0.1, high: 1, settings: zieglerNicholsStep},
	{Name: "zn-ultimate", Source: "Ziegler and Nichols, Trans. ASME 64 (1942) 759–768", Controllers: all, Aim: "quarter decay of a load upset",
		reduce: byTangent, integrating: true, settings: zieglerNicholsUltimate},
	{Name: "cohen-coon", Source: "Cohen and Coon, Trans. ASME 75 (1953) 827–834", Controllers: all, Aim: "quarter decay of a load upset",
		reduce: byTwoPoints, low: 0.1, high: 1, settings: cohenCoon},
	{Name: "chr-setpoint-0", Source: "Chien, Hrones and Reswick, Trans. ASME 74 (1952) 175–185", Controllers: all, Aim: "setpoint without overshoot",
		reduce: byTangent, settings: chienHronesReswick(0.3, 0.35, 1.2, 0.6, 1, 0.5, true)},
	{Name: "chr-setpoint-20", Source: "Chien, Hrones and Reswick, Trans. ASME 74 (1952) 175–185", Controllers: all, Aim: "setpoint with 20 % overshoot",
		reduce: byTangent, settings: chienHronesReswick(0.7, 0.6, 1, 0.95, 1.4, 0.47, true)},
	{Name: "chr-load-0", Source: "Chien, Hrones and Reswick, Trans. ASME 74 (1952) 175–185", Controllers: all, Aim: "load without overshoot",
		reduce: byTangent, settings: chienHronesReswick(0.3, 0.6, 4, 0.95, 2.4, 0.42, false)},
	{Name: "chr-load-20", Source: "Chien, Hrones and Reswick, Trans. ASME 74 (1952) 175–185", Controllers: all, Aim: "load with 20 % overshoot",
		reduce: byTangent, settings: chienHronesReswick(0.7, 0.7, 2.3, 1.2, 2, 0.42, false)},
	{Name: "iae-load", Source: "Lopez, Miller, Smith and Murrill, Instrumentation Technology 14 (Nov 1967) 57–62", Controllers: all, Aim: "least IAE of a load upset",
		reduce: byTwoPoints, low: 0.1, high: 1, refuse: true, settings: integralErrorLoad(iaeLoad)},
	{Name: "itae-load", Source: "Lopez, Miller, Smith and Murrill, Instrumentation Technology 14 (Nov 1967) 57–62", Controllers: all, Aim: "least ITAE of a load upset",
		reduce: byTwoPoints, low: 0.1, high: 1, refuse: true, settings: integralErrorLoad(itaeLoad)},
	{Name: "iae-setpoint", Source: "Rovira, Murrill and Smith, Instruments and Control Systems 42 (Dec 1969) 67–69", Controllers: noP, Aim: "least IAE of a setpoint step",
		reduce: byTwoPoints, low: 0.1, high: 1, refuse: true, settings: integralErrorSetpoint(iaeSetpoint)},
	{Name: "itae-setpoint", Source: "Rovira, Murrill and Smith, Instruments and Control Systems 42 (Dec 1969) 67–69", Controllers: noP, Aim: "least ITAE of a setpoint step",
		reduce: byTwoPoints, low: 0.1, high: 1, refuse: true, settings: integralErrorSetpoint(itaeSetpoint)},
	{Name: "imc", Source: "Rivera, Morari and Skogestad, Ind. Eng. Chem. Process Des. Dev. 25 (1986) 252–265", Controllers: noP, Aim: "first-order setpoint response",
		reduce: byHalfRule, settings: internalModel},
	{Name: "lambda", Source: "Dahlin, Instruments and Control Systems 41 (June 1968) 77–83", Controllers: []string{"pi"}, Aim: "first-order setpoint response, calm",
		reduce: byHalfRule, settings: lambda},
	{Name: "dahlin", Source: "Dahlin 1968; Corripio and Smith, Principles and Practice of Automatic Process Control, 3rd ed. 2006, ch. 7", Controllers: all, Aim: "near least IAE of a setpoint step",
		reduce: byHalfRule, settings: dahlin},
	{Name: "direct-synthesis", Source: "Seborg, Edgar, Mellichamp, Process Dynamics and Control (through course notes)", Controllers: noP, Aim: "first-order setpoint response",
		reduce: byHalfRule, settings: directSynthesis},
	{Name: "simc", Source: "Skogestad, J. Process Control 13 (2003) 291–309", Controllers: noP, Aim: "fast with good robustness",
		reduce: byHalfRule, integrating: true, settings: simc},
	{Name: "simc-improved", Source: "Grimholt and Skogestad, IFAC PID'12, Brescia 2012 (pi); J. Process Control 70 (2018) 36–46 (pid)", Controllers: noP, Aim: "fast with good robustness",
		reduce: byHalfRule, settings: simcImproved},
	{Name: "amigo", Source: "Åström and Hägglund, J. Process Control 14 (2004) 635–650; Advanced PID Control, ISA 2006", Controllers: noP, Aim: "load rejection with M = 1.4",
		reduce: byTangentAnd63, integrating: true, settings: amigo},
	{Name: "am-simplified", Source: "Åström and Murray, Feedback Systems (through a course book)", Controllers: []string{"pi"}, Aim: "load rejection, simple formula",
		reduce: byTangentAnd63, settings: amSimplified},
}

// steepness is a = K·theta/tau, or K·theta for an integrating plant.
func (f firstOrder) steepness() float64 {
	if f.integrating {
		return f.k * f.theta
	}
	return f.k * f.theta / f.tau
}

func pLaw(kc float64) law           { return law{kc: kc, ti: math.Inf(1), b: 1} }
func piLaw(kc, ti float64) law      { return law{kc: kc, ti: ti, b: 1} }
func pidLaw(kc, ti, td float64) law { return law{kc: kc, ti: ti, td: td, b: 1} }
func choose(tauC, usual float64) float64 {
	if tauC > 0 {
		return tauC
	}
	return usual
}

// a: P 1/a; PI 0.9/a, theta/0.3; PID 1.2/a, 2·theta, theta/2 (read as the
// ideal form, as most texts do).
func zieglerNicholsStep(_ ident.Plant, f firstOrder, kind string, _ float64) (law, string, error) {
	if err := f.check(); err != nil {
		return law{}, "", err
	}
	a := f.steepness()
	switch kind {
	case "p":
		return pLaw(1 / a), Ideal, nil
	case "pi":
		return piLaw(0.9/a, f.theta/0.3), Ideal, nil
	}
	return pidLaw(1.2/a, 2*f.theta, f.theta/2), Ideal, nil
}

func zieglerNicholsUltimate(p ident.Plant, _ firstOrder, kind string, _ float64) (law, string, error) {
	ku, pu, err := ultimate(p)
	if err != nil {
		return law{}, "", err
	}
	switch kind {
	case "p":
		return pLaw(0.5 * ku), Ideal, nil
	case "pi":
		return piLaw(0.45*ku, pu/1.2), Ideal, nil
	}
	return pidLaw(0.6*ku, pu/2, pu/8), Ideal, nil
}

func cohenCoon(_ ident.Plant, f firstOrder, kind string, _ float64) (law, string, error) {
	if err := f.check(); err != nil {
		return law{}, "", err
	}
	a, r := f.steepness(), f.ratio()
	switch kind {
	case "p":
		return pLaw((1 + r/3) / a), Ideal, nil
	case "pi":
		return piLaw((0.9+r/12)/a, f.theta*(30+3*r)/(9+20*r)), Ideal, nil
	}
	return pidLaw((4.0/3+r/4)/a, f.theta*(32+6*r)/(13+8*r), 4*f.theta/(11+2*r)), Ideal, nil
}

// chienHronesReswick returns a row of their table (from memory): P p/a; PI
// pi/a and piTi; PID pid/a, pidTi, pidTd·theta. For setpoint steps the
// integral times are multiples of the lag, for load of the dead time.
func chienHronesReswick(p, pi, piTi, pid, pidTi, pidTd float64, setpoint bool) func(ident.Plant, firstOrder, string, float64) (law, string, error) {
	return func(_ ident.Plant, f firstOrder, kind string, _ float64) (law, string, error) {
		if err := f.check(); err != nil {
			return law{}, "", err
		}
		a, unit := f.steepness(), f.theta
		if setpoint {
			unit = f.tau
		}
		switch kind {
		case "p":
			return pLaw(p / a), Ideal, nil
		case "pi":
			return piLaw(pi/a, piTi*unit), Ideal, nil
		}
		return pidLaw(pid/a, pidTi*unit, pidTd*f.theta), Ideal, nil
	}
}

// errorTable holds the exponents of an integral-error rule: gain for P, PI
// and PID, integral time for PI and PID, derivative for PID.
type errorTable struct {
	p, pi, pid  [2]float64
	piTi, pidTi [2]float64
	derivative  [2]float64
}

var (
	iaeLoad = errorTable{p: [2]float64{0.902, -0.985}, pi: [2]float64{0.984, -0.986}, piTi: [2]float64{0.608, -0.707},
		pid: [2]float64{1.435, -0.921}, pidTi: [2]float64{0.878, -0.749}, derivative: [2]float64{0.482, 1.137}}
	itaeLoad = errorTable{p: [2]float64{0.49, -1.084}, pi: [2]float64{0.859, -0.977}, piTi: [2]float64{0.674, -0.680},
		pid: [2]float64{1.357, -0.947}, pidTi: [2]float64{0.842, -0.738}, derivative: [2]float64{0.381, 0.995}}
	iaeSetpoint = errorTable{pi: [2]float64{0.758, -0.861}, piTi: [2]float64{1.02, -0.323},
		pid: [2]float64{1.086, -0.869}, pidTi: [2]float64{0.740, -0.130}, derivative: [2]float64{0.348, 0.914}}
	itaeSetpoint = errorTable{pi: [2]float64{0.586, -0.916}, piTi: [2]float64{1.03, -0.165},
		pid: [2]float64{0.965, -0.85}, pidTi: [2]float64{0.796, -0.1465}, derivative: [2]float64{0.308, 0.929}}
)

// Kc = A·r^B/K, Ti = tau/(A·r^B), Td = tau·A·r^B with r = theta/tau.
func integralErrorLoad(t errorTable) func(ident.Plant, firstOrder, string, float64) (law, string, error) {
	return func(_ ident.Plant, f firstOrder, kind string, _ float64) (law, string, error) {
		power := func(c [2]float64) float64 { return c[0] * math.Pow(f.ratio(), c[1]) }
		switch kind {
		case "p":
			return pLaw(power(t.p) / f.k), Ideal, nil
		case "pi":
			return piLaw(power(t.pi)/f.k, f.tau/power(t.piTi)), Ideal, nil
		}
		return pidLaw(power(t.pid)/f.k, f.tau/power(t.pidTi), f.tau*power(t.derivative)), Ideal, nil
	}
}

// As integralErrorLoad, but Ti = tau/(A + B·r).
func integralErrorSetpoint(t errorTable) func(ident.Plant, firstOrder, string, float64) (law, string, error) {
	return func(_ ident.Plant, f firstOrder, kind string, _ float64) (law, string, error) {
		power := func(c [2]float64) float64 { return c[0] * math.Pow(f.ratio(), c[1]) }
		line := func(c [2]float64) float64 { return c[0] + c[1]*f.ratio() }
		if kind == "pi" {
			return piLaw(power(t.pi)/f.k, f.tau/line(t.piTi)), Ideal, nil
		}
		return pidLaw(power(t.pid)/f.k, f.tau/line(t.pidTi), f.tau*power(t.derivative)), Ideal, nil
	}
}

// PI (the improved one): (2·tau+theta)/(2·K·lambda), tau+theta/2;
// PID: (2·tau+theta)/(K·(2·lambda+theta)), tau+theta/2, tau·theta/(2·tau+theta).
// lambda: the least advised, 1.7·theta (PI) and 0.8·theta (PID), not below 0.2·tau.
func internalModel(_ ident.Plant, f firstOrder, kind string, tauC float64) (law, string, error) {
	ti := f.tau + f.theta/2
	if kind == "pi" {
		return piLaw(ti/(f.k*choose(tauC, max(1.7*f.theta, 0.2*f.tau))), ti), Ideal, nil
	}
	lambda := choose(tauC, max(0.8*f.theta, 0.2*f.tau))
	return pidLaw(2*ti/(f.k*(2*lambda+f.theta)), ti, f.tau*f.theta/(2*ti)), Ideal, nil
}

// Kc = tau/(K·(lambda+theta)), Ti = tau; lambda = tau or three dead times,
// the longer (common practice, no source).
func lambda(_ ident.Plant, f firstOrder, _ string, tauC float64) (law, string, error) {
	return piLaw(f.tau/(f.k*(choose(tauC, max(f.tau, 3*f.theta))+f.theta)), f.tau), Ideal, nil
}

// Kc = tau/(K·(theta+tauC)), Ti = tau, Td = theta/2 in the series form; tauC
// is 2/3·theta for PI, theta/5 for PID; P: 0.5·tau/(K·theta).
func dahlin(_ ident.Plant, f firstOrder, kind string, tauC float64) (law, string, error) {
	if err := f.check(); err != nil {
		return law{}, "", err
	}
	switch kind {
	case "p":
		return pLaw(0.5 / f.steepness()), Ideal, nil
	case "pi":
		return piLaw(f.tau/(f.k*(f.theta+choose(tauC, 2*f.theta/3))), f.tau), Ideal, nil
	}
	return pidLaw(f.tau/(f.k*(f.theta+choose(tauC, f.theta/5))), f.tau, f.theta/2), Series, nil
}

// PI: tau/(K·(tauC+theta)), tau. PID for two lags: (tau1+tau2)/(K·(tauC+theta)),
// tau1+tau2, tau1·tau2/(tau1+tau2). tauC defaults to the dead time.
func directSynthesis(p ident.Plant, f firstOrder, kind string, tauC float64) (law, string, error) {
	lags, theta := []float64{f.tau}, f.theta
	if kind == "pid" {
		lags, theta = halfRule(p.Elements(), nil, p.DeadTime, 2)
		if lags[1] == 0 {
			return law{}, "", errors.New("one lag only: PID settings need a second one")
		}
	}
	span := choose(tauC, theta) + theta
	if !(span > 0) {
		return law{}, "", (firstOrder{theta: theta}).check()
	}
	if kind == "pi" {
		return piLaw(f.tau/(f.k*span), f.tau), Ideal, nil
	}
	sum := lags[0] + lags[1]
	return pidLaw(sum/(f.k*span), sum, lags[0]*lags[1]/sum), Ideal, nil
}

// simc takes PI settings from one lag, PID settings from two.
func simc(p ident.Plant, f firstOrder, kind string, tauC float64) (law, string, error) {
	lags, theta := []float64{f.tau}, f.theta
	if kind == "pid" {
		if !f.integrating {
			lags, theta = halfRule(p.Elements(), nil, p.DeadTime, 2)
		}
		if len(lags) < 2 || lags[1] == 0 {
			return law{}, "", errors.New("no second lag: the derivative would be zero, use pi")
		}
	}
	if tauC == 0 && !(theta > 0) {
		return law{}, "", (firstOrder{theta: theta}).check()
	}
	form := Ideal
	if kind == "pid" {
		form = Series
	}
	return simcSettings(f.k, lags, theta, choose(tauC, theta)), form, nil
}

// simcSettings: Kc = tau1/(K·(tauC+theta)), Ti = min(tau1, 4·(tauC+theta)),
// and with a second lag Td = tau2 in the series form. A first lag of +Inf is
// an integrator, K its slope: Kc = 1/(K·(tauC+theta)), Ti = 4·(tauC+theta).
func simcSettings(k float64, lags []float64, theta, tauC float64) law {
	span := tauC + theta
	c := piLaw(1/(k*span), 4*span)
	if !math.IsInf(lags[0], 1) {
		c = piLaw(lags[0]/(k*span), min(lags[0], 4*span))
	}
	if len(lags) > 1 {
		c.td = lags[1]
	}
	return c
}

// PI: SIMC with tau + theta/3 for tau. PID: SIMC with a series Td = theta/3
// and tauC = theta/2 (from memory).
func simcImproved(_ ident.Plant, f firstOrder, kind string, tauC float64) (law, string, error) {
	if err := f.check(); err != nil {
		return law{}, "", err
	}
	if kind == "pi" {
		tau, span := f.tau+f.theta/3, choose(tauC, f.theta)+f.theta
		return piLaw(tau/(f.k*span), min(tau, 4*span)), Ideal, nil
	}
	span := choose(tauC, f.theta/2) + f.theta
	return pidLaw(f.tau/(f.k*span), min(f.tau, 4*span), f.theta/3), Series, nil
}

// PI: Kc = 0.15/K + (0.35 − theta·tau/(theta+tau)²)·tau/(K·theta),
// Ti = 0.35·theta + 13·theta·tau²/(tau² + 12·theta·tau + 7·theta²).
// PID: Kc = (0.2 + 0.45·tau/theta)/K, Ti = theta·(0.4·theta+0.8·tau)/(theta+0.1·tau),
// Td = 0.5·theta·tau/(0.3·theta+tau). Integrating: the limits for a long lag.
func amigo(_ ident.Plant, f firstOrder, kind string, _ float64) (law, string, error) {
	if err := f.check(); err != nil {
		return law{}, "", err
	}
	k, h, t := f.k, f.theta, f.tau
	switch {
	case f.integrating && kind == "pi":
		return piLaw(0.35/(k*h), 13.35*h), Ideal, nil
	case f.integrating:
		return pidLaw(0.45/(k*h), 8*h, 0.5*h), Ideal, nil
	case kind == "pi":
		return piLaw(0.15/k+(0.35-h*t/((h+t)*(h+t)))*t/(k*h), 0.35*h+13*h*t*t/(t*t+12*h*t+7*h*h)), Ideal, nil
	}
	return pidLaw((0.2+0.45*t/h)/k, h*(0.4*h+0.8*t)/(h+0.1*t), 0.5*h*t/(0.3*h+t)), Ideal, nil
}

// Kc = (0.15·theta+0.35·tau)/(K·theta), Kc/Ti = (0.46·theta+0.02·tau)/(K·theta²).
func amSimplified(_ ident.Plant, f firstOrder, _ string, _ float64) (law, string, error) {
	if err := f.check(); err != nil {
		return law{}, "", err
	}
	kc := (0.15*f.theta + 0.35*f.tau) / (f.k * f.theta)
	ki := (0.46*f.theta + 0.02*f.tau) / (f.k * f.theta * f.theta)
	return piLaw(kc, kc/ki), Ideal, nil
}
