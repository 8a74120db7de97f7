package intake

import (
	"fmt"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"

	"difaudit/dif"
)

// What an empty cell means. Expected codes follow from contract and are written by hand.
func TestEmptyCells(t *testing.T) {
	t.Parallel()
	responses := "candidate_id,sex,Q1,Q2,Q3,Q4\na,m,1,,0,\nb,f,,,,\nc,m,,I,,N\nd,f,1,,T,\ne,f,,1,1,1\n"
	for empty, want := range map[string][]string{
		dif.EmptyNotPresented: {"1n0n", "nnnn", "ninn", "1ntn", "n111"},
		dif.EmptyOmitted:      {"1o0o", "oooo", "oion", "1oto", "o111"},
		// An invalid mark shows that the candidate got there; a code for a technical
		// loss or for an item not presented does not.
		dif.EmptyByPosition: {"1o0r", "rrrr", "oirn", "1rtr", "o111"},
	} {
		d := input{responses: responses, plan: func(p *dif.Plan) {
			p.Missing = dif.MissingRule{Empty: empty, Invalid: []string{"I"}, Technical: []string{"T"}, NotPresented: []string{"N"}}
		}}.good(t).Data
		if diff := cmp.Diff(want, rows(d)); diff != "" {
			t.Errorf("%s: %s", empty, diff)
		}
	}
}

// Position counts in the order of the candidate's form, not of the columns.
func TestEmptyCellsByPositionOnForms(t *testing.T) {
	t.Parallel()
	d := input{
		responses: "candidate_id,sex,form,Q1,Q2,Q3\na,m,F,,1,\nb,f,G,,1,\n",
		forms:     "form,position,item_id\nF,1,Q1\nF,2,Q2\nF,3,Q3\nG,10,Q3\nG,20,Q2\nG,30,Q1\n",
		plan:      emptyIs(dif.EmptyByPosition),
	}.good(t).Data
	if diff := cmp.Diff([]string{"o1r", "r1o"}, rows(d)); diff != "" {
		t.Error(diff)
	}
}

func TestUndeclaredBlanksAreCounted(t *testing.T) {
	t.Parallel()
	p := input{
		responses:  "candidate_id,sex,form,Q1,Q2\na,m,F,1,\nb,f,F,,\nc,m,G,1,\nd,,F,,1\ne,f,F,,0\n",
		forms:      "form,position,item_id\nF,1,Q1\nF,2,Q2\nG,1,Q1\n",
		candidates: "candidate_id,age\na,1\nb,1\nc,1\nd,1\ne,1\n",
	}.problems(t)
	k := p.kind(undeclaredBlanks)
	text := printed(t, p)
	if k.Count != 5 { // c's form does not hold Q2
		t.Errorf("%d blanks, want 5", k.Count)
	}
	for _, words := range []string{
		"--empty not_presented", "--empty omitted", "--empty by_position",
		"from this row on, 5 item cells of 2 items are empty",
		"column Q1: 3 empty cells of 5 candidates; comparison 1: reference 0, focal 2", "column Q2: 2 empty cells of 5 candidates; comparison 1: reference 1, focal 1",
		`comparison 1 (sex): 1 empty cell of reference "m", 3 of focal "f"`,
	} {
		if !strings.Contains(text, words) {
			t.Errorf("the text lacks %q:\n%s", words, text)
		}
	}
}

