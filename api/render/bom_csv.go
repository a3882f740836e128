package render

import (
	"strconv"
	"strings"

	"railproof/api/wire"
)

// BomChecksCSV writes a line per bound line and difference, one for a line that
// agrees, and one without a line of the document per difference about a role as a
// whole.
func BomChecksCSV(a *wire.BomChecksAnswer) []byte {
	s := newSheet("line", "rail", "role", "designators", "verdict", "field", "proven", "found", "detail")
	for i := range a.Lines {
		l := &a.Lines[i]
		line := ""
		if l.Line != nil {
			line = strconv.Itoa(*l.Line)
		}
		head := []string{line, words(l.Rail), l.Role, words(strings.Join(l.Designators, " ")), l.Verdict}
		if len(l.Differences) == 0 {
			s.row(append(head, "", "", "", "")...)
		}
		for _, d := range l.Differences {
			s.row(append(head[:5:5], d.Field, words(d.Proven), words(d.Found), words(d.Detail))...)
		}
	}
	for i := range a.Rails {
		r := &a.Rails[i]
		for _, role := range r.Roles {
			for _, d := range role.Differences {
				verdict := "needs-review"
				if d.Verdict == "fail" {
					verdict = "differs"
				}
				s.row("", words(r.Name), role.Role, "", verdict, d.Field, words(d.Proven), words(d.Found), words(d.Detail))
			}
		}
	}
	return s.bytes()
}
