package reports

import (
	"slices"

	"difaudit/dif"
)

// exposed is evidence as it may be exported: counts of fewer than ten candidates of a
// group are hidden, and so is every statistic that rests on them. Every output of the
// package is made from it and never from the evidence itself.
type exposed struct {
	engine      dif.Engine
	inputs      dif.Inputs // Exclusions split by a grouping are left out; see splits
	plan        dif.Plan
	splits      []split
	comparisons []exposedComparison
}

// split shows how the exclusions of one grouping fall on its labels.
type split struct {
	grouping string
	labels   []string // "" is not stated
	reasons  []string
	counts   [][]count // by reason, then label
}

// exposedComparison is a comparison as it may be exported. The embedded value holds
// no findings, stages or group sizes.
type exposedComparison struct {
	dif.Comparison
	withheld           bool // a group has fewer than ten candidates: no statistic is shown
	nReference, nFocal count
	notStated          count
	unmatchedRef       count
	unmatchedFocal     count
	sets               []exposedSet
	removedUnnamed     int // items out of the matching score that are themselves withheld
	findings           []exposedFinding
}

// exposedSet is a presented set with the sizes of its groups.
type exposedSet struct {
	dif.PresentedSet
	reference, focal count
}

// exposedFinding is a finding as it may be exported. The embedded value holds no
// numbers where they are withheld.
type exposedFinding struct {
	dif.Finding
	number                           int // place of the item in the audit, from 1
	role                             string
	maxScore                         int
	withheld                         bool // a group has fewer than ten candidates on the item
	nReference, nFocal               count
	nMatchedReference, nMatchedFocal count
}

// expose applies the rules of exposure to evidence, which is not changed.
func expose(e *dif.Evidence) *exposed {
	x := &exposed{engine: e.Engine, inputs: e.Inputs, plan: e.Plan}
	x.inputs.Exclusions = nil
	for _, ex := range e.Inputs.Exclusions {
		if ex.Grouping == nil {
			x.inputs.Exclusions = append(x.inputs.Exclusions, ex)
		}
	}
	x.splits = splitExclusions(e.Inputs.Exclusions)
	sizes := exposeGroups(e.Comparisons)
	for i := range e.Comparisons {
		x.comparisons = append(x.comparisons, exposeComparison(e, &e.Comparisons[i], sizes))
	}
	return x
}

// splitExclusions gathers the exclusions split by label, each split guarded.
func splitExclusions(all []dif.Exclusion) []split {
	var out []split
	for _, ex := range all {
		if ex.Grouping == nil {
			continue
		}
		i := slices.IndexFunc(out, func(s split) bool { return s.grouping == *ex.Grouping })
		if i < 0 {
			i = len(out)
			out = append(out, split{grouping: *ex.Grouping})
		}
		s := &out[i]
		if label := labelOf(ex); !slices.Contains(s.labels, label) {
			s.labels = append(s.labels, label)
		}
		if !slices.Contains(s.reasons, ex.Reason) {
			s.reasons = append(s.reasons, ex.Reason)
		}
	}
	for i := range out {
		s := &out[i]
		slices.Sort(s.labels)
		if s.labels[0] == "" { // not stated stands last
			s.labels = append(s.labels[1:], "")
		}
		for _, reason := range s.reasons {
			cells := make([]int, len(s.labels))
			for _, ex := range all {
				if ex.Grouping != nil && *ex.Grouping == s.grouping && ex.Reason == reason {
					cells[slices.Index(s.labels, labelOf(ex))] += ex.Count
				}
			}
			s.counts = append(s.counts, guardedSplit(cells, slices.Index(s.labels, "")))
		}
	}
	return out
}

func labelOf(ex dif.Exclusion) string {
	if ex.Label == nil {
		return ""
	}
	return *ex.Label
}

// groupSizes holds what may be shown of the sizes of the groups of a grouping.
type groupSizes struct {
	labels    map[string]count
	notStated count
}

// exposeGroups guards the groups of each grouping together with its candidates without
// a label: they add up to the candidates analysed, which is shown.
func exposeGroups(comparisons []dif.Comparison) map[string]groupSizes {
	out := map[string]groupSizes{}
	for _, c := range comparisons {
		if _, done := out[c.Grouping]; done {
			continue
		}
		var labels []string
		cells := []int{c.Groups.NotStated}
		for _, other := range comparisons {
			if other.Grouping != c.Grouping {
				continue
			}
			for _, g := range []struct {
				label string
				n     int
			}{{other.Reference, other.Groups.Reference.N}, {other.Focal, other.Groups.Focal.N}} {
				if !slices.Contains(labels, g.label) {
					labels = append(labels, g.label)
					cells = append(cells, g.n)
				}
			}
		}
		guardedCells := guardedSplit(cells, 0)
		sizes := groupSizes{map[string]count{}, guardedCells[0]}
		for i, label := range labels {
			sizes.labels[label] = guardedCells[i+1]
		}
		out[c.Grouping] = sizes
	}
	return out
}

