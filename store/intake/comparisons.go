package intake

import (
	"slices"
	"strings"

	"difaudit/dif"
)

// side is where a candidate stands in a comparison.
type side byte

const (
	sideNone side = iota
	sideReference
	sideFocal
)

// comparisonSides tells on which side of a comparison a candidate is. A crossing has
// one part per plain grouping.
type comparisonSides struct {
	parts            []int // index of the grouping of each part
	reference, focal []uint16
	each             bool // every stated label but the reference is focal
}

// noLabel is a code no candidate has.
const noLabel = codeUndeclared

func (r *reading) comparisonSides() []comparisonSides {
	out := make([]comparisonSides, len(r.plan.Comparisons))
	for c, p := range r.plan.Comparisons {
		s := comparisonSides{each: p.Focal == dif.FocalEach}
		names := dif.GroupingParts(p.Grouping)
		for _, name := range names {
			s.parts = append(s.parts, slices.IndexFunc(r.groupings, func(g *grouping) bool { return g.name == name }))
		}
		s.reference = r.codesOf(s.parts, p.Reference)
		if !s.each {
			s.focal = r.codesOf(s.parts, p.Focal)
		}
		out[c] = s
	}
	return out
}

// codesOf returns the code of each part of a label.
func (r *reading) codesOf(parts []int, label string) []uint16 {
	labels := []string{label}
	if len(parts) > 1 {
		labels = strings.Split(label, "+")
	}
	codes := make([]uint16, len(parts))
	for i, g := range parts {
		codes[i] = noLabel
		if i < len(labels) && len(labels) == len(parts) {
			if c, known := r.groupings[g].byLabel[labels[i]]; known {
				codes[i] = c
			}
		}
	}
	return codes
}

// of returns the side of record i, given the labels per grouping and record.
func (s *comparisonSides) of(labels [][]uint16, i int32) side {
	reference, focal := true, true
	for k, g := range s.parts {
		if labels[g] == nil {
			return sideNone
		}
		code := labels[g][i]
		if code == 0 || code >= codeUndeclared {
			return sideNone
		}
		reference = reference && code == s.reference[k]
		focal = focal && (s.each || code == s.focal[k])
	}
	switch {
	case reference:
		return sideReference
	case focal:
		return sideFocal
	}
	return sideNone
}

// checkLabels reports labels of comparisons that no candidate kept has.
func (r *reading) checkLabels(kept []int32) {
	if r.responses.gaps() || r.candidates != nil && r.candidates.table.gaps() {
		return // the label may stand in a row that was not read
	}
	sides := r.comparisonSides()
	for c, p := range r.plan.Comparisons {
		s := &sides[c]
		if slices.ContainsFunc(s.parts, func(g int) bool { return !r.groupings[g].found || r.groupings[g].faulty }) {
			continue // reported already
		}
		var n [3]int
		for _, i := range kept {
			n[s.of(r.records.labels, i)]++
		}
		file := r.request.Responses.Name
		if r.candidates != nil && slices.ContainsFunc(s.parts, func(g int) bool { return r.candidates.labels[g] != nil }) {
			file = r.request.Candidates.Name
		}
		advice := "correct the comparison, or the labels in the file"
		if n[sideReference] == 0 {
			r.problems.add(labelNotInData, file, 0, p.Grouping, "no candidate has the reference label %s of comparison %d; %s", quoted(p.Reference), c+1, advice)
		}
		switch {
		case n[sideFocal] > 0:
		case s.each:
			r.problems.add(labelNotInData, file, 0, p.Grouping, "no candidate has a label other than the reference %s of comparison %d, so there is no focal group; %s", quoted(p.Reference), c+1, advice)
		default:
			r.problems.add(labelNotInData, file, 0, p.Grouping, "no candidate has the focal label %s of comparison %d; %s", quoted(p.Focal), c+1, advice)
		}
	}
}
