package service

import (
	"math"

	"railproof/calc/corners"
	"railproof/calc/evaluate"
	"railproof/calc/rules"
)

// CornersVerdict is what an analysis says of a limit, or of all.
type CornersVerdict uint8

const (
	NoLimit CornersVerdict = iota
	Pass
	Incomplete // something has no value, or was not looked at
	Fail
)

// String returns the verdict as it stands on the wire.
func (v CornersVerdict) String() string {
	return [...]string{"no-limit", "pass", "incomplete", "fail"}[v]
}

// judge sets the verdict of every line and of the whole. A stage that does not
// work somewhere in the box fails there; one evaluation without an answer leaves
// the whole incomplete.
func (a *CornersAnswer) judge() {
	ends := a.ends()
	blind := ends[evaluate.NoOperatingPoint] || ends[evaluate.Runaway] || ends[evaluate.NotConverged]
	a.Status = evaluate.OK
	if ends[evaluate.NotConverged] {
		a.Status = evaluate.NotConverged
	}
	for i := range a.Items {
		item := &a.Items[i]
		if item.Limit != nil {
			a.judgeItem(item, blind)
		}
		a.Verdict = max(a.Verdict, item.Verdict)
	}
	if full := a.FullLoad; full != nil {
		full.judge()
		a.Verdict, a.Status = max(a.Verdict, full.Verdict), worse(a.Status, full.Status)
	}
	if len(a.Elsewhere) > 0 {
		a.Verdict = max(a.Verdict, Incomplete)
	}
	switch {
	case a.Verdict == Fail || a.Verdict == NoLimit && !anyEnd(ends):
	case anyMisbehaviour(ends):
		a.Verdict = Fail
	case ends[evaluate.NotConverged]:
		a.Verdict = Incomplete
	}
}

func (a *CornersAnswer) judgeItem(item *CornersItem, blind bool) {
	l := item.Limit
	item.Verdict = Pass
	if l.Where == rules.AtNominal {
		v := a.Nominal[item.Index]
		item.Margin = l.margin(v)
		switch {
		case math.IsNaN(v):
			item.Verdict = Incomplete
		case l.Broken(v):
			item.Verdict = Fail
		}
		return
	}
	if blind || a.missing(item) {
		item.Verdict = Incomplete
	}
	for _, t := range item.Targets() {
		v := a.worst(t)
		if m := l.margin(v); !(m >= item.Margin) {
			item.Margin = m
		}
		switch {
		case math.IsNaN(v):
			item.Verdict = max(item.Verdict, Incomplete)
		case l.Broken(v):
			item.Verdict = Fail
		}
	}
}

// missing reports whether some evaluation gave a line's quantity no value although
// the stage had figures.
func (a *CornersAnswer) missing(item *CornersItem) bool {
	if a.Search != nil && a.Search.Missing(item.Index) > 0 {
		return true
	}
	if a.Run == nil {
		return false
	}
	for k := range a.Corners {
		if a.Run.Statistics(k, item.Index).Units < a.Run.Units() {
			return true
		}
	}
	return false
}

// worst returns the worst value of a target that any method has seen; the linear
// estimate counts only where nothing else looked beyond the typical values.
func (a *CornersAnswer) worst(target int) float64 {
	t := &a.Bound.Problem().Targets[target]
	v := math.NaN()
	take := func(x float64) {
		if math.IsNaN(v) || t.Direction == corners.Least && x < v || t.Direction == corners.Greatest && x > v {
			v = x
		}
	}
	if a.Methods.ExtremeValue {
		take(a.Extremes[target].Value)
	}
	if a.Run != nil && len(a.Run.Worst(target)) > 0 {
		take(a.Run.Worst(target)[0].Value)
	}
	if a.Run == nil && !a.Methods.ExtremeValue && a.Linear != nil {
		if t.Direction == corners.Least {
			take(a.Linear[target].Least)
		} else {
			take(a.Linear[target].Greatest)
		}
	}
	if !math.IsNaN(v) {
		take(a.Nominal[t.Quantity])
	}
	return v
}

// ends tells which statuses were met anywhere.
func (a *CornersAnswer) ends() (met [evaluate.StatusCount]bool) {
	met[a.NominalEnd] = true
	if a.Search != nil {
		for _, f := range a.Search.Failures() {
			met[f.Status] = true
		}
	}
	if a.Run != nil {
		for _, f := range a.Run.Failures() {
			met[f.Status] = true
		}
	}
	return met
}

func anyMisbehaviour(met [evaluate.StatusCount]bool) bool {
	return met[evaluate.OverTemperature] || met[evaluate.DropOut] || met[evaluate.TooShortOnTime] || met[evaluate.NoOperatingPoint] || met[evaluate.Runaway]
}

func anyEnd(met [evaluate.StatusCount]bool) bool {
	return anyMisbehaviour(met) || met[evaluate.NotConverged]
}
