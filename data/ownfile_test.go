package data

import (
	"context"
	"strings"
	"testing"
)

func TestOwnResultsAreNoLogs(t *testing.T) {
	for _, c := range []struct{ text, want string }{
		{"{\n  \"schema\": \"lagwright/card/1\",\n  \"tool\": \"x\"\n}\n", "-: is a model card, not a log"},
		{"{\"schema\":\"lagwright/gains/1\"}", "-: is a gains file, not a log: give it with --gains"},
		{" {\"schema\" : \"lagwright/replay/1\"}", "-: is a replay"},
		{"{\"schema\":\"lagwright/drift/1\"}", "-: is the result of track"},
		{"{\"schema\":\"lagwright/check/1\"}", "(check), not a log"},
		{"{\"schema\":\"other/1\"}", "no rows"},
	} {
		_, err := Read(context.Background(), "-", Options{Stdin: strings.NewReader(c.text)})
		if err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("%s: error %v, want %q", c.text, err, c.want)
		}
	}
	// A log that mentions a schema is a log.
	log := "# \"schema\": \"lagwright/card/1\"\ntime_s,voltage_V,temp_C\n0,4,60\n1,5,60\n2,5,61\n"
	if _, err := Read(context.Background(), "-", Options{Stdin: strings.NewReader(log)}); err != nil {
		t.Errorf("a log with a comment: %v", err)
	}
}