func exposeComparison(e *dif.Evidence, c *dif.Comparison, sizes map[string]groupSizes) exposedComparison {
	size := sizes[c.Grouping]
	x := exposedComparison{
		Comparison: *c,
		withheld:   c.Groups.Reference.N < smallest || c.Groups.Focal.N < smallest,
		nReference: size.labels[c.Reference], nFocal: size.labels[c.Focal], notStated: size.notStated,
		unmatchedRef: guarded(c.Groups.Reference.Unmatched), unmatchedFocal: guarded(c.Groups.Focal.Unmatched),
	}
	x.Items, x.Matching.Stages, x.Matching.Sets = nil, nil, nil
	x.Groups.Reference.N, x.Groups.Focal.N, x.Groups.NotStated = 0, 0, 0
	x.Groups.Reference.Unmatched, x.Groups.Focal.Unmatched = 0, 0
	if x.withheld {
		x.Groups, x.Matching.Reliability = dif.Groups{}, nil
		x.unmatchedRef, x.unmatchedFocal = count{hiding: complement}, count{hiding: complement}
		x.Warnings = withoutMessages(c.Warnings)
	} else if x.nReference.hiding == visible && x.nFocal.hiding == visible {
		x.sets = exposeSets(c.Matching.Sets)
	}
	x.Summary.Classes = slices.Clone(c.Summary.Classes)
	x.Summary.NoVerdict = slices.Clone(c.Summary.NoVerdict)
	withheldItems := map[string]bool{}
	for i := range c.Items {
		f := exposeFinding(e, i, &c.Items[i], x.withheld)
		if f.withheld {
			withheldItems[f.Item] = true
		}
		f.guardByGroup(x.nReference, x.nFocal)
		x.adjustSummary(&c.Items[i], &f)
		x.findings = append(x.findings, f)
	}
	x.Matching.RemovedItems = nil
	for _, item := range c.Matching.RemovedItems {
		if withheldItems[item] {
			x.removedUnnamed++
		} else {
			x.Matching.RemovedItems = append(x.Matching.RemovedItems, item)
		}
	}
	return x
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

// exposeFinding returns the finding without its numbers where a group has fewer than
// ten candidates. The reason for no verdict stays when there is one.
func exposeFinding(e *dif.Evidence, i int, f *dif.Finding, all bool) exposedFinding {
	x := exposedFinding{
		Finding: *f, number: i + 1, role: dif.RoleOperational, maxScore: 1,
		nReference: guarded(f.NReference), nFocal: guarded(f.NFocal),
		nMatchedReference: guarded(f.NMatchedReference), nMatchedFocal: guarded(f.NMatchedFocal),
	}
	at := slices.IndexFunc(e.Inputs.Items, func(s dif.ItemSummary) bool { return s.Item == f.Item && s.Version == f.Version })
	if at >= 0 {
		x.number, x.role, x.maxScore = at+1, e.Inputs.Items[at].Role, e.Inputs.Items[at].MaxScore
	}
	x.withheld = all || f.NReference < smallest || f.NFocal < smallest
	if x.withheld {
		x.Finding = dif.Finding{
			FindingCounts:  dif.FindingCounts{Item: f.Item, Version: f.Version},
			Classification: dif.Classification{Reason: f.Classification.Reason, Detail: f.Classification.Detail},
		}
		if f.Classification.Reason == nil {
			reason := dif.ReasonWithheldForPrivacy
			x.Classification.Reason = &reason
		}
	}
	x.NReference, x.NFocal, x.NMatchedReference, x.NMatchedFocal = 0, 0, 0, 0
	return x
}

// guardByGroup hides counts of a group whose size is itself hidden to protect another,
// and its proportions correct, whose digits give the count away.
func (f *exposedFinding) guardByGroup(reference, focal count) {
	if reference.hiding == complement {
		f.nReference, f.nMatchedReference = reference, reference
		f.PReference = nil
	}
	if focal.hiding == complement {
		f.nFocal, f.nMatchedFocal = focal, focal
		f.PFocal = nil
	}
}

// adjustSummary moves a finding whose letter is kept back from its class to the reason.
func (x *exposedComparison) adjustSummary(was *dif.Finding, is *exposedFinding) {
	before := was.Classification
	if !is.withheld || before.Class == nil || before.Reason != nil {
		return
	}
	add(&x.Summary.Classes, *before.Class, -1)
	add(&x.Summary.NoVerdict, dif.ReasonWithheldForPrivacy, 1)
	if slices.ContainsFunc(was.Warnings, func(w dif.Warning) bool { return w.Code == dif.WarnLargeNotExcluded }) {
		x.Summary.LargeDifferenceNotExcluded--
	}
}

func add(counts *dif.Counts, name string, n int) {
	for i := range *counts {
		if (*counts)[i].Name == name {
			(*counts)[i].N += n
			return
		}
	}
	*counts = append(*counts, dif.Count{Name: name, N: n})
}

// withoutMessages keeps the codes of warnings whose wording may hold numbers.
func withoutMessages(warnings []dif.Warning) []dif.Warning {
	var out []dif.Warning
	for _, w := range warnings {
		out = append(out, dif.Warning{Code: w.Code})
	}
	return out
}
