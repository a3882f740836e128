package bom

import (
	"context"
	"errors"
	"fmt"
	"math"
	"slices"
	"strings"
	"testing"

	"railproof/calc/parts"
	"railproof/calc/rules"
	"railproof/calc/spread"
	"railproof/calc/stage"
	"railproof/service/substitution"

	"github.com/stretchr/testify/require"
)

var plain = Mapping{Designators: "Ref", Value: "Value", PartNumber: "PN", Count: "Qty"}

func TestReadCSVForms(t *testing.T) {
	want := []string{"C1", "C2", "C3"}
	for name, text := range map[string]string{
		"comma":           "Ref,Value,PN,Qty\n\"C1, C2, C3\",4u7 16 V,a,3\n",
		"semicolon":       "Ref;Value;PN;Qty\r\nC1 C2 C3;4u7 16 V;a;3\r\n",
		"tab":             "Ref\tValue\tPN\tQty\nC1-C3\t4u7 16 V\ta\t3\n",
		"byte-order-mark": "\xef\xbb\xbfRef,Value,PN,Qty\nC1-3,4u7 16 V,a,3\n",
		"other-order":     "Qty;x;PN; Value ;Ref\n3;,;a;4u7 16 V;C1-C3\n",
		"no-last-newline": "Ref,Value,PN,Qty\nC1-C3,4u7 16 V,a,3",
	} {
		t.Run(name, func(t *testing.T) {
			lines, err := ReadCSV([]byte(text), plain)
			require.NoError(t, err)
			require.Len(t, lines, 1)
			require.Equal(t, want, lines[0].Designators)
			require.Equal(t, "4u7 16 V", lines[0].Value)
			require.Equal(t, "a", lines[0].PartNumber)
			require.Equal(t, 3.0, lines[0].Count)
			require.Equal(t, 2, lines[0].Row)
		})
	}
}

func TestCSVQuoting(t *testing.T) {
	lines, err := ReadCSV([]byte("Ref;Value;PN;Qty\nR1;\"10 k\"\"x\"\"; 1 %\";\"a\nb\";1\nR2;1k;c;1\n"), plain)
	require.NoError(t, err)
	require.Equal(t, "10 k\"x\"; 1 %", lines[0].Value)
	require.Equal(t, "a\nb", lines[0].PartNumber)
	require.Equal(t, 4, lines[1].Row, "a cell with a line break")
}

func TestNotFitted(t *testing.T) {
	m := plain
	m.NotFitted = "DNF"
	lines, err := ReadCSV([]byte("Ref,Value,PN,Qty,DNF\nR1,1k,,,x\nR2,1k,,,\nR3,1k,,,No\nR4,1k,,,fitted\n"), m)
	require.NoError(t, err)
	for i, want := range []bool{true, false, false, false} {
		require.Equal(t, want, lines[i].NotFitted, "line %d", i)
	}
	require.True(t, math.IsNaN(lines[0].Count))
}

