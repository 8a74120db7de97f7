package reports

import (
	"slices"

	"difaudit/dif"
)

// exposed is evidence as it may be exported: counts of fewer than ten candidates of a
// group are hidden, and so is every statistic that rests on them and every number they
// could be computed from. Every output of the package is made from it and never from
// the evidence itself.
type exposed struct {
	engine      dif.Engine
	inputs      dif.Inputs // without the counts by label; see splits and groupings
	plan        dif.Plan
	splits      []split
	groupings   []exposedGrouping
	comparisons []exposedComparison
	lost        []string // sentences on candidates lost, to be read before any result
}

// exposedComparison is a comparison as it may be exported. The embedded value holds
// no findings, stages or group sizes.
type exposedComparison struct {
	dif.Comparison
	withheld           bool // a group has fewer than ten candidates: no statistic is shown
	sharesHidden       bool // what part of the candidates was lost would tell a hidden count
	nReference, nFocal count
	notStated          count
	// Candidates without a counterpart. They are told where the comparison is shown and
	// ten candidates or more of each group, or none, have one.
	unmatchedRef, unmatchedFocal count
	sets                         []exposedSet
	removedUnnamed               int // items out of the matching score that are themselves withheld
	findings                     []exposedFinding
}

// exposedSet is a presented set with the sizes of its groups.
type exposedSet struct {
	dif.PresentedSet
	reference, focal count
}

// expose applies the rules of exposure to evidence, which is not changed.
func expose(e *dif.Evidence) *exposed {
	x := &exposed{engine: e.Engine, inputs: e.Inputs, plan: e.Plan}
	x.inputs.Exclusions, x.inputs.Groupings = nil, nil
	for _, ex := range e.Inputs.Exclusions {
		if ex.Grouping == nil {
			x.inputs.Exclusions = append(x.inputs.Exclusions, ex)
		}
	}
	x.splits = splitExclusions(e.Inputs)
	x.groupings = exposeGroups(e)
	for i := range e.Comparisons {
		x.comparisons = append(x.comparisons, x.comparison(e, &e.Comparisons[i]))
	}
	x.lost = x.lostSentences(e)
	return x
}

func (x *exposed) grouping(name string) *exposedGrouping {
	return &x.groupings[slices.IndexFunc(x.groupings, func(g exposedGrouping) bool { return g.name == name })]
}

// comparison exposes one comparison of the evidence.
func (x *exposed) comparison(e *dif.Evidence, c *dif.Comparison) exposedComparison {
	g := x.grouping(c.Grouping)
	out := exposedComparison{
		Comparison: *c,
		withheld:   c.Groups.Reference.N < smallest || c.Groups.Focal.N < smallest,
		nReference: g.of(c.Reference), nFocal: g.of(c.Focal), notStated: g.notStated,
	}
	out.Items, out.Matching.Stages, out.Matching.Sets = nil, nil, nil
	out.sharesHidden = out.withheld || x.hidesLost(e, c, out.nReference, out.nFocal)
	out.exposeSizes(c)
	withheldItems := map[string]bool{}
	var shown []dif.Finding // as they may be exported, to be counted
	for i := range c.Items {
		f := exposeFinding(e, i, &c.Items[i], out.withheld)
		withheldItems[f.Item] = withheldItems[f.Item] || f.withheld
		f.hideGroups(out.nReference.hiding == complement, out.nFocal.hiding == complement)
		out.findings = append(out.findings, f)
		shown = append(shown, f.Finding)
	}
	out.Summary = dif.Summarize(shown, e.Plan.Criteria)
	out.coverItemCounts(c)
	out.Matching.RemovedItems = nil
	for _, item := range c.Matching.RemovedItems {
		if withheldItems[item] {
			out.removedUnnamed++
		} else {
			out.Matching.RemovedItems = append(out.Matching.RemovedItems, item)
		}
	}
	return out
}

