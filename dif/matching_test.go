package dif

import (
	"slices"
	"testing"
)

// A purified matching score keeps at least half of the items and at least eight (common practice).
func TestItemsAMatchingScoreKeeps(t *testing.T) {
	t.Parallel()
	for _, c := range []struct {
		matching, removed int
		want              bool
	}{
		{24, 2, true}, {24, 12, true}, {24, 13, false}, {15, 7, true}, {15, 8, false}, {10, 2, true}, {10, 3, false}, {8, 0, true}, {40, 21, false},
	} {
		if got := mayRemove(c.matching, c.removed); got != c.want {
			t.Errorf("%d of %d removed: %v, want %v", c.removed, c.matching, got, c.want)
		}
	}
}

// Where purification would leave too few items, the whole score stays and a warning says so.
func TestPurificationThatLeavesTooFewItems(t *testing.T) {
	t.Parallel()
	d := readScored(t, "../testdata/nz-health-survey/nz-worry.csv", 3) // ten items, three of them class C
	c := mustRun(t, openPlan("sex", "F", "M", PurifyTwoStage), d).Comparisons[0]
	if len(c.Matching.RemovedItems) > 0 || !hasWarning(c.Warnings, WarnPurificationRefused) {
		t.Errorf("removed %v, warnings %v", c.Matching.RemovedItems, c.Warnings)
	}
	large := 0
	for _, s := range c.Matching.Stages[0].Items {
		if s.ComputedClass != nil && isC(*s.ComputedClass) {
			large++
		}
	}
	if large != 3 || len(c.Matching.Stages) != 2 {
		t.Errorf("%d items of class C, %d stages", large, len(c.Matching.Stages))
	}
	if got := without([]int{1, 2, 5}, []int{2}); !slices.Equal(got, []int{1, 5}) {
		t.Errorf("without: %v", got)
	}
}

// An item with an odds ratio without limit leaves the matching score only when the exact
// conditional test rejects |D-DIF| <= 1; the probabilities are base R's.
func TestItemsWithoutLimitLeaveTheScore(t *testing.T) {
	t.Parallel()
	ref := reference[struct {
		Cases []struct {
			Name   string
			Strata [][5]float64
			Min    float64 `json:"probability_minimum"`
			Max    float64 `json:"probability_maximum"`
		}
	}](t, "noncentral")
	k := &comparing{runner: &runner{plan: DefaultPlan(), data: &Data{Items: []Item{{ID: "x", MaxScore: 1}}}}}
	stays, goes := 0, 0
	for _, c := range ref.Cases {
		table := tableOf(c.Strata)
		p := c.Min
		switch sumStrata(table).limitless() {
		case 0:
			continue
		case -1:
			p = c.Max
		}
		s, leaves := k.stageItem(0, table)
		if leaves != (p < 0.05) || s.ComputedClass != nil || deref(s.Detail) != DetailInfiniteOddsRatio {
			t.Errorf("%s: leaves %v with probability %v, %+v", c.Name, leaves, p, s)
		}
		if leaves {
			goes++
		} else {
			stays++
		}
	}
	if stays == 0 || goes == 0 {
		t.Errorf("%d stay and %d leave: both should occur", stays, goes)
	}
}
