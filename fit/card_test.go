package fit

import (
	"bytes"
	"encoding/json"
	"math"
	"strings"
	"testing"

	"lagwright/data"
)

func sampleCard(t testing.TB) *Card {
	t.Helper()
	return fitted1(t, []*data.Run{twoLags().run(1)}, Options{Structure: "chain2", Plants: 12, Tool: "lagwright test"})
}

func TestCardRoundTrip(t *testing.T) {
	c := sampleCard(t)
	text := cardBytes(t, c)
	back, err := ReadCard(bytes.NewReader(text), "card.json")
	if err != nil {
		t.Fatal(err)
	}
	if !bytes.Equal(text, cardBytes(t, back)) {
		t.Error("written again, the card has other bytes")
	}
	for _, word := range []string{"NaN", "Inf"} {
		if bytes.Contains(text, []byte(word)) {
			t.Errorf("the card holds %q", word)
		}
	}
}

// A card read back from its file must be known again, whatever its log is called.
func TestFingerprint(t *testing.T) {
	c := sampleCard(t)
	seen := map[string]string{}
	for _, name := range []string{"bump.csv", "b\xb0x.csv", "a<b>&.csv", "\u2028.csv", "\ufffd.csv"} {
		c.Source[0].File = name
		want, err := c.Fingerprint()
		if err != nil {
			t.Fatal(err)
		}
		back, err := ReadCard(bytes.NewReader(cardBytes(t, c)), "card.json")
		if err != nil {
			t.Fatal(err)
		}
		if got, err := back.Fingerprint(); err != nil || got != want {
			t.Errorf("log %q: fingerprint %s, read back %s (%v)", name, want, got, err)
		}
		if other, ok := seen[want]; ok {
			t.Errorf("logs %q and %q have one fingerprint", name, other)
		}
		seen[want] = name
	}
}

// An end that the log does not set is null, never a number.
func TestOpenEndsAreNull(t *testing.T) {
	l := twoLags()
	l.structure, l.lags, l.dead = "fopdt", []float64{9}, 0
	c := fitted1(t, []*data.Run{l.run(1)}, Options{Structure: "fopdt", Initial: "rest", Drift: "none", Plants: -1})
	var raw struct {
		Models []struct {
			Parameters []map[string]any `json:"parameters"`
		} `json:"models"`
	}
	if err := json.Unmarshal(cardBytes(t, c), &raw); err != nil {
		t.Fatal(err)
	}
	for _, q := range raw.Models[0].Parameters {
		if low, ok := q["low"]; q["name"] == "dead_time" && (!ok || low != nil) {
			t.Errorf("low of a dead time of zero is %v, want null", low)
		}
	}
}

// cardFields is a small valid card to spoil.
const cardFields = `{"schema":"lagwright/card/1","tool":"","created":"","source":[],
"units":{"time":"s","input":"V","temperature":"degC"},"input_law":"linear","initial":"rest","noise_model":"auto","drift":"none","bump_instant":"row",
"range":{"input":[0,5],"temperature":[20,80]},"confidence":0.95,"selected":"fopdt",
"models":[{"structure":"fopdt","parameters":[
{"name":"gain","unit":"K/V","value":7,"se":0.1,"low":6.8,"high":7.2,"fixed":false},
{"name":"lag1","unit":"s","value":9,"se":0.2,"low":8.6,"high":9.4,"fixed":false},
{"name":"dead_time","unit":"s","value":2,"se":0.1,"low":null,"high":2.2,"fixed":false}],
"covariance":[[0.01,0,0],[0,0.04,0],[0,0,0.01]],"samples":100,"sse":1,"rmse":0.1,"fit_percent":99,"loglik":0,"aicc":0,"bic":0,
"noise":{"sd":0.1,"correlation_time_s":2,"white_sd":0.05},"residuals":{"lag1_correlation":0,"ljung_box_p":0.5,"input_correlation_p":0.5}}],
"conditions":{"airflow":null,"inlet_temperature":null},
"plants":{"structure":"fopdt","rand":1,"parameters":["gain","lag1","dead_time"],"values":[[7,9,2],[7.1,9.2,1.9]]},
"derived":[],"warnings":[],"cautions":[]}`

