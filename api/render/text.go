package render

import (
	"strings"
	"unicode/utf8"
)

// width is the greatest number of columns of a text page.
const width = 100

// page is plain text in the making.
type page struct{ b strings.Builder }

// line writes one line.
func (p *page) line(parts ...string) {
	p.b.WriteString(strings.TrimRight(strings.Join(parts, ""), " ") + "\n")
}

// title writes a heading after an empty line.
func (p *page) title(text string) {
	if p.b.Len() > 0 {
		p.b.WriteByte('\n')
	}
	p.line(text)
}

// wrapped writes text in lines of at most the page's width, the later ones
// indented.
func (p *page) wrapped(text, indent string) {
	line := ""
	for _, word := range strings.Fields(text) {
		switch {
		case line == "":
			line = word
		case utf8.RuneCountInString(line)+1+utf8.RuneCountInString(word) <= width:
			line += " " + word
		default:
			p.line(line)
			line = indent + word
		}
	}
	if line != "" {
		p.line(line)
	}
}

// align tells how the cells of a column stand.
type align uint8

const (
	left align = iota
	right
)

// table writes rows under a header, each column as wide as its widest cell.
func (p *page) table(aligns []align, header []string, rows [][]string) {
	widths := make([]int, len(header))
	for _, row := range append([][]string{header}, rows...) {
		for i, cell := range row {
			widths[i] = max(widths[i], utf8.RuneCountInString(cell))
		}
	}
	write := func(row []string) {
		var line strings.Builder
		for i, cell := range row {
			pad := strings.Repeat(" ", widths[i]-utf8.RuneCountInString(cell))
			if aligns[i] == right {
				line.WriteString(pad + cell)
			} else {
				line.WriteString(cell + pad)
			}
			line.WriteString("  ")
		}
		p.line(clipped(strings.TrimRight(line.String(), " ")))
	}
	write(header)
	rule := make([]string, len(header))
	for i := range rule {
		rule[i] = strings.Repeat("-", widths[i])
	}
	write(rule)
	for _, row := range rows {
		write(row)
	}
}

// clipped cuts a line at the page's width.
func clipped(line string) string {
	if utf8.RuneCountInString(line) <= width {
		return line
	}
	return string([]rune(line)[:width-1]) + "…"
}
