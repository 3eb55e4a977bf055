package data

import (
	"bytes"
	"regexp"
	"sync"
)

// ownSchema is the schema of a result that lagwright wrote, at the head of its
// JSON.
var ownSchema = sync.OnceValue(func() *regexp.Regexp {
	return regexp.MustCompile(`"schema"\s*:\s*"lagwright/([a-z]+)/`)
})

// ownUse says what the results are and where they go.
var ownUse = map[string]string{
	"card":   "is a model card, not a log: give the log it was fitted to, or use the card with tune, validate, plan or report",
	"gains":  "is a gains file, not a log: give it with --gains to validate, or to convert or report",
	"replay": "is a replay, not a log: give it to report",
	"drift":  "is the result of track, not a log: give it to report",
}

// ownFile says what the head of a file shows to be a result of lagwright, with
// what to do with it; "" for anything else.
func ownFile(head []byte) string {
	if !bytes.HasPrefix(bytes.TrimLeft(head, " \t\r\n"), []byte("{")) {
		return ""
	}
	m := ownSchema().FindSubmatch(head)
	if m == nil {
		return ""
	}
	if use, ok := ownUse[string(m[1])]; ok {
		return use
	}
	return "is a result of lagwright (" + string(m[1]) + "), not a log: give a CSV or Parquet log"
}

// isMarkup tells HTML and XML, which some exports hide behind another ending.
func isMarkup(head []byte) bool {
	head = bytes.ToLower(bytes.TrimLeft(bytes.TrimPrefix(head, []byte("\xEF\xBB\xBF")), " \t\r\n"))
	for _, tag := range []string{"<html", "<!doctype", "<?xml", "<table", "<meta", "<head", "<body"} {
		if bytes.HasPrefix(head, []byte(tag)) {
			return true
		}
	}
	return false
}
