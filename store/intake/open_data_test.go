package intake

import (
	"os"
	"strings"
	"testing"

	"difaudit/dif"
)

// openFile reads a file of the test data as a response file.
func openFile(t *testing.T, path string) *File {
	t.Helper()
	content, err := os.ReadFile("../../testdata/" + path)
	if err != nil {
		t.Fatal(err)
	}
	return &File{Name: path[strings.LastIndex(path, "/")+1:], Reader: strings.NewReader(string(content))}
}

// Group sizes of the verbal aggression data: methods.md CV-40 (243 women, 73 men,
// 24 items); its README says the same.
func TestVerbalAggression(t *testing.T) {
	t.Parallel()
	for file, highest := range map[string]int{"verbal-binary.csv": 1, "verbal-polytomous.csv": 2} {
		plan := dif.DefaultPlan()
		plan.Comparisons = []dif.PlannedComparison{{Grouping: "gender", Reference: "F", Focal: "M"}}
		result, err := Read(t.Context(), Request{Responses: openFile(t, "verbal-aggression/"+file), Plan: plan})
		if err != nil {
			t.Fatal(err)
		}
		d := result.Data
		if d.Candidates() != 316 || len(d.Items) != 24 {
			t.Errorf("%s: %d candidates, %d items; want 316, 24", file, d.Candidates(), len(d.Items))
		}
		for _, it := range d.Items {
			if it.MaxScore != highest {
				t.Errorf("%s: item %s has maximum %d, want %d", file, it.ID, it.MaxScore, highest)
			}
		}
		counts := map[string]int{}
		for _, c := range d.Groupings[0].Codes {
			counts[d.Groupings[0].Labels[c-1]]++
		}
		if counts["F"] != 243 || counts["M"] != 73 {
			t.Errorf("%s: groups %v, want F 243, M 73", file, counts)
		}
		for _, n := range result.Notes {
			t.Log(n)
		}
	}
}

// Correct answers per item as the README of the data gives them (Bock and Lieberman
// 1970): 924, 709, 553, 763, 870 of 1,000.
func TestLSAT(t *testing.T) {
	t.Parallel()
	plan := dif.DefaultPlan()
	plan.Comparisons = []dif.PlannedComparison{{Grouping: "group", Reference: "all", Focal: "none"}}
	p := Request{Responses: openFile(t, "lsat-section6/lsat6.csv"), Plan: plan}
	if _, err := Read(t.Context(), p); err == nil || !strings.Contains(err.Error(), labelNotInData) && !strings.Contains(err.Error(), `"none"`) {
		t.Errorf("one group only: got %v", err)
	}
	content, err := os.ReadFile("../../testdata/lsat-section6/lsat6.csv")
	if err != nil {
		t.Fatal(err)
	}
	split := strings.Replace(string(content), "L0001,all", "L0001,none", 1)
	result, err := Read(t.Context(), Request{Responses: &File{"lsat6.csv", strings.NewReader(split)}, Plan: plan})
	if err != nil {
		t.Fatal(err)
	}
	var correct [5]int
	for i := range result.Data.Candidates() {
		for k, code := range result.Data.Answers.Row(i) {
			correct[k] += int(code)
		}
	}
	if correct != [5]int{924, 709, 553, 763, 870} {
		t.Errorf("correct answers %v", correct)
	}
}

// Counts as the README of the data gives them: 10,505 people, 2,937 women, 7,568 men,
// 60 without ethnicity, 10,083 with all ten answers.
func TestHealthSurvey(t *testing.T) {
	t.Parallel()
	plan := dif.DefaultPlan()
	plan.Comparisons = []dif.PlannedComparison{
		{Grouping: "sex", Reference: "M", Focal: "F"}, {Grouping: "ethnicity", Reference: "European", Focal: "each"},
	}
	plan.Columns.Groupings = []string{"age_band"}
	request := Request{Responses: openFile(t, "nz-health-survey/nz-worry.csv"), Plan: plan}
	if _, err := Read(t.Context(), request); err == nil || !strings.Contains(err.Error(), undeclaredBlanks) {
		t.Errorf("empty cells: got %v", err)
	}
	plan.Missing.Empty = dif.EmptyOmitted
	result, err := Read(t.Context(), Request{Responses: openFile(t, "nz-health-survey/nz-worry.csv"), Plan: plan})
	if err != nil {
		t.Fatal(err)
	}
	d := result.Data
	checkData(t, d)
	complete := 0
	for i := range d.Candidates() {
		if !strings.Contains(string(d.Answers.Row(i)), string([]byte{dif.CodeOmitted})) {
			complete++
		}
	}
	count := func(g dif.Grouping, label string) (n int) {
		for _, c := range g.Codes {
			if c == 0 && label == "" || c > 0 && g.Labels[c-1] == label {
				n++
			}
		}
		return n
	}
	got := [5]int{d.Candidates(), complete, count(d.Groupings[1], "F"), count(d.Groupings[1], "M"), count(d.Groupings[0], "")}
	if got != [5]int{10505, 10083, 2937, 7568, 60} {
		t.Errorf("people, complete, women, men, no ethnicity: %v", got)
	}
}
