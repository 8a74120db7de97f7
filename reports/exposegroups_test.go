package reports

import (
	"bytes"
	"strings"
	"testing"

	"difaudit/dif"
	"github.com/google/go-cmp/cmp"
)

func TestExclusionsByLabelAreGuarded(t *testing.T) {
	t.Parallel()
	x := func(label *string, n int) dif.Exclusion {
		return dif.Exclusion{Reason: dif.ExcludedOtherAttempt, Grouping: ptr("sex"), Label: label, Count: n}
	}
	for _, c := range []struct {
		exclusions []dif.Exclusion
		want       []string
	}{
		{[]dif.Exclusion{x(ptr("f"), 24), x(ptr("m"), 6), x(nil, 15)}, []string{"24", "<10", "withheld"}},
		{[]dif.Exclusion{x(ptr("f"), 24), x(ptr("m"), 30), x(nil, 2)}, []string{"withheld", "30", "<10"}},
		{[]dif.Exclusion{x(ptr("m"), 3)}, []string{"<10", "<10", "0"}}, // the total is 3: one cell must not be alone
	} {
		in := dif.Inputs{Exclusions: append([]dif.Exclusion{{Reason: dif.ExcludedOtherAttempt, Count: 45}}, c.exclusions...),
			Groupings: []dif.GroupingCount{{Grouping: "sex", Labels: []dif.LabelCount{{Label: "f", N: 100}, {Label: "m", N: 100}}}}}
		got := splitExclusions(in)
		if len(got) != 1 || cmp.Diff(c.want, words(got[0].counts[0])) != "" {
			t.Errorf("got %v, want %v", words(got[0].counts[0]), c.want)
		}
	}
}

// All candidates analysed stand in one cell of each grouping; labels that are not
// compared share one.
func TestGroupsAddUp(t *testing.T) {
	t.Parallel()
	sizes := map[string]int{"a": 300, "b": 150, "c": 40, "d": 25, "": 30}
	e := audit(t, planFor("group", "a", "b"), invented{numbered("Q", 12), "group", sizes, nil, 0}.draw(13))
	g := expose(e).groupings[0]
	if diff := cmp.Diff([]string{"300", "150", "65", "30"}, append(words(g.counts), words([]count{g.other, g.notStated})...)); diff != "" {
		t.Error(diff)
	}
	if diff := cmp.Diff([]string{"c", "d"}, g.others); diff != "" {
		t.Error(diff)
	}
}

// How many gave no label tells nobody's group: it is shown, and hides no group. The
// candidates of a small group that is not compared are another matter.
func TestFewNotStatedHideNobody(t *testing.T) {
	t.Parallel()
	e := audit(t, planFor("sex", "f", "m"), invented{numbered("Q", 12), "sex", map[string]int{"f": 300, "m": 60, "": 3}, nil, 0}.draw(14))
	g := expose(e).groupings[0]
	if diff := cmp.Diff([]string{"300", "60", "0", "3"}, append(words(g.counts), g.other.record(), g.notStated.record())); diff != "" {
		t.Error(diff)
	}
	_, rows := readCSV(t, e)
	for _, row := range rows {
		if row["n_focal"] != "60" || row["p_focal"] == "" || row["mantel_haenszel.delta"] == "" {
			t.Errorf("%s: %v", row["item"], row)
		}
	}
	e = audit(t, planFor("sex", "f", "m"), invented{numbered("Q", 12), "sex", map[string]int{"f": 300, "m": 60, "x": 4, "": 3}, nil, 0}.draw(14))
	g = expose(e).groupings[0]
	if diff := cmp.Diff([]string{"300", "withheld", "<10", "3"}, append(words(g.counts), g.other.record(), g.notStated.record())); diff != "" {
		t.Error(diff)
	}
	_, rows = readCSV(t, e)
	for _, row := range rows {
		if row["n_focal"] != "withheld" || row["n_matched_focal"] != "withheld" || row["p_focal"] != "" || row["n_reference"] != "300" || row["mantel_haenszel.delta"] == "" {
			t.Errorf("%s: %v", row["item"], row)
		}
	}
	e.Comparisons[0].Warnings = []dif.Warning{{Code: dif.WarnNotStated, Message: "More candidates"}, {Code: dif.WarnLowReliability}}
	c := expose(e).comparisons[0]
	if len(c.Warnings) != 1 || len(e.Comparisons[0].Warnings) != 2 {
		t.Errorf("warnings %+v", c.Warnings)
	}
	if c.Groups.Focal.Mean != nil || c.Groups.Focal.SD != nil || c.unmatchedFocal.hiding == visible || c.Groups.Reference.Mean == nil {
		t.Error("mean, SD or unmatched of the protecting group are shown, or the other group is hidden")
	}
	if s := table(t, e); strings.Contains(s, " 60") || strings.Contains(s, "focal, 60") {
		t.Errorf("table:\n%s", s)
	}
}

// The labels of a crossing add up to those of its parts: 50 of f, of whom 44 are f+home.
func TestCrossingDoesNotGiveAwayASmallCell(t *testing.T) {
	t.Parallel()
	comparison := func(grouping, reference, focal string, n, m int) dif.Comparison {
		return dif.Comparison{Grouping: grouping, Reference: reference, Focal: focal,
			Groups: dif.Groups{Reference: dif.Group{N: n}, Focal: dif.Group{N: m}}}
	}
	e := &dif.Evidence{
		Inputs: dif.Inputs{CandidatesReceived: 250, CandidatesAnalysed: 250},
		Comparisons: []dif.Comparison{
			comparison("sex", "m", "f", 200, 50),
			comparison("sex+home", "m+home", "f+home", 120, 44),
			comparison("sex+home", "m+home", "f+away", 120, 6),
			comparison("sex+home", "m+home", "m+away", 120, 80),
			comparison("age", "old", "young", 100, 150),
		},
	}
	x := expose(e)
	for i, want := range [][]string{{"200", "50"}, {"withheld", "withheld", "<10", "withheld"}, {"100", "150"}} {
		if diff := cmp.Diff(want, words(x.groupings[i].counts)); diff != "" {
			t.Errorf("%s:\n%s", x.groupings[i].name, diff)
		}
	}
	e.Comparisons = append(e.Comparisons[1:4:4], e.Comparisons[4]) // the margin is not shown
	if diff := cmp.Diff([]string{"120", "withheld", "<10", "80"}, words(expose(e).groupings[0].counts)); diff != "" {
		t.Error(diff)
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
