package docs

import (
	"html"
	"regexp"
	"strings"
)

// HTML renders the Markdown that our pages are written in: headings, paragraphs,
// lists of one level, tables, fenced code, and inside a line code, strong text and
// links. Everything else stands as it is written; no HTML passes.
func HTML(markdown string) string {
	r := renderer{lines: strings.Split(strings.TrimRight(markdown, "\n"), "\n")}
	for r.more() {
		r.block()
	}
	return r.out.String()
}

type renderer struct {
	lines []string
	at    int
	out   strings.Builder
}

func (r *renderer) more() bool   { return r.at < len(r.lines) }
func (r *renderer) line() string { return r.lines[r.at] }

var (
	heading = regexp.MustCompile(`^(#{1,4}) (.+)$`)
	bullet  = regexp.MustCompile(`^[-*] (.+)$`)
	ordered = regexp.MustCompile(`^\d+\. (.+)$`)
)

func (r *renderer) block() {
	line := r.line()
	switch {
	case strings.TrimSpace(line) == "":
		r.at++
	case strings.HasPrefix(line, "```"):
		r.code()
	case strings.HasPrefix(line, "|"):
		r.table()
	case heading.MatchString(line):
		m := heading.FindStringSubmatch(line)
		tag := "h" + string('0'+rune(len(m[1])))
		r.out.WriteString("<" + tag + ` id="` + anchor(m[2]) + `">` + inline(m[2]) + "</" + tag + ">\n")
		r.at++
	case bullet.MatchString(line):
		r.list("ul", bullet)
	case ordered.MatchString(line):
		r.list("ol", ordered)
	default:
		r.paragraph()
	}
}

func (r *renderer) code() {
	r.at++
	r.out.WriteString("<pre><code>")
	for r.more() && !strings.HasPrefix(r.line(), "```") {
		r.out.WriteString(html.EscapeString(r.line()) + "\n")
		r.at++
	}
	r.at++
	r.out.WriteString("</code></pre>\n")
}

func (r *renderer) table() {
	r.out.WriteString("<div class=\"table\"><table>\n")
	cell := "th"
	for r.more() && strings.HasPrefix(r.line(), "|") {
		line := strings.Trim(strings.TrimSpace(r.line()), "|")
		r.at++
		if strings.Trim(line, "|-: ") == "" {
			continue
		}
		r.out.WriteString("<tr>")
		for _, c := range strings.Split(strings.ReplaceAll(line, `\|`, "\x00"), "|") {
			r.out.WriteString("<" + cell + ">" + inline(strings.ReplaceAll(strings.TrimSpace(c), "\x00", "|")) + "</" + cell + ">")
		}
		r.out.WriteString("</tr>\n")
		cell = "td"
	}
	r.out.WriteString("</table></div>\n")
}

func (r *renderer) list(tag string, item *regexp.Regexp) {
	r.out.WriteString("<" + tag + ">\n")
	for r.more() && item.MatchString(r.line()) {
		text := item.FindStringSubmatch(r.line())[1]
		r.at++
		for r.more() && strings.HasPrefix(r.line(), "  ") {
			text += " " + strings.TrimSpace(r.line())
			r.at++
		}
		r.out.WriteString("<li>" + inline(text) + "</li>\n")
	}
	r.out.WriteString("</" + tag + ">\n")
}

func (r *renderer) paragraph() {
	var text []string
	for r.more() {
		line := r.line()
		if strings.TrimSpace(line) == "" || len(text) > 0 && (heading.MatchString(line) || strings.HasPrefix(line, "```") || strings.HasPrefix(line, "|") || bullet.MatchString(line)) {
			break
		}
		text = append(text, strings.TrimSpace(line))
		r.at++
	}
	r.out.WriteString("<p>" + inline(strings.Join(text, " ")) + "</p>\n")
}

var (
	code   = regexp.MustCompile("`([^`]+)`")
	strong = regexp.MustCompile(`\*\*([^*]+)\*\*`)
	link   = regexp.MustCompile(`\[([^\]]+)\]\(([^)\s]+)\)`)
)

// inline renders what stands inside a line; code keeps its characters.
func inline(text string) string {
	var b strings.Builder
	for {
		at := code.FindStringSubmatchIndex(text)
		if at == nil {
			b.WriteString(marks(text))
			return b.String()
		}
		b.WriteString(marks(text[:at[0]]))
		b.WriteString("<code>" + html.EscapeString(text[at[2]:at[3]]) + "</code>")
		text = text[at[1]:]
	}
}

func marks(text string) string {
	text = html.EscapeString(text)
	text = strong.ReplaceAllString(text, "<strong>$1</strong>")
	return link.ReplaceAllStringFunc(text, func(m string) string {
		parts := link.FindStringSubmatch(m)
		target := parts[2]
		if !strings.HasPrefix(target, "https://") && !strings.HasPrefix(target, "/") && !strings.HasPrefix(target, "#") && !strings.HasSuffix(target, ".md") {
			return m
		}
		if name, found := strings.CutSuffix(target, ".md"); found {
			target = "/docs/" + name
		}
		return `<a href="` + target + `">` + parts[1] + "</a>"
	})
}

var notAnchor = regexp.MustCompile(`[^a-z0-9]+`)

// anchor makes the name under which a heading can be linked.
func anchor(title string) string {
	return strings.Trim(notAnchor.ReplaceAllString(strings.ToLower(title), "-"), "-")
}
