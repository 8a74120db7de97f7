package intake

// finishItems settles what every item is, now that its answers are known, and returns
// the recodings its answers need; nil where the codes stay.
func (r *reading) finishItems() []*recoding {
	keyed := r.keyedChoices()
	r.countAnswers()
	lacking := r.formsWithoutKey()
	recodings := make([]*recoding, len(r.items.items))
	for i, it := range r.items.items {
		recodings[i] = it.finish(r, keyed, lacking[it])
	}
	return recodings
}

// finish settles one item. keyed are the choices of the keyed items; lacking are its
// entries on forms that have no key for it.
func (it *item) finish(r *reading, keyed *keyedChoices, lacking []lackingKey) *recoding {
	e := it.enc
	if it.broken {
		return nil
	}
	switch e.mode {
	case presumed, scored:
		if !it.scoreGiven {
			it.MaxScore = max(1, e.max)
		}
		return nil
	case choices:
		it.MaxScore = 1
		it.reportKey(r, lacking)
		return nil
	case open:
		var recode *recoding
		it.MaxScore = 1
		it.Options, recode = e.toSorted()
		it.reportKey(r, lacking)
		return recode
	}
	return it.decide(r, keyed)
}

// lackingKey is the entry of an item on a form that has no key for it.
type lackingKey struct {
	form string
	row  int
}

// formsWithoutKey returns, for the items with keys on some forms only, the entries without.
func (r *reading) formsWithoutKey() map[*item][]lackingKey {
	lacking := map[*item][]lackingKey{}
	for _, f := range r.forms.forms {
		for _, e := range f.entries {
			if e.key == nil && len(e.item.Key) == 0 && len(e.item.formKeys) > 0 {
				lacking[e.item] = append(lacking[e.item], lackingKey{f.id, e.row})
			}
		}
	}
	return lacking
}

// reportKey reports an item answered with choices that lacks a key, wholly or on some form.
func (it *item) reportKey(r *reading, lacking []lackingKey) {
	if len(it.Key) > 0 {
		return
	}
	if len(it.formKeys) == 0 {
		it.KeyMissing = true
		r.problems.add(keyMissing, it.file, it.row, shown(it.ID), "the item has options and no key; it gets no score and no result until its key is given")
		return
	}
	for _, l := range lacking {
		r.problems.add(keyMissing, r.forms.name, l.row, shown(it.ID), "other forms have a key for this item and form %s has none; it gets no score on this form until its key is given", shown(l.form))
	}
}
