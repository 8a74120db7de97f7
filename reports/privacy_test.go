package reports

import (
	"bytes"
	"encoding/csv"
	"strings"
	"testing"

	"difaudit/dif"
	"github.com/google/go-cmp/cmp"
)

func words(counts []count) []string {
	var out []string
	for _, c := range counts {
		out = append(out, c.record())
	}
	return out
}

func TestGuardedSplit(t *testing.T) {
	t.Parallel()
	for _, c := range []struct {
		name      string
		cells     []int
		notStated int
		want      []string
	}{
		{"nothing small", []int{0, 250, 50}, 0, []string{"0", "250", "50"}},
		{"one small label takes the next smallest along", []int{40, 250, 7, 90}, 0, []string{"withheld", "250", "<10", "90"}},
		{"two small labels protect each other", []int{40, 250, 7, 9}, 0, []string{"40", "250", "<10", "<10"}},
		{"nobody is no cover", []int{0, 250, 7, 90}, 0, []string{"0", "250", "<10", "withheld"}},
		{"few without a label are no group", []int{3, 250, 50}, 0, []string{"<10", "250", "50"}},
		{"few without a label cover a small label", []int{3, 250, 7}, 0, []string{"<10", "250", "<10"}},
		{"ten is not small", []int{0, 10, 250}, 0, []string{"0", "10", "250"}},
	} {
		if diff := cmp.Diff(c.want, words(guardedSplit(c.cells, c.notStated))); diff != "" {
			t.Errorf("%s:\n%s", c.name, diff)
		}
	}
}

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
			case column == "n_focal" && cell != "<10", column == "n_matched_focal" && cell != "<10" && cell != "0":
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

func TestMatchedCountsAreHiddenToo(t *testing.T) {
	t.Parallel()
	e := verbal(t, nil)
	e.Comparisons[0].Items[0].NMatchedFocal = 6
	if got := expose(e).comparisons[0].findings[0].nMatchedFocal.record(); got != "<10" {
		t.Errorf("matched count %q", got)
	}
}

func TestExclusionsByLabelAreGuarded(t *testing.T) {
	t.Parallel()
	x := func(label *string, n int) dif.Exclusion {
		return dif.Exclusion{Reason: dif.ExcludedOtherAttempt, Grouping: ptr("sex"), Label: label, Count: n}
	}
	got := splitExclusions([]dif.Exclusion{{Reason: dif.ExcludedOtherAttempt, Count: 45}, x(ptr("f"), 24), x(ptr("m"), 6), x(nil, 15)})
	want := []string{"24", "<10", "withheld"}
	if len(got) != 1 || cmp.Diff(want, words(got[0].counts[0])) != "" {
		t.Errorf("got %+v", got)
	}
}

// With 300, 50 and 7 candidates and all of them labelled, the 7 could be found from the
// other two: the 50 stay unseen in their own comparison, whose statistics are shown.
func TestProtectingCountIsHiddenEverywhere(t *testing.T) {
	t.Parallel()
	p := planFor("group", "a", dif.FocalEach)
	e := audit(t, p, invented{numbered("Q", 20), "group", map[string]int{"a": 300, "b": 50, "c": 7}, nil, 0}.draw(12))
	_, rows := readCSV(t, e)
	for _, row := range rows {
		want := [2]string{"withheld", "withheld"}
		if row["focal"] == "c" {
			want = [2]string{"<10", "<10"}
			if row["n_matched_focal"] == "0" {
				want[1] = "0"
			}
		}
		if got := [2]string{row["n_focal"], row["n_matched_focal"]}; got != want {
			t.Errorf("%s %s: counts %v, want %v", row["focal"], row["item"], got, want)
		}
		if row["p_focal"] != "" || row["focal"] == "b" && row["p_reference"] == "" {
			t.Errorf("%s %s: proportions %q and %q", row["focal"], row["item"], row["p_reference"], row["p_focal"])
		}
		if shown := row["mantel_haenszel.chi_square"] != ""; shown != (row["focal"] == "b") {
			t.Errorf("%s %s: statistics shown: %v", row["focal"], row["item"], shown)
		}
	}
	var b bytes.Buffer
	if err := WriteTable(&b, e); err != nil {
		t.Fatal(err)
	}
	for _, leak := range []string{"focal, 50", " 50 ", "focal, 7"} {
		if strings.Contains(b.String(), leak) {
			t.Errorf("the table shows %q", leak)
		}
	}
}
