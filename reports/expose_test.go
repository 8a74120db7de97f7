package reports

import (
	"bytes"
	"encoding/csv"
	"strings"
	"testing"

	"difaudit/dif"
	"github.com/google/go-cmp/cmp"
)

// smallGroup audits 300 candidates against 8, with minima that let the engine letter
// the items all the same.
func smallGroup(t testing.TB) *dif.Evidence {
	p := planFor("sex", "f", "m")
	p.Criteria.MinSmallerGroup, p.Criteria.MinTotal = 1, 1
	return audit(t, p, invented{numbered("Q", 20), "sex", map[string]int{"f": 300, "m": 8, "": 40}, nil, 0}.draw(11))
}

func TestSmallGroupShowsNoStatistic(t *testing.T) {
	t.Parallel()
	e := smallGroup(t)
	lettered := 0
	for _, f := range e.Comparisons[0].Items {
		if f.Classification.Class != nil {
			lettered++
		}
	}
	if lettered == 0 {
		t.Fatal("the engine lettered nothing: the test shows nothing")
	}
	var b bytes.Buffer
	if err := WriteCSV(&b, e); err != nil {
		t.Fatal(err)
	}
	rows, err := csv.NewReader(&b).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	allowed := map[string]bool{"grouping": true, "reference": true, "focal": true, "item": true, "version": true, "role": true,
		"n_reference": true, "n_focal": true, "n_matched_reference": true, "n_matched_focal": true, "reason": true, "detail": true}
	withheld := 0
	for _, row := range rows[1:] {
		for i, cell := range row {
			switch column := rows[0][i]; {
			case (column == "n_focal" || column == "n_matched_focal") && cell != "<10", column == "n_matched_reference" && cell != "<10" && cell != "withheld":
				t.Errorf("%s: %s is %q", row[3], column, cell)
			case column == "reason" && cell == dif.ReasonWithheldForPrivacy:
				withheld++
			case column == "reason" && cell == "":
				t.Errorf("%s: no reason", row[3])
			case !allowed[column] && cell != "":
				t.Errorf("%s: %s is %q", row[3], column, cell)
			}
		}
	}
	if withheld != lettered {
		t.Errorf("%d findings are withheld, %d had a letter", withheld, lettered)
	}
	x := expose(e)
	if got := x.comparisons[0].Summary.Classes.Total(); got != 0 {
		t.Errorf("the summary still counts %d letters", got)
	}
	if got := x.comparisons[0].Summary.NoVerdict.Total(); got != 20 {
		t.Errorf("the summary counts %d items without a verdict, want 20", got)
	}
	b.Reset()
	if err := WriteTable(&b, e); err != nil {
		t.Fatal(err)
	}
	if s := b.String(); !strings.Contains(s, "fewer than 10") || strings.Contains(s, "(focal, 8)") || strings.Contains(s, "0.") {
		t.Errorf("table shows numbers:\n%s", s)
	}
}

func TestItemOfFewCandidatesIsWithheldAlone(t *testing.T) {
	t.Parallel()
	e := verbal(t, func(p *dif.Plan) { p.Criteria.MinSmallerGroup, p.Criteria.MinTotal = 1, 1 })
	items := e.Comparisons[0].Items
	items[2].NFocal, items[2].NMatchedFocal = 9, 9 // has a letter
	items[5].NFocal, items[5].NMatchedFocal = 4, 3
	items[5].Classification.Reason = ptr(dif.ReasonTooFewCandidates)
	items[5].Classification.Class = nil
	e.Comparisons[0].Summary = dif.Summarize(items, e.Plan.Criteria) // of the items as changed here
	before := e.Comparisons[0].Summary.Classes.Total()
	x := expose(e).comparisons[0]
	for i, f := range x.findings {
		if want := i == 2 || i == 5; f.withheld != want {
			t.Errorf("item %d: withheld %v", i, f.withheld)
		}
	}
	if got := value(x.findings[2].Classification.Reason); got != dif.ReasonWithheldForPrivacy {
		t.Errorf("reason %q, want %q", got, dif.ReasonWithheldForPrivacy)
	}
	if got := value(x.findings[5].Classification.Reason); got != dif.ReasonTooFewCandidates {
		t.Errorf("reason %q, want %q", got, dif.ReasonTooFewCandidates)
	}
	for _, i := range []int{2, 5} {
		f := x.findings[i]
		if f.Results != nil || f.PFocal != nil || f.Strata != nil || f.Classification.ComputedClass != nil || f.NFocal != 0 || f.nFocal.record() != "<10" {
			t.Errorf("item %d still shows %+v", i, f)
		}
	}
	if got := x.Summary.Classes.Total(); got != before-1 {
		t.Errorf("summary counts %d letters, want %d", got, before-1)
	}
	if items[2].Classification.Class == nil || e.Comparisons[0].Summary.Classes.Total() != before {
		t.Error("the evidence was changed")
	}
	for _, name := range x.Matching.RemovedItems {
		if name == items[5].Item {
			t.Error("a withheld item is named among the removed ones")
		}
	}
}

