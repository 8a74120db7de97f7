package intake

import "difaudit/dif"

// finishItems settles what every item is, now that its answers are known, and returns
// the recodings its answers need; nil where the codes stay.
func (r *reading) finishItems() []*recoding {
	keys := false
	for _, it := range r.items.items {
		keys = keys || len(it.Key) > 0 || len(it.formKeys) > 0
	}
	recodings := make([]*recoding, len(r.items.items))
	for i, it := range r.items.items {
		recodings[i] = it.finish(r, keys)
	}
	return recodings
}

func (it *item) finish(r *reading, keys bool) *recoding {
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
		it.reportKey(r)
		return nil
	case open:
		var recode *recoding
		it.MaxScore = 1
		it.Options, recode = e.toSorted()
		it.reportKey(r)
		return recode
	}
	if largest, ok := e.numeric(); ok {
		it.MaxScore = max(1, largest)
		if keys && largest >= 0 {
			r.problems.add(scoreAssumed, it.file, it.row, shown(it.ID),
				"other items have keys and this one has neither key, options nor max_score; its answers are whole numbers and were taken as scores. Declare max_score, or the key if they are choices")
		}
		return e.toScores()
	}
	r.choiceWithoutKey(it)
	var recode *recoding
	it.MaxScore, it.KeyMissing = 1, true
	it.Options, recode = e.toSorted()
	return recode
}

// reportKey reports an item answered with choices that lacks a key, wholly or on some form.
func (it *item) reportKey(r *reading) {
	if len(it.Key) > 0 {
		return
	}
	if len(it.formKeys) == 0 {
		it.KeyMissing = true
		r.problems.add(keyMissing, it.file, it.row, shown(it.ID), "the item has options and no key; it gets no score and no result until its key is given")
		return
	}
	for _, f := range r.forms.forms {
		if e := f.byItem[it.ID]; e != nil && e.item == it && e.key == nil {
			r.problems.add(keyMissing, r.forms.name, e.row, shown(it.ID), "other forms have a key for this item and form %s has none; it gets no score on this form until its key is given", shown(f.id))
		}
	}
}

// choiceWithoutKey reports an item whose answers turned out to be choices.
func (r *reading) choiceWithoutKey(it *item) {
	var isNumber [256]bool
	for c, label := range it.enc.labels {
		_, isNumber[c] = plainInteger(label)
	}
	count, first := 0, int32(0)
	for i := range r.records.rows {
		if c := r.records.answers.Row(i)[it.index]; c <= dif.MaxCode && !isNumber[c] {
			if count == 0 {
				first = r.records.rows[i]
			}
			count++
		}
	}
	r.problems.add(choiceWithoutKey, r.responses.name, int(first), shown(it.ID),
		"%d answers, from this row on, are no scores, and the item has no key; it gets no score and no result. Give its key in the items file, or correct the answers", count)
}