func TestReadCardRefuses(t *testing.T) {
	if _, err := ReadCard(strings.NewReader(cardFields), "card.json"); err != nil {
		t.Fatalf("the sound card is refused: %v", err)
	}
	for _, c := range []struct{ name, old, new, says string }{
		{"later schema", "card/1", "card/9", `"lagwright/card/9"`},
		{"another file", "lagwright/card/1", "lagwright/gains/1", "schema"},
		{"no number", `"value":7,`, `"value":"seven",`, "line"},
		{"NaN", `"value":7,`, `"value":NaN,`, "line"},
		{"overflow", `"value":7,`, `"value":1e999,`, "value"},
		{"huge", `"value":7,`, `"value":1e300,`, "models[0].parameters[0].value"},
		{"gain of zero", `"value":7,`, `"value":0,`, "gain"},
		{"negative lag", `"value":9,"se":0.2,"low":8.6`, `"value":-9,"se":0.2,"low":-10`, "models[0].parameters[1].value: lag1"},
		{"negative dead time", `"value":2,`, `"value":-2,`, "dead_time"},
		{"bounds crossed", `"low":6.8,"high":7.2`, `"low":7.2,"high":6.8`, "models[0].parameters[0].low"},
		{"negative standard error", `"se":0.1,"low":6.8`, `"se":-0.1,"low":6.8`, "models[0].parameters[0].se"},
		{"unknown structure", `"structure":"fopdt","parameters"`, `"structure":"fopdt2","parameters"`, "fopdt2"},
		{"lag missing", `{"name":"lag1"`, `{"name":"lagx"`, "lacks"},
		{"covariance of another size", `[0.01,0,0],[0,0.04,0],[0,0,0.01]`, `[0.01,0],[0,0.04]`, "models[0].covariance"},
		{"ragged covariance", `[0,0.04,0]`, `[0,0.04]`, "models[0].covariance[1]"},
		{"negative variance", `[0.01,0,0]`, `[-0.01,0,0]`, "models[0].covariance[0][0]"},
		{"negative noise", `"sd":0.1,"corr`, `"sd":-0.1,"corr`, "models[0].noise.sd"},
		{"selected not there", `"selected":"fopdt"`, `"selected":"chain2"`, "selected"},
		{"confidence", `"confidence":0.95`, `"confidence":95`, "confidence"},
		{"law", `"input_law":"linear"`, `"input_law":"cubic"`, "input_law"},
		{"initial", `"initial":"rest"`, `"initial":"wild"`, "initial"},
		{"range", `"input":[0,5]`, `"input":[5,0]`, "range.input"},
		{"plants of another width", `[7.1,9.2,1.9]`, `[7.1,9.2]`, "plants.values[1]"},
		{"plant with a negative lag", `[7.1,9.2,1.9]`, `[7.1,-9.2,1.9]`, "plants.values[1]"},
		{"plant without gain", `[7.1,9.2,1.9]`, `[0,9.2,1.9]`, "plants.values[1]"},
		{"plants without names", `"parameters":["gain","lag1","dead_time"]`, `"parameters":["a","b","c"]`, "plants.parameters"},
		{"cut off", `"warnings":[],"cautions":[]}`, ``, "line"},
		{"two cards", `"cautions":[]}`, `"cautions":[]}{}`, "line"},
		{"empty", cardFields, "", "not a model card"},
		{"an array", cardFields, "[1,2]", "not a model card"},
	} {
		spoilt := strings.Replace(cardFields, c.old, c.new, 1)
		if spoilt == cardFields {
			t.Fatalf("%s: nothing was spoilt", c.name)
		}
		_, err := ReadCard(strings.NewReader(spoilt), "x/card.json")
		switch {
		case err == nil:
			t.Errorf("%s: read without an error", c.name)
		case !strings.Contains(err.Error(), c.says) || !strings.HasPrefix(err.Error(), "x/card.json: ") || strings.Contains(err.Error(), "\n"):
			t.Errorf("%s: error %q, want one line of the file that names %q", c.name, err, c.says)
		}
	}
}

func TestReadCardRefusesWhatIsTooLarge(t *testing.T) {
	endless := bytes.NewReader(bytes.Repeat([]byte(" "), maxCard+2))
	if _, err := ReadCard(endless, "card.json"); err == nil || !strings.Contains(err.Error(), "64 MiB") {
		t.Errorf("error %v, want one that names the limit", err)
	}
}

// What is read must be sound, and written again be read as the same.
func FuzzReadCard(f *testing.F) {
	f.Add([]byte(cardFields))
	f.Add([]byte(strings.Replace(cardFields, `"structure":"fopdt","rand"`, `"structure":"mixed","rand"`, 1)))
	f.Add([]byte(strings.Replace(cardFields, "[7.1,9.2,1.9]", "[7.1,-9.2,1e308]", 1)))
	f.Add([]byte(`{"schema":"lagwright/card/1","models":[{}],"confidence":0.5}`))
	f.Add([]byte(`{"schema":"lagwright/card/2"}`))
	f.Add([]byte(strings.Repeat(`[`, 2000)))
	f.Fuzz(func(t *testing.T, text []byte) {
		c, err := ReadCard(bytes.NewReader(text), "card.json")
		if err != nil {
			return
		}
		plant, err := c.Plant()
		if err != nil || plant.Gain == 0 || math.IsNaN(plant.Gain) {
			t.Fatalf("a card without a plant was read: %v", err)
		}
		if _, err := c.PlausiblePlants(); err != nil {
			t.Fatalf("a card with bad plants was read: %v", err)
		}
		var page bytes.Buffer
		if err := c.WriteText(&page); err != nil {
			t.Fatalf("a card that was read cannot be shown: %v", err)
		}
		if _, err := ReadCard(bytes.NewReader(cardBytes(t, c)), "card.json"); err != nil {
			t.Fatalf("a card that was read and written is refused: %v", err)
		}
	})
}
