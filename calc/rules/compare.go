package rules

// ChangeKind tells how a finding differs between two checks.
type ChangeKind uint8

const (
	Unchanged  ChangeKind = iota
	Appears               // only the second check has it
	Disappears            // only the first check has it
	Better                // the verdict, or the margin of the same verdict
	Worse
)

// String returns the kind as it stands on the wire.
func (k ChangeKind) String() string {
	return [...]string{"unchanged", "appears", "disappears", "better", "worse"}[k]
}

// Change is one finding in two checks; nil where a check does not have it.
type Change struct {
	Kind          ChangeKind
	Before, After *Finding
}

// sameMargin is the difference of two margins below which a finding counts as
// unchanged: the solvers agree to about this.
const sameMargin = 1e-6 // [1]

// Compare pairs the findings of two checks by rule and pointer, in the order of
// the second check and then of what only the first has.
func Compare(before, after []Finding) []Change {
	type place struct{ rule, pointer string }
	earlier := make(map[place]*Finding, len(before))
	for i := range before {
		earlier[place{before[i].Rule, before[i].Pointer}] = &before[i]
	}
	var changes []Change
	for i := range after {
		f := &after[i]
		at := place{f.Rule, f.Pointer}
		b := earlier[at]
		delete(earlier, at)
		changes = append(changes, Change{kindOf(b, f), b, f})
	}
	for i := range before {
		if b, left := earlier[place{before[i].Rule, before[i].Pointer}]; left {
			changes = append(changes, Change{Disappears, b, nil})
			delete(earlier, place{before[i].Rule, before[i].Pointer})
		}
	}
	return changes
}

func kindOf(before, after *Finding) ChangeKind {
	if before == nil {
		return Appears
	}
	gain := after.Margin - before.Margin
	if a, b := worth[before.Verdict], worth[after.Verdict]; a != b {
		gain = float64(b - a)
	}
	switch {
	case gain > sameMargin:
		return Better
	case gain < -sameMargin:
		return Worse
	}
	return Unchanged
}

// worth orders verdicts from the worst to the best.
var worth = [...]int{Fail: 0, NotEvaluated: 1, Waived: 2, Pass: 3}