func TestMalformedCSVNamesLineAndColumn(t *testing.T) {
	head := "Ref,Value,PN,Qty\n"
	cases := map[string]struct {
		text         string
		line, column int
		detail       string
	}{
		"bare-quote":       {head + "R1,1k,a,1\nR2,1\"k,a,1\n", 3, 5, "quotation mark"},
		"open-quote":       {head + "R1,\"1k,a,1\n", 2, 12, "does not end"},
		"quote-then-text":  {head + "R1,\"1k\"x,a,1\n", 2, 7, "does not end"},
		"too-few-cells":    {head + "R1,1k,a,1\nR2,1k\n", 3, 1, "number of cells"},
		"too-many-cells":   {head + "R1,1k,a,1,5\n", 2, 1, "number of cells"},
		"quantity":         {head + "R1,1k,a,one\n", 2, 9, "not a number of pieces"},
		"quantity-nan":     {head + "R1,1k,a,NaN\n", 2, 9, "not a number of pieces"},
		"range":            {head + "R1,1k,a,1\nR9-R2,1k,a,1\n", 3, 1, "not a range"},
		"range-too-long":   {head + "R1-R999999,1k,a,1\n", 2, 1, "more than"},
		"range-two-kinds":  {head + "R1-C4,1k,a,1\n", 2, 1, "not a range"},
		"column-missing":   {"Ref,Val,PN,Qty\n", 1, 0, "no column \"Value\"; the columns are \"Ref\", \"Val\""},
		"column-twice":     {"Ref,Value,PN,Qty,Value\n", 1, 0, "two columns"},
		"no-header":        {"", 1, 0, "no header"},
		"line-ends":        {"Ref,Value,PN,Qty\rR1,1k,a,1\r", 1, 17, "carriage return"},
		"not-utf8":         {head + "R1,1\xffk,a,1\n", 2, 5, "UTF-8"},
		"cell-too-long":    {head + "R1," + strings.Repeat("k", maxCell+1) + ",a,1\n", 2, 4, "more than"},
		"text-too-long":    {strings.Repeat("x", MaxBytes+1), 1, 0, "longer than"},
		"too-many-lines":   {head + strings.Repeat("R1,1k,a,1\n", MaxLines+1), MaxLines + 2, 0, "more than"},
		"header-malformed": {"Re\"f,Value\n", 1, 3, "quotation mark"},
	}
	for name, c := range cases {
		t.Run(name, func(t *testing.T) {
			_, err := ReadCSV([]byte(c.text), plain)
			var f *FormatError
			require.True(t, errors.As(err, &f), "err = %v", err)
			require.Equal(t, c.line, f.Line, f.Detail)
			require.Equal(t, c.column, f.Column, f.Detail)
			require.Contains(t, f.Detail, c.detail)
		})
	}
	_, err := ReadCSV([]byte("a,b\n"), Mapping{Value: "b"})
	require.ErrorContains(t, err, "names no column")
	m := plain
	m.Separator = ';'
	_, err = ReadCSV([]byte(head), m)
	require.ErrorContains(t, err, "no column \"Ref\"", "a separator that is given is not guessed")
}

// provenStage is a small rail with everything that bindings may name.
func provenStage() (*stage.Stage, []spread.Variable) {
	s := stage.NewStage(stage.Synchronous, 1, 1, 0, false, false, true, false)
	s.PhaseCount = 1
	s.Inductor.Inductance, s.Inductor.PartNumber = 6.8e-6, "coil-1"
	s.OutputCapacitors[0] = parts.Capacitor{Capacitance: 22e-6, Count: 2, Kind: parts.CeramicClass2, Rating: parts.CapacitorRating{Voltage: 16}}
	s.InputCapacitors[0] = parts.Capacitor{Capacitance: 10e-6, Count: 1, Rating: parts.CapacitorRating{Voltage: parts.Unknown}}
	s.HighSide.PartNumber = "switch-1"
	s.Feedback.Upper, s.Feedback.Lower, s.Feedback.Reference = 56.2e3, 10.7e3, 0.8
	v := func(field string, typ, tol float64) spread.Variable {
		return spread.Variable{Field: field, Min: typ * (1 - tol), Typ: typ, Max: typ * (1 + tol)}
	}
	return s, []spread.Variable{
		v("inductor/inductance_h", 6.8e-6, 0.2), v("output_capacitors/0/capacitance_f", 22e-6, 0.2), v("feedback/upper_ohm", 56.2e3, 0.01), v("feedback/lower_ohm", 10.7e3, 0.01),
	}
}

// rail has bindings for some roles; no line stands for the others.
func rail(bindings ...Binding) Rail {
	s, spreads := provenStage()
	return Rail{Name: "buoy-5v0", Stage: s, Spreads: spreads, Bindings: bindings, Lineless: Roles(s, spreads), Ranges: []Range{{"C", 10, 19}}}
}

