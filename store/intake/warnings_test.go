package intake

import (
	"fmt"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"

	"difaudit/dif"
)

// Warnings kept with the data count in words of their own number, and say of few
// candidates without a label only that they are few.
func TestStoredWarnings(t *testing.T) {
	t.Parallel()
	for _, c := range []struct {
		unstated, unjoined int
		want               []dif.Warning
	}{
		{1, 0, []dif.Warning{{Code: emptyLabel, Message: "fewer than 10 candidates without a stated label of the grouping sex"}}},
		{10, 9, []dif.Warning{
			{Code: noCandidateRow, Message: "fewer than 10 candidates without a row in the candidates file; their groups are not stated"},
			{Code: emptyLabel, Message: "fewer than 10 candidates without a stated label of the grouping home"},
			{Code: emptyLabel, Message: "10 candidates without a stated label of the grouping sex"},
		}},
		{9, 12, []dif.Warning{
			{Code: noCandidateRow, Message: "12 candidates without a row in the candidates file; their groups are not stated"},
			{Code: emptyLabel, Message: "12 candidates without a stated label of the grouping home"},
			{Code: emptyLabel, Message: "fewer than 10 candidates without a stated label of the grouping sex"},
		}},
	} {
		responses, candidates := "candidate_id,sex,Q1\n", "candidate_id,home\n"
		for i := range 40 {
			sex := string("mf"[i%2])
			if i < c.unstated {
				sex = ""
			}
			responses += fmt.Sprintf("%02d,%s,1\n", i, sex)
			if i >= c.unjoined {
				candidates += fmt.Sprintf("%02d,%c\n", i, "yn"[i%2])
			}
		}
		result := input{responses: responses, candidates: candidates, plan: func(p *dif.Plan) {
			p.Comparisons = append(p.Comparisons, dif.PlannedComparison{Grouping: "home", Reference: "y", Focal: "n"})
		}}.good(t)
		if diff := cmp.Diff(c.want, result.Data.Warnings); diff != "" {
			t.Error(diff)
		}
		if n := result.Problems.Count(noCandidateRow); n != c.unjoined {
			t.Errorf("the uploader is told of %d, want %d", n, c.unjoined)
		}
	}
	d := input{responses: fourRows + "b,f,0,1\n"}.good(t).Data
	if diff := cmp.Diff([]dif.Warning{{Code: exactDuplicate, Message: "1 exact copy of a candidate row, used once"}}, d.Warnings); diff != "" {
		t.Error(diff)
	}
	d = input{responses: keyedRows, items: "item_id,key,options\nQ1,A,4\nQ2,,4\n"}.good(t).Data
	if diff := cmp.Diff([]dif.Warning{{Code: keyMissing, Message: "1 item without a key: not scored, and no part of the matching score (Q2)"}}, d.Warnings); diff != "" {
		t.Error(diff)
	}
}

// Every warning has a form for a single occurrence.
func TestWarningsOfOne(t *testing.T) {
	t.Parallel()
	for _, k := range kinds {
		if (k.one != "") != (k.severity == Warning) {
			t.Errorf("%s: of one: %q", k.code, k.one)
		}
	}
	p := input{responses: "candidate_id,sex,Q1\n1.23457E+15,m,1\n2,f,0\n"}.problems(t)
	if text := printed(t, p); !strings.Contains(text, "1 identifier of more than 15 digits ends in zeros or is written") {
		t.Errorf("got:\n%s", text)
	}
	p = input{responses: "candidate_id,sex,Q1\n98765,m,1\n54321,f,0\n24680,m,1\n13579,f,1\n77,f,1\n"}.problems(t)
	if text := printed(t, p); !strings.Contains(text, "1 identifier is shorter than the 5 digits of most") {
		t.Errorf("got:\n%s", text)
	}
	p = input{responses: fourRows + "e\n"}.problems(t)
	if text := printed(t, p); !strings.Contains(text, "the row has 1 field and the header 4;") {
		t.Errorf("got:\n%s", text)
	}
}
