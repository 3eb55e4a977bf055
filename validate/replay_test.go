package validate

import (
	"bytes"
	"context"
	"encoding/json"
	"strings"
	"testing"
)

func sampleReplay(t testing.TB) *Replay {
	t.Helper()
	card, runs := many(t, 3, 200)
	runs[1].Y = nil
	runs[1].T, runs[1].U, runs[1].Setpoint = nil, nil, nil
	runs[2].Source.File = "odd\x1b[31m.csv"
	gains := piGains(0.3, 7, 0.5)
	gains.Requirement.Settling = ptr(5)
	r, err := ReplayRuns(context.Background(), card, runs, gains, Options{Traces: true, LoggedGains: piGains(0.1, 9, 0.5), Tool: "test"})
	if err != nil {
		t.Fatal(err)
	}
	return r
}

func TestReplayRoundTrip(t *testing.T) {
	r := sampleReplay(t)
	var first, second bytes.Buffer
	if err := r.WriteJSON(&first); err != nil {
		t.Fatal(err)
	}
	back, err := ReadReplay(bytes.NewReader(first.Bytes()), "replay.json")
	if err != nil {
		t.Fatal(err)
	}
	if err := back.WriteJSON(&second); err != nil {
		t.Fatal(err)
	}
	if !bytes.Equal(first.Bytes(), second.Bytes()) {
		t.Error("a replay read and written again has other bytes")
	}
}

func TestReadReplayRefuses(t *testing.T) {
	var good bytes.Buffer
	if err := sampleReplay(t).WriteJSON(&good); err != nil {
		t.Fatal(err)
	}
	for _, c := range []struct {
		name, want string
		change     func(m map[string]any)
	}{
		{"a later version", "lagwright/replay/2", func(m map[string]any) { m["schema"] = "lagwright/replay/2" }},
		{"a probability", "runs[0]", func(m map[string]any) { m["runs"].([]any)[0].(map[string]any)["probability"] = 1.5 }},
		{"a count", "summary", func(m map[string]any) { m["summary"].(map[string]any)["runs"] = 7 }},
		{"a short trace", "logged_input", func(m map[string]any) {
			m["runs"].([]any)[0].(map[string]any)["trace"].(map[string]any)["logged_input"] = []any{1}
		}},
		{"a type", "confidence", func(m map[string]any) { m["confidence"] = "high" }},
	} {
		var m map[string]any
		if err := json.Unmarshal(good.Bytes(), &m); err != nil {
			t.Fatal(err)
		}
		c.change(m)
		b, err := json.Marshal(m)
		if err != nil {
			t.Fatal(err)
		}
		if _, err := ReadReplay(bytes.NewReader(b), "r.json"); err == nil || !strings.Contains(err.Error(), c.want) || !strings.HasPrefix(err.Error(), "r.json: ") {
			t.Errorf("%s: %v, want an error that names %q", c.name, err, c.want)
		}
	}
}

func TestReplayText(t *testing.T) {
	r := sampleReplay(t)
	var b bytes.Buffer
	if err := r.WriteText(&b); err != nil {
		t.Fatal(err)
	}
	text := b.String()
	for _, want := range []string{"0 of 2 judged runs meet", "1 not replayed", "the logged gains are not reproduced on 2 runs", "the logged gains are not reproduced here, the temperature speaks for the model", "settling", "Cautions", "not replayed: dayb.csv: no unbroken part"} {
		if !strings.Contains(text, want) {
			t.Errorf("no %q in\n%s", want, text)
		}
	}
	if strings.Contains(text, "\x1b") {
		t.Error("a control character of a file name reaches the terminal")
	}
}

// Runs that are worst come first; runs that could not be judged last.
func TestWorstFirst(t *testing.T) {
	r := &Replay{Runs: []RunReplay{
		{File: "open"}, {File: "good", Judged: true, Probability: 1}, {File: "bad", Judged: true, Probability: 0.2},
		{File: "strange", Judged: true, Probability: 1, BackTest: &BackTest{}},
	}}
	var order []string
	for _, run := range r.worstFirst() {
		order = append(order, run.File)
	}
	if got := strings.Join(order, " "); got != "strange bad good open" {
		t.Errorf("order %s", got)
	}
}

func FuzzReadReplay(f *testing.F) {
	f.Add([]byte(`{"schema":"lagwright/replay/1","confidence":0.95,"plants":1,"runs":[],"failed":[{"file":"a","reason":"b"}],"summary":{"failed":1}}`))
	f.Add([]byte(`{"schema":"lagwright/replay/1","runs":[{"file":"a","start":"2026","judged":true,"probability":0.5,"proposed":{"low":{"settling_s":1},` +
		`"median":{"settling_s":2},"high":{"settling_s":null}},"back_test":{"share_inside":0.5,"differs":["x"]},"trace":{"t_s":[0],"setpoint":[null],"logged":[1],` +
		`"logged_input":[1],"median":[1],"low":[1],"high":[1],"median_input":[1],"low_input":[1],"high_input":[1]}}],"summary":{"runs":1}}`))
	f.Fuzz(func(t *testing.T, in []byte) {
		r, err := ReadReplay(bytes.NewReader(in), "f")
		if err != nil {
			return
		}
		var out, text bytes.Buffer
		if err := r.WriteJSON(&out); err != nil {
			t.Fatal(err)
		}
		if err := r.WriteText(&text); err != nil {
			t.Fatal(err)
		}
		if err := r.WriteParquet(&text); err != nil {
			t.Fatal(err)
		}
		if _, err := ReadReplay(&out, "again"); err != nil {
			t.Fatalf("what was written is not read: %v", err)
		}
	})
}

func FuzzReadDrift(f *testing.F) {
	f.Add([]byte(`{"schema":"lagwright/drift/1","structure":"chain2","runs":[{"file":"a","start":"2026-01-01T00:00:00Z"},{"file":"b"}],` +
		`"parameters":[{"name":"gain","unit":"K/V","points":[{"value":1,"low":0,"high":2},{}],"step":{"p":0.01,"run":1,"size":1,"percent":-3}}]}`))
	f.Fuzz(func(t *testing.T, in []byte) {
		d, err := ReadDrift(bytes.NewReader(in), "f")
		if err != nil {
			return
		}
		var out bytes.Buffer
		if err := d.WriteText(&out); err != nil {
			t.Fatal(err)
		}
	})
}
