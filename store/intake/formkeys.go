package intake

import (
	"cmp"
	"slices"
	"strings"
)

// keyUse is one key of an item and the option order it refers to.
type keyUse struct {
	file  string
	row   int
	order []string // nil: as declared
	key   []string
}

// checkKeys compares the keys of every item over its forms.
func (s *formSet) checkKeys(c *catalogue, problems *Problems) {
	uses := map[*item][]keyUse{}
	for _, f := range s.forms {
		for _, e := range f.entries {
			u := keyUse{s.name, e.row, e.order, e.key}
			if u.key == nil {
				u.key = e.item.Key
			}
			if slices.Equal(u.order, e.item.Options) {
				u.order = nil
			}
			if u.key != nil {
				uses[e.item] = append(uses[e.item], u)
			}
		}
	}
	for _, it := range c.items {
		all := uses[it]
		slices.SortFunc(all, func(a, b keyUse) int { return cmp.Compare(a.row, b.row) })
		if it.Key != nil {
			all = slices.Insert(all, 0, keyUse{it.file, it.row, nil, it.Key})
		}
		it.compareKeys(all, problems)
	}
}

// compareKeys reports keys that differ under the same option order, and keys that
// name different options under different orders.
func (it *item) compareKeys(uses []keyUse, problems *Problems) {
	contradictory := false
	for i, u := range uses {
		for _, v := range uses[:i] {
			if slices.Equal(u.order, v.order) && !sameLabels(u.key, v.key) {
				problems.add(keyContradictory, u.file, u.row, shown(it.ID),
					"the key %s of item %s contradicts the key %s in %s, row %d, with the options in the same order; correct one of them, or declare the order of options in option_order",
					quoted(strings.Join(u.key, "|")), shown(it.ID), quoted(strings.Join(v.key, "|")), v.file, v.row)
				contradictory = true
				break
			}
		}
	}
	if contradictory || len(uses) == 0 {
		return
	}
	for _, u := range uses[1:] {
		a, known := it.keyedOptions(uses[0])
		b, also := it.keyedOptions(u)
		if known && also && !sameLabels(a, b) {
			problems.add(keyOptionMismatch, u.file, u.row, shown(it.ID),
				"with the options in the order of this form, its key names another option of item %s than the key in %s, row %d; check the key and the order",
				shown(it.ID), uses[0].file, uses[0].row)
			return
		}
	}
}

// keyedOptions returns the options a key names, as declared: the label at place p of
// the declared options answers the p-th option of the form's order.
func (it *item) keyedOptions(u keyUse) ([]string, bool) {
	if u.order == nil {
		return u.key, true
	}
	var out []string
	for _, k := range u.key {
		p := slices.Index(it.Options, k)
		if p < 0 || p >= len(u.order) {
			return nil, false
		}
		out = append(out, u.order[p])
	}
	return out, true
}