// Cells that are not empty are no blanks, whatever their column turns out to be.
func TestOnlyEmptyCellsAreBlank(t *testing.T) {
	t.Parallel()
	for name, in := range map[string]input{
		"text column":      {responses: "candidate_id,sex,Q1,town\na,m,1,0\nb,f,0,north\nc,m,1,south\nd,f,1,\n"},
		"choices":          {responses: "candidate_id,sex,Q1\na,m,A\nb,f,B\n"},
		"unknown form":     {responses: "candidate_id,sex,form,Q1,Q2\na,m,F,1,\nb,f,H,,1\nc,f,G,,0\n", forms: "form,position,item_id\nF,1,Q1\nG,1,Q2\n"},
		"undecided scores": {responses: "candidate_id,sex,Q1,Q2\na,m,1,A\nb,f,x,\" B\"\nc,m,0,A\n", items: "item_id,key\nQ1,\nQ2,B\n"},
	} {
		if p := in.problems(t); p.Count(undeclaredBlanks) != 0 || p.Count(answerOffForm) != 0 || !p.HasErrors() {
			t.Errorf("%s: got\n%s", name, printed(t, p))
		}
	}
	p := input{responses: "candidate_id,sex,Q1,town\na,m,,0\nb,f,0,north\nc,m,1,south\nd,f,1,\n"}.problems(t)
	if p.Count(undeclaredBlanks) != 1 || p.Count(undeclaredColumn) != 1 {
		t.Errorf("got:\n%s", printed(t, p))
	}
}

func TestBlanksOfManyItems(t *testing.T) {
	t.Parallel()
	header, a, b := "candidate_id,sex", "a,m", "b,f"
	for i := range 130 {
		header += fmt.Sprintf(",Q%03d", i)
		a += ","
		b += ",1"
	}
	p := input{responses: header + "\n" + a + "\n" + b + "\n"}.problems(t)
	text := printed(t, p)
	for _, words := range []string{"130 item cells of 130 items are empty", "column Q099: 1 empty cell of 2 candidates; comparison 1: reference 1, focal 0", "30 more items with empty cells"} {
		if !strings.Contains(text, words) {
			t.Errorf("the text lacks %q:\n%s", words, text)
		}
	}
	if strings.Contains(text, "Q100") || p.Count(undeclaredBlanks) != 130 {
		t.Errorf("%d blanks:\n%s", p.Count(undeclaredBlanks), text)
	}
}

func TestChoices(t *testing.T) {
	t.Parallel()
	d := input{
		responses: "candidate_id,sex,Q1,Q2,Q3,Q4\na,m,D,yes,10,B\nb,f,A,no,9,X\nc,m,B,maybe,2,A\n",
		items:     "item_id,key,options\nQ1,B,D|C|B|A\nQ2,yes|surely,\nQ3,9,\nQ4,A|B,3\n",
		plan:      func(p *dif.Plan) { p.Missing.Invalid = []string{"X"} },
	}.good(t).Data
	want := []dif.Item{
		{ID: "Q1", Version: "1", Role: "operational", MaxScore: 1, Key: []string{"B"}, Options: []string{"D", "C", "B", "A"}},
		{ID: "Q2", Version: "1", Role: "operational", MaxScore: 1, Key: []string{"yes", "surely"}, Options: []string{"maybe", "no", "surely", "yes"}},
		{ID: "Q3", Version: "1", Role: "operational", MaxScore: 1, Key: []string{"9"}, Options: []string{"10", "2", "9"}},
		{ID: "Q4", Version: "1", Role: "operational", MaxScore: 1, Key: []string{"A", "B"}, Options: []string{"A", "B", "C"}},
	}
	if diff := cmp.Diff(want, d.Items); diff != "" {
		t.Error(diff)
	}
	if diff := cmp.Diff([]string{"0301", "312i", "2010"}, rows(d)); diff != "" {
		t.Error(diff)
	}
}