// exposeSizes decides what is shown of the two groups as wholes: their means, how many
// have no counterpart, and the presented sets.
func (x *exposedComparison) exposeSizes(c *dif.Comparison) {
	x.unmatchedRef, x.unmatchedFocal = count{n: c.Groups.Reference.Unmatched}, count{n: c.Groups.Focal.Unmatched}
	x.Groups.NotStated = 0
	for _, g := range []*dif.Group{&x.Groups.Reference, &x.Groups.Focal} {
		g.N, g.Unmatched, g.NoScore = 0, 0, 0
	}
	if x.sharesHidden {
		x.unmatchedRef, x.unmatchedFocal = count{hiding: complement}, count{hiding: complement}
	}
	if x.notStated.hiding != visible || x.nReference.hiding == complement || x.nFocal.hiding == complement {
		// That more gave no label than a group holds bounds two hidden counts.
		x.Warnings = slices.DeleteFunc(slices.Clone(x.Warnings), func(w dif.Warning) bool { return w.Code == dif.WarnNotStated })
	}
	switch {
	case x.withheld:
		x.Groups, x.Matching.Reliability, x.Matching.ScoreCorrelation = dif.Groups{}, nil, nil
		x.Warnings = withoutMessages(x.Warnings, func(string) bool { return true })
		return
	case x.sharesHidden:
		x.Warnings = withoutMessages(x.Warnings, func(code string) bool {
			return code == dif.WarnCandidatesLost || code == dif.WarnFocalLost
		})
	}
	if x.nReference.hiding == complement {
		x.Groups.Reference.Mean, x.Groups.Reference.SD, x.Groups.Difference = nil, nil, nil
	}
	if x.nFocal.hiding == complement {
		x.Groups.Focal.Mean, x.Groups.Focal.SD, x.Groups.Difference = nil, nil, nil
	}
	if x.nReference.hiding == visible && x.nFocal.hiding == visible {
		x.sets = exposeSets(c.Matching.Sets)
	}
}

func exposeSets(sets []dif.PresentedSet) []exposedSet {
	var reference, focal []int
	for _, s := range sets {
		reference, focal = append(reference, s.NReference), append(focal, s.NFocal)
	}
	r, f := guardedSplit(reference, -1), guardedSplit(focal, -1)
	var out []exposedSet
	for i, s := range sets {
		s.NReference, s.NFocal = 0, 0
		out = append(out, exposedSet{s, r[i], f[i]})
	}
	return out
}

// coverItemCounts hides counts of items from which the hidden count of another item or of
// a form could be found. The counts of items are sums over presented sets. Where fewer
// than ten of a group took an item, the items with the next smallest count are hidden with
// it; where a named form has so few, every item that not all of the group took.
func (x *exposedComparison) coverItemCounts(c *dif.Comparison) {
	for _, group := range []struct {
		size   int
		of     func(f *exposedFinding) count
		ofSet  func(s exposedSet) count
		hidden [2]bool
	}{
		{c.Groups.Reference.N, func(f *exposedFinding) count { return f.nReference }, func(s exposedSet) count { return s.reference }, [2]bool{true, false}},
		{c.Groups.Focal.N, func(f *exposedFinding) count { return f.nFocal }, func(s exposedSet) count { return s.focal }, [2]bool{false, true}},
	} {
		limit := 0
		for i := range x.findings {
			if group.of(&x.findings[i]).hiding == few {
				limit = group.size
			}
		}
		for i := range x.findings {
			if n := group.of(&x.findings[i]); n.hiding == visible && n.n > 0 {
				limit = min(limit, n.n+1)
			}
		}
		for _, s := range x.sets {
			if s.Form != nil && group.ofSet(s).hiding == few {
				limit = group.size
			}
		}
		for i := range x.findings {
			if n := group.of(&x.findings[i]); n.hiding == visible && n.n > 0 && n.n < limit {
				x.findings[i].hideGroups(group.hidden[0], group.hidden[1])
			}
		}
	}
}

// withoutMessages drops the messages, which may hold numbers, of the warnings with the
// codes named; of several with one code, one stays.
func withoutMessages(warnings []dif.Warning, named func(code string) bool) []dif.Warning {
	var out []dif.Warning
	for _, w := range warnings {
		if named(w.Code) {
			w.Message = ""
			if slices.Contains(out, w) {
				continue
			}
		}
		out = append(out, w)
	}
	return out
}