func line(row int, designators, value, partNumber string) Line {
	d, err := Designators(designators)
	if err != nil {
		panic(err)
	}
	return Line{Row: row, Designators: d, Value: value, PartNumber: partNumber, Count: math.NaN()}
}

func run(t *testing.T, lines []Line, r Rail) RailReport {
	t.Helper()
	report, err := Check(context.Background(), lines, []Rail{r}, nil)
	require.NoError(t, err)
	require.Equal(t, report.Verdict, report.Rails[0].Verdict)
	return report.Rails[0]
}

func verdicts(r RailReport) map[string]rules.Verdict {
	m := map[string]rules.Verdict{}
	for _, f := range r.Findings {
		if v, ok := m[f.Aspect]; !ok || v == rules.Pass {
			m[f.Aspect] = f.Verdict
		}
	}
	return m
}

func TestLinesAgainstTheProof(t *testing.T) {
	banks := Binding{Role: "output_capacitors/0", Designators: []string{"C1", "C2"}}
	upper := Binding{Role: "feedback/upper_ohm", Designators: []string{"R1"}}
	coil := Binding{Role: "inductor", Designators: []string{"L1"}}
	gap, ok, bad := rules.NotEvaluated, rules.Pass, rules.Fail
	cases := map[string]struct {
		b    Binding
		line Line
		want map[string]rules.Verdict
		all  rules.Overall
	}{
		"agrees":                   {banks, line(2, "C1-C2", "22 µF 20% 16 V X7R", ""), map[string]rules.Verdict{"count": ok, "value": ok, "tolerance": ok, "rating": ok, "kind": ok}, rules.Passed},
		"better-part":              {banks, line(2, "C1-C2", "22u 10% 25V X7R", ""), map[string]rules.Verdict{"count": ok, "value": ok, "tolerance": ok, "rating": ok, "kind": ok}, rules.Passed},
		"wrong-value":              {banks, line(2, "C1-C2", "10 µF 20% 16 V X7R", ""), map[string]rules.Verdict{"count": ok, "value": bad, "tolerance": bad, "rating": ok, "kind": ok}, rules.Failed},
		"other-value-inside-range": {banks, line(2, "C1-C2", "20 µF 5% 16 V X7R", ""), map[string]rules.Verdict{"count": ok, "value": ok, "tolerance": ok, "rating": ok, "kind": ok}, rules.Passed},
		"wider-tolerance":          {banks, line(2, "C1-C2", "22 µF -20/+80% 16 V X7R", ""), map[string]rules.Verdict{"count": ok, "value": ok, "tolerance": bad, "rating": ok, "kind": ok}, rules.Failed},
		"lower-rating":             {banks, line(2, "C1-C2", "22 µF 20% 10 V X7R", ""), map[string]rules.Verdict{"count": ok, "value": ok, "tolerance": ok, "rating": bad, "kind": ok}, rules.Failed},
		"no-tolerance":             {banks, line(2, "C1-C2", "22 µF 16 V X7R", ""), map[string]rules.Verdict{"count": ok, "value": ok, "tolerance": gap, "rating": ok, "kind": ok}, rules.Incomplete},
		"no-rating":                {banks, line(2, "C1-C2", "22 µF 20 % X7R", ""), map[string]rules.Verdict{"count": ok, "value": ok, "tolerance": ok, "rating": gap, "kind": ok}, rules.Incomplete},
		"other-class":              {banks, line(2, "C1-C2", "22 µF 20 % 16 V C0G", ""), map[string]rules.Verdict{"count": ok, "value": ok, "tolerance": ok, "rating": ok, "kind": bad}, rules.Failed},
		"no-dielectric":            {banks, line(2, "C1-C2", "22 µF 20 % 16 V", ""), map[string]rules.Verdict{"count": ok, "value": ok, "tolerance": ok, "rating": ok, "kind": gap}, rules.Incomplete},
		"ambiguous":                {banks, line(2, "C1-C2", "22M 20% 16 V", ""), map[string]rules.Verdict{"count": ok, "value": gap}, rules.Incomplete},
		"piece-missing":            {banks, line(2, "C1", "22 µF 20% 16 V X7R", ""), map[string]rules.Verdict{"present": bad, "count": bad, "value": ok, "tolerance": ok, "rating": ok, "kind": ok}, rules.Failed},
		"divider":                  {upper, line(2, "R1", "56K2 F", ""), map[string]rules.Verdict{"count": ok, "value": ok, "tolerance": ok}, rules.Passed},
		"divider-next-value":       {upper, line(2, "R1", "56k 1%", ""), map[string]rules.Verdict{"count": ok, "value": bad, "tolerance": bad}, rules.Failed},
		"coil":                     {coil, line(2, "L1", "6u8 20 %", "coil-1"), map[string]rules.Verdict{"count": ok, "part_number": ok, "value": ok, "tolerance": ok}, rules.Passed},
		"coil-other-part":          {coil, line(2, "L1", "6u8 20 %", "coil-9"), map[string]rules.Verdict{"count": ok, "part_number": bad, "value": ok, "tolerance": ok, "rating": gap}, rules.Failed},
		"coil-no-part":             {coil, line(2, "L1", "6u8 20 %", ""), map[string]rules.Verdict{"count": ok, "part_number": gap, "value": ok, "tolerance": ok, "rating": gap}, rules.Incomplete},
		"coil-by-part-number":      {coil, line(2, "L1", "", "coil-1"), map[string]rules.Verdict{"count": ok, "part_number": ok}, rules.Passed},
		"coil-named-but-no-tol":    {coil, line(2, "L1", "6u8", "coil-1"), map[string]rules.Verdict{"count": ok, "part_number": ok, "value": ok}, rules.Passed},
		"coil-named-other-value":   {coil, line(2, "L1", "10u", "coil-1"), map[string]rules.Verdict{"count": ok, "part_number": ok, "value": bad}, rules.Failed},
		"switch":                   {Binding{Role: "high_side", Designators: []string{"Q1"}}, line(2, "Q1", "", "switch-1"), map[string]rules.Verdict{"count": ok, "part_number": ok}, rules.Passed},
		"switch-unnamed-in-proof":  {Binding{Role: "low_side", Designators: []string{"Q1"}}, line(2, "Q1", "", "switch-1"), map[string]rules.Verdict{"count": ok, "part_number": gap}, rules.Incomplete},
		"rating-not-in-proof":      {Binding{Role: "input_capacitors/0", Designators: []string{"C1"}}, line(2, "C1", "10u 1% 50V", ""), map[string]rules.Verdict{"count": ok, "value": ok, "tolerance": bad, "rating": gap}, rules.Failed},
		"no-such-role":             {Binding{Role: "diode", Designators: []string{"D1"}}, line(2, "D1", "", "x"), map[string]rules.Verdict{"present": gap}, rules.Incomplete},
		"no-such-bank":             {Binding{Role: "output_capacitors/7", Designators: []string{"C1"}}, line(2, "C1", "1u", "x"), map[string]rules.Verdict{"present": gap}, rules.Incomplete},
		"no-such-field":            {Binding{Role: "feedback/upper", Designators: []string{"R1"}}, line(2, "R1", "1k", "x"), map[string]rules.Verdict{"present": gap}, rules.Incomplete},
	}
	for name, c := range cases {
		t.Run(name, func(t *testing.T) {
			r := run(t, []Line{c.line}, rail(c.b))
			require.Equal(t, c.want, verdicts(r), "%+v", r.Findings)
			require.Equal(t, c.all, r.Verdict)
			for _, f := range r.Findings {
				require.NotEmpty(t, f.Detail)
			}
		})
	}
}

