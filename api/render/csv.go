package render

import (
	"bytes"
	"encoding/csv"
	"strconv"
	"strings"
	"unicode"
	"unicode/utf8"

	"railproof/api/wire"
)

// sheet is a CSV file in the making (RFC 4180).
type sheet struct {
	text bytes.Buffer
	csv  *csv.Writer
}

func newSheet(header ...string) *sheet {
	s := new(sheet)
	s.csv = csv.NewWriter(&s.text)
	s.csv.UseCRLF = true
	s.row(header...)
	return s
}

func (s *sheet) row(cells ...string) {
	// a buffer takes every write; an error cannot come up
	_ = s.csv.Write(cells)
}

func (s *sheet) bytes() []byte {
	s.csv.Flush()
	return s.text.Bytes()
}

// number writes the shortest decimal that reads back as v.
func number(v float64) string { return strconv.FormatFloat(v, 'g', -1, 64) }

// words keeps text of a caller from being taken for a formula by a spreadsheet, which
// may pass over white space before it and take wide signs for usual ones.
func words(s string) string {
	begin := strings.TrimLeftFunc(s, unicode.IsSpace)
	if first, _ := utf8.DecodeRuneInString(begin); begin != "" && strings.ContainsRune("=+-@＝＋－＠", first) || strings.HasPrefix(s, "\t") || strings.HasPrefix(s, "\r") || strings.HasPrefix(s, "\n") {
		return "'" + s
	}
	return s
}

// headed writes a column's name with its unit, as the contract names it.
func headed(name string) string { return withUnit(name, wire.UnitOf(name)) }

func withUnit(name, unit string) string {
	if unit == "" || unit == "1" {
		return name
	}
	return name + " [" + unit + "]"
}
