package rules

// ChangeKind tells how a finding differs between two checks.
type ChangeKind uint8

const (
	Unchanged ChangeKind = iota
	Appeared             // only the second check has it
	Disappeared
	VerdictChanged
	MarginChanged
)

// String returns the kind as it stands on the wire.
func (k ChangeKind) String() string {
	return [...]string{"unchanged", "appeared", "disappeared", "verdict-changed", "margin-changed"}[k]
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
			changes = append(changes, Change{Disappeared, b, nil})
			delete(earlier, place{before[i].Rule, before[i].Pointer})
		}
	}
	return changes
}

func kindOf(before, after *Finding) ChangeKind {
	switch {
	case before == nil:
		return Appeared
	case before.Verdict != after.Verdict:
		return VerdictChanged
	case before.Margin-after.Margin > sameMargin || after.Margin-before.Margin > sameMargin:
		return MarginChanged
	}
	return Unchanged
}