func TestQuantityAndSeparateColumns(t *testing.T) {
	l := line(2, "C1-C2", "22u X7R", "")
	l.Tolerance, l.Rating, l.Count = "20%", "16", 3
	r := run(t, []Line{l}, rail(Binding{Role: "output_capacitors/0", Designators: []string{"C1", "C2"}}))
	require.Equal(t, map[string]rules.Verdict{"count": rules.Fail, "value": rules.Pass, "tolerance": rules.Pass, "rating": rules.Pass, "kind": rules.Pass}, verdicts(r), "%+v", r.Findings)
}

// Every part of the proof that stands on a board must be bound, or said to have no
// line of its own.
func TestPartsBoundToNothingLeaveTheRailIncomplete(t *testing.T) {
	r := rail(Binding{Role: "inductor", Designators: []string{"L1"}})
	lines := []Line{line(2, "L1", "6u8 20%", "coil-1")}
	require.Equal(t, rules.Passed, run(t, lines, r).Verdict)
	r.Lineless = []string{"high_side", "low_side", "feedback/upper_ohm", "feedback/lower_ohm", "output_capacitors/0"}
	report := run(t, lines, r)
	require.Equal(t, rules.Incomplete, report.Verdict)
	last := report.Findings[len(report.Findings)-1]
	require.Equal(t, "input_capacitors/0", last.Role)
	require.Equal(t, AspectPresent, last.Aspect)
	require.Empty(t, last.Designators)
}

