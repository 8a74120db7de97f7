package intake

import (
	"strings"
	"testing"

	"difaudit/dif"
)

// A file without a header is one problem, and its first row, which holds data, is not
// repeated.
func TestNoHeader(t *testing.T) {
	t.Parallel()
	for name, in := range map[string]input{
		"scores":      {responses: "secret-1,male,1,1,0,\nsecret-2,female,0,1,1,\n"},
		"items known": {responses: "secret-1,male,1,1,0,\nsecret-2,female,0,1,1,\n", items: twoItems},
		"items by number": {
			responses: "secret-1,male,1,1,0\nsecret-2,female,0,1,1\n", items: "item_id\n1\n2\n3\n",
		},
		"choices":        {responses: "secret-1,male,A,B,B\nsecret-2,female,A,A,C\n", items: keyed},
		"a long file":    {responses: "secret-1,Q7,1\nsecret-2,Q7,0\n", candidates: people},
		"no candidates":  {responses: fourRows, candidates: "secret-1,male\nsecret-2,female\n"},
		"with two forms": {responses: "secret-1,male,F,1,1\n", forms: "form,position,item_id\nF,1,Q1\nG,1,Q2\n"},
	} {
		in.plan = func(p *dif.Plan) {
			p.Comparisons = append(p.Comparisons, dif.PlannedComparison{Grouping: "home", Reference: "y", Focal: "n"})
		}
		p := in.problems(t)
		if p.Count(noHeader) != 1 || len(p.Kinds) != 1 {
			t.Errorf("%s: got\n%s", name, printed(t, p))
		}
		if text := printed(t, p); strings.Contains(text, "secret") || strings.Contains(text, "male") {
			t.Errorf("%s: the first row is repeated:\n%s", name, text)
		}
	}
}

// A header that lacks candidate_id may yet hold data: what it holds is not repeated.
func TestHeaderWithoutCandidates(t *testing.T) {
	t.Parallel()
	for name, in := range map[string]input{
		"wide":  {responses: "secret-1,sex,secret-2,secret-2,Q1\na,m,1,1,1\n"},
		"long":  {responses: "secret-1,item_id,response,secret-2\na,Q1,1,x\n"},
		"items": {responses: fourRows, items: "secret-1,key,max_score\nQ1,,1\n"},
		"case":  {responses: "Candidate_ID,secret-1,secret-2\na,m,1\n"},
	} {
		in.plan = func(p *dif.Plan) {
			p.Comparisons = append(p.Comparisons, dif.PlannedComparison{Grouping: "home", Reference: "y", Focal: "n"})
		}
		p := in.problems(t)
		if p.Count(missingColumn) != 1 || p.Count(noHeader) != 0 {
			t.Errorf("%s: got\n%s", name, printed(t, p))
		}
		if text := printed(t, p); strings.Contains(text, "secret") {
			t.Errorf("%s: the first row is repeated:\n%s", name, text)
		}
	}
}

// Items with numbers for names make a header, also one that is incomplete.
func TestNumbersAsItems(t *testing.T) {
	t.Parallel()
	items := "item_id,max_score\n0,1\n1,1\n2,1\n3,1\n"
	d := input{responses: "candidate_id,sex,0,1,2,3\na,m,1,1,0,1\nb,f,0,1,1,0\n", items: items}.good(t).Data
	if len(d.Items) != 4 {
		t.Errorf("items %v", d.Items)
	}
	if p := (input{responses: "id,sex,0,1,2,3\na,m,1,1,0,1\n", items: items}).problems(t); p.Count(missingColumn) != 1 {
		t.Errorf("got:\n%s", printed(t, p))
	}
}

// Behind a misplaced quotation mark reading goes on where the end of the row is clear.
func TestQuotationMarks(t *testing.T) {
	t.Parallel()
	p := input{responses: fourRows + "e,m\"x,1,1\nf,f,12,1\ng,f\"\",1,1\nh,m,1\n,m,1,1\n", items: twoItems}.problems(t)
	for kind, want := range map[string]int{badQuoting: 2, valueOutOfRange: 1, raggedRow: 1, emptyCandidateID: 1} {
		if p.Count(kind) != want {
			t.Errorf("%d of %s, want %d:\n%s", p.Count(kind), kind, want, printed(t, p))
		}
	}
	if o := p.kind(badQuoting).Occurrences; len(o) != 2 || o[0].Row != 6 || o[1].Row != 8 {
		t.Errorf("reported as %v", o)
	}
	p = input{responses: fourRows + "e,\"m\"x,1,1\nf,f,12,1\n", items: twoItems}.problems(t)
	if p.Count(badQuoting) != 1 || p.Count(valueOutOfRange) != 0 {
		t.Errorf("got:\n%s", printed(t, p))
	}
	// A label that stands only in a row left out is not missed.
	p = input{responses: "candidate_id,sex,Q1\na,m,1\nb,f,0\"\nc,m,0\n"}.problems(t)
	if p.Count(badQuoting) != 1 || p.Count(labelNotInData) != 0 {
		t.Errorf("got:\n%s", printed(t, p))
	}
	// Nor are the empty cells of a long file that lacks a row.
	p = input{responses: "candidate_id,item_id,response\na,Q1,1\na,Q2,0\nb,Q1,1\nb,Q2,0\"\n", candidates: people}.problems(t)
	if p.Count(badQuoting) != 1 || p.Count(undeclaredBlanks) != 0 {
		t.Errorf("got:\n%s", printed(t, p))
	}
}
