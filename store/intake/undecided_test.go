package intake

import (
	"fmt"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"

	"difaudit/dif"
)

// Items without key, options and maximum: whole numbers are scores, and where most
// answers are anything else they are choices. Expected values follow from contract 2
// and are written by hand.
func TestUndecidedItems(t *testing.T) {
	t.Parallel()
	result := input{
		responses: "candidate_id,sex,Q1,Q2\na,m,12,1\nb,f,0,C\nc,m,3,A\n",
		items:     "item_id\nQ1\nQ2\n",
	}.good(t)
	d := result.Data
	if d.Items[0].MaxScore != 12 || d.Items[0].Options != nil || d.Items[0].KeyMissing {
		t.Errorf("scores: %+v", d.Items[0])
	}
	if !d.Items[1].KeyMissing || !cmp.Equal(d.Items[1].Options, []string{"1", "A", "C"}) {
		t.Errorf("choices: %+v", d.Items[1])
	}
	if got := []byte{d.Answers.Row(0)[0], d.Answers.Row(1)[0], d.Answers.Row(1)[1]}; !cmp.Equal(got, []byte{12, 0, 2}) {
		t.Errorf("codes %v", got)
	}
	if result.Problems.Count(scoreAssumed) != 0 || result.Problems.Count(choiceWithoutKey) != 1 {
		t.Errorf("problems %v", result.Problems.Kinds)
	}
	if o := result.Problems.kind(choiceWithoutKey).Occurrences[0]; o.Row != 3 || !strings.HasPrefix(o.Message, "2 answers, from this row on, are no scores") {
		t.Errorf("reported as %v", o)
	}
}

// A slip among scores must not drop the item; half of the answers decide.
func TestSlipsAmongScores(t *testing.T) {
	t.Parallel()
	for name, c := range map[string]struct {
		answers   string
		errors    int
		noKey     int
		firstRow  int
		firstWord string
	}{
		"one slip":        {"1 0 x 1 0", 1, 0, 4, `"x"`},
		"half":            {"1 A 0 B", 2, 0, 3, `"A"`},
		"under half":      {"1 A B", 0, 1, 3, "2 answers, from this row on, are no scores"},
		"one choice":      {"A", 0, 1, 2, "1 answer, in this row, is no score"},
		"decimals":        {"1 1.0 0", 1, 0, 3, "write it as 1"},
		"too large":       {"1 250 0", 1, 0, 3, `"250"`},
		"missing code":    {"1 A - -", 1, 0, 3, `"A"`},
		"many of a slip":  {"x" + strings.Repeat(" 1", 300) + strings.Repeat(" x", 149), 150, 0, 2, `"x"`},
		"many unlike":     {manyAnswers(300, "1") + manyAnswers(300, "%d.5"), 300, 0, 302, `"0.5"`},
		"no room":         {manyAnswers(300, "v%d") + manyAnswers(260, "1"), -1, 0, 252, "more than 250 different answers"},
		"numbers no room": {manyAnswers(280, "v%d") + manyAnswers(280, "1"), 280, 0, 2, `"v0"`},
	} {
		in := input{items: "item_id,max_score\nQ1,\nQ2,1\n", responses: "candidate_id,sex,Q1,Q2\n", plan: planWithCode}
		for i, answer := range strings.Fields(c.answers) {
			if answer == "-" {
				answer = "N"
			}
			in.responses += fmt.Sprintf("%04d,%c,%s,1\n", i, "mf"[i%2], answer)
		}
		in.responses += "zz,m,N,1\nzzz,f,N,1\n"
		p := in.problems(t)
		kind, want := valueOutOfRange, c.errors
		switch {
		case c.errors < 0:
			kind, want = tooManyChoices, 1
		case c.noKey > 0:
			kind, want = choiceWithoutKey, c.noKey
		}
		if p.Count(kind) != want || len(p.Kinds) != 1 {
			t.Errorf("%s: %d of %s, want %d:\n%s", name, p.Count(kind), kind, want, printed(t, p))
			continue
		}
		if o := p.Kinds[0].Occurrences[0]; o.Row != c.firstRow || o.Column != "Q1" || !strings.Contains(o.Message, c.firstWord) {
			t.Errorf("%s: reported as %v", name, o)
		}
	}
}

func planWithCode(p *dif.Plan) { p.Missing.NotPresented = []string{"N"} }