// The line of an inductor states one current and does not say which.
func TestRatedCurrentOfAnInductor(t *testing.T) {
	for text, want := range map[string]rules.Verdict{"6u8 20% 13A": rules.Pass, "6u8 20% 10 A": rules.NotEvaluated, "6u8 20% 8A": rules.Fail, "6u8 20%": rules.NotEvaluated} {
		r := rail(Binding{Role: "inductor", Designators: []string{"L1"}})
		r.Stage.Inductor.PartNumber = ""
		r.Stage.Inductor.Rating.Saturation, r.Stage.Inductor.Rating.Heating = 12, 9
		require.Equal(t, want, verdicts(run(t, []Line{line(2, "L1", text, "")}, r))["rating"], text)
		r.Stage.Inductor.Rating.Heating = parts.Unknown
		require.Equal(t, rules.NotEvaluated, verdicts(run(t, []Line{line(2, "L1", text, "")}, r))["rating"], "%s: one rating is not proven", text)
	}
}

func TestDesignatorsOnTwoLinesAndNotFitted(t *testing.T) {
	b := Binding{Role: "inductor", Designators: []string{"L1"}}
	r := run(t, []Line{line(2, "L1", "6u8 20%", "coil-1"), line(3, "L1", "6u8 20%", "coil-1")}, rail(b))
	require.Equal(t, rules.Fail, r.Findings[0].Verdict)
	require.Contains(t, r.Findings[0].Detail, "more than one line")
	absent := line(2, "L1", "6u8 20%", "coil-1")
	absent.NotFitted = true
	r = run(t, []Line{absent}, rail(b))
	require.Contains(t, r.Findings[0].Detail, "not fitted")
	require.Equal(t, rules.Failed, r.Verdict)
	r = run(t, []Line{absent, line(3, "L1", "6u8 20%", "coil-1")}, rail(b))
	require.Equal(t, rules.Incomplete, r.Verdict, "fitted on one line, not on the other")
}

func TestUnboundLinesThatLookLikeTheyBelong(t *testing.T) {
	lines := []Line{line(2, "C10,C1", "22u 20% 16V", ""), line(3, "C11", "100n", "x"), line(4, "C30", "1u", "")}
	r := run(t, lines, rail(Binding{Role: "output_capacitors/0", Designators: []string{"C10", "C1"}}))
	require.Equal(t, []Unbound{{Rail: "buoy-5v0", Row: 3, Designators: []string{"C11"}, Value: "100n", PartNumber: "x"}}, r.Unbound)
}