// Versions of one item are told apart by the form, in both shapes.
func TestItemVersions(t *testing.T) {
	t.Parallel()
	wide := input{
		responses:  "candidate_id,form,Q1,Q2\na,F,1,1\nb,G,2,0\nc,G,,1\n",
		items:      "item_id,version,max_score\nQ1,old,1\nQ1,new,2\nQ2,,1\n",
		forms:      "form,position,item_id,version\nF,1,Q1,old\nF,2,Q2,\nG,1,Q1,new\nG,2,Q2,1\n",
		candidates: "candidate_id,sex\na,m\nb,f\nc,f\n",
		plan:       emptyIs(dif.EmptyByPosition),
	}
	d := wide.good(t).Data
	if diff := cmp.Diff([]string{"1n1", "n20", "no1"}, rows(d)); diff != "" {
		t.Error(diff)
	}
	if diff := cmp.Diff([]uint16{0, 1, 1}, d.FormOf); diff != "" {
		t.Error(diff)
	}
	long := wide
	long.responses = "candidate_id,form,item_id,response\na,F,Q1,1\na,F,Q2,1\nb,G,Q1,2\nb,G,Q2,0\nc,G,Q2,1\n"
	differ(t, "long", d, long.good(t).Data)
}

// Story 7(b): an item that is not on a candidate's form is not presented, not omitted.
func TestFormsDecideWhatWasPresented(t *testing.T) {
	t.Parallel()
	d := input{
		responses: "candidate_id,sex,form,Q1,Q2,Q3\na,m,1,1,0,\nb,f,2,1,,1\nc,f,2,0,,\n",
		forms:     "form,position,item_id\n1,1,Q1\n1,2,Q2\n2,1,Q1\n2,2,Q3\n",
		plan:      emptyIs(dif.EmptyOmitted),
	}.good(t).Data
	if diff := cmp.Diff([]string{"10n", "1n1", "0no"}, rows(d)); diff != "" {
		t.Error(diff)
	}
	want := []dif.Form{
		{ID: "1", Items: []dif.FormItem{{Item: 0, Position: 1}, {Item: 1, Position: 2}}},
		{ID: "2", Items: []dif.FormItem{{Item: 0, Position: 1}, {Item: 2, Position: 2}}},
	}
	if diff := cmp.Diff(want, d.Forms); diff != "" {
		t.Error(diff)
	}
}

// A form column without a forms file gives labels only.
func TestFormLabelsAlone(t *testing.T) {
	t.Parallel()
	d := input{responses: "candidate_id,sex,form,Q1\na,m,Z,1\nb,f,Y,0\n"}.good(t).Data
	if diff := cmp.Diff([]dif.Form{{ID: "Y"}, {ID: "Z"}}, d.Forms); diff != "" {
		t.Error(diff)
	}
	if diff := cmp.Diff([]uint16{1, 0}, d.FormOf); diff != "" {
		t.Error(diff)
	}
}

// Keys may differ between forms where the option order does.
func TestKeysOfForms(t *testing.T) {
	t.Parallel()
	result := input{
		responses: "candidate_id,sex,form,Q1\na,m,F,B\nb,f,G,A\n",
		items:     "item_id,options\nQ1,A|B|C\n",
		// Form G shows B first, so its A is the option B of form F.
		forms: "form,position,item_id,key,option_order\nF,1,Q1,B,\nG,1,Q1,A,B|C|A\n",
	}.good(t)
	want := []dif.Form{
		{ID: "F", Items: []dif.FormItem{{Item: 0, Position: 1, Key: []string{"B"}}}},
		{ID: "G", Items: []dif.FormItem{{Item: 0, Position: 1, Key: []string{"A"}, OptionOrder: []string{"B", "C", "A"}}}},
	}
	if diff := cmp.Diff(want, result.Data.Forms); diff != "" {
		t.Error(diff)
	}
	if len(result.Problems.Kinds) != 0 {
		t.Errorf("problems: %s", printed(t, result.Problems))
	}
	if d := result.Data; d.Items[0].KeyMissing || d.Items[0].Key != nil {
		t.Errorf("item %+v", d.Items[0])
	}
}

