package reports

import (
	"slices"

	"difaudit/dif"
)

// exposedFinding is a finding as it may be exported. The embedded value holds no
// numbers where they are withheld.
type exposedFinding struct {
	dif.Finding
	number                           int // place of the item in the audit, from 1
	role                             string
	maxScore                         int
	withheld                         bool // a group has fewer than ten candidates, or fewer than ten matched ones
	nReference, nFocal               count
	nMatchedReference, nMatchedFocal count
}

// exposeFinding returns the finding without its numbers where a group has fewer than
// ten candidates, or where one to nine of a group are matched: statistics rest on the
// matched ones. The reason for no verdict stays when there is one.
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
	x.withheld = all || f.NReference < smallest || f.NFocal < smallest ||
		x.nMatchedReference.hiding == few || x.nMatchedFocal.hiding == few
	if x.withheld {
		x.Finding = dif.Finding{
			FindingCounts:  dif.FindingCounts{Item: f.Item, Version: f.Version},
			Classification: dif.Classification{Reason: f.Classification.Reason},
		}
		if f.Classification.Reason == nil {
			reason := dif.ReasonWithheldForPrivacy
			x.Classification.Reason = &reason
		}
		x.nMatchedReference, x.nMatchedFocal = concealed(f.NMatchedReference), concealed(f.NMatchedFocal)
	}
	x.NReference, x.NFocal, x.NMatchedReference, x.NMatchedFocal = 0, 0, 0, 0
	return x
}

// hideGroups hides the counts of a group on the item and its proportion correct, whose
// digits give the count away. A count that is already hidden stays as it is.
func (f *exposedFinding) hideGroups(reference, focal bool) {
	hide := func(n, matched *count, p **float64) {
		for _, c := range []*count{n, matched} {
			if c.hiding == visible {
				*c = count{hiding: complement}
			}
		}
		*p = nil
	}
	if reference {
		hide(&f.nReference, &f.nMatchedReference, &f.PReference)
	}
	if focal {
		hide(&f.nFocal, &f.nMatchedFocal, &f.PFocal)
	}
}
