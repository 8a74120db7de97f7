package dif

import (
	"context"
	"fmt"
	"slices"
)

// prepare decides the matching variable and packs the data for it.
func (r *runner) prepare(ctx context.Context) error {
	r.variable = r.plan.Matching.Variable
	by := bySet
	switch r.variable {
	case MatchExternal:
		if r.data.External == nil {
			return fmt.Errorf("%w: matching.variable is external, and the responses have no external_score column; add it or match on the total", ErrInput)
		}
		by = oneSet
	case MatchTotal:
		by = oneSet
	case MatchTotalWithinForm:
		if r.data.FormOf == nil && len(r.data.Forms) != 1 {
			return fmt.Errorf("%w: matching.variable is total_within_form, and the responses have no form column; add it or match on the total", ErrInput)
		}
		by = byForm
	}
	var err error
	if r.packed, err = pack(ctx, r.data, by, r.workers); err != nil {
		return fmt.Errorf("score answers: %w", err)
	}
	if r.variable == MatchAuto {
		r.variable = MatchTotal
		if len(r.packed.sets) > 1 {
			r.variable = MatchTotalWithinSet
		}
	}
	for i, item := range r.data.Items {
		if _, planes := r.packed.itemPlanes(i); planes > 0 && item.Role != RolePretest {
			r.matching = append(r.matching, i)
		}
	}
	return nil
}

// fewestMatching is the least number of items a purified matching score keeps, beside
// half of them (common practice).
const fewestMatching = 8

// mayRemove reports whether the matching score keeps enough items without the removed ones.
func mayRemove(matching, removed int) bool {
	kept := matching - removed
	return kept >= fewestMatching && 2*kept >= matching
}

// without returns the items of the score that are not removed.
func without(matching, removed []int) []int {
	return slices.DeleteFunc(slices.Clone(matching), func(i int) bool { return slices.Contains(removed, i) })
}
