package intake

import (
	"errors"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
	"github.com/google/go-cmp/cmp/cmpopts"

	"difaudit/dif"
)

// readTwice checks that an input gives problems or sound data, and the same data
// again where it is read a second time.
func readTwice(t *testing.T, in input) {
	read := func() *dif.Data {
		result, err := Read(t.Context(), in.request())
		var problems *Problems
		switch {
		case err == nil:
			checkData(t, result.Data)
			if result.Problems.HasErrors() {
				t.Fatal("errors among the warnings")
			}
			return result.Data
		case errors.As(err, &problems):
			if !problems.HasErrors() || problems.Error() == "" {
				t.Fatalf("refused without an error: %v", problems.Kinds)
			}
			for _, k := range problems.Kinds {
				if k.Count == 0 || len(k.Occurrences) == 0 {
					t.Fatalf("%s without an occurrence", k.Kind)
				}
			}
			return nil
		}
		t.Fatalf("reading failed: %v", err)
		return nil
	}
	first, second := read(), read()
	if (first == nil) != (second == nil) {
		t.Fatal("accepted once and refused once")
	}
	if first != nil {
		if diff := cmp.Diff(contentOf(first), contentOf(second), cmpopts.EquateNaNs()); diff != "" {
			t.Fatalf("read twice: %s", diff)
		}
	}
}

func fuzzPlan(p *dif.Plan) {
	p.Missing = dif.MissingRule{Empty: dif.EmptyByPosition, Omitted: []string{"8", "omit"}, NotPresented: []string{"N"}}
	p.Groupings = map[string]dif.GroupingRule{"sex": {NotStated: []string{"x"}, Several: dif.SeveralNotStated}}
	p.Columns.Ignore = []string{"note"}
}

const (
	people    = "candidate_id,sex\na,m\nb,f\nc,m\nd,f\n"
	longRows  = "candidate_id,item_id,response,form\na,Q1,A,F\na,Q2,1,F\nb,Q1,B,G\nb,Q2,,G\nc,Q2,0,G\nd,Q1,C,F\n"
	bothItems = "item_id,version,key,max_score,options,content_area,role\nQ1,1,A,,A|B|C|D,x,\nQ2,1,,2,,,pretest\n"
	bothForms = "form,position,item_id,version,key,option_order\nF,1,Q1,,A,\nF,2,Q2,,,\nG,2,Q1,,B,B|A|D|C\nG,1,Q2,,,\n"
)

func FuzzReadWide(f *testing.F) {
	for _, seed := range []string{
		fourRows, keyedRows, zipped(fourRows), "\xEF\xBB\xBF" + strings.ReplaceAll(fourRows, ",", ";"),
		"candidate_id,sex,attempt,form,external_score,note,Q1,Q2\na,m,1,F,1.5,x,10,\na,m,2,F,,y,8,0\nb,f,1,G,-3,z,1,1\nb,f,1,G,-3,z,1,1\n",
		"candidate_id,sex,Q1\na,m;f,1\nb,x,0\nc,f,omit\nd,m,1\n", "candidate_id\tsex\tQ1\r\na\tm\t\"1\"\r\n\"b\nb\"\tf\t0\r\n",
		"\xFF\xFE", "PK\x03\x04", "candidate_id", "\n\n\n", "\"", "candidate_id,sex,Q1\n1234567890123450000,m,1\n12345678901234500,f,1e300\n",
	} {
		f.Add(seed, "")
		f.Add(seed, twoItems)
		f.Add(seed, keyed)
	}
	f.Fuzz(func(t *testing.T, responses, items string) {
		readTwice(t, input{responses: responses, items: items, plan: fuzzPlan})
	})
}

