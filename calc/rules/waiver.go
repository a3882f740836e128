package rules

import (
	"fmt"
	"strconv"
)

// Date is a calendar date of the Gregorian calendar.
type Date struct{ Year, Month, Day int }

// ParseDate reads a date written YYYY-MM-DD (RFC 3339 full-date).
func ParseDate(text string) (Date, error) {
	bad := fmt.Errorf("%.20q is not a date of the form 2030-01-31", text)
	if len(text) != 10 || text[4] != '-' || text[7] != '-' {
		return Date{}, bad
	}
	number := func(s string) int {
		for i := range len(s) {
			if s[i] < '0' || s[i] > '9' {
				return -1
			}
		}
		n, _ := strconv.Atoi(s)
		return n
	}
	d := Date{number(text[:4]), number(text[5:7]), number(text[8:])}
	if d.Year < 0 || d.Month < 1 || d.Month > 12 || d.Day < 1 || d.Day > daysIn(d.Year, d.Month) {
		return Date{}, bad
	}
	return d, nil
}

func daysIn(year, month int) int {
	switch month {
	case 2:
		if year%4 == 0 && (year%100 != 0 || year%400 == 0) {
			return 29
		}
		return 28
	case 4, 6, 9, 11:
		return 30
	}
	return 31
}

// Before reports whether d is an earlier day than e.
func (d Date) Before(e Date) bool {
	if d.Year != e.Year {
		return d.Year < e.Year
	}
	if d.Month != e.Month {
		return d.Month < e.Month
	}
	return d.Day < e.Day
}

// String returns the date as YYYY-MM-DD.
func (d Date) String() string { return fmt.Sprintf("%04d-%02d-%02d", d.Year, d.Month, d.Day) }

// Waiver accepts one rule's finding at one place until a date.
type Waiver struct {
	Rule     string // "general-practice/inductor-heating"
	Pointer  string // of the finding
	Reason   string
	Approver string
	Expires  Date // last day on which it holds
}

// Rules of this package about waivers themselves.
const (
	RuleWaiverExpired = "waivers/expired"
	RuleWaiverUnused  = "waivers/unused"
)

// waive applies the waivers to the findings and adds findings about waivers that
// are expired or have nothing to waive. A waiver holds through its last day.
func waive(findings []Finding, waivers []Waiver, today Date) []Finding {
	n := len(findings)
	for i := range waivers {
		w := &waivers[i]
		matched := false
		for j := range findings[:n] {
			f := &findings[j]
			if f.Rule != w.Rule || f.Pointer != w.Pointer || f.Verdict != Fail && f.Verdict != NotEvaluated {
				continue
			}
			matched = true
			if !w.Expires.Before(today) {
				f.WaivedFrom, f.Verdict, f.Waiver = f.Verdict, Waived, w
			}
		}
		switch {
		case w.Expires.Before(today):
			findings = append(findings, about(w, RuleWaiverExpired, "Waiver expired", Warning,
				fmt.Sprintf("The waiver of %s expired on %s, before %s.", w.Rule, w.Expires, today)))
		case !matched:
			findings = append(findings, about(w, RuleWaiverUnused, "Waiver without use", Note,
				fmt.Sprintf("The waiver of %s has nothing to waive: no such finding, or it passes.", w.Rule)))
		}
	}
	return findings
}

func about(w *Waiver, rule, title string, s Severity, detail string) Finding {
	f := blank()
	f.Rule, f.Title, f.Severity, f.Pointer, f.Verdict, f.Detail, f.Waiver = rule, title, s, w.Pointer, Fail, detail, w
	f.Basis = "this service's own rule about waivers"
	return f
}
