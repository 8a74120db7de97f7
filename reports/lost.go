package reports

import (
	"fmt"
	"slices"

	"difaudit/dif"
)

// lostSentences says, for every comparison where it is large enough to be said before any
// result, which share of the candidates left the analysis. The share of a comparison that
// is withheld is not told, nor is a share that would give a hidden count away.
func (x *exposed) lostSentences(e *dif.Evidence) []string {
	var out []string
	for _, l := range e.LostCandidates() {
		i := slices.IndexFunc(x.comparisons, func(c exposedComparison) bool {
			return l.Comparison == fmt.Sprintf("%s %s/%s", c.Grouping, c.Reference, c.Focal)
		})
		switch {
		case i < 0 || x.comparisons[i].withheld:
		case x.comparisons[i].sharesHidden:
			out = append(out, fmt.Sprintf("Candidates lost: more than 2 %% of the candidates compared by %s, or of one of the groups (share withheld, to protect candidates): %s.",
				l.Comparison, l.Why))
		default:
			out = append(out, fmt.Sprintf("Candidates lost: %.1f %% of the candidates compared by %s: %s (reference %.1f %%, focal %.1f %%).",
				100*l.Share, l.Comparison, l.Why, 100*l.Reference, 100*l.Focal))
		}
	}
	return out
}

// hidesLost reports whether the share of candidates lost in a comparison would tell a
// count that is hidden elsewhere: how many of a group are matched, where these are few;
// the size of a group; how many of a label have no external score.
func (x *exposed) hidesLost(e *dif.Evidence, c *dif.Comparison, reference, focal count) bool {
	if reference.hiding != visible || focal.hiding != visible {
		return true
	}
	for _, g := range []dif.Group{c.Groups.Reference, c.Groups.Focal} {
		if guarded(g.N-g.Unmatched).hiding == few {
			return true
		}
	}
	for i := range e.Comparisons {
		g := e.Comparisons[i].Groups
		if e.Comparisons[i].Grouping == c.Grouping && (guarded(g.Reference.NoScore).hiding == few || guarded(g.Focal.NoScore).hiding == few) {
			return true
		}
	}
	for _, s := range x.splits {
		k := slices.Index(s.reasons, dif.ExcludedNoExternalScore)
		if k < 0 || s.grouping != c.Grouping {
			continue
		}
		for j, label := range s.labels {
			if (label == c.Reference || label == c.Focal) && s.counts[k][j].hiding != visible {
				return true
			}
		}
	}
	return false
}
