package wire

import (
	"strconv"

	"railproof/calc/rules"
)

// Waiver is a deviation that somebody has accepted.
type Waiver struct {
	Rule     string `json:"rule"`
	Pointer  string `json:"pointer"`
	Reason   string `json:"reason"`
	Approver string `json:"approved_by"`
	Expires  string `json:"expires_on"`
}

func encodeWaiver(w *rules.Waiver) *Waiver {
	return &Waiver{w.Rule, w.Pointer, w.Reason, w.Approver, w.Expires.String()}
}

// decodeWaivers reads waivers and the date with which they are compared, which must
// be given where a waiver is.
func decodeWaivers(list []Waiver, date string) (waivers []rules.Waiver, today rules.Date, faults []Fault) {
	bad := func(at, detail, received string) {
		faults = append(faults, Fault{Pointer: at, Keyword: "date", Detail: detail, Limit: "a date of the calendar, YYYY-MM-DD", Received: received})
	}
	var err error
	if date != "" {
		if today, err = rules.ParseDate(date); err != nil {
			bad("/date", "no date of the calendar", date)
		}
	} else if len(list) > 0 {
		faults = append(faults, Fault{Pointer: "/date", Keyword: "required", Detail: "waivers expire: the date to compare them with must be given, so that the result can be reproduced"})
	}
	first := map[[2]string]int{}
	for i, w := range list {
		at := "/waivers/" + strconv.Itoa(i)
		expires, err := rules.ParseDate(w.Expires)
		if err != nil {
			bad(at+"/expires_on", "no date of the calendar", w.Expires)
		}
		if w.Reason == "" {
			faults = append(faults, Fault{Pointer: at + "/reason", Keyword: "required", Detail: "a waiver needs a reason"})
		}
		if w.Approver == "" {
			faults = append(faults, Fault{Pointer: at + "/approved_by", Keyword: "required", Detail: "a waiver needs somebody who approved it"})
		}
		key := [2]string{w.Rule, w.Pointer}
		if before, twice := first[key]; twice {
			faults = append(faults, Fault{Pointer: at, Keyword: "duplicate", Detail: "the finding is waived already by /waivers/" + strconv.Itoa(before)})
		}
		first[key] = i
		waivers = append(waivers, rules.Waiver{Rule: w.Rule, Pointer: w.Pointer, Reason: w.Reason, Approver: w.Approver, Expires: expires})
	}
	return waivers, today, faults
}
