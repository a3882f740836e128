package render

import (
	"bytes"
	_ "embed"
	"html/template"
	"regexp"
	"slices"
	"sync"

	"railproof/api/wire"
)

// Report is the document that proves a rail: answers of several operations, and
// the request that they came from. A nil answer was not computed.
type Report struct {
	Title    string
	Date     string   // as given; empty: none
	Sections []string // to be shown, by their names in the contract
	Request  map[string]any
	Engine   wire.Engine
	ResultID string
	Control  string // how the output is held in these answers

	Sizing     *wire.SizingAnswer
	Steady     *wire.SteadyStateAnswer
	Losses     *wire.LossesAnswer
	Grid       *wire.LossesAnswer
	Corners    *wire.CornersAnswer
	Loop       *wire.LoopGainAnswer
	Transients []*wire.TransientsAnswer
	Rules      *wire.RuleChecksAnswer
	Parts      []ReportPart
	Excluded   []string // why something that was asked for is missing
}

// ReportPart is one request that the report was made of.
type ReportPart struct{ Method, Path, ResultID string }

// article is the document as the template writes it.
type article struct {
	Title, Rail, Date string
	Facts             []fact
	Sections          []chapter
	Notice            string
	Engine            string
	ResultID          string
}

// fact is one line of the summary.
type fact struct{ Name, Text, Class string }

// chapter is a section with its blocks.
type chapter struct {
	ID, Title string
	Blocks    []part
}

// part is one block of a chapter: exactly one of its fields is set, apart from
// Caption and Class.
type part struct {
	Head    string
	Text    string
	Items   []string
	Table   *grille
	Picture template.HTML // an SVG of ours, in which all text is escaped
	Code    string
	Caption string
	Class   string
}

// grille is a table.
type grille struct {
	Head []entry
	Rows [][]entry
}

// entry is a text with a class: n for numbers, w for what may be broken anywhere,
// pass, fail or mind for verdicts; it may be wider than a column.
type entry struct {
	Text, Class string
	Span        int
}

//go:embed report.tmpl
var reportText string

var reportTemplate = template.Must(template.New("report").Funcs(template.FuncMap{"together": together, "divided": divided}).Parse(reportText))

var (
	beforeUnit = regexp.MustCompile(`([0-9]) ((?:[fpnµmkMGT]?(?:V|A|W|Hz|s|H|F|C|J|T|S|Ω)(?:/[a-zK]+³?)?|°C|K/W|K|h|dB|%|[mc]?m[²³])(?:[^\pL]|$))`)
	minus      = regexp.MustCompile(`(^|[ (])-([0-9])`)
	divides    = regexp.MustCompile(`[/_]+`)
)

// together keeps figures and their units on one line, and writes minus signs as such.
func together(text string) string {
	return withMinus(beforeUnit.ReplaceAllString(text, "$1\u00a0$2"))
}

// divided lets a line break within a pointer, where its names end and their words.
func divided(text string) template.HTML {
	escaped := template.HTMLEscapeString(together(text))
	return template.HTML(divides.ReplaceAllString(escaped, "$0<wbr/>")) //nolint:gosec // escaped, and nothing but breaks added
}

// chapters lists the sections that a report may have, in its order.
var chapters = []struct {
	name, title string
	write       func(*Report) []part
}{
	{"requirement", "Requirement", (*Report).requirement},
	{"stage", "Stage and parts", (*Report).stage},
	{"sizing", "Sizing", (*Report).sizing},
	{"operating-figures", "Operating figures", (*Report).figures},
	{"losses", "Losses and temperatures", (*Report).losses},
	{"worst-case", "Worst case", (*Report).worstCase},
	{"loop", "Control loop", (*Report).loop},
	{"transient", "Load step", (*Report).transient},
	{"findings", "Findings and waivers", (*Report).findings},
	{"cautions", "Cautions", (*Report).cautions},
	{"assumptions", "Assumptions", (*Report).assumptions},
	{"reproduction", "How to reproduce this", (*Report).reproduction},
}

// HTML writes the report as one page that needs nothing else.
func (r *Report) HTML() []byte {
	a := article{
		Title: r.Title, Rail: r.rail(), Date: r.Date, Facts: r.summary(), ResultID: r.ResultID,
		Engine: r.Engine.Name + " " + r.Engine.Version + ", contract " + r.Engine.ContractVersion + ", " + r.Engine.Platform,
	}
	for _, b := range r.bases() {
		a.Notice = b.Notice
	}
	a.Sections = r.written()
	var out bytes.Buffer
	// a buffer takes every write, and the template is held by a test
	if err := reportTemplate.Execute(&out, &a); err != nil {
		panic("render: report template: " + err.Error())
	}
	return out.Bytes()
}

// written writes the chapters that are wanted beside one another: most of the time
// goes into their pictures.
func (r *Report) written() (list []chapter) {
	blocks, failed := make([][]part, len(chapters)), make([]any, len(chapters))
	var writing sync.WaitGroup
	for i, c := range chapters {
		if slices.Contains(r.Sections, c.name) {
			writing.Go(func() {
				defer func() { failed[i] = recover() }()
				blocks[i] = c.write(r)
			})
		}
	}
	writing.Wait()
	for i, c := range chapters {
		if failed[i] != nil { // nobody above those goroutines would hear of it
			panic(failed[i])
		}
		if len(blocks[i]) > 0 {
			list = append(list, chapter{c.name, c.title, blocks[i]})
		}
	}
	return list
}

func (r *Report) rail() string {
	if s, is := r.Request["stage"].(map[string]any); is {
		if name, is := s["name"].(string); is && name != "" {
			return name
		}
	}
	return "unnamed rail"
}

// bases returns what each answer rests on.
func (r *Report) bases() (list []*wire.Basis) {
	if r.Sizing != nil {
		list = append(list, &r.Sizing.Basis)
	}
	if r.Steady != nil {
		list = append(list, &r.Steady.Basis)
	}
	if r.Losses != nil {
		list = append(list, &r.Losses.Basis)
	}
	if r.Corners != nil {
		list = append(list, &r.Corners.Basis)
	}
	if r.Loop != nil {
		list = append(list, &r.Loop.Basis)
	}
	for _, a := range r.Transients {
		list = append(list, &a.Basis)
	}
	if r.Rules != nil {
		list = append(list, &r.Rules.Basis)
	}
	return list
}

// drawing puts a picture into the page; nothing for nil.
func drawing(p *Picture, caption string) []part {
	if p == nil {
		return nil
	}
	return []part{{Picture: template.HTML(p.SVG(DefaultWidth)), Caption: caption}} //nolint:gosec // every text in it is escaped when it is drawn
}

func plainCells(texts ...string) []entry {
	row := make([]entry, len(texts))
	for i, t := range texts {
		row[i].Text = t
	}
	return row
}

// row makes cells; kinds has a letter for each: t for text, n for a number, w for
// text without spaces that may have to be broken anywhere.
func row(kinds string, texts ...string) []entry {
	cells := plainCells(texts...)
	for i := range cells {
		if k := kinds[i : i+1]; k != "t" {
			cells[i].Class = k
		}
	}
	return cells
}

// judged is a cell with a verdict.
func judged(verdict string) entry {
	switch verdict {
	case "pass", "met", "ok":
		return entry{Text: verdict, Class: "pass"}
	case "fail", "not met", "runaway", "over-temperature", "drop-out", "no-operating-point", "too-short-on-time", "infeasible":
		return entry{Text: verdict, Class: "fail"}
	case "no-limit":
		return entry{Text: "no limit"}
	}
	return entry{Text: verdict, Class: "mind"}
}
