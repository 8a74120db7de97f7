package intake

import (
	"cmp"
	"context"
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

// checkKeys compares the keys of every item over its forms. Its error is the end of
// the context.
func (s *formSet) checkKeys(ctx context.Context, c *catalogue, problems *Problems) error {
	uses := map[*item][]keyUse{}
	for _, f := range s.forms {
		if err := ctx.Err(); err != nil {
			return err
		}
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
		if err := ctx.Err(); err != nil {
			return err
		}
		all := uses[it]
		slices.SortFunc(all, func(a, b keyUse) int { return cmp.Compare(a.row, b.row) })
		if it.Key != nil {
			all = slices.Insert(all, 0, keyUse{it.file, it.row, nil, it.Key})
		}
		it.compareKeys(all, problems)
	}
	return nil
}

// labelList returns labels as one text, equal for equal lists.
func labelList(labels []string) string { return strings.Join(labels, "|") }

// labelSet returns labels as one text, equal for equal sets.
func labelSet(labels []string) string {
	if len(labels) > 1 {
		labels = slices.Clone(labels)
		slices.Sort(labels)
	}
	return labelList(labels)
}

// keysOfOrder holds, of the uses with one option order, the first and the first whose
// key differs from it.
type keysOfOrder struct {
	first, other *keyUse
	key          string // of first
}

// compareKeys reports keys that differ under the same option order, and keys that
// name different options under different orders.
func (it *item) compareKeys(uses []keyUse, problems *Problems) {
	contradictory := false
	orders := map[string]*keysOfOrder{}
	for i := range uses {
		u := &uses[i]
		order, key := labelList(u.order), labelSet(u.key)
		seen := orders[order]
		if seen == nil {
			orders[order] = &keysOfOrder{first: u, key: key}
			continue
		}
		against := seen.other
		if key != seen.key {
			against = seen.first
			if seen.other == nil {
				seen.other = u
			}
		}
		if against != nil {
			problems.add(keyContradictory, u.file, u.row, shown(it.ID),
				"the key %s of item %s contradicts the key %s in %s, row %d, with the options in the same order; correct one of them, or declare the order of options in option_order",
				quoted(labelList(u.key)), shown(it.ID), quoted(labelList(against.key)), against.file, against.row)
			contradictory = true
		}
	}
	if contradictory || len(uses) == 0 {
		return
	}
	place := make(map[string]int, len(it.Options)) // of each declared option
	for p, label := range it.Options {
		place[label] = p
	}
	first, known := uses[0].keyedOptions(place)
	for i := range uses[1:] {
		u := &uses[1+i]
		if named, also := u.keyedOptions(place); known && also && labelSet(named) != labelSet(first) {
			problems.add(keyOptionMismatch, u.file, u.row, shown(it.ID),
				"with the options in the order of this form, its key names another option of item %s than the key in %s, row %d; check the key and the order",
				shown(it.ID), uses[0].file, uses[0].row)
			return
		}
	}
}

// keyedOptions returns the options a key names, as declared: the label at place p of
// the declared options answers the p-th option of the form's order.
func (u *keyUse) keyedOptions(place map[string]int) ([]string, bool) {
	if u.order == nil {
		return u.key, true
	}
	out := make([]string, 0, len(u.key))
	for _, k := range u.key {
		p, declared := place[k]
		if !declared || p >= len(u.order) {
			return nil, false
		}
		out = append(out, u.order[p])
	}
	return out, true
}
