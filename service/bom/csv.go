package bom

import (
	"bytes"
	"encoding/csv"
	"errors"
	"fmt"
	"io"
	"math"
	"slices"
	"strconv"
	"strings"
	"unicode/utf8"
)

// Mapping names the columns of a CSV text. Designators is required.
type Mapping struct {
	Separator   rune // comma, semicolon or tab; 0: found from the header
	Designators string
	Value       string
	Tolerance   string
	Rating      string
	PartNumber  string
	Count       string
	NotFitted   string // a column in which anything but empty, 0, no, false or fitted means not fitted
}

// FormatError says where a CSV text cannot be read.
type FormatError struct {
	Line   int // from 1
	Column int // in bytes, from 1; 0 if the whole line is meant
	Detail string
	Mapped string // member of the mapping that is at fault: "value"; "": the text is
}

// Error names line, column and fault.
func (e *FormatError) Error() string {
	if e.Column == 0 {
		return fmt.Sprintf("bom: line %d: %s", e.Line, e.Detail)
	}
	return fmt.Sprintf("bom: line %d, column %d: %s", e.Line, e.Column, e.Detail)
}

var byteOrderMark = []byte("\xef\xbb\xbf")

// ReadCSV reads a CSV text (RFC 4180; separated by comma, semicolon or tab; with
// or without byte order mark) by the names of its columns. The error is a
// *FormatError.
func ReadCSV(raw []byte, m Mapping) ([]Line, error) {
	if len(raw) > MaxBytes {
		return nil, &FormatError{1, 0, fmt.Sprintf("longer than %d bytes", MaxBytes), ""}
	}
	raw = bytes.TrimPrefix(raw, byteOrderMark)
	if !utf8.Valid(raw) {
		return nil, invalidText(raw)
	}
	if at := bytes.IndexByte(raw, '\r'); at >= 0 && !bytes.Contains(raw, []byte("\n")) {
		return nil, &FormatError{1, at + 1, "lines end with a carriage return alone; RFC 4180 ends them with a line feed after it", ""}
	}
	comma, columns, err := separator(raw, m)
	if err != nil {
		return nil, err
	}
	r := reader(raw, comma)
	if _, err := r.Read(); err != nil {
		return nil, formatError(err)
	}
	var lines []Line
	for {
		record, err := r.Read()
		if errors.Is(err, io.EOF) {
			return lines, nil
		}
		if err != nil {
			return nil, formatError(err)
		}
		if len(lines) == MaxLines {
			at, _ := r.FieldPos(0)
			return nil, &FormatError{at, 0, fmt.Sprintf("more than %d lines", MaxLines), ""}
		}
		line, err := columns.line(r, record)
		if err != nil {
			return nil, err
		}
		lines = append(lines, line)
	}
}

func reader(raw []byte, comma rune) *csv.Reader {
	r := csv.NewReader(bytes.NewReader(raw))
	r.Comma = comma
	r.ReuseRecord = true
	return r
}

// columns holds the index of every mapped column, -1 where none is mapped.
type columns struct{ designators, value, tolerance, rating, partNumber, count, notFitted int }

// separator finds the separator with which the header has every mapped column.
func separator(raw []byte, m Mapping) (rune, columns, error) {
	var first error
	candidates := []rune{',', ';', '\t'}
	if m.Separator != 0 {
		candidates = []rune{m.Separator}
	}
	for _, comma := range candidates {
		header, err := reader(raw, comma).Read()
		if err != nil {
			if first == nil {
				first = formatError(err)
			}
			continue
		}
		c, missing := locate(header, m)
		if missing == nil {
			return comma, c, nil
		}
		var f *FormatError
		if first == nil || len(header) > 1 || !errors.As(first, &f) {
			first = missing
		}
	}
	return 0, columns{}, first
}

func locate(header []string, m Mapping) (columns, error) {
	var fault error
	find := func(member, name string, required bool) int {
		if name == "" {
			if required && fault == nil {
				fault = &FormatError{1, 0, "the mapping names no column for the designators", member}
			}
			return -1
		}
		found := -1
		for i, h := range header {
			if strings.TrimSpace(h) == name {
				if found >= 0 && fault == nil {
					fault = &FormatError{1, 0, fmt.Sprintf("there are two columns %.60q", name), member}
				}
				found = i
			}
		}
		if found < 0 && fault == nil {
			fault = &FormatError{1, 0, fmt.Sprintf("there is no column %.60q; the columns are %s", name, list(header)), member}
		}
		return found
	}
	c := columns{
		find("designators", m.Designators, true), find("value", m.Value, false), find("tolerance", m.Tolerance, false), find("rating", m.Rating, false),
		find("part_number", m.PartNumber, false), find("count", m.Count, false), find("not_fitted", m.NotFitted, false),
	}
	return c, fault
}

func list(header []string) string {
	const most = 12
	quoted := make([]string, 0, most)
	for i, h := range header {
		if i == most {
			quoted = append(quoted, "...")
			break
		}
		quoted = append(quoted, fmt.Sprintf("%.40q", strings.TrimSpace(h)))
	}
	return strings.Join(quoted, ", ")
}

func (c *columns) line(r *csv.Reader, record []string) (Line, error) {
	row, _ := r.FieldPos(0)
	fault := func(column int, format string, args ...any) error {
		line, at := r.FieldPos(column)
		return &FormatError{line, at, fmt.Sprintf(format, args...), ""}
	}
	cell := func(column int) string {
		if column < 0 {
			return ""
		}
		return strings.Clone(strings.TrimSpace(record[column]))
	}
	for i := range record {
		if len(record[i]) > maxCell {
			return Line{}, fault(i, "a cell of more than %d bytes", maxCell)
		}
	}
	l := Line{Row: row, Value: cell(c.value), Tolerance: cell(c.tolerance), Rating: cell(c.rating), PartNumber: cell(c.partNumber), Count: math.NaN()}
	designators, err := Designators(cell(c.designators))
	if err != nil {
		return Line{}, fault(c.designators, "%v", err)
	}
	l.Designators = designators
	if text := cell(c.count); text != "" {
		l.Count, err = strconv.ParseFloat(text, 64)
		if err != nil || !(l.Count >= 0 && l.Count <= 1e9) {
			return Line{}, fault(c.count, "%.40q is not a number of pieces", text)
		}
	}
	l.NotFitted = !slices.Contains([]string{"", "0", "no", "false", "fitted"}, strings.ToLower(cell(c.notFitted)))
	return l, nil
}

// formatError turns an error of the CSV reader into one with a place.
func formatError(err error) error {
	var p *csv.ParseError
	switch {
	case errors.As(err, &p):
		detail := map[error]string{
			csv.ErrBareQuote: "a quotation mark inside a cell that does not begin with one", csv.ErrQuote: "a quoted cell does not end where the cell ends",
			csv.ErrFieldCount: "another number of cells than the header has",
		}[p.Err]
		if detail == "" {
			detail = p.Err.Error()
		}
		return &FormatError{p.Line, p.Column, detail, ""}
	case errors.Is(err, io.EOF):
		return &FormatError{1, 0, "there is no header line", ""}
	}
	return &FormatError{1, 0, err.Error(), ""}
}

func invalidText(raw []byte) error {
	line, column := 1, 1
	for len(raw) > 0 {
		r, size := utf8.DecodeRune(raw)
		if r == utf8.RuneError && size <= 1 {
			break
		}
		column += size
		if r == '\n' {
			line, column = line+1, 1
		}
		raw = raw[size:]
	}
	return &FormatError{line, column, "not UTF-8", ""}
}