func TestAttempts(t *testing.T) {
	t.Parallel()
	for attempts, want := range map[string][]string{
		dif.AttemptsFirst: {"0", "1"}, dif.AttemptsLast: {"2", "1"}, dif.AttemptsAll: {"0", "2", "1"},
	} {
		d := input{
			responses: "candidate_id,sex,attempt,Q1\na,m,10,2\na,m,9,0\nb,f,1,1\n",
			plan:      func(p *dif.Plan) { p.Attempts = attempts },
		}.good(t).Data
		if diff := cmp.Diff(want, rows(d)); diff != "" {
			t.Errorf("%s: %s", attempts, diff)
		}
		if (d.Attempt != nil) != (attempts == dif.AttemptsAll) || d.Received != 3 {
			t.Errorf("%s: attempts %v, received %d", attempts, d.Attempt, d.Received)
		}
	}
}

func TestSeveralLabels(t *testing.T) {
	t.Parallel()
	responses := "candidate_id,sex,Q1\na,m,1\nb,f,0\nc,m;f,1\nd,f;f,1\ne,;m,1\n"
	for rule, want := range map[string][]uint16{dif.SeveralNotStated: {2, 1, 0, 1, 2}, "f": {2, 1, 1, 1, 2}} {
		d := input{responses: responses, plan: func(p *dif.Plan) {
			p.Groupings = map[string]dif.GroupingRule{"sex": {Several: rule}}
		}}.good(t).Data
		if diff := cmp.Diff(want, d.Groupings[0].Codes); diff != "" {
			t.Errorf("%s: %s", rule, diff)
		}
	}
	d := input{
		responses:  "candidate_id,sex,Q1\na,m,1\nb,f,0\nc,,1\nd,,1\n",
		candidates: "candidate_id,sex\na,f\nc,m\nc,f\nd,f\nb,f\n",
		plan: func(p *dif.Plan) {
			p.Groupings = map[string]dif.GroupingRule{"sex": {Several: "mixed"}}
			p.Comparisons[0].Reference = "mixed"
		},
	}.good(t).Data
	if g := d.Groupings[0]; !cmp.Equal(g.Labels, []string{"f", "mixed"}) || !cmp.Equal(g.Codes, []uint16{2, 1, 2, 1}) {
		t.Errorf("labels %v, codes %v", g.Labels, g.Codes)
	}
}

// A label stated in one row holds for the candidate's other rows.
func TestStatedLabelHoldsForAllRows(t *testing.T) {
	t.Parallel()
	d := input{
		responses: "candidate_id,sex,attempt,Q1\na,m,1,1\na,,2,0\nb,,1,0\nb,f,2,1\n",
		plan:      func(p *dif.Plan) { p.Attempts = dif.AttemptsAll },
	}.good(t).Data
	if diff := cmp.Diff([]uint16{2, 2, 1, 1}, d.Groupings[0].Codes); diff != "" {
		t.Error(diff)
	}
}

// Rows that agree in their answers and differ in form or external score are no copies.
func TestCopiesAgreeInEverything(t *testing.T) {
	t.Parallel()
	for name, rows := range map[string]string{
		"form":           "a,m,F,1,1\nb,f,F,2,0\na,m,G,1,1\n",
		"external score": "a,m,F,1,1\nb,f,F,2,0\na,m,F,3,1\n",
		"one score":      "a,m,F,1,1\nb,f,F,2,0\na,m,F,,1\n",
	} {
		p := input{responses: "candidate_id,sex,form,external_score,Q1\n" + rows}.problems(t)
		if p.Count(conflictingDuplicate) != 1 || p.Count(exactDuplicate) != 0 {
			t.Errorf("%s: got\n%s", name, printed(t, p))
		}
	}
}

func TestCrossings(t *testing.T) {
	t.Parallel()
	in := input{
		responses: "candidate_id,sex,home,Q1\na,m,y,1\nb,f,n,0\nc,m,n,1\nd,f,,1\n",
		plan: func(p *dif.Plan) {
			p.Comparisons = []dif.PlannedComparison{{Grouping: "sex+home", Reference: "m+y", Focal: "f+n"}}
		},
	}
	d := in.good(t).Data
	if len(d.Groupings) != 2 || d.Groupings[0].Name != "home" || d.Groupings[1].Name != "sex" {
		t.Errorf("groupings %v", d.Groupings)
	}
	in.plan = func(p *dif.Plan) {
		p.Comparisons = []dif.PlannedComparison{{Grouping: "sex+home", Reference: "m+y", Focal: "f+y"}}
	}
	if p := in.problems(t); p.Count(labelNotInData) != 1 {
		t.Errorf("got:\n%s", printed(t, p))
	}
}

