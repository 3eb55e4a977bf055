// Package report draws: figures in one house style, and the page that answers
// in the order a person asks. It computes nothing; what it shows comes from
// the libraries. Text from files is never trusted: it is escaped, and what
// hides or acts in it is made visible.
package report

import (
	"bytes"
	"crypto/sha256"
	_ "embed"
	"encoding/base64"
	"fmt"
	"html/template"
	"io"
	"sync"

	"gonum.org/v1/plot/vg"

	"lagwright/cmd/lagwright/internal/format"
)

//go:embed page.html
var pageHTML string

//go:embed page.css
var pageCSS string

//go:embed page.js
var readoutJS string

//go:embed zoom.js
var zoomJS string

var pageJS = readoutJS + zoomJS

// maxText is the longest text from a file, in runes, that a page shows whole.
const maxText = 400

var pageTemplate = sync.OnceValue(func() *template.Template {
	literal := func(s string) string { return format.Clip(format.Text(s), maxText) }
	clean := func(s string) string { return together(literal(s)) }
	return template.Must(template.New("page").Funcs(template.FuncMap{"clean": clean, "literal": literal}).Parse(pageHTML))
})

// view is a page before it is written.
type view struct {
	Title    string
	Answer   answer
	Sections []section
	Style    template.CSS
	Script   template.JS
	Policy   string
}

// section answers one question.
type section struct {
	ID, Title, Lead string
	Blocks          []block
}

// block is one piece of a section; one field is set.
type block struct {
	Heading string
	Text    string
	List    *list
	Table   *table
	Figure  *picture
	Code    string
}

type list struct {
	Items []item
	More  int // items left out
}

// item is a line of a list with its sign: "warn", "bad", "good" or "".
type item struct{ Sign, Text string }

type table struct {
	Caption string
	Head    []string
	Rows    [][]cell
	More    int // rows left out
}

type cell struct {
	Text   string
	Small  string // a second line
	Kind   string // "num", "good", "bad", "code" or ""
	Header bool
}

// picture is a figure in both widths.
type picture struct {
	Finding, Alt string
	Wide, Narrow drawing
}

type drawing struct {
	Width, Height string
	Body          template.HTML
}

// Page writes one self-contained HTML page. The same bundle gives the same
// bytes.
func Page(w io.Writer, b Bundle) error {
	if b.Loop == nil && b.Card != nil && b.Gains != nil {
		var err error
		if b.Loop, err = LoopOf(b.Card, b.Gains); err != nil {
			b.loopError = err.Error()
		}
	}
	style := paletteCSS(":root") + inkCSS() + pageCSS
	v := view{
		Title:    title(&b),
		Answer:   answerOf(&b),
		Sections: sections(&b),
		Style:    template.CSS(style),
		Script:   template.JS(pageJS),
		Policy: fmt.Sprintf("default-src 'none'; style-src '%s'; script-src '%s'; base-uri 'none'; form-action 'none'",
			integrity(style), integrity(pageJS)),
	}
	var page bytes.Buffer
	if err := pageTemplate().Execute(&page, v); err != nil {
		return fmt.Errorf("make report page: %w", err)
	}
	_, err := w.Write(page.Bytes())
	return err
}

// integrity lets a browser run what we wrote and nothing that slipped in.
func integrity(s string) string {
	sum := sha256.Sum256([]byte(s))
	return "sha256-" + base64.StdEncoding.EncodeToString(sum[:])
}

func title(b *Bundle) string {
	name := "report"
	switch {
	case len(b.Runs) > 0:
		name = b.Runs[0].Source.File
	case b.Card != nil && len(b.Card.Source) > 0:
		name = b.Card.Source[0].File
	case b.Replay != nil && len(b.Replay.Runs) > 0:
		name = b.Replay.Runs[0].File
	case b.Drift != nil && len(b.Drift.Runs) > 0:
		name = b.Drift.Runs[0].File
	}
	return "Heater report: " + format.Clip(format.Text(name), 60)
}

func sections(b *Bundle) []section {
	var out []section
	for _, s := range []*section{trust(b), heater(b), whyGains(b), replayed(b), drifted(b), watch(b), cautions(b), provenance(b)} {
		if s != nil {
			out = append(out, *s)
		}
	}
	return out
}

func picturesOf(f *Figure) *picture {
	return &picture{Finding: f.Finding, Alt: f.Alt, Wide: drawingOf(f, wideWidth), Narrow: drawingOf(f, narrowWidth)}
}

// drawingOf trusts the canvas, which escapes every text it is given.
func drawingOf(f *Figure, width float64) drawing {
	c := f.inline(vg.Length(width))
	return drawing{decimal(width), decimal(float64(c.h)), template.HTML(c.body.String())}
}

// longestList is the number of lines a page lists before it counts the rest.
const longestList = 40

func listOf(items []item) *list {
	if len(items) <= longestList {
		return &list{Items: items}
	}
	return &list{Items: items[:longestList], More: len(items) - longestList}
}

func num(s string) cell  { return cell{Text: s, Kind: "num"} }
func text(s string) cell { return cell{Text: s} }
func head(s string) cell { return cell{Text: s, Header: true} }

// yesNo is a verdict in a table.
func yesNo(ok bool) cell {
	if ok {
		return cell{Text: "yes", Kind: "good"}
	}
	return cell{Text: "no", Kind: "bad"}
}
