package data

import "testing"

func TestNamesFactor(t *testing.T) {
	for _, c := range []struct {
		label string
		want  bool
	}{
		{"outlet x10 (°C)", true}, {"outlet x10", true}, {"outlet_x10_degC", true}, {"outlet TC*10 °C", true}, {"drive*100 [V]", true}, {"outlet ×10 °C", true},
		{"outlet (x10 °C)", true}, {"outlet (x10)", true}, {"Ofen x1000 W", true}, {"outlet in 0,1 °C", true}, {"outlet (0.1°C)", true}, {"outlet (1/10 °C)", true},
		{"outlet in 1/10 °C", true}, {"outlet 0.1 °C", true},
		{"RTD 1/10 DIN (°C)", false}, {"Pt100 1/10 °C", false}, {"outlet res 0.01 °C", false}, {"TT-10/100 (°C)", false}, {"Zone 1/10 temp (°C)", false},
		{"Stellgröße 0/100%", false}, {"SSR/10 (V)", false}, {"T x100 mm (°C)", false}, {"TC 3 x 10 cm °C", false}, {"outlet @ x=100 mm (°C)", false},
		{"Heater 2x1000W (%)", false}, {"drive x1 (V)", false}, {"outlet Pt100 x2 (°C)", false}, {"AO 4-20mA/0-10V (V)", false}, {"Heater 0/10V", false},
		{"Heater 0-10 V", false}, {"Box10 °C", false}, {"mux100 (V)", false}, {"outlet 10.1 °C", false}, {"outlet_degC", false}, {"", false},
	} {
		if got := namesFactor(c.label); got != c.want {
			t.Errorf("%q: %v, want %v", c.label, got, c.want)
		}
	}
}
