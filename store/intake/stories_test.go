package intake

import (
	"fmt"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"

	"difaudit/dif"
)

// Duplicates and attempts: 1,240 rows of 1,226 candidates, with eight exact copies,
// four second attempts and two candidates whose rows contradict each other. They stop
// the run; without their four rows 1,224 candidates are left. The numbers are those
// of the acceptance story.
func TestStoryDuplicates(t *testing.T) {
	t.Parallel()
	var lines []string
	row := func(c, attempt, answers int) {
		lines = append(lines, fmt.Sprintf("c%04d,%c,%d,%d,%d,%d\n", c, "mf"[c%2], attempt, answers&1, answers>>1&1, answers>>2&1))
	}
	for c := range 1226 {
		row(c, 1, c)
	}
	row(1224, 1, 1)
	row(1225, 1, 0)
	for c := range 8 {
		row(100+c, 1, 100+c)
	}
	for c := range 4 {
		row(200+c, 2, c)
	}
	header := "candidate_id,sex,attempt,Q1,Q2,Q3\n"
	p := input{responses: header + strings.Join(lines, "")}.problems(t)
	if len(lines) != 1240 || p.Count(conflictingDuplicate) != 2 || p.Count(exactDuplicate) != 8 {
		t.Errorf("%d rows, %d conflicts, %d copies; want 1240, 2, 8", len(lines), p.Count(conflictingDuplicate), p.Count(exactDuplicate))
	}
	if o := p.kind(conflictingDuplicate).Occurrences[0]; o.Row != 1226 || !strings.Contains(o.Message, "rows 1226, 1228 ") {
		t.Errorf("the first conflict is reported as %v", o)
	}
	result := input{responses: header + strings.Join(append(lines[:1224:1224], lines[1228:]...), "")}.good(t)
	d := result.Data
	sex, m, f := "sex", "m", "f"
	want := []dif.Exclusion{
		{Reason: dif.ExcludedExactDuplicate, Count: 8},
		{Reason: dif.ExcludedExactDuplicate, Grouping: &sex, Label: &f, Count: 4},
		{Reason: dif.ExcludedExactDuplicate, Grouping: &sex, Label: &m, Count: 4},
		{Reason: dif.ExcludedOtherAttempt, Count: 4},
		{Reason: dif.ExcludedOtherAttempt, Grouping: &sex, Label: &f, Count: 2},
		{Reason: dif.ExcludedOtherAttempt, Grouping: &sex, Label: &m, Count: 2},
	}
	if diff := cmp.Diff(want, d.Exclusions); diff != "" {
		t.Error(diff)
	}
	if d.Received != 1236 || d.Candidates() != 1224 {
		t.Errorf("%d received, %d left; want 1236, 1224", d.Received, d.Candidates())
	}
	if notes := strings.Join(result.Notes, "\n"); !strings.Contains(notes, "1236 received, 8 exact copies collapsed (1228 left), 4 other attempts left out (1224 left), 1224 to be analysed") {
		t.Errorf("the flow is not told:\n%s", notes)
	}
}

// Group codes: 5,000 candidates with six declared codes; 212 rows hold an undeclared
// one, 430 none, 96 two. The numbers are those of the acceptance story.
func TestStoryUnknownGroupCode(t *testing.T) {
	t.Parallel()
	var b strings.Builder
	b.WriteString("candidate_id,ethnicity,Q1\n")
	for c := range 5000 {
		label := fmt.Sprint(1 + c%6)
		switch {
		case c < 212:
			label = "7"
		case c < 642:
			label = ""
		case c < 738:
			label = "2;5"
		}
		fmt.Fprintf(&b, "c%04d,%s,%d\n", c, label, c%2)
	}
	rule := dif.GroupingRule{Labels: []string{"1", "2", "3", "4", "5", "6"}, NotStated: []string{"0"}}
	plan := func(p *dif.Plan) {
		p.Comparisons = []dif.PlannedComparison{{Grouping: "ethnicity", Reference: "1", Focal: "each"}}
		p.Groupings = map[string]dif.GroupingRule{"ethnicity": rule}
	}
	p := input{responses: b.String(), plan: plan}.problems(t)
	if p.Count(undeclaredLabel) != 212 || p.Count(severalLabels) != 96 || !p.HasErrors() {
		t.Errorf("%d undeclared, %d several; want 212, 96", p.Count(undeclaredLabel), p.Count(severalLabels))
	}
	if o := p.kind(undeclaredLabel).Occurrences[0]; o.Row != 2 {
		t.Errorf("first row %d, want 2", o.Row)
	}
	rule.Several, rule.NotStated = dif.SeveralNotStated, []string{"0", "7"}
	result := input{responses: b.String(), plan: plan}.good(t)
	if n := result.Problems.Count(emptyLabel); n != 212+430+96 {
		t.Errorf("%d not stated, want 738", n)
	}
	for _, w := range result.Data.Warnings {
		if w.Code == emptyLabel && !strings.HasPrefix(w.Message, "738 candidates ") {
			t.Errorf("warning %q", w.Message)
		}
	}
}