// manyAnswers returns n answers; format may hold the number of the answer.
func manyAnswers(n int, format string) string {
	var b strings.Builder
	for i := range n {
		if strings.Contains(format, "%d") {
			fmt.Fprintf(&b, format+" ", i)
		} else {
			b.WriteString(format + " ")
		}
	}
	return b.String()
}

// Whole numbers are choices without a key where the choices of keyed items are whole
// numbers too and hold all answers, unless these are only 0 and 1.
func TestNumbersThatLookLikeChoices(t *testing.T) {
	t.Parallel()
	for name, c := range map[string]struct {
		items   string
		answers string // of two candidates to Q2
		choices []string
		assumed int
	}{
		"among the options":     {"Q1,2,1|2|3|4\nQ2,,\n", "3 1", []string{"1", "3"}, 0},
		"among the keys":        {"Q1,2|3,\nQ2,,\n", "3 2", []string{"2", "3"}, 0},
		"not among them":        {"Q1,2,1|2|3|4\nQ2,,\n", "5 1", nil, 1},
		"only 0 and 1":          {"Q1,1,0|1|2\nQ2,,\n", "0 1", nil, 1},
		"letters are the keys":  {"Q1,A,A|B|2|3\nQ2,,\n", "2 3", []string{"2", "3"}, 0},
		"only letters":          {"Q1,A,A|B\nQ2,,\n", "2 3", nil, 1},
		"options without a key": {"Q1,,1|2|3|4\nQ2,,\n", "2 3", nil, 0},
	} {
		a, b, _ := strings.Cut(c.answers, " ")
		first := "2"
		if strings.Contains(c.items, "A|B") {
			first = "A"
		}
		in := input{
			responses: fmt.Sprintf("candidate_id,sex,Q1,Q2\na,m,%s,%s\nb,f,%s,%s\n", first, a, first, b),
			items:     "item_id,key,options\n" + c.items,
		}
		result := in.good(t)
		it := result.Data.Items[1]
		if diff := cmp.Diff(c.choices, it.Options); diff != "" || it.KeyMissing != (c.choices != nil) {
			t.Errorf("%s: %+v %s", name, it, diff)
		}
		if result.Problems.Count(scoreAssumed) != c.assumed {
			t.Errorf("%s: %d taken as scores, want %d", name, result.Problems.Count(scoreAssumed), c.assumed)
		}
		// With a maximum they are scores whatever they look like.
		in.items = "item_id,key,options,max_score\n" + strings.ReplaceAll(strings.ReplaceAll(c.items, "Q2,,", "Q2,,,5"), "\nQ2", ",\nQ2")
		if it := in.good(t).Data.Items[1]; it.Options != nil || it.KeyMissing || it.MaxScore != 5 {
			t.Errorf("%s, with a maximum: %+v", name, it)
		}
	}
	// Keys of forms count as keys.
	result := input{
		responses: "candidate_id,sex,Q1,Q2\na,m,2,2\nb,f,2,2\n", items: "item_id\nQ1\nQ2\n",
		forms: "form,position,item_id,key\nF,1,Q1,2\nF,2,Q2,\n",
	}.good(t)
	if it := result.Data.Items[1]; !it.KeyMissing || result.Problems.Count(keyMissing) != 1 {
		t.Errorf("key on a form: %+v", it)
	}
}

// Choices seen on items with a key count as choices, also when only some of them are keys.
func TestNumbersSeenAsChoicesOfKeyedItems(t *testing.T) {
	t.Parallel()
	d := input{
		responses: "candidate_id,sex,Q1,Q2,Q3\na,m,1,3,2\nb,f,2,3,3\nc,m,4,1,1\n",
		items:     "item_id,key\nQ1,1\nQ2,3\nQ3,\n",
	}.good(t).Data
	if !d.Items[2].KeyMissing {
		t.Errorf("an item without a key among items keyed by numbers was scored: %+v", d.Items[2])
	}
}

func TestExternalScoresAreDecimalNumbers(t *testing.T) {
	t.Parallel()
	for _, cell := range []string{"1_000", "0x10", "0X1p4", "1e400", "inf"} {
		p := input{responses: "candidate_id,sex,external_score,Q1\na,m," + cell + ",1\nb,f,2,0\n"}.problems(t)
		if p.Count(valueOutOfRange) != 1 {
			t.Errorf("external score %q was taken: %v", cell, p.Kinds)
		}
	}
}
