package dif

import (
	"cmp"
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
	if !e.followsPlan() {
		say("comparisons: they are not those of the plan")
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

// followsPlan reports whether the comparisons are those the plan asks for, in order, with
// FocalEach standing for every other label.
func (e *Evidence) followsPlan() bool {
	at := 0
	for _, want := range e.Plan.Comparisons {
		taken := 0
		for ; at < len(e.Comparisons); at++ {
			c := &e.Comparisons[at]
			if c.Grouping != want.Grouping || c.Reference != want.Reference || want.Focal != FocalEach && (c.Focal != want.Focal || taken == 1) {
				break
			}
			taken++
		}
		if taken == 0 {
			return false
		}
	}
	return at == len(e.Comparisons)
}

// disagreements checks the sizes and spread of the groups of a comparison.
func (g *Groups) disagreements() []string {
	moments := func(x *Group) scoreMoments {
		m := scoreMoments{n: x.N, mean: math.NaN(), ss: math.NaN()}
		if x.Mean != nil && x.SD != nil {
			m.mean, m.ss = *x.Mean, *x.SD**x.SD*float64(x.N-1)
		}
		return m
	}
	var out []string
	if d := number(standardizedDifference(moments(&g.Reference), moments(&g.Focal))); !nearly(d, g.Difference, 1e-6) {
		out = append(out, "the standardized difference does not follow from means and standard deviations")
	}
	if g.Reference.Unmatched > g.Reference.N || g.Focal.Unmatched > g.Focal.N {
		out = append(out, "more candidates are unmatched than there are")
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
	s := Summarize(c.Items, e.Plan.Criteria)
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
	out = append(out, c.Groups.disagreements()...)
	out = append(out, c.countsDisagree(e)...)
	return append(out, c.stagesDisagree(e)...)
}

// countsDisagree checks the numbers of candidates of a comparison against the label counts
// of the inputs and the findings, and its methods and matching against the plan.
func (c *Comparison) countsDisagree(e *Evidence) []string {
	var out []string
	say := func(format string, args ...any) { out = append(out, fmt.Sprintf(format, args...)) }
	i := slices.IndexFunc(e.Inputs.Groupings, func(g GroupingCount) bool { return g.Grouping == c.Grouping })
	if i < 0 {
		return []string{"the inputs do not count the labels of its grouping"}
	}
	labels := e.Inputs.Groupings[i]
	of := func(label string) int {
		for _, l := range labels.Labels {
			if l.Label == label {
				return l.N
			}
		}
		return 0
	}
	g := &c.Groups
	if g.Reference.N != of(c.Reference) || g.Focal.N != of(c.Focal) || g.NotStated != labels.NotStated {
		say("the sizes of its groups are not those of the inputs")
	}
	external := c.Matching.Variable == MatchExternal
	if !external && (g.Reference.NoScore+g.Focal.NoScore > 0 || c.Matching.ScoreCorrelation != nil) {
		say("it is not matched on an external score and has numbers of one")
	}
	if c.Matching.Levels != e.Plan.Matching.Levels {
		say("matching: the levels are not those of the plan")
	}
	for i := range c.Items {
		f := &c.Items[i]
		var ids []string
		for _, r := range f.Results {
			ids = append(ids, r.Method)
		}
		if len(ids) > 0 && !slices.Equal(ids, e.Plan.Methods) {
			say("item %s: its methods are not those of the plan", f.Item)
		}
		if !slices.IsSortedFunc(f.Strata, func(a, b StratumSummary) int {
			return cmp.Or(cmp.Compare(a.Set, b.Set), cmp.Compare(a.Score, b.Score))
		}) {
			say("item %s: its strata are not in order", f.Item)
		}
		// Whoever answered an item of the whole matching score stands where the score puts
		// them: with everybody answering, the matched are those the comparison matched.
		whole := f.NReference == g.Reference.N && f.NFocal == g.Focal.N && len(c.Matching.RemovedItems) == 0
		if whole && (external || e.Inputs.Items[i].Role != RolePretest) &&
			(f.NMatchedReference != g.Reference.N-g.Reference.Unmatched || f.NMatchedFocal != g.Focal.N-g.Focal.Unmatched) {
			say("the numbers of unmatched candidates do not follow from item %s", f.Item)
		}
	}
	if !c.warningsFollow(e) {
		say("its warnings do not follow from its numbers")
	}
	return out
}

// warningsFollow reports whether the warnings of the comparison are those that are due, by
// their codes: another version may word them otherwise. Whether somebody was presented less
// than others only the data tell, so that is taken from the stored warnings.
func (c *Comparison) warningsFollow(e *Evidence) bool {
	x := comparisonFacts{
		pooled: hasWarning(c.Warnings, WarnSetsPooled), refused: hasWarning(c.Warnings, WarnPurificationRefused),
	}
	for i := range c.Items {
		if d := c.Items[i].Classification.Detail; d != nil && *d == DetailNoKey {
			x.unscored++
		} else if e.Inputs.Items[i].Role != RolePretest {
			x.matching++
		}
	}
	return sameCodes(c.due(x), c.Warnings)
}

func sameCodes(a, b []Warning) bool {
	return slices.EqualFunc(a, b, func(x, y Warning) bool { return x.Code == y.Code })
}

// stagesDisagree checks the stages of purification: their number, the items left out of
// the matching score, the letters of the first, and the last against the findings.
func (c *Comparison) stagesDisagree(e *Evidence) []string {
	m := &c.Matching
	stages := 1
	if e.Plan.Matching.Purification == PurifyTwoStage && m.Variable != MatchExternal {
		stages = 2
	}
	if want := e.Plan.Matching.Variable; want != m.Variable && !(want == MatchAuto && (m.Variable == MatchTotal || m.Variable == MatchTotalWithinSet)) {
		return []string{"matching: the variable is not the one the plan asks for"}
	}
	if len(m.Stages) != stages {
		return []string{fmt.Sprintf("matching: %d stages are stored, the plan asks for %d", len(m.Stages), stages)}
	}
	for i, s := range m.Stages {
		if s.Stage != i+1 || len(s.Items) != len(c.Items) {
			return []string{"matching: a stage does not hold every item"}
		}
		for j := range s.Items {
			if s.Items[j].Item != c.Items[j].Item {
				return []string{"matching: the items of a stage are not those of the findings"}
			}
		}
	}
	var out []string
	var large, limitless []string
	matching := 0
	for i, s := range m.Stages[0].Items {
		if s.Detail == nil || *s.Detail != DetailNoKey {
			if e.Inputs.Items[i].Role != RolePretest {
				matching++
			}
		}
		var letter *string
		if s.Delta != nil && s.DeltaSE != nil && s.PValue != nil {
			if l, ok := Letter(*s.Delta, *s.DeltaSE, *s.PValue, e.Plan.Criteria.ClassAlpha); ok {
				letter = &l
			}
		}
		if !equal(letter, s.ComputedClass) {
			out = append(out, fmt.Sprintf("matching: the stage-1 letter of %s does not follow from its statistics", s.Item))
		}
		switch {
		case e.Inputs.Items[i].Role == RolePretest:
		case letter != nil && isC(*letter):
			large = append(large, s.Item)
		case s.Detail != nil && *s.Detail == DetailInfiniteOddsRatio:
			limitless = append(limitless, s.Item)
		}
	}
	refused := hasWarning(c.Warnings, WarnPurificationRefused)
	leaving := len(large) + len(limitless) // at most: the exact test of the latter needs the tables
	last := m.Stages[len(m.Stages)-1]
	if !slices.Equal(last.RemovedItems, m.RemovedItems) || len(m.Stages[0].RemovedItems) > 0 {
		out = append(out, "matching: the items left out are not those of the last stage")
	}
	for _, item := range m.RemovedItems {
		if !slices.Contains(large, item) && !slices.Contains(limitless, item) {
			out = append(out, fmt.Sprintf("matching: %s was left out without having been classed C", item))
		}
	}
	switch {
	case refused && (stages == 1 || len(m.RemovedItems) > 0 || mayRemove(matching, leaving)):
		out = append(out, "matching: purification is said to have been refused, and it was not")
	case refused || stages == 1:
	case len(m.RemovedItems) > 0 && !mayRemove(matching, len(m.RemovedItems)):
		out = append(out, "matching: too many items were left out")
	default:
		for _, item := range large {
			if !slices.Contains(m.RemovedItems, item) {
				out = append(out, fmt.Sprintf("matching: %s was classed C and not left out", item))
			}
		}
	}
	for i, s := range last.Items {
		f := &c.Items[i]
		mh := f.MantelHaenszel()
		if mh == nil {
			continue
		}
		chi := mh.ChiSquare
		if e.Plan.Criteria.ContinuityCorrection {
			chi = mh.ChiSquareCorrected
		}
		if s.Item != f.Item || !agree(s.Delta, mh.Delta) || !agree(s.DeltaSE, mh.DeltaSE) || !agree(s.ChiSquare, chi) ||
			!agree(s.PValue, f.Classification.PValue) || !equal(s.ComputedClass, f.Classification.ComputedClass) {
			out = append(out, fmt.Sprintf("matching: the last stage and the finding differ for %s", f.Item))
		}
	}
	return out
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
	if k.Detail != nil && *k.Detail == DetailNoKey && len(f.Results) > 0 {
		say("an item without a key has statistics")
	}
	if len(f.Results) > 0 && item.MaxScore > 1 {
		say("an item with more than one point has statistics of binary items")
	}
	if t, ok := f.table(); len(f.Results) > 0 && ok {
		c := t.cover()
		if c.informative != f.StrataInformative || c.informativeN != f.NInformative {
			say("the informative strata do not follow from the strata")
		}
		for _, r := range f.Results {
			if m := methodByID(r.Method); !sameColumns(r.Result, m.Test(t, plan.Criteria)) {
				say("%s does not follow from the strata", r.Method)
			}
		}
		c.n = [2]int{f.NReference, f.NFocal}
		if !sameCodes(f.warnings(&c, plan.Criteria), f.Warnings) {
			say("the warnings do not follow from the statistics")
		}
		if !nearly(f.DifficultyReference, number(normalDelta(value(f.PReference))), 1e-9) || !nearly(f.DifficultyFocal, number(normalDelta(value(f.PFocal))), 1e-9) {
			say("the difficulties do not follow from the proportions correct")
		}
	} else if len(f.Results) > 0 {
		say("a stratum's mean is not a number of right answers over its candidates")
	}
	for g, p := range [2]*float64{f.PReference, f.PFocal} {
		n := [2]int{f.NReference, f.NFocal}[g]
		points := value(p) * float64(n*max(1, item.MaxScore))
		if (p == nil) != (n == 0) || n > 0 && !(math.Abs(points-math.Round(points)) < 1e-6*math.Max(1, points)) {
			say("a mean score is not a number of points over its candidates")
		}
	}
	if mh := f.MantelHaenszel(); mh != nil {
		if k.Basis == nil || *k.Basis != idMantelHaenszel {
			say("the basis of the letter is not the method that gave it")
		}
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

func agree(a, b *float64) bool { return nearly(a, b, agreement) }

// nearly reports whether both numbers are absent, or differ by no more than a relative
// tolerance.
func nearly(a, b *float64, relative float64) bool {
	if a == nil || b == nil {
		return a == nil && b == nil
	}
	return *a == *b || math.Abs(*a-*b) <= relative*math.Max(math.Abs(*a), math.Abs(*b))
}

// value returns the number, NaN where it does not exist.
func value(p *float64) float64 {
	if p == nil {
		return math.NaN()
	}
	return *p
}

func equal(a, b *string) bool {
	if a == nil || b == nil {
		return a == nil && b == nil
	}
	return *a == *b
}