func FuzzReadLong(f *testing.F) {
	for _, seed := range []string{
		longRows, zipped(longRows), "candidate_id,item_id,response\na,Q1,1\nb,Q1,0\nb,Q2,10\n",
		"candidate_id,item_id,response,attempt\na,Q1,1,2\na,Q1,1,1\nb,Q1,0,1\nb,Q1,0,1\n", "candidate_id,item_id,response,sex\na,Q1,1,m\nb,Q1,1,f\n",
	} {
		f.Add(seed, "", "")
		f.Add(seed, bothItems, "")
		f.Add(seed, bothItems, bothForms)
	}
	f.Fuzz(func(t *testing.T, responses, items, forms string) {
		readTwice(t, input{responses: responses, items: items, forms: forms, candidates: people, plan: fuzzPlan})
	})
}

func FuzzReadItems(f *testing.F) {
	for _, seed := range []string{
		bothItems, twoItems, keyed, "item_id,version,options\nQ1,1,4\nQ1,2,a|b\nQ2,,26\n", "item_id\nQ1\nQ2\nQ2\n", "item_id,max_score\nQ1,0\nQ2,249\n",
	} {
		f.Add(seed)
	}
	f.Fuzz(func(t *testing.T, items string) {
		readTwice(t, input{responses: keyedRows + "c,m,N,\nd,f,1,2\n", items: items, plan: fuzzPlan})
		readTwice(t, input{responses: longRows, items: items, forms: bothForms, candidates: people, plan: fuzzPlan})
	})
}

func FuzzReadForms(f *testing.F) {
	for _, seed := range []string{bothForms, "form,position,item_id\nF,1,Q1\nF,2,Q2\n", "form,position,item_id,version\nF,1,Q1,1\nG,1,Q1,2\nG,2,Q2,1\n"} {
		f.Add(seed)
	}
	f.Fuzz(func(t *testing.T, forms string) {
		wide := "candidate_id,sex,form,Q1,Q2\na,m,F,A,1\nb,f,G,B,\nc,m,F,,2\nd,f,G,8,N\n"
		readTwice(t, input{responses: wide, items: bothItems, forms: forms, plan: fuzzPlan})
		readTwice(t, input{responses: wide, items: "item_id,version,max_score\nQ1,1,\nQ1,2,3\nQ2,1,2\n", forms: forms, plan: fuzzPlan})
		readTwice(t, input{responses: wide, forms: forms, plan: fuzzPlan})
		readTwice(t, input{responses: longRows, forms: forms, candidates: people, plan: fuzzPlan})
	})
}

func FuzzReadCandidates(f *testing.F) {
	for _, seed := range []string{people, "candidate_id,sex,home\na,m,y\nb,m;f,n\na,f,\n,m,\nz,f,x\n", zipped(people)} {
		f.Add(seed)
	}
	f.Fuzz(func(t *testing.T, candidates string) {
		readTwice(t, input{responses: longRows, items: bothItems, candidates: candidates, plan: fuzzPlan})
		readTwice(t, input{responses: fourRows, candidates: candidates, plan: func(p *dif.Plan) {
			p.Comparisons = append(p.Comparisons, dif.PlannedComparison{Grouping: "sex+home", Reference: "m+y", Focal: "each"})
		}})
	})
}

func FuzzReadPlan(f *testing.F) {
	for _, seed := range []string{
		minimalPlan, "{\"comparisons\": [{\"grouping\": \"sex\", \"reference\": \"m\", \"focal\": \"f\"}], \"seed\": 3}", minimalPlan + "missing: {omitted: [9, \"\"]}\ngroupings:\n  sex: {labels: [m, f]}\n",
		minimalPlan + "title: |\n  two\n  lines\n", "a: &a [*a]\n", "? [x]\n: y\n", "--- !!map\n...\n---\n", minimalPlan + "criteria: {class_alpha: 1e-3}\nirt: {}\n", "[[[[", "- - - -", "\t", "%YAML 1.2\n---\na: b",
	} {
		f.Add(seed)
	}
	f.Fuzz(func(t *testing.T, text string) {
		plan, err := ReadPlan("plan", strings.NewReader(text))
		if err != nil {
			if !strings.HasPrefix(err.Error(), "plan") {
				t.Fatalf("the file is not named: %v", err)
			}
			return
		}
		if faults := plan.Validate(); len(faults) > 0 {
			t.Fatalf("an invalid plan was accepted: %v", faults)
		}
	})
}