func TestNothingBoundIsNoPass(t *testing.T) {
	require.Equal(t, rules.Incomplete, run(t, nil, rail()).Verdict)
	report, err := Check(context.Background(), nil, nil, nil)
	require.NoError(t, err)
	require.Equal(t, rules.Incomplete, report.Verdict)
}

func TestAlternates(t *testing.T) {
	b := Binding{Role: "inductor", Designators: []string{"L1"}, Alternates: []string{"coil-2"}}
	other, spreads := provenStage()
	other.Inductor.Inductance = 8.2e-6
	spreads[0] = spread.Variable{Field: "inductor/inductance_h", Min: 6.5e-6, Typ: 8.2e-6, Max: 9.9e-6}
	for name, c := range map[string]struct {
		verdict substitution.Verdict
		line    Line
		want    rules.Overall
		result  string
	}{
		"accepted-and-fitted":             {substitution.Accepted, line(2, "L1", "8u2 20%", "coil-2"), rules.Passed, "alternate-accepted"},
		"accepted-but-the-text-is-not-it": {substitution.Accepted, line(2, "L1", "6u8 20%", "coil-2"), rules.Failed, "differs"},
		"rejected-and-fitted":             {substitution.Rejected, line(2, "L1", "8u2 20%", "coil-2"), rules.Failed, "alternate-rejected"},
		"rejected-not-fitted":             {substitution.Rejected, line(2, "L1", "6u8 20%", "coil-1"), rules.Failed, "agrees"},
		"review":                          {substitution.NeedsReview, line(2, "L1", "6u8 20%", "coil-1"), rules.Incomplete, "agrees"},
	} {
		t.Run(name, func(t *testing.T) {
			calls := 0
			report, err := Check(context.Background(), []Line{c.line}, []Rail{rail(b)}, func(_ context.Context, rail int, role, partNumber string) (Alternate, error) {
				calls++
				require.Equal(t, "0 inductor coil-2", fmt.Sprint(rail, " ", role, " ", partNumber))
				return Alternate{Outcome: substitution.Outcome{Verdict: c.verdict, Reasons: []substitution.Reason{{Detail: "why"}}}, Stage: other, Spreads: spreads}, nil
			})
			require.NoError(t, err)
			require.Equal(t, 1, calls)
			require.Equal(t, c.want, report.Verdict, "%+v", report.Rails[0].Findings)
			require.Len(t, report.Rails[0].Alternates, 1)
			require.Equal(t, 1, report.Bound)
			require.Equal(t, c.result, report.ByLine()[0].Verdict.String())
		})
	}
	_, err := Check(context.Background(), nil, []Rail{rail(b)}, nil)
	require.ErrorContains(t, err, "nothing to assess them with")
	stopped, cancel := context.WithCancel(context.Background())
	cancel()
	_, err = Check(stopped, nil, []Rail{rail(b)}, func(context.Context, int, string, string) (Alternate, error) { return Alternate{}, nil })
	require.ErrorIs(t, err, context.Canceled)
}

func TestFiveThousandLinesAndFortyRails(t *testing.T) {
	var text strings.Builder
	text.WriteString("Ref;Value;PN;Qty\n")
	for i := range 5000 {
		fmt.Fprintf(&text, "C%d, C%d;22 µF 20%% 16 V X7R;cap-%d;2\n", 2*i, 2*i+1, i)
	}
	rails := make([]Rail, 40)
	for i := range rails {
		rails[i] = rail(Binding{Role: "output_capacitors/0", Designators: []string{fmt.Sprintf("C%d", 200*i), fmt.Sprintf("C%d", 200*i+1)}})
		rails[i].Ranges = []Range{{"C", 200 * i, 200*i + 199}}
	}
	lines, err := ReadCSV([]byte(text.String()), plain)
	require.NoError(t, err)
	report, err := Check(context.Background(), lines, rails, nil)
	require.NoError(t, err)
	require.Equal(t, rules.Passed, report.Verdict)
	require.Equal(t, 40, report.Bound)
	require.Len(t, report.Rails[7].Unbound, 99)
}

