package dif

import (
	"fmt"
	"math"
	"slices"
)

// agreement is the relative difference at which two computations of a number agree.
const agreement = 1e-9

// Disagreements checks the evidence against itself, without the data: statistics from the
// stored strata, letters and reasons from the stored statistics, counts from the letters. It
// returns one sentence for each thing that does not follow, in the order of the document.
func (e *Evidence) Disagreements() []string {
	var out []string
	say := func(format string, args ...any) { out = append(out, fmt.Sprintf(format, args...)) }
	for _, err := range e.Plan.Validate() {
		say("plan: %v", err)
	}
	excluded := 0
	for _, x := range e.Inputs.Exclusions {
		if x.Grouping == nil {
			excluded += x.Count
		}
	}
	if e.Inputs.CandidatesReceived-excluded != e.Inputs.CandidatesAnalysed {
		say("inputs: %d received less %d excluded is not %d analysed", e.Inputs.CandidatesReceived, excluded, e.Inputs.CandidatesAnalysed)
	}
	for _, g := range e.Inputs.Groupings {
		n := g.NotStated
		for _, l := range g.Labels {
			n += l.N
		}
		if n != e.Inputs.CandidatesAnalysed {
			say("inputs: the labels of %s and the not stated are %d candidates, not the %d analysed", g.Grouping, n, e.Inputs.CandidatesAnalysed)
		}
	}
	if len(e.Comparisons) < len(e.Plan.Comparisons) {
		say("comparisons: %d stand in the plan, %d in the evidence", len(e.Plan.Comparisons), len(e.Comparisons))
	}
	for i := range e.Comparisons {
		c := &e.Comparisons[i]
		at := fmt.Sprintf("comparison %d", i+1)
		for _, s := range c.disagreements(e) {
			say("%s: %s", at, s)
		}
	}
	return out
}

func (c *Comparison) disagreements(e *Evidence) []string {
	var out []string
	say := func(format string, args ...any) { out = append(out, fmt.Sprintf(format, args...)) }
	if len(c.Items) != len(e.Inputs.Items) {
		say("%d items were received, %d have a finding", len(e.Inputs.Items), len(c.Items))
		return out
	}
	for i := range c.Items {
		f, item := &c.Items[i], &e.Inputs.Items[i]
		if f.Item != item.Item || f.Version != item.Version {
			say("finding %d is not about item %d of the inputs", i+1, i+1)
			continue
		}
		for _, s := range f.disagreements(item, e.Plan) {
			say("item %s: %s", f.Item, s)
		}
	}
	// Adjusted values belong to the whole comparison.
	again := make([]Finding, len(c.Items))
	for i := range c.Items {
		again[i].Classification = c.Items[i].Classification
		if c.Items[i].MantelHaenszel() != nil {
			again[i].Results = Results{{idMantelHaenszel, &MantelHaenszelResult{}}}
		}
	}
	adjust(again)
	for i := range again {
		if mh := c.Items[i].MantelHaenszel(); mh != nil && !agree(mh.QValue, again[i].MantelHaenszel().QValue) {
			say("item %s: the q-value does not follow from the p-values", c.Items[i].Item)
		}
	}
	s := summarize(c.Items, e.Plan.Criteria)
	stored := &c.Summary
	if !slices.Equal(s.Classes, stored.Classes) || !slices.Equal(s.NoVerdict, stored.NoVerdict) {
		say("the summary does not count the letters and reasons of its items")
	}
	if s.LargeDifferenceNotExcluded != stored.LargeDifferenceNotExcluded {
		say("the summary counts %d items A with a large difference not excluded, the items hold %d", stored.LargeDifferenceNotExcluded, s.LargeDifferenceNotExcluded)
	}
	x, y := s.ExpectedByChance, stored.ExpectedByChance
	if x.Tests != y.Tests || !agree(&x.BOrC, &y.BOrC) || !agree(&x.C, &y.C) || !agree(&x.Significant, &y.Significant) {
		say("the numbers expected by chance do not follow from the standard errors")
	}
	for _, s := range c.Matching.disagreements(e.Plan, e.Inputs.Items) {
		say("%s", s)
	}
	return out
}

// disagreements checks that the items left out of the matching score are those the first
// stage classed C.
func (m *Matching) disagreements(plan Plan, items []ItemSummary) []string {
	if len(m.Stages) == 0 {
		return []string{"matching: no stage is stored"}
	}
	if len(m.Stages[0].Items) != len(items) {
		return []string{"matching: a stage does not hold every item"}
	}
	var must, may []string
	for i, s := range m.Stages[0].Items {
		if items[i].Role == RolePretest {
			continue
		}
		var letter string
		if s.Delta != nil && s.DeltaSE != nil && s.PValue != nil {
			letter, _ = Letter(*s.Delta, *s.DeltaSE, *s.PValue, plan.Criteria.ClassAlpha)
		}
		if letter != "" && (s.ComputedClass == nil || letter != *s.ComputedClass) {
			return []string{fmt.Sprintf("matching: the stage-1 letter of %s does not follow from its statistics", s.Item)}
		}
		limitless := s.Detail != nil && *s.Detail == DetailInfiniteOddsRatio
		if isC(letter) {
			must = append(must, s.Item)
		}
		if isC(letter) || limitless {
			may = append(may, s.Item)
		}
	}
	for _, item := range m.RemovedItems {
		if !slices.Contains(may, item) {
			return []string{fmt.Sprintf("matching: %s was left out without having been classed C", item)}
		}
	}
	if len(m.RemovedItems) > 0 {
		for _, item := range must {
			if !slices.Contains(m.RemovedItems, item) {
				return []string{fmt.Sprintf("matching: %s was classed C and not left out", item)}
			}
		}
	}
	return nil
}