func TestColumnsTheCommandLineDeclares(t *testing.T) {
	t.Parallel()
	d := input{
		responses: "candidate_id,sex,region,form,email,Q1\na,m,north,9,x@y,1\nb,f,south,8,z@y,0\n",
		plan: func(p *dif.Plan) {
			p.Columns = dif.Columns{Groupings: []string{"region"}, Ignore: []string{"email", "form"}}
		},
	}.good(t).Data
	if len(d.Groupings) != 1 || len(d.Items) != 1 || d.Forms != nil || d.FormOf != nil {
		t.Errorf("groupings %v, items %v, forms %v", d.Groupings, d.Items, d.Forms)
	}
}

func TestUndeclaredColumnsAreDescribed(t *testing.T) {
	t.Parallel()
	var b strings.Builder
	b.WriteString("candidate_id,sex,town,mail,remark,Q1\n")
	for i := range 60 {
		fmt.Fprintf(&b, "c%02d,%c,%c,u%d@x,the room was rather %d loud,1\n", i, "mf"[i%2], "NS"[i%2], i, i%7)
	}
	p := input{responses: b.String()}.problems(t)
	text := printed(t, p)
	if p.Count(undeclaredColumn) != 3 {
		t.Errorf("%d columns, want 3:\n%s", p.Count(undeclaredColumn), text)
	}
	for _, words := range []string{"column town", "looks like a grouping", "column mail", "looks like an identifier", "column remark", "looks like free text"} {
		if !strings.Contains(text, words) {
			t.Errorf("the text lacks %q:\n%s", words, text)
		}
	}
	if strings.Contains(text, "loud") || strings.Contains(text, "@") {
		t.Errorf("values of columns that are no items:\n%s", text)
	}
}

func TestIdentifiers(t *testing.T) {
	t.Parallel()
	list := func(format string, numbers ...int) string {
		var b strings.Builder
		b.WriteString("candidate_id,sex,Q1\n")
		for i, n := range numbers {
			fmt.Fprintf(&b, format+",%c,1\n", n, "mf"[i%2])
		}
		return b.String()
	}
	upTo := func(n, step int) (out []int) {
		for i := 1; i <= n; i++ {
			out = append(out, i*step)
		}
		return out
	}
	for name, c := range map[string]struct {
		responses string
		kind      string
		count     int
	}{
		"running numbers":    {list("%d", upTo(2000, 1)...), "", 0},
		"equal lengths":      {list("%d", 48213, 77120, 90333), "", 0},
		"names":              {list("N%d", 1, 20, 70000), "", 0},
		"rounded":            {list("123456789012%03d0000", upTo(50, 1)...), identifiersEndInZeros, 50},
		"by chance":          {list("12345678901%05d", upTo(90, 37)...), "", 0}, // 16 digits: 9 of 90 end in 0
		"lost leading zeros": {list("%d", 91234, 85555, 77777, 66616, 54321, 43210, 99001, 31337, 123, 45), identifiersLostZeros, 2},
		"mixed":              {list("%d", 91234, 8555, 777, 666161, 543210), identifiersMixedLength, 5},
	} {
		p := input{responses: c.responses}.problems(t)
		found := ""
		for _, k := range p.Kinds {
			if strings.HasPrefix(k.Kind, "identifiers") {
				found += k.Kind
			}
		}
		if c.kind == "" && found != "" || c.kind != "" && (found != c.kind || p.Count(c.kind) != c.count) {
			t.Errorf("%s: reported %q %d, want %q %d", name, found, p.Count(c.kind), c.kind, c.count)
		}
	}
}