func TestLineResults(t *testing.T) {
	r := rail(
		Binding{Role: "inductor", Designators: []string{"L1"}},
		Binding{Role: "feedback/upper_ohm", Designators: []string{"R1"}},
		Binding{Role: "feedback/lower_ohm", Designators: []string{"R2"}},
		Binding{Role: "output_capacitors/0", Designators: []string{"C1", "C2"}},
		Binding{Role: "high_side", Designators: []string{"Q1"}},
	)
	report, err := Check(context.Background(), []Line{
		line(9, "L1", "6u8 20%", "coil-1"), line(4, "R1", "56k2 1%", ""), line(5, "R2", "10.7", ""), line(6, "C1", "22u 16V 20% X7R", ""), line(7, "Q1", "", ""),
	}, []Rail{r}, nil)
	require.NoError(t, err)
	list := report.ByLine()
	got := make([]string, 0, len(list))
	for _, l := range list {
		got = append(got, fmt.Sprint(l.Row, " ", l.Role, " ", l.Designators, " ", l.Verdict))
	}
	require.Equal(t, []string{
		"0 output_capacitors/0 [C2] missing", "4 feedback/upper_ohm [R1] agrees", "5 feedback/lower_ohm [R2] unreadable",
		"6 output_capacitors/0 [C1] agrees", "7 high_side [Q1] needs-review", "9 inductor [L1] agrees",
	}, got)
}

func TestRanges(t *testing.T) {
	g, err := ParseRange("C10", "C19")
	require.NoError(t, err)
	require.Equal(t, Range{"C", 10, 19}, g)
	require.True(t, g.covers("C10") && g.covers("C19"))
	require.False(t, g.covers("C20") || g.covers("CX15") || g.covers("C"))
	for _, bad := range [][2]string{{"C9", "C1"}, {"C1", "R9"}, {"C", "C9"}, {"", ""}} {
		_, err := ParseRange(bad[0], bad[1])
		require.Error(t, err, bad)
	}
}

// Any bytes either are lines or are refused at a place inside the text.
func FuzzReadCSV(f *testing.F) {
	for _, s := range []string{"Ref,Value,PN,Qty\nC1,1u,a,1\n", "Ref;Value;PN;Qty\n\"C1\"\"\";1;;\n", "\xef\xbb\xbfRef\tValue\tPN\tQty\n", "Ref,Value,PN,Qty\nC1-C9,\"a\nb\",,\n", "\"", "Ref,Value,PN,Qty\n-,,,\n"} {
		f.Add([]byte(s))
	}
	f.Fuzz(func(t *testing.T, raw []byte) {
		lines, err := ReadCSV(raw, plain)
		var at *FormatError
		switch {
		case err == nil:
			for _, l := range lines {
				if l.Row < 2 || l.Count < 0 {
					t.Fatalf("%+v", l)
				}
			}
			if _, err := Check(context.Background(), lines, []Rail{rail(Binding{Role: "output_capacitors/0", Designators: []string{"C1"}})}, nil); err != nil {
				t.Fatal(err)
			}
		case !errors.As(err, &at) || at.Line < 1 || at.Column < 0 || at.Detail == "":
			t.Fatalf("refused without a place: %v", err)
		}
	})
}

// Any text is read or refused; what is read is bounded and has no empty designator.
func FuzzDesignators(f *testing.F) {
	for _, text := range []string{"C1, C4-C7", "R1-9", "L1", "C9-C1", "-", "C1-C999999999", "\u00a0U1;U2"} {
		f.Add(text)
	}
	f.Fuzz(func(t *testing.T, text string) {
		list, err := Designators(text)
		if err != nil {
			return
		}
		if len(list) > maxDesignators || slices.Contains(list, "") {
			t.Fatalf("%q: %d designators", text, len(list))
		}
	})
}