// Keys: 2,400 candidates, 120 items, two forms. Items 31, 32 and 90 lack a key, item
// 57 has B on form 1 and D on form 2, and 38 answers are E where there are four
// options. The numbers are those of the acceptance story.
func TestStoryKeys(t *testing.T) {
	t.Parallel()
	items, forms, order := "item_id,key,options\n", "form,position,item_id,key\n", ""
	var b strings.Builder
	b.WriteString("candidate_id,sex,form")
	for i := 1; i <= 120; i++ {
		key := string("ABCD"[i%4])
		switch i {
		case 31, 32, 90, 57:
			key = ""
		}
		items += fmt.Sprintf("I%03d,%s,4\n", i, key)
		fmt.Fprintf(&b, ",I%03d", i)
		for f, formKey := range []string{"B", "D"} {
			if i != 57 {
				formKey = ""
			}
			forms += fmt.Sprintf("%d,%d,I%03d,%s\n", f+1, i, i, formKey)
		}
	}
	b.WriteByte('\n')
	for c := range 2400 {
		fmt.Fprintf(&b, "c%04d,%c,%d", c, "mf"[c/2%2], 1+c%2)
		for i := range 120 {
			if i == 10 && c < 38 {
				b.WriteString(",E")
			} else {
				fmt.Fprintf(&b, ",%c", "ABCD"[(c*7+i*i)%4])
			}
		}
		b.WriteByte('\n')
	}
	in := input{responses: b.String(), items: items, forms: forms}
	p := in.problems(t)
	if p.Count(keyMissing) != 3 || p.Count(keyContradictory) != 1 || p.Count(valueOutOfRange) != 38 {
		t.Errorf("%d without key, %d contradictory, %d out of range; want 3, 1, 38", p.Count(keyMissing), p.Count(keyContradictory), p.Count(valueOutOfRange))
	}
	if o := p.kind(keyContradictory).Occurrences[0]; o.Column != "I057" || o.Row != 115 || !strings.Contains(o.Message, "row 114") {
		t.Errorf("contradiction reported as %v", o)
	}
	// Declared as a different order of options, and E as an invalid mark, it passes.
	order = strings.ReplaceAll(forms, "form,position,item_id,key\n", "form,position,item_id,key,option_order\n")
	lines := strings.SplitAfter(order, "\n")
	for i := 1; i < len(lines)-1; i++ {
		tail := ",\n"
		if strings.HasPrefix(lines[i], "2,57,") {
			tail = ",A|D|C|B\n"
		}
		lines[i] = strings.TrimSuffix(lines[i], "\n") + tail
	}
	in.forms = strings.Join(lines, "")
	in.plan = func(p *dif.Plan) { p.Missing.Invalid = []string{"E"} }
	result := in.good(t)
	missing := 0
	for _, it := range result.Data.Items {
		if it.KeyMissing {
			missing++
		}
	}
	if missing != 3 || result.Problems.Count(keyOptionMismatch) != 0 {
		t.Errorf("%d items without key, %d mismatches; want 3, 0", missing, result.Problems.Count(keyOptionMismatch))
	}
}
