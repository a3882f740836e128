package rules

import (
	"fmt"
	"math"
	"strings"
	"unicode"
	"unicode/utf8"

	"railproof/calc/quantity"
)

// Message is the text of a finding with places for its figures: {value},
// {limit}, {unit}, {margin}, {part}, {rule}.
type Message struct{ pieces []piece }

type piece struct{ text, place string }

var places = map[string]bool{"value": true, "limit": true, "unit": true, "margin": true, "part": true, "rule": true}

// ParseMessage reads a template. The error names what is not understood.
func ParseMessage(text string) (Message, error) {
	var m Message
	for text != "" {
		open := strings.IndexByte(text, '{')
		if open < 0 {
			m.pieces = append(m.pieces, piece{text: text})
			break
		}
		shut := strings.IndexByte(text[open:], '}')
		if shut < 0 {
			return Message{}, fmt.Errorf("a { without its }")
		}
		place := text[open+1 : open+shut]
		if !places[place] {
			return Message{}, fmt.Errorf("{%s} is none of {value} {limit} {unit} {margin} {part} {rule}", place)
		}
		m.pieces = append(m.pieces, piece{text: text[:open], place: place})
		text = text[open+shut+1:]
	}
	return m, nil
}

// fill returns the text with a finding's figures in it. Where a figure's unit follows
// it, both are written as suits the figure: 282.5 ns for 2.825e-7 s.
func (m Message) fill(f *Finding, part string) string {
	var b strings.Builder
	own := quantity.Symbol(f.Unit)
	symbol := own // of the unit that comes next
	for i, p := range m.pieces {
		text := p.text
		if rest, is := strings.CutPrefix(text, " "+own); symbol != own && is {
			text, symbol = " "+symbol+rest, own
		}
		if p.place == "unit" && text == " " && own == "" {
			text = ""
		}
		b.WriteString(text)
		figure := func(x float64) string {
			if math.IsNaN(x) {
				return "unknown"
			}
			figures := fmt.Sprintf("%.4g", x)
			if m.unitFollows(i+1, own) {
				figures, symbol = quantity.Parted(x, f.Unit)
			}
			return figures
		}
		switch p.place {
		case "value":
			b.WriteString(figure(f.Value))
		case "limit":
			b.WriteString(figure(f.Limit))
		case "unit":
			b.WriteString(symbol)
			symbol = own
		case "margin":
			b.WriteString(quantity.Written(100*f.Margin, "%"))
		case "part":
			b.WriteString(part)
		case "rule":
			b.WriteString(f.Rule)
		}
	}
	return strings.TrimSpace(b.String())
}

// unitFollows reports whether piece i begins with the unit.
func (m Message) unitFollows(i int, symbol string) bool {
	if i == len(m.pieces) {
		return false
	}
	if p := m.pieces[i]; p.text == " " && p.place == "unit" {
		return true
	}
	rest, is := strings.CutPrefix(m.pieces[i].text, " "+symbol)
	next, _ := utf8.DecodeRuneInString(rest)
	return is && (rest == "" || !unicode.IsLetter(next) && !strings.ContainsRune("/^²³", next))
}