// Statistics rest on the matched candidates: one to nine of them ask for the same
// protection as a small group. Where nobody is matched nothing rests on anybody.
func TestItemOfFewMatchedCandidatesIsWithheld(t *testing.T) {
	t.Parallel()
	e := verbal(t, func(p *dif.Plan) { p.Criteria.MinSmallerGroup, p.Criteria.MinTotal = 1, 1 })
	c := &e.Comparisons[0]
	c.Items[0].NMatchedFocal = 6
	c.Items[1].NMatchedReference = 9
	c.Items[2].NMatchedReference, c.Items[2].NMatchedFocal = 0, 0
	c.Items[2].Classification = dif.Classification{Reason: ptr(dif.ReasonNoScoreOverlap)}
	c.Items[3].NMatchedFocal = 10
	c.Summary = dif.Summarize(c.Items, e.Plan.Criteria) // of the items as changed here
	_, rows := readCSV(t, e)
	for i, want := range []map[string]string{
		{"n_focal": "73", "n_matched_reference": "withheld", "n_matched_focal": "<10", "p_focal": "", "computed_class": "", "mantel_haenszel.chi_square": "", "reason": dif.ReasonWithheldForPrivacy},
		{"n_focal": "73", "n_matched_reference": "<10", "n_matched_focal": "withheld", "p_focal": "", "computed_class": "", "mantel_haenszel.chi_square": "", "reason": dif.ReasonWithheldForPrivacy},
		{"n_focal": "73", "n_matched_reference": "0", "n_matched_focal": "0", "reason": dif.ReasonNoScoreOverlap},
		{"n_matched_focal": "10", "reason": ""},
	} {
		for column, cell := range want {
			if rows[i][column] != cell {
				t.Errorf("item %d: %s is %q, want %q", i, column, rows[i][column], cell)
			}
		}
	}
	if rows[2]["p_focal"] == "" || rows[3]["mantel_haenszel.chi_square"] == "" {
		t.Error("an item without small counts is withheld")
	}
	x := expose(e).comparisons[0]
	if n := x.Summary.ExpectedByChance.Tests; n != c.Summary.ExpectedByChance.Tests-2 {
		t.Errorf("%d tests are counted, want two fewer than %d", n, c.Summary.ExpectedByChance.Tests)
	}
	// What chance gives is that of the items still shown, each by its own standard error.
	var shown []dif.Finding
	for i := range c.Items {
		if i > 1 {
			shown = append(shown, c.Items[i])
		}
	}
	if want := dif.Summarize(shown, e.Plan.Criteria).ExpectedByChance; x.Summary.ExpectedByChance != want {
		t.Errorf("by chance %+v, want %+v", x.Summary.ExpectedByChance, want)
	}
	if s := table(t, e); strings.Contains(s, " 6 ") || !strings.Contains(s, "withheld for privacy (2)") {
		t.Errorf("table:\n%s", s)
	}
}

func table(t testing.TB, e *dif.Evidence) string {
	t.Helper()
	var b bytes.Buffer
	if err := WriteTable(&b, e); err != nil {
		t.Fatal(err)
	}
	return b.String()
}

