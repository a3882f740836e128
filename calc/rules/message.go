package rules

import (
	"fmt"
	"math"
	"strings"
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

// fill returns the text with a finding's figures in it.
func (m Message) fill(f *Finding, part string) string {
	var b strings.Builder
	for _, p := range m.pieces {
		b.WriteString(p.text)
		switch p.place {
		case "value":
			b.WriteString(figure(f.Value))
		case "limit":
			b.WriteString(figure(f.Limit))
		case "unit":
			b.WriteString(printed(f.Unit))
		case "margin":
			b.WriteString(figure(100*f.Margin) + " %")
		case "part":
			b.WriteString(part)
		case "rule":
			b.WriteString(f.Rule)
		}
	}
	return strings.TrimSpace(b.String())
}

// figure prints a number for people, to four digits.
func figure(x float64) string {
	if math.IsNaN(x) {
		return "unknown"
	}
	return fmt.Sprintf("%.4g", x)
}

// printed returns how a UCUM code is written in a sentence.
func printed(unit string) string {
	switch unit {
	case "1":
		return ""
	case "Cel":
		return "°C"
	case "Ohm":
		return "Ω"
	}
	return unit
}