// disagreements checks one finding.
func (f *Finding) disagreements(item *ItemSummary, plan Plan) []string {
	var out []string
	say := func(format string, args ...any) { out = append(out, fmt.Sprintf(format, args...)) }
	k := &f.Classification

	var matched [2]int
	for _, s := range f.Strata {
		matched[0] += s.NReference
		matched[1] += s.NFocal
	}
	if matched != [2]int{f.NMatchedReference, f.NMatchedFocal} || len(f.Strata) != f.StrataUsed {
		say("the numbers of matched candidates and strata do not follow from the strata")
	}
	if matched[0] > f.NReference || matched[1] > f.NFocal {
		say("more candidates are matched than counted")
	}
	if item.MaxScore == 1 && k.Detail != nil && *k.Detail == DetailNoKey && len(f.Results) > 0 {
		say("an item without a key has statistics")
	}
	if t, ok := f.table(); item.MaxScore == 1 && ok {
		c := t.cover()
		if c.informative != f.StrataInformative || c.informativeN != f.NInformative {
			say("the informative strata do not follow from the strata")
		}
		for _, r := range f.Results {
			if m := methodByID(r.Method); !sameColumns(r.Result, m.Test(t, plan.Criteria)) {
				say("%s does not follow from the strata", r.Method)
			}
		}
	} else if item.MaxScore == 1 {
		say("a stratum's mean is not a number of right answers over its candidates")
	}
	if mh := f.MantelHaenszel(); mh != nil {
		p := mh.PValue
		if plan.Criteria.ContinuityCorrection {
			p = mh.PValueCorrected
		}
		if letter := letterOf(mh, p, plan.Criteria.ClassAlpha); !equal(letter, k.ComputedClass) {
			say("the computed class does not follow from D-DIF, its standard error and p")
		}
		if letter := letterOf(mh, mh.PValueCorrected, plan.Criteria.ClassAlpha); !equal(letter, k.ClassIfCorrected) {
			say("the class under the correction does not follow from the statistics")
		}
		if !agree(p, k.PValue) {
			say("the p-value of the classification is not that of its test")
		}
	}
	if reason := f.expectedReason(item, plan.Criteria); reason != "" || k.Class == nil {
		if k.Reason == nil || *k.Reason != reason {
			say("the reason for no verdict does not follow from the counts")
		}
		if k.Class != nil {
			say("a class stands beside a reason for no verdict")
		}
	} else if !equal(k.Class, k.ComputedClass) || k.Reason != nil {
		say("the class is not the computed class")
	}
	return out
}

// expectedReason returns the reason that follows from the stored counts, "" for none.
func (f *Finding) expectedReason(item *ItemSummary, c Criteria) string {
	k := &f.Classification
	detail := func(s string) bool { return k.Detail != nil && *k.Detail == s }
	whole := func(p *float64) bool { return p != nil && (*p == 0 || *p == 1) }
	matched := [2]int{f.NMatchedReference, f.NMatchedFocal}
	switch {
	case detail(DetailNoKey):
		return ReasonKeyMissing
	case f.NReference == 0 || f.NFocal == 0:
		return ReasonNotPresented
	case item.MaxScore > 1 && k.Reason != nil && (*k.Reason == ReasonNoVariation || *k.Reason == ReasonNoVariationInGroup):
		return *k.Reason // a constant score between the ends cannot be seen in the means
	case whole(f.PReference) && whole(f.PFocal) && *f.PReference == *f.PFocal:
		return ReasonNoVariation
	case whole(f.PReference) || whole(f.PFocal):
		return ReasonNoVariationInGroup
	case f.StrataUsed == 0:
		return ReasonNoScoreOverlap
	case min(matched[0], matched[1]) < c.MinSmallerGroup || matched[0]+matched[1] < c.MinTotal:
		return ReasonTooFewCandidates
	case f.NInformative < minimumInformative:
		return ReasonTooFewInformative
	case k.ComputedClass == nil:
		return ReasonNotEstimable
	}
	return ""
}

// table rebuilds the comparable strata of a binary item; false where a mean is not a
// share of its count.
func (f *Finding) table() (*ItemTable, bool) {
	t := &ItemTable{Categories: 2}
	ok := true
	right := func(n int, mean float64) uint32 {
		r := math.Round(float64(n) * mean)
		if n < 0 || !(math.Abs(r-float64(n)*mean) < 1e-6*math.Max(1, r)) || r < 0 || r > float64(n) {
			ok = false
			return 0
		}
		return uint32(r)
	}
	for _, s := range f.Strata {
		a, c := right(s.NReference, s.MeanReference), right(s.NFocal, s.MeanFocal)
		t.Strata = append(t.Strata, Stratum{s.Set, s.Score})
		t.Counts = append(t.Counts, uint32(s.NReference)-a, a, uint32(s.NFocal)-c, c)
	}
	return t, ok
}

// sameColumns compares the numbers of two results of one method, q-values left out.
func sameColumns(a, b Result) bool {
	if a == nil || b == nil {
		return false
	}
	x, y := a.Columns(), b.Columns()
	for i := range x {
		if x[i].Key != "q_value" && !agree(x[i].Value, y[i].Value) {
			return false
		}
	}
	return true
}

func agree(a, b *float64) bool {
	if a == nil || b == nil {
		return a == nil && b == nil
	}
	return *a == *b || math.Abs(*a-*b) <= agreement*math.Max(math.Abs(*a), math.Abs(*b))
}

func equal(a, b *string) bool {
	if a == nil || b == nil {
		return a == nil && b == nil
	}
	return *a == *b
}