// The share of candidates lost is printed for a comparison that is shown, however small
// the number without a counterpart. It is not where one to nine have one, since group
// size and share would tell how many.
func TestUnmatchedCounts(t *testing.T) {
	t.Parallel()
	e := verbal(t, nil)
	g := &e.Comparisons[0].Groups
	g.Reference.Unmatched, g.Focal.Unmatched = 12, 4 // 16 of 316: 5.1 %
	x := expose(e).comparisons[0]
	if diff := cmp.Diff([]string{"12", "4"}, words([]count{x.unmatchedRef, x.unmatchedFocal})); diff != "" {
		t.Error(diff)
	}
	if s := table(t, e); !strings.HasPrefix(s, "Candidates lost: 5.1 % of the candidates compared by gender F/M: nobody of the other group stands at their matching level (reference 4.9 %, focal 5.5 %).\n") {
		t.Errorf("the table begins with %.130q", s)
	}

	g.Focal.Unmatched = 68 // of 73
	message := "93.2 % of the focal group leave the analysis."
	e.Comparisons[0].Warnings = []dif.Warning{{Code: dif.WarnCandidatesLost, Message: message}, {Code: dif.WarnLowReliability, Message: "alpha 0.5"}}
	x = expose(e).comparisons[0]
	if diff := cmp.Diff([]string{"withheld", "withheld"}, words([]count{x.unmatchedRef, x.unmatchedFocal})); diff != "" {
		t.Error(diff)
	}
	if x.Warnings[0].Message != "" || x.Warnings[1].Message != "alpha 0.5" {
		t.Errorf("warnings %+v", x.Warnings)
	}
	if s := table(t, e); !strings.HasPrefix(s, "Candidates lost: more than 2 % of the candidates") || strings.Contains(s, "93.2") || strings.Contains(s, "25.3") {
		t.Errorf("the table begins with %.500q", s)
	}

	g.Focal.Unmatched = 73 // nobody is matched
	if x = expose(e).comparisons[0]; x.unmatchedFocal.record() != "73" {
		t.Errorf("unmatched %q", x.unmatchedFocal.record())
	}
	g.Focal.N, g.Focal.Unmatched = 9, 4
	x = expose(e).comparisons[0]
	if s := table(t, e); x.unmatchedRef.hiding == visible || strings.Contains(s, "Candidates lost") {
		t.Errorf("a withheld comparison tells of candidates lost: %.80q", s)
	}
}

// Candidates without an external score are counted by label among the exclusions; where
// fewer than ten of a group are, no share may tell how many.
func TestShareLostDoesNotTellWhoHasNoScore(t *testing.T) {
	t.Parallel()
	e := verbal(t, nil)
	e.Comparisons[0].Groups.Focal.NoScore = 27                                                                          // of 100
	if s := table(t, e); !strings.HasPrefix(s, "Candidates lost: 12.5 % of") || !strings.Contains(s, "focal 27.0 %)") { // 16 + 27 of 343
		t.Errorf("the table begins with %.250q", s)
	}
	hidden := func(why string) {
		t.Helper()
		if s := table(t, e); !strings.HasPrefix(s, "Candidates lost: more than 2 % of") || strings.Contains(s, "27.0 %") {
			t.Errorf("%s: the table begins with %.250q", why, s)
		}
	}
	e.Comparisons[0].Groups.Reference.NoScore = 4
	hidden("four of a group")
	e.Comparisons[0].Groups.Reference.NoScore = 0
	e.Inputs.Exclusions = []dif.Exclusion{{Reason: dif.ExcludedNoExternalScore, Count: 31}}
	for _, label := range []*string{ptr("M"), nil} {
		n := 27
		if label == nil {
			n = 4
		}
		e.Inputs.Exclusions = append(e.Inputs.Exclusions, dif.Exclusion{Reason: dif.ExcludedNoExternalScore, Grouping: ptr("gender"), Label: label, Count: n})
	}
	hidden("four without a label, whom the 27 cover")
}

// Items of forms A, B and C were taken by 55, 40 and 5 of 100: the 5 must not follow from
// the others.
func TestItemCountsDoNotGiveAwayASmallForm(t *testing.T) {
	t.Parallel()
	e := verbal(t, nil)
	c := &e.Comparisons[0]
	for i, n := range []int{55, 55, 40, 40, 5} {
		c.Items[i].NFocal, c.Items[i].NMatchedFocal = n, n
	}
	_, rows := readCSV(t, e)
	for i, want := range []string{"55", "55", "withheld", "withheld", "<10", "73"} {
		if rows[i]["n_focal"] != want || (rows[i]["p_focal"] == "") != (want == "withheld" || want == "<10") {
			t.Errorf("item %d: %q and %q, want %q", i, rows[i]["n_focal"], rows[i]["p_focal"], want)
		}
		if rows[i]["n_reference"] != "243" {
			t.Errorf("item %d: reference count %q", i, rows[i]["n_reference"])
		}
	}
	// With items of A and C together, 60 less 55 would give it away.
	c.Items[4].NFocal, c.Items[4].NMatchedFocal = 60, 60
	c.Matching.Sets = []dif.PresentedSet{
		{Set: 1, Form: ptr("A"), NReference: 100, NFocal: 28}, {Set: 2, Form: ptr("B"), NReference: 100, NFocal: 40}, {Set: 3, Form: ptr("C"), NReference: 43, NFocal: 5}}
	_, rows = readCSV(t, e)
	for i, want := range []string{"withheld", "withheld", "withheld", "withheld", "withheld", "73"} {
		if rows[i]["n_focal"] != want {
			t.Errorf("item %d: %q, want %q", i, rows[i]["n_focal"], want)
		}
	}
}
